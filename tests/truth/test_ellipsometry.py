"""Psi, delta and the admittance locus against closed forms."""

import numpy as np
import pytest

import filmstack as fs

C = fs.constant


@pytest.mark.parametrize(("n", "k"), [(0.2, 3.0), (3.9, 0.02), (1.5, 0.0), (2.0, 1.0)])
def test_bare_surface(n, k):
    # Inverse of the two-phase model: eps = sin^2 (1 + tan^2 ((1 - rho) / (1 + rho))^2) with exp(+i omega t), n - ik
    # (Azzam and Bashara, Ellipsometry and Polarized Light, section 4.2).
    angle = np.array([40.0, 55.0, 75.0])
    found = fs.ellipsometry(fs.Stack(C(1.0), [], C(n, k)), 633.0, angle)
    theta = np.radians(angle)
    rho = np.tan(np.radians(found.psi_deg[:, 0])) * np.exp(1j * np.radians(found.delta_deg[:, 0]))
    eps = np.sin(theta) ** 2 * (1.0 + np.tan(theta) ** 2 * ((1.0 - rho) / (1.0 + rho)) ** 2)
    np.testing.assert_allclose(eps, complex(n, -k) ** 2, rtol=1e-10)
    if k > 0.0:
        assert np.all((found.delta_deg > 0.0) & (found.delta_deg < 180.0))


def test_normal_incidence_and_missing_amplitudes():
    # delta is 180 at normal incidence by the ellipsometrists' convention (Muller, Surf. Sci. 16, 14 (1969)).
    found = fs.ellipsometry(fs.Stack(C(1.0), [fs.Layer(C(2.3), 80.0)], C(0.2, 3.0)), 633.0, 0.0)
    assert found.psi_deg[0, 0] == pytest.approx(45.0, abs=1e-12)
    assert found.delta_deg[0, 0] == pytest.approx(180.0, abs=1e-12)
    nothing = fs.ellipsometry(fs.Stack(C(1.5), [], C(1.5)), 633.0, 40.0)
    assert np.isnan(nothing.psi_deg[0, 0])
    assert np.isnan(nothing.delta_deg[0, 0])
    with pytest.raises(fs.CoherenceError):
        fs.ellipsometry(fs.Stack(C(1.0), [fs.Plate(C(1.5), 1.0)], C(1.0)), 633.0)


def test_admittance_of_quarter_waves():
    # U3, closed form (Macleod): after HLH on 1.52 Y = nH^4 / (nL^2 ns), after HLHL nL^4 ns / nH^4.
    layers = [fs.Layer(C(n), 550.0 / (4.0 * n)) for n in (1.45, 2.35, 1.45, 2.35)]
    locus = fs.admittance_locus(fs.Stack(C(1.0), layers, C(1.52)), 550.0)
    ends = {film: locus.admittance[np.flatnonzero(locus.layer == film)[-1]] for film in range(4)}
    assert ends[1] == pytest.approx(2.35**4 / (1.45**2 * 1.52), rel=1e-12)
    assert ends[0] == pytest.approx(1.45**4 * 1.52 / 2.35**4, rel=1e-12)
    assert locus.admittance[0] == pytest.approx(1.52)
    assert locus.grown_nm[-1] == pytest.approx(sum(layer.thickness_nm for layer in layers))


def test_turning_point_monitoring_example():
    # U1: H, L exact, then H at 1.05 of a quarter wave: Y = n (Y0 + i n tan) / (n + i Y0 tan), Y0 = (nL / nH)^2 ns,
    # of the convention N = n - ik: 8.71234176577 - 2.5995242323i.
    quarter = [550.0 / (4.0 * n) for n in (2.35, 1.45)]
    layers = [fs.Layer(C(2.35), 1.05 * quarter[0]), fs.Layer(C(1.45), quarter[1]), fs.Layer(C(2.35), quarter[0])]
    locus = fs.admittance_locus(fs.Stack(C(1.0), layers, C(1.52)), 550.0)
    assert locus.admittance[-1] == pytest.approx(8.71234176577 - 2.5995242323j, rel=1e-10)


@pytest.mark.parametrize(("angle", "p"), [(0.0, "s"), (50.0, "s"), (50.0, "p")])
def test_locus_ends_where_the_reflectance_says(angle, p):
    # r = (y0 - Y) / (y0 + Y) with tilted admittances; a lossless film stays on a circle: R of any bilinear image.
    layers = [fs.Layer(C(2.3), 70.0), fs.Layer(C(0.06, 3.3), 20.0), fs.Layer(C(1.46), 90.0)]
    stack = fs.Stack(C(1.0), layers, C(1.52))
    locus = fs.admittance_locus(stack, 550.0, angle, polarization=p)
    y = locus.admittance[-1]
    r = getattr(fs.spectrum(stack, 550.0, angle), f"r_{p}")[0, 0]
    assert (locus.incident - y) / (locus.incident + y) == pytest.approx(r, abs=1e-13)
    circle = locus.admittance[locus.layer == 2]
    a, b, c = circle[0], circle[20], circle[50]
    w = (c - a) / (b - a)
    centre = (b - a) * (w - abs(w) ** 2) / (2j * w.imag) + a
    np.testing.assert_allclose(np.abs(circle - centre), abs(a - centre), rtol=1e-10)


def test_refusals():
    stack = fs.Stack(C(1.0), [], C(1.5))
    with pytest.raises(fs.ArgumentError, match=r"expected one wavelength and one angle, got \(2, 1\)"):
        fs.admittance_locus(stack, [500.0, 600.0])
    with pytest.raises(fs.ArgumentError, match="expected an angle below 90 deg"):
        fs.admittance_locus(stack, 500.0, 90.0)
    with pytest.raises(fs.ArgumentError, match="polarization: expected 's' or 'p'"):
        fs.admittance_locus(stack, 500.0, polarization="mean")
