"""Derivatives of a request row by row: by thickness, by index, or of a needle, coherent or through plates.

`filmstack.wave.derivatives` -> here -> `gradients`. A row is a film, or a depth of a needle. A new kind of
row is one subclass of `Amplitudes`.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np

from filmstack.analysis.points import Request
from filmstack.analysis.solution import Incoherent
from filmstack.errors import ArgumentError, CoherenceError
from filmstack.wave.derivatives import Passes
from filmstack.wave.finish import as_complex
from filmstack.wave.media import Media
from filmstack.wave.route import Group, blocking_films

if TYPE_CHECKING:
    from filmstack.arraytypes import BoolArray, ComplexArray, FloatArray


class Amplitudes:
    """dr and d ln(1/t) of the rows of a gradient, for one coherent group."""

    def __init__(self, group: Group) -> None:
        if bool(np.any(blocking_films(group))):
            raise ArgumentError(
                "stack: a film of N = 0 blocks p at oblique incidence; derivatives are not defined there. "
                "Leave out these wavelengths, or use normal incidence"
            )
        self.group = group
        self.passes = Passes(group)
        self._known: dict[bool, tuple[ComplexArray, ComplexArray]] = {}

    def rows(self, p: bool) -> tuple[ComplexArray, ComplexArray]:
        """Return dr and d ln(1/t), shape (row, point), computed once."""
        if p not in self._known:
            self._known[p] = self._rows(p)
        return self._known[p]

    def _rows(self, p: bool) -> tuple[ComplexArray, ComplexArray]:
        raise NotImplementedError

    def r(self, p: bool) -> ComplexArray:
        """Return r, shape (point,)."""
        return as_complex(self.passes.front(p).r)[0]

    def t(self, p: bool) -> ComplexArray:
        """Return t, shape (point,)."""
        return as_complex(self.passes.front(p).t)[0]

    @property
    def lossless(self) -> BoolArray:
        """Points at which no film and no change of a real index takes or gives power."""
        return self.group.media.lossless & (self.group.ends.exit[1] == 0.0)[0]

    def grazing(self, p: bool) -> BoolArray:
        """Return where nothing changes because the light grazes the stack."""
        return self.passes.front(p).grazing[0]


class ByThickness(Amplitudes):
    """Every film's own thickness."""

    def _rows(self, p: bool) -> tuple[ComplexArray, ComplexArray]:
        dr = self._table[4 * p : 4 * p + 4]
        return dr[0] + 1j * dr[1], dr[2] + 1j * dr[3]

    @cached_property
    def _table(self) -> FloatArray:
        return self.passes.thickness(powers=False)

    @cached_property
    def powers(self) -> FloatArray:
        """dR_s, dT_s, dR_p, dT_p, shape (4, row, point)."""
        return self.passes.thickness(powers=True)


class ByIndex(Amplitudes):
    """Every film's own index."""

    def _rows(self, p: bool) -> tuple[ComplexArray, ComplexArray]:
        pairs = [self.passes.index(layer, p) for layer in range(len(self.group.order))]
        return _stacked(pairs, self.group.shape[1])


@dataclass(frozen=True)
class Place:
    """Where a needle goes in a group whose films were cut at the depths: interfaces counted from the front."""

    level: int
    """The needle's own."""
    front: int
    """Front face of the host film; also the number of the host's first piece."""
    back: int
    """Back face of the host film."""

    def from_behind(self, layers: int) -> Place:
        """Return the same place as light from behind meets it."""
        return Place(layers - self.level, layers - self.back, layers - self.front)


class ByNeedle(Amplitudes):
    """A needle at places of a group whose films were cut at the depths."""

    def __init__(self, group: Group, places: list[Place], needle: Media) -> None:
        super().__init__(group)
        self.places, self.needle = places, needle

    def _rows(self, p: bool) -> tuple[ComplexArray, ComplexArray]:
        v = as_complex(self.needle.v_p if p else self.needle.v_s)[0, 0]
        u = as_complex(self.needle.u_p)[0, 0] if p else np.ones_like(v)
        pairs = [self.passes.forms(at.level, at.front, at.back, p, u, v) for at in self.places]
        return _stacked(pairs, self.group.shape[1])

    @property
    def lossless(self) -> BoolArray:
        """Points at which neither a film nor the needle takes or gives power."""
        return super().lossless & self.needle.lossless


def _projected(a: ComplexArray, b: ComplexArray) -> FloatArray:
    """Return Re(conj(a) b), formed on reals: a complex product of numpy rounds by the shapes it meets."""
    return a.real * b.real + a.imag * b.imag


def _times(a: ComplexArray, b: ComplexArray) -> ComplexArray:
    """Return a b, formed on reals for the same reason."""
    return (a.real * b.real - a.imag * b.imag) + 1j * (a.real * b.imag + a.imag * b.real)


