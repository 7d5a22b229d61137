"""A stack with its name, reference wavelength and default angles: design file -> `Design` -> design file.

`files` and `expand` -> here -> `analysis`. Quarter waves become nm here: a layer of q quarter waves has
the thickness q lambda / (4 kappa), kappa = sqrt(n^2 - (n0 sin theta)^2), with the real parts of the
indices at the reference wavelength and angle. What the person wrote is kept and written back.
"""

from __future__ import annotations

import json
import math
import os
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from filmstack.errors import ArgumentError, FilmstackError, MaterialFileError, MaterialNotFoundError
from filmstack.expand import Piece, expand, fold
from filmstack.files.atomic import atomic_writer
from filmstack.files.design_file import (
    VERSION,
    DesignFile,
    in_order,
    material_places,
    read_design_file,
    side_entries,
    with_materials,
)
from filmstack.files.toml_file import toml_text
from filmstack.materials.material import Material
from filmstack.materials.models.constant import Constant, constant
from filmstack.stack import Layer, Plate, Stack

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray

_SIDES = {"layer": "sequence", "back_layer": "back_sequence"}


@dataclass(frozen=True)
class Written:
    """What a person wrote.

    Parameters
    ----------
    values : mapping
        Checked plain values of the file.
    folder : Path
        Where names of files in it start from.
    """

    values: Mapping[str, Any]
    folder: Path


@dataclass(frozen=True, eq=False)
class Design:
    """A stack with what a person says about it.

    Parameters
    ----------
    name : str
        Name for people.
    stack : Stack
        Media, layers and plate.
    reference_wavelength_nm : float
        Vacuum wavelength of quarter waves. [nm]
    reference_angle_deg : float
        Angle of incidence of quarter waves. [deg]
    incident_angle_deg : tuple of float
        Angles of incidence when no others are asked for. [deg]
    description : str
        Purpose and expected performance.
    path : Path, optional
        The file it was read from.
    sha256 : str
        Hash of that file when it was read.
    parent : Path, optional
        The file of the design that it was made from, where it was not read from a file itself.
    parent_sha256 : str
        Hash of that file.
    written : Written, optional
        What stands in the file; made from the stack if not given.
    """

    name: str
    stack: Stack
    reference_wavelength_nm: float
    reference_angle_deg: float = 0.0
    incident_angle_deg: tuple[float, ...] = (0.0,)
    description: str = ""
    path: Path | None = None
    sha256: str = ""
    parent: Path | None = None
    parent_sha256: str = ""
    written: Written | None = None

    @property
    def quarter_waves(self) -> FloatArray:
        """Optical thickness of each film in quarter waves, shape (layer,); nan where light is evanescent. [1]"""
        incident = self.stack.incident
        return np.array(
            [
                4.0 * film.thickness_nm * self._wavenumber(film.material, incident) / self.reference_wavelength_nm
                for film in self.stack.films
            ],
            dtype=float,
        )

    @property
    def parent_name(self) -> str:
        """File of the design that this one was made from, or an empty text."""
        if self.parent:
            return str(self.parent)
        return str(self.written.values.get("parent", "")) if self.written else ""

    def _wavenumber(self, material: Material, incident: Material) -> float:
        return normal_wavenumber(material, incident, self.reference_wavelength_nm, self.reference_angle_deg)

    def with_thickness(self, thickness_nm: ArrayLike) -> Design:
        """Return a design with other thicknesses, which names this one as its parent.

        Entries of the file whose thicknesses stay are kept as written; what changes is written in nm.

        Parameters
        ----------
        thickness_nm : array_like of float, shape (layer,)
            One thickness a film, those of the back face last. [nm]

        Returns
        -------
        Design

        Raises
        ------
        ArgumentError
            If the number of values is not the number of films, or one is negative or not finite.
        """
        stack = self.stack.with_thickness(thickness_nm)
        made = replace(self, stack=stack, written=None, path=None, sha256="")
        if self.path:
            made = replace(made, parent=self.path, parent_sha256=self.sha256)
        if not self.written:
            return made
        values = _refolded(self.written.values, self.stack.thickness_nm.tolist(), stack.thickness_nm.tolist())
        return replace(made, written=replace(self.written, values=values))


