"""Phase, group delay, GDD and TOD against closed forms and 50-digit differentiation."""

import mpmath as mp
import numpy as np
import pytest

import filmstack as fs
from filmstack.constants import HBAR_EV_FS, PLANCK_EV_NM, SPEED_OF_LIGHT_NM_PER_FS

C = fs.constant


def mirror(first, second, pairs=30, wavelength=1064.0):
    layers = [fs.Layer(C(n), wavelength / (4.0 * n)) for n in (first, second)] * pairs
    return fs.Stack(C(1.0), layers, C(1.52))


@pytest.mark.parametrize(
    ("first", "second", "published"),
    # Q15: D. I. Babic, S. W. Corzine, IEEE J. Quantum Electron. 28, 514 (1992), half-space limit, 2.35 / 1.45, 1064 nm.
    [(2.35, 1.45, 1.97173442939), (1.45, 2.35, 6.71868506816)],
)
def test_delay_of_a_quarter_wave_mirror(first, second, published):
    found = fs.phase(mirror(first, second), 1064.0).reflection
    assert found.gd_fs_s[0, 0] == pytest.approx(published, rel=1e-10)
    assert found.gd_fs_p[0, 0] == found.gd_fs_s[0, 0]
    # The mirror is symmetric about its centre in frequency.
    assert found.gdd_fs2_s[0, 0] == pytest.approx(0.0, abs=1e-9)


def test_delay_of_a_resonator_before_a_perfect_mirror():
    # G1, G2: F. Gires, P. Tournois, C. R. Acad. Sci. 258, 6112 (1964). Front face of 1.5 in air, R = 0.04; the perfect
    # mirror is a medium of index 1e-9 (r = +1 to 1e-9): GD = t0 (1 - R) / (1 + R - 2 q cos x) with x the round trip.
    n, d, reflectance = 1.5, 1e4, 0.04
    t0 = 2.0 * n * d / SPEED_OF_LIGHT_NM_PER_FS
    assert t0 == pytest.approx(100.069228559, abs=1e-8)
    q = np.sqrt(reflectance)
    stack = fs.Stack(C(1.0), [fs.Layer(C(n), d)], C(1e-12))
    wavelength = np.linspace(790.0, 810.0, 41)
    x = 4.0 * np.pi * n * d / wavelength  # r of the face is -q, of the back +1: the round trip adds no sign but that
    found = fs.phase(stack, wavelength).reflection
    closed = t0 * (1.0 - reflectance) / (1.0 + reflectance + 2.0 * -q * np.cos(x))
    np.testing.assert_allclose(found.gd_fs_s[0], closed, rtol=1e-9)
    # GDD = d GD / d omega with x = omega t0.
    slope = -t0 * t0 * (1.0 - reflectance) * 2.0 * q * np.sin(x) / (1.0 + reflectance - 2.0 * q * np.cos(x)) ** 2
    np.testing.assert_allclose(found.gdd_fs2_s[0], slope, rtol=1e-8, atol=1e-6)
    largest = np.max(np.abs(fs.phase(stack, np.linspace(790.0, 810.0, 4001)).reflection.gdd_fs2_s))
    assert largest == pytest.approx(0.480320108213 * t0**2, rel=1e-4)


def _index(sellmeier, energy):
    a, b, c = sellmeier
    square = (mp.mpf(PLANCK_EV_NM) / 1000 / energy) ** 2
    return mp.sqrt(a + sum(s * square / (square - r) for s, r in zip(b, c, strict=True)))


FORMULAS = [(1.0, [1.1], [0.01]), (2.0, [2.4, 0.3], [0.06, 0.02]), (1.0, [1.0396, 0.2318], [0.006, 0.02])]


@pytest.mark.parametrize(("angle", "p"), [(0.0, False), (35.0, False), (35.0, True)])
def test_third_derivatives_on_formula_materials(angle, p):
    # mpmath at 50 digits: derivatives of arg r and arg t of an Airy recursion by photon energy.
    thicknesses = [120.0, 75.0, 210.0, 64.0, 150.0]
    media = [fs.sellmeier(b, c, a) for a, b, c in FORMULAS]
    layers = [fs.Layer(media[j % 2], d) for j, d in enumerate(thicknesses)]
    found = fs.phase(fs.Stack(C(1.0), layers, media[2]), 800.0, angle)

    def amplitudes(energy):
        b = mp.sin(mp.mpf(angle) * mp.pi / 180)
        n = [mp.mpf(1), *(_index(FORMULAS[j % 2], energy) for j in range(5)), _index(FORMULAS[2], energy)]
        k0 = 2 * mp.pi * energy / mp.mpf(PLANCK_EV_NM)
        kappa = [mp.sqrt(x * x - b * b) for x in n]
        y = [x * x / q if p else q for x, q in zip(n, kappa, strict=True)]
        r, t = mp.mpf(0), mp.mpf(1)
        for j in range(len(n) - 2, -1, -1):
            step, turn = (y[j] - y[j + 1]) / (y[j] + y[j + 1]), mp.mpf(1)
            if j + 1 < len(n) - 1:
                turn = mp.exp(-1j * k0 * kappa[j + 1] * mp.mpf(thicknesses[j]))
            below = 1 + step * r * turn**2
            r, t = (step + r * turn**2) / below, 2 * y[j] / (y[j] + y[j + 1]) * turn * t / below
        return r, t

    with mp.workdps(50):
        energy = mp.mpf(PLANCK_EV_NM) / 800
        for which, part in ((0, found.reflection), (1, found.transmission)):
            series = mp.taylor(lambda e, which=which: mp.log(amplitudes(e)[which]), energy, 3)
            for j, name in ((1, "gd_fs"), (2, "gdd_fs2"), (3, "tod_fs3")):
                true = -(mp.mpf(HBAR_EV_FS) ** j) * mp.factorial(j) * series[j].imag
                value = getattr(part, f"{name}_{'p' if p else 's'}")[0, 0]
                assert value == pytest.approx(float(true), rel=1e-8)


