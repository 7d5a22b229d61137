"""Wrong design files: the whole message of each, every fault of a file at once, nothing written."""

import pytest

import filmstack as fs
from filmstack.cli.main import main

HEAD = """\
filmstack = 1
name = "test"
reference_wavelength_nm = 500
incident = { n = 1.0 }
substrate = { n = 1.5 }
"""
LAYER = "[[layer]]\nmaterial = { n = 2.0 }\n"
FILM = "{ material = { n = 2.0 }, thickness_nm = 1 }"
LETTERS = """\
[letters]
H = { material = { n = 2.0 }, quarter_waves = 1 }
L = { material = { n = 1.5 }, quarter_waves = 1 }
"""
MATERIAL = 'expected a material: a name such as "SiO2", a .csv file, or { n = 1.46, k = 0.0 }'
WAVELENGTH = "reference_wavelength_nm: expected a wavelength > 0 nm"
LENGTH = "layer[1].thickness_nm: expected a length >= 0 nm"
SEQUENCE = "expected a letter, a factor, a power or a parenthesis"
REPEATS = "layer[1].repeat: expected a whole number of repeats from 1 to 100000"
NO_PLATE = (
    "expected substrate_thickness_mm beside it, got none. Without it the substrate is semi-infinite: light ends in it"
)
DESIGN_KEYS = (
    "The keys are filmstack, name, description, parent, parent_sha256, reference_wavelength_nm, reference_angle_deg, "
    "incident_angle_deg, incident, substrate, substrate_thickness_mm, exit, sequence, back_sequence, materials, "
    "letters, layer, back_layer"
)
VERSION = "filmstack: expected version 1 of the file format"
ENTRY = "expected material (a layer), layers (a group) or sequence"


def head(old, new):
    assert old in HEAD
    return HEAD.replace(old, new)


def undefined(letter):
    return (
        f"the letter {letter} is not defined. Write {letter} = {{ material = ..., thickness_nm = ... }} under [letters]"
    )


