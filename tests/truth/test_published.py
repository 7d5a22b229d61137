"""Published and closed-form values of surfaces and stacks; the source stands beside each.

Values marked R were recomputed by independent high-precision arithmetic (closed form and a one-shot
linear system of the boundary conditions), those marked M agree with the named book as remembered.
Amplitudes of sources written for exp(-i omega t) are conjugated; indices there are n + ik.
"""

import numpy as np
import pytest
from scipy.optimize import brentq, fsolve, minimize_scalar

import filmstack as fs

C = fs.constant
LAMBDA = 550.0


def film(n, quarter_waves=1.0, k=0.0):
    """Return a layer of so many quarter waves at 550 nm."""
    return fs.Layer(C(n, k), quarter_waves * LAMBDA / (4.0 * n))


def stack(incident, layers, exit_):
    """Return a stack between two lossless media."""
    return fs.Stack(C(incident), layers, C(exit_))


def sequence(text, n_high, n_low):
    """Return quarter waves of a textbook row of H and L."""
    return [film(n_high if letter == "H" else n_low) for letter in text]


# S1 to S6: Fresnel's formulas; Born and Wolf, Principles of Optics, section 1.5 (R).
SURFACES = [
    (1.0, 1.33, 0.0, 0.0200593121995, 0.0200593121995),
    (1.0, 1.5, 0.0, 0.04, 0.04),
    (1.0, 1.52, 0.0, 0.0425799949609, 0.0425799949609),
    (1.0, 4.0, 0.0, 0.36, 0.36),
    (1.0, 1.5, 30.0, 0.0577961054032, 0.0252491465484),
    (1.0, 1.5, 45.0, 0.0920133630455, 0.00846645897895),
    (1.0, 1.5, 60.0, 0.176571488083, 0.00180193752159),
    (1.0, 1.5, 80.0, 0.538594905750, 0.236813803633),
    (1.0, 1.5, 56.3099324740, 0.147928994083, 0.0),
]


@pytest.mark.parametrize(("n0", "n1", "angle", "r_s", "r_p"), SURFACES)
def test_fresnel_reflectance(n0, n1, angle, r_s, r_p):
    s = fs.spectrum(stack(n0, [], n1), LAMBDA, angle)
    assert s.R_s[0, 0] == pytest.approx(r_s, abs=6e-13)
    assert s.R_p[0, 0] == pytest.approx(r_p, abs=6e-13)


def test_brewster_and_critical_angle():
    # S6 Brewster, 56.3099324740 deg; S7 Snell, 41.8103148958 deg (R).
    # r_p changes its sign there.
    brewster = brentq(lambda a: fs.spectrum(stack(1.0, [], 1.5), LAMBDA, a).r_p[0, 0].real, 50.0, 62.0, xtol=1e-13)
    assert brewster == pytest.approx(56.3099324740, abs=6e-11)
    below, above = fs.spectrum(stack(1.5, [], 1.0), LAMBDA, [41.8103148957, 41.8103148959]).T_s[:, 0]
    assert below > 0.0
    assert above == 0.0


def _extremum(f, low, high, step):
    """Return where f is stationary: the zero of a central difference, sharper than a search for the extremum."""
    return brentq(lambda x: f(x + step) - f(x - step), low, high, xtol=1e-13)


def _phases(n, angle):
    """Return the phases of s and p in the textbooks' convention, p after the magnetic field."""
    s = fs.spectrum(stack(n, [], 1.0), LAMBDA, angle)
    # The sheet's r is conj(ours) for s and -conj(ours) for p.
    return np.degrees(np.angle(np.conj(s.r_s[0, 0]))), np.degrees(np.angle(-np.conj(s.r_p[0, 0])))


def test_phases_of_total_reflection():
    # S8: tan(phi_s / 2) = sqrt(n^2 sin^2 - 1) / (n cos), tan(phi_p / 2) = n sqrt(...) / cos. Born and Wolf 1.5.4 (R).
    phi_s, phi_p = (abs(x) for x in _phases(1.5, 45.0))
    assert phi_s == pytest.approx(36.86989765, abs=6e-9)
    assert phi_p == pytest.approx(73.73979529, abs=6e-9)


