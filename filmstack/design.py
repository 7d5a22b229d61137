"""A stack with its name, reference wavelength and default angles: design file -> `Design` -> design file.

`files` and `expand` -> here -> `analysis`. What the person wrote is kept and written back: groups,
sequences and quarter waves stay what they are until a thickness in them changes.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping
from contextlib import suppress
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from filmstack.errors import ArgumentError, FilmstackError
from filmstack.expand import Media, expand, fold, make_stack, normal_wavenumber, stack_values
from filmstack.files.atomic import atomic_writer
from filmstack.files.design_file import in_order, read_design_file, with_materials
from filmstack.files.design_keys import DESIGN, SIDES, VERSION, side_entries
from filmstack.files.kinds import WRONG, Faults
from filmstack.files.toml_file import toml_text
from filmstack.materials.material import Material
from filmstack.materials.models.constant import Constant
from filmstack.stack import Stack

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray

_OF_THE_STACK = {"incident", "substrate", "substrate_thickness_mm", "exit", "letters", *SIDES, *SIDES.values()}


@dataclass(frozen=True)
class Written:
    """What a person wrote.

    Parameters
    ----------
    values : mapping
        Checked plain values of the file.
    folder : Path
        Where names of files in it start from.
    names : mapping
        What the file says for each material.
    stack : Stack, optional
        The stack that the layers of the values stand for; None if they hold none.
    reference : (float, float), optional
        Wavelength [nm] and angle [deg] of their quarter waves.
    """

    values: Mapping[str, Any] = field(default_factory=dict)
    folder: Path = Path()
    names: Mapping[Material, Any] = field(default_factory=dict)
    stack: Stack | None = None
    reference: tuple[float, float] | None = None


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
    written : Written
        What stands in the file, as far as it is not made from the stack.
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
    written: Written = field(default_factory=Written, repr=False)

    def __post_init__(self) -> None:
        if not isinstance(self.name, str) or not self.name.strip():
            raise ArgumentError(f"Design.name: expected a text, got {self.name!r}")
        if not isinstance(self.stack, Stack):
            raise ArgumentError(f"Design.stack: expected a Stack, got {self.stack!r}")
        angles = self.incident_angle_deg if np.iterable(self.incident_angle_deg) else (self.incident_angle_deg,)
        checked = {
            "reference_wavelength_nm": _checked("reference_wavelength_nm", self.reference_wavelength_nm),
            "reference_angle_deg": _checked("reference_angle_deg", self.reference_angle_deg),
            "incident_angle_deg": tuple(_checked("incident_angle_deg", angle) for angle in angles),
        }
        if not checked["incident_angle_deg"]:
            raise ArgumentError("Design.incident_angle_deg: expected at least one angle, got none")
        for name, value in checked.items():
            object.__setattr__(self, name, value)

    @property
    def quarter_waves(self) -> FloatArray:
        """Optical thickness of each film in quarter waves, shape (layer,); nan where light is evanescent. [1]"""
        stack = self.stack
        where = self.reference_wavelength_nm, self.reference_angle_deg
        waves_per_nm = {
            material: 4.0 * normal_wavenumber(material, stack.incident, *where) / self.reference_wavelength_nm
            for material in stack.materials
        }
        return np.array([film.thickness_nm * waves_per_nm[film.material] for film in stack.films], dtype=float)

    @property
    def parent_name(self) -> str:
        """File of the design that this one was made from, or an empty text."""
        if self.parent:
            return str(self.parent)
        return str(self.written.values.get("parent", ""))

    def with_thickness(self, thickness_nm: ArrayLike) -> Design:
        """Return a design with other thicknesses, which names this one as its parent.

        Entries of the file whose thicknesses stay are kept as written; what changes is written in nm. The
        description stays behind, for what it promises holds for the parent only.

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
        if not self._is_as_written():
            return self.with_stack(stack)
        old, new = self.stack.thickness_nm.tolist(), stack.thickness_nm.tolist()
        values = _refolded(self.written.values, old, new)
        return self._made_from(stack, replace(self.written, values=values, stack=stack))

    def with_stack(self, stack: Stack) -> Design:
        """Return a design with another stack, which names this one as its parent.

        The description stays behind. All layers are then written out in nm; materials keep their names.

        Parameters
        ----------
        stack : Stack
            The new stack.

        Returns
        -------
        Design
        """
        return self._made_from(stack, replace(self.written, stack=None))

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw the index profile of the films before the plate on `ax`, or on a new figure."""
        from filmstack.report.profile_plot import draw_profile

        return draw_profile(self, ax)

    def _made_from(self, stack: Stack, written: Written) -> Design:
        made = replace(self, stack=stack, description="", path=None, sha256="", written=written)
        return replace(made, parent=self.path, parent_sha256=self.sha256) if self.path else made

    def _is_as_written(self) -> bool:
        """Tell whether the layers that were written are those of the stack."""
        reference = (self.reference_wavelength_nm, self.reference_angle_deg)
        return self.written.stack is self.stack and self.written.reference == reference


def _checked(name: str, value: float) -> float:
    """Return a number of the file's kind, as the table of keys has it."""
    faults = Faults("Design", ArgumentError)
    kind = next(key.kind for key in DESIGN.keys if key.name == name)
    number = float(value) if isinstance(value, int | float | np.number) and not isinstance(value, bool) else value
    if kind.read(number, name, faults) is WRONG:
        raise ArgumentError(str(faults.found[0]).replace(": ", ".", 1))  # "Design.name: expected ..."
    return float(number)


