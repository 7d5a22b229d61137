"""Transmission peaks against closed forms, published widths and much finer grids."""

import mpmath as mp
import numpy as np
import pytest
from truth.reference import Media, solve

import filmstack as fs
from filmstack.constants import SPEED_OF_LIGHT_NM_PER_FS
from filmstack.errors import ArgumentError, CoherenceError

C = fs.constant
HIGH, LOW = C(2.35), C(1.45)


def quarter(material, wavelength, quarters=1):
    return fs.Layer(material, quarters * wavelength / (4.0 * material.index(wavelength).real))


def cavity(pairs, order=1, wavelength=1000.0, low=True, incident=1.52, leaving=1.52):
    """Return one cavity between mirrors of `pairs` high layers each."""
    h, w = quarter(HIGH, wavelength), quarter(LOW, wavelength)
    if low:
        layers = [*([h, w] * pairs)[:-1], quarter(LOW, wavelength, 2 * order), *([h, w] * pairs)[:-1]]
    else:
        layers = [*([h, w] * pairs), quarter(HIGH, wavelength, 2 * order), *([w, h] * pairs)]
    return fs.Stack(C(incident), layers, C(leaving))


# Exact widths of cavity filters of 2.35 / 1.45 in 1.52 over their wavelength, found by a separate program that follows
# the half-maximum points; within 2 % of the formula of H. A. Macleod, Thin-Film Optical Filters (from memory).
WIDTHS = [
    (5, 1, True, 0.00414512083497),
    (7, 1, True, 0.000593761099273),
    (5, 2, True, 0.00298574599158),
    (7, 2, True, 0.000429101894027),
    (5, 1, False, 0.00254402105759),
    (7, 1, False, 0.000366088120399),
]


@pytest.mark.parametrize(("pairs", "order", "low", "width"), WIDTHS)
def test_width_of_a_cavity_filter(pairs, order, low, width):
    found = fs.transmission_peaks(cavity(pairs, order, low=low), (950.0, 1050.0))
    assert found.complete
    assert found.resonances == 1
    (peak,) = found
    assert peak.wavelength_nm == pytest.approx(1000.0, rel=1e-14)
    assert peak.transmittance == pytest.approx(1.0, rel=1e-12)
    assert peak.fwhm_nm == pytest.approx(1000.0 * width, rel=1e-11)
    assert peak.half_high_nm - peak.half_low_nm == pytest.approx(peak.fwhm_nm, rel=1e-9)
    assert np.isnan(peak.finesse)


# C. R. Pidgeon, S. D. Smith, J. Opt. Soc. Am. 54, 1459 (1964), for the shift; peaks of this filter at 5 deg, 7 high
# layers each side, air / filter / 1.52, from a separate program.
@pytest.mark.parametrize(
    ("low", "polarization", "shifted", "effective"),
    [
        (True, "s", 0.9986188801, 1.6592366),
        (True, "p", 0.9986194683, 1.6592366),
        (False, "s", 0.9988850951, 1.8459415),
        (False, "p", 0.9988845078, 1.8459415),
    ],
)
def test_tilt_of_a_cavity_filter(low, polarization, shifted, effective):
    stack = cavity(7, low=low, incident=1.0)
    if not low:  # seven high layers outside the cavity
        assert len(stack.films) == 29
    (peak,) = fs.transmission_peaks(stack, (980.0, 1020.0), 5.0, polarization)
    assert peak.wavelength_nm == pytest.approx(1000.0 * shifted, abs=1e-7)
    assert peak.wavelength_nm == pytest.approx(
        1000.0 * np.sqrt(1 - np.sin(np.radians(5.0)) ** 2 / effective**2), abs=2e-3
    )


def test_peaks_of_a_plate():
    # Born and Wolf, Principles of Optics, section 7.6: full transmission where 2 n d = m lambda.
    found = fs.transmission_peaks(fs.Stack(C(1.0), [fs.Layer(C(1.5), 1e6)], C(1.0)), (600.1, 610.1))
    orders = np.arange(np.floor(3e6 / 600.1), 3e6 / 610.1, -1)
    np.testing.assert_allclose([peak.wavelength_nm for peak in found], 3e6 / orders, rtol=1e-14)
    assert found.complete
    assert found.resonances == len(found)
    # T falls to 0.852 only (checked against (2 n / (n^2 + 1))^2 elsewhere): no half-maximum points, hence no width.
    assert all(np.isnan(peak.fwhm_nm) and peak.note for peak in found)
    assert [peak.one_sided for peak in found] == [True] + [False] * (len(found) - 2) + [True]
    frequency = SPEED_OF_LIGHT_NM_PER_FS / (2 * 1.5 * 1e6)
    for peak in found:
        spacing = SPEED_OF_LIGHT_NM_PER_FS / peak.wavelength_nm**2 * peak.fsr_nm
        assert spacing == pytest.approx(frequency, rel=1e-10)