def test_fresnel_rhomb():
    # S9, S10: glass of 1.51; 45 deg between s and p at two angles (book 48 deg 37 min and 54 deg 37 min), largest
    # 45.94166681 deg at 51.33910002 deg. Born and Wolf 1.5.4 (R, M).
    def difference(angle):
        phi_s, phi_p = _phases(1.51, angle)
        return abs(phi_p) - abs(phi_s)

    assert brentq(lambda a: difference(a) - 45.0, 45.0, 51.0, xtol=1e-12) == pytest.approx(48.6243591603, abs=1e-8)
    assert brentq(lambda a: difference(a) - 45.0, 52.0, 60.0, xtol=1e-12) == pytest.approx(54.6231054412, abs=1e-8)
    best = _extremum(difference, 49.0, 54.0, 1e-4)
    assert difference(best) == pytest.approx(45.94166681, abs=6e-9)
    assert best == pytest.approx(51.33910002, abs=6e-9)


@pytest.mark.parametrize(
    ("n", "k", "published"),
    # S11: Macleod, Thin-Film Optical Filters: silver and aluminium, 98.2 % and 91.6 % (R, M).
    [(0.055, 3.32, 0.981871257084), (0.82, 5.99, 0.916310518594)],
)
def test_metal_at_normal_incidence(n, k, published):
    s = fs.spectrum(fs.Stack(C(1.0), [], C(n, k)), LAMBDA)
    assert s.R_s[0, 0] == pytest.approx(published, abs=6e-13)


def test_stokes_relations():
    # S12: G. G. Stokes (1849): r12 = -r21, t12 t21 = 1 - r12^2.
    there, back = fs.spectrum(stack(1.0, [], 1.5), LAMBDA), fs.spectrum(stack(1.5, [], 1.0), LAMBDA)
    assert there.r_s[0, 0] == pytest.approx(-0.2, abs=1e-15)
    assert back.r_s[0, 0] == pytest.approx(0.2, abs=1e-15)
    assert there.t_s[0, 0] * back.t_s[0, 0] == pytest.approx(0.96, abs=1e-15)


# S13, S14: K. Artmann, Ann. Phys. 437, 87 (1948): shift along the surface at 632.8 nm, 1.5 to 1 (R).
GOOS_HAENCHEN = [(45.0, 569.720164864, 911.552263783), (60.0, 420.766227205, 292.706940664)]


@pytest.mark.parametrize(("angle", "shift_s", "shift_p"), GOOS_HAENCHEN)
def test_goos_haenchen_shift(angle, shift_s, shift_p):
    # The shift is d arg(r) / d kx with exp(+i omega t); five-point difference in the angle.
    step = 0.01
    angles = angle + step * np.array([-2.0, -1.0, 1.0, 2.0])
    s = fs.spectrum(stack(1.5, [], 1.0), 632.8, angles)
    slope = 2.0 * np.pi / 632.8 * 1.5 * np.cos(np.radians(angle)) * np.radians(1.0)
    for r, published in ((s.r_s, shift_s), (s.r_p, shift_p)):
        phase = np.unwrap(np.angle(r[:, 0]))
        derivative = (phase[0] - 8.0 * phase[1] + 8.0 * phase[2] - phase[3]) / (12.0 * step)
        assert derivative / slope == pytest.approx(published, rel=1e-10)


@pytest.mark.parametrize(
    ("gap", "t_s", "t_p"),
    # F1, F2: closed form of frustrated total reflection, Born and Wolf; Zhu and others, Am. J. Phys. 54, 601 (R).
    [(0.5, 0.164213627088, 0.334656770140), (1.0, 0.0170471783922, 0.0425102754942)],
)
def test_frustrated_total_reflection(gap, t_s, t_p):
    s = fs.spectrum(stack(1.5, [fs.Layer(C(1.0), gap * LAMBDA)], 1.5), LAMBDA, 45.0)
    assert s.T_s[0, 0] == pytest.approx(t_s, rel=1e-11)
    assert s.T_p[0, 0] == pytest.approx(t_p, rel=1e-11)


