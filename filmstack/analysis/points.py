"""Wavelengths, angles and indices of a request: public functions -> here -> `filmstack.wave`.

Checks stand here, once. A point is one (angle, wavelength), angles outermost.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from filmstack.errors import ArgumentError
from filmstack.materials.material import Material
from filmstack.stack import Layer, Plate, Stack
from filmstack.wave.angles import cosine_degrees, sine_degrees
from filmstack.wave.media import Direction, Ends, Media, Pair, complex_pair
from filmstack.wave.route import Group

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray

LARGEST_INCIDENT_K = 1e-4
"""Extinction coefficient up to which an incident medium counts as lossless (real prism glass)."""


def checked_axis(name: str, values: ArrayLike, unit: str, low: float, high: float) -> FloatArray:
    """Return `values` as a one-dimensional array, each inside low to high (low excluded if 0 nm)."""
    try:
        axis = np.array(values, dtype=float, ndmin=1)
    except (TypeError, ValueError):
        raise ArgumentError(f"{name}: expected numbers in {unit}, got {values!r}") from None
    if axis.ndim != 1 or axis.size == 0:
        raise ArgumentError(f"{name}: expected a number or a list of numbers in {unit}, got shape {axis.shape}")
    bad = ~((axis >= low) & (axis <= high) & np.isfinite(axis))
    if np.any(bad):
        place = int(np.flatnonzero(bad)[0])
        wanted = f"{low:g} to {high:g} {unit}" if math.isfinite(high) else f"a finite value > 0 {unit}"
        raise ArgumentError(f"{name}[{place}]: expected {wanted}, got {axis[place]:g} {unit}")
    return axis


@dataclass(frozen=True)
class Request:
    """A stack at wavelengths and angles, with the indices looked up.

    Parameters
    ----------
    stack : Stack
        The stack.
    wavelength_nm, angle_deg : ndarray, shapes (wavelength,) and (sample or 1, angle)
        Vacuum wavelength [nm] and angle of incidence [deg].
    index : mapping of Material to ndarray of complex, shape (sample or 1, wavelength)
        Refractive index of each medium. [1]
    thickness : ndarray, shape (sample, film)
        Thickness of every film. [nm]
    notes : tuple of str
        Assumptions made on the way.
    """

    stack: Stack
    wavelength_nm: FloatArray
    angle_deg: FloatArray
    index: Mapping[Material, ComplexArray]
    thickness: FloatArray
    notes: tuple[str, ...]

    @property
    def shape(self) -> tuple[int, int]:
        """Number of angles and of wavelengths."""
        return self.angle_deg.shape[1], self.wavelength_nm.size

    @property
    def wavelength(self) -> FloatArray:
        """Vacuum wavelength of each point, shape (point,). [nm]"""
        return np.tile(self.wavelength_nm, self.shape[0])

    def at_points(self, material: Material) -> Pair:
        """Return N of a medium, shape (sample or 1, point), as a pair of reals."""
        re, im = complex_pair(self.index[material])
        return np.tile(re, self.shape[0]), np.tile(im, self.shape[0])

    def direction(self) -> Direction:
        """Return the direction of the light at every point."""
        n0, _ = self.at_points(self.stack.incident)
        sine = np.array([[sine_degrees(x) for x in row] for row in self.angle_deg.tolist()])
        cosine = np.array([[cosine_degrees(x) for x in row] for row in self.angle_deg.tolist()])
        sine, cosine = (np.repeat(x, self.wavelength_nm.size, axis=1) for x in (sine, cosine))
        # One shape for all, so that every product is formed alike.
        shape = np.broadcast_shapes(n0.shape, sine.shape)
        return Direction(*(np.ascontiguousarray(np.broadcast_to(x, shape)) for x in (n0, sine, cosine)))

    def groups(self) -> list[Group]:
        """Return the coherent groups of films between the end media and the plates, front first."""
        return self._groups(from_behind=False)

    def reversed_groups(self) -> list[Group]:
        """Return the same groups, front first, each as light from behind meets it."""
        return self._groups(from_behind=True)

    def _groups(self, from_behind: bool) -> list[Group]:
        direction, stack = self.direction(), self.stack
        media = [self.at_points(m) for m in (stack.incident, *(p.material for p in stack.plates), stack.exit)]
        media[0] = (media[0][0], np.zeros_like(media[0][1]))  # counts as lossless
        groups: list[Group] = []
        first = 0
        for number, films in enumerate(split_at_plates(stack)):
            thickness = self.thickness[:, first : first + len(films)]
            if from_behind:
                ends = Ends(media[number + 1], media[number], direction)
                groups.append(self._group(films[::-1], ends, thickness[:, ::-1]))
            else:
                ends = Ends(media[number], media[number + 1], direction, outer=number == 0)
                groups.append(self._group(films, ends, thickness))
            first += len(films)
        return groups

    def _group(self, films: list[Layer], ends: Ends, thickness: FloatArray) -> Group:
        distinct = list(dict.fromkeys(film.material for film in films))
        pairs = [self.at_points(material) for material in distinct]
        samples = max((len(pair[0]) for pair in pairs), default=1)
        points = self.wavelength.size
        n = tuple(
            np.stack([np.broadcast_to(pair[part], (samples, points)) for pair in pairs], axis=1)
            if pairs
            else np.empty((1, 0, points))
            for part in (0, 1)
        )
        order = np.array([distinct.index(film.material) for film in films], dtype=np.int64)
        return Group(Media((n[0], n[1]), ends.direction, self.wavelength), ends, order, np.ascontiguousarray(thickness))


def split_at_plates(stack: Stack) -> list[list[Layer]]:
    """Return the films in front of each plate and behind the last one."""
    groups: list[list[Layer]] = [[]]
    for layer in stack.layers:
        if isinstance(layer, Plate):
            groups.append([])
        else:
            groups[-1].append(layer)
    return groups


def request(stack: Stack, wavelength_nm: ArrayLike, angle_deg: ArrayLike) -> Request:
    """Check a request and look up the indices of its nominal stack."""
    if not isinstance(stack, Stack):
        raise ArgumentError(f"stack: expected a Stack, got {type(stack).__name__}. A Design holds one as design.stack")
    wavelength = checked_axis("wavelength_nm", wavelength_nm, "nm", 5e-324, math.inf)
    angle = checked_axis("angle_deg", angle_deg, "deg", 0.0, 90.0)
    index = {material: material.index(wavelength)[np.newaxis] for material in stack.materials}
    notes = incident_note(stack, index[stack.incident], wavelength)
    return Request(stack, wavelength, angle[np.newaxis], index, stack.thickness_nm[np.newaxis], notes)


def incident_note(stack: Stack, index: ComplexArray, wavelength_nm: FloatArray) -> tuple[str, ...]:
    """Refuse an absorbing incident medium, or say that a small k was left out."""
    k = -index.imag
    worst = int(np.argmax(np.max(np.abs(k), axis=0)))
    largest = float(np.max(np.abs(k)))
    if largest > LARGEST_INCIDENT_K:
        raise ArgumentError(
            f"stack.incident: {stack.incident.label}: expected k <= {LARGEST_INCIDENT_K:g}, got k = {largest:.3g} at "
            f"{wavelength_nm[worst]:g} nm. In an absorbing medium the incident and the reflected flux do not add up; "
            "choose a transparent one or narrow the wavelengths"
        )
    if np.any(index.real <= 0.0):
        raise ArgumentError(f"stack.incident: {stack.incident.label}: expected an index n > 0 of the incident medium")
    if largest > 0.0:
        return (f"the incident medium, {stack.incident.label}, counts as lossless (k up to {largest:.2g} left out)",)
    return ()
