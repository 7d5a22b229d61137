"""Digits of what stands in front of an opaque film or between good mirrors on a plate; 50 digits by other routes.

One rounding of the inputs changes none of these by more than 1e-13 of itself.
"""

import mpmath as mp
import numpy as np
import pytest
from truth.plates_reference import solve_plates
from truth.reference import DIGITS, Media, solve

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant


@pytest.fixture(params=["small", "compiled"], autouse=True)
def route(request):
    with forced(request.param):
        yield


FRONT = [(1.7, 0.3, 140.0), (2.1, 0.0, 50.0), (1.5, 0.02, 90.0)]


def _before_metal(thickness):
    films = [*FRONT, (0.05, 3.3, thickness)]
    rows = [(1.0, 0.0, 0.0), *films, (1.5, 0.0, 0.0)]
    stack = fs.Stack(C(1.0), [fs.Layer(C(n, k), d) for n, k, d in films], C(1.5))
    return stack, Media(*(list(column) for column in zip(*rows, strict=True)))


THICKNESSES = [
    1e3,
    pytest.param(1e6, marks=pytest.mark.xfail(strict=True, reason="the decay in front is a difference of large sums")),
]


@pytest.mark.parametrize("thickness", THICKNESSES)
def test_absorptance_of_films_before_thick_metal(thickness):
    stack, media = _before_metal(thickness)
    s = fs.spectrum(stack, 550.0, 30.0)
    for p, found in ((False, s.A_layers_s), (True, s.A_layers_p)):
        for value, wanted in zip(found[:, 0, 0], solve(media, 550.0, 30.0, p).A, strict=True):
            assert abs(mp.mpf(float(value)) - wanted) <= 1e-12 * wanted


@pytest.mark.parametrize("thickness", [1e3, 1e6])
def test_gradients_of_films_before_thick_metal(thickness):
    stack, media = _before_metal(thickness)
    by_d, by_n = fs.thickness_gradient(stack, 550.0, 30.0), fs.index_gradient(stack, 550.0, 30.0)
    with mp.workdps(DIGITS):
        start, step = solve(media, 550.0, 30.0, False), mp.mpf(10) ** -24
        for layer in range(len(FRONT)):
            for name, found in (("d", by_d.dR_s), ("n", by_n.dR_s_dn), ("k", by_n.dR_s_dk)):
                rows = {"n": list(media.n), "k": list(media.k), "d": list(media.d)}
                rows[name][layer + 1] = mp.mpf(rows[name][layer + 1]) + step
                slope = (solve(Media(**rows), 550.0, 30.0, False).R - start.R) / step
                assert abs(mp.mpf(float(found[layer, 0, 0])) - slope) <= 1e-9 * abs(slope), (layer, name)


AIR = (1.0, 0.0)
BETWEEN = pytest.mark.xfail(strict=True, reason="1 - R is a difference where a plate or film between mirrors absorbs")


def _both_faces(pairs, k_film, k_plate):
    mirror = [(2.35, k_film, 58.5), (1.45, 0.0, 94.8)] * pairs
    films = [fs.Layer(C(n, k), d) for n, k, d in mirror]
    return mirror, fs.Stack(C(1.0), [*films, fs.Plate(C(1.52, k_plate), 1.0), *films], C(1.0))


@pytest.mark.parametrize(
    ("pairs", "k_film", "k_plate"),
    [
        (20, 0.0, 0.0),
        (7, 0.0, 1e-9),
        (7, 1e-8, 0.0),
        pytest.param(15, 0.0, 1e-9, marks=BETWEEN),
        pytest.param(20, 0.0, 1e-12, marks=BETWEEN),
        pytest.param(20, 1e-8, 0.0, marks=BETWEEN),
    ],
)
def test_good_mirrors_on_both_faces_of_a_plate(pairs, k_film, k_plate):
    mirror, stack = _both_faces(pairs, k_film, k_plate)
    s = fs.spectrum(stack, 550.0)
    true = solve_plates((AIR, AIR), [mirror, mirror], [(1.52, k_plate, 1e6)], 550.0, 0.0, False)
    assert abs(mp.mpf(float(s.R_s[0, 0])) - true.R) <= 1e-12 * true.R
    assert abs(mp.mpf(float(s.T_s[0, 0])) - true.T) <= 1e-12 * true.T
    if k_plate:
        assert abs(mp.mpf(float(s.A_plates_s[0, 0, 0])) - true.plates[0]) <= 1e-12 * true.plates[0]


@pytest.mark.parametrize(
    "pairs",
    [
        7,
        pytest.param(20, marks=pytest.mark.xfail(strict=True, reason="d|r|^2 = 2 Re(r* dr) loses digits as R nears 1")),
    ],
)
def test_gradients_of_lossless_mirrors_on_both_faces_of_a_plate(pairs):
    # Conservation of energy: dR = -dT, and both against a difference of 50 digits.
    mirror, stack = _both_faces(pairs, 0.0, 0.0)
    gradient = fs.thickness_gradient(stack, 550.0)
    np.testing.assert_allclose(gradient.dR_s, -gradient.dT_s, rtol=1e-9)
    layer = 2 * pairs - 1
    with mp.workdps(DIGITS):
        step, ends = mp.mpf(10) ** -24, []
        for change in (0, step):
            front = [*mirror[:-1], (*mirror[-1][:2], mp.mpf(mirror[-1][2]) + change)]
            ends.append(solve_plates((AIR, AIR), [front, mirror], [(1.52, 0.0, 1e6)], 550.0, 0.0, False))
        for found, name in ((gradient.dR_s, "R"), (gradient.dT_s, "T")):
            slope = (getattr(ends[1], name) - getattr(ends[0], name)) / step
            assert abs(mp.mpf(float(found[layer, 0, 0])) - slope) <= 1e-9 * abs(slope), name
