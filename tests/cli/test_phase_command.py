"""`filmstack phase` from a file to numbers."""

import csv
import json

import pytest

from filmstack.cli.main import main

DESIGN = """filmstack = 1
name = "spacer"
reference_wavelength_nm = 800
incident = {n = 1.5}
substrate = {n = 1.5}
[[layer]]
material = {n = 1.5}
thickness_nm = 10000
"""


@pytest.fixture
def design(tmp_path):
    path = tmp_path / "spacer.toml"
    path.write_text(DESIGN, encoding="utf-8")
    return path


def test_delay_of_a_spacer(design, tmp_path, capsys):
    # n d / c = 1.5 x 10 um / 299.792458 nm/fs = 50.0346 fs.
    table, picture = tmp_path / "t.csv", tmp_path / "p.png"
    words = [
        "phase",
        str(design),
        "--wavelength",
        "790:810:10",
        "--of",
        "t",
        "--output",
        str(table),
        "--plot",
        str(picture),
    ]
    assert main(words) == 0
    text = capsys.readouterr().out
    assert "transmitted light, from the first to the last interface" in text
    assert f"wrote {picture}" in text
    assert main(["phase", str(design), "--wavelength", "790:810:10", "--of", "t"]) == 0
    assert "50.0346" in capsys.readouterr().out
    rows = list(csv.DictReader(table.read_text(encoding="utf-8").splitlines()))
    assert len(rows) == 3
    assert float(rows[1]["t_gd_fs_s"]) == pytest.approx(1.5 * 1e4 / 299.792458, rel=1e-12)
    assert picture.stat().st_size > 10_000


def test_json_holds_columns_and_notes(design, capsys):
    assert main(["phase", str(design), "--wavelength", "800", "--json", "--of", "t"]) == 0
    record = json.loads(capsys.readouterr().out)
    assert record["design"] == "spacer"
    assert record["t_gdd_fs2_p"] == [pytest.approx(0.0, abs=1e-9)]


def test_grazing_light_is_refused(design, capsys):
    assert main(["phase", str(design), "--wavelength", "800", "--angle", "90"]) == 2
    assert "angle_deg: expected angles below 90 deg, where t has a phase, got 90 deg" in capsys.readouterr().err
