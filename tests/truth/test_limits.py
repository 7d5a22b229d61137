"""The cases that break a careless program, each by array work and by compiled work."""

import numpy as np
import pytest

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant


@pytest.fixture(params=["small", "compiled"], autouse=True)
def route(request):
    with forced(request.param):
        yield


def one(stack, wavelength=550.0, angle=0.0):
    return fs.spectrum(stack, wavelength, angle)


def test_grazing_light_is_reflected_whole():
    # At exactly 90 deg r_s = -1 and r_p = +1 on every stack: the limit of Fresnel's formulas (Born and Wolf 1.5).
    for layers in ([], [fs.Layer(C(2.35), 80.0)], [fs.Layer(C(0.05, 3.3), 30.0), fs.Layer(C(1.0), 50.0)]):
        for exit_ in (C(1.52), C(1.0), C(0.8, 4.0)):
            s = one(fs.Stack(C(1.0), layers, exit_), angle=90.0)
            assert (s.r_s[0, 0], s.r_p[0, 0]) == (-1.0, 1.0)
            assert (s.R_s[0, 0], s.R_p[0, 0], s.T_s[0, 0], s.T_p[0, 0]) == (1.0, 1.0, 0.0, 0.0)
            assert (s.A_s[0, 0], s.A_p[0, 0], s.t_s[0, 0], s.t_p[0, 0]) == (0.0, 0.0, 0.0, 0.0)


def test_exit_at_its_critical_angle():
    # Snell: 2 to 1 at exactly 30 deg is critical; no flux leaves, lossless films reflect all.
    s = one(fs.Stack(C(2.0), [fs.Layer(C(1.5), 100.0)], C(1.0)), angle=[30.0, 45.0])
    np.testing.assert_array_equal([s.T_s, s.T_p], 0.0)
    np.testing.assert_array_equal([s.R_s, s.R_p], 1.0)
    assert np.all(np.isneginf([s.log10_T_s, s.log10_T_p, s.log10_T]))
    np.testing.assert_allclose(np.abs(s.r_s), 1.0, rtol=1e-15)


def test_film_at_its_critical_angle():
    # Closed form at kappa = 0: the layer matrix is [[1, i k0 d], [0, 1]] for s, so 1/T = 1 + (y k0 d / 2)^2.
    d = 100.0
    s = one(fs.Stack(C(2.0), [fs.Layer(C(1.0), d)], C(2.0)), angle=30.0)
    x = 0.5 * 2.0 * np.sqrt(0.75) * 2.0 * np.pi / 550.0 * d
    assert s.T_s[0, 0] == pytest.approx(1.0 / (1.0 + x * x), rel=1e-14)
    # p: [[1, 0], [i N^2 k0 d, 1]], 1/T = 1 + (k0 d / (2 y))^2 with y = N0 / cos.
    y = 2.0 / np.sqrt(0.75)
    assert s.T_p[0, 0] == pytest.approx(1.0 / (1.0 + (2.0 * np.pi / 550.0 * d / (2.0 * y)) ** 2), rel=1e-14)


def test_zero_thickness_is_as_if_absent():
    layers = [fs.Layer(C(2.35), 80.0), fs.Layer(C(0.06, 3.3), 20.0)]
    wavelength, angle = np.linspace(400.0, 700.0, 31), [0.0, 40.0]
    plain = one(fs.Stack(C(1.0), layers, C(1.52)), wavelength, angle)
    for absent in (C(1.7), C(0.0), C(0.1, 5.0), C(1.0)):
        with_nothing = one(fs.Stack(C(1.0), [layers[0], fs.Layer(absent, 0.0), layers[1]], C(1.52)), wavelength, angle)
        for name in ("R_s", "R_p", "T_s", "T_p", "t_s", "t_p"):
            assert getattr(with_nothing, name).tobytes() == getattr(plain, name).tobytes()


def test_film_of_index_zero():
    # N = 0 blocks p at oblique incidence (E_x = 0 would need H finite with E_z infinite): r_p = +1 at its front.
    stack = fs.Stack(C(1.0), [fs.Layer(C(0.0), 50.0), fs.Layer(C(1.5), 100.0)], C(1.5))
    s = one(stack, angle=[0.0, 30.0])
    assert s.r_p[1, 0] == 1.0
    assert s.T_p[1, 0] == 0.0
    assert s.t_p[1, 0] == 0.0
    assert np.isneginf(s.log10_T_p[1, 0])
    assert s.R_p[0, 0] == s.R_s[0, 0]
    # Limit of s at normal incidence: [[1, i k0 d], [0, 1]], R by hand.
    e, h = 1.0 + 1j * 2.0 * np.pi / 550.0 * 50.0 * 1.5, 1.5
    assert s.R_s[0, 0] == pytest.approx(abs((e - h) / (e + h)) ** 2, rel=1e-13)
    with pytest.raises(fs.ArgumentError, match="a film of N = 0 blocks p at oblique incidence"):
        fs.thickness_gradient(stack, 550.0, 30.0)


