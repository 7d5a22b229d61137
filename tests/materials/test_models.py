"""One suite over every dispersion model and every shipped formula entry."""

from itertools import pairwise

import mpmath as mp
import numpy as np
import pytest
from scipy.integrate import quad

import filmstack as fs
from filmstack.constants import PLANCK_EV_NM
from filmstack.materials.models.formula import standard_air
from filmstack.materials.models.registry import MODELS, build_formula, formula_entries

ENTRIES = formula_entries()

# A medium of each model; parameters are invented where no entry is shipped.
EXAMPLES = {
    "constant": lambda: fs.constant(1.5, 0.01),
    "sellmeier": lambda: fs.sellmeier([1.1], [0.01]),
    "sellmeier-rational": lambda: fs.sellmeier_rational(2.5, [0.02], [0.01], [0.0], [-0.01], [2.0]),
    "cauchy": lambda: fs.cauchy(1.45, [0.004], [-2.0]),
    "power-series": lambda: fs.power_series(2.2, [0.01, -0.003], [-2.0, 2.0]),
    "gas": lambda: fs.gas([0.05792105, 0.00167917], [238.0185, 57.362]),
    "lorentz": lambda: fs.lorentz([1.2, 0.1], [6.0, 1.5], [0.4, 0.2], 1.3),
    "drude": lambda: fs.drude(9.0, 0.05, 3.7),
    "lorentz-drude": lambda: fs.lorentz_drude(9.0, 0.8, 0.05, [0.1, 0.5], [4.0, 8.0], [0.5, 1.0]),
    "brendel-bormann": lambda: fs.brendel_bormann(9.0, 0.8, 0.05, [0.1, 0.5], [4.0, 8.0], [0.1, 0.2], [0.5, 1.0]),
    "tauc-lorentz": lambda: fs.tauc_lorentz([122.0, 20.0], [3.45, 6.0], [2.54, 1.0], [1.2, 2.5], 1.15),
    "forouhi-bloomer": lambda: fs.forouhi_bloomer(0.5, 6.0, 10.0, 1.0, 2.0),
    "urbach-tail": lambda: fs.urbach_tail(fs.sellmeier([4.0], [0.05]), 1e-2, 4.0, 0.1),
    "moist-air": lambda: fs.moist_air(20.0, relative_humidity=0.5),
    "aluminium-gallium-arsenide": lambda: fs.aluminium_gallium_arsenide(0.3),
    "bruggeman": lambda: fs.bruggeman([fs.sellmeier([1.1], [0.01]), fs.drude(9.0, 0.05, 3.7)], [0.9, 0.1]),
    "maxwell-garnett": lambda: fs.maxwell_garnett(fs.sellmeier([1.1], [0.01]), fs.drude(9.0, 0.05, 3.7), 0.1),
    "lorentz-lorenz": lambda: fs.lorentz_lorenz([fs.sellmeier([1.1], [0.01]), fs.constant(1.0)], [0.9, 0.1]),
}


def _all_media():
    for name in MODELS:
        yield pytest.param(EXAMPLES[name], id=name)
    for key, entry in ENTRIES.items():
        yield pytest.param(lambda key=key, entry=entry: build_formula(key, entry), id=key)


MEDIA = list(_all_media())


def _wavelengths(material, count):
    low, high = material.range_nm
    if high == np.inf:
        low, high = max(low, 300.0), 3000.0
    return np.geomspace(low, high, count)


@pytest.mark.parametrize("make", MEDIA)
def test_index_is_physical_over_the_whole_range(make):
    # Passive media with exp(+i omega t): Im N <= 0 (Landau, Lifshitz, Electrodynamics of Continuous Media, 80).
    material = make()
    n = material.index(_wavelengths(material, 500))
    assert np.all(np.isfinite(n))
    assert np.all(n.real > 0.0)
    assert np.all(n.imag <= 0.0)


@pytest.mark.parametrize("make", MEDIA)
def test_shape_of_the_answer_is_that_of_the_question(make):
    material = make()
    wavelength = _wavelengths(material, 12)[1:-1][:6]
    grid = material.index(wavelength.reshape(2, 3))
    assert grid.shape == (2, 3)
    assert material.index(wavelength[0]).shape == ()
    np.testing.assert_array_equal(grid.ravel(), material.index(wavelength))
    assert material.index_derivatives(wavelength.reshape(2, 3), 2).shape == (3, 2, 3)


