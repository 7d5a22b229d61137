"""`filmstack spectrum` from files to numbers: values, headings, files, pictures."""

import csv
import json
import math

import numpy as np
import pytest

import filmstack as fs
from filmstack.cli.main import main

# A plate of n = 1.5 with a quarter wave of n = sqrt(1.5) on its back, that reflects nothing at 600 nm; the front
# film has the index of the plate. R of a bare face: ((1.5 - 1) / (1.5 + 1))^2 = 0.04; of both: 2 R / (1 + R).
# (H. A. Macleod, Thin-Film Optical Filters, chapter 2: antireflection condition and incoherent plate; from memory.)
FACE = 0.04
BOTH_FACES = 2 * FACE / (1 + FACE)

PLATE = """\
filmstack = 1
name = "plate"
reference_wavelength_nm = 600
incident_angle_deg = 0
incident = "air"
substrate = "glass15"
substrate_thickness_mm = 2.0
exit = "air"

[[layer]]
material = "glass15"
thickness_nm = 80.0

[[back_layer]]
material = "root15"
quarter_waves = 1.0
"""

SURFACE = """\
filmstack = 1
name = "surface"
reference_wavelength_nm = 600
incident_angle_deg = [0, 45]
incident = "air"
substrate = "glass15"

[[layer]]
material = "root15"
thickness_nm = 0.0
"""


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "plate.toml").write_text(PLATE)
    (tmp_path / "surface.toml").write_text(SURFACE)
    (tmp_path / "materials").mkdir()
    for name, n in (("glass15", 1.5), ("root15", math.sqrt(1.5))):
        rows = "".join(f"{wavelength},{n:.15f},0\n" for wavelength in range(300, 1301, 100))
        (tmp_path / "materials" / f"{name}.csv").write_text(f"wavelength_nm,n,k\n{rows}")
    return tmp_path


def spectrum(line):
    return main(["spectrum", *line.split()])


def json_of(capsys, line):
    assert spectrum(f"{line} --json") == 0
    return json.loads(capsys.readouterr().out)["designs"]


@pytest.mark.parametrize(
    ("words", "reflectance", "into"),
    [
        ("", FACE, "through the part, into air"),
        ("--back-face coated", FACE, "through the part, into air"),
        ("--back-face bare", BOTH_FACES, "through the part, into air"),
        ("--back-face ideal", FACE, "(no exit face)"),
        ("--side back", FACE, "through the part, into air"),
        ("--side back --back-face bare", BOTH_FACES, "through the part, into air"),
        ("--side back --back-face ideal", FACE, "into air (no exit face)"),
    ],
)
def test_faces_and_sides(words, reflectance, into, folder, capsys):
    (part,) = json_of(capsys, f"plate.toml --wavelength 600 {words}")
    assert part["R"] == [[pytest.approx(reflectance, rel=1e-9)]]
    assert part["T"] == [[pytest.approx(1.0 - reflectance, rel=1e-9)]]
    assert part["A"] == [[0.0]]
    assert part["transmittance_into"].endswith(into)


