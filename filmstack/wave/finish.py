"""From the fields at an interface to amplitudes, powers and absorbed fractions.

`filmstack.wave.route` -> here -> `filmstack.analysis`. A state is the array of `kernels`: the true
field is the stored one times 2^(200 n) exp(y / 2) (-1)^turns. `p` chooses the polarization.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from filmstack.wave import arithmetic, kernels
from filmstack.wave.media import Ends, Pair, over, times

if TYPE_CHECKING:
    from filmstack.arraytypes import BoolArray, ComplexArray, FloatArray

LOG10_2 = float(np.log10(2.0))
LOG10_E = float(np.log10(np.e))


def fields(state: FloatArray, p: bool) -> tuple[Pair, Pair]:
    """Return the stored E and H, each as a pair of reals."""
    er, hi, hr, ei = np.moveaxis(state[:, 4:8] if p else state[:, 0:4], 1, 0)
    return (er, ei), (hr, hi)


def halvings(state: FloatArray, p: bool) -> FloatArray:
    """Return the count of factors 2^200 taken out of a polarization."""
    return np.asarray(state[:, kernels.SCALE_P if p else kernels.SCALE_S])


def as_complex(pair: Pair) -> ComplexArray:
    """Join a pair of reals."""
    return np.asarray(pair[0] + 1j * pair[1])


@dataclass(frozen=True)
class Front:
    """What one polarization of a solved group shows at its first interface.

    Parameters
    ----------
    ends : Ends
        The end media of the group.
    state : ndarray, shape (sample, STATE_ROWS, point)
        Fields at the first interface.
    p : bool
        p, else s.
    dark : ndarray of bool
        Where no p passes because of a film of N = 0.
    """

    ends: Ends
    state: FloatArray
    p: bool
    dark: BoolArray

    @cached_property
    def waves(self) -> tuple[Pair, Pair]:
        """Stored a1 E + a2 H (towards the stack) and a1 E - a2 H (back)."""
        e, h = fields(self.state, self.p)
        a1, a2 = self.ends.incident_pair(self.p)
        x, y = times(a1, e), times(a2, h)
        return (x[0] + y[0], x[1] + y[1]), (x[0] - y[0], x[1] - y[1])

    @cached_property
    def size(self) -> FloatArray:
        """Stored |a1 E + a2 H|^2."""
        d = self.waves[0]
        return np.asarray(d[0] * d[0] + d[1] * d[1])

    @property
    def grazing(self) -> BoolArray:
        """True where light grazes the stack: at exactly 90 degrees, or with no wave towards it at all."""
        return np.asarray((self.size == 0.0) | (self.ends.outer & (self.ends.direction.cosine == 0.0)))

    @cached_property
    def r(self) -> Pair:
        """Amplitude reflectance (ratio of tangential E), r_s = -1 and r_p = +1 at 90 degrees."""
        with np.errstate(divide="ignore", invalid="ignore"):
            re, im = over(self.waves[1], self.waves[0])
        return np.where(self.grazing, 1.0 if self.p else -1.0, re), np.where(self.grazing, 0.0, im)

    @cached_property
    def t(self) -> Pair:
        """Amplitude transmittance, the ratio of full electric fields."""
        with np.errstate(divide="ignore", invalid="ignore"):
            re, im = over(self.ends.amplitude(self.p), self.waves[0])
        sign = 1.0 - 2.0 * np.mod(self.state[:, kernels.TURNS], 2.0)
        re, im = (np.where(self.grazing | self._closed, 0.0, sign * part) for part in (re, im))
        decay, count = 0.5 * self.state[:, kernels.DECAY], 200.0 * halvings(self.state, self.p)
        return np.asarray(arithmetic.halved(re, decay, count)), np.asarray(arithmetic.halved(im, decay, count))

    @cached_property
    def log10_size(self) -> FloatArray:
        """log10 of the true |a1 E + a2 H|^2, beyond the range of doubles too."""
        stored = np.log10(np.where(self.size == 0.0, 1.0, self.size)) + LOG10_E * self.state[:, kernels.DECAY]
        return np.asarray(stored + 400.0 * LOG10_2 * halvings(self.state, self.p))

    @property
    def log10_transmittance(self) -> FloatArray:
        """log10 T, -inf only where no light passes by law."""
        with np.errstate(divide="ignore"):
            return np.asarray(np.log10(np.where(self._closed, 0.0, self.ends.flux(self.p))) - self.log10_size)

    @property
    def _closed(self) -> BoolArray:
        return self.dark if self.p else np.zeros((1, 1), dtype=bool)

    def part(self, numerator: FloatArray) -> FloatArray:
        """Return numerator / |D|^2 with the true D; nothing passes where p is blocked."""
        numerator = np.where(self._closed | self.grazing, 0.0, numerator)
        size = np.where(self.grazing, 1.0, self.size)
        count = 400.0 * halvings(self.state, self.p)
        return np.asarray(arithmetic.halved(numerator / size, self.state[:, kernels.DECAY], count))