@pytest.mark.parametrize("make", MEDIA)
def test_derivatives_by_photon_energy(make):
    # Second reference: central differences of the lower derivative, steps of 1e-4 relative.
    material = make()
    energy = PLANCK_EV_NM / _wavelengths(material, 9)[1:-1]
    h = 1e-4 * energy

    def rows(e):
        return material.index_derivatives(PLANCK_EV_NM / e, 3)

    exact = rows(energy)
    np.testing.assert_allclose(exact[0], material.index(PLANCK_EV_NM / energy), rtol=1e-12)
    numeric = (8.0 * (rows(energy + h) - rows(energy - h)) - (rows(energy + 2 * h) - rows(energy - 2 * h))) / (12.0 * h)
    for order in (1, 2, 3):
        # An error of 1e-12 of the lower row (the Faddeeva function has 1e-13) over h bounds how well the two can agree.
        floor = 1e-12 * np.abs(exact[order - 1]) / h
        np.testing.assert_array_less(
            np.abs(exact[order] - numeric[order - 1]), 1e-6 * np.abs(exact[order]) + floor + 1e-300
        )


# Of a model made by hand only those that bring a range of their own.
RANGED = ["urbach-tail", "moist-air", "aluminium-gallium-arsenide"]


@pytest.mark.parametrize("key", [*ENTRIES, *RANGED])
def test_outside_the_range_is_refused(key):
    material = build_formula(key, ENTRIES[key]) if key in ENTRIES else EXAMPLES[key]()
    low, high = material.range_nm
    ends = [low * 0.999, high * 1.001] if high < np.inf else [low * 0.999]
    for wavelength in ends:
        with pytest.raises(fs.MaterialRangeError, match="expected a wavelength from"):
            material.index(wavelength)


@pytest.mark.parametrize("key", ENTRIES)
def test_check_points_of_the_formula_as_published(key):
    # check_points and published_points of materials/dispersion.toml; sources stand in each entry.
    entry = ENTRIES[key]
    material = build_formula(key, entry)
    as_printed = getattr(material, "published_index", material.index)
    assert entry["check_points"] or key == "air/moist-1996"
    for wavelength, n, k in entry["check_points"]:
        assert abs(as_printed(wavelength) - complex(n, -k)) <= 2e-6 * abs(complex(n, k))
    for wavelength, n, tolerance in entry["published_points"]:
        assert as_printed(wavelength).real == pytest.approx(n, abs=tolerance)


def test_relative_index_is_converted_to_vacuum():
    # I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965): 1.45846 at the helium d line, 587.562 nm in air of 20 C.
    # E. R. Peck, K. Reeder, J. Opt. Soc. Am. 62, 958 (1972): air n - 1 about 2.72e-4 at 20 C, so 587.722 nm in vacuum.
    silica = build_formula("SiO2/bulk-1965", ENTRIES["SiO2/bulk-1965"])
    air = float(np.real(standard_air(PLANCK_EV_NM / 587.722)))
    assert air - 1.0 == pytest.approx(2.72e-4, abs=1e-6)
    assert silica.index(587.562 * air).real / air == pytest.approx(1.45846, abs=5e-6)


@pytest.mark.parametrize("name", [name for name, model in MODELS.items() if model.kramers_kronig])
def test_kramers_kronig(name):
    # eps1(E) = eps_inf + (2/pi) P int x eps2(x) / (x^2 - E^2) dx (Kramers 1927, Kronig 1926); the difference of
    # two energies is free of the constant.
    material = EXAMPLES[name]()

    def permittivity(e):
        return complex(np.conj(material.index(PLANCK_EV_NM / e)) ** 2)

    def transform(e):
        def even(x):
            # The principal value is taken by subtracting the value at the pole, whose own integral is known.
            return (x * permittivity(x).imag - e * permittivity(e).imag) / (x * x - e * e)

        pieces = [1e-12, 1e-7, 1e-4, 0.02, 0.2, 1.0, 1.2, e, 2.5, 3.45, 5.0, 6.0, 9.0, 15.0, 60.0, 1e3, 1e5]
        pieces = sorted({x for x in pieces if x > 0})
        parts = [quad(even, a, b, limit=400, epsabs=1e-10, epsrel=1e-9)[0] for a, b in pairwise(pieces)]
        return 2.0 / np.pi * sum(parts)

    one, two = 1.7, 4.2
    found = transform(one) - transform(two)
    # The principal value of 1 / (x^2 - E^2) up to the last limit, for the constant taken out.
    for e, sign in ((one, 1.0), (two, -1.0)):
        top, c = 1e5, e * permittivity(e).imag
        found -= sign * 2.0 / np.pi * c / (2.0 * e) * np.log((top + e) / (top - e))
    assert found == pytest.approx(permittivity(one).real - permittivity(two).real, abs=2e-5)


