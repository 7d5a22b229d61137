"""The shipped tables: headers, check points, fitted curves, and the standard tables.

Check points are values of the cited sources, kept in the header of each file apart from its rows.
"""

import re

import numpy as np
import pandas as pd
import pytest

import filmstack as fs
from filmstack.constants import PLANCK_EV_NM
from filmstack.materials.interpolation import SplineCurve
from filmstack.materials.library import DEFAULTS, list_materials
from filmstack.materials.shipped import shipped_folder
from filmstack.materials.tables import CURVES, read_header, shipped_table, table_path, text_hash

FILES = sorted(shipped_folder("materials").glob("*.csv"))
HEADER = [
    "key", "label", "material", "form", "temperature", "range_nm", "source", "licence", "status", "notes",
    "check_points",
]  # fmt: skip


def from_air(head, wavelength, index):
    """Return vacuum wavelength and absolute index of numbers measured in air at 20 C."""
    if "index_of" not in head:
        return wavelength, index
    # B. Edlen, Metrologia 2, 71 (1966), dry air at 15 C, from memory; scaled by the density to 20 C
    s = (1000.0 / wavelength) ** 2
    refractivity = 1e-8 * (8342.13 + 2406030.0 / (130.0 - s) + 15997.0 / (38.9 - s))
    air = 1.0 + refractivity * 288.15 / 293.15
    return wavelength * air, index * air


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_header_is_whole_and_true(path):
    head = read_header(path)
    assert [key for key in head if key != "index_of"] == HEADER
    assert head.get("index_of", "relative to air") == "relative to air"
    assert all(head[key] for key in HEADER if key != "notes")
    assert table_path(head["key"]) == path
    frame = pd.read_csv(path, comment="#")
    assert list(frame) == ["wavelength_nm", "n", "k"]
    assert np.all(np.diff(frame.wavelength_nm) > 0.0)
    assert frame.notna().all(axis=None)
    assert np.all(frame.n > 0.0)
    assert np.all(frame.k >= 0.0)
    table = fs.material(head["key"])
    assert table.range_nm == (table.wavelength_nm[0], table.wavelength_nm[-1])
    assert table.label == head["label"]
    wavelength, n = from_air(head, frame.wavelength_nm.to_numpy(), frame.n.to_numpy())
    same = 1e-7 if "index_of" in head else 0.0
    np.testing.assert_allclose(table.wavelength_nm, wavelength, rtol=same)
    np.testing.assert_allclose(table.n, n, rtol=same)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_check_points_are_met(path):
    head = read_header(path)
    table = fs.material(head["key"])
    points = re.findall(r"(\S+) nm n=(\S+) k=([^\s;]+)", head["check_points"])
    assert len(points) >= 2
    for point in points:
        printed = tuple(map(float, point))
        wavelength, n = from_air(head, *printed[:2])
        _, k = from_air(head, printed[0], printed[2])
        # wavelengths and values are printed with six significant digits
        near = np.clip(wavelength * np.array([1.0 - 5e-6, 1.0, 1.0 + 5e-6]), *table.range_nm)
        index = table.index(near)
        row = np.argmin(np.abs(table.wavelength_nm - wavelength))
        assert abs(table.wavelength_nm[row] - wavelength) <= 5e-6 * wavelength
        assert index[1].real == pytest.approx(n, abs=table.tolerance[row] + 5e-6 * n + np.ptp(index.real))
        assert -index[1].imag == pytest.approx(k, abs=5e-6 * k + np.ptp(index.imag) + 1e-15)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_fitted_curve_is_of_this_table(path):
    """If this fails: python -m filmstack.materials.fit_tables."""
    curves = np.load(shipped_folder("materials") / CURVES)
    assert str(curves[f"{path.stem}.hash"]) == text_hash(path.read_text(encoding="utf-8"))


def test_no_curve_is_left_over_and_the_file_is_small():
    path = shipped_folder("materials") / CURVES
    assert {name.rsplit(".", 1)[0] for name in np.load(path).files} == {path.stem for path in FILES}
    assert path.stat().st_size < 1_400_000


@pytest.mark.parametrize(
    "key", ["SiO2/ion-assisted-2013", "Ag/evaporated-1972", "Ag/template-stripped-2015", "Si/crystal-2008"]
)
def test_a_fit_of_today_is_the_stored_one(key):
    stored, fitted = shipped_table(key).n_curve, shipped_table(key, fitted=False).n_curve
    assert type(stored) is type(fitted)
    if isinstance(stored, SplineCurve):
        assert stored.degree == fitted.degree
        x = shipped_table(key).energy_ev
        np.testing.assert_allclose(stored.derivative(x, 0), fitted.derivative(x, 0), rtol=1e-7)


def test_a_stale_curve_is_not_used(tmp_path, monkeypatch):
    from filmstack.materials import tables

    text = table_path("SiO2/ion-assisted-2013").read_text(encoding="utf-8").replace("1.523846", "1.523946")
    (tmp_path / "SiO2_ion-assisted-2013.csv").write_text(text, encoding="utf-8")
    (tmp_path / CURVES).write_bytes((shipped_folder("materials") / CURVES).read_bytes())
    monkeypatch.setattr(tables, "shipped_folder", lambda name: tmp_path)
    table = shipped_table("SiO2/ion-assisted-2013")
    assert table.index(252.0).real == pytest.approx(1.523946, abs=5e-7)


GLASSES = ["crown-517642", "flint-620364", "dense-flint-785258"]


