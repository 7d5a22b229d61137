"""`filmstack field` from a file to numbers."""

import csv
import json

import pytest

from filmstack.cli.main import main

DESIGN = """filmstack = 1
name = "bare glass"
reference_wavelength_nm = 550
incident = "air"
substrate = {n = 1.5}
[[layer]]
material = {n = 1.5}
thickness_nm = 100
"""


@pytest.fixture
def design(tmp_path):
    path = tmp_path / "bare.toml"
    path.write_text(DESIGN, encoding="utf-8")
    return str(path)


def test_field_behind_a_bare_surface(design, tmp_path, capsys):
    # |t|^2 = (2 / 2.5)^2 = 0.64 (Fresnel).
    table, picture = tmp_path / "t.csv", tmp_path / "f.svg"
    assert main(["field", design]) == 0
    text = capsys.readouterr().out
    assert "0.6400" in text
    assert "ISO 21254" in text
    assert main(["field", design, "--output", str(table), "--plot", str(picture)]) == 0
    assert f"wrote {table}" in capsys.readouterr().out
    rows = list(csv.DictReader(table.read_text(encoding="utf-8").splitlines()))
    assert {row["polarization"] for row in rows} == {"s", "p"}
    assert all(float(row["intensity"]) == pytest.approx(0.64) for row in rows if row["layer"] == "1")
    assert "<svg" in picture.read_text(encoding="utf-8")


def test_json_and_irradiance(design, capsys):
    # E = sqrt(2 Z0 I) = 2744.9 V/m for 1 W/cm^2; the largest field stands in front, |1 + r|^2 up to 1.2^2.
    assert main(["field", design, "--json", "--irradiance", "1"]) == 0
    case = json.loads(capsys.readouterr().out)["cases"][0]
    assert case["largest_volt_per_metre"] == pytest.approx(1.2 * 2744.92, rel=1e-3)


@pytest.mark.parametrize("text", ["-1", "abc", "1e999"])
def test_bad_irradiance(design, text, capsys):
    assert main(["field", design, f"--irradiance={text}"]) == 2
    message = f"--irradiance: expected a finite number >= 0 W/cm^2, got '{text}'"
    assert message in capsys.readouterr().err