# A1 to A5: R of one or two quarter waves, closed forms in Macleod; Moys, Thin Solid Films 21, 145 (1974) (R).
QUARTER_WAVES = [
    ([1.38], 1.52, 0.0126007902146),
    ([1.38], 1.50, 0.0141104586418),
    ([2.2], 4.0, 0.0090292991544),
    ([2.35], 1.52, 0.323004795294),
    ([1.38, 1.70], 1.52, 6.5677305348e-7),
    ([1.23288280059], 1.52, 0.0),
    ([1.38, 1.70137826482], 1.52, 0.0),
]


@pytest.mark.parametrize(("indices", "substrate", "published"), QUARTER_WAVES)
def test_antireflection_of_quarter_waves(indices, substrate, published):
    s = fs.spectrum(stack(1.0, [film(n) for n in indices], substrate), LAMBDA)
    assert s.R_s[0, 0] == pytest.approx(published, abs=6e-13)


# A7 to A9: V-coats with R = 0, optical thickness in waves, outer and inner; closed form (R).
V_COATS = [
    (1.38, 2.30, 0.3233604483, 0.05247366962),
    (1.38, 2.30, 0.1766395517, 0.4475263304),
    (1.38, 2.10, 0.3174503454, 0.06712121387),
    (1.38, 2.10, 0.1825496546, 0.4328787861),
    (1.46, 2.35, 0.3313605025, 0.06576606828),
    (1.46, 2.35, 0.1686394975, 0.4342339317),
]


@pytest.mark.parametrize(("outer", "inner", "waves_outer", "waves_inner"), V_COATS)
def test_v_coat(outer, inner, waves_outer, waves_inner):
    layers = [film(outer, 4.0 * waves_outer), film(inner, 4.0 * waves_inner)]
    # Ten digits of thickness leave |r| up to some 1e-9.
    assert fs.spectrum(stack(1.0, layers, 1.52), LAMBDA).R_s[0, 0] < 1e-17


def test_quarter_half_quarter():
    # A10: Cox, Hass, Thelen, J. Opt. Soc. Am. 52, 965 (1962) for the type; values R.
    wavelength = [400.0, 420.0, 450.0, 500.0, 550.0, 600.0, 650.0, 700.0]
    published = [
        0.0406155201, 0.0163282141, 0.00194667990, 0.00102066556, 0.00239838496, 0.00137859205, 0.000147549906,
        0.00143639451,
    ]  # fmt: skip
    layers = [film(1.38), film(2.05, 2.0), film(1.62)]
    np.testing.assert_allclose(fs.spectrum(stack(1.0, layers, 1.52), wavelength).R_s[0], published, rtol=5e-9)


# Q1, Q2: (HL)^m H of 2.35 / 1.45; Q3, Q4: 2.30 / 1.38; on 1.52. Admittance closed form, Macleod (R).
MIRRORS = [
    *[(2.35, 1.45, 2 * m + 1, r) for m, r in enumerate((
        0.323004795294, 0.656591623460, 0.852432674811, 0.941051127809, 0.977135542511, 0.991232834621,
        0.996653106818, 0.998724464053, 0.999514192089,
    ))],
    *[(2.30, 1.38, 2 * m + 3, r) for m, r in enumerate((
        0.660177129182, 0.861549158778, 0.947785807318, 0.980880519819, 0.993074476107, 0.997501267245,
        0.999099736056,
    ))],
    (2.35, 1.45, 10, 0.9791714422888), (2.35, 1.45, 20, 0.99983166181275), (2.35, 1.45, 40, 0.99999998922984),
]  # fmt: skip


