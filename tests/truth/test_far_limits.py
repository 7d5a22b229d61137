"""More cases that break a careless program, by array and by compiled work, against 50 digits and closed forms."""

from functools import cache

import mpmath as mp
import numpy as np
import pytest
from truth.plates_reference import solve_plates
from truth.reference import DIGITS, Media, solve

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant
NAMES = ("R", "T", "A", "r", "t", "log10_T", "one_minus_R")


@pytest.fixture(params=["small", "compiled"], autouse=True)
def route(request):
    with forced(request.param):
        yield


def _media(incident, films, exit_):
    """Return media of the reference: (n, k) of the ends, (n, k, d) of the films."""
    rows = [(*incident, 0.0), *films, (*exit_, 0.0)]
    return Media(*(list(column) for column in zip(*rows, strict=True)))


def _stack(incident, films, exit_):
    return fs.Stack(C(*incident), [fs.Layer(C(n, k), d) for n, k, d in films], C(*exit_))


def _log10(x):
    with mp.workdps(DIGITS):
        return float(mp.log10(x))


LOSSLESS = [(2.35, 0.0, 80.0), (1.46, 0.0, 95.0), (2.1, 0.0, 333.0)]
LOSSY = [(2.35, 0.0, 80.0), (0.06, 3.3, 20.0), (1.7, 0.3, 60.0)]


@pytest.mark.parametrize("films", [LOSSLESS, LOSSY, []])
@pytest.mark.parametrize("absent", [(1.7, 0.0), (0.0, 0.0), (0.1, 5.0), (1.5, 1e-9), (0.5, 0.0)])
def test_zero_thickness_leaves_every_byte(films, absent):
    wavelength, angle = [400.0, 550.0, 701.0], [0.0, 30.0, 60.0, 89.0, 90.0]
    plain = fs.spectrum(_stack((1.0, 0.0), films, (1.52, 0.0)), wavelength, angle)
    for place in range(len(films) + 1):
        more = [*films[:place], (*absent, 0.0), *films[place:]]
        s = fs.spectrum(_stack((1.0, 0.0), more, (1.52, 0.0)), wavelength, angle)
        for name in NAMES:
            for q in "sp":
                assert getattr(s, f"{name}_{q}").tobytes() == getattr(plain, f"{name}_{q}").tobytes(), (place, name, q)
        for q in "sp":
            layers = getattr(s, f"A_layers_{q}")
            np.testing.assert_array_equal(layers[place], 0.0)
            assert np.delete(layers, place, axis=0).tobytes() == getattr(plain, f"A_layers_{q}").tobytes()


@pytest.mark.parametrize("angle", [30.0, 30.000001, 45.0, 80.0])
def test_total_reflection_behind_absorbing_films(angle):
    # No light passes by law (Snell: critical at 30 deg), so log10 T is -inf, yet the films absorb.
    films = [(1.5, 0.0, 100.0), (0.2, 3.0, 15.0), (1.8, 0.02, 70.0)]
    s = fs.spectrum(_stack((2.0, 0.0), films, (1.0, 0.0)), 550.0, angle)
    for p, q in ((False, "s"), (True, "p")):
        true = solve(_media((2.0, 0.0), films, (1.0, 0.0)), 550.0, angle + 1e-12 * (angle == 30.0), p)
        assert getattr(s, f"T_{q}")[0, 0] == 0.0
        assert np.isneginf(getattr(s, f"log10_T_{q}")[0, 0])
        assert getattr(s, f"R_{q}")[0, 0] == pytest.approx(float(true.R), rel=1e-6 if angle == 30.0 else 1e-12)
        assert getattr(s, f"one_minus_R_{q}")[0, 0] == pytest.approx(1.0 - float(true.R), rel=1e-5)
        assert getattr(s, f"A_{q}")[0, 0] > 1e-3


