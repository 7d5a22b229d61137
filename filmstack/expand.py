"""From what a person wrote to a stack, and back: groups, sequences, quarter waves, names of materials.

`files.design_file` -> here -> `filmstack.design`. A layer of q quarter waves has the thickness
q lambda / (4 kappa), kappa = sqrt(n^2 - (n0 sin theta)^2), with the real parts of the indices at the
reference wavelength and angle. On the way back a material is still the text or table of the file.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, TypeAlias

from filmstack.errors import ArgumentError, MaterialFileError, MaterialNotFoundError
from filmstack.files.design_file import DesignFile, material_places
from filmstack.files.design_keys import SIDES, side_entries
from filmstack.files.sequence import Items, parse_sequence
from filmstack.materials.material import Material
from filmstack.materials.models.constant import constant
from filmstack.stack import Layer, Plate, Stack
from filmstack.wave.angles import sine_degrees

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


def stack_values(stack: Stack, name_of: Callable[[Material], Any]) -> dict[str, Any]:
    """Return the values of a design file for a stack, a layer an entry.

    Parameters
    ----------
    stack : Stack
        With one thick plate at most.
    name_of : callable
        What the file says for a material.

    Returns
    -------
    dict

    Raises
    ------
    ArgumentError
        If there are several plates.
    """
    media = {"incident": name_of(stack.incident)}
    if not stack.plates:
        return {**media, "substrate": name_of(stack.exit), "layer": _entries(stack.layers, name_of)}
    if len(stack.plates) > 1:
        found = f"got {len(stack.plates)} plates"
        raise ArgumentError(f"design: expected a stack with one thick plate at most, as in a design file, {found}")
    place = next(place for place, layer in enumerate(stack.layers) if isinstance(layer, Plate))
    back = _entries(stack.layers[place + 1 :], name_of)
    return {
        **media,
        "substrate": name_of(stack.plates[0].material),
        "substrate_thickness_mm": stack.plates[0].thickness_mm,
        "exit": name_of(stack.exit),
        "layer": _entries(stack.layers[:place], name_of),
        **({"back_layer": back} if back else {}),
    }


def _entries(layers: Sequence[Layer | Plate], name_of: Callable[[Material], Any]) -> list[dict[str, Any]]:
    return [
        {
            "material": name_of(layer.material),
            "thickness_nm": layer.thickness_nm,
            **({"locked": True} if layer.locked else {}),
        }
        for layer in layers
        if isinstance(layer, Layer)
    ]


def normal_wavenumber(material: Material, incident: Material, wavelength_nm: float, angle_deg: float) -> float:
    """Return sqrt(n^2 - (n0 sin theta)^2) of the real parts of the indices, nan where light is evanescent.

    Parameters
    ----------
    material, incident : Material
        The film and the medium that the angle is measured in.
    wavelength_nm : float
        Vacuum wavelength. [nm]
    angle_deg : float
        Angle of incidence. [deg]

    Returns
    -------
    float
        The normal component of the wave vector over that in vacuum. [1]
    """
    n, n0 = (float(medium.index(wavelength_nm).real) for medium in (material, incident))
    along = n0 * sine_degrees(angle_deg)
    return math.sqrt((n - along) * (n + along)) if n > along else math.nan


def _identity(value: str | dict[str, float]) -> str:
    """Return a text that is the same for all ways to write the same material."""
    return value if isinstance(value, str) else json.dumps([float(value["n"]), float(value.get("k", 0.0))])


class Media:
    """The materials of a file: from what is written to `Material`, each made once.

    Parameters
    ----------
    file : DesignFile
        The file; what is wrong with its materials is added to its faults.
    folder : Path
        Where names of files start from.
    """

    def __init__(self, file: DesignFile, folder: Path) -> None:
        self._file, self._folder, self._known = file, folder, dict[str, Material]()
        self.faults = file.faults
        own = file.written.get("materials")
        self._own: Mapping[str, Any] = own if isinstance(own, dict) else {}
        seen: set[str] = set()
        for place, value in material_places(file.written):
            name = _identity(value)
            own = isinstance(value, str) and value in self._own and not place.startswith("materials.")
            if name not in seen and not own:
                seen.add(name)
                self._resolve(place, value)

    def __getitem__(self, value: str | dict[str, float]) -> Material:
        """Return the material of a value that was read without a fault."""
        if isinstance(value, str) and value in self._own:
            value = self._own[value]
        return self._known[_identity(value)]

    def names(self) -> dict[Material, Any]:
        """Return what the file says for each material, names of the person's own first."""
        names: dict[Material, Any] = {self[name]: name for name in self._own}
        for _, value in material_places(self._file.written):
            names.setdefault(self[value], value)
        return names

    def check_reference(self, values: Mapping[str, Any]) -> None:
        """Note each material in use whose data do not hold at the reference wavelength."""
        wavelength = float(values["reference_wavelength_nm"])
        used = [self[value] for place, value in material_places(values) if not place.startswith("materials.")]
        for material in dict.fromkeys(used):
            low, high = material.range_nm
            if not low <= wavelength <= high:
                self.faults.add(
                    "reference_wavelength_nm",
                    f"expected a wavelength inside the data of {material.label}, {low:g} to {high:g} nm, "
                    f"got {wavelength:g} nm",
                    "Choose another source of this material",
                )
        self.faults.raise_all()

    def _resolve(self, place: str, value: str | dict[str, float]) -> None:
        try:
            self._known[_identity(value)] = self._made(value)
        except (MaterialNotFoundError, MaterialFileError) as error:
            lines = [f"{self.faults.file}: {place}: {line}" for line in str(error).splitlines()]
            fault = type(error)("\n".join(lines))
            self.faults.found.append(fault)

    def _made(self, value: str | dict[str, float]) -> Material:
        if isinstance(value, dict):
            return constant(value["n"], value.get("k", 0.0))
        from filmstack.materials.library import material

        return material(value, folder=self._folder)


