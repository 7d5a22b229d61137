"""The field inside a stack against closed forms, flux conservation and the absorptance of layers."""

import numpy as np
import pytest

import filmstack as fs

C = fs.constant


def mirror(first, second, pairs=40):
    return fs.Stack(C(1.0), [fs.Layer(C(n), 550.0 / (4.0 * n)) for n in (first, second)] * pairs, C(1.52))


def test_field_of_a_perfect_mirror():
    # Q16: J. H. Apfel, Appl. Opt. 16, 1880 (1977): H first: 0 at the surface, 4 n0^2 / nH^2 at the first H/L interface,
    # the largest inside; L first: 4 at the surface.
    found = fs.field(mirror(2.35, 1.45), 550.0)
    assert found.at_interfaces[0, 0, 0] == pytest.approx(0.0, abs=1e-12)
    assert found.at_interfaces[1, 0, 0] == pytest.approx(0.724309642372, rel=1e-11)
    assert found.largest_in_layers[0].max() == pytest.approx(0.724309642372, rel=1e-11)
    assert fs.field(mirror(1.45, 2.35), 550.0, depth_nm=[0.0]).intensity[0, 0, 0] == pytest.approx(4.0, rel=1e-9)


def test_decay_per_period():
    # Q8: Yeh, Optical Waves in Layered Media: the field falls by ln(nH / nL) = 0.482851771724 a period at the centre.
    found = fs.field(mirror(2.35, 1.45), 550.0).at_interfaces[1::2, 0, 0]
    np.testing.assert_allclose(0.5 * np.log(found[3:20] / found[4:21]), 0.482851771724, rtol=1e-9)


FILMS = [(2.35, 0.0, 100.0), (0.06, 3.3, 20.0), (1.46, 0.01, 150.0), (0.8, 0.0, 90.0)]
STACK = fs.Stack(C(1.2), [fs.Layer(C(n, k), d) for n, k, d in FILMS], C(1.52))


@pytest.mark.parametrize("p", ["s", "p"])
def test_flux_and_absorption(p):
    # Poynting's theorem: flux in is 1 - R, flux out is T, and what is lost between is the absorbed density.
    wavelength, angle = [500.0, 600.0], [0.0, 50.0]
    s, found = fs.spectrum(STACK, wavelength, angle), fs.field(STACK, wavelength, angle, polarization=p)
    np.testing.assert_allclose(found.net_flux[0], 1.0 - getattr(s, f"R_{p}"), atol=1e-14)
    np.testing.assert_allclose(found.net_flux[-1], getattr(s, f"T_{p}"), atol=1e-14)
    nodes, weights = np.polynomial.legendre.leggauss(40)
    for layer, (_, k, d) in enumerate(FILMS):
        start = STACK.thickness_nm[:layer].sum()
        inside = fs.field(STACK, wavelength, angle, polarization=p, depth_nm=start + 0.5 * d * (nodes + 1.0))
        integral = 0.5 * d * np.tensordot(weights, inside.absorption_per_nm, axes=1)
        np.testing.assert_allclose(integral, getattr(s, f"A_layers_{p}")[layer], rtol=1e-12, atol=1e-17)
        if k == 0.0:
            assert np.ptp(inside.net_flux, axis=0).max() < 1e-14


def test_boundary_conditions():
    # Tangential E and normal D are continuous (Born and Wolf 1.1.3).
    faces = np.cumsum(STACK.thickness_nm)
    before = fs.field(STACK, 550.0, 40.0, polarization="p", depth_nm=faces - 1e-9)
    behind = fs.field(STACK, 550.0, 40.0, polarization="p", depth_nm=faces)
    assert before.layer.tolist() == [0, 1, 2, 3]
    assert behind.layer.tolist() == [1, 2, 3, 4]
    n = np.array([complex(a, -b) for a, b, _ in FILMS] + [1.52])
    np.testing.assert_allclose(before.E_x, behind.E_x, rtol=1e-9)
    np.testing.assert_allclose(
        (n[:-1] ** 2)[:, None, None] * before.E_z, (n[1:] ** 2)[:, None, None] * behind.E_z, rtol=1e-9
    )


def test_standing_wave_in_front_of_a_metal():
    # |1 + r exp(2 i k0 z)|^2 in the incident medium at normal incidence.
    stack = fs.Stack(C(1.0), [fs.Layer(C(0.06, 3.3), 40.0)], C(1.52))
    z = np.linspace(-600.0, -1.0, 50)
    r = fs.spectrum(stack, 600.0).r_s[0, 0]
    k0 = 2.0 * np.pi / 600.0
    expected = np.abs(np.exp(-1j * k0 * z) + r * np.exp(1j * k0 * z)) ** 2
    np.testing.assert_allclose(fs.field(stack, 600.0, depth_nm=z).intensity[:, 0, 0], expected, rtol=1e-11)


def test_field_in_volt_per_metre():
    # I = n |E|^2 / (2 Z0): 1 W/cm^2 in vacuum is 2744.9 V/m (peak), from c and epsilon_0 of CODATA.
    bare = fs.Stack(C(1.0), [], C(1.0))
    assert fs.field(bare, 550.0, depth_nm=[0.0]).volt_per_metre(1.0)[0, 0, 0] == pytest.approx(
        np.sqrt(2.0 * 1e4 / (299792458.0 * 8.8541878188e-12)), rel=1e-9
    )


def test_thick_metal_and_grazing_light_stay_finite():
    stack = fs.Stack(C(1.0), [fs.Layer(C(0.05, 3.3), 1e6), fs.Layer(C(1.5), 100.0)], C(1.5))
    for p in "sp":
        found = fs.field(stack, 550.0, [0.0, 40.0, 90.0], polarization=p)
        assert np.all(np.isfinite(found.intensity))
        assert found.intensity[-1].max() == 0.0
        # Skin depth: |E|^2 falls as exp(-4 pi k z / lambda) at normal incidence.
        two = fs.field(stack, 550.0, polarization=p, depth_nm=[100.0, 200.0]).intensity[:, 0, 0]
        assert np.log(two[0] / two[1]) == pytest.approx(4.0 * np.pi * 3.3 * 100.0 / 550.0, rel=1e-9)


def test_refusals():
    with pytest.raises(fs.CoherenceError, match="field: a stack with a thick plate has no standing wave"):
        fs.field(fs.Stack(C(1.0), [fs.Plate(C(1.5), 1.0)], C(1.0)), 550.0)
    with pytest.raises(fs.ArgumentError, match="polarization: expected 's' or 'p', got 'mean'"):
        fs.field(STACK, 550.0, polarization="mean")
    with pytest.raises(fs.ArgumentError, match="field: a film of N = 0 blocks p"):
        fs.field(fs.Stack(C(1.0), [fs.Layer(C(0.0), 10.0)], C(1.5)), 550.0, 30.0, polarization="p")
    assert "ISO 21254" in fs.field(STACK, 550.0).notes[-1]