@pytest.mark.parametrize(("high", "low", "layers", "published"), MIRRORS)
def test_quarter_wave_mirror(high, low, layers, published):
    row = ("HL" * layers)[:layers]
    s = fs.spectrum(stack(1.0, sequence(row, high, low), 1.52), LAMBDA)
    assert s.R_s[0, 0] == pytest.approx(published, abs=6e-13)
    assert s.one_minus_R_s[0, 0] == pytest.approx(1.0 - published, rel=1e-6, abs=6e-14)


@pytest.mark.parametrize(
    ("high", "low", "half_width"),
    # Q6: (2/pi) asin((nH - nL) / (nH + nL)), Macleod; Epstein 1952 (R).
    [(2.35, 1.45, 0.152224816537), (2.3, 1.38, 0.16086124651), (4.0, 1.35, 0.329903579755)],
)
def test_half_width_of_a_stop_band(high, low, half_width):
    # Inside the band T of 300 periods has died out, outside it has not.
    for g, inside in ((half_width - 1e-3, True), (half_width + 1e-3, False)):
        s = fs.spectrum(stack(1.0, sequence("HL" * 300, high, low), 1.52), LAMBDA / (1.0 + g))
        assert s.log10_T_s[0, 0] < -6.0 if inside else s.log10_T_s[0, 0] > -3.0


def test_periods_in_air_by_chebyshev_polynomials():
    # Q9: 8 periods of 2.35 / 1.45 in air; Born and Wolf 1.6.5; Abeles 1950 (R).
    s = fs.spectrum(stack(1.0, sequence("HL" * 8, 2.35, 1.45), 1.0), [550.0, 620.0, 700.0])
    np.testing.assert_allclose(s.R_s[0], [0.998236079747, 0.991583523648, 0.415077472066], atol=6e-13)


def test_mirror_at_oblique_incidence_and_off_centre():
    # Q10, Q11: (HL)^5 H of 2.35 / 1.45 on 1.52, thickness fixed for 550 nm at normal incidence (R).
    mirror = stack(1.0, sequence("HL" * 5 + "H", 2.35, 1.45), 1.52)
    s = fs.spectrum(mirror, LAMBDA, [30.0, 45.0, 60.0])
    np.testing.assert_allclose(s.R_s[:, 0], [0.99419482098875, 0.99547559802301, 0.99604915534851], atol=6e-15)
    np.testing.assert_allclose(s.R_p[:, 0], [0.98224870415584, 0.93936279010095, 0.62400776728429], atol=6e-15)
    s = fs.spectrum(mirror, [450.0, 500.0, 600.0, 700.0])
    np.testing.assert_allclose(s.R_s[0], [0.01563063406, 0.9786642537, 0.9839381871, 0.04177884676], atol=6e-11)


def test_polarizer_condition():
    # Q17: MacNeille, US 2,403,731 (1946): sin(theta) n_g = nH nL / sqrt(nH^2 + nL^2), for 2.3, 1.35, 45 deg.
    # No H/L step reflects p there, so the row acts as one film of the common admittance: Airy's formula.
    prism, layers = 1.64651413214, sequence("HLHLHLH", 2.3, 1.35)
    s = fs.spectrum(stack(prism, layers, prism), LAMBDA, 45.0)
    b = prism * np.sin(np.pi / 4)
    kappa = {n: np.sqrt(n * n - b * b) for n in (2.3, 1.35, prism)}
    assert 2.3**2 / kappa[2.3] == pytest.approx(1.35**2 / kappa[1.35], rel=1e-10)
    phase = sum(
        2.0 * np.pi * kappa[n] * d.thickness_nm / LAMBDA for n, d in zip([2.3, 1.35] * 3 + [2.3], layers, strict=True)
    )
    y, y0 = 2.3**2 / kappa[2.3], prism**2 / kappa[prism]
    r = (y0 - y) / (y0 + y)
    airy = 4.0 * r * r * np.sin(phase) ** 2 / ((1.0 - r * r) ** 2 + 4.0 * r * r * np.sin(phase) ** 2)
    assert s.R_p[0, 0] == pytest.approx(airy, abs=1e-10)
    assert s.R_s[0, 0] > 0.8


