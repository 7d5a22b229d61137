"""High-precision references by routes other than the product of characteristic matrices.

Amplitudes: Airy's summation from interface to interface, 50 digits. Absorptance of a layer: the exact
integral of the absorbed power density over its two waves. Thick plates: the ray sum. Conventions of
the package: exp(+i omega t), N = n - ik, r_p = r_s at normal incidence, t_p of full electric fields.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp

DIGITS = 50


@dataclass(frozen=True)
class Media:
    """A row of media: (n, k) of each, thickness in nm of the inner ones (the ends' are ignored)."""

    n: list
    k: list
    d: list

    def turned(self):
        return Media(self.n[::-1], self.k[::-1], self.d[::-1])


@dataclass(frozen=True)
class Answer:
    r: mp.mpc
    t: mp.mpc
    R: mp.mpf
    T: mp.mpf
    A: list


def normal_wavenumbers(media, b):
    """Return kappa of every medium, Im <= 0, and Re >= 0 where lossless."""
    found = []
    for n, k in zip(media.n, media.k, strict=True):
        kappa = mp.sqrt(mp.mpc(n, -k) ** 2 - b * b)
        found.append(-kappa if kappa.imag > 0 or (kappa.imag == 0 and kappa.real < 0) else kappa)
    return found


def admittances(media, kappa, p):
    return [mp.mpc(n, -k) ** 2 / q if p else q for n, k, q in zip(media.n, media.k, kappa, strict=True)]


def solve(media, wavelength, angle, p, b=None):
    """Return r, t, R, T and the absorptance of each inner layer."""
    with mp.workdps(DIGITS):
        theta = mp.mpf(angle) * mp.pi / 180
        b = mp.mpf(media.n[0]) * mp.sin(theta) if b is None else b
        k0 = 2 * mp.pi / mp.mpf(wavelength)
        kappa = normal_wavenumbers(media, b)
        y = admittances(media, kappa, p)
        last = len(y) - 1
        steps = [(y[j] - y[j + 1]) / (y[j] + y[j + 1]) for j in range(last)]
        passes = [2 * y[j] / (y[j] + y[j + 1]) for j in range(last)]
        phase = [
            mp.exp(-1j * k0 * kappa[j] * mp.mpf(media.d[j])) if 0 < j < last else mp.mpf(1) for j in range(last + 1)
        ]
        # r seen just in front of each interface, from the back (Airy).
        seen = [mp.mpc(0)] * last
        seen[-1] = steps[-1]
        for j in range(last - 2, -1, -1):
            inner = seen[j + 1] * phase[j + 1] ** 2
            seen[j] = (steps[j] + inner) / (1 + steps[j] * inner)
        # Forward wave at the front of each medium.
        forward = [mp.mpc(1)]
        for j in range(last):
            inner = seen[j + 1] * phase[j + 1] ** 2 if j + 1 < last else mp.mpf(0)
            forward.append(forward[j] * phase[j] * passes[j] / (1 + steps[j] * inner))
        r, t = seen[0], forward[last]
        full = t * (
            mp.mpc(media.n[last], -media.k[last]) * kappa[0] / (kappa[last] * mp.mpc(media.n[0], -media.k[0]))
            if p
            else 1
        )
        absorbed = [
            _absorbed(media, j, forward[j], seen[j] * phase[j] ** 2 * forward[j], kappa[j], y[j], b, k0, p)
            / mp.re(y[0])
            for j in range(1, last)
        ]
        return Answer(r, full, abs(r) ** 2, mp.re(y[last]) / mp.re(y[0]) * abs(t) ** 2, absorbed)


def _absorbed(media, j, forward, backward, kappa, y, b, k0, p):
    """Integrate k0 (-Im v |E|^2 - Im u |H|^2) over a layer with E = F exp(-i kappa k0 z) + B exp(+i kappa k0 z)."""
    square = mp.mpc(media.n[j], -media.k[j]) ** 2
    v = square if p else kappa**2
    u = 1 - b * b / square if p else mp.mpf(1)
    if square.imag == 0:
        return mp.mpf(0)
    d = mp.mpf(media.d[j])
    alpha, beta = kappa.real, -kappa.imag
    fall = -mp.expm1(-2 * beta * k0 * d) / (2 * beta)
    rise = mp.expm1(2 * beta * k0 * d) / (2 * beta)
    turn = mp.expm1(-2j * alpha * k0 * d) / (-2j * alpha) if alpha else k0 * d
    total = mp.mpf(0)
    for weight, back in ((-v.imag, backward), (-u.imag * abs(y) ** 2, -backward)):
        cross = 2 * mp.re(forward * mp.conj(back) * turn)
        total += weight * (abs(forward) ** 2 * fall + abs(back) ** 2 * rise + cross)
    return total


def plate(front, back, plate_nk, thickness_nm, wavelength, angle, p):
    """Return R, T and A of one thick plate between two groups of films, by the ray sum.

    `front` and `back` are lists of (n, k, d) between air and the plate, and the plate and air.
    """
    with mp.workdps(DIGITS):
        theta = mp.mpf(angle) * mp.pi / 180
        b = mp.sin(theta)
        air, glass = (1, 0, 0), (*plate_nk, 0)

        def media(row):
            return Media(*(list(column) for column in zip(*row, strict=True)))

        first, second = media([air, *front, glass]), media([glass, *back, air])
        k0 = 2 * mp.pi / mp.mpf(wavelength)
        kappa = normal_wavenumbers(media([glass]), b)[0]
        fade = mp.exp(2 * kappa.imag * k0 * mp.mpf(thickness_nm))
        lit, behind = solve(first, wavelength, angle, p, b), solve(second, wavelength, angle, p, b)
        inside = solve(first.turned(), wavelength, angle, p, b)
        # Tangential amplitudes, so that a lossy plate needs no transmittance "into" it.
        turn = mp.sqrt(1 - b * b)
        there, back_again, out = lit.t, inside.t, behind.t
        if p:
            n = mp.mpc(plate_nk[0], -plate_nk[1])
            there, back_again, out = there * kappa / (n * turn), back_again * n * turn / kappa, out * n * turn / kappa
        caught = 1 - abs(inside.r) ** 2 * abs(behind.r) ** 2 * fade**2
        reflected = abs(lit.r) ** 2 + abs(there) ** 2 * abs(back_again) ** 2 * abs(behind.r) ** 2 * fade**2 / caught
        return reflected, abs(there) ** 2 * fade * abs(out) ** 2 / caught
