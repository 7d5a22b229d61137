"""Kinds of values in files: a value read from TOML -> the same value, checked, or a fault.

A kind knows what it expects, in words, and reads a value: it returns the value, or notes what is wrong
in `Faults` and returns `WRONG`. All faults of a file are so collected before any is told. A new kind is
one class with `expected` and `read`; `filmstack.files.keys` puts them into tables.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any, Final, Protocol

from filmstack.errors import FilmstackError, all_faults

WRONG: Final = object()
"""What a kind returns for a value that it has complained about."""


@dataclass
class Faults:
    """What is wrong with a file, collected.

    Parameters
    ----------
    file : str
        Name of the file, as the person gave it.
    error : type of FilmstackError
        Kind of the error that tells the faults.
    """

    file: str
    error: type[FilmstackError]
    found: list[FilmstackError] = field(default_factory=list)

    def add(self, where: str, problem: str, advice: str = "") -> object:
        """Note one fault and return `WRONG`.

        Parameters
        ----------
        where : str
            Path of the key, such as ``layer[2].thickness_nm``.
        problem, advice : str
            What was expected and found, and what to do.
        """
        self.found.append(self.error(f"{self.file}: {where}", problem, advice))
        return WRONG

    def raise_all(self) -> None:
        """Raise one error that tells all faults, each once, if there are any."""
        if self.found:
            raise all_faults(list({str(fault): fault for fault in self.found}.values()))


class Kind(Protocol):
    """A kind of value: what is expected, in words, and how it is read."""

    @property
    def expected(self) -> str:
        """The value in words, such as "a length >= 0 nm"."""

    def read(self, value: Any, where: str, faults: Faults) -> Any:  # noqa: ANN401 - any value of TOML
        """Return the value if it is of this kind, else note the fault and return `WRONG`."""


def told(value: object, unit: str = "") -> str:
    """Return a value of a TOML file in words, for "got ...".

    Parameters
    ----------
    value : object
        What was found.
    unit : str
        Unit to put behind a number.

    Returns
    -------
    str

    Examples
    --------
    >>> told(-12.5, "nm"), told("550"), told(True), told({})
    ('-12.5 nm', "the text '550'", 'true', 'an empty table')
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return f"{_number(value)} {unit}".rstrip()
    if isinstance(value, str):
        shown = value if len(value) <= 60 else f"{value[:57]}..."
        return f"the text {shown!r}"
    if isinstance(value, list | dict):
        name = "list" if isinstance(value, list) else "table"
        return f"a {name}" if value else f"an empty {name}"
    return f"the {type(value).__name__} {value}"


def _number(value: float) -> str:
    if isinstance(value, int):
        return str(value) if abs(value) < 10**15 else f"a number of {len(str(abs(value)))} digits"
    return f"{value:.9g}"


@dataclass(frozen=True)
class Text:
    """A text that is not blank."""

    expected: str = "a text"

    def read(self, value: object, where: str, faults: Faults) -> object:
        """Return the text, or `WRONG`."""
        if isinstance(value, str) and value.strip():
            return value
        return faults.add(where, f"expected {self.expected}, got {told(value)}", _quotes(value))


def _quotes(value: object) -> str:
    plain = isinstance(value, int | float) and not isinstance(value, bool)
    return "Put it in quotation marks" if plain else ""


@dataclass(frozen=True)
class Flag:
    """True or false."""

    expected: str = "true or false"

    def read(self, value: object, where: str, faults: Faults) -> object:
        """Return the flag, or `WRONG`."""
        if isinstance(value, bool):
            return value
        advice = "Leave out the quotation marks" if value in ("true", "false") else ""
        return faults.add(where, f"expected {self.expected}, got {told(value)}", advice)


@dataclass(frozen=True)
class Number:
    """A finite number with a unit and limits.

    Parameters
    ----------
    what : str
        What it measures, with its article, such as "a length".
    unit : str
        Unit, empty for none.
    above, least, most : float
        Limits: larger than `above`, not smaller than `least`, not larger than `most`.
    whole : bool
        Only integers.
    """

    what: str
    unit: str = ""
    above: float = -math.inf
    least: float = -math.inf
    most: float = math.inf
    whole: bool = False

    @property
    def expected(self) -> str:
        """The number in words."""
        unit = f" {self.unit}" if self.unit else ""
        if math.isfinite(self.above):
            return f"{self.what} > {self.above:g}{unit}"
        if math.isfinite(self.most):
            return f"{self.what} from {self.least:.15g} to {self.most:.15g}{unit}"
        return f"{self.what} >= {self.least:g}{unit}"

    def read(self, value: object, where: str, faults: Faults) -> object:
        """Return the number, or `WRONG`."""
        kinds = int if self.whole else int | float
        if isinstance(value, kinds) and not isinstance(value, bool) and self._allows(value):
            return value
        return faults.add(where, f"expected {self.expected}, got {told(value, self.unit)}", self._advice(value))

    def _allows(self, value: float) -> bool:
        try:
            number = float(value)
        except OverflowError:
            return False
        return math.isfinite(number) and number > self.above and self.least <= number <= self.most

    def _advice(self, value: object) -> str:
        if isinstance(value, str):
            return "Leave out the quotation marks" if _reads_as_number(value) else ""
        if isinstance(value, int | float) and not isinstance(value, bool) and self._allows(-value):
            return "Correct the sign"
        return ""


def _reads_as_number(text: str) -> bool:
    try:
        return math.isfinite(float(text))
    except ValueError:
        return False


@dataclass(frozen=True)
class OneOrMany:
    """A value of a kind, or a list of several.

    Parameters
    ----------
    kind : Kind
        Kind of each.
    """

    kind: Kind

    @property
    def expected(self) -> str:
        """The values in words."""
        return f"{self.kind.expected}, or a list of such"

    def read(self, value: object, where: str, faults: Faults) -> object:
        """Return the value or list, or `WRONG`."""
        if not isinstance(value, list):
            return self.kind.read(value, where, faults)
        if not value:
            return faults.add(where, f"expected {self.expected}, got an empty list")
        read = [self.kind.read(item, f"{where}[{number}]", faults) for number, item in enumerate(value, start=1)]
        return WRONG if WRONG in read else read