@pytest.mark.parametrize("energy", [0.4, 1.19, 1.2, 1.21, 2.0, 3.45, 5.0, 9.0])
def test_tauc_lorentz_real_part_against_its_integral(energy):
    # G. E. Jellison, F. A. Modine, Appl. Phys. Lett. 69, 371 (1996): eps1 is the integral of eps2. mpmath, 30 digits.
    a, e0, c, eg, eps_inf = 122.0, 3.45, 2.54, 1.2, 1.15
    found = complex(fs.tauc_lorentz(a, e0, c, eg, eps_inf).index(PLANCK_EV_NM / energy)) ** 2
    with mp.workdps(30):

        def f(x):
            return a * e0 * c * (x - eg) ** 2 / ((x * x - e0 * e0) ** 2 + c * c * x * x)

        e = mp.mpf(energy)
        at_pole = f(e) if e > eg else mp.mpf(0)
        total = mp.quad(
            lambda x: (f(x) - at_pole) / (x * x - e * e), [eg, *([e] if e > eg else []), 6, 20, 400, mp.inf]
        )
        if e > eg:
            total += at_pole / (2 * e) * -mp.log((e - eg) / (e + eg)) if e != eg else 0
        true = eps_inf + 2 / mp.pi * total
    assert found.real == pytest.approx(float(true), abs=2e-9)


# P. E. Ciddor, Appl. Opt. 35, 1566 (1996), from an independent evaluator: nm, C, Pa, humidity, ppm, n.
MOIST_AIR = [
    (633.0, 15.0, 101325.0, 0.0, 450.0, 1.0002765302),
    (633.0, 20.0, 101325.0, 0.5, 450.0, 1.0002713727),
    (1550.0, 20.0, 80000.0, 0.3, 400.0, 1.0002117736),
]


@pytest.mark.parametrize(("wavelength", "celsius", "pressure", "humidity", "ppm", "n"), MOIST_AIR)
def test_moist_air(wavelength, celsius, pressure, humidity, ppm, n):
    air = fs.moist_air(celsius, pressure, humidity, ppm)
    assert air.index(wavelength).real == pytest.approx(n, abs=2e-10)
    assert fs.moist_air(5.0, pressure, humidity, ppm).index(wavelength, celsius).real == pytest.approx(n, abs=2e-10)


# Independent evaluator: S. Gehrsitz and others, J. Appl. Phys. 87, 7825 (2000), at 296.15 K; M. A. Afromowitz, Solid
# State Commun. 15, 59 (1974), coefficients from memory.
ALLOYS = [
    ("gehrsitz", 0.0, 1550.0, 3.376716),
    ("gehrsitz", 0.3, 980.0, 3.318283),
    ("gehrsitz", 0.3, 1550.0, 3.216771),
    ("gehrsitz", 0.9, 980.0, 2.998701),
    ("gehrsitz", 1.0, 980.0, 2.954121),
    ("afromowitz", 0.0, 1550.0, 3.376944),
    ("afromowitz", 0.3, 980.0, 3.332603),
    ("afromowitz", 0.3, 1550.0, 3.225045),
    ("afromowitz", 0.9, 980.0, 3.004122),
]


@pytest.mark.parametrize(("model", "x", "wavelength", "n"), ALLOYS)
def test_aluminium_gallium_arsenide(model, x, wavelength, n):
    assert fs.aluminium_gallium_arsenide(x, model=model).index(wavelength).real == pytest.approx(n, abs=2e-6)


def test_mixtures_reach_their_constituents():
    # Every mixing rule gives a constituent at fraction 1 (Bohren and Huffman, section 8.5; here from memory).
    glass, silver = fs.sellmeier([1.1], [0.01]), fs.drude(9.0, 0.05, 3.7)
    wavelength = np.array([400.0, 700.0, 1500.0])
    for share, same in ((0.0, glass), (1.0, silver)):
        for mixture in (
            fs.bruggeman([glass, silver], [1.0 - share, share]),
            fs.maxwell_garnett(glass, silver, share),
            fs.lorentz_lorenz([glass, silver], [1.0 - share, share]),
        ):
            np.testing.assert_allclose(mixture.index(wavelength), same.index(wavelength), rtol=1e-9)


