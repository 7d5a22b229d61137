"""From refractive indices to what the kernels read: `analysis` -> here -> `filmstack.wave.route`.

A medium at a point is (kappa, u, v) for s and p, kappa = sqrt((N - b)(N + b)) with Im kappa <= 0.
All arithmetic is on reals (N = nr + i ni, ni <= 0 absorbs), so that the rounding of a value does
not depend on its place in an array, and where b = 0 the rows of p equal those of s to the byte.
Shapes are (sample, ...), with a first axis of 1 where all samples share a value.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from filmstack.arraytypes import BoolArray, ComplexArray, FloatArray, IntArray

Pair = tuple["FloatArray", "FloatArray"]
"""Real and imaginary part."""


def times(a: Pair, b: Pair) -> Pair:
    """Multiply two complex numbers given as pairs of reals."""
    return a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]


def over(a: Pair, b: Pair) -> Pair:
    """Divide two complex numbers given as pairs of reals."""
    size = b[0] * b[0] + b[1] * b[1]
    return (a[0] * b[0] + a[1] * b[1]) / size, (a[1] * b[0] - a[0] * b[1]) / size


@dataclass(frozen=True)
class Direction:
    """The direction of the light at a set of points, shape (sample or 1, point).

    Parameters
    ----------
    n0 : ndarray
        Index of the outer, lossless incident medium. [1]
    sine, cosine : ndarray
        Of the angle of incidence there. [1]
    """

    n0: FloatArray
    sine: FloatArray
    cosine: FloatArray

    @cached_property
    def b(self) -> FloatArray:
        """Transverse index N0 sin(theta0)."""
        return self.n0 * self.sine

    @cached_property
    def straight(self) -> BoolArray:
        """Points of normal incidence, where p is s."""
        return self.b == 0.0

    def of_media(self) -> Direction:
        """Return the same with an axis for media between sample and point."""
        return Direction(*(x[:, np.newaxis, :] for x in (self.n0, self.sine, self.cosine)))

    def picked(self, sample: int, points: IntArray) -> Direction:
        """Return the direction of one sample at some points."""
        return Direction(*(x[min(sample, len(x) - 1)][np.newaxis, points] for x in (self.n0, self.sine, self.cosine)))


def normal_wavenumber(n: Pair, direction: Direction) -> tuple[Pair, Pair]:
    """Return kappa and kappa^2, the root with Im kappa <= 0; kappa is +-N itself at normal incidence.

    kappa^2 = (N - b)(N + b); where n >= N0, rather (N - N0)(N + N0) + (N0 cos)^2, a sum that keeps its digits
    next to grazing incidence, where the sine does not.
    """
    nr, ni = n
    b, n0 = direction.b, direction.n0
    height = n0 * direction.cosine
    x = np.where(nr < n0, (nr - b) * (nr + b), (nr - n0) * (nr + n0) + height * height) - ni * ni
    x = np.where(direction.straight, nr * nr - ni * ni, x)
    y = 2.0 * nr * ni
    size = np.sqrt(x * x + y * y)
    larger = np.sqrt(0.5 * (np.abs(x) + size))
    with np.errstate(divide="ignore", invalid="ignore"):
        smaller = np.where(larger > 0.0, 0.5 * np.abs(y) / larger, 0.0)
    re = np.where(x >= 0.0, larger, smaller)
    im = -np.where(x >= 0.0, smaller, larger)
    re = np.where(y > 0.0, -re, re)
    re = np.where(direction.straight, np.where(ni > 0.0, -nr, nr), re)
    return (re, np.where(direction.straight, -np.abs(ni), im)), (x, y)


@dataclass(frozen=True)
class Media:
    """The films of a coherent group at a set of points, ready for the kernels.

    Parameters
    ----------
    n : pair of ndarray, shape (sample or 1, medium, point)
        Refractive index N = nr + i ni of each distinct film medium. [1]
    direction : Direction
        Direction of the light.
    wavelength : ndarray, shape (point,)
        Vacuum wavelength. [nm]
    """

    n: Pair
    direction: Direction
    wavelength: FloatArray

    @cached_property
    def k0(self) -> FloatArray:
        """Vacuum wavenumber 2 pi / lambda. [1/nm]"""
        return 2.0 * np.pi / self.wavelength

    @cached_property
    def _wavenumber(self) -> tuple[Pair, Pair]:
        return normal_wavenumber(self.n, self.direction.of_media())

    @property
    def kappa(self) -> Pair:
        """Normal wavenumber over k0, shape (sample or 1, medium, point). [1]"""
        return self._wavenumber[0]

    @property
    def v_s(self) -> Pair:
        """kappa^2, exact next to the critical angle."""
        return self._wavenumber[1]

    @cached_property
    def v_p(self) -> Pair:
        """N^2, equal to v_s where b = 0."""
        nr, ni = self.n
        return nr * nr - ni * ni, 2.0 * nr * ni

    @cached_property
    def u_p(self) -> Pair:
        """kappa^2 / N^2, 1 where b = 0; 0 where N = 0, which the caller treats apart.

        The imaginary part is that of -b^2 / N^2, which keeps its digits where b is small.
        """
        direction, v = self.direction.of_media(), self.v_p
        none = (v[0] == 0.0) & (v[1] == 0.0)
        size = np.where(none, 1.0, v[0] * v[0] + v[1] * v[1])
        re = (self.v_s[0] * v[0] + self.v_s[1] * v[1]) / size
        re = np.where(direction.straight, 1.0, np.where(none, 0.0, re))
        return re, direction.b * direction.b * v[1] / size

    @cached_property
    def lossless(self) -> BoolArray:
        """Points at which every medium is lossless, shape (point,)."""
        return np.asarray(np.all(self.n[1] == 0.0, axis=(0, 1)))

    @cached_property
    def simple(self) -> BoolArray:
        """Points at which every medium is lossless and carries a propagating wave, shape (point,)."""
        return self.lossless & np.asarray(np.all((self.kappa[1] == 0.0) & (self.kappa[0] > 0.0), axis=(0, 1)))

    def rows(self, simple: bool, chosen: IntArray) -> FloatArray:
        """Return the kernels' rows at the chosen points, shape (sample or 1, medium, row, point)."""

        def pick(values: FloatArray) -> FloatArray:
            return values[..., chosen]

        kr, ki = pick(self.kappa[0]), pick(self.kappa[1])
        k0 = self.k0[chosen]
        quarters = 4.0 * kr / self.wavelength[chosen]
        zero = (kr == 0.0) & (ki == 0.0)
        with np.errstate(divide="ignore", invalid="ignore"):
            size = kr * kr + ki * ki
            real = ki == 0.0
            inverse_re = np.where(zero, 0.0, np.where(real, 1.0 / kr, kr / size))
            inverse_im = np.where(real, 0.0, -ki / size)
        v_s, u_p, v_p = self.v_s, self.u_p, self.v_p
        rows = [quarters, inverse_re, pick(v_s[0]), pick(u_p[0]), pick(v_p[0])]
        if not simple:
            rows += [-2.0 * k0 * ki, inverse_im, np.where(zero, k0, 0.0), pick(v_s[1]), pick(u_p[1]), pick(v_p[1])]
        return np.stack([np.broadcast_to(row, kr.shape) for row in rows], axis=2)


