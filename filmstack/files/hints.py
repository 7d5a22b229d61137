"""Hints for words that are not known: what could have been meant."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches


def nearest(word: str, known: Iterable[str], otherwise: str) -> str:
    """Return "Did you mean X?" for the known name nearest to `word`, or what to say if none is near.

    Parameters
    ----------
    word : str
        What was found.
    known : iterable of str
        What could have been meant.
    otherwise : str
        Advice if no known name is near.

    Returns
    -------
    str
        Advice for an error message.

    Examples
    --------
    >>> nearest("spectum", ["show", "spectrum"], "See the list")
    'Did you mean spectrum?'
    >>> nearest("xyz", ["show", "spectrum"], "See the list")
    'See the list'
    """
    close = get_close_matches(word, list(known), n=1)
    return f"Did you mean {close[0]}?" if close else otherwise
