"""Where terms nearly cancel although the quantity itself is well conditioned; 50 digits by another route.

One rounding of the inputs changes none of these by more than 1e-13 of itself.
"""

import mpmath as mp
import numpy as np
import pytest
from truth.reference import DIGITS, Media, solve

import filmstack as fs

C = fs.constant


@pytest.mark.parametrize("angle", [1e-2, 1e-4])
def test_absorptance_of_p_in_a_film_of_low_index(angle):
    film = (0.02, 1e-5, 5.0)
    s = fs.spectrum(fs.Stack(C(1.0), [fs.Layer(C(*film[:2]), film[2])], C(4.0)), 600.0, angle)
    true = solve(Media([1.0, film[0], 4.0], [0.0, film[1], 0.0], [0.0, film[2], 0.0]), 600.0, angle, True)
    assert abs(mp.mpf(float(s.A_p[0, 0])) - true.A[0]) <= 1e-12 * true.A[0]


@pytest.mark.parametrize("thickness", [100.0, 200.0, 300.0])
def test_thickness_gradient_of_an_opaque_film(thickness):
    silver = (0.05, 3.3)
    gradient = fs.thickness_gradient(fs.Stack(C(1.0), [fs.Layer(C(*silver), thickness)], C(1.5)), 550.0)
    with mp.workdps(DIGITS):
        step = mp.mpf(10) ** -24
        ends = [
            solve(Media([1.0, silver[0], 1.5], [0.0, silver[1], 0.0], [0.0, d, 0.0]), 550.0, 0.0, False)
            for d in (mp.mpf(thickness), mp.mpf(thickness) + step)
        ]
        slopes = {name: (getattr(ends[1], name) - getattr(ends[0], name)) / step for name in ("r", "R", "t", "T")}
    for name, wanted in slopes.items():
        value = mp.mpmathify(complex(getattr(gradient, f"d{name}_s")[0, 0, 0]))
        assert abs(value - wanted) <= 1e-9 * abs(wanted), name


def test_lossless_needle_in_a_lossless_mirror():
    # Conservation of energy: dR = -dT, to the 1e-9 promised, however near R is to 1.
    layers = [fs.Layer(C(n), 550.0 / (4.0 * n)) for n in (2.35, 1.45)] * 15
    needle = fs.needle_gradient(fs.Stack(C(1.0), layers, C(1.52)), 560.0, material=C(2.0))
    np.testing.assert_allclose(needle.dR_s, -needle.dT_s, rtol=1e-9)
    # Total reflection: R stays 1 whatever lossless film is there.
    needle = fs.needle_gradient(fs.Stack(C(2.0), [fs.Layer(C(1.5), 100.0)], C(1.0)), 550.0, 60.0, material=C(2.3))
    np.testing.assert_array_equal(needle.dR_s, 0.0)


def test_lossless_films_of_a_lossless_mirror():
    # Conservation of energy: dR = -dT by thickness and by index.
    layers = [fs.Layer(C(n), 550.0 / (4.0 * n)) for n in (2.35, 1.45)] * 15
    stack = fs.Stack(C(1.0), layers, C(1.52))
    by_d, by_n = fs.thickness_gradient(stack, 560.0, 30.0), fs.index_gradient(stack, 560.0, 30.0)
    for q in "sp":
        np.testing.assert_allclose(getattr(by_d, f"dR_{q}"), -getattr(by_d, f"dT_{q}"), rtol=1e-9)
        np.testing.assert_allclose(getattr(by_n, f"dR_{q}_dn"), -getattr(by_n, f"dT_{q}_dn"), rtol=1e-9)
