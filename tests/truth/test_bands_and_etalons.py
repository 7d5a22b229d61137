"""Published values of periodic stacks and etalons, read off the amplitudes of the engine.

The values were recomputed by independent high-precision arithmetic; the source beside each is that of the formula.
"""

import numpy as np
import pytest
from scipy.optimize import brentq

import filmstack as fs

C = fs.constant
LAMBDA = 550.0
LIGHT = 299792458.0  # m/s = nm GHz, exact by the SI


def _quarter(n, quarter_waves=1.0):
    return fs.Layer(C(n), quarter_waves * LAMBDA / (4.0 * n))


def _amplitudes(layers, g):
    """Return r and t of layers between air and air at the relative wavenumber g."""
    s = fs.spectrum(fs.Stack(C(1.0), layers, C(1.0)), LAMBDA / g)
    return s.r_s[0, 0], s.t_s[0, 0]


def _half_trace(layers, g):
    """Return half the trace of a lossless period: between equal media it is Re(1/t) (Yeh, Optical Waves, ch. 6)."""
    return (1.0 / _amplitudes(layers, g)[1]).real


@pytest.mark.parametrize(
    ("high", "low", "half_width"),
    # Q6: (2/pi) asin((nH - nL) / (nH + nL)), Macleod, Thin-Film Optical Filters; Epstein (1952).
    [(2.35, 1.45, 0.152224816537), (2.3, 1.38, 0.16086124651), (4.0, 1.35, 0.329903579755),
     (2.35, 1.38, 0.167480486081)],
)  # fmt: skip
def test_half_width_of_a_stop_band(high, low, half_width):
    period = [_quarter(high), _quarter(low)]
    edges = [brentq(lambda g: _half_trace(period, g) + 1.0, *span, xtol=1e-15) for span in ((0.4, 1.0), (1.0, 1.6))]
    np.testing.assert_allclose(edges, [1.0 - half_width, 1.0 + half_width], atol=1e-11)


def test_edges_in_wavelength_and_decay_of_a_stop_band():
    # Q7: 550 nm over 1 +- half width; Q8: decay per period at the centre ln(nH / nL), Yeh.
    period = [_quarter(2.35), _quarter(1.45)]
    upper = brentq(lambda x: _half_trace(period, LAMBDA / x) + 1.0, 400.0, 550.0, xtol=1e-12)
    lower = brentq(lambda x: _half_trace(period, LAMBDA / x) + 1.0, 550.0, 800.0, xtol=1e-12)
    np.testing.assert_allclose([upper, lower], [477.3374016, 648.7569001], atol=6e-8)
    assert np.arccosh(-_half_trace(period, 1.0)) == pytest.approx(0.482851771724, abs=6e-13)


# Q12, Q13: equivalent index and phase of symmetric periods; Herpin (1947); Epstein, J. Opt. Soc. Am. 42, 806 (1952);
# Berning, J. Opt. Soc. Am. 52, 431 (1962). Q14: the index goes to sqrt(nH nL) for long waves.
HERPIN = [
    ("H", 0.25, 1.80798165808, 0.257742059135), ("H", 0.5, 1.65868837898, 0.51892758703),
    ("H", 0.75, 1.14019349628, 0.799750631643), ("L", 0.25, 1.88469832356, 0.257742059135),
    ("L", 0.5, 2.05433404079, 0.51892758703), ("L", 0.75, 2.98852783419, 0.799750631643),
    ("H", 1e-5, 1.8459414942, None), ("L", 1e-5, 1.8459414942, None),
]  # fmt: skip


@pytest.mark.parametrize(("outer", "g", "index", "phase"), HERPIN)
def test_equivalent_film_of_a_symmetric_period(outer, g, index, phase):
    # Matrix [[A, iB], [iC, A]] in air: 1/t = A + i (B + C) / 2, r/t = i (B - C) / 2; E = sqrt(C / B), cos = A.
    a, b = (2.35, 1.45) if outer == "H" else (1.45, 2.35)
    r, t = _amplitudes([_quarter(a, 0.5), _quarter(b), _quarter(a, 0.5)], g)
    total, difference = 2.0 * (1.0 / t).imag, 2.0 * (r / t).imag
    assert np.sqrt((total - difference) / (total + difference)) == pytest.approx(index, abs=1e-10)
    if phase:
        assert np.arccos((1.0 / t).real) / np.pi == pytest.approx(phase, abs=1e-12)


