"""Design files: a TOML file -> checked plain values, and what is asked of such values.

`design_keys` -> here -> `filmstack.expand`, `filmstack.design`.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from filmstack.errors import DesignFileError
from filmstack.files.design_keys import (
    CONSTANT,
    DESIGN,
    GROUP,
    LAYER,
    MATERIAL,
    SEQUENCE,
    SIDES,
    VERSION,
    VERSION_NUMBER,
    sequences_of,
)
from filmstack.files.keys import help_lines
from filmstack.files.kinds import WRONG, Faults
from filmstack.files.sequence import letters_of, parse_sequence
from filmstack.files.toml_file import read_toml


@dataclass(frozen=True)
class DesignFile:
    """A design file, read.

    Parameters
    ----------
    values : dict or None
        Checked plain values in the order of `DESIGN`; None if there are faults.
    written : dict
        The dictionary as read, checked or not.
    sha256 : str
        Hash of the file.
    faults : Faults
        What is wrong so far.
    """

    values: dict[str, Any] | None
    written: dict[str, Any]
    sha256: str
    faults: Faults


def read_design_file(path: str | Path) -> DesignFile:
    """Read a design file and collect its faults.

    Parameters
    ----------
    path : str or Path
        The file.

    Returns
    -------
    DesignFile

    Raises
    ------
    DesignFileError
        If it can not be read at all, is no TOML, or of a newer version.
    """
    read = read_toml(path, DesignFileError)
    faults = Faults(str(path), DesignFileError)
    version = read.table.get("filmstack", VERSION)
    if VERSION_NUMBER.read(version, "filmstack", faults) is WRONG:
        faults.raise_all()
    values = DESIGN.read(read.table, "", faults)
    return DesignFile(None if values is WRONG else values, read.table, read.sha256, faults)


def material_places(written: Mapping[str, Any]) -> Iterator[tuple[str, Any]]:
    """Yield the path and value of every well-formed material of a design file, also of a faulty one.

    Parameters
    ----------
    written : mapping
        The dictionary as read.

    Yields
    ------
    (str, str or dict)
    """
    unheard = Faults("", DesignFileError)

    def right(value: object, where: str) -> Iterator[tuple[str, Any]]:
        if value is not None and MATERIAL.read(value, where, unheard) is not WRONG:
            yield where, value

    for name in ("incident", "substrate", "exit"):
        yield from right(written.get(name), name)
    for name in ("materials", "letters"):
        table = written.get(name)
        for key, value in table.items() if isinstance(table, dict) else ():
            medium = value if name == "materials" else value.get("material") if isinstance(value, dict) else None
            yield from right(medium, f"letters.{key}.material" if name == "letters" else f"materials.{key}")
    for side in SIDES:
        yield from _inner_materials(written.get(side), side, right)


def _inner_materials(entries: object, where: str, right: Any) -> Iterator[tuple[str, Any]]:  # noqa: ANN401 - see above
    for number, entry in enumerate(entries if isinstance(entries, list) else (), start=1):
        if isinstance(entry, dict):
            yield from right(entry.get("material"), f"{where}[{number}].material")
            yield from _inner_materials(entry.get("layers"), f"{where}[{number}].layers", right)


def with_materials(values: Mapping[str, Any], change: Callable[[Any], Any]) -> dict[str, Any]:
    """Return values of a design file with every material changed.

    Parameters
    ----------
    values : mapping
        Checked values.
    change : callable
        From a material as written to another.

    Returns
    -------
    dict
    """
    changed = dict(values)
    for name in ("incident", "substrate", "exit"):
        changed |= {name: change(values[name])} if name in values else {}
    if "materials" in values:
        changed["materials"] = {name: change(value) for name, value in values["materials"].items()}
    if "letters" in values:
        letters = values["letters"].items()
        changed["letters"] = {name: {**letter, "material": change(letter["material"])} for name, letter in letters}
    for side in SIDES:
        changed |= {side: _changed_entries(values[side], change)} if side in values else {}
    return changed


def _changed_entries(entries: Sequence[Mapping[str, Any]], change: Callable[[Any], Any]) -> list[dict[str, Any]]:
    return [
        {**entry, "layers": _changed_entries(entry["layers"], change)}
        if "layers" in entry
        else {**entry, "material": change(entry["material"])}
        if "material" in entry
        else dict(entry)
        for entry in entries
    ]


def in_order(values: Mapping[str, Any]) -> dict[str, Any]:
    """Return values of a design file in the order of `DESIGN`, without letters that no sequence uses.

    Parameters
    ----------
    values : mapping
        Checked values.

    Returns
    -------
    dict
    """
    used = {letter for _, text in sequences_of(values) for letter in letters_of(parse_sequence(text))}
    ordered = {key.name: values[key.name] for key in DESIGN.keys if key.name in values}
    letters = {name: letter for name, letter in values.get("letters", {}).items() if name in used}
    ordered |= {"letters": letters} if letters else {}
    if not letters:
        ordered.pop("letters", None)
    return ordered


def help_text() -> str:
    """Return the keys of a design file, a line each, with what is expected and what it means."""
    return "\n".join(
        [
            "Keys of a design file (TOML):",
            *help_lines(DESIGN.keys),
            "",
            "Keys of a layer in [[layer]] and [[back_layer]], and of a letter in [letters]:",
            *help_lines(LAYER),
            "",
            "Keys of a repeated group in the place of a layer:",
            *help_lines(GROUP),
            "",
            "Key of a sequence in the place of a layer:",
            *help_lines(SEQUENCE),
            "",
            "Keys of a constant index in the place of a material's name:",
            *help_lines(CONSTANT.keys),
        ]
    )