BAD = [
    # the file as a whole
    (
        "",
        [
            "filmstack: expected filmstack = 1, the version of the file format, as the first line, got none",
            "name: expected a text, got none",
            f"{WAVELENGTH}, got none",
            f"incident: {MATERIAL}, got none",
            f"substrate: {MATERIAL}, got none",
        ],
    ),
    (
        head("filmstack = 1\n", ""),
        ["filmstack: expected filmstack = 1, the version of the file format, as the first line, got none"],
    ),
    (head("filmstack = 1", "filmstack = 2\nnews = 1"), [f"{VERSION}, got 2. Read this file with a newer filmstack"]),
    (head("filmstack = 1", 'filmstack = "1"'), [f"{VERSION}, got the text '1'"]),
    (head("filmstack = 1", "filmstack = true"), [f"{VERSION}, got true"]),
    (
        f"colour = 1\n{head('= 500', '= -500')}exit = {{ n = 1.0 }}\n"
        f"{LAYER}thickness_nm = -1\n{LAYER}thicknes_nm = 1\n",
        [
            f"colour: unknown key of a design. {DESIGN_KEYS}",
            f"{WAVELENGTH}, got -500 nm. Correct the sign",
            f"{LENGTH}, got -1 nm. Correct the sign",
            "layer[2].thicknes_nm: unknown key of a layer. Did you mean thickness_nm?",
            f"exit: {NO_PLATE}",
        ],
    ),
    # not TOML
    (
        f"{HEAD}{LAYER}thickness_nm = 12,5\n",
        [
            "line 8, column 18: not valid TOML: expected newline or end of document after a statement, "
            "in 'thickness_nm = 12,5'. Write a decimal point, not a comma"
        ],
    ),
    (
        head('"test"', "test"),
        ["line 2, column 8: not valid TOML: invalid value, in 'name = test'. Put a text in quotation marks"],
    ),
    (
        f'{HEAD}name = "again"\n',
        [
            "line 6, column 15: not valid TOML: cannot overwrite a value, in 'name = \"again\"'. "
            "A key stands once in a table; a new layer begins with [[layer]]"
        ],
    ),
    (
        head('"test"', '"test'),
        [
            r"line 2, column 13: not valid TOML: illegal character '\n', in 'name = " + "\"test'. "
            "Close the text with a quotation mark"
        ],
    ),
    (
        f"{HEAD}[[layer]\n",
        ["line 6, column 8: not valid TOML: expected ']]' at the end of an array declaration, in '[[layer]'"],
    ),
    (
        f"{HEAD}{LAYER}thickness_nm 10\n",
        ["line 8, column 14: not valid TOML: expected '=' after a key in a key/value pair, in 'thickness_nm 10'"],
    ),
    (f'{HEAD}description = """\nnever closed\n', ["not valid TOML at the end of the file: unterminated string"]),
    # the head
    (head('"test"', '" "'), ["name: expected a text, got the text ' '"]),
    (head('"test"', "7"), ["name: expected a text, got 7. Put it in quotation marks"]),
    (head("= 500", '= "500"'), [f"{WAVELENGTH}, got the text '500'. Leave out the quotation marks"]),
    (head("= 500", '= "green"'), [f"{WAVELENGTH}, got the text 'green'"]),
    (head("= 500", "= 0"), [f"{WAVELENGTH}, got 0 nm"]),
    (head("= 500", "= inf"), [f"{WAVELENGTH}, got inf nm"]),
    (head("= 500", "= nan"), [f"{WAVELENGTH}, got nan nm"]),
    (head("= 500", "= true"), [f"{WAVELENGTH}, got true"]),
    (head("= 500", "= [500]"), [f"{WAVELENGTH}, got a list"]),
    (head("= 500", "= 2026-12-01"), [f"{WAVELENGTH}, got the date 2026-12-01"]),
    (
        head("reference_wavelength_nm", "reference_wavelength_um"),
        ["reference_wavelength_um: unknown key of a design. Did you mean reference_wavelength_nm?"],
    ),
    (
        f"{HEAD}reference_angle_deg = 91\n",
        ["reference_angle_deg: expected an angle from 0 to 90 degrees, got 91 degrees"],
    ),
    (
        f"{HEAD}reference_angle_deg = -45\n",
        ["reference_angle_deg: expected an angle from 0 to 90 degrees, got -45 degrees. Correct the sign"],
    ),
    (
        f'{HEAD}incident_angle_deg = [0, "45"]\n',
        [
            "incident_angle_deg[2]: expected an angle from 0 to 90 degrees, got the text '45'. "
            "Leave out the quotation marks"
        ],
    ),
    (
        f"{HEAD}incident_angle_deg = []\n",
        ["incident_angle_deg: expected an angle from 0 to 90 degrees, or a list of such, got an empty list"],
    ),
    # media
    (head("substrate = { n = 1.5 }\n", ""), [f"substrate: {MATERIAL}, got none"]),
    (head("{ n = 1.5 }", "1.5"), [f"substrate: {MATERIAL}, got 1.5"]),
    (head("{ n = 1.5 }", "[{ n = 1.5 }]"), [f"substrate: {MATERIAL}, got a list"]),
    (head("{ n = 1.5 }", "{ k = 0.1 }"), ["substrate.n: expected an index >= 0, got none"]),
    (
        head("{ n = 1.5 }", "{ n = 1.5, k = -0.1 }"),
        ["substrate.k: expected an extinction coefficient >= 0, got -0.1. Correct the sign"],
    ),
    (
        head("{ n = 1.5 }", "{ n = 1.5, kappa = 0.1 }"),
        ["substrate.kappa: unknown key of a constant index. The keys are n, k"],
    ),
    (f"{HEAD}[materials]\nglass = 1.5\n", [f"materials.glass: {MATERIAL}, got 1.5"]),
    (
        f'{HEAD}[materials]\n" " = {{ n = 2.1 }}\n',
        ["materials: expected a name that is not blank, got ' '"],
    ),
    (f'{HEAD}materials = "mine"\n', ["materials: expected a table of materials, got the text 'mine'"]),
    (f"{HEAD}exit = {{ n = 1.0 }}\n", [f"exit: {NO_PLATE}"]),
    (f"{HEAD}{LAYER.replace('layer', 'back_layer')}thickness_nm = 10\n", [f"back_layer: {NO_PLATE}"]),
    (
        f"{HEAD}substrate_thickness_mm = 2.0\n",
        ['exit: expected the medium behind the plate, got none. Write exit = "air" or another medium'],
    ),
    (
        f"{HEAD}substrate_thickness_mm = 0\nexit = {{ n = 1.0 }}\n",
        ["substrate_thickness_mm: expected a length > 0 mm, got 0 mm"],
    ),
    # layers
    (
        f"{HEAD}{LAYER}",
        ["layer[1]: expected thickness_nm or quarter_waves, got neither. Write one of them"],
    ),
    (
        f"{HEAD}{LAYER}thickness_nm = 10\nquarter_waves = 1\n",
        ["layer[1]: expected thickness_nm or quarter_waves, got both. Remove one of them"],
    ),
    (f"{HEAD}{LAYER}thickness_nm = -12.5\n", [f"{LENGTH}, got -12.5 nm. Correct the sign"]),
    (f'{HEAD}{LAYER}thickness_nm = "12"\n', [f"{LENGTH}, got the text '12'. Leave out the quotation marks"]),
    (f'{HEAD}{LAYER}thickness_nm = "thick"\n', [f"{LENGTH}, got the text 'thick'"]),
    (f"{HEAD}{LAYER}thickness_nm = true\n", [f"{LENGTH}, got true"]),
    (f"{HEAD}{LAYER}thickness_nm = inf\n", [f"{LENGTH}, got inf nm"]),
    (f"{HEAD}{LAYER}thickness_nm = nan\n", [f"{LENGTH}, got nan nm"]),
    (f"{HEAD}{LAYER}thickness_nm = {'9' * 400}\n", [f"{LENGTH}, got a number of 400 digits nm"]),
    (
        f"{HEAD}{LAYER}quarter_waves = -1\n",
        ["layer[1].quarter_waves: expected a number of quarter waves >= 0, got -1. Correct the sign"],
    ),
    (f"{HEAD}{LAYER}quarter_waves = 1e308\n", ["layer[1].quarter_waves: expected a finite thickness, got inf nm"]),
    (
        f"{HEAD}{LAYER}thickness = 10\n",
        ["layer[1].thickness: unknown key of a layer. Did you mean thickness_nm?"],
    ),
    (f"{HEAD}{LAYER}thickness_nm = 10\nlocked = 1\n", ["layer[1].locked: expected true or false, got 1"]),
    (
        f'{HEAD}{LAYER}thickness_nm = 10\nlocked = "true"\n',
        ["layer[1].locked: expected true or false, got the text 'true'. Leave out the quotation marks"],
    ),
    (f"{HEAD}[[layer]]\n", [f"layer[1]: {ENTRY}, got none of them"]),
    (f"{HEAD}[[layer]]\nthickness_nm = 10\n", [f"layer[1].material: {MATERIAL}, got none"]),
    (
        f"{HEAD}[layer]\nmaterial = {{ n = 2.0 }}\nthickness_nm = 10\n",
        ["layer: expected a list of layers (a list of tables), got a table. Write [[layer]]"],
    ),
    (
        f"{HEAD}layer = [10, 20]\n",
        ["layer[1]: expected a layer (a table), got 10", "layer[2]: expected a layer (a table), got 20"],
    ),
    (
        f"{HEAD}reference_angle_deg = 60\n{LAYER.replace('2.0', '0.05, k = 3.3')}quarter_waves = 1\n",
        [
            "layer[1].quarter_waves: expected a layer that light passes at the reference angle, but at 60 degrees it "
            "is totally reflected by constant index 0.05 - 3.3i. Write thickness_nm"
        ],
    ),
    # keys in the wrong table
    (
        f"{HEAD}{LAYER}thickness_nm = 10\nincident_angle_deg = 45\n",
        [
            "layer[1].incident_angle_deg: not a key of a layer. "
            "It is a key of the design: write it above the first heading in brackets"
        ],
    ),
    (
        f"{HEAD}thickness_nm = 10\n",
        ["thickness_nm: not a key of a design. It is a key of a layer: write it below [[layer]]"],
    ),
    # groups
    (f"{HEAD}[[layer]]\nrepeat = 3\n", ["layer[1].layers: expected a list of layers (a list of tables), got none"]),
    (f"{HEAD}[[layer]]\nlayers = []\n", ["layer[1].layers: expected a list of layers, got an empty list"]),
    (f"{HEAD}[[layer]]\nrepeat = 0\nlayers = [{FILM}]\n", [f"{REPEATS}, got 0"]),
    (f"{HEAD}[[layer]]\nrepeat = -2\nlayers = [{FILM}]\n", [f"{REPEATS}, got -2. Correct the sign"]),
    (f"{HEAD}[[layer]]\nrepeat = 2.5\nlayers = [{FILM}]\n", [f"{REPEATS}, got 2.5"]),
    (f"{HEAD}[[layer]]\nrepeat = 1000000\nlayers = [{FILM}]\n", [f"{REPEATS}, got 1000000"]),
    (
        f"{HEAD}[[layer]]\nrepeat = 1000\nlayers = [{{ repeat = 1000, layers = [{FILM}] }}]\n",
        ["layer: expected at most 100,000 layers, got 1,000,000"],
    ),
    (
        f"{HEAD}{LAYER}thickness_nm = 10\nrepeat = 3\n",
        ["layer[1].repeat: not a key of a layer. Write a group: repeat = ... and layers = [{ ... }]"],
    ),
    (
        f"{HEAD}[[layer]]\nlocked = true\nlayers = [{FILM}]\n",
        ["layer[1].locked: not a key of a group. Write it in each layer of the group"],
    ),
    (
        f"{HEAD}{LAYER}repeat = 2\nlayers = [{FILM}]\n",
        [f"layer[1]: {ENTRY}, got material and layers"],
    ),
    (
        f"{HEAD}[[layer]]\nlayers = [{FILM.replace('1 }', '-1 }')}, {{ layers = [{{ material = {{ n = 2.0 }} }}] }}]\n",
        [
            "layer[1].layers[1].thickness_nm: expected a length >= 0 nm, got -1 nm. Correct the sign",
            "layer[1].layers[2].layers[1]: expected thickness_nm or quarter_waves, got neither. Write one of them",
        ],
    ),
    # sequences
    (f'{HEAD}sequence = "(H L)^3"\n', [f"sequence: {undefined('H')}", f"sequence: {undefined('L')}"]),
    (
        f'{HEAD}[[layer]]\nsequence = "H X"\n{LETTERS}',
        [f"layer[1].sequence: {undefined('X')}", "letters.L: no sequence uses this letter. Remove it"],
    ),
    (
        f'{HEAD}sequence = "H L"\n{LETTERS.replace("H =", "High =")}',
        ["letters: expected a name of one letter, A to Z or a to z, got 'High'"],
    ),
    (
        f'{HEAD}sequence = "H L"\n{LETTERS.replace("waves = 1 }", "wave = 1 }", 1)}',
        ["letters.H.quarter_wave: unknown key of a letter. Did you mean quarter_waves?"],
    ),
    (
        f'{HEAD}sequence = "H L"\n{LETTERS}{LAYER}thickness_nm = 1\n',
        [
            "sequence: expected sequence or layer, got both. "
            "Write the sequence as one of the layers: [[layer]] with sequence = ..."
        ],
    ),
    (f'{HEAD}back_sequence = "H L"\n{LETTERS}', [f"back_sequence: {NO_PLATE}"]),
    (
        f'{HEAD}[[layer]]\nsequence = "H L"\nlocked = true\n{LETTERS}',
        ["layer[1].locked: not a key of a sequence. Write it in the letters"],
    ),
    (
        f'{HEAD}sequence = "((H L)^1000)^1000"\n{LETTERS}',
        ["sequence: expected at most 100,000 layers, got 2,000,000"],
    ),
    *(
        (f"{HEAD}sequence = {text}\n{LETTERS}", [f"sequence: {message}"])
        for text, message in [
            ('""', "expected a sequence such as \"(H L)^7 0.5H\", got the text ''"),
            ('["H", "L"]', 'expected a sequence such as "(H L)^7 0.5H", got a list'),
            ('"(H L"', "character 1: expected a closing parenthesis for this one, got none"),
            ('"H L)^2"', "character 4: expected an opening parenthesis before this one, got none"),
            ('"H ()^2 L"', "character 3: expected letters in the parentheses, got none"),
            ('"(H L)^"', f"character 6: {SEQUENCE}, got '^'. Write a whole number and a blank behind ^"),
            ('"(H L)^-2"', f"character 6: {SEQUENCE}, got '^'. Write a whole number and a blank behind ^"),
            ('"H^10.5L"', f"character 2: {SEQUENCE}, got '^'. Write a whole number and a blank behind ^"),
            ('"(H L)^0"', "character 6: expected a power >= 1, got 0"),
            ('"^2 H L"', "character 1: expected a letter or a parenthesis before the power"),
            ('"H^2^3 L"', "character 4: expected a letter or a parenthesis before the power"),
            ('"H/2 L"', f"character 2: {SEQUENCE}, got '/'. Write half a layer as 0.5H"),
            ('"2*H L"', f"character 2: {SEQUENCE}, got '*'. Write a factor straight before the letter"),
            ('"0,5H L"', f"character 2: {SEQUENCE}, got ','. Write a decimal point, not a comma"),
            ('"H -1L"', f"character 3: {SEQUENCE}, got '-'. Factors and powers have no sign"),
            ('"H 2 3 L"', "character 5: expected a letter or a parenthesis behind the factor, got 3"),
            ('"H L 0.5"', "character 5: expected a letter or a parenthesis behind the factor, got the end"),
            ('"H (L 2)"', "character 7: expected a letter or a parenthesis behind the factor, got ')'"),
            ('"H 0L"', "character 3: expected a factor > 0, got 0. Leave the layer out"),
            (f'"{"(" * 51}H L{")" * 51}"', "character 51: expected at most 50 parentheses in one another"),
        ]
    ),
]


