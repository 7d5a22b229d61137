"""D and the flux of T next to one photon energy, as Taylor series: `analysis.peaks` -> here -> `jets`, `series`.

T = flux / |D|^2 with D = a1 E + a2 H, the wave towards the stack. Unlike a phase, |D| needs the factor
exp|Im delta| of each absorbing or evanescent layer, which changes with photon energy and is put back here.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from filmstack.wave.jets import RESCALE_EVERY, faded_cosine_sine, lower
from filmstack.wave.series import Series, conjugate, exp, real, sqrt

if TYPE_CHECKING:
    from collections.abc import Hashable

    from filmstack.arraytypes import FloatArray


@dataclass(frozen=True)
class Local:
    """|D|^2 and flux of one polarization as real series, shapes (order + 1, point); the true |D|^2 is times 2^log2."""

    power: Series
    flux: Series
    log2: FloatArray


def local(
    media: Mapping[Hashable, Series],
    films: Sequence[tuple[Hashable, float]],
    ends: tuple[Hashable, Hashable],
    k0: Series,
    sine: float,
    cosine: float,
    p: bool,
) -> Local:
    """Return |D|^2 and the flux of T.

    Parameters
    ----------
    media : mapping of Series, shape (order + 1, point)
        N of every medium, the incident one real. [1]
    films : sequence of (key of media, float)
        Films, front first, and their thickness. [nm]
    ends : (key, key)
        Incident and exit medium.
    k0 : Series
        Vacuum wavenumber. [1/nm]
    sine, cosine : float
        Of the angle of incidence, which is held fixed.
    p : bool
        p, else s.
    """
    incident, leaving = (media[key] for key in ends)
    b = incident * sine
    straight = sine == 0.0
    kappa = {key: lower(sqrt(n * n - b * b), n, straight) for key, n in media.items()}
    admittance = {key: n * n / kappa[key] if p and not straight else kappa[key] for key, n in media.items()}
    if p and not straight:
        e, h = kappa[ends[1]], leaving * leaving
    else:
        e, h = leaving._like(1.0), kappa[ends[1]]
    flux_out = real(e * conjugate(h))
    grown = leaving._like(0.0)
    log2 = np.zeros(leaving.c.shape[1:])
    steps: dict[tuple[Hashable, float], tuple[Series, Series, Series | None]] = {}
    for number, (key, d) in enumerate(reversed(list(films)), start=1):
        if (key, d) not in steps:
            steps[key, d] = _step(kappa[key] * k0 * d)
        cosine_of, sine_of, grows = steps[key, d]
        if grows is not None:
            grown = grown + grows
        y = admittance[key]
        e, h = cosine_of * e + 1j * (sine_of / y) * h, 1j * (sine_of * y) * e + cosine_of * h
        if number % RESCALE_EVERY == 0:
            _, exponent = np.frexp(np.abs(e.c[0]) + np.abs(h.c[0]))
            scale = np.ldexp(1.0, -exponent)
            e, h, log2 = Series(e.c * scale), Series(h.c * scale), log2 + 2.0 * exponent
    a1, a2 = (incident, cosine) if p and not straight else (incident * cosine, 1.0)
    d_front = a1 * e + a2 * h
    power = real(d_front * conjugate(d_front))
    start = grown.c[0].real.copy()
    power = power * exp(2.0 * (grown - start))
    return Local(power, 4.0 * real(a1 * a2) * flux_out, log2 + 2.0 * start / np.log(2.0))


def _step(delta: Series) -> tuple[Series, Series, Series | None]:
    """Return cos and sin of delta over exp|Im delta|, and |Im delta| unless it is 0."""
    faded = faded_cosine_sine(delta)
    return *faded, Series(-delta.c.imag.astype(complex)) if np.any(delta.c.imag) else None