@pytest.mark.parametrize(("exit_index", "one_minus_r"), [(1.0, 0.0259112623376), (1.8, 0.0144789419126)])
def test_twenty_layers_of_1_8_and_1_4(exit_index, one_minus_r):
    # Q18: Barry and others, Sci. Rep. 10, 12024 (2020) for the problem; values R.
    s = fs.spectrum(stack(1.0, sequence("HL" * 10, 1.8, 1.4), exit_index), LAMBDA)
    assert s.one_minus_R_s[0, 0] == pytest.approx(one_minus_r, abs=6e-14)


def test_coherent_and_incoherent_plate():
    # P9, P10: Born and Wolf; T = 2n / (n^2 + 1), R = 2r / (1 + r) without interference (R).
    thick = fs.spectrum(stack(1.0, [film(1.5, 1.0)], 1.0), LAMBDA)
    assert thick.T_s[0, 0] == pytest.approx(0.852071005917, abs=6e-13)
    for n, t, r in ((1.5, 0.923076923077, 0.0769230769231), (1.52, 0.918318028033, 0.0816819719671)):
        s = fs.spectrum(fs.Stack(C(1.0), [fs.Plate(C(n), 1.0)], C(1.0)), LAMBDA)
        assert s.T_s[0, 0] == pytest.approx(t, abs=6e-13)
        assert s.R_s[0, 0] == pytest.approx(r, abs=6e-13)


def _half_width(layers, span):
    def lost(x):
        return fs.spectrum(stack(1.52, layers, 1.52), LAMBDA / (1.0 + x)).T_s[0, 0] - 0.5

    upper, lower = brentq(lost, 0.0, span, xtol=1e-17), brentq(lost, -span, 0.0, xtol=1e-17)
    return 1.0 / (1.0 + lower) - 1.0 / (1.0 + upper)


# P11 to P13: exact widths over the centre of all-dielectric filters between 1.52, x H layers each side (R).
FILTERS = [
    ("L", 1, 5, 0.00414512083497), ("L", 1, 7, 0.000593761099273), ("L", 2, 5, 0.00298574599158),
    ("L", 2, 7, 0.000429101894027), ("H", 1, 5, 0.00254402105759), ("H", 1, 7, 0.000366088120399),
]  # fmt: skip


@pytest.mark.parametrize(("cavity", "order", "x", "published"), FILTERS)
def test_width_of_a_line_filter(cavity, order, x, published):
    side = "HL" * (x - 1) + "H" if cavity == "L" else "HL" * x
    layers = sequence(side + cavity * (2 * order) + side[::-1], 2.35, 1.45)
    assert _half_width(layers, 0.02) == pytest.approx(published, rel=1e-8)


@pytest.mark.parametrize(
    ("cavity", "peak_s", "peak_p"), [("L", 0.9986188801, 0.9986194683), ("H", 0.9988850951, 0.9988845078)]
)
def test_tilt_of_a_line_filter(cavity, peak_s, peak_p):
    # P14: Pidgeon and Smith, J. Opt. Soc. Am. 54, 1459 (1964); 7 H layers a side, 5 deg (R).
    side = "HL" * 6 + "H" if cavity == "L" else "HL" * 7
    filter_ = stack(1.0, sequence(side + cavity * 2 + side[::-1], 2.35, 1.45), 1.52)
    for name, published in (("T_s", peak_s), ("T_p", peak_p)):
        best = minimize_scalar(
            lambda x, name=name: -getattr(fs.spectrum(filter_, LAMBDA * x, 5.0), name)[0, 0],
            bounds=(published - 1e-4, published + 1e-4),
            options={"xatol": 1e-12},
        )
        assert best.x == pytest.approx(published, abs=2e-9)


SILVER = (0.055, 3.32)