def test_a_millimetre_of_silver():
    # Beer and Lambert: T = T0 exp(-4 pi k d / lambda); log10 T stays finite where T has no double.
    thin, thick = (one(fs.Stack(C(1.0), [fs.Layer(C(0.05, 3.3), d)], C(1.5))) for d in (300.0, 1e6))
    assert thick.T_s[0, 0] == 0.0
    slope = 4.0 * np.pi * 3.3 / 550.0 / np.log(10.0)
    assert thick.log10_T_s[0, 0] == pytest.approx(thin.log10_T_s[0, 0] - slope * (1e6 - 300.0), rel=1e-12)
    assert thick.R_s[0, 0] + thick.A_s[0, 0] == pytest.approx(1.0, abs=1e-14)


def test_ten_thousand_quarter_waves():
    # Closed form (Macleod): Y = (nH / nL)^(2m) ns, T = 4 Y / (1 + Y)^2, m = 5000.
    layers = [fs.Layer(C(n), 550.0 / (4.0 * n)) for n in (2.35, 1.45)] * 5000
    s = one(fs.Stack(C(1.0), layers, C(1.52)))
    log10_y = 10000.0 * np.log10(2.35 / 1.45) + np.log10(1.52)
    assert s.log10_T_s[0, 0] == pytest.approx(np.log10(4.0) - log10_y, rel=1e-11)
    assert s.R_s[0, 0] == pytest.approx(1.0, abs=1e-13)
    assert s.T_s[0, 0] == 0.0


def test_lossless_layer_absorbs_exactly_nothing():
    layers = [fs.Layer(C(2.35), 80.0), fs.Layer(C(0.06, 3.3), 20.0), fs.Layer(C(1.46), 100.0), fs.Layer(C(0.7), 90.0)]
    s = one(fs.Stack(C(1.0), layers, C(1.52)), [450.0, 600.0], [0.0, 60.0])
    np.testing.assert_array_equal(s.A_layers_s[[0, 2, 3]], 0.0)
    np.testing.assert_array_equal(s.A_layers_p[[0, 2, 3]], 0.0)
    assert np.all(s.A_layers_p[1] > 0.0)


@pytest.mark.parametrize("quarters", range(1, 9))
def test_phase_of_t_has_its_quadrant(quarters):
    # A film between like media passes exp(-i k0 n d): quarter waves turn t by -90 deg each (exp(+i omega t)). The
    # rounding of the thickness alone is 2e-16 of the phase.
    film = fs.Layer(C(1.5), quarters * 550.0 / (4.0 * 1.5))
    s = one(fs.Stack(C(1.5), [film], C(1.5)))
    assert s.t_s[0, 0] == pytest.approx((-1j) ** quarters, abs=5e-16 * quarters)
    assert s.t_p[0, 0] == pytest.approx((-1j) ** quarters, abs=5e-16 * quarters)


def test_incident_medium_with_a_small_k_is_lossless_and_says_so():
    plain, lossy = (fs.Stack(C(1.515, k), [fs.Layer(C(0.06, 4.2), 50.0)], C(1.0)) for k in (0.0, 1e-6))
    a, b = one(plain, 633.0, 43.0), one(lossy, 633.0, 43.0)
    assert a.R_p.tobytes() == b.R_p.tobytes()
    assert a.notes == ()
    assert b.notes == (
        "the incident medium, constant index 1.515 - 1e-06i, counts as lossless (k up to 1e-06 left out)",
    )
    with pytest.raises(fs.ArgumentError) as caught:
        one(fs.Stack(C(1.515, 2e-4), [], C(1.0)), 633.0)
    assert str(caught.value) == (
        "stack.incident: constant index 1.515 - 0.0002i: expected k <= 0.0001, got k = 0.0002 at 633 nm. In an "
        "absorbing medium the incident and the reflected flux do not add up; choose a transparent one or narrow the "
        "wavelengths"
    )