def test_an_absorbing_exit_always_takes_some_light():
    # -inf only by law: behind 1 mm of metal an exit with k > 0 still gets a finite log10 T, also beyond 30 deg.
    films = [(0.05, 3.3, 1e6)]
    s = fs.spectrum(_stack((2.0, 0.0), films, (1.0, 1e-6)), 550.0, [0.0, 30.0, 60.0, 89.9])
    for j, angle in enumerate(s.angle_deg):
        for p, q in ((False, "s"), (True, "p")):
            wanted = _log10(solve(_media((2.0, 0.0), films, (1.0, 1e-6)), 550.0, float(angle), p).T)
            assert wanted < -30000.0
            assert getattr(s, f"log10_T_{q}")[j, 0] == pytest.approx(wanted, rel=1e-12)


@pytest.mark.parametrize("gap", [1.0, 30.0, 1000.0, 1e5])
def test_wide_gap_of_frustrated_total_reflection(gap):
    # T = 1 / (1 + ((q^2 + g^2) / (2 q g))^2 sinh^2(k0 g d)), q = n cos (p: q / n^2); Born and Wolf.
    s = fs.spectrum(_stack((1.5, 0.0), [(1.0, 0.0, gap * 500.0)], (1.5, 0.0)), 500.0, 60.0)
    with mp.workdps(DIGITS):
        g = mp.sqrt(mp.mpf(1.5) ** 2 * mp.mpf(3) / 4 - 1)
        for q, name in ((mp.mpf(0.75), "s"), (mp.mpf(0.75) / mp.mpf(1.5) ** 2, "p")):
            t = 1 / (1 + ((q * q + g * g) / (2 * q * g)) ** 2 * mp.sinh(2 * mp.pi * gap * g) ** 2)
            assert getattr(s, f"log10_T_{name}")[0, 0] == pytest.approx(_log10(t), rel=1e-13)
            assert getattr(s, f"T_{name}")[0, 0] == pytest.approx(float(t), rel=1e-10 if t > 1e-300 else 0.0, abs=0.0)
            np.testing.assert_array_equal(getattr(s, f"A_{name}"), 0.0)


@pytest.mark.parametrize("angle", [30.0 - 1e-7, 30.0 + 1e-7, 89.999999, 90.0 - 1e-12])
@pytest.mark.parametrize("film", [(1.0, 0.0, 200.0), (1.0, 1e-9, 200.0), (2.35, 0.0, 80.0), (0.05, 3.3, 20.0)])
def test_next_to_critical_and_grazing(angle, film):
    # Ten times what one rounding of the angle changes, or 1e-12.
    incident, exit_ = (2.0, 0.0), (1.9, 0.0)
    s = fs.spectrum(_stack(incident, [film], exit_), 550.0, angle)
    for p, q in ((False, "s"), (True, "p")):
        media = _media(incident, [film], exit_)
        true, near = (solve(media, 550.0, a, p) for a in (angle, float(np.nextafter(angle, 0.0))))
        for name in ("R", "r", "t", "T"):
            wanted, moved = complex(getattr(true, name)), complex(getattr(near, name))
            value = complex(getattr(s, f"{name}_{q}")[0, 0])
            assert abs(value - wanted) <= max(1e-12 * abs(wanted), 10.0 * abs(moved - wanted)), (name, q)
        assert getattr(s, f"A_{q}")[0, 0] == pytest.approx(float(true.A[0]), rel=1e-11 if film[1] else 0.0, abs=0.0)


def test_nothing_moves_at_90_degrees():
    # r is -1 or +1 whatever the films, so no derivative is left.
    stack = _stack((1.0, 0.0), LOSSY, (1.52, 0.0))
    by_d, by_n = fs.thickness_gradient(stack, 550.0, 90.0), fs.index_gradient(stack, 550.0, 90.0)
    needle = fs.needle_gradient(stack, 550.0, 90.0, material=C(2.0))
    for q in "sp":
        for name in ("dR", "dT", "dr", "dt"):
            np.testing.assert_array_equal(getattr(by_d, f"{name}_{q}"), 0.0)
            np.testing.assert_array_equal(getattr(by_n, f"{name}_{q}_dn"), 0.0)
            np.testing.assert_array_equal(getattr(needle, f"{name}_{q}"), 0.0)
    s = fs.spectrum(stack, 550.0, 90.0)
    assert np.isneginf(s.log10_T_s[0, 0])
    np.testing.assert_array_equal(s.A_layers_p, 0.0)


