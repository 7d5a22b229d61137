"""Design files named on a command line: all are read, and the faults of all are told at once."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from typing import TYPE_CHECKING

from filmstack.errors import FilmstackError, all_faults

if TYPE_CHECKING:
    from filmstack.design import Design


def load_designs(paths: Sequence[str]) -> list[Design]:
    """Return the designs of several files, or one error with the faults of all.

    Parameters
    ----------
    paths : sequence of str
        Design files.

    Returns
    -------
    list of Design

    Raises
    ------
    FilmstackError
        If a file is wrong.
    """
    from filmstack.design import load_design

    designs, faults = [], list[FilmstackError]()
    for path in paths:
        try:
            designs.append(load_design(path))
        except FilmstackError as fault:
            faults.append(fault)
    if faults:
        raise all_faults(faults)
    return designs


@contextmanager
def naming(path: str) -> Iterator[None]:
    """Tell the design file in an error of the work done within, which knows only the stack.

    Parameters
    ----------
    path : str
        The design file.

    Raises
    ------
    FilmstackError
        The error of the work, of the same kind, with the file before its place.
    """
    try:
        yield
    except FilmstackError as error:
        raise type(error)(f"{path}: {error.where}", error.problem, error.advice) from error
