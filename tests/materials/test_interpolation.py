"""Curves through tables: against scipy, against a formula, and the group delay dispersion they give."""

from time import process_time

import numpy as np
import pytest
from scipy.interpolate import BSpline, PchipInterpolator, make_lsq_spline

import filmstack as fs
from filmstack.constants import HBAR_EV_FS, PLANCK_EV_NM, SPEED_OF_LIGHT_NM_PER_FS
from filmstack.materials.interpolation import MonotoneCurve, SplineCurve, fit_curve, monotone_curve, rough_share
from filmstack.materials.library import list_materials
from filmstack.materials.tables import Table

TABLES = [record.key for record in list_materials() if record.kind == "table"]


def group_delay_dispersion(material, thickness_nm, wavelength_nm):
    """Return d^2 (n omega d / c) / d omega^2 in fs^2, as n, n' and n'' by photon energy give it."""
    energy = PLANCK_EV_NM / np.asarray(wavelength_nm)
    _, first, second = material.index_derivatives(wavelength_nm, 2).real
    return HBAR_EV_FS * thickness_nm / SPEED_OF_LIGHT_NM_PER_FS * (2.0 * first + energy * second)


# 10 um of silica at 750 to 850 nm. The formula of bulk silica (I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965))
# gives 0.39 to 0.33 fs^2; 36 fs^2/mm at 800 nm is the usual figure (from memory).
# Interpolating the rows of either table by a quintic gives ripples of +-1 to +-6 fs^2.
@pytest.mark.parametrize(
    ("key", "low", "high"), [("SiO2/sputtered-2013", 0.37, 0.46), ("SiO2/ion-assisted-2013", 0.43, 0.53)]
)
def test_the_rounding_of_a_table_gives_no_false_dispersion(key, low, high):
    wavelength = np.linspace(750.0, 850.0, 401)
    found = group_delay_dispersion(fs.material(key), 10_000.0, wavelength)
    assert low <= found.min() <= found.max() <= high
    bulk = group_delay_dispersion(fs.material("fused silica"), 10_000.0, wavelength)
    assert bulk[200] == pytest.approx(0.36, abs=0.01)
    assert np.all(np.abs(found - bulk) < 0.16)


@pytest.mark.parametrize("degree", [3, 5])
@pytest.mark.parametrize("order", range(6))
def test_spline_equals_scipy(degree, order):
    rng = np.random.default_rng(7)
    inner = np.sort(rng.uniform(1.0, 4.0, 20))
    knots = np.concatenate([np.full(degree + 1, 1.0), inner, np.full(degree + 1, 4.0)])
    coefficients = rng.normal(size=len(knots) - degree - 1)
    x = np.concatenate([[1.0, 4.0], inner[3:5], rng.uniform(1.0, 4.0, 200)])
    theirs = BSpline(knots, coefficients, degree).derivative(order)(x) if order <= degree else np.zeros(len(x))
    ours = SplineCurve(knots, coefficients).derivative(x, order)
    np.testing.assert_allclose(ours, theirs, rtol=1e-9, atol=1e-9 * max(1.0, np.max(np.abs(theirs))))


@pytest.mark.parametrize("order", range(4))
@pytest.mark.parametrize("rows", [3, 4, 30])
def test_monotone_curve_equals_scipy(order, rows):
    rng = np.random.default_rng(rows)
    x = np.cumsum(rng.uniform(0.1, 1.0, rows))
    y = np.where(rng.random(rows) < 0.3, 0.0, rng.uniform(0.0, 2.0, rows))
    at = rng.uniform(x[0], x[-1], 500)
    theirs = PchipInterpolator(x, y).derivative(order)(at) if order else PchipInterpolator(x, y)(at)
    np.testing.assert_allclose(monotone_curve(x, y).derivative(at, order), theirs, rtol=1e-9, atol=1e-9)


def test_two_rows_make_a_straight_line():
    curve = fit_curve(np.array([1.0, 2.0]), np.array([1.5, 1.6]), np.full(2, 5e-3))
    np.testing.assert_allclose(curve.derivative(np.array([1.0, 1.25, 2.0]), 0), [1.5, 1.525, 1.6], rtol=1e-14)


@pytest.mark.parametrize("key", TABLES)
def test_every_table_stays_within_its_printed_digits(key):
    table = fs.material(key)
    index = table.index(table.wavelength_nm)
    assert np.all(np.abs(index.real - table.n) <= table.tolerance * (1.0 + 1e-9))
    np.testing.assert_allclose(-index.imag, table.k, rtol=1e-12, atol=1e-15)


@pytest.mark.parametrize("key", TABLES)
def test_between_rows_k_keeps_its_shape_and_zeros(key):
    table = fs.material(key)
    share = np.linspace(0.05, 0.95, 7)
    energy = (table.energy_ev[:-1, np.newaxis] + np.diff(table.energy_ev)[:, np.newaxis] * share).ravel()
    index = table.index(np.clip(PLANCK_EV_NM / energy, *table.range_nm))
    k = table.k[::-1]
    low, high = np.repeat(np.minimum(k[:-1], k[1:]), 7), np.repeat(np.maximum(k[:-1], k[1:]), 7)
    assert np.all(-index.imag >= low)
    assert np.all(-index.imag <= high)
    assert np.all(index.imag[high == 0.0] == 0.0)
    assert np.all(index.real > 0.0)


