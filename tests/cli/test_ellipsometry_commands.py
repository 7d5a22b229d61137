"""`filmstack ellipsometry` and `filmstack admittance` from a file to numbers."""

import csv
import json

import pytest

from filmstack.cli.main import main

DESIGN = """filmstack = 1
name = "one quarter wave"
reference_wavelength_nm = 550
incident = "air"
substrate = {n = 1.52}
[[layer]]
material = {n = 1.38}
quarter_waves = 1
"""


@pytest.fixture
def design(tmp_path):
    path = tmp_path / "one.toml"
    path.write_text(DESIGN, encoding="utf-8")
    return str(path)


def test_admittance_of_a_quarter_wave(design, tmp_path, capsys):
    # n1^2 / ns = 1.38^2 / 1.52 = 1.2529, R = 1.2601 % (Macleod).
    picture = tmp_path / "a.png"
    assert main(["admittance", design, "--plot", str(picture)]) == 0
    text = capsys.readouterr().out
    assert "1.2529" in text
    assert "1.2601" in text
    assert picture.stat().st_size > 10_000
    assert main(["admittance", design, "--json"]) == 0
    record = json.loads(capsys.readouterr().out)
    assert record["admittance_real"][-1] == pytest.approx(1.38**2 / 1.52)
    assert main(["admittance", design, "--wavelength", "500,600"]) == 2
    assert "--wavelength: expected one value, got 2. A locus is drawn at one" in capsys.readouterr().err


def test_psi_and_delta(design, tmp_path, capsys):
    table, picture = tmp_path / "e.csv", tmp_path / "e.svg"
    words = ["ellipsometry", design, "--wavelength", "550", "--angle", "0,60", "--output", str(table)]
    assert main([*words, "--plot", str(picture)]) == 0
    assert f"wrote {table}" in capsys.readouterr().out
    assert main(words[:-2]) == 0
    assert "180.0000" in capsys.readouterr().out  # at normal incidence, by convention
    rows = list(csv.DictReader(table.read_text(encoding="utf-8").splitlines()))
    assert float(rows[0]["psi_deg"]) == pytest.approx(45.0)
    assert picture.exists()