def test_csv_holds_every_digit(folder, capsys):
    assert spectrum("plate.toml surface.toml --wavelength 500:700:100 --angle 0,60 --output all.csv") == 0
    with open("all.csv", newline="", encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    names = [quantity + ending for quantity in "RTA" for ending in ("_s", "_p", "")]
    assert list(rows[0]) == ["design", "wavelength_nm", "angle_deg", *names, "transmittance_into"]
    assert len(rows) == 2 * 2 * 3
    for number, name in enumerate(("plate", "surface")):
        direct = fs.spectrum(fs.load_design(f"{name}.toml").stack, [500, 600, 700], [0, 60])
        mine = rows[6 * number : 6 * number + 6]
        assert {row["design"] for row in mine} == {name}
        assert [float(row["angle_deg"]) for row in mine] == [0, 0, 0, 60, 60, 60]
        for column in names:
            np.testing.assert_array_equal([float(row[column]) for row in mine], getattr(direct, column).ravel())


def test_json_file_is_what_json_prints(folder, capsys):
    (printed,) = json_of(capsys, "surface.toml --wavelength 1:2:0.5eV --polarization p --scale od --output all.json")
    assert json.loads((folder / "all.json").read_text())["designs"] == [printed]
    assert set(printed) == {
        *("design", "file", "transmittance_into", "wavelength_nm", "angle_deg", "materials", "notes"),
        *("R_p", "T_p", "A_p", "log10_T_p"),
    }
    assert printed["angle_deg"] == [0.0, 45.0]
    assert printed["materials"][0]["key"] == "air"


def test_no_light_is_null_in_json(folder, capsys):
    line = "surface.toml --side back --wavelength 600 --angle 60 --scale od --polarization s"
    (part,) = json_of(capsys, line)
    assert part["R_s"] == [[1.0]]  # total reflection inside glass, beyond 41.8 degrees
    assert part["T_s"] == [[0.0]]
    assert part["log10_T_s"] == [[None]]


def test_the_page_for_people(folder, capsys):
    assert spectrum("surface.toml --wavelength 500,600 --angle 0,45") == 0
    told = capsys.readouterr().out
    # Fresnel's equations at 45 degrees on n = 1.5: R_s = 9.2013 %, R_p = R_s^2 = 0.8466 % (Born and Wolf, 1.5.3:
    # at 45 degrees R_p = R_s^2).
    assert "angle of incidence 0 deg, s and p alike\n" in told
    assert "angle of incidence 45 deg\n" in told
    lines = told.splitlines()
    assert "wavelength  R mean   T mean  A mean" in lines
    assert "       600  4.0000  96.0000  0.0000" in lines
    assert "       600  9.2013  0.8466  5.0240  90.7987  99.1534  94.9760  0.0000  0.0000  0.0000" in lines
    assert lines[0] == "surface (surface.toml)"
    assert lines[1].startswith("T is into ")
    assert lines[1].endswith("(no exit face)")
    assert lines[2] == "light from the front, through air"
    assert any("glass15" in line and "300 to 1300 nm" in line for line in lines[lines.index("materials") :])


def test_optical_density_on_the_page(folder, capsys):
    assert spectrum("surface.toml --wavelength 600 --angle 0 --scale od") == 0
    assert f"       600  4.0000  {-math.log10(0.96):.4f}  0.0000" in capsys.readouterr().out.splitlines()


def test_a_long_table_is_thinned_and_says_so(folder, capsys):
    assert spectrum("surface.toml --wavelength 400:700:1 --angle 0:80:5") == 0
    told = capsys.readouterr().out
    assert (
        "Shown: every 10th of 301 wavelengths and every 3rd of 17 angles; mean, lowest and highest are of all." in told
    )
    assert "\n       405 " not in told
    assert "\n       410 " in told


def test_default_wavelengths_are_told_and_stay_inside_the_data(folder, capsys):
    text = SURFACE.replace("reference_wavelength_nm = 600", "reference_wavelength_nm = 1000")
    (folder / "surface.toml").write_text(text)
    (part,) = json_of(capsys, "surface.toml")
    assert part["wavelength_nm"][0] == 700.0
    assert part["wavelength_nm"][-1] == 1300.0
    assert part["notes"][0].startswith(
        "wavelengths: 700 to 1300 nm in steps of 2 nm, that is 0.7 to 1.5 times the reference wavelength, "
        "cut to the data of "
    )


@pytest.mark.parametrize(
    ("words", "file", "begin"),
    [
        ("surface.toml --wavelength 400:700:10", "a.png", b"\x89PNG"),
        ("surface.toml --view angle", "a.svg", b"<?xml"),
        ("surface.toml --view map --wavelength 400:700:50", "a.pdf", b"%PDF"),
        ("surface.toml plate.toml --wavelength 400:700:50 --polarization mean --scale od", "a.PNG", b"\x89PNG"),
        ("surface.toml --wavelength 600 --angle 0:80:10", "a.png", b"\x89PNG"),
    ],
)
def test_pictures(words, file, begin, folder, capsys):
    assert spectrum(f"{words} --plot {file}") == 0
    assert capsys.readouterr().out.endswith(f"\nwrote {file}\n")
    assert (folder / file).read_bytes().startswith(begin)


def test_same_names_are_told_apart_by_file(folder, capsys):
    (folder / "other.toml").write_text(SURFACE)
    parts = json_of(capsys, "surface.toml other.toml --wavelength 600")
    assert [part["design"] for part in parts] == ["surface.toml", "other.toml"]


def test_a_bare_back_face_needs_a_plate(folder, capsys):
    assert spectrum("surface.toml --back-face bare") == 2
    assert capsys.readouterr().err == (
        "filmstack: --back-face bare: expected a substrate with a back face, but that of surface.toml is "
        "semi-infinite. Give substrate_thickness_mm in the design\n"
    )


def test_nothing_is_written_when_something_is_wrong(folder, capsys):
    before = sorted(folder.rglob("*"))
    assert spectrum("surface.toml --wavelength 200:400:50 --output a.csv --plot a.png") == 2
    error = capsys.readouterr().err
    assert error.startswith("filmstack: surface.toml: ")
    assert "expected a wavelength from 300 to 1300 nm, got 200 nm" in error
    assert spectrum("surface.toml --view map --angle 0 --output a.csv --plot a.png") == 2
    assert sorted(folder.rglob("*")) == before


def test_faults_of_all_files_are_told_at_once(folder, capsys):
    (folder / "bad.toml").write_text(SURFACE.replace("thickness_nm = 0.0", "thickness_nm = -1"))
    assert spectrum("missing.toml surface.toml bad.toml") == 2
    lines = capsys.readouterr().err.splitlines()
    assert lines[0] == "filmstack:"
    assert lines[1].startswith("  missing.toml: ")
    assert lines[2].startswith("  bad.toml: ")
    assert len(lines) == 3