def make_stack(values: Mapping[str, Any], media: Media) -> Stack:
    """Return the stack of a design file, noting in the faults of `media` where a quarter wave has no thickness.

    Parameters
    ----------
    values : mapping
        Checked values of the file.
    media : Media
        Its materials.

    Returns
    -------
    Stack
    """
    incident, substrate = media[values["incident"]], media[values["substrate"]]
    front, back = (_films(values, side, media) for side in SIDES)
    if "substrate_thickness_mm" not in values:
        return Stack(incident, front, substrate)
    plate = Plate(substrate, values["substrate_thickness_mm"])
    return Stack(incident, [*front, plate, *back], media[values["exit"]])


def _films(values: Mapping[str, Any], side: str, media: Media) -> list[Layer]:
    """Return the films of one face, noting where a quarter wave has no thickness."""
    pieces = expand(side_entries(values, side), values.get("letters", {}), side)
    made: dict[Piece, Layer] = {}
    films = []
    for piece in pieces:
        key = replace(piece, material=_identity(piece.material))
        if key not in made:
            made[key] = _film(piece, values, media)
        films.append(made[key])
    return films


def _film(piece: Piece, values: Mapping[str, Any], media: Media) -> Layer:
    material = media[piece.material]
    if piece.thickness_nm is not None:
        return Layer(material, piece.thickness_nm, piece.locked)
    wavelength = float(values["reference_wavelength_nm"])
    angle = float(values.get("reference_angle_deg", 0.0))
    kappa = normal_wavenumber(material, media[values["incident"]], wavelength, angle)
    if math.isnan(kappa):  # no quarter wave of an evanescent field
        media.faults.add(
            f"{piece.place}.quarter_waves",
            f"expected a layer that light passes at the reference angle, but at {angle:g} degrees it is totally "
            f"reflected by {material.label}",
            "Write thickness_nm",
        )
        return Layer(material, 0.0)
    thickness = (piece.quarter_waves or 0.0) * wavelength / (4.0 * kappa)
    if math.isinf(thickness):
        media.faults.add(f"{piece.place}.quarter_waves", f"expected a finite thickness, got {thickness:g} nm")
        return Layer(material, 0.0)
    return Layer(material, thickness, piece.locked)
