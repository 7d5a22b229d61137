"""Keys of a design file, in one table, and the rules that several keys keep together.

A new key is one line of a table below; `filmstack.files.design_file` reads and writes by them.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from filmstack.files.keys import Key, Named, Table, Tables
from filmstack.files.kinds import Faults, Flag, Kind, Number, OneOrMany, Text, told
from filmstack.files.sequence import SequenceError, count_layers, letters_of, parse_sequence

VERSION = 1
MOST_LAYERS = 100_000
SIDES = {"layer": "sequence", "back_layer": "back_sequence"}
"""List of layers and the sequence that may stand in its place."""


@dataclass(frozen=True)
class _Material:
    """A name, key or path, or a table with a constant index."""

    expected: str = 'a material: a name such as "SiO2", a .csv file, or { n = 1.46, k = 0.0 }'

    def read(self, value: object, where: str, faults: Faults) -> object:
        if isinstance(value, dict):
            return CONSTANT.read(value, where, faults)
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
        faults.add(f"{where}.material", f"expected {MATERIAL.expected}, got none")
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


CONSTANT = Table(
    "a constant index",
    (
        Key("n", Number("an index", least=0.0), "refractive index", required=True),
        Key("k", Number("an extinction coefficient", least=0.0), "extinction coefficient, absent: 0"),
    ),
)
MATERIAL = _Material()
LAYER = (
    Key("material", MATERIAL, "medium of the film", required=True),
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

ENTRY: Kind = Table(
    "a layer",
    [Key(key.name, key.kind, key.help) for key in (*LAYER, *GROUP, *SEQUENCE)],
    _one_shape,
    lambda name: _design_key_advice(name),
)
_SHAPES = {
    "material": _Shape("a layer", frozenset(key.name for key in LAYER)),
    "layers": _Shape("a group", frozenset(key.name for key in GROUP), "Write it in each layer of the group"),
    "sequence": _Shape("a sequence", frozenset(key.name for key in SEQUENCE), "Write it in the letters"),
}
_ENTRY_KEYS = [key.name for key in (*LAYER, *GROUP, *SEQUENCE)]
_LETTER = Table("a letter", LAYER, _one_thickness, lambda name: _design_key_advice(name))


def _design_key_advice(name: str) -> str:
    """Advice on a key of the design in a layer: in TOML all keys below a heading belong to it."""
    misplaced = any(key.name == name for key in DESIGN.keys)
    return "It is a key of the design: write it above the first heading in brackets" if misplaced else ""


def _layer_key_advice(name: str) -> str:
    misplaced = name in _ENTRY_KEYS
    return "It is a key of a layer: write it below [[layer]]" if misplaced else ""


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
        if isinstance(value, float) and value == VERSION:
            return faults.add(
                where, f"expected the whole number {VERSION}, got {value!r}", "Leave the decimal point out"
            )
        return faults.add(where, f"expected version {VERSION} of the file format, got {told(value)}", advice)


VERSION_NUMBER = _Version()


def _whole_file(values: Mapping[str, Any], where: str, faults: Faults) -> None:
    for layers, sequence in SIDES.items():
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
    for side, sequence in SIDES.items():
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
    for where, text in sequences_of(values):
        for letter in letters_of(parse_sequence(text)):
            used[letter] = None
            if letter not in letters and not _is_faulty(values, "letters"):
                advice = f"Write {letter} = {{ material = ..., thickness_nm = ... }} under [letters]"
                faults.add(where, f"the letter {letter} is not defined", advice)
    all_read = not any(_is_faulty(values, name) for names in SIDES.items() for name in names)
    for letter in letters:
        if letter not in used and all_read:
            faults.add(f"letters.{letter}", "no sequence uses this letter", "Remove it")


def _is_faulty(values: Mapping[str, Any], name: str) -> bool:
    return name in values and values.get(name) is None


def sequences_of(values: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    """Yield the path and text of every sequence of a design file.

    Parameters
    ----------
    values : mapping
        Checked values.

    Yields
    ------
    (str, str)
    """
    for side, sequence in SIDES.items():
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
        Key("filmstack", VERSION_NUMBER, "version of the file format", required=True),
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
        Key("incident", MATERIAL, "medium that the light comes through", required=True),
        Key("substrate", MATERIAL, "medium behind the layers", required=True),
        Key(
            "substrate_thickness_mm",
            Number("a length", "mm", above=0.0),
            "thickness of the substrate, a plane-parallel plate; absent: it is semi-infinite",
        ),
        Key("exit", MATERIAL, "medium behind the plate; with substrate_thickness_mm only"),
        Key("sequence", _Sequence(), "all layers in the textbooks' way of writing, in the place of [[layer]]"),
        Key("back_sequence", _Sequence(), "the same for the back face, in the place of [[back_layer]]"),
        Key(
            "materials",
            Named("a table of materials", MATERIAL, "a name that is not blank", lambda name: bool(name.strip())),
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
    _layer_key_advice,
)
"""All keys of a design file, in the order in which they are written."""


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
    sequence = values.get(SIDES[side])
    return [{"sequence": sequence}] if sequence else list(values.get(side, ()))
