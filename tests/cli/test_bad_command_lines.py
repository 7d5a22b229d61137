"""Wrong words on the command line: the whole message, exit status 2, nothing on standard output."""

from pathlib import Path

import pytest

from filmstack.cli.main import COMMANDS, main

DESIGNS = Path(__file__).parents[2] / "designs"
FORMS = "expected START:STOP:STEP, a list such as 450,550,650 or a file"
ANGLES = "expected angles in degrees such as 45, 0,30,45 or 0:60:15"
HELP = "See filmstack spectrum --help"

BAD_LINES = [
    ("spectum a.toml", "unknown command 'spectum'. Did you mean spectrum?"),
    ("design a.toml", f"unknown command 'design'. The commands are {', '.join(COMMANDS)}"),
    ("--versoin", "unknown option --versoin. Did you mean --version?"),
    ("-x", "unknown option -x. See filmstack --help"),
    ("spectrum", f"spectrum: expected DESIGN, got none. {HELP}"),
    ("spectrum a.toml --wavelenght 550", "spectrum: unknown option --wavelenght. Did you mean --wavelength?"),
    ("spectrum a.toml --wave 550", "spectrum: unknown option --wave. Did you mean --wavelength?"),
    ("spectrum a.toml --angel=45", "spectrum: unknown option --angel. Did you mean --angle?"),
    ("spectrum a.toml --zzz", f"spectrum: unknown option --zzz. {HELP}"),
    ("spectrum a.toml --wavelength", f"--wavelength: expected one value, got none. {HELP}"),
    ("spectrum a.toml --json=yes", f"--json: ignored explicit argument 'yes'. {HELP}"),
    ("spectrum a.toml --wavelength green", f"--wavelength: {FORMS}, got 'green'. There is no file of that name"),
    ("spectrum a.toml --wavelength 400:700", f"--wavelength: {FORMS}, got '400:700'"),
    ("spectrum a.toml --wavelength 400:700:1:2", f"--wavelength: {FORMS}, got '400:700:1:2'"),
    ("spectrum a.toml --wavelength 400,,500", f"--wavelength: {FORMS}, got '400,,500'"),
    ("spectrum a.toml --wavelength 400,500mm", f"--wavelength: {FORMS}, got '400,500mm'"),
    ("spectrum a.toml --wavelength 400:700:0", "--wavelength: expected a STEP other than 0, got '400:700:0'"),
    (
        "spectrum a.toml --wavelength 700:400:5",
        "--wavelength: expected a STEP that leads from START to STOP, got '700:400:5'. Write 700:400:-5 or 400:700:5",
    ),
    (
        "spectrum a.toml --wavelength 0.4um,550",
        "--wavelength: expected one unit, got '0.4um,550'. Write the unit once, at the end",
    ),
    ("spectrum a.toml --wavelength 0,550", "--wavelength: expected a value > 0 nm, got 0 nm"),
    ("spectrum a.toml --wavelength=-1:1:1eV", "--wavelength: expected a value > 0 eV, got -1 eV"),
    (
        "spectrum a.toml --wavelength 400:700:0.0001",
        "--wavelength: expected at most 1,000,000 values, got 3,000,001. Take a wider STEP",
    ),
    ("spectrum a.toml --angle steep", f"--angle: {ANGLES}, got 'steep'"),
    ("spectrum a.toml --angle 0;45", f"--angle: {ANGLES}, got '0;45'"),
    ("spectrum a.toml --angle 0,95", "--angle: expected an angle of incidence from 0 to 90 degrees, got 95 degrees"),
    ("spectrum a.toml --angle=-5", "--angle: expected an angle of incidence from 0 to 90 degrees, got -5 degrees"),
    ("spectrum a.toml --angle 45nm", f"--angle: {ANGLES}, got '45nm'. Leave out nm"),
    ("spectrum a.toml --polarization TE", "--polarization: expected s, p, mean or all, got 'TE'"),
    (
        "spectrum a.toml --polarization means",
        "--polarization: expected s, p, mean or all, got 'means'. Did you mean mean?",
    ),
    ("spectrum a.toml --side rear", "--side: expected front or back, got 'rear'"),
    (
        "spectrum a.toml --back-face uncoated",
        "--back-face: expected coated, bare or ideal, got 'uncoated'. Did you mean coated?",
    ),
    ("spectrum a.toml --scale dB", "--scale: expected percent or od, got 'dB'"),
    (
        "spectrum a.toml --view maps --plot a.png",
        "--view: expected wavelength, angle or map, got 'maps'. Did you mean map?",
    ),
    ("spectrum a.toml --view map", "--view: expected together with --plot FILE. Name the picture to draw"),
    ("spectrum a.toml --output a.xlsx", "--output: expected a file name ending in .csv or .json, got 'a.xlsx'"),
    ("spectrum a.toml --plot a.jpg", "--plot: expected a file name ending in .png, .svg or .pdf, got 'a.jpg'"),
    (
        "spectrum a.toml --plot results/a.png",
        "--plot: expected a file in an existing folder, got 'results/a.png'. Make the folder results first",
    ),
    ("spectrum a.toml --output folder.csv", "--output: expected the name of a file, got the folder 'folder.csv'"),
]


@pytest.mark.parametrize(("line", "message"), BAD_LINES, ids=[line for line, _ in BAD_LINES])
def test_a_wrong_command_line_has_one_clear_message(line, message, capsys, monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "folder.csv").mkdir()
    assert main(line.split()) == 2
    printed = capsys.readouterr()
    assert printed.err == f"filmstack: {message}\n"
    assert printed.out == ""
    assert [path.name for path in tmp_path.iterdir()] == ["folder.csv"]


BAD_FILES = [
    (b"", "--wavelength: w.csv: expected one wavelength a line, got none"),
    (b"# nothing yet\n", "--wavelength: w.csv: expected one wavelength a line, got none"),
    (b"550\ngreen\n", "w.csv: line 2: expected a number of nm, got 'green'"),
    (b"550\n-3\n", "w.csv: line 2: expected a value > 0 nm, got -3 nm"),
    (
        b"lambda,n\n550,1.5\n",
        "w.csv: line 1: expected a column wavelength_nm or wavelength_um or energy_ev or wavenumber_per_cm, "
        "got 'lambda,n'",
    ),
    (b"n,energy_ev\n1.5,2.1\n1.5\n", "w.csv: line 3: expected a number of eV, got '1.5'"),
    (b"\xff\xfe5\x005\x000\x00", "--wavelength: w.csv: expected a text file in UTF-8. Save it as UTF-8"),
]


@pytest.mark.parametrize(("content", "message"), BAD_FILES)
def test_a_wrong_file_of_wavelengths_is_told_by_line(content, message, capsys, monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "w.csv").write_bytes(content)
    assert main(["spectrum", "a.toml", "--wavelength", "w.csv"]) == 2
    assert capsys.readouterr().err == f"filmstack: {message}\n"


@pytest.mark.parametrize("command", ["spectrum", "peaks", "phase", "field", "ellipsometry", "admittance"])
def test_a_wavelength_outside_a_source_is_told_with_the_file(command, capsys):
    band = "150:160:10" if command == "peaks" else "150"
    path = str(DESIGNS / "window-antireflection.toml")
    assert main([command, path, "--wavelength", band]) == 2
    printed = capsys.readouterr()
    assert printed.err.startswith(f"filmstack: {path}: SiO2, ")
    assert "expected a wavelength from" in printed.err
    assert "got 150 nm" in printed.err
    assert printed.out == ""