def test_s_through_a_film_of_index_zero():
    # kappa = -i b: a plain evanescent film for s, at any angle.
    films = [(2.0, 0.0, 60.0), (0.0, 0.0, 50.0), (1.5, 0.0, 100.0)]
    s = fs.spectrum(_stack((1.0, 0.0), films, (1.5, 0.0)), 550.0, [30.0, 75.0])
    for j, angle in enumerate((30.0, 75.0)):
        true = solve(_media((1.0, 0.0), films, (1.5, 0.0)), 550.0, angle, False)
        assert s.T_s[j, 0] == pytest.approx(float(true.T), rel=1e-12)
        assert s.t_s[j, 0] == pytest.approx(complex(true.t), rel=1e-12)
        assert s.r_p[j, 0].real ** 2 + s.r_p[j, 0].imag ** 2 == pytest.approx(1.0, abs=1e-14)


@pytest.mark.parametrize("angle", [0.0, 20.0])
def test_loss_of_the_best_mirrors(angle):
    # 1e-9 of A down to 1e-12, each layer's own share and 1 - R = T + A too.
    row = [(2.35, 2e-13, 550.0 / (4 * 2.35)), (1.45, 1e-14, 550.0 / (4 * 1.45))] * 35
    s = fs.spectrum(_stack((1.0, 0.0), row, (1.52, 0.0)), 550.0, angle)
    for p, q in ((False, "s"), (True, "p")):
        true = solve(_media((1.0, 0.0), row, (1.52, 0.0)), 550.0, angle, p)
        assert 1e-13 < sum(true.A) < 2e-12
        assert getattr(s, f"A_{q}")[0, 0] == pytest.approx(float(mp.fsum(true.A)), rel=1e-12, abs=0.0)
        assert getattr(s, f"one_minus_R_{q}")[0, 0] == pytest.approx(
            float(mp.fsum(true.A) + true.T), rel=1e-11, abs=0.0
        )
        for value, wanted in zip(getattr(s, f"A_layers_{q}")[:, 0, 0], true.A, strict=True):
            assert value == pytest.approx(float(wanted), rel=1e-11, abs=0.0)


def test_largest_k_of_an_incident_medium():
    film = [(0.06, 4.2, 50.0)]
    s = fs.spectrum(_stack((1.515, 1e-4), film, (1.0, 0.0)), 633.0, 43.0)
    assert s.R_p.tobytes() == fs.spectrum(_stack((1.515, 0.0), film, (1.0, 0.0)), 633.0, 43.0).R_p.tobytes()
    assert len(s.notes) == 1
    with pytest.raises(fs.ArgumentError, match=r"expected k <= 0\.0001"):
        fs.spectrum(_stack((1.515, float(np.nextafter(1e-4, 1.0))), film, (1.0, 0.0)), 633.0, 43.0)
    with pytest.raises(fs.ArgumentError, match=r"expected k <= 0\.0001"):
        fs.spectrum(_stack((1.0, 0.0), film, (1.52, 0.1)).reversed(), 633.0, 43.0)


@pytest.mark.parametrize("angle", [0.0, 50.0])
def test_a_film_with_gain(angle):
    films = [(2.1, 0.0, 70.0), (1.7, -0.01, 900.0), (1.46, 1e-3, 120.0)]
    layers = [fs.Layer(C(n, k, allow_gain=True), d) for n, k, d in films]
    s = fs.spectrum(fs.Stack(C(1.0), layers, C(1.52)), 550.0, angle)
    for p, q in ((False, "s"), (True, "p")):
        true = solve(_media((1.0, 0.0), films, (1.52, 0.0)), 550.0, angle, p)
        assert true.R + true.T > 1
        for name in ("R", "T"):
            assert getattr(s, f"{name}_{q}")[0, 0] == pytest.approx(float(getattr(true, name)), rel=1e-12)
        np.testing.assert_allclose(getattr(s, f"A_layers_{q}")[:, 0, 0], [float(a) for a in true.A], rtol=1e-11)