def test_phase_is_that_of_the_amplitudes_and_unwraps_over_coarse_steps():
    stack = fs.Stack(C(1.5), [fs.Layer(C(1.5), 2e4)], C(1.5))
    found = fs.phase(stack, [700.0, 800.0, 900.0]).transmission
    # n d / c for a film between like media: the phase is - k0 n d, tens of turns apart from one wavelength to the next.
    phase = -2.0 * np.pi * 1.5 * 2e4 / np.array([700.0, 800.0, 900.0])
    np.testing.assert_allclose(np.diff(found.phase_rad_s[0]), np.diff(phase), rtol=1e-12)
    metal = fs.Stack(C(1.0), [fs.Layer(C(2.35), 80.0), fs.Layer(C(0.06, 3.3), 500.0)], C(1.52))
    s, p = fs.spectrum(metal, [500.0, 600.0], 50.0), fs.phase(metal, [500.0, 600.0], 50.0)
    pairs = ((s.r_s, p.reflection.phase_rad_s), (s.r_p, p.reflection.phase_rad_p), (s.t_p, p.transmission.phase_rad_p))
    for amplitude, angle in pairs:
        np.testing.assert_allclose(np.exp(1j * np.angle(amplitude)), np.exp(1j * angle), atol=1e-12)


def test_reference_plane_of_the_substrate():
    # A wave reflected at depth D in the incident medium comes back with exp(-2 i k0 D): a layer of air before a mirror.
    spaced = fs.Stack(C(1.0), [fs.Layer(C(1.0), 700.0)], C(0.1, 5.0))
    bare = fs.Stack(C(1.0), [], C(0.1, 5.0))
    a, b = fs.phase(spaced, 600.0, plane="substrate").reflection, fs.phase(bare, 600.0).reflection
    assert np.exp(1j * a.phase_rad_s[0, 0]) == pytest.approx(np.exp(1j * b.phase_rad_s[0, 0]), abs=1e-12)
    assert a.gd_fs_s[0, 0] == pytest.approx(b.gd_fs_s[0, 0], abs=1e-12)


def test_uncertainty_from_the_rounding_of_a_table():
    table = fs.material("SiO2/ion-assisted-2013")
    found = fs.phase(fs.Stack(table, [fs.Layer(table, 1e4)], table), 800.0)
    # For a single pass phi = - k0 n d: d GDD = hbar^2 (E / hbar c) d * d2n/dE2.
    spread = float(table.derivative_uncertainty(2, 800.0))
    expected = HBAR_EV_FS**2 * 2.0 * np.pi / 800.0 * 1e4 * spread
    assert found.transmission.gdd_uncertainty_fs2_s[0, 0] == pytest.approx(expected, rel=1e-6)
    assert "leaves the GDD uncertain by up to" in found.notes[-1]
    exact = fs.phase(fs.Stack(C(1.0), [fs.Layer(C(1.5), 1e4)], C(1.5)), 800.0)
    assert exact.reflection.gdd_uncertainty_fs2_s[0, 0] == 0.0
    assert exact.notes == ()


def test_what_has_no_phase_is_refused():
    plate = fs.Stack(C(1.0), [fs.Plate(C(1.5), 1.0)], C(1.0))
    with pytest.raises(fs.CoherenceError, match="phase: a stack with a thick plate has no phase"):
        fs.phase(plate, 550.0)
    with pytest.raises(fs.ArgumentError, match="angle_deg: expected angles below 90 deg"):
        fs.phase(fs.Stack(C(1.0), [], C(1.5)), 550.0, 90.0)
    with pytest.raises(fs.ArgumentError, match="plane: expected 'front' or 'substrate', got 'back'"):
        fs.phase(fs.Stack(C(1.0), [], C(1.5)), 550.0, plane="back")
    # No reflection at all: the phase of 0 is not a number, never 0.
    nothing = fs.phase(fs.Stack(C(1.5), [], C(1.5)), 550.0).reflection
    assert np.isnan(nothing.phase_rad_s[0, 0])