@pytest.mark.parametrize("pairs", [16, 22])
def test_a_line_too_narrow_for_any_grid(pairs):
    # Width of a cavity filter by the formula of Macleod (from memory): 4 nL^(2x-1) ns (nH - nL) / (pi nH^(2x) nH);
    # its error falls with the width.
    width = 1000.0 * 4 * 1.45 ** (2 * pairs - 1) * 1.52 * 0.9 / (np.pi * 2.35 ** (2 * pairs) * 2.35)
    (peak,) = found = fs.transmission_peaks(cavity(pairs), (950.0, 1050.0))
    assert found.complete
    assert peak.wavelength_nm == pytest.approx(1000.0, rel=1e-14)
    assert peak.fwhm_nm == pytest.approx(width, rel=1e-4)
    assert peak.transmittance == pytest.approx(1.0, abs=1e-9)


def test_no_peak_where_there_is_none():
    rising = fs.transmission_peaks(fs.Stack(C(1.0), [fs.Layer(C(1.38), 100.0)], C(1.52)), (600.0, 700.0))
    assert len(rising) == 0
    assert rising.complete
    assert any("600 nm" in note for note in rising.notes)
    flat = fs.transmission_peaks(fs.Stack(C(1.0), [], C(1.52)), (600.0, 700.0))
    matched = fs.transmission_peaks(fs.Stack(C(1.5), [fs.Layer(C(1.5), 5e4)], C(1.5)), (600.0, 700.0))
    assert (len(flat), flat.complete, flat.notes) == (0, True, ())
    assert (len(matched), matched.complete, matched.notes) == (0, True, ())


def test_bad_requests_are_refused():
    stack = cavity(3)
    with pytest.raises(
        ArgumentError, match=r"^band_nm: expected two wavelengths in nm, the shorter first, got \(7, 6\)"
    ):
        fs.transmission_peaks(stack, (7, 6))
    with pytest.raises(ArgumentError, match=r"^polarization: expected 's', 'p' or 'mean', got 'x'"):
        fs.transmission_peaks(stack, (600, 700), polarization="x")
    with pytest.raises(ArgumentError, match=r"^angle_deg: expected one angle below 90 deg, got 90"):
        fs.transmission_peaks(stack, (600, 700), 90)
    with pytest.raises(CoherenceError, match="Drop the plate"):
        fs.transmission_peaks(fs.Stack(C(1.0), [fs.Plate(C(1.5), 1.0)], C(1.0)), (600, 700))


def any_stack(rng):
    """Return a random stack of up to 24 layers, some with loss, dispersion or a thin metal."""
    loss = 10.0 ** rng.uniform(-6.0, -2.0) if rng.random() < 0.4 else 0.0
    media = [C(n, loss) for n in rng.uniform(1.3, 2.6, 3)]
    thickest = np.array([400.0, 400.0, 400.0])
    if rng.random() < 0.3:
        media[2] = fs.sellmeier([rng.uniform(1.0, 2.5)], [rng.uniform(0.005, 0.03)], 1.0)
    if rng.random() < 0.2:
        media[1], thickest[1] = C(0.1, 3.0), 30.0
    chosen = rng.integers(0, 3, rng.integers(1, 25))
    return fs.Stack(C(1.0), [fs.Layer(media[j], thickest[j] * rng.uniform(0.05, 1.0)) for j in chosen], C(1.5))


def grid_maxima(stack, band, angle, polarization, finest):
    """Return wavelength, T and step of the maxima on a grid 100 times finer than the finest width."""
    points = int(min(max(5_001, 100.0 * (band[1] - band[0]) / finest), 2_000_001))
    wavelength = np.linspace(*band, points)
    spectrum = fs.spectrum(stack, wavelength, angle)
    t = {"s": spectrum.T_s, "p": spectrum.T_p, "mean": spectrum.T}[polarization][0]
    top = np.flatnonzero((t[1:-1] > t[:-2]) & (t[1:-1] >= t[2:])) + 1
    wider = np.maximum(t[np.maximum(top - 3, 0)], t[np.minimum(top + 3, points - 1)])
    top = top[t[top] > wider * (1.0 + 1e-13)]  # above the rounding of the grid's own values
    return wavelength[top], t[top], wavelength[1] - wavelength[0]