def _stacked(pairs: list[tuple[ComplexArray, ComplexArray]], points: int) -> tuple[ComplexArray, ComplexArray]:
    if not pairs:
        return np.empty((0, points), complex), np.empty((0, points), complex)
    dr, dl = zip(*pairs, strict=True)
    return np.stack(dr), np.stack(dl)


@dataclass(frozen=True)
class Rows:
    """Derivatives of a whole request, row by row: coherent, or through plates.

    Parameters
    ----------
    asked : Request
        The request.
    fronts, backs : list of Amplitudes
        Of each group, lit from the front and (with plates) from behind; rows of `backs` in the order of `fronts`.
    """

    asked: Request
    fronts: list[Amplitudes]
    backs: list[Amplitudes]

    def shaped(self, values: Any) -> Any:  # noqa: ANN401 - real or complex array
        """Turn points into (angle, wavelength)."""
        return values.reshape(*values.shape[:-1], *self.asked.shape)

    def amplitude(self, p: bool, transmitted: bool) -> ComplexArray:
        """Return dr or dt, shape (row, angle, wavelength)."""
        if self.backs:
            raise CoherenceError("a stack with a thick plate has no amplitude derivatives. Ask for dR and dT")
        front = self.fronts[0]
        dr, dl = front.rows(p)
        with np.errstate(invalid="ignore"):
            values = -_times(front.t(p), dl) if transmitted else dr
        return np.asarray(self.shaped(np.where(front.grazing(p), 0.0, values)))

    def power(self, p: bool, transmitted: bool, factor: complex = 1.0) -> FloatArray:
        """Return dR or dT, shape (row, angle, wavelength); `factor` is dN per unit of the variable."""
        if self.backs:
            return np.asarray(self.shaped(self._through_plates(p, transmitted, factor)))
        front = self.fronts[0]
        if isinstance(front, ByThickness):
            return np.asarray(self.shaped(front.powers[2 * p + transmitted]))
        dr, dl = front.rows(p)
        flux = front.passes.front(p).part(front.group.ends.flux(p))[0]
        with np.errstate(invalid="ignore"):
            r = front.r(p)
            by_r, by_t = 2.0 * _projected(r, factor * dr), -2.0 * flux * (factor * dl).real
            # Without loss dR + dT = 0: the one that is a difference of numbers near 1 is taken from the other.
            kept = front.lossless & (factor == 1.0)
            low = flux < _projected(r, r)
            reflected, passed = np.where(kept & low, -by_t, by_r), np.where(kept & ~low, -by_r, by_t)
        return np.asarray(self.shaped(np.where(front.grazing(p), 0.0, passed if transmitted else reflected)))

    def _through_plates(self, p: bool, transmitted: bool, factor: complex) -> FloatArray:
        """Carry the derivatives of |r|^2 and |t|^2 of each group through the ray sum."""
        chain = Incoherent(self.asked).chain(p)
        _, loads, gaps = chain.solved
        total = chain.transmittance[0]
        rows: list[FloatArray] = []
        carry = np.ones_like(total)  # d(B/F in front) / d(B/F in front of this group)
        upstream = np.zeros_like(total)  # d ln T / d(B/F in front of this group)
        for place, (front, back) in enumerate(zip(self.fronts, self.backs, strict=True)):
            crossing = chain.groups[place]
            load, gap = loads[place][0], gaps[place][0]
            both = (crossing.transmitted * crossing.back_transmitted)[0]
            dr, dl = front.rows(p)
            back_dr, _ = back.rows(p)
            with np.errstate(invalid="ignore", divide="ignore"):
                reflected = 2.0 * _projected(front.r(p), factor * dr)
                back_reflected = 2.0 * _projected(back.r(p), factor * back_dr)
                log_transmitted = -2.0 * (factor * dl).real
                ratio = (
                    reflected + 2.0 * log_transmitted * both * load / gap + back_reflected * both * (load / gap) ** 2
                )
                if transmitted:
                    rows.append(total * (log_transmitted + load / gap * back_reflected + upstream * ratio))
                else:
                    rows.append(carry * ratio)
                if place < len(chain.decays):
                    fade = np.exp(-2.0 * chain.decays[place][0])
                    step = both / gap**2 * fade
                    upstream = upstream * step + crossing.back_reflectance[0] / gap * fade
                    carry = carry * step
        return np.where(chain.grazing[0], 0.0, np.concatenate(rows))


class Turned(Amplitudes):
    """The rows of a group lit from behind, in the order of the light from the front."""

    def __init__(self, inner: Amplitudes) -> None:
        self.inner, self.group, self.passes = inner, inner.group, inner.passes

    def rows(self, p: bool) -> tuple[ComplexArray, ComplexArray]:
        """Return dr and d ln(1/t), the front film first."""
        dr, dl = self.inner.rows(p)
        return dr[::-1], dl[::-1]