def _refolded(written: Mapping[str, Any], old: list[float], new: list[float]) -> dict[str, Any]:
    """Return what is written, with other thicknesses."""
    values = dict(written)
    letters = values.get("letters", {})
    first = 0
    for side, sequence in SIDES.items():
        entries = side_entries(values, side)
        last = first + len(expand(entries, letters))
        if old[first:last] != new[first:last]:
            values.pop(sequence, None)
            values[side] = fold(entries, letters, old[first:last], new[first:last])
        first = last
    return in_order(values)


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
    media = Media(file, Path(path).parent)
    file.faults.raise_all()
    values = file.values or {}
    media.check_reference(values)
    stack = make_stack(values, media)
    file.faults.raise_all()
    angles = values.get("incident_angle_deg", 0.0)
    reference = float(values["reference_wavelength_nm"]), float(values.get("reference_angle_deg", 0.0))
    return Design(
        name=values["name"],
        stack=stack,
        reference_wavelength_nm=reference[0],
        reference_angle_deg=reference[1],
        incident_angle_deg=tuple(map(float, angles if isinstance(angles, list) else [angles])),
        description=values.get("description", ""),
        path=Path(path),
        sha256=file.sha256,
        written=Written(values, Path(path).parent, media.names(), stack, reference),
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
    written = design.written
    move = _mover(written, folder)
    values = {"filmstack": VERSION, **with_materials(written.values, move)}
    if "parent" in values:
        values["parent"] = _relative(written.folder / values["parent"], folder)
    if not design._is_as_written():
        head = {key: value for key, value in values.items() if key not in _OF_THE_STACK}
        values = head | stack_values(design.stack, lambda material: move(_name_of(material, written)))
    if design.parent:
        values |= {"parent": _relative(design.parent, folder), "parent_sha256": design.parent_sha256}
    return in_order(_with_head(values, design))


def _with_head(values: dict[str, Any], design: Design) -> dict[str, Any]:
    """Return the values with name, wavelength and angles of the design, as written where they still hold."""
    angles = list(design.incident_angle_deg)
    now: dict[str, Any] = {
        "name": design.name,
        "description": design.description,
        "reference_wavelength_nm": design.reference_wavelength_nm,
        "reference_angle_deg": design.reference_angle_deg,
        "incident_angle_deg": angles,
    }
    absent = {"description": "", "reference_angle_deg": 0.0, "incident_angle_deg": [0.0]}
    for key, value in now.items():
        before = values.get(key, absent.get(key))
        if value in (before, [before]):
            continue
        if value == absent.get(key):
            del values[key]
        else:
            values[key] = angles[0] if value is angles and len(angles) == 1 else value
    return values


def _mover(written: Written, folder: Path) -> Callable[[Any], Any]:
    """Return the function from a material as written to how a file in another folder says it."""
    own = written.values.get("materials", {})
    stays = written.folder.resolve() == folder.resolve()

    def move(value: Any) -> Any:  # noqa: ANN401 - a text or table
        # A name of the file's own stays, unless it stands for itself: then it names a file beside the design.
        if stays or not isinstance(value, str) or own.get(value, value) != value:
            return value
        from filmstack.materials.library import own_file

        file = own_file(value, written.folder)
        return _relative(file, folder) if file else value

    return move


def _relative(path: Path, folder: Path) -> str:
    try:
        return Path(os.path.relpath(path.resolve(), folder.resolve())).as_posix()
    except ValueError:  # on another drive
        return path.resolve().as_posix()


def _name_of(material: Material, written: Written) -> Any:  # noqa: ANN401 - a text or table
    """Return what a file would say for a material: its name there, a constant index, a key of the library."""
    from filmstack.materials.library import TABLE_FILES
    from filmstack.materials.library import material as find

    if material in written.names:
        return written.names[material]
    if isinstance(material, Constant) and not material.allow_gain and material.key.startswith("constant "):
        return {"n": material.n, "k": material.k} if material.k else {"n": material.n}
    with suppress(FilmstackError):
        if find(material.key) is material and not material.key.lower().endswith(TABLE_FILES):
            return material.key
    raise ArgumentError(
        f"design: {material.label}: expected a material of the library, of the design's own file, or of constant "
        "index. A design file has no name for this one: write its table to a CSV file and name that in a design file"
    )