@pytest.mark.parametrize("key", TABLES)
def test_derivatives_are_those_of_the_index(key):
    table = fs.material(key)
    order = table.derivative_order
    # middle of the ten widest pieces: away from where the highest derivative is continuous only
    wide = np.argsort(np.diff(table.energy_ev))[-10:]
    energy = 0.5 * (table.energy_ev[wide] + table.energy_ev[wide + 1])
    step = 1e-4 * np.diff(table.energy_ev)[wide]
    rows = [table.index_derivatives(PLANCK_EV_NM / (energy + sign * step), order) for sign in (-1.0, 1.0)]
    middle = table.index_derivatives(PLANCK_EV_NM / energy, order)
    for j in range(order):
        difference = (rows[1][j] - rows[0][j]).real / (2.0 * step)
        scale = np.abs(middle[j + 1].real) + np.abs(middle[j].real) * 1e-11 / step + 1e-9
        assert np.all(np.abs(difference - middle[j + 1].real) <= 2e-2 * scale), (key, j)


def rounded_silica(decimals):
    """Return the formula of fused silica, and a table of it as a book would print it."""
    silica = fs.material("fused silica")
    wavelength = np.arange(300.0, 1501.0, 10.0)
    n = np.round(silica.index(wavelength).real, decimals)
    return silica, Table(silica.provenance, wavelength, n, np.zeros_like(n), np.full_like(n, 0.5 * 10.0**-decimals))


@pytest.mark.parametrize("decimals", [4, 5, 6])
def test_derivatives_of_a_rounded_table_agree_with_the_formula(decimals):
    silica, table = rounded_silica(decimals)
    wavelength = np.linspace(350.0, 1300.0, 60)
    for order in (0, 1, 2):
        truth = silica.index_derivatives(wavelength, order)[order].real
        found = table.index_derivatives(wavelength, order)[order].real
        allowed = 5.0 * table.derivative_uncertainty(order, wavelength)
        assert np.all(np.abs(found - truth) <= allowed + 2e-3 * np.abs(truth) * (order > 0))


def test_uncertainty_is_that_of_many_roundings():
    _, table = rounded_silica(4)
    x, curve = table.energy_ev, table.n_curve
    rng = np.random.default_rng(3)
    at = np.linspace(400.0, 1200.0, 9)
    energy = PLANCK_EV_NM / at
    smooth = curve.derivative(x, 0)
    for order in range(3):
        fits = [
            make_lsq_spline(x, smooth + rng.uniform(-5e-5, 5e-5, len(x)), curve.knots, curve.degree)(energy, nu=order)
            for _ in range(600)
        ]
        # a standard deviation of 600 samples is known to 3 per cent
        np.testing.assert_allclose(table.derivative_uncertainty(order, at), np.std(fits, axis=0), rtol=0.15)


def noisy_silica(rows, scatter, decimals):
    """Return a table of fused silica with scatter, as a measurement would give it."""
    silica = fs.material("fused silica")
    wavelength = np.linspace(300.0, 2000.0, rows)
    n = silica.index(wavelength).real + np.random.default_rng(5).normal(size=rows) * scatter
    return PLANCK_EV_NM / wavelength[::-1], np.round(n[::-1], decimals), np.full(rows, 0.5 * 10.0**-decimals)


def test_scatter_above_the_printed_digits_is_told_from_rounding():
    for rows in (300, 5000):
        for decimals in (3, 4, 5, 6):
            assert rough_share(*noisy_silica(rows, 0.0, decimals)) == 0.0
            assert rough_share(*noisy_silica(rows, 10.0 * 10.0**-decimals, decimals)) > 0.5


def test_many_scattered_rows_do_not_keep_a_person_waiting():
    rows = noisy_silica(5000, 1e-4, 6)
    start = process_time()
    curve = fit_curve(*rows, quick=True)
    assert process_time() - start < 1.0  # a smoothing spline of degree 5 or 3 takes minutes here
    assert isinstance(curve, MonotoneCurve)
    np.testing.assert_array_equal(curve.derivative(rows[0], 0), rows[1])


@pytest.mark.parametrize("decimals", [4, 6])
def test_many_smooth_rows_keep_their_derivatives(decimals):
    x, n, tolerance = noisy_silica(1000, 0.0, decimals)
    curve = fit_curve(x, n, tolerance, quick=True)
    assert curve.derivative_order == 4
    assert np.all(np.abs(curve.derivative(x, 0) - n) <= tolerance)


def test_sharp_features_are_not_overshot():
    x = np.linspace(1.0, 3.0, 21)
    curve = fit_curve(x, np.where(x < 2.05, 1.5, 3.0), np.full(21, 5e-6))
    assert isinstance(curve, MonotoneCurve)
    value = curve.derivative(np.linspace(1.0, 3.0, 1001), 0)
    assert value.min() == 1.5
    assert value.max() == 3.0