@pytest.mark.parametrize("glass", GLASSES)
def test_glass_tables_agree_with_their_formulas(glass):
    table, formula = fs.material(f"glass/{glass}-with-absorption"), fs.material(f"glass/{glass}")
    wavelength = np.linspace(table.range_nm[0], formula.range_nm[1], 2000)
    difference = table.index(wavelength).real - formula.index(wavelength).real
    # the rows are right to 5e-7; the source chose them so that straight lines between them keep within 1e-5
    assert np.max(np.abs(difference)) < 2e-6


# Catalogue indices are relative to air: n_d and V_d as the source of each table states them.
@pytest.mark.parametrize(
    ("glass", "n_d", "v_d"), list(zip(GLASSES, (1.5168, 1.6200, 1.7847), (64.17, 36.37, 25.76), strict=True))
)
def test_glass_tables_have_the_catalogue_index_in_air(glass, n_d, v_d):
    lines = np.array([587.562, 486.133, 656.272])
    wavelength, air = from_air({"index_of": "relative to air"}, lines, np.ones(3))
    d, f, c = fs.material(f"glass/{glass}-with-absorption").index(wavelength).real / air
    assert d == pytest.approx(n_d, abs=5e-5)
    # n is right to 5e-7, so that V is right to 1e-6 V / (n_F - n_C) at the worst
    assert (d - 1.0) / (f - c) == pytest.approx(v_d, abs=0.005 + 1e-6 * v_d / (f - c))


@pytest.mark.parametrize("glass", GLASSES)
def test_dispersion_of_glass_tables_agrees_with_the_formulas(glass):
    wavelength = np.linspace(450.0, 2000.0, 400)
    energy = PLANCK_EV_NM / wavelength
    found, truth = (
        2.0 * first + energy * second  # d^2 (E n) / dE^2
        for _, first, second in (
            fs.material(key).index_derivatives(wavelength, 2).real
            for key in (f"glass/{glass}-with-absorption", f"glass/{glass}")
        )
    )
    assert np.max(np.abs(found - truth)) < 6e-3 * np.max(np.abs(truth))


def test_outside_the_range_is_an_error_that_names_it():
    with pytest.raises(fs.MaterialRangeError) as caught:
        fs.material("Ag/evaporated-1972").index([500.0, 2000.0])
    assert str(caught.value) == (
        "Ag, evaporated film (Johnson 1972): expected a wavelength from 187.9 to 1937 nm, got 2000 nm. "
        "Narrow the wavelengths or choose another source of this material"
    )


def test_the_ends_of_the_range_are_inside():
    for record in list_materials():
        if record.kind == "table":
            assert np.all(np.isfinite(fs.material(record.key).index(record.range_nm)))


def test_too_high_a_derivative_is_refused():
    table = fs.material("Ag/template-stripped-2015")
    assert table.derivative_order == 2
    with pytest.raises(fs.ArgumentError) as caught:
        table.index_derivatives(500.0, 3)
    assert str(caught.value) == (
        "order: Ag, template-stripped film, low loss (McPeak 2015): expected 0 to 2 derivatives, got 3"
    )


def test_uncertainty_of_every_default_is_finite():
    for key in set(DEFAULTS.values()):
        table = fs.material(key)
        if hasattr(table, "derivative_uncertainty"):
            for order in range(min(table.derivative_order, 2) + 1):
                assert np.all(np.isfinite(table.derivative_uncertainty(order, np.mean(table.range_nm))))


def standard(name):
    return pd.read_csv(shipped_folder("materials") / "standards" / f"{name}.csv", comment="#")


# CIE 15:2018, sums of the colour-matching functions at 5 nm, 360 to 830 nm
@pytest.mark.parametrize(
    ("name", "sums"),
    [("cie1931_2deg", (21.371524, 21.371327, 21.371540)), ("cie1964_10deg", (23.329353, 23.332036, 23.334153))],
)
def test_observers_have_the_published_sums(name, sums):
    frame = standard(name)
    # the standard sums 380 to 780 nm of its seven-figure table (from memory): equal to 1e-4 of the sum
    np.testing.assert_allclose(frame[["xbar", "ybar", "zbar"]].sum(), sums, rtol=4e-4)


# CIE 15:2018 chromaticities of the illuminants with the 1931 observer
@pytest.mark.parametrize(
    ("name", "x", "y"),
    [("A", 0.44758, 0.40745), ("C", 0.31006, 0.31616), ("D50", 0.34567, 0.35851), ("D65", 0.31272, 0.32903)],
)
def test_illuminants_have_the_published_chromaticities(name, x, y):
    light, observer = standard(f"illuminant_{name}"), standard("cie1931_2deg")
    both = observer.merge(light, on="wavelength_nm")
    sums = np.array([(both[c] * both.relative_power).sum() for c in ("xbar", "ybar", "zbar")])
    assert sums[0] / sums.sum() == pytest.approx(x, abs=5e-5)
    assert sums[1] / sums.sum() == pytest.approx(y, abs=5e-5)


def test_solar_spectrum_has_the_published_integral():
    # ASTM G173-03: the global irradiance of the table integrates to 1000.4 W/m2, the direct one to 900.1 W/m2
    sun = standard("solar_am15_astm_g173")
    assert np.trapezoid(sun["global"], sun.wavelength_nm) == pytest.approx(1000.4, abs=0.05)
    assert np.trapezoid(sun["direct"], sun.wavelength_nm) == pytest.approx(900.1, abs=0.05)
