"""Kinds of values and tables of keys: a dictionary read from TOML -> checked plain values.

A `Key` has a name, a kind and a help text; a kind knows what it expects, in words, and reads a value:
it returns the value, or notes what is wrong in `Faults` and returns `WRONG`. All faults of a file
are so collected before any is told. A new kind is one class with `expected` and `read`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence, Set
from dataclasses import dataclass, field
from typing import Any, Final, Protocol

from filmstack.errors import FilmstackError, all_faults
from filmstack.files.hints import nearest

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
        """Raise one error that tells all faults, if there are any."""
        if self.found:
            raise all_faults(self.found)


class Kind(Protocol):
    """A kind of value: what is expected, in words, and how it is read."""

    @property
    def expected(self) -> str:
        """The value in words, such as "a length >= 0 nm"."""

    def read(self, value: Any, where: str, faults: Faults) -> Any:  # noqa: ANN401 - any value of TOML
        """Return the value if it is of this kind, else note the fault and return `WRONG`."""


@dataclass(frozen=True)
class Key:
    """One line of a table of keys.

    Parameters
    ----------
    name : str
        The key.
    kind : Kind
        What its value has to be.
    help : str
        What it means, for people.
    required : bool
        The table is not complete without it.
    """

    name: str
    kind: Kind
    help: str
    required: bool = False


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


@dataclass(frozen=True)
class Table:
    """A table with given keys.

    Parameters
    ----------
    what : str
        What it is, with its article, such as "a layer".
    keys : sequence of Key
        The keys it may have, in the order in which they are written.
    rule : callable, optional
        Check of several keys together: called as ``rule(values, where, faults)`` with the values that are right.
    """

    what: str
    keys: Sequence[Key]
    rule: Callable[[Mapping[str, Any], str, Faults], None] | None = None

    @property
    def expected(self) -> str:
        """The table in words."""
        return f"{self.what} (a table)"

    def read(self, value: object, where: str, faults: Faults) -> Any:  # noqa: ANN401 - a dict or WRONG
        """Return the values in the order of `keys`, or `WRONG`."""
        if not isinstance(value, dict):
            return faults.add(where, f"expected {self.expected}, got {told(value)}")
        before = len(faults.found)
        dot = f"{where}." if where else ""
        meant = self._unknown(value, dot, faults)
        values: dict[str, Any] = {}
        for key in self.keys:
            if key.name in value:
                read = key.kind.read(value[key.name], f"{dot}{key.name}", faults)
                values |= {} if read is WRONG else {key.name: read}
            elif key.required and key.name not in meant:
                faults.add(f"{dot}{key.name}", f"expected {key.kind.expected}, got none")
        if self.rule:
            self.rule(_Partly(values, value.keys() | meant), where, faults)
        return WRONG if len(faults.found) > before else values

    def _unknown(self, value: Mapping[str, Any], dot: str, faults: Faults) -> set[str]:
        """Note the unknown keys and return those that were probably meant."""
        known = [key.name for key in self.keys]
        left = [name for name in known if name not in value]
        meant: set[str] = set()
        for name in value:
            if name not in known:
                hint = nearest(name, left, "")
                faults.add(f"{dot}{name}", f"unknown key of {self.what}", hint or f"The keys are {', '.join(known)}")
                meant |= {key for key in left if hint == nearest(key, [key], "")}
        return meant


class _Partly(Mapping[str, Any]):
    """Right values of a table, which also knows which keys were written, rightly or wrongly (`in`)."""

    def __init__(self, right: Mapping[str, Any], written: Set[str]) -> None:
        self._right, self._written = right, written

    def __getitem__(self, name: str) -> Any:  # noqa: ANN401 - any value of TOML
        return self._right[name]

    def get(self, name: str, default: Any = None) -> Any:  # noqa: ANN401 - any value of TOML
        return self._right.get(name, default)

    def __contains__(self, name: object) -> bool:
        return name in self._written

    def __iter__(self) -> Iterator[str]:
        return iter(self._right)

    def __len__(self) -> int:
        return len(self._right)


@dataclass(frozen=True)
class Tables:
    """A list of tables of one kind, counted from 1 in messages.

    Parameters
    ----------
    what : str
        What it is, with its article, such as "a list of layers".
    of : callable
        Returns the kind of each; a function, so that tables may stand in themselves.
    empty : bool
        The list may be empty.
    """

    what: str
    of: Callable[[], Kind]
    empty: bool = True

    @property
    def expected(self) -> str:
        """The list in words."""
        return f"{self.what} (a list of tables)"

    def read(self, value: object, where: str, faults: Faults) -> object:
        """Return the list, or `WRONG`."""
        if not isinstance(value, list):
            double = f"Write [[{where}]]" if isinstance(value, dict) and "." not in where else ""
            return faults.add(where, f"expected {self.expected}, got {told(value)}", double)
        if not value and not self.empty:
            return faults.add(where, f"expected {self.what}, got an empty list")
        kind = self.of()
        read = [kind.read(item, f"{where}[{number}]", faults) for number, item in enumerate(value, start=1)]
        return WRONG if any(item is WRONG for item in read) else read


@dataclass(frozen=True)
class Named:
    """A table whose keys the person chooses, with values of one kind.

    Parameters
    ----------
    what : str
        What it is, with its article, such as "a table of letters".
    kind : Kind
        Kind of each value.
    name : str
        What a name has to be, in words.
    allows : callable
        Tells whether a name is that.
    """

    what: str
    kind: Kind
    name: str
    allows: Callable[[str], bool]

    @property
    def expected(self) -> str:
        """The table in words."""
        return self.what

    def read(self, value: object, where: str, faults: Faults) -> object:
        """Return the table, or `WRONG`."""
        if not isinstance(value, dict):
            return faults.add(where, f"expected {self.what}, got {told(value)}")
        before = len(faults.found)
        values = {}
        for name, item in value.items():
            if not self.allows(name):
                faults.add(where, f"expected {self.name}, got {name!r}")
            values[name] = self.kind.read(item, f"{where}.{name}", faults)
        return WRONG if len(faults.found) > before else values


def help_lines(keys: Sequence[Key], indent: str = "  ") -> list[str]:
    """Return a line a key: its name, what is expected, what it means.

    Parameters
    ----------
    keys : sequence of Key
        Keys of a table.
    indent : str
        Before each line.

    Returns
    -------
    list of str
    """
    width = max(len(key.name) for key in keys)
    return [
        f"{indent}{key.name:<{width}}  {key.kind.expected}{' (required)' if key.required else ''}: {key.help}"
        for key in keys
    ]
