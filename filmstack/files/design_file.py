"""Designs in files: the table of keys, and rules that several keys keep together.

A TOML file -> `read_design_file` -> `DesignFile` of checked plain values -> `filmstack.expand`,
`filmstack.design`. A new key is one line of a table below.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from filmstack.errors import DesignFileError
from filmstack.files.keys import (
    WRONG,
    Faults,
    Flag,
    Key,
    Kind,
    Named,
    Number,
    OneOrMany,
    Table,
    Tables,
    Text,
    help_lines,
    told,
)
from filmstack.files.sequence import SequenceError, count_layers, letters_of, parse_sequence
from filmstack.files.toml_file import read_toml

VERSION = 1
MOST_LAYERS = 100_000
_SIDES = {"layer": "sequence", "back_layer": "back_sequence"}
"""List of layers and the sequence that may stand in its place."""


@dataclass(frozen=True)
class _Material:
    """A name, key or path, or a table with a constant index."""

    expected: str = 'a material: a name such as "SiO2", a .csv file, or { n = 1.46, k = 0.0 }'

    def read(self, value: object, where: str, faults: Faults) -> object:
        if isinstance(value, dict):
            return _CONSTANT.read(value, where, faults)
        if isinstance(value, str) and value.strip():
            return value
        return faults.add(where, f"expected {self.expected}, got {told(value)}")


@dataclass(frozen=True)
class _Sequence:
    """A text that reads as a sequence; which letters there are is checked with the whole file."""

    expected: str = 'a sequence such as "(H L)^7 0.5H"'

    def read(self, value: object, where: str, faults: Faults) -> object:
        if not isinstance(value, str) or not value.strip():
            return faults.add(where, f"expected {self.expected}, got {told(value)}")
        try:
            parse_sequence(value)
        except SequenceError as fault:
            return faults.add(where, f"character {fault.place}: {fault.problem}", fault.advice)
        return value


def _one_thickness(values: Mapping[str, Any], where: str, faults: Faults) -> None:
    given = [name for name in ("thickness_nm", "quarter_waves") if name in values]
    if len(given) != 1:
        found = "both" if given else "neither"
        advice = "Remove one of them" if given else "Write one of them"
        faults.add(where, f"expected thickness_nm or quarter_waves, got {found}", advice)


def _one_shape(values: Mapping[str, Any], where: str, faults: Faults) -> None:
    """Check that an entry is a layer, or a group, or a sequence."""
    shapes = [name for name in _SHAPES if name in values]
    if not shapes and "repeat" in values:
        faults.add(f"{where}.layers", f"expected {GROUP[1].kind.expected}, got none")
        return
    if not shapes and any(key.name in values for key in LAYER):
        faults.add(f"{where}.material", f"expected {_MATERIAL.expected}, got none")
        shapes = ["material"]
    if len(shapes) != 1:
        found = " and ".join(shapes) or "none of them"
        faults.add(where, f"expected material (a layer), layers (a group) or sequence, got {found}")
        return
    shape = _SHAPES[shapes[0]]
    for name in _ENTRY_KEYS:
        if name in values and name not in shape.keys:
            faults.add(
                f"{where}.{name}", f"not a key of {shape.name}", _GROUP_ADVICE if name == "repeat" else shape.advice
            )
    if shapes[0] == "material":
        _one_thickness(values, where, faults)


@dataclass(frozen=True)
class _Shape:
    """One of the shapes of an entry: its name, its keys, where other keys belong."""

    name: str
    keys: frozenset[str]
    advice: str = ""


_CONSTANT = Table(
    "a constant index",
    (
        Key("n", Number("an index", least=0.0), "refractive index", required=True),
        Key("k", Number("an extinction coefficient", least=0.0), "extinction coefficient, absent: 0"),
    ),
)
_MATERIAL = _Material()
LAYER = (
    Key("material", _MATERIAL, "medium of the film", required=True),
    Key("thickness_nm", Number("a length", "nm", least=0.0), "physical thickness; this or quarter_waves"),
    Key(
        "quarter_waves",
        Number("a number of quarter waves", least=0.0),
        "optical thickness in quarter waves at the reference wavelength and angle; this or thickness_nm",
    ),
    Key("locked", Flag(), "a refinement must not change the thickness"),
)
"""Keys of a layer, and of a letter."""

GROUP = (
    Key(
        "repeat",
        Number("a whole number of repeats", least=1, most=MOST_LAYERS, whole=True),
        "how often the group stands in a row, absent: once",
    ),
    Key(
        "layers",
        Tables("a list of layers", lambda: ENTRY, empty=False),
        "the layers of the group, groups and sequences among them",
    ),
)
"""Keys of a group in the place of a layer."""

SEQUENCE = (Key("sequence", _Sequence(), "layers in the textbooks' way of writing; the letters stand in [letters]"),)
"""Key of a sequence in the place of a layer."""

ENTRY: Kind = Table("a layer", [Key(key.name, key.kind, key.help) for key in (*LAYER, *GROUP, *SEQUENCE)], _one_shape)
_SHAPES = {
    "material": _Shape("a layer", frozenset(key.name for key in LAYER)),
    "layers": _Shape("a group", frozenset(key.name for key in GROUP), "Write it in each layer of the group"),
    "sequence": _Shape("a sequence", frozenset(key.name for key in SEQUENCE), "Write it in the letters"),
}
_ENTRY_KEYS = [key.name for key in (*LAYER, *GROUP, *SEQUENCE)]
_LETTER = Table("a letter", LAYER, _one_thickness)


def _is_letter(name: str) -> bool:
    return len(name) == 1 and name.isascii() and name.isalpha()


@dataclass(frozen=True)
class _Version:
    """The number of the file format."""

    expected: str = f"filmstack = {VERSION}, the version of the file format, as the first line"

    def read(self, value: object, where: str, faults: Faults) -> object:
        if isinstance(value, int) and not isinstance(value, bool) and value == VERSION:
            return value
        newer = isinstance(value, int | float) and value > VERSION
        advice = "Read this file with a newer filmstack" if newer else ""
        return faults.add(where, f"expected version {VERSION} of the file format, got {told(value)}", advice)


def _whole_file(values: Mapping[str, Any], where: str, faults: Faults) -> None:
    for layers, sequence in _SIDES.items():
        if layers in values and sequence in values:
            faults.add(
                sequence,
                f"expected {sequence} or {layers}, got both",
                f"Write the sequence as one of the layers: [[{layers}]] with sequence = ...",
            )
    if "substrate_thickness_mm" in values:
        if "exit" not in values:
            faults.add("exit", "expected the medium behind the plate, got none", 'Write exit = "air" or another medium')
    else:
        for name in ("exit", "back_layer", "back_sequence"):
            if name in values:
                faults.add(name, "expected substrate_thickness_mm beside it, got none", _PLATE_ADVICE)
    _letters(values, faults)
    for side, sequence in _SIDES.items():
        entries = side_entries(values, side)
        if entries and _count(entries) > MOST_LAYERS:
            place = side if side in values else sequence
            faults.add(place, f"expected at most {MOST_LAYERS:,} layers, got {_count(entries):,}")


_GROUP_ADVICE = "Write a group: repeat = ... and layers = [{ ... }]"
_PLATE_ADVICE = "Without it the substrate is semi-infinite: light ends in it"


def _letters(values: Mapping[str, Any], faults: Faults) -> None:
    """Check that the letters used are defined, and the letters defined used."""
    letters = values.get("letters", {})
    used: dict[str, None] = {}
    for where, text in _sequences(values):
        for letter in letters_of(parse_sequence(text)):
            used[letter] = None
            if letter not in letters and not _is_faulty(values, "letters"):
                advice = f"Write {letter} = {{ material = ..., thickness_nm = ... }} under [letters]"
                faults.add(where, f"the letter {letter} is not defined", advice)
    all_read = not any(_is_faulty(values, name) for names in _SIDES.items() for name in names)
    for letter in letters:
        if letter not in used and all_read:
            faults.add(f"letters.{letter}", "no sequence uses this letter", "Remove it")


def _is_faulty(values: Mapping[str, Any], name: str) -> bool:
    return name in values and values.get(name) is None


def _sequences(values: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    for side, sequence in _SIDES.items():
        if values.get(sequence):
            yield sequence, values[sequence]
        yield from _inner_sequences(values.get(side, ()), side)


def _inner_sequences(entries: Sequence[Mapping[str, Any]], where: str) -> Iterator[tuple[str, str]]:
    for number, entry in enumerate(entries, start=1):
        if "sequence" in entry:
            yield f"{where}[{number}].sequence", entry["sequence"]
        yield from _inner_sequences(entry.get("layers", ()), f"{where}[{number}].layers")


def _count(entries: Sequence[Mapping[str, Any]]) -> int:
    return sum(
        entry.get("repeat", 1) * _count(entry["layers"])
        if "layers" in entry
        else count_layers(parse_sequence(entry["sequence"]))
        if "sequence" in entry
        else 1
        for entry in entries
    )


DESIGN = Table(
    "a design",
    (
        Key("filmstack", _Version(), "version of the file format", required=True),
        Key("name", Text(), "name for people", required=True),
        Key("description", Text(), "purpose and expected performance"),
        Key("parent", Text(), "file of the design that this one was made from"),
        Key("parent_sha256", Text(), "hash of that file when it was read"),
        Key(
            "reference_wavelength_nm",
            Number("a wavelength", "nm", above=0.0),
            "vacuum wavelength of quarter waves",
            required=True,
        ),
        Key(
            "reference_angle_deg",
            Number("an angle", "degrees", least=0.0, most=90.0),
            "angle of incidence of quarter waves, absent: 0",
        ),
        Key(
            "incident_angle_deg",
            OneOrMany(Number("an angle", "degrees", least=0.0, most=90.0)),
            "angles of incidence when no others are asked for, absent: 0",
        ),
        Key("incident", _MATERIAL, "medium that the light comes through", required=True),
        Key("substrate", _MATERIAL, "medium behind the layers", required=True),
        Key(
            "substrate_thickness_mm",
            Number("a length", "mm", above=0.0),
            "thickness of the substrate, a plane-parallel plate; absent: it is semi-infinite",
        ),
        Key("exit", _MATERIAL, "medium behind the plate; with substrate_thickness_mm only"),
        Key("sequence", _Sequence(), "all layers in the textbooks' way of writing, in the place of [[layer]]"),
        Key("back_sequence", _Sequence(), "the same for the back face, in the place of [[back_layer]]"),
        Key(
            "materials",
            Named("a table of materials", _MATERIAL, "a name that is not blank", lambda name: bool(name.strip())),
            "names of your own for materials, files and constant indices",
        ),
        Key(
            "letters",
            Named("a table of letters", _LETTER, "a name of one letter, A to Z or a to z", _is_letter),
            "layers that the letters of sequences stand for",
        ),
        Key("layer", Tables("a list of layers", lambda: ENTRY), "the layers, in the order the light meets them"),
        Key(
            "back_layer",
            Tables("a list of layers", lambda: ENTRY),
            "the layers behind the plate, in the order the light meets them",
        ),
    ),
    _whole_file,
)
"""All keys of a design file, in the order in which they are written."""


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
    if _Version().read(version, "filmstack", faults) is WRONG:
        faults.raise_all()
    values = DESIGN.read(read.table, "", faults)
    return DesignFile(None if values is WRONG else values, read.table, read.sha256, faults)


def side_entries(values: Mapping[str, Any], side: str) -> list[dict[str, Any]]:
    """Return the entries of one face: its list of layers, or its sequence as the only entry.

    Parameters
    ----------
    values : mapping
        Values of a design file.
    side : {"layer", "back_layer"}
        Which face.

    Returns
    -------
    list of dict
    """
    sequence = values.get(_SIDES[side])
    return [{"sequence": sequence}] if sequence else list(values.get(side, ()))


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
        if value is not None and _MATERIAL.read(value, where, unheard) is not WRONG:
            yield where, value

    for name in ("incident", "substrate", "exit"):
        yield from right(written.get(name), name)
    for name in ("materials", "letters"):
        table = written.get(name)
        for key, value in table.items() if isinstance(table, dict) else ():
            medium = value if name == "materials" else value.get("material") if isinstance(value, dict) else None
            yield from right(medium, f"letters.{key}.material" if name == "letters" else f"materials.{key}")
    for side in _SIDES:
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
    for side in _SIDES:
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
    used = {letter for _, text in _sequences(values) for letter in letters_of(parse_sequence(text))}
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
            *help_lines(_CONSTANT.keys),
        ]
    )
