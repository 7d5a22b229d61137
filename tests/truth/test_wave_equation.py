"""The wave equation integrated by a general-purpose solver, for a few stacks."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

import filmstack as fs

STACKS = [
    [(2.35, 0.0, 80.0), (1.46, 0.0, 95.0), (1.38, 0.0, 210.0)],
    [(2.35, 0.01, 80.0), (0.06, 3.3, 25.0), (1.7, 0.3, 140.0)],
    [(1.9, 0.0, 120.0), (0.7, 0.0, 90.0), (2.1, 1e-3, 60.0)],
]


@pytest.mark.parametrize("films", STACKS)
@pytest.mark.parametrize(("angle", "p"), [(0.0, False), (40.0, False), (40.0, True), (75.0, True)])
def test_amplitudes_by_integration_of_the_wave_equation(films, angle, p):
    # E' = -i k0 u H, H' = -i k0 v E from the exit to the front (Born and Wolf 1.6.2), scipy DOP853 at 1e-12.
    wavelength, k0 = 633.0, 2.0 * np.pi / 633.0
    b = np.sin(np.radians(angle))

    def medium(n, k):
        square = complex(n, -k) ** 2
        return (1.0 - b * b / square, square) if p else (1.0, square - b * b)

    kappa = np.sqrt(1.52**2 - b * b)
    e, h = (1.0 + 0j, 1.52**2 / kappa + 0j) if p else (1.0 + 0j, kappa + 0j)
    for n, k, d in films[::-1]:
        u, v = medium(n, k)
        run = solve_ivp(
            lambda z, w, u=u, v=v: [-1j * k0 * u * w[1], -1j * k0 * v * w[0]], (d, 0.0), [e, h], "DOP853",
            rtol=1e-12, atol=1e-13,
        )  # fmt: skip
        e, h = run.y[:, -1]
    cosine = np.cos(np.radians(angle))
    y0 = 1.0 / cosine if p else cosine
    toward, back = 0.5 * (e + h / y0), 0.5 * (e - h / y0)
    t = 1.0 / toward * (1.52 / kappa * cosine if p else 1.0)
    layers = [fs.Layer(fs.constant(n, k), d) for n, k, d in films]
    s = fs.spectrum(fs.Stack(fs.constant(1.0), layers, fs.constant(1.52)), wavelength, angle)
    name = "p" if p else "s"
    assert getattr(s, f"r_{name}")[0, 0] == pytest.approx(back / toward, abs=1e-9)
    assert getattr(s, f"t_{name}")[0, 0] == pytest.approx(t, abs=1e-9)