@pytest.mark.parametrize("share", [0.05, 0.3, 0.33, 0.34, 0.6, 0.95])
def test_mixtures_lie_within_the_wiener_bounds(share):
    # O. Wiener, Abh. Saechs. Ges. Wiss. 32, 509 (1912): series and parallel layers bound every lossless mixture.
    a, b = 1.0, 2.3**2
    materials, fractions = [fs.constant(1.0), fs.constant(2.3)], [1.0 - share, share]
    for mixture in (fs.bruggeman(materials, fractions), fs.maxwell_garnett(*materials, share)):
        permittivity = mixture.index(500.0).real ** 2
        assert 1.0 / ((1.0 - share) / a + share / b) < permittivity < (1.0 - share) * a + share * b
    both = fs.bruggeman(materials, fractions).index(500.0)
    turned = fs.bruggeman(materials[::-1], fractions[::-1]).index(500.0)
    assert both == pytest.approx(turned, rel=1e-12)


def test_bruggeman_solves_its_equation_for_three_constituents():
    # D. A. G. Bruggeman, Ann. Phys. 416, 636 (1935).
    materials = [fs.constant(1.0), fs.constant(1.46), fs.constant(0.1, 3.0)]
    fractions = np.array([0.3, 0.5, 0.2])
    eps = complex(np.conj(fs.bruggeman(materials, fractions).index(500.0)) ** 2)
    own = np.array([complex(np.conj(m.index(500.0)) ** 2) for m in materials])
    assert abs(np.sum(fractions * (own - eps) / (own + 2 * eps))) < 1e-13
    assert eps.imag > 0.0


def test_temperature():
    # Fused silica dn/dT about 1.0e-5 / K (handbook value, from memory); germanium has none in this entry.
    silica = build_formula("SiO2/bulk-1965", ENTRIES["SiO2/bulk-1965"])
    assert (silica.index(633.0, 30.0) - silica.index(633.0, 20.0)).real == pytest.approx(1.0e-4, rel=1e-6)
    assert silica.thermal.expansion_per_k == pytest.approx(0.55e-6)
    with pytest.raises(fs.MaterialRangeError, match="expected a temperature from 0 to 60 deg C, got 400 deg C"):
        silica.index(633.0, 400.0)
    other = build_formula("Ge/crystal-2016", ENTRIES["Ge/crystal-2016"])
    with pytest.raises(fs.MaterialRangeError, match="The source gives no dn/dT"):
        other.index(10600.0, 30.0)


BAD_PARAMETERS = [
    (lambda: fs.sellmeier([1.0], [0.01, 0.02]), "expected lists of one length, a number a term: B has 1, C has 2"),
    (lambda: fs.sellmeier([1.0]), "sellmeier: expected either C_um2 or L_um, got both or neither"),
    (lambda: fs.cauchy(1.5, ["x"], [2.0]), "D: expected numbers, got ['x']"),
    (lambda: fs.cauchy(float("nan")), "A: expected finite numbers, got nan"),
    (lambda: fs.constant(-1.0), "n: expected a finite index >= 0, got -1"),
    (
        lambda: fs.constant(1.5, -0.1),
        "k: expected a finite extinction coefficient >= 0, got -0.1. Pass allow_gain=True for a medium with gain",
    ),
    (lambda: fs.moist_air(relative_humidity=50.0), "relative_humidity: expected 0 to 1, got 50"),
    (lambda: fs.aluminium_gallium_arsenide(1.2), "x: expected an aluminium fraction from 0 to 1, got 1.2"),
    (
        lambda: fs.bruggeman([fs.constant(1.0), fs.constant(2.0)], [0.5, 0.6]),
        "fractions: expected numbers >= 0 of sum 1, got [0.5, 0.6] of sum 1.1",
    ),
    (
        lambda: fs.forouhi_bloomer(0.5, 6.0, 5.0, 1.0, 2.0),
        "C_ev2: expected 4 C > B^2 in every term, so that the denominator has no real zero",
    ),
]


@pytest.mark.parametrize(("call", "message"), BAD_PARAMETERS)
def test_bad_parameters(call, message):
    with pytest.raises(fs.ArgumentError) as caught:
        call()
    assert str(caught.value) == message
