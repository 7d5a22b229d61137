"""Tables of keys: a dictionary read from TOML -> checked plain values in a steady order.

A `Key` has a name, a kind and a help text; a `Table` has keys and may have a rule that several of
them keep together. Reading, hints for unknown keys, help texts and the order of writing follow.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence, Set
from dataclasses import dataclass
from typing import Any

from filmstack.files.hints import nearest
from filmstack.files.kinds import WRONG, Faults, Kind, told


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
    elsewhere : callable, optional
        Advice on a key that belongs into another table, or an empty text.
    """

    what: str
    keys: Sequence[Key]
    rule: Callable[[Mapping[str, Any], str, Faults], None] | None = None
    elsewhere: Callable[[str], str] = lambda name: ""

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
            if name not in known and self.elsewhere(name):
                faults.add(f"{dot}{name}", f"not a key of {self.what}", self.elsewhere(name))
            elif name not in known:
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
    """Return a line a key: its name, what it means, what is expected.

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
        f"{indent}{key.name:<{width}}  {key.help} ({key.kind.expected}{'; required' if key.required else ''})"
        for key in keys
    ]