@pytest.mark.parametrize("angle", [0.0, 70.0])
def test_a_millimetre_of_metal_inside_a_stack(angle):
    films = [(2.35, 0.0, 80.0), (0.05, 3.3, 1e6), (1.46, 0.0, 90.0)]
    s = fs.spectrum(_stack((1.0, 0.0), films, (1.52, 0.0)), 550.0, angle)
    for p, q in ((False, "s"), (True, "p")):
        true = solve(_media((1.0, 0.0), films, (1.52, 0.0)), 550.0, angle, p)
        assert getattr(s, f"log10_T_{q}")[0, 0] == pytest.approx(_log10(true.T), rel=1e-13)
        assert getattr(s, f"r_{q}")[0, 0] == pytest.approx(complex(true.r), rel=1e-13)
        assert getattr(s, f"A_{q}")[0, 0] == pytest.approx(float(true.A[1]), rel=1e-12)
        np.testing.assert_array_equal(getattr(s, f"A_layers_{q}")[[0, 2]], 0.0)


LONG_ROW = [(2.35, 1e-7, 550.0 / (4 * 2.35)), (1.45, 0.0, 550.0 / (4 * 1.45))] * 5000


@cache
def _long_row_at_20_deg():
    return solve(_media((1.0, 0.0), LONG_ROW, (1.52, 0.0)), 550.0, 20.0, True)


def test_ten_thousand_layers_with_loss_off_normal():
    s, true = fs.spectrum(_stack((1.0, 0.0), LONG_ROW, (1.52, 0.0)), 550.0, 20.0), _long_row_at_20_deg()
    assert s.log10_T_p[0, 0] == pytest.approx(_log10(true.T), rel=1e-12)
    assert s.r_p[0, 0] == pytest.approx(complex(true.r), rel=1e-12)
    assert s.A_p[0, 0] == pytest.approx(float(mp.fsum(true.A)), rel=1e-11, abs=0.0)


def test_a_plate_that_lets_nothing_pass_and_its_other_side():
    glass, films, behind = (1.6, 0.2, 1e6), [(2.1, 0.01, 70.0)], [(1.38, 0.0, 100.0)]
    layers = [fs.Layer(C(2.1, 0.01), 70.0), fs.Plate(C(1.6, 0.2), 1.0), fs.Layer(C(1.38), 100.0)]
    stack = fs.Stack(C(1.0), layers, C(1.0))
    for turned, groups in ((False, [films, behind]), (True, [behind, films])):
        s = fs.spectrum(stack.reversed() if turned else stack, 550.0, [0.0, 60.0])
        for j, angle in enumerate((0.0, 60.0)):
            for p, q in ((False, "s"), (True, "p")):
                true = solve_plates(((1.0, 0.0), (1.0, 0.0)), groups, [glass], 550.0, angle, p)
                assert getattr(s, f"T_{q}")[j, 0] == 0.0
                assert getattr(s, f"log10_T_{q}")[j, 0] == pytest.approx(_log10(true.T), rel=1e-13)
                assert getattr(s, f"R_{q}")[j, 0] == pytest.approx(float(true.R), rel=1e-12)
                assert getattr(s, f"A_plates_{q}")[0, j, 0] == pytest.approx(float(true.plates[0]), rel=1e-12)


@pytest.mark.parametrize("angle", [float(np.nextafter(90.0, 91.0)), -1e-300, float("inf"), -float("inf")])
def test_angles_a_hair_outside_are_refused(angle):
    with pytest.raises(fs.ArgumentError, match=r"angle_deg\[1\]: expected 0 to 90 deg, got"):
        fs.spectrum(_stack((1.0, 0.0), LOSSLESS, (1.52, 0.0)), 550.0, [0.0, angle])


def test_named_angles_are_exact():
    # cos 60 = 1/2. No step between equal media: what is left of r is one rounding of n cos, at any angle.
    s = fs.spectrum(_stack((1.5, 0.0), [(1.5, 0.0, 100.0)], (1.5, 0.0)), 600.0, [0.0, 30.0, 45.0, 60.0])
    assert np.all(np.abs([s.r_s, s.r_p]) <= 2.0**-53)
    # 1.5 x 100 nm x cos 60 = an eighth of 600 nm: t = exp(-i pi / 4), within a rounding each of sine, sum, and ratio.
    assert s.t_s[3, 0] == pytest.approx((1.0 - 1.0j) / np.sqrt(2.0), abs=4.0 * 2.0**-53)