def test_gain_only_where_allowed():
    gain = C(1.5, -0.01, allow_gain=True)
    with pytest.raises(fs.ArgumentError, match=r"Stack\.exit: an end medium with gain has no defined reflectance"):
        fs.Stack(C(1.0), [], gain)
    with pytest.raises(fs.ArgumentError, match=r"k: expected a finite extinction coefficient >= 0, got -0\.01"):
        C(1.5, -0.01)
    s = one(fs.Stack(C(1.0), [fs.Layer(gain, 500.0)], C(1.0)))
    assert s.R_s[0, 0] + s.T_s[0, 0] > 1.0


@pytest.mark.parametrize(
    ("wavelength", "angle", "message"),
    [
        (550.0, 91.0, "angle_deg[0]: expected 0 to 90 deg, got 91 deg"),
        (550.0, [0.0, -1.0], "angle_deg[1]: expected 0 to 90 deg, got -1 deg"),
        (550.0, float("nan"), "angle_deg[0]: expected 0 to 90 deg, got nan deg"),
        ([550.0, 0.0], 0.0, "wavelength_nm[1]: expected a finite value > 0 nm, got 0 nm"),
        ([550.0, float("inf")], 0.0, "wavelength_nm[1]: expected a finite value > 0 nm, got inf nm"),
        ([], 0.0, "wavelength_nm: expected a number or a list of numbers in nm, got shape (0,)"),
        ("550 nm", 0.0, "wavelength_nm: expected numbers in nm, got '550 nm'"),
    ],
)
def test_bad_axes_are_refused(wavelength, angle, message):
    with pytest.raises(fs.ArgumentError) as caught:
        one(fs.Stack(C(1.0), [], C(1.5)), wavelength, angle)
    assert str(caught.value) == message


def test_axes_are_kept_as_given():
    stack = fs.Stack(C(1.0), [fs.Layer(C(2.35), 80.0)], C(1.52))
    wavelength, angle = [600.0, 500.0, 600.0, 700.0], [45.0, 0.0, 45.0]
    s = one(stack, wavelength, angle)
    assert s.wavelength_nm.tolist() == wavelength
    assert s.angle_deg.tolist() == angle
    assert s.R_p.shape == (3, 4)
    assert s.R_p[0].tobytes() == s.R_p[2].tobytes()
    assert s.R_p[0, 0] == s.R_p[0, 2] == one(stack, 600.0, 45.0).R_p[0, 0]
    assert one(stack).R_s.shape == (1, 1)
    assert one(stack).A_layers_s.shape == (1, 1, 1)


def test_plates_have_no_phase_but_a_finite_log():
    stack = fs.Stack(C(1.0), [fs.Plate(C(1.5, 0.5), 1.0), fs.Layer(C(2.0), 50.0)], C(1.0))
    s = one(stack, angle=[0.0, 50.0])
    assert np.all(s.T_s == 0.0)
    # Lambert: 4 pi k d / lambda over ln 10 at normal incidence, plus the two faces.
    assert s.log10_T_s[0, 0] == pytest.approx(-4.0 * np.pi * 0.5 * 1e6 / 550.0 / np.log(10.0), rel=1e-3)
    np.testing.assert_allclose(s.R_p + s.A_p, 1.0, atol=1e-14)
    with pytest.raises(fs.CoherenceError, match="a stack with a thick plate has no amplitude reflectance"):
        _ = s.r_s
    with pytest.raises(fs.CoherenceError, match="no amplitude derivatives"):
        _ = fs.thickness_gradient(stack, 550.0).dr_s


def test_total_reflection_at_the_back_face():
    # Prism on a plate: light beyond the critical angle of the back face is reflected whole, whatever the films.
    layers = [fs.Layer(C(2.1), 60.0), fs.Plate(C(1.5), 1.0), fs.Layer(C(1.38), 100.0)]
    s = one(fs.Stack(C(1.5), layers, C(1.0)), angle=60.0)
    assert (s.T_s[0, 0], s.T_p[0, 0]) == (0.0, 0.0)
    assert (s.R_s[0, 0], s.R_p[0, 0]) == (1.0, 1.0)


def test_what_t_is():
    glass = C(1.52)
    assert one(fs.Stack(C(1.0), [], glass)).transmittance_into == "into constant index 1.52 (no exit face)"
    assert "through the part" in one(fs.Stack(C(1.0), [fs.Plate(glass, 1.0)], C(1.0))).transmittance_into