@pytest.mark.parametrize(("text", "faults"), BAD, ids=[faults[0][:60] for _, faults in BAD])
def test_every_fault_is_told_in_whole_and_nothing_is_written(text, faults, capsys, monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "a.toml").write_text(text)
    message = "\n".join(f"a.toml: {fault}" for fault in faults)
    with pytest.raises(fs.DesignFileError) as told:
        fs.load_design("a.toml")
    assert str(told.value) == message
    assert main(["show", "a.toml", "--plot", "a.png"]) == 2
    printed = capsys.readouterr()
    assert printed.out == ""
    assert printed.err.removeprefix("filmstack:").split() == message.split()
    assert [path.name for path in tmp_path.iterdir()] == ["a.toml"]


BAD_BYTES = [
    (b"\xff\xfef\x00i\x00", "a.toml: line 1: expected text in UTF-8. Save the file as UTF-8"),
    (
        HEAD.encode() + 'description = "Scheibe für Tageslicht"\n'.encode("latin-1"),
        "a.toml: line 6: expected text in UTF-8. Save the file as UTF-8",
    ),
    (b"a = " + b"[" * 3000 + b"]" * 3000, "a.toml: expected tables and lists at most a hundred deep, got more"),
]


@pytest.mark.parametrize(("content", "message"), BAD_BYTES, ids=["UTF-16", "Latin-1", "deep"])
def test_bytes_that_are_no_text(content, message, monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "a.toml").write_bytes(content)
    with pytest.raises(fs.DesignFileError) as told:
        fs.load_design("a.toml")
    assert str(told.value) == message


