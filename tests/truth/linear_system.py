"""The boundary conditions of a whole stack as one linear system in 50 digits: the plainest route there is.

Each film holds a forward wave F, given at its front face, and a backward wave B, given at its back face; at every
interface the tangential E and H are continuous. No matrix of a layer, no recursion. exp(+i omega t), N = n - ik.
"""

from __future__ import annotations

import mpmath as mp
from truth.reference import DIGITS, Answer, admittances, normal_wavenumbers


def solve_at_once(media, wavelength, angle, p):
    """Return r, t, R, T and the absorptance of each film, by quadrature of the absorbed power density."""
    with mp.workdps(DIGITS):
        b = mp.mpf(media.n[0]) * mp.sin(mp.mpf(angle) * mp.pi / 180)
        k0 = 2 * mp.pi / mp.mpf(wavelength)
        kappa = normal_wavenumbers(media, b)
        y = admittances(media, kappa, p)
        last = len(y) - 1
        phase = [mp.exp(-1j * k0 * kappa[j] * mp.mpf(media.d[j])) for j in range(1, last)]
        waves = _amplitudes(y, phase)
        r, t = waves[0], waves[-1]
        index = [mp.mpc(n, -k) for n, k in zip(media.n, media.k, strict=True)]
        cosine = [q / n for q, n in zip(kappa, index, strict=True)]
        passed = mp.re(y[-1]) / mp.re(y[0]) * abs(t) ** 2
        absorbed = []
        for j in range(1, last):
            film = waves[2 * j - 1], waves[2 * j]
            absorbed.append(_quadrature(index[j], kappa[j], mp.mpf(media.d[j]), k0, b, film, p) / mp.re(y[0]))
        return Answer(r, t * (cosine[0] / cosine[-1] if p else 1), abs(r) ** 2, passed, absorbed)


def _amplitudes(y, phase):
    """Return the tangential E of r, then F and B of each film, then of the wave that leaves."""
    last = len(y) - 1
    size = 2 * last
    matrix, right = mp.matrix(size, size), mp.matrix(size, 1)
    for j in range(last):  # the interface behind medium j
        for row, weights in ((2 * j, (1, 1, 1, 1)), (2 * j + 1, (y[j], -y[j], y[j + 1], -y[j + 1]))):
            forward, backward, ahead, returned = weights
            if j:
                matrix[row, 2 * j - 1] = forward * phase[j - 1]
                matrix[row, 2 * j] = backward
            else:
                matrix[row, 0] = backward
                right[row] = -forward
            matrix[row, 2 * j + 1] = -ahead
            if j + 1 < last:
                matrix[row, 2 * j + 2] = -returned * phase[j]
    return mp.lu_solve(matrix, right)


def _quadrature(index, kappa, d, k0, b, film, p):
    """Integrate -Im(N^2) |E|^2 k0 over a film, all components of the electric field, Re y = 1 in front."""
    forward, backward = film
    if index.imag == 0 or d == 0:
        return mp.mpf(0)
    y = index**2 / kappa if p else kappa

    def density(z):
        ahead = forward * mp.exp(-1j * k0 * kappa * z)
        returned = backward * mp.exp(-1j * k0 * kappa * (d - z))
        tangential = abs(ahead + returned) ** 2
        # Across the film: E_z = b H / N^2 (Maxwell).
        across = abs(b * y * (ahead - returned) / index**2) ** 2 if p else 0
        return -mp.im(index**2) * (tangential + across)

    # Pieces short against the wavelength, so that the rule reaches its digits.
    pieces = int(mp.ceil(abs(kappa) * k0 * d)) + 1
    return k0 * mp.quad(density, mp.linspace(0, d, pieces + 1))
