"""A solved request, everything computed when asked for: `points` -> here -> `spectrum`, `batch`.

`Coherent` is a stack of films alone; `Incoherent` has thick plates, whose reflections add by
intensity. Both give arrays of shape (sample, angle, wavelength), per-layer ones with a first axis
more. `p` chooses the polarization.
"""

from __future__ import annotations

from functools import cached_property
from typing import TYPE_CHECKING, Protocol

import numpy as np

from filmstack.analysis.points import Request
from filmstack.errors import ArgumentError, CoherenceError
from filmstack.wave.absorption import absorbed
from filmstack.wave.finish import Front, as_complex
from filmstack.wave.plates import Crossing, PlateChain
from filmstack.wave.route import dark, powers, states

if TYPE_CHECKING:
    from filmstack.arraytypes import ComplexArray, FloatArray


class Solution(Protocol):
    """What a solved request can tell; shapes (sample, angle, wavelength)."""

    request: Request

    def reflectance(self, p: bool) -> FloatArray:
        """Return R."""

    def transmittance(self, p: bool) -> FloatArray:
        """Return T."""

    def log10_transmittance(self, p: bool) -> FloatArray:
        """Return log10 T, finite where T is below the smallest double."""

    def film_absorptance(self, p: bool) -> FloatArray:
        """Return A of each film, shape (film, sample, angle, wavelength)."""

    def plate_absorptance(self, p: bool) -> FloatArray:
        """Return A of each plate, shape (plate, sample, angle, wavelength)."""

    def amplitude_reflectance(self, p: bool) -> ComplexArray:
        """Return r."""

    def amplitude_transmittance(self, p: bool) -> ComplexArray:
        """Return t."""


class Coherent:
    """Films between two media."""

    def __init__(self, request: Request) -> None:
        self.request = request
        (self.group,) = request.groups()

    def _shaped(self, values: FloatArray) -> FloatArray:
        return values.reshape(*values.shape[:-1], *self.request.shape)

    @cached_property
    def _powers(self) -> FloatArray:
        return powers(self.group)

    @cached_property
    def _state(self) -> FloatArray:
        return states(self.group)[0]

    def _front(self, p: bool) -> Front:
        return Front(self.group.ends, self._state, p, dark(self.group))

    def reflectance(self, p: bool) -> FloatArray:
        """Return R."""
        return self._shaped(self._powers[2 if p else 0])

    def transmittance(self, p: bool) -> FloatArray:
        """Return T."""
        return self._shaped(self._powers[3 if p else 1])

    def log10_transmittance(self, p: bool) -> FloatArray:
        """Return log10 T."""
        return self._shaped(np.broadcast_to(self._front(p).log10_transmittance, self.group.shape))

    def film_absorptance(self, p: bool) -> FloatArray:
        """Return A of each film; without a lossy film nothing is computed."""
        if bool(np.all(self.group.media.n[1] == 0.0)):
            return self._shaped(np.zeros((len(self.group.order), *self.group.shape)))
        trace = states(self.group, every_layer=True)
        front = Front(self.group.ends, trace[0], p, dark(self.group))
        (ar, _), (cr, _) = self.group.ends.incident_pair(p)
        with np.errstate(divide="ignore", invalid="ignore"):
            values = absorbed(self.group, trace, p) * (4.0 * ar * cr) / front.size
        return self._shaped(np.where(front.grazing, 0.0, values))

    def plate_absorptance(self, p: bool) -> FloatArray:
        """Return the absorptance of no plate at all."""
        return np.empty((0, self.group.shape[0], *self.request.shape))

    def amplitude_reflectance(self, p: bool) -> ComplexArray:
        """Return r."""
        re, im = (self._shaped(np.broadcast_to(x, self.group.shape)) for x in self._front(p).r)
        return as_complex((re, im))

    def amplitude_transmittance(self, p: bool) -> ComplexArray:
        """Return t."""
        re, im = (self._shaped(np.broadcast_to(x, self.group.shape)) for x in self._front(p).t)
        return as_complex((re, im))


