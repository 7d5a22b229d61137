"""The references against each other, by routes that share nothing, and the textbook's matrix against the engine."""

import mpmath as mp
import numpy as np
import pytest
from truth.linear_system import solve_at_once
from truth.reference import DIGITS, Media, solve
from truth.textbook import spectrum_point

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant

MEDIA = {
    "bare glass": Media([1.0, 1.52], [0.0, 0.0], [0.0, 0.0]),
    "lossless": Media([1.0, 2.35, 1.46, 2.1, 1.52], [0.0] * 5, [0.0, 80.0, 95.0, 210.0, 0.0]),
    "absorbing": Media([1.0, 2.35, 1.46, 1.9, 1.6], [0.0, 0.01, 1e-7, 0.5, 0.2], [0.0, 80.0, 95.0, 60.0, 0.0]),
    "metal": Media([1.515, 0.0562, 1.7, 0.05, 1.0], [0.0, 4.2776, 0.3, 3.3, 0.0], [0.0, 50.0, 140.0, 12.0, 0.0]),
    "evanescent": Media([2.0, 1.0, 1.8, 0.9, 2.0], [0.0, 0.0, 0.0, 1e-3, 0.0], [0.0, 150.0, 70.0, 90.0, 0.0]),
    "low index": Media([1.0, 2.0, 0.01, 1.5, 1.52], [0.0, 0.0, 0.02, 0.1, 0.0], [0.0, 60.0, 50.0, 100.0, 0.0]),
}


@pytest.mark.parametrize("p", [False, True])
@pytest.mark.parametrize("angle", [0.0, 20.0, 40.0, 75.0])
@pytest.mark.parametrize("kind", MEDIA)
def test_recursion_and_linear_system_agree_to_forty_digits(kind, angle, p):
    # Airy's recursion with the closed integral of the absorbed power, against one linear system with quadrature.
    # Where r_s = r_p at normal incidence both use the tangential E, whose ratio is the package's r.
    one, other = (route(MEDIA[kind], 633.0, angle, p) for route in (solve, solve_at_once))
    with mp.workdps(DIGITS):
        for name in ("r", "t", "R", "T"):
            assert abs(getattr(one, name) - getattr(other, name)) < mp.mpf(10) ** -40, name
        for closed, summed in zip(one.A, other.A, strict=True):
            assert abs(closed - summed) < mp.mpf(10) ** -30
        # The difference of fluxes, which neither used.
        assert abs(other.R + other.T + mp.fsum(other.A) - 1) < mp.mpf(10) ** -30


@pytest.mark.parametrize("route", ["small", "compiled"])
@pytest.mark.parametrize("kind", MEDIA)
def test_engine_against_the_textbooks_matrix(kind, route):
    # Double precision on both sides; the textbook's sine and cosine of a complex phase leave some 1e-13.
    media, wavelength, angle = MEDIA[kind], np.array([450.0, 633.0, 1064.0]), np.array([0.0, 20.0, 40.0, 75.0])
    layers = [fs.Layer(C(n, k), d) for n, k, d in zip(media.n, media.k, media.d, strict=True)][1:-1]
    with forced(route):
        s = fs.spectrum(fs.Stack(C(media.n[0]), layers, C(media.n[-1], media.k[-1])), wavelength, angle)
        films = [(complex(n, -k), d) for n, k, d in zip(media.n, media.k, media.d, strict=True)][1:-1]
        for i, theta in enumerate(angle):
            for j, lam in enumerate(wavelength):
                for p, q in ((False, "s"), (True, "p")):
                    wanted = spectrum_point(media.n[0], films, complex(media.n[-1], -media.k[-1]), lam, theta, p)
                    for name in ("r", "t", "R", "T"):
                        found = getattr(s, f"{name}_{q}")[i, j]
                        assert found == pytest.approx(getattr(wanted, name), rel=1e-11, abs=1e-13), (name, q, theta)