@pytest.mark.parametrize("seed", range(10))
def test_random_stacks_against_a_grid_finer_than_any_line(seed):
    rng = np.random.default_rng(seed)
    for _ in range(20):
        stack, angle = any_stack(rng), float(rng.choice([0.0, 30.0, 60.0]))
        polarization, band = str(rng.choice(["s", "p", "mean"])), (500.0, 600.0)
        found = fs.transmission_peaks(stack, band, angle, polarization)
        assert found.complete
        widths = [peak.fwhm_nm for peak in found if not np.isnan(peak.fwhm_nm)]
        wavelength, transmittance, step = grid_maxima(stack, band, angle, polarization, min(widths, default=20.0))
        assert len(found) == len(wavelength)
        np.testing.assert_allclose([peak.wavelength_nm for peak in found], wavelength, rtol=0.0, atol=1.01 * step)
        assert all(peak.transmittance >= t * (1.0 - 1e-13) for peak, t in zip(found, transmittance, strict=True))


def coupled(count, outer, inner):
    """Return half-wave cavities between mirrors of `outer` and `inner` high layers."""
    h, w, space = quarter(HIGH, 1000.0), quarter(LOW, 1000.0), quarter(LOW, 1000.0, 2)
    layers = ([h, w] * outer)[:-1]
    for number in range(count):
        layers += [space, *([h, w] * (outer if number == count - 1 else inner))[:-1]]
    return fs.Stack(C(1.52), layers, C(1.52))


@pytest.mark.parametrize("count", [2, 3, 4, 5])
@pytest.mark.parametrize(("outer", "inner"), [(5, 8), (5, 10), (5, 11), (8, 16)])
def test_coupled_cavities_that_merge(count, outer, inner):
    found = fs.transmission_peaks(coupled(count, outer, inner), (950.0, 1050.0))
    assert found.complete
    assert found.resonances == count  # one pole a cavity, however they merge
    half_points = [x for peak in found for x in (peak.half_low_nm, peak.half_high_nm) if not np.isnan(x)]
    edge = 1.5 * max(abs(x - 1000.0) for x in half_points)
    band = (1000.0 - edge, 1000.0 + edge)
    wavelength, transmittance, step = grid_maxima(coupled(count, outer, inner), band, 0.0, "s", 0.02 * edge)
    assert len(found) == len(wavelength)
    np.testing.assert_allclose([peak.wavelength_nm for peak in found], wavelength, rtol=0.0, atol=1.01 * step)
    np.testing.assert_allclose([peak.transmittance for peak in found], transmittance, rtol=1e-4)
    if (outer, inner) == (5, 8):
        assert len(found) == count
    if (count, outer, inner) == (2, 5, 11):
        assert len(found) == 1


def airy(reflectance):
    """Return the index of two media whose face to air has this reflectance."""
    return (1.0 + np.sqrt(reflectance)) / (1.0 - np.sqrt(reflectance))


@pytest.mark.parametrize(
    ("reflectance", "finesse"),
    # Exact finesse of an Airy function: pi / (2 asin((1 - R) / (2 sqrt R))). N. Ismail et al., Opt. Express 24, 16366
    # (2016).
    [(0.5, 4.34681580829), (0.9, 29.7899558830), (0.99, 312.583206682), (0.999, 3140.02133340)],
)
def test_finesse_of_an_air_gap(reflectance, finesse):
    n = C(airy(reflectance))
    found = fs.transmission_peaks(fs.Stack(n, [fs.Layer(C(1.0), 1e6)], n), (632.0, 634.0))
    assert found.complete
    assert found.resonances == len(found) == 10
    for peak in found.peaks[1:-1]:
        assert peak.finesse == pytest.approx(finesse, rel=1e-9)
        assert peak.transmittance == pytest.approx(1.0, rel=1e-9)
        # 1.000 mm of air: c / 2d = 149.896229 GHz; at R = 0.99 the exact width is 0.47954024975 GHz.
        assert 299792.458 / peak.wavelength_nm**2 * peak.fsr_nm * 1e3 == pytest.approx(149.896229, rel=1e-8)
        if reflectance == 0.99:
            assert 299792458.0 / peak.wavelength_nm / peak.q == pytest.approx(0.47954024975, rel=1e-9)


def test_finesse_of_a_million():
    # Lines of 0.01 pm, 10 nm apart, in a band of 100 nm: an air gap of 18 um between faces of R = 1 - pi / 1e6.
    n = C(airy(1.0 - np.pi * 1e-6))
    found = fs.transmission_peaks(fs.Stack(n, [fs.Layer(C(1.0), 18_000.0)], n), (550.5, 650.5))
    assert found.complete
    assert [peak.wavelength_nm for peak in found] == pytest.approx([36_000.0 / m for m in range(65, 55, -1)], rel=1e-12)
    assert found.resonances == 10
    for peak in found.peaks[1:-1]:
        assert peak.finesse == pytest.approx(1e6, rel=1e-5)
        assert peak.fwhm_nm == pytest.approx(1e-5, rel=0.2)


