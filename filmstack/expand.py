"""Groups and sequences: what a person wrote -> one piece a layer, and back after thicknesses changed.

`files.design_file` -> here -> `filmstack.design`. Values stay plain: a material is still the text or
table of the file, so that nothing is lost on the way back.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

from filmstack.files.sequence import Items, parse_sequence

Entry: TypeAlias = Mapping[str, Any]
"""One entry of a list of layers: a layer, a group or a sequence."""


@dataclass(frozen=True, slots=True)
class Piece:
    """One layer of a design.

    Parameters
    ----------
    material : str or dict
        As written.
    thickness_nm, quarter_waves : float or None
        One of them, factors of a sequence included. [nm], [1]
    locked : bool
        A refinement must not change it.
    place : str
        Path of the key where it was written, for messages.
    """

    material: Any
    thickness_nm: float | None
    quarter_waves: float | None
    locked: bool
    place: str


def expand(entries: Sequence[Entry], letters: Mapping[str, Entry], place: str = "layer") -> list[Piece]:
    """Return the layers that entries stand for, in order.

    Parameters
    ----------
    entries : sequence of mapping
        Checked entries of a list of layers.
    letters : mapping
        Checked letters.
    place : str
        Path of the list, for messages.

    Returns
    -------
    list of Piece

    Examples
    --------
    >>> letters = {"H": {"material": "TiO2", "quarter_waves": 1}, "L": {"material": "SiO2", "quarter_waves": 1}}
    >>> [(piece.material, piece.quarter_waves) for piece in expand([{"sequence": "(H L)^2 0.5H"}], letters)]
    [('TiO2', 1.0), ('SiO2', 1.0), ('TiO2', 1.0), ('SiO2', 1.0), ('TiO2', 0.5)]
    """
    pieces: list[Piece] = []
    for number, entry in enumerate(entries, start=1):
        pieces += _pieces(entry, letters, f"{place}[{number}]")
    return pieces


def _pieces(entry: Entry, letters: Mapping[str, Entry], place: str) -> list[Piece]:
    if "sequence" in entry:
        return list(_spelled(parse_sequence(entry["sequence"]), letters, 1.0))
    if "layers" in entry:
        return expand(entry["layers"], letters, f"{place}.layers") * entry.get("repeat", 1)
    return [_piece(entry, 1.0, place)]


def _spelled(items: Items, letters: Mapping[str, Entry], factor: float) -> Iterator[Piece]:
    for item in items:
        scale = factor * item.factor
        if isinstance(item.body, str):
            yield from [_piece(letters[item.body], scale, f"letters.{item.body}")] * item.power
        else:
            yield from list(_spelled(item.body, letters, scale)) * item.power


def _piece(entry: Entry, factor: float, place: str) -> Piece:
    def scaled(name: str) -> float | None:
        return factor * float(entry[name]) if name in entry else None

    return Piece(entry["material"], scaled("thickness_nm"), scaled("quarter_waves"), entry.get("locked", False), place)


def fold(
    entries: Sequence[Entry],
    letters: Mapping[str, Entry],
    old_nm: Sequence[float],
    new_nm: Sequence[float],
) -> list[dict[str, Any]]:
    """Return entries that stand for the same layers with other thicknesses.

    An entry whose thicknesses are as before stays as it was written; a group whose repeats are still
    alike stays a group; of all else every layer is written out, in nm.

    Parameters
    ----------
    entries, letters
        As for `expand`.
    old_nm, new_nm : sequence of float
        Thickness of every layer before and after. [nm]

    Returns
    -------
    list of dict
    """
    folded: list[dict[str, Any]] = []
    first = 0
    for entry in entries:
        pieces = _pieces(entry, letters, "")
        part = slice(first, first + len(pieces))
        first += len(pieces)
        folded += _refolded(entry, letters, pieces, old_nm[part], new_nm[part])
    return folded


def _refolded(
    entry: Entry, letters: Mapping[str, Entry], pieces: Sequence[Piece], old: Sequence[float], new: Sequence[float]
) -> list[dict[str, Any]]:
    if list(old) == list(new):
        return [dict(entry)]
    if "layers" in entry:
        once = len(pieces) // entry.get("repeat", 1)
        repeats = [list(new[start : start + once]) for start in range(0, len(new), once)]
        if all(repeat == repeats[0] for repeat in repeats):
            return [{**entry, "layers": fold(entry["layers"], letters, old[:once], new[:once])}]
    return [_written(piece, thickness) for piece, thickness in zip(pieces, new, strict=True)]


def _written(piece: Piece, thickness_nm: float) -> dict[str, Any]:
    lock = {"locked": True} if piece.locked else {}
    return {"material": piece.material, "thickness_nm": float(thickness_nm), **lock}