@pytest.mark.parametrize(
    ("high", "low", "glass", "angle"),
    # Q17: sin(theta) n_g = nH nL / sqrt(nH^2 + nL^2); MacNeille, US 2,403,731 (1946).
    [(2.3, 1.35, 1.64651413214, 45.0), (2.3, 1.35, 1.52, 49.9925972409)],
)
def test_polarizer_condition_is_the_brewster_angle_of_both_films(high, low, glass, angle):
    # One step from H to L with no interference: H as incident medium, at the angle Snell's law gives.
    inside = np.degrees(np.arcsin(glass * np.sin(np.radians(angle)) / high))
    s = fs.spectrum(fs.Stack(C(high), [], C(low)), LAMBDA, inside)
    assert abs(s.r_p[0, 0]) < 1e-11
    assert abs(s.r_s[0, 0]) > 0.3


def _steep(reflectance):
    """Return the index whose step against air reflects so much: r = (n - 1) / (n + 1)."""
    root = np.sqrt(reflectance)
    return (1.0 + root) / (1.0 - root)


@pytest.mark.parametrize(
    ("reflectance", "contrast", "finesse"),
    # P1 to P5: 1 + F and the exact finesse; Born and Wolf 7.6; Ismail and others, Opt. Express 24, 16366 (2016).
    [(0.04, 1.17361111111, None), (0.5, 9.0, 4.34681580829), (0.9, 361.0, 29.7899558830),
     (0.99, 39601.0, 312.583206682), (0.999, 3996001.0, 3140.02133340)],
)  # fmt: skip
def test_contrast_and_finesse_of_an_etalon(reflectance, contrast, finesse):
    # Air between two half spaces that reflect so much: T of a half wave is 1, of a quarter wave 1 / (1 + F).
    n = _steep(reflectance)

    def passed(half_waves):
        gap = fs.Layer(C(1.0), half_waves * LAMBDA / 2.0)
        return fs.spectrum(fs.Stack(C(n), [gap], C(n)), LAMBDA).T_s[0, 0]

    assert passed(1.0) == pytest.approx(1.0, abs=1e-12)
    assert passed(1.0) / passed(1.5) == pytest.approx(contrast, rel=1e-10)
    if finesse:
        upper = brentq(lambda x: passed(x) - 0.5, 1.0, 1.5, xtol=1e-15)
        lower = brentq(lambda x: passed(x) - 0.5, 0.5, 1.0, xtol=1e-15)
        assert 1.0 / (upper - lower) == pytest.approx(finesse, rel=1e-10)


def test_air_etalon_of_one_millimetre():
    # P6: free spectral range c / (2d) = 149.896229 GHz; P7: exact full width 0.47954024975 GHz with R = 0.99.
    n = _steep(0.99)
    etalon = fs.Stack(C(n), [fs.Layer(C(1.0), 1e6)], C(n))
    order = round(2e6 / 632.8)

    def lost(x):
        return fs.spectrum(etalon, 2e6 / x).T_s[0, 0] - 0.5

    sides = [brentq(lost, order + j * 0.01, order, xtol=1e-12) for j in (-1, 1)]
    after = [brentq(lost, order + 1 + j * 0.01, order + 1, xtol=1e-12) for j in (-1, 1)]
    spacing = LIGHT / 2e6  # GHz of one order
    assert (sides[1] - sides[0]) * spacing == pytest.approx(0.47954024975, rel=1e-9)
    assert (sum(after) - sum(sides)) / 2.0 * spacing == pytest.approx(149.896229, rel=1e-9)


def test_peak_between_absorbing_mirrors():
    # P8: the peak between equal mirrors is (T / (1 - R))^2, 0.81 for T = 0.009, R = 0.99; Born and Wolf 7.6.2.
    # Mirrors of lossy films: R and T of one alone, seen from the gap, and the gap tuned to the phase of r.
    mirror = [fs.Layer(C(n, k), LAMBDA / (4.0 * n)) for n, k in [(2.35, 2e-4), (1.45, 0.0)] * 5 + [(2.35, 2e-4)]]
    alone = fs.spectrum(fs.Stack(C(1.0), mirror, C(1.0)), LAMBDA)
    share = alone.T_s[0, 0] / alone.one_minus_R_s[0, 0]
    assert 0.5 < share < 0.99
    turn = np.angle(alone.r_s[0, 0])
    gap = fs.Layer(C(1.0), (turn / np.pi % 2.0 + 2.0) * LAMBDA / 2.0)
    peak = fs.spectrum(fs.Stack(C(1.0), [*mirror, gap, *mirror], C(1.0)), LAMBDA).T_s[0, 0]
    assert peak == pytest.approx(share**2, rel=1e-9)