def _refolded(written: Mapping[str, Any], old: list[float], new: list[float]) -> dict[str, Any]:
    """Return what is written, with other thicknesses."""
    values = dict(written)
    letters = values.get("letters", {})
    first = 0
    for side, sequence in _SIDES.items():
        entries = side_entries(values, side)
        last = first + len(expand(entries, letters))
        if old[first:last] != new[first:last]:
            values.pop(sequence, None)
            values[side] = fold(entries, letters, old[first:last], new[first:last])
        first = last
    return in_order(values)


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
    along = n0 * math.sin(math.radians(angle_deg))
    return math.sqrt((n - along) * (n + along)) if n > along else math.nan


def load_design(path: str | Path) -> Design:
    """Read a design file.

    Parameters
    ----------
    path : str or Path
        A TOML file. Tables of materials are looked for in the folder ``materials`` beside it.

    Returns
    -------
    Design

    Raises
    ------
    DesignFileError
        If the file breaks the rules of design files; all faults are told at once.
    MaterialNotFoundError, MaterialFileError
        If that is all that is wrong.
    """
    file = read_design_file(path)
    media = _Media(file, Path(path).parent)
    file.faults.raise_all()
    values = file.values or {}
    media.check_reference()
    stack = _stack(values, media)
    file.faults.raise_all()
    angles = values.get("incident_angle_deg", 0.0)
    return Design(
        name=values["name"],
        stack=stack,
        reference_wavelength_nm=float(values["reference_wavelength_nm"]),
        reference_angle_deg=float(values.get("reference_angle_deg", 0.0)),
        incident_angle_deg=tuple(map(float, angles if isinstance(angles, list) else [angles])),
        description=values.get("description", ""),
        path=Path(path),
        sha256=file.sha256,
        written=Written(values, Path(path).parent),
    )


def save_design(design: Design, path: str | Path, *, replace_file: bool = False) -> None:
    """Write a design to a new file; the file appears whole or not at all.

    A design that was read from a file is written as it was there: groups, sequences and quarter waves
    stay. One that was made from it names it as its parent, with its hash.

    Parameters
    ----------
    design : Design
        What to write.
    path : str or Path
        Name of the new file.
    replace_file : bool
        Another file of that name may be replaced, but never the parent.

    Raises
    ------
    FilmstackError
        If there is a file of that name, or it can not be written.
    ArgumentError
        If a material of the stack has no name that a file could give.
    """
    target = Path(path)
    origin = design.path or design.parent
    if target.exists() and origin and origin.exists() and target.samefile(origin):
        raise FilmstackError(
            str(path), "this is the file that the design comes from, which is never changed", "Choose another name"
        )
    if target.exists() and not replace_file:
        raise FilmstackError(
            str(path), "expected the name of a new file, got that of an existing one", "Choose another name"
        )
    text = toml_text(_values_to_write(design, target.parent))
    with atomic_writer(target) as file:
        file.write(text)


def _values_to_write(design: Design, folder: Path) -> dict[str, Any]:
    values = _rebased(design.written, folder) if design.written else _values_of(design)
    if design.parent:
        values["parent"] = _relative(design.parent, folder)
        values["parent_sha256"] = design.parent_sha256
    return in_order({**values, **_head(design, values)})


def _head(design: Design, values: Mapping[str, Any]) -> dict[str, Any]:
    """Return the values at the head of the file, as written where they still hold."""
    angles = list(design.incident_angle_deg)
    now = {
        "name": design.name,
        "description": design.description,
        "reference_wavelength_nm": design.reference_wavelength_nm,
        "reference_angle_deg": design.reference_angle_deg,
        "incident_angle_deg": angles[0] if len(angles) == 1 else angles,
    }
    absent = {"description": "", "reference_angle_deg": 0.0, "incident_angle_deg": 0.0}
    return {
        key: value
        for key, value in now.items()
        if value != (values[key] if key in values else absent.get(key)) and values.get(key) != [value]
    }


def _rebased(written: Written, folder: Path) -> dict[str, Any]:
    """Return what is written, with names of files as they are seen from another folder."""
    values = dict(written.values)
    if written.folder.resolve() == folder.resolve():
        return values
    own = values.get("materials", {})

    def moved(value: Any) -> Any:  # noqa: ANN401 - a text or table
        if not isinstance(value, str) or value in own:
            return value
        beside = written.folder / "materials" / f"{value}.csv"
        if value.lower().endswith(".csv"):
            return _relative(written.folder / value, folder)
        return _relative(beside, folder) if beside.is_file() else value

    if "parent" in values:
        values["parent"] = _relative(written.folder / values["parent"], folder)
    return with_materials(values, moved)