def test_potential_transmittance():
    # M5: lossless layers in front leave T / (1 - R); Berning, Turner, J. Opt. Soc. Am. 47, 230 (1957) (R).
    metal = fs.Layer(C(*SILVER), 70.0)
    for front in ([], [fs.Layer(C(2.35), 60.0), fs.Layer(C(1.35), 95.0)]):
        s = fs.spectrum(fs.Stack(C(1.0), [*front, metal], C(1.52)), LAMBDA)
        assert s.T_s[0, 0] / s.one_minus_R_s[0, 0] == pytest.approx(0.301827955721, abs=6e-13)


@pytest.mark.parametrize(
    ("n", "k", "d", "wavelength", "x", "z", "psi"),
    # M1 to M4: the exit admittance X - iZ (sheet: n + ik) that lets most light through; Macleod (R, M).
    [
        (0.055, 3.32, 70.0, 550.0, 0.457175872459, 3.46934175135, 0.805006789224),
        (0.055, 3.32, 50.0, 550.0, 0.956810350249, 3.82821928255, 0.916078623094),
        (0.055, 3.32, 30.0, 550.0, 2.13133276658, 5.1214194074, 0.973352170163),
        (0.82, 5.99, 20.0, 546.0, 2.98832409318, 8.11222595634, 0.712484721755),
    ],
)
def test_largest_potential_transmittance(n, k, d, wavelength, x, z, psi):
    # A film of index m and phase delta before an exit e shows Y = m (e + i m tan) / (m + i e tan), solved for the
    # wanted one; e = 0.1 is no real medium, but lets every Y be reached.
    wanted = x + 1j * z

    def miss(unknown):
        m, delta = unknown
        tan = np.tan(delta)
        found = m * (0.1 + 1j * m * tan) / (m + 0.1j * tan)
        return [(found - wanted).real, (found - wanted).imag]

    guesses = [
        (m, delta) for m in (abs(wanted) * np.array([0.3, 0.6, 1.05, 1.5, 2.5, 4.0])) for delta in (0.4, 0.9, 1.2, 1.4)
    ]
    solved = [fsolve(miss, guess, full_output=True, xtol=1e-14)[0] for guess in guesses]
    m, delta = next(x for x in solved if x[0] > 0.0 and max(map(abs, miss(x))) < 1e-11)
    delta = delta % np.pi
    layers = [fs.Layer(C(n, k), d), fs.Layer(C(m), delta * wavelength / (2.0 * np.pi * m))]
    s = fs.spectrum(fs.Stack(C(1.0), layers, C(0.1)), wavelength)
    assert s.T_s[0, 0] / s.one_minus_R_s[0, 0] == pytest.approx(psi, abs=1e-11)


def test_transmittance_is_the_same_both_ways():
    # M6, M7: 1 / 2.35 80 / silver 25 / 1.7 + 0.3i 140 / 1.52 at 550 nm (R).
    layers = [fs.Layer(C(2.35), 80.0), fs.Layer(C(*SILVER), 25.0), fs.Layer(C(1.7, 0.3), 140.0)]
    there = fs.Stack(C(1.0), layers, C(1.52))
    back_angle = np.degrees(np.arcsin(np.sin(np.radians(50.0)) / 1.52))
    front, back = fs.spectrum(there, LAMBDA, [0.0, 50.0]), fs.spectrum(there.reversed(), LAMBDA, [0.0, back_angle])
    np.testing.assert_allclose(front.T_s[:, 0], [0.0649088506098, 0.0379617527765], atol=6e-14)
    np.testing.assert_allclose(back.T_s[:, 0], [0.0649088506098, 0.0379617527765], atol=6e-14)
    np.testing.assert_allclose(front.R_s[:, 0], [0.816697898342, 0.880957947076], atol=6e-13)
    np.testing.assert_allclose(back.R_s[:, 0], [0.135187521550, 0.0914219778685], atol=6e-13)
    assert front.T_p[1, 0] == pytest.approx(0.0862548773996, abs=6e-14)
    assert front.R_p[1, 0] == pytest.approx(0.728357984069, abs=6e-13)
    assert back.R_p[1, 0] == pytest.approx(0.0750947798633, abs=6e-14)


