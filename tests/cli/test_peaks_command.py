"""`filmstack peaks` from a file to numbers."""

import csv
import json
import math

import pytest

from filmstack.cli.main import main

DESIGN = """filmstack = 1
name = "plate"
reference_wavelength_nm = 550
incident_angle_deg = [0]
incident = {n = 1}
substrate = {n = 1}
[[layer]]
material = {n = 4}
thickness_nm = 1000
"""


@pytest.fixture
def design(tmp_path):
    path = tmp_path / "plate.toml"
    path.write_text(DESIGN, encoding="utf-8")
    return path


def test_peaks_of_a_plate(design, tmp_path, capsys):
    # Full transmission where 2 n d = 8000 nm is a multiple of the wavelength; F = 4 R / (1 - R)^2 with R = 0.36, and
    # the exact full width of an Airy function, 4 asin((1 - R) / (2 sqrt R)) in phase of 2 pi a peak
    # (Born and Wolf, Principles of Optics, section 7.6; Ismail et al., Opt. Express 24, 16366 (2016)).
    table, picture = tmp_path / "t.csv", tmp_path / "p.png"
    words = ["peaks", str(design), "--wavelength", "510,690", "--output", str(table), "--plot", str(picture)]
    assert main(words) == 0
    text = capsys.readouterr().out
    assert "4 peaks, none missed; 4 resonances narrower than the band" in text
    rows = list(csv.DictReader(table.read_text(encoding="utf-8").splitlines()))
    assert [float(row["wavelength_nm"]) for row in rows] == pytest.approx(
        [8000 / m for m in (15, 14, 13, 12)], rel=1e-14
    )
    assert [row["one_sided"] for row in rows] == ["True", "False", "False", "True"]
    assert float(rows[1]["finesse"]) == pytest.approx(math.pi / (2.0 * math.asin(0.64 / 1.2)), rel=1e-12)
    assert picture.stat().st_size > 10_000


def test_json_and_polarizations(design, capsys):
    assert main(["peaks", str(design), "--wavelength", "510,690", "--angle", "0,50", "--json"]) == 0
    cases = json.loads(capsys.readouterr().out)["cases"]
    assert [(case["angle_deg"], case["polarization"]) for case in cases] == [
        (0, "s"),
        (50, "s"),
        (50, "p"),
        (50, "mean"),
    ]
    assert all(case["complete"] for case in cases)


def test_a_band_has_two_ends(design, capsys):
    assert main(["peaks", str(design), "--wavelength", "550"]) == 2
    assert "--wavelength: expected the two ends of a band, got 550 nm alone" in capsys.readouterr().err
