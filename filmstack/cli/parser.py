"""The parser of a command: argparse, with one clear line for every wrong word.

`filmstack.cli.main` -> here -> the command module's `add_arguments`. Options are never abbreviated,
so that a script keeps its meaning when an option is added.
"""

from __future__ import annotations

import argparse
import math
import re
from collections.abc import Callable, Sequence
from typing import NoReturn, TypeAlias

from filmstack.errors import FilmstackError
from filmstack.files.hints import nearest

Options: TypeAlias = argparse.Namespace
"""What a command's `run` gets: one attribute an argument."""


class CommandParser(argparse.ArgumentParser):
    """Parser of one command, whose faults are `FilmstackError`.

    Parameters
    ----------
    prog : str
        The words before the arguments, such as "filmstack spectrum".
    description : str
        What the command does.
    """

    def __init__(self, prog: str, description: str) -> None:
        super().__init__(prog=prog, description=description, allow_abbrev=False)

    @property
    def _command(self) -> str:
        return self.prog.partition(" ")[2] or self.prog

    def error(self, message: str) -> NoReturn:
        """Raise a FilmstackError where argparse would print and exit."""
        option, found, rest = message.removeprefix("argument ").partition(": ")
        if message.startswith("argument ") and found:
            known = {"expected one argument": "expected one value, got none"}
            raise FilmstackError(option.split("/")[-1], known.get(rest, rest), f"See {self.prog} --help")
        missing = re.fullmatch("the following arguments are required: (.*)", message)
        if missing:
            raise FilmstackError(self._command, f"expected {missing[1]}, got none", f"See {self.prog} --help")
        raise FilmstackError(self._command, message, f"See {self.prog} --help")

    def parse_args(  # type: ignore[override]
        self, args: Sequence[str] | None = None, namespace: Options | None = None
    ) -> Options:
        """Return the options, or name the option nearest to an unknown one."""
        options, left = self.parse_known_args(args, namespace)
        if left:
            known = [text for action in self._actions for text in action.option_strings]
            word = next((text for text in left if text.startswith("-")), left[0])
            if word.startswith("-"):
                name = word.partition("=")[0]
                raise FilmstackError(
                    f"{self._command}: unknown option {name}", "", nearest(name, known, f"See {self.prog} --help")
                )
            raise FilmstackError(f"{self._command}: unexpected argument {word!r}", "", f"See {self.prog} --help")
        return options


def number_from(option: str, low: float, unit: str) -> Callable[[str], float]:
    """Return a converter that takes a finite number.

    Parameters
    ----------
    option : str
        Name of the option, for the message.
    low : float
        Smallest value allowed.
    unit : str
        Unit of the number.

    Returns
    -------
    callable
        For the `type` of an argument.
    """

    def convert(text: str) -> float:
        try:
            value = float(text)
        except ValueError:
            value = math.nan
        if not (math.isfinite(value) and value >= low):
            raise FilmstackError(option, f"expected a finite number >= {low:g} {unit}, got {text!r}")
        return value

    return convert


def one_of(option: str, *choices: str) -> Callable[[str], str]:
    """Return a converter that takes one of a few words.

    Parameters
    ----------
    option : str
        Name of the option, for the message.
    *choices : str
        The words allowed.

    Returns
    -------
    callable
        For the `type` of an argument.
    """
    allowed = f"{', '.join(choices[:-1])} or {choices[-1]}"

    def convert(text: str) -> str:
        if text not in choices:
            raise FilmstackError(option, f"expected {allowed}, got {text!r}", nearest(text, choices, ""))
        return text

    return convert
