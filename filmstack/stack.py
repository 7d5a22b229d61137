"""A row of steps for a wave: media, layers and plates, with their checks.

`materials` -> here -> `analysis`. Layers are listed as the light meets them and count from 0.
Thickness is in nm, of plates in mm.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from filmstack.errors import ArgumentError
from filmstack.materials.material import Material

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


def _checked_thickness(name: str, value: float, unit: str) -> float:
    if isinstance(value, str | bool):
        raise ArgumentError(f"{name}: expected a number of {unit}, got {value!r}")
    value = float(value)
    if not (np.isfinite(value) and value >= 0.0):
        raise ArgumentError(f"{name}: expected a finite length >= 0 {unit}, got {value:g} {unit}")
    return value


def _checked_material(name: str, value: object) -> Material:
    if not isinstance(value, Material):
        raise ArgumentError(
            f"{name}: expected a Material, got {value!r}. "
            "Make one with filmstack.material('SiO2') or filmstack.constant(1.46)"
        )
    return value


@dataclass(frozen=True, eq=False)
class Layer:
    """A coherent film.

    Parameters
    ----------
    material : Material
        The medium of the film.
    thickness_nm : float
        Physical thickness; zero is as if the layer were absent. [nm]
    locked : bool
        A refinement must not change the thickness.
    """

    material: Material
    thickness_nm: float
    locked: bool = False

    def __post_init__(self) -> None:
        _checked_material("Layer.material", self.material)
        object.__setattr__(self, "thickness_nm", _checked_thickness("Layer.thickness_nm", self.thickness_nm, "nm"))


@dataclass(frozen=True, eq=False)
class Plate:
    """A thick plane-parallel plate, whose reflections add by intensity.

    Parameters
    ----------
    material : Material
        The medium of the plate.
    thickness_mm : float
        Physical thickness. [mm]
    """

    material: Material
    thickness_mm: float

    def __post_init__(self) -> None:
        _checked_material("Plate.material", self.material)
        object.__setattr__(self, "thickness_mm", _checked_thickness("Plate.thickness_mm", self.thickness_mm, "mm"))


@dataclass(frozen=True, eq=False)
class Stack:
    """Incident medium, layers and plates in the order the light meets them, exit medium.

    Parameters
    ----------
    incident, exit : Material
        The two semi-infinite media; neither may amplify.
    layers : sequence of Layer or Plate
        What stands between them, the piece next to the incident medium first.
    """

    incident: Material
    layers: tuple[Layer | Plate, ...]
    exit: Material

    def __init__(self, incident: Material, layers: Sequence[Layer | Plate], exit: Material) -> None:
        _checked_material("Stack.incident", incident)
        _checked_material("Stack.exit", exit)
        if isinstance(layers, Layer | Plate):
            raise ArgumentError("Stack.layers: expected a sequence of Layer or Plate, got one. Put it in a list")
        for number, layer in enumerate(layers):
            if not isinstance(layer, Layer | Plate):
                raise ArgumentError(f"Stack.layers[{number}]: expected a Layer or a Plate, got {layer!r}")
        for name, medium in (("incident", incident), ("exit", exit)):
            if medium.allow_gain:
                raise ArgumentError(f"Stack.{name}: an end medium with gain has no defined reflectance")
        object.__setattr__(self, "incident", incident)
        object.__setattr__(self, "layers", tuple(layers))
        object.__setattr__(self, "exit", exit)

    @property
    def films(self) -> tuple[Layer, ...]:
        """The coherent films alone, in the order the light meets them."""
        return tuple(layer for layer in self.layers if isinstance(layer, Layer))

    @property
    def plates(self) -> tuple[Plate, ...]:
        """The thick plates alone, in the order the light meets them."""
        return tuple(layer for layer in self.layers if isinstance(layer, Plate))

    @property
    def thickness_nm(self) -> FloatArray:
        """Physical thickness of each film, shape (layer,). [nm]"""
        return np.array([film.thickness_nm for film in self.films], dtype=float)

    def with_thickness(self, thickness_nm: ArrayLike) -> Stack:
        """Return the same stack with other film thicknesses.

        Parameters
        ----------
        thickness_nm : array_like of float, shape (layer,)
            One thickness a film. [nm]

        Raises
        ------
        ArgumentError
            If the number of values is not the number of films, or one is negative or not finite.
        """
        values = np.asarray(thickness_nm, dtype=float)
        if values.shape != (len(self.films),):
            raise ArgumentError(f"thickness_nm: expected shape ({len(self.films)},), got {values.shape}")
        left = iter(values.tolist())
        layers = [
            replace(layer, thickness_nm=next(left)) if isinstance(layer, Layer) else layer for layer in self.layers
        ]
        return Stack(self.incident, layers, self.exit)

    def reversed(self) -> Stack:
        """Return the stack as light from the other side meets it."""
        return Stack(self.exit, self.layers[::-1], self.incident)

    def front(self) -> Stack:
        """Return the films in front of the first thick plate, whose medium becomes the exit medium.

        A stack without plates is returned as it is.
        """
        for place, layer in enumerate(self.layers):
            if isinstance(layer, Plate):
                return Stack(self.incident, self.layers[:place], layer.material)
        return self

    @property
    def materials(self) -> tuple[Material, ...]:
        """Every distinct medium, the incident one first, in the order met."""
        media = [self.incident, *(layer.material for layer in self.layers), self.exit]
        return tuple(dict.fromkeys(media))
