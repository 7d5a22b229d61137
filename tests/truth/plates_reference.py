"""Rows of thick plates in 50 digits: one linear system of the intensities at every face.

Unknowns are |E_tan|^2 of the waves forward and back in each plate. What a film or a plate absorbs follows from
the conservation of flux alone: the flux that light from either side carries through a group of films is what leaves on
its far side plus the exact integrals over its films. No formula of the package is used.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp
from truth.reference import DIGITS, Media, admittances, normal_wavenumbers, solve


@dataclass(frozen=True)
class PlateAnswer:
    R: mp.mpf
    T: mp.mpf
    films: list
    plates: list


@dataclass(frozen=True)
class _Crossing:
    """A group of films lit by |E_tan|^2 = 1: powers reflected and passed (of |E_tan|^2) and the flux absorbed."""

    reflected: mp.mpf
    passed: mp.mpf
    films: list


def _lit(row, wavelength, p, b):
    media = Media(*(list(column) for column in zip(*row, strict=True)))
    # `solve` divides by Re y of the incident medium; a plate's is finite, so the product is the flux.
    found = solve(media, wavelength, 0, p, b)
    kappa = normal_wavenumbers(media, b)
    y = admittances(media, kappa, p)
    # From full to tangential fields; Re y of the last medium may be 0.
    first, last = (mp.mpc(media.n[j], -media.k[j]) for j in (0, -1))
    passed = abs(found.t * (kappa[-1] * first / (last * kappa[0]) if p else 1)) ** 2
    return _Crossing(found.R, passed, [a * mp.re(y[0]) for a in found.A]), y


def solve_plates(ends, groups, plates, wavelength, angle, p):
    """Return R, T, the absorptance of each film and of each plate.

    `ends`: (n, k) of the outer media. `groups`: one list of films (n, k, d in nm) before, between and behind
    the plates. `plates`: (n, k, d in nm).
    """
    with mp.workdps(DIGITS):
        b = mp.mpf(ends[0][0]) * mp.sin(mp.mpf(angle) * mp.pi / 180)
        k0 = 2 * mp.pi / mp.mpf(wavelength)
        between = [(*ends[0], 0), *plates, (*ends[1], 0)]
        there, back, y = [], [], []
        for j, films in enumerate(groups):
            row = [between[j], *films, between[j + 1]]
            crossing, admittance = _lit(row, wavelength, p, b)
            there.append(crossing)
            # Nothing comes back from the last medium.
            back.append(_lit(row[::-1], wavelength, p, b)[0] if j < len(plates) else None)
            y.append(mp.re(admittance[0]))
        y.append(mp.re(admittance[-1]))
        kappa = normal_wavenumbers(Media(*(list(c) for c in zip(*between, strict=True))), b)
        fade = [mp.exp(2 * kappa[j + 1].imag * k0 * mp.mpf(plates[j][2])) for j in range(len(plates))]
        # Unknowns: F_j at the front of plate j, B_j at its front (the wave that goes back).
        count = len(plates)
        matrix, right = mp.matrix(2 * count, 2 * count), mp.matrix(2 * count, 1)
        for j in range(count):
            matrix[2 * j, 2 * j] = 1
            matrix[2 * j, 2 * j + 1] = -back[j].reflected
            if j:
                matrix[2 * j, 2 * j - 2] = -there[j].passed * fade[j - 1]
            else:
                right[0] = there[0].passed
            # Back at the front = fade x (reflected by the next group x fade x F + what comes through it).
            matrix[2 * j + 1, 2 * j + 1] = 1
            matrix[2 * j + 1, 2 * j] = -fade[j] * there[j + 1].reflected * fade[j]
            if j + 1 < count:
                matrix[2 * j + 1, 2 * j + 3] = -fade[j] * back[j + 1].passed
        waves = mp.lu_solve(matrix, right)
        forward = [mp.mpf(1), *(waves[2 * j] * fade[j] for j in range(count))]  # onto each group from the front
        backward = [*(waves[2 * j + 1] for j in range(count)), mp.mpf(0)]  # onto each group from behind
        films, into = [], []
        for j in range(count + 1):
            behind = back[j].films[::-1] if j < count else [mp.mpf(0)] * len(groups[j])
            own = [forward[j] * a + backward[j] * c for a, c in zip(there[j].films, behind, strict=True)]
            films += [x / y[0] for x in own]
            leaves = forward[j] * there[j].passed * y[j + 1]
            returns = backward[j] * back[j].passed * y[j] if j < count else mp.mpf(0)
            lost_back = backward[j] * mp.fsum(behind)
            # Net flux at the far and at the near side of the group.
            far = leaves - returns - lost_back
            near = leaves + forward[j] * mp.fsum(there[j].films) - returns
            into.append((near, far))
        absorbed = [(into[j][1] - into[j + 1][0]) / y[0] for j in range(count)]
        reflected = there[0].reflected + backward[0] * back[0].passed
        return PlateAnswer(reflected, into[-1][1] / y[0], films, absorbed)