def _relative(path: Path, folder: Path) -> str:
    try:
        return Path(os.path.relpath(path.resolve(), folder.resolve())).as_posix()
    except ValueError:  # on another drive
        return path.resolve().as_posix()


def _values_of(design: Design) -> dict[str, Any]:
    """Return the values of a file for a design that was made in Python."""
    stack = design.stack
    values: dict[str, Any] = {
        "filmstack": VERSION,
        "name": design.name,
        "reference_wavelength_nm": design.reference_wavelength_nm,
        "incident": _name_of(stack.incident),
    }
    if not stack.plates:
        return {**values, "substrate": _name_of(stack.exit), "layer": _entries(stack.films)}
    if len(stack.plates) > 1:
        raise ArgumentError("design: expected a stack with one thick plate at most, as in a design file, got several")
    place = next(place for place, layer in enumerate(stack.layers) if isinstance(layer, Plate))
    back = _entries(stack.layers[place + 1 :])
    return {
        **values,
        "substrate": _name_of(stack.plates[0].material),
        "substrate_thickness_mm": stack.plates[0].thickness_mm,
        "exit": _name_of(stack.exit),
        "layer": _entries(stack.layers[:place]),
        **({"back_layer": back} if back else {}),
    }


def _entries(layers: tuple[Layer | Plate, ...]) -> list[dict[str, Any]]:
    return [
        {
            "material": _name_of(layer.material),
            "thickness_nm": layer.thickness_nm,
            **({"locked": True} if layer.locked else {}),
        }
        for layer in layers
        if isinstance(layer, Layer)
    ]


def _name_of(material: Material) -> Any:  # noqa: ANN401 - a text or table
    """Return what a file would say for a material: a key of the library, or a constant index."""
    from filmstack.materials.library import material as find

    if isinstance(material, Constant) and not material.allow_gain and material.key.startswith("constant "):
        return {"n": material.n, "k": material.k} if material.k else {"n": material.n}
    try:
        find(material.key)
    except MaterialNotFoundError as error:
        raise ArgumentError(
            f"design: {material.label} has no name that a design file could give. Write its table to a CSV file first"
        ) from error
    return material.key


def _identity(value: str | dict[str, float]) -> str:
    """Return a text that is the same for all ways to write the same material."""
    return value if isinstance(value, str) else json.dumps([float(value["n"]), float(value.get("k", 0.0))])


class _Media:
    """The materials of a file: from what is written to `Material`, each made once."""

    def __init__(self, file: DesignFile, folder: Path) -> None:
        self._file, self._folder, self._known = file, folder, dict[str, Material]()
        self.faults = file.faults
        own = file.written.get("materials")
        self._own: Mapping[str, Any] = own if isinstance(own, dict) else {}
        seen: set[str] = set()
        for place, value in material_places(file.written):
            name = _identity(value)
            if name not in seen and not (isinstance(value, str) and value in self._own):
                seen.add(name)
                self._resolve(place, value)

    def __getitem__(self, value: str | dict[str, float]) -> Material:
        """Return the material of a value that was read without a fault."""
        if isinstance(value, str) and value in self._own:
            value = self._own[value]
        return self._known[_identity(value)]

    def check_reference(self) -> None:
        """Note each material whose data do not hold at the reference wavelength."""
        wavelength = float((self._file.values or {})["reference_wavelength_nm"])
        for material in dict.fromkeys(self._known.values()):
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
            fault = type(error)(f"{self.faults.file}: {place}: {error.where}", error.problem, error.advice)
            self.faults.found.append(fault)

    def _made(self, value: str | dict[str, float]) -> Material:
        if isinstance(value, dict):
            return constant(value["n"], value.get("k", 0.0))
        from filmstack.materials.library import material

        return material(value, folder=self._folder)


def _stack(values: Mapping[str, Any], media: _Media) -> Stack:
    incident, substrate = media[values["incident"]], media[values["substrate"]]
    front, back = (_films(values, side, media) for side in _SIDES)
    if "substrate_thickness_mm" not in values:
        return Stack(incident, front, substrate)
    plate = Plate(substrate, values["substrate_thickness_mm"])
    return Stack(incident, [*front, plate, *back], media[values["exit"]])


def _films(values: Mapping[str, Any], side: str, media: _Media) -> list[Layer]:
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


def _film(piece: Piece, values: Mapping[str, Any], media: _Media) -> Layer:
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
