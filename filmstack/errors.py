"""Errors of the program: where, what was expected and found, what to do.

`filmstack.cli.main` turns any `FilmstackError` into one message and exit status 2. Few children:
add one only where a caller would want to catch it alone.
"""

from __future__ import annotations

from collections.abc import Sequence


class FilmstackError(Exception):
    """Base of all errors with a message for the user.

    Parameters
    ----------
    where : str
        Place of the fault (file and key, or argument), or the whole message if alone.
    problem : str, optional
        What was expected and what was found.
    advice : str, optional
        What to do about it.
    """

    def __init__(self, where: str, problem: str = "", advice: str = "") -> None:
        message = f"{where}: {problem}" if problem else where
        super().__init__(f"{message}. {advice}" if advice else message)
        self.where, self.problem, self.advice = where, problem, advice


class ArgumentError(FilmstackError, ValueError):
    """An argument of a public function is of the wrong kind, shape or range."""


class CoherenceError(FilmstackError, ValueError):
    """A phase or an amplitude was asked of a stack with a thick plate, which has none."""


class DesignFileError(FilmstackError):
    """A file that a person wrote (design, requirements, errors) breaks a rule of its kind."""


class MaterialFileError(FilmstackError):
    """A table of optical constants can not be read as such."""


class MaterialNotFoundError(FilmstackError, KeyError):
    """No material of that name in the library or beside the design."""

    __str__ = Exception.__str__


class MaterialRangeError(FilmstackError, ValueError):
    """An index was asked outside the wavelengths or temperatures that the source covers."""


def all_faults(faults: Sequence[FilmstackError]) -> FilmstackError:
    """Return one error of the first fault's kind that tells every fault, a line each."""
    if len(faults) == 1:
        return faults[0]
    return type(faults[0])("\n".join(str(fault) for fault in faults))