def test_a_byte_order_mark_is_no_fault(tmp_path):
    (tmp_path / "a.toml").write_bytes(b"\xef\xbb\xbf" + HEAD.encode())
    assert fs.load_design(tmp_path / "a.toml").name == "test"


def test_a_file_that_is_not_there(monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    with pytest.raises(fs.DesignFileError) as told:
        fs.load_design("none.toml")
    assert str(told.value) == "none.toml: expected a file, got none of that name. Check the name and the folder"


def test_a_folder(monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "designs").mkdir()
    with pytest.raises(fs.DesignFileError) as told:
        fs.load_design("designs")
    assert str(told.value) == "designs: expected a file, got a folder. Name a .toml file in it"


def test_faults_of_several_files_are_told_at_once(capsys, monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "a.toml").write_text(f"{HEAD}{LAYER}thickness_nm = -1\n")
    (tmp_path / "b.toml").write_text(head("= 500", "= 0"))
    assert main(["show", "a.toml", "b.toml", "c.toml"]) == 2
    assert capsys.readouterr().err.splitlines() == [
        "filmstack:",
        f"  a.toml: {LENGTH}, got -1 nm. Correct the sign",
        f"  b.toml: {WAVELENGTH}, got 0 nm",
        "  c.toml: expected a file, got none of that name. Check the name and the folder",
    ]