# M8 to M10: R, T, A (R).
ABSORBING = [
    ([(2.35, 0.01, LAMBDA / (4 * 2.35))], 1.0, 0.0, "s", 0.320732092517, 0.669419995758, 0.00984791172444),
    ([(*SILVER, 40.0)], 1.0, 0.0, "s", 0.899383715019, 0.0791266670600, 0.0214896179213),
    ([(*SILVER, 40.0)], 1.52, 45.0, "s", 0.926677372003, 0.0525812866659, None),
    ([(*SILVER, 40.0)], 1.52, 45.0, "p", 0.836734065652, 0.129828269714, None),
]


@pytest.mark.parametrize(("films", "incident", "angle", "p", "r", "t", "a"), ABSORBING)
def test_absorbing_films(films, incident, angle, p, r, t, a):
    layers = [fs.Layer(C(n, k), d) for n, k, d in films]
    s = fs.spectrum(fs.Stack(C(incident), layers, C(1.52)), LAMBDA, angle)
    assert getattr(s, f"R_{p}")[0, 0] == pytest.approx(r, abs=6e-13)
    assert getattr(s, f"T_{p}")[0, 0] == pytest.approx(t, abs=6e-13)
    assert getattr(s, f"A_{p}")[0, 0] == pytest.approx(1.0 - r - t if a is None else a, abs=2e-12)


def test_surface_plasmon():
    # M11: prism 1.515 / silver 0.0562 + 4.2776i 50 nm / air, 632.8 nm, p: least R 0.026225141 at 42.80481088 deg (R).
    prism = fs.Stack(C(1.515), [fs.Layer(C(0.0562, 4.2776), 50.0)], C(1.0))

    def reflected(angle):
        return fs.spectrum(prism, 632.8, angle).R_p[0, 0]

    best = _extremum(reflected, 42.5, 43.1, 1e-5)
    assert best == pytest.approx(42.80481088, abs=2e-8)
    assert reflected(best) == pytest.approx(0.026225141, abs=6e-10)


@pytest.mark.parametrize("split", [0.1, 0.5, 0.8])
def test_effective_interfaces(split):
    # M12: S. D. Smith, J. Opt. Soc. Am. 48, 43 (1958): T from the two halves at any split inside a lossless spacer.
    spacer = C(1.45)
    left = [fs.Layer(C(2.35), 60.0), fs.Layer(C(0.055, 3.32), 20.0)]
    right = [fs.Layer(C(2.1), 75.0), fs.Layer(C(1.38), 90.0), fs.Layer(C(2.35), 40.0)]
    d = 400.0
    whole = fs.spectrum(fs.Stack(C(1.0), [*left, fs.Layer(spacer, d), *right], C(1.52)), LAMBDA)
    a = fs.spectrum(fs.Stack(C(1.0), [*left, fs.Layer(spacer, d * split)], spacer), LAMBDA)
    a_back = fs.spectrum(fs.Stack(C(1.0), [*left, fs.Layer(spacer, d * split)], spacer).reversed(), LAMBDA)
    b = fs.spectrum(fs.Stack(spacer, [fs.Layer(spacer, d * (1 - split)), *right], C(1.52)), LAMBDA)
    r1, r2 = a_back.R_s[0, 0], b.R_s[0, 0]
    half = 0.5 * (np.angle(a_back.r_s[0, 0]) + np.angle(b.r_s[0, 0]))
    root = np.sqrt(r1 * r2)
    f = 4.0 * root / (1.0 - root) ** 2
    t = a.T_s[0, 0] * b.T_s[0, 0] / (1.0 - root) ** 2 / (1.0 + f * np.sin(half) ** 2)
    assert whole.T_s[0, 0] == pytest.approx(t, rel=1e-12)