@dataclass(frozen=True)
class Ends:
    """The incident and exit medium of a coherent group at a set of points.

    Parameters
    ----------
    incident, exit : pair of ndarray, shape (sample or 1, point)
        Refractive index N = nr + i ni. [1]
    direction : Direction
        Direction of the light.
    outer : bool
        The incident medium is the outer, lossless one; else it is a plate, or the light comes from behind, and
        its normal wavenumber is computed.
    """

    incident: Pair
    exit: Pair
    direction: Direction
    outer: bool = False
    blocked: bool = False
    """p ends at a film of N = 0: there H = 0, whatever stands behind."""

    @cached_property
    def exit_kappa(self) -> Pair:
        """Normal wavenumber of the exit medium over k0."""
        return normal_wavenumber(self.exit, self.direction)[0]

    def exit_fields(self, p: bool) -> tuple[Pair, Pair]:
        """Return E and H at the exit: s (1, kappa), p (kappa, N^2), never a division by what can be 0."""
        kr, ki = self.exit_kappa
        one, nothing = np.ones_like(kr), np.zeros_like(kr)
        if not p:
            return (one, nothing), (kr, ki)
        if self.blocked:
            return (one, nothing), (nothing, nothing)
        nr, ni = self.exit
        straight = self.direction.straight
        return (
            (np.where(straight, one, kr), np.where(straight, nothing, ki)),
            (np.where(straight, kr, nr * nr - ni * ni), np.where(straight, ki, 2.0 * nr * ni)),
        )

    def incident_pair(self, p: bool) -> tuple[Pair, Pair]:
        """Return (a1, a2) such that a1 E + a2 H is the wave towards the stack, a1 E - a2 H the one back."""
        nr, ni = np.broadcast_arrays(*self.incident)
        if self.outer:
            cosine = self.direction.cosine
            nothing = np.zeros(np.broadcast_shapes(cosine.shape, nr.shape))
            straight = self.direction.straight
            if not p:
                return (nr * cosine + nothing, nothing), (1.0 + nothing, nothing)
            return (nr + nothing, nothing), (np.where(straight, 1.0, cosine) + nothing, nothing)
        kappa, _ = normal_wavenumber(self.incident, self.direction)
        one = (np.ones_like(kappa[0]), np.zeros_like(kappa[0]))
        if not p:
            return kappa, one
        straight = self.direction.straight
        square = (nr * nr - ni * ni, 2.0 * nr * ni)
        return (
            (np.where(straight, nr, square[0]), np.where(straight, ni, square[1])),
            (np.where(straight, 1.0, kappa[0]), np.where(straight, 0.0, kappa[1])),
        )

    def flux(self, p: bool) -> FloatArray:
        """Return T |D|^2: four times the incident pair's product times the exit's Re(E conj H)."""
        (er, ei), (hr, hi) = self.exit_fields(p)
        (ar, _), (cr, _) = self.incident_pair(p)
        return 4.0 * (ar * cr) * (er * hr + ei * hi)

    def amplitude(self, p: bool) -> Pair:
        """Return t D, the full electric-field ratio of the wave that leaves: s 2 a1 a2, p 2 a1 a2 N_exit."""
        (ar, _), (cr, _) = self.incident_pair(p)
        double = 2.0 * (ar * cr)
        if not p:
            return double, np.zeros_like(double)
        straight = self.direction.straight
        nr, ni = self.exit
        return double * np.where(straight, 1.0, nr), double * np.where(straight, 0.0, ni)

    def rows(self, lossless_films: BoolArray, chosen: IntArray) -> FloatArray:
        """Return the kernels' end rows at the chosen points, shape (sample or 1, row, point)."""
        rows: list[FloatArray] = []
        for p in (False, True):
            (er, ei), (hr, hi) = self.exit_fields(p)
            rows += [er, hi, hr, ei]
        for p in (False, True):
            (ar, _), (cr, _) = self.incident_pair(p)
            rows += [ar, cr]
        flux = [self.flux(p) for p in (False, True)]
        closed = (flux[0] == 0.0) & (flux[1] == 0.0) & lossless_films
        if self.outer:
            closed = closed | (self.direction.cosine == 0.0)
        rows_closed = closed.astype(float)
        rows += [*flux, rows_closed]
        shape = np.broadcast_shapes(*(row.shape for row in rows))
        return np.stack([np.broadcast_to(row, shape)[:, chosen] for row in rows], axis=1)


def complex_pair(values: ComplexArray) -> Pair:
    """Split complex values into contiguous real and imaginary parts."""
    return np.ascontiguousarray(values.real), np.ascontiguousarray(values.imag)
