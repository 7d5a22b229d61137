"""Sequences of layers as textbooks write them: "(H L)^7 0.5H" -> a tree of letters, factors and powers.

A letter stands for a layer, a factor before a letter or a parenthesis scales thickness, a power
behind either repeats it. Blanks are free. No layer is made here.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TypeAlias

MOST_NESTED = 50
_ADVICE = {
    "^": "Write a whole number and a blank behind ^",
    "/": "Write half a layer as 0.5H",
    "*": "Write a factor straight before the letter",
    ",": "Write a decimal point, not a comma",
    "-": "Factors and powers have no sign",
}
_TOKEN = re.compile(
    r"\s*(?:(?P<factor>[0-9]+\.?[0-9]*|\.[0-9]+)|(?P<power>\^\s*[0-9]+(?![0-9.]))|(?P<mark>[A-Za-z()]))"
)


@dataclass(frozen=True)
class Item:
    """A letter or a parenthesis with its factor and power.

    Parameters
    ----------
    body : str or tuple of Item
        A letter, or what stands in the parenthesis.
    factor : float
        Scale of every thickness.
    power : int
        How often it stands in a row.
    """

    body: str | tuple[Item, ...]
    factor: float = 1.0
    power: int = 1


Items: TypeAlias = tuple[Item, ...]


class SequenceError(ValueError):
    """A sequence that can not be read: where (from 1), what was expected and found, what to do."""

    def __init__(self, place: int, problem: str, advice: str = "") -> None:
        super().__init__(f"character {place}: {problem}")
        self.place, self.problem, self.advice = place, problem, advice


@dataclass
class _Open:
    """A parenthesis that is not closed yet."""

    place: int
    factor: float
    items: list[Item]


def parse_sequence(text: str) -> Items:
    """Return the tree of a sequence.

    Parameters
    ----------
    text : str
        Such as ``"(H L)^7 0.5H"``.

    Returns
    -------
    tuple of Item

    Raises
    ------
    SequenceError
        If it can not be read.

    Examples
    --------
    >>> [item.body for item in parse_sequence("2(H L) L")]
    [(Item(body='H', factor=1.0, power=1), Item(body='L', factor=1.0, power=1)), 'L']
    """
    reader = _Reader()
    for place, kind, word in _words(text):
        reader.take(place, kind, word)
    return reader.end()


class _Reader:
    """Takes the words of a sequence one by one and builds its tree."""

    def __init__(self) -> None:
        self._levels = [_Open(0, 1.0, [])]
        self._factor: tuple[int, float] | None = None  # place and value, until its letter comes
        self._may_be_powered = False

    def take(self, place: int, kind: str, word: str) -> None:
        """Take one word."""
        if kind == "power":
            self._take_power(place, word)
        elif kind == "factor":
            self._refuse_after_factor(place, word)
            self._factor = (place, _factor(word, place))
        elif word == "(":
            if len(self._levels) > MOST_NESTED:
                raise SequenceError(place, f"expected at most {MOST_NESTED} parentheses in one another")
            self._levels.append(_Open(place, self._use_factor(), []))
            self._may_be_powered = False
        elif word == ")":
            self._refuse_after_factor(place, repr(word))
            self._close(place)
        else:
            self._levels[-1].items.append(Item(word, self._use_factor()))
            self._may_be_powered = True

    def end(self) -> Items:
        """Return the tree once all words are taken."""
        if self._factor:
            self._refuse_after_factor(self._factor[0], "the end")
        if len(self._levels) > 1:
            raise SequenceError(self._levels[-1].place, "expected a closing parenthesis for this one, got none")
        return tuple(self._levels[0].items)

    def _use_factor(self) -> float:
        value = self._factor[1] if self._factor else 1.0
        self._factor = None
        return value

    def _refuse_after_factor(self, place: int, found: str) -> None:
        if self._factor:
            raise SequenceError(place, f"expected a letter or a parenthesis behind the factor, got {found}")

    def _take_power(self, place: int, word: str) -> None:
        if not self._may_be_powered or self._factor:
            raise SequenceError(place, "expected a letter or a parenthesis before the power")
        items = self._levels[-1].items
        items[-1] = Item(items[-1].body, items[-1].factor, _power(word, place))
        self._may_be_powered = False

    def _close(self, place: int) -> None:
        if len(self._levels) == 1:
            raise SequenceError(place, "expected an opening parenthesis before this one, got none")
        closed = self._levels.pop()
        if not closed.items:
            raise SequenceError(closed.place, "expected letters in the parentheses, got none")
        self._levels[-1].items.append(Item(tuple(closed.items), closed.factor))
        self._may_be_powered = True


def _words(text: str) -> Iterator[tuple[int, str, str]]:
    """Yield place (from 1), kind and text of each word of a sequence."""
    end = len(text.rstrip())
    at = 0
    while at < end:
        match = _TOKEN.match(text, at)
        if not match or text.startswith(",", match.end()):
            at = match.end() if match else at + len(text[at:]) - len(text[at:].lstrip())
            expected = "expected a letter, a factor, a power or a parenthesis"
            raise SequenceError(at + 1, f"{expected}, got {text[at]!r}", _ADVICE.get(text[at], ""))
        kind = str(match.lastgroup)
        yield match.start(kind) + 1, kind, match[kind]
        at = match.end()


def _factor(word: str, place: int) -> float:
    value = float(word)
    if not 0.0 < value < float("inf"):
        raise SequenceError(place, f"expected a factor > 0, got {word}", "Leave the layer out")
    return value


def _power(word: str, place: int) -> int:
    digits = word[1:].strip()
    value = int(digits) if len(digits) <= 9 else 10**9
    if value < 1:
        raise SequenceError(place, f"expected a power >= 1, got {digits}")
    return value


def letters_of(items: Items) -> dict[str, None]:
    """Return the letters of a sequence, each once, in the order met.

    Parameters
    ----------
    items : tuple of Item
        From `parse_sequence`.

    Returns
    -------
    dict of str to None
    """
    found: dict[str, None] = {}
    for item in items:
        found |= {item.body: None} if isinstance(item.body, str) else letters_of(item.body)
    return found


def count_layers(items: Items) -> int:
    """Return the number of layers that a sequence stands for.

    Parameters
    ----------
    items : tuple of Item
        From `parse_sequence`.

    Returns
    -------
    int
    """
    return sum(item.power * (1 if isinstance(item.body, str) else count_layers(item.body)) for item in items)