class Incoherent:
    """Films and thick plates."""

    def __init__(self, request: Request) -> None:
        self.request = request
        self.groups, self.reversed_groups = request.groups(), request.reversed_groups()

    def _shaped(self, values: FloatArray) -> FloatArray:
        samples = max(group.shape[0] for group in self.groups)
        shape = (*values.shape[:-2], samples, values.shape[-1])
        return np.broadcast_to(values, shape).reshape(*shape[:-1], *self.request.shape)

    @cached_property
    def _states(self) -> list[tuple[FloatArray, FloatArray]]:
        return [(states(a)[0], states(b)[0]) for a, b in zip(self.groups, self.reversed_groups, strict=True)]

    def chain(self, p: bool) -> PlateChain:
        """Return the solved chain of groups and plates."""
        if p not in self._chains:
            crossings = tuple(
                Crossing(Front(a.ends, front, p, dark(a)), Front(b.ends, back, p, dark(b)), a.media.lossless)
                for a, b, (front, back) in zip(self.groups, self.reversed_groups, self._states, strict=True)
            )
            plates = self.request.stack.plates
            media = tuple((self.request.at_points(plate.material), plate.thickness_mm * 1e6) for plate in plates)
            chain = PlateChain(crossings, media, 2.0 * np.pi / self.request.wavelength)
            if any(np.any(gap < 0.0) for gap in chain.solved[2]):
                raise ArgumentError(
                    "stack: the gain between its plates exceeds the loss: light builds up without end. Lower the gain"
                )
            self._chains[p] = chain
        return self._chains[p]

    @cached_property
    def _chains(self) -> dict[bool, PlateChain]:
        return {}

    def reflectance(self, p: bool) -> FloatArray:
        """Return R."""
        return self._shaped(self.chain(p).reflectance)

    def transmittance(self, p: bool) -> FloatArray:
        """Return T."""
        return self._shaped(self.chain(p).transmittance)

    def log10_transmittance(self, p: bool) -> FloatArray:
        """Return log10 T."""
        return self._shaped(self.chain(p).log10_transmittance)

    def film_absorptance(self, p: bool) -> FloatArray:
        """Return A of each film, lit from both sides by intensity."""
        chain = self.chain(p)
        rows: list[FloatArray] = []
        for place, (a, b) in enumerate(zip(self.groups, self.reversed_groups, strict=True)):
            if bool(np.all(a.media.n[1] == 0.0)):
                rows.append(self._shaped(np.zeros((len(a.order), *a.shape))))
                continue
            front, back = chain.light_on(place)
            crossing = chain.groups[place]
            with np.errstate(divide="ignore", invalid="ignore"):
                total = absorbed(a, states(a, every_layer=True), p) * (front / crossing.front.size)
                total = total + absorbed(b, states(b, every_layer=True), p)[::-1] * (back / crossing.back.size)
            rows.append(self._shaped(np.where(chain.grazing, 0.0, total)))
        return np.concatenate(rows)

    def plate_absorptance(self, p: bool) -> FloatArray:
        """Return A of each plate."""
        return self._shaped(self.chain(p).plate_absorptance())

    def amplitude_reflectance(self, p: bool) -> ComplexArray:
        """Refuse: a plate has no phase."""
        raise CoherenceError(
            "r: a stack with a thick plate has no amplitude reflectance. Ask for R, or take stack.front()"
        )

    def amplitude_transmittance(self, p: bool) -> ComplexArray:
        """Refuse: a plate has no phase."""
        raise CoherenceError(
            "t: a stack with a thick plate has no amplitude transmittance. Ask for T, or take stack.front()"
        )


def total(parts: FloatArray) -> FloatArray:
    """Add up the first axis in order: numpy's own sum groups the terms by the shape of the rest."""
    added = np.zeros(parts.shape[1:])
    for part in parts:
        added = added + part
    return added


def log10_of_mean(a: FloatArray, b: FloatArray) -> FloatArray:
    """Return log10 of the mean of two values given by their log10, below the smallest double too."""
    high, low = np.maximum(a, b), np.minimum(a, b)
    with np.errstate(invalid="ignore"):
        ratio = np.where(np.isneginf(high), 0.0, low - high)
    return np.asarray(high + np.log10(0.5 * (1.0 + 10.0**ratio)))


def solve(request: Request) -> Solution:
    """Return the solution of a request, nothing computed yet."""
    return Incoherent(request) if request.stack.plates else Coherent(request)