@pytest.mark.parametrize(("pairs", "digits"), [(7, 1e-11), (16, 1e-10), (22, 1e-7)])
def test_width_against_fifty_digits(pairs, digits):
    # Root of T = T_max / 2 on both sides by the Airy recursion of `reference`; the last line is 0.3 fm wide.
    stack = cavity(pairs)
    (peak,) = fs.transmission_peaks(stack, (950.0, 1050.0))
    n = [1.52, *(float(film.material.index(1000.0).real) for film in stack.films), 1.52]
    media = Media(n, [0.0] * len(n), [0.0, *stack.thickness_nm.tolist(), 0.0])
    with mp.workdps(50):

        def excess(wavelength):
            return solve(media, wavelength, 0, False).T - mp.mpf(1) / 2

        half = mp.mpf(peak.fwhm_nm) / 2
        ends = [
            mp.findroot(excess, (peak.wavelength_nm + side * half, peak.wavelength_nm + side * half * 1.01), tol=1e-30)
            for side in (-1, 1)
        ]
        assert peak.fwhm_nm == pytest.approx(float(ends[1] - ends[0]), rel=digits)


def test_absorbing_and_dispersive_media():
    # Silver of a table between high-index films: the only check is the grid, at both oblique polarizations.
    silver, high = fs.material("Ag"), fs.material("TiO2")
    films = [(high, 60.0), (silver, 40.0), (high, 120.0), (silver, 40.0), (high, 60.0)]
    stack = fs.Stack(fs.material("air"), [fs.Layer(*film) for film in films], fs.material("glass"))
    for polarization in ("s", "p", "mean"):
        found = fs.transmission_peaks(stack, (450.0, 900.0), 30.0, polarization)
        wavelength, transmittance, step = grid_maxima(stack, (450.0, 900.0), 30.0, polarization, 5.0)
        assert found.complete
        assert len(found) == len(wavelength) > 0
        np.testing.assert_allclose([peak.wavelength_nm for peak in found], wavelength, rtol=0.0, atol=1.01 * step)
        np.testing.assert_allclose([peak.transmittance for peak in found], transmittance, rtol=1e-5)


def test_where_light_begins_to_leave_the_search_says_so():
    # Dispersion carries the exit face through the critical angle inside the band: T begins with a square root there.
    prism = fs.sellmeier([1.25], [0.01], 1.0)
    angle = float(np.degrees(np.arcsin(1.0 / prism.index(550.0).real)))
    stack = fs.Stack(prism, [fs.Layer(C(2.3), 1000.0)], C(1.0))
    found = fs.transmission_peaks(stack, (500.0, 600.0), angle)
    assert not found.complete
    assert any(
        note.startswith("not resolved from 550") or note.startswith("not resolved from 549.99") for note in found.notes
    )
    wavelength, _, step = grid_maxima(stack, (551.0, 600.0), angle, "s", 5.0)
    np.testing.assert_allclose([peak.wavelength_nm for peak in found], wavelength, rtol=0.0, atol=1.01 * step)


def test_table_and_sequence_of_a_result():
    found = fs.transmission_peaks(fs.Stack(C(1.0), [fs.Layer(C(4.0), 1000.0)], C(1.0)), (510.0, 690.0))
    frame = found.to_frame()
    assert len(found) == len(frame) == 4
    assert frame["wavelength_nm"].tolist() == [peak.wavelength_nm for peak in found]
    assert found[-1] is found.peaks[-1]
    axes = found.plot()
    assert axes.get_ylabel() == "T (%)"


@pytest.mark.parametrize(
    ("index", "peaks"), [(1.5, 1), (1.51997, 1), (1.519975, 1), (1.5200023313, None), (1.521, 2), (1.7, 2)]
)
def test_two_cavities_about_to_merge(index, peaks):
    # One layer between them carries the two lines through the index of 1.51997, where they become one with a flat top;
    # next to it the dip between them falls below the rounding of T, and one or two is as good an answer.
    h, w, space = quarter(HIGH, 1000.0), quarter(LOW, 1000.0), quarter(LOW, 1000.0, 2)
    between = [*([h, w] * 10)[:9], quarter(C(index), 1000.0), *([h, w] * 10)[10:19]]
    stack = fs.Stack(C(1.52), [*([h, w] * 5)[:-1], space, *between, space, *([h, w] * 5)[:-1]], C(1.52))
    found = fs.transmission_peaks(stack, (990.0, 1010.0))
    assert found.complete
    assert found.resonances == 2
    assert len(found) == peaks or (peaks is None and len(found) in (1, 2))
    for peak in found:
        t = fs.spectrum(stack, peak.wavelength_nm + np.array([-1e-2, 0.0, 1e-2])).T_s[0]
        assert t[1] >= max(t[0], t[2]) * (1.0 - 1e-9)
