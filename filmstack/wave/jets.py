"""Phase and its derivatives by photon energy: every quantity is a Taylor series carried through the layers.

`analysis.phase` -> here. `Series` holds value and derivatives; the characteristic matrix, the end media and
the quotient r = num / D are formed on series, so nothing is a finite difference. Of each layer the real,
positive factor exp|Im delta|, a function of the photon energy, is left out: it has no phase.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from filmstack.wave.series import Series, exp, log, sqrt

if TYPE_CHECKING:
    from collections.abc import Sequence

    from filmstack.arraytypes import FloatArray

RESCALE_EVERY = 16


@dataclass(frozen=True)
class Line:
    """A row of media at one polarization, as series in the photon energy; all of one shape.

    Parameters
    ----------
    films : sequence of (Series, float)
        N of each film, front first, and its thickness. [1], [nm]
    incident, exit : Series
        N of the end media; the incident one real. [1]
    k0 : Series
        Vacuum wavenumber. [1/nm]
    sine, cosine : ndarray
        Of the angle of incidence, which is held fixed.
    p : bool
        p, else s.
    """

    films: Sequence[tuple[Series, float]]
    incident: Series
    exit: Series
    k0: Series
    sine: FloatArray
    cosine: FloatArray
    p: bool

    def logarithms(self) -> tuple[Series, Series]:
        """Return log r and log t, of which the imaginary part is the phase."""
        e, h = self._front()
        a1, a2 = (self.incident, self.cosine) if self.p else (self.incident * self.cosine, 1.0)
        toward, back = a1 * e + a2 * h, a1 * e - a2 * h
        numerator = self.incident * (2.0 * self.cosine)
        if self.p:
            numerator = numerator * self.exit
        return log(back / toward), log(numerator / toward)

    def _kappa(self, n: Series) -> Series:
        b = self.incident * self.sine
        return lower(sqrt(n * n - b * b), n, bool(np.all(self.sine == 0.0)))

    def _front(self) -> tuple[Series, Series]:
        """Return E and H at the first interface, up to a real positive factor."""
        kappa = self._kappa(self.exit)
        one = self.exit._like(1.0)
        e, h = (kappa, self.exit * self.exit) if self.p else (one, kappa)
        for number, (n, d) in enumerate(reversed(list(self.films)), start=1):
            kappa = self._kappa(n)
            cosine, sine = faded_cosine_sine(kappa * self.k0 * d)
            y = n * n / kappa if self.p else kappa
            e, h = cosine * e + 1j * (sine / y) * h, 1j * (sine * y) * e + cosine * h
            if number % RESCALE_EVERY == 0:
                e, h = _halved(e, h)
        return e, h


def lower(kappa: Series, n: Series, straight: bool) -> Series:
    """Return the root with Im kappa <= 0; n itself at normal incidence."""
    if straight:
        return n
    wrong = (kappa.c[0].imag > 0.0) | ((kappa.c[0].imag == 0.0) & (kappa.c[0].real < 0.0))
    return Series(np.where(wrong, -kappa.c, kappa.c))


def faded_cosine_sine(delta: Series) -> tuple[Series, Series]:
    """Return cos(delta) and sin(delta), both over exp(-Im delta), a real factor."""
    grow = Series(delta.c.imag.astype(complex))  # <= 0
    turn = exp(1j * Series(delta.c.real.astype(complex)))
    fade = exp(2.0 * grow)
    # exp(i delta) exp(Im delta) = exp(i Re delta); exp(-i delta) exp(Im delta) = exp(-i Re delta) exp(2 Im delta).
    back = fade / turn
    return 0.5 * (turn + back), -0.5j * (turn - back)


def _halved(e: Series, h: Series) -> tuple[Series, Series]:
    """Bring both to the middle of the range by one power of two a point."""
    size = np.abs(e.c[0]) + np.abs(h.c[0])
    _, exponent = np.frexp(np.where(size > 0.0, size, 1.0))
    scale = np.ldexp(1.0, -exponent)
    return Series(e.c * scale), Series(h.c * scale)
