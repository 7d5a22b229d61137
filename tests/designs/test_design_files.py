"""Designs from file to stack and back: thickness, plates, names of materials, what is kept."""

import hashlib
import math
import tomllib
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import filmstack as fs
from filmstack.files.design_file import help_text, read_design_file
from filmstack.files.design_keys import DESIGN
from filmstack.files.toml_file import toml_text

HEAD = """\
filmstack = 1
name = "test"
reference_wavelength_nm = 600
incident = { n = 1.0 }
substrate = { n = 1.5 }
"""


@pytest.fixture
def design(tmp_path):
    def load(text, name="a.toml"):
        (tmp_path / name).write_text(text, encoding="utf-8")
        return fs.load_design(tmp_path / name)

    return load


def film(n, thickness):
    return f"[[layer]]\nmaterial = {{ n = {n} }}\n{thickness}\n"


def test_the_stack_of_a_simple_file(design):
    read = design(
        f"{HEAD}{film(2.0, 'thickness_nm = 12.5')}{film(1.4, 'quarter_waves = 1' + chr(10) + 'locked = true')}"
    )
    assert read.name == "test"
    assert read.reference_wavelength_nm == 600.0
    assert read.reference_angle_deg == 0.0
    assert read.incident_angle_deg == (0.0,)
    stack = read.stack
    assert [film.thickness_nm for film in stack.films] == [12.5, pytest.approx(600 / 4 / 1.4, rel=1e-15)]
    assert [film.locked for film in stack.films] == [False, True]
    assert [complex(medium.index(500.0)) for medium in (stack.incident, stack.exit)] == [1.0, 1.5]
    assert stack.plates == ()


FOUR_LAYERS = """\
filmstack = 1
name = "four-layer window"
reference_wavelength_nm = 550
reference_angle_deg = 0
incident = "air"
substrate = "SiO2/bulk-1965"
substrate_thickness_mm = 2.0    # a thick plate
exit = "air"

[[layer]]
material = "TiO2"
thickness_nm = 12.4

[[layer]]
repeat = 2
layers = [{material = "SiO2", quarter_waves = 0.62, locked = true}, {material = "TiO2", thickness_nm = 7}]
"""


def test_materials_of_the_library(design):
    stack = design(FOUR_LAYERS).stack
    titania, silica = fs.material("TiO2"), fs.material("SiO2")
    assert [film.material for film in stack.films] == [titania, silica, titania, silica, titania]
    assert stack.incident is stack.exit is fs.material("air")
    assert stack.plates[0].material is fs.material("SiO2/bulk-1965")
    waves = 0.62 * 550 / 4 / silica.index(550.0).real
    assert stack.thickness_nm.tolist() == pytest.approx([12.4, waves, 7.0, waves, 7.0], rel=1e-14)


def test_the_same_fault_is_told_once(design):
    letters = "[letters]\nM = { material = { n = 0.05, k = 3 }, quarter_waves = 1 }\n"
    with pytest.raises(fs.DesignFileError) as told:
        design(f"{HEAD}reference_angle_deg = 45\nsequence = 'M 0.5M 2M'\n{letters}")
    assert str(told.value).count("letters.M.quarter_waves") == 1


def test_a_plate_with_films_on_both_faces(design):
    text = (
        f"{HEAD}substrate_thickness_mm = 2.5\nexit = {{ n = 1.33 }}\nincident_angle_deg = [0, 45.5]\n"
        f"{film(2.0, 'thickness_nm = 1')}"
        f"{film(2.1, 'thickness_nm = 2')}{film(2.2, 'thickness_nm = 3')}".replace("layer", "back_layer").replace(
            "back_layer", "layer", 1
        )
    )
    read = design(text)
    kinds = [type(layer).__name__ for layer in read.stack.layers]
    assert kinds == ["Layer", "Plate", "Layer", "Layer"]
    assert read.stack.plates[0].thickness_mm == 2.5
    assert read.stack.thickness_nm.tolist() == [1.0, 2.0, 3.0]
    assert complex(read.stack.exit.index(600.0)) == 1.33
    assert read.incident_angle_deg == (0.0, 45.5)


def test_a_bare_substrate_is_a_design(design):
    assert design(HEAD).stack.layers == ()


def test_equal_constants_are_one_material(design):
    stack = design(f"{HEAD}[[layer]]\nmaterial = {{ n = 1, k = 0 }}\nthickness_nm = 1\n").stack
    assert stack.films[0].material is stack.incident


# The quarter wave n d cos(theta) = lambda / 4 with Snell's law, n0 sin(theta0) = n sin(theta)
# (M. Born and E. Wolf, Principles of Optics, 1.5.1 and 1.6.4; from memory).
@pytest.mark.parametrize("angle", [0.0, 30.0, 45.0, 60.0, 89.0])
@pytest.mark.parametrize(("n0", "n", "waves"), [(1.0, 1.38, 1.0), (1.0, 2.35, 0.62), (1.2, 1.46, 3.0)])
def test_quarter_waves_are_those_of_the_textbook(angle, n0, n, waves, design):
    head = HEAD.replace("n = 1.0", f"n = {n0}")
    read = design(f"{head}reference_angle_deg = {angle}\n{film(n, f'quarter_waves = {waves}')}")
    inside = math.asin(n0 * math.sin(math.radians(angle)) / n)
    thickness = waves * 600.0 / 4.0 / (n * math.cos(inside))
    assert read.stack.thickness_nm[0] == pytest.approx(thickness, rel=1e-13)
    assert read.quarter_waves[0] == pytest.approx(waves, rel=1e-14)


def test_quarter_waves_use_the_real_part_of_the_index(design):
    read = design(f"{HEAD}{film('2.0, k = 0.5', 'quarter_waves = 1')}")
    assert read.stack.thickness_nm[0] == pytest.approx(600.0 / 8.0, rel=1e-15)


def test_no_quarter_waves_where_light_is_evanescent(design):
    read = design(f"{HEAD}reference_angle_deg = 60\n{film('0.05, k = 3', 'thickness_nm = 20')}")
    assert np.isnan(read.quarter_waves).tolist() == [True]


def write_table(folder, name, n):
    folder.mkdir(exist_ok=True)
    rows = "".join(f"{wavelength},{n},0\n" for wavelength in range(300, 1001, 100))
    (folder / name).write_text(f"wavelength_nm,n,k\n{rows}")


def test_materials_by_own_name_file_and_folder(design, tmp_path):
    write_table(tmp_path / "materials", "mine.csv", 1.75)
    write_table(tmp_path / "other", "film.csv", 1.25)
    text = (
        f"{HEAD}[materials]\nhigh = {{ n = 2.5 }}\nporous = 'other/film.csv'\nlow = 'mine'\n"
        + "".join(f"[[layer]]\nmaterial = '{name}'\nthickness_nm = 1\n" for name in ("high", "porous", "low", "mine"))
        + "[[layer]]\nmaterial = 'other/film.csv'\nthickness_nm = 1\n"
    )
    films = design(text).stack.films
    assert [film.material.index(600.0).real for film in films] == pytest.approx([2.5, 1.25, 1.75, 1.75, 1.25], abs=1e-9)
    assert films[2].material is films[3].material
    assert films[1].material is films[4].material


def test_an_own_name_may_be_that_of_the_library(design):
    read = design(f"{HEAD}[materials]\nSiO2 = 'SiO2/bulk-1965'\n[[layer]]\nmaterial = 'SiO2'\nthickness_nm = 1\n")
    assert read.stack.films[0].material is fs.material("SiO2/bulk-1965")
    read = design(f"{HEAD}[materials]\nSiO2 = 'SiO2'\n[[layer]]\nmaterial = 'SiO2'\nthickness_nm = 1\n", "b.toml")
    assert read.stack.films[0].material is fs.material("SiO2")


def test_an_own_name_stands_for_no_other_own_name(design):
    with pytest.raises(fs.MaterialNotFoundError, match=r"a\.toml: materials\.low: material 'mine': no such material"):
        design(f"{HEAD}[materials]\nmine = {{ n = 1.4 }}\nlow = 'mine'\n")


def test_a_material_that_is_not_used_may_lack_the_reference_wavelength(design):
    assert design(f"{HEAD}[materials]\ncamera = 'Ge/crystal-2016'\n").stack.layers == ()


def test_all_unknown_materials_are_told_with_their_place(design, tmp_path):
    layers = [("unobtainium", 1), ("x.csv", -1)]
    text = HEAD + "".join(f"[[layer]]\nmaterial = '{name}'\nthickness_nm = {nm}\n" for name, nm in layers)
    with pytest.raises(fs.FilmstackError) as told:
        design(text)
    lines = str(told.value).splitlines()
    assert any(line.startswith(f"{tmp_path / 'a.toml'}: layer[1].material: ") for line in lines)
    assert any(line.startswith(f"{tmp_path / 'a.toml'}: layer[2].material: ") for line in lines)
    assert (
        f"{tmp_path / 'a.toml'}: layer[2].thickness_nm: expected a length >= 0 nm, got -1 nm. Correct the sign" in lines
    )


def test_the_reference_wavelength_has_to_be_inside_the_data(design, tmp_path):
    write_table(tmp_path / "materials", "mine.csv", 1.75)
    text = HEAD.replace("= 600", "= 1064") + "[[layer]]\nmaterial = 'mine'\nthickness_nm = 1\n"
    with pytest.raises(fs.DesignFileError) as told:
        design(text)
    message = str(told.value)
    assert message.startswith(
        f"{tmp_path / 'a.toml'}: reference_wavelength_nm: expected a wavelength inside the data of "
    )
    assert message.endswith(", 300 to 1000 nm, got 1064 nm. Choose another source of this material")


# Round trips: values of a file, made at random

numbers = st.one_of(st.integers(0, 2000), st.floats(0, 1e6, allow_subnormal=False))
positive = st.one_of(st.integers(1, 2000), st.floats(0.001, 1e6))
texts = st.text(st.characters(codec="utf-8"), min_size=1, max_size=12).filter(lambda text: text.strip())
angles = st.one_of(st.integers(0, 90), st.floats(0, 90))
constants = st.fixed_dictionaries({"n": st.floats(1.0, 4.0)}, optional={"k": st.floats(0.0, 0.01)})
own_names = st.sampled_from(["high", "own name", "a.b", 'with "quotes"', "n"])
layers = st.builds(
    lambda material, thickness, lock: {"material": material, **thickness, **lock},
    st.one_of(constants, own_names),
    st.one_of(st.fixed_dictionaries({"thickness_nm": numbers}), st.fixed_dictionaries({"quarter_waves": numbers})),
    st.fixed_dictionaries({}, optional={"locked": st.booleans()}),
)
spelled = st.sampled_from(["(H L)^3 0.5H", "HL2HLH", "((H L)^2 1.5H)^2 L"])


def groups(entries):
    return st.builds(
        lambda repeat, layers: {**repeat, "layers": layers},
        st.fixed_dictionaries({}, optional={"repeat": st.integers(1, 3)}),
        st.lists(entries, min_size=1, max_size=3),
    )


entry_lists = st.lists(
    st.recursive(st.one_of(layers, st.fixed_dictionaries({"sequence": spelled})), groups, max_leaves=5), max_size=4
)


def spells(value):
    """Tell whether a sequence stands somewhere in the layers."""
    if isinstance(value, dict):
        return "sequence" in value or any(map(spells, value.values()))
    return isinstance(value, list) and any(map(spells, value))


@st.composite
def design_values(draw):
    values = {
        "filmstack": 1,
        "name": draw(texts),
        **draw(st.fixed_dictionaries({}, optional={"description": st.one_of(texts, st.just('two\nlines "with" \\'))})),
        "reference_wavelength_nm": draw(positive),
        **draw(st.fixed_dictionaries({}, optional={"reference_angle_deg": st.integers(0, 80)})),
        **draw(
            st.fixed_dictionaries(
                {}, optional={"incident_angle_deg": st.one_of(angles, st.lists(angles, min_size=1, max_size=3))}
            )
        ),
        "incident": {"n": 1.0},
        "substrate": draw(constants),
    }
    sides = {"layer": "sequence"}
    if draw(st.booleans()):
        values |= {"substrate_thickness_mm": draw(positive), "exit": draw(constants)}
        sides["back_layer"] = "back_sequence"
    whole = {sequence: draw(spelled) for sequence in sides.values() if draw(st.integers(0, 3)) == 0}
    values |= whole
    values["materials"] = {name: draw(constants) for name in ["high", "own name", "a.b", 'with "quotes"', "n"]}
    lists = {side: draw(entry_lists) for side, sequence in sides.items() if sequence not in whole}
    if whole or spells(lists):
        values["letters"] = {"H": draw(layers), "L": draw(layers)}
    return values | lists


def same(left, right):
    """Equal, of the same types, with the keys in the same order."""
    if isinstance(left, dict) and isinstance(right, dict):
        return list(left) == list(right) and all(same(left[key], right[key]) for key in left)
    if isinstance(left, list) and isinstance(right, list):
        return len(left) == len(right) and all(map(same, left, right))
    return type(left) is type(right) and left == right


@settings(deadline=None)
@given(design_values())
def test_text_and_values_are_the_same_thing(values):
    assert same(tomllib.loads(toml_text(values)), _without_empty_lists_moved(values))


def _without_empty_lists_moved(values):
    """An empty list of layers is written among the single values, so before the tables."""
    empty = {key: value for key, value in values.items() if value == []}
    plain = {key: value for key, value in values.items() if not isinstance(value, dict | list) or key in _IN_LINE}
    if "incident_angle_deg" in values:
        plain["incident_angle_deg"] = values["incident_angle_deg"]
    plain = {key: value for key, value in values.items() if key in plain or key in empty}
    return plain | {key: value for key, value in values.items() if key not in plain}


_IN_LINE = ("incident", "substrate", "exit")


@settings(deadline=None)  # files are written
@given(design_values(), st.randoms())
def test_a_design_read_from_a_file_is_written_as_it_was(tmp_path_factory, values, random):
    folder = tmp_path_factory.mktemp("round")
    mixed = list(values.items())
    random.shuffle(mixed)  # the order of a person's file does not matter
    (folder / "a.toml").write_text(toml_text(dict(mixed)), encoding="utf-8", newline="")
    read = fs.load_design(folder / "a.toml")
    fs.save_design(read, folder / "b.toml")
    written = tomllib.loads((folder / "b.toml").read_bytes().decode())
    assert written == values
    again = fs.load_design(folder / "b.toml")
    assert again.stack.thickness_nm.tolist() == read.stack.thickness_nm.tolist()
    assert [film.locked for film in again.stack.films] == [film.locked for film in read.stack.films]
    fs.save_design(again, folder / "c.toml")
    assert (folder / "c.toml").read_bytes() == (folder / "b.toml").read_bytes()


@settings(deadline=None)  # files are written
@given(design_values(), st.randoms())
def test_new_thicknesses_come_back_to_the_last_bit(tmp_path_factory, values, random):
    folder = tmp_path_factory.mktemp("thickness")
    (folder / "a.toml").write_text(toml_text(values), encoding="utf-8", newline="")
    read = fs.load_design(folder / "a.toml")
    new = [random.choice([old, old, random.uniform(0.0, 500.0)]) for old in read.stack.thickness_nm]
    fs.save_design(read.with_thickness(new), folder / "b.toml")
    again = fs.load_design(folder / "b.toml")
    assert again.stack.thickness_nm.tolist() == new
    assert [film.locked for film in again.stack.films] == [film.locked for film in read.stack.films]
    indices = [[complex(film.material.index(500.0)) for film in design.stack.films] for design in (read, again)]
    assert indices[0] == indices[1]
    assert again.name == read.name


def test_keys_of_a_file_are_written_in_the_order_of_the_table():
    assert [key.name for key in DESIGN.keys][:3] == ["filmstack", "name", "description"]
    assert [key.name for key in DESIGN.keys][-2:] == ["layer", "back_layer"]


def test_a_result_names_its_parent_and_the_hash(design, tmp_path):
    text = f"{HEAD}{film(2.0, 'thickness_nm = 12.5')}{film(1.4, 'quarter_waves = 1')}"
    read = design(text)
    (tmp_path / "results").mkdir()
    fs.save_design(read.with_thickness([13.0, read.stack.thickness_nm[1]]), tmp_path / "results" / "b.toml")
    written = tomllib.loads((tmp_path / "results" / "b.toml").read_text())
    assert written["parent"] == "../a.toml"
    assert written["parent_sha256"] == hashlib.sha256(text.encode()).hexdigest()
    assert written["layer"] == [
        {"material": {"n": 2.0}, "thickness_nm": 13.0},
        {"material": {"n": 1.4}, "quarter_waves": 1},
    ]
    assert (tmp_path / "a.toml").read_text() == text


def test_the_parent_is_never_replaced(design, tmp_path):
    read = design(f"{HEAD}{film(2.0, 'thickness_nm = 12.5')}")
    path = tmp_path / "a.toml"
    for made in (read, read.with_thickness([1.0])):
        with pytest.raises(fs.FilmstackError) as told:
            fs.save_design(made, path, replace_file=True)
        assert str(told.value) == (
            f"{path}: this is the file that the design comes from, which is never changed. Choose another name"
        )


def test_another_file_is_replaced_only_when_asked(design, tmp_path):
    read = design(HEAD)
    (tmp_path / "b.toml").write_text("mine")
    with pytest.raises(fs.FilmstackError) as told:
        fs.save_design(read, tmp_path / "b.toml")
    assert str(told.value) == (
        f"{tmp_path / 'b.toml'}: expected the name of a new file, got that of an existing one. Choose another name"
    )
    assert (tmp_path / "b.toml").read_text() == "mine"
    fs.save_design(read, tmp_path / "b.toml", replace_file=True)
    assert fs.load_design(tmp_path / "b.toml").name == "test"


def test_names_of_files_hold_in_another_folder(design, tmp_path):
    write_table(tmp_path / "materials", "mine.csv", 1.75)
    write_table(tmp_path / "other", "film.csv", 1.25)
    layers = "".join(f"[[layer]]\nmaterial = '{name}'\nthickness_nm = 1\n" for name in ("mine", "other/film.csv"))
    read = design(HEAD + layers)
    (tmp_path / "results").mkdir()
    fs.save_design(read, tmp_path / "results" / "b.toml")
    films = fs.load_design(tmp_path / "results" / "b.toml").stack.films
    assert [film.material.index(600.0).real for film in films] == pytest.approx([1.75, 1.25], abs=1e-9)


def test_an_own_name_that_stands_for_itself_holds_in_another_folder(design, tmp_path):
    write_table(tmp_path / "materials", "mine.csv", 1.75)
    read = design(HEAD + "[materials]\nmine = 'mine'\n[[layer]]\nmaterial = 'mine'\nthickness_nm = 1\n")
    (tmp_path / "results").mkdir()
    fs.save_design(read, tmp_path / "results" / "b.toml")
    film = fs.load_design(tmp_path / "results" / "b.toml").stack.films[0]
    assert film.material.index(600.0).real == pytest.approx(1.75, abs=1e-9)


def test_a_decimal_point_in_the_version_is_told(design):
    with pytest.raises(fs.DesignFileError) as told:
        design(HEAD.replace("filmstack = 1", "filmstack = 1.0"))
    assert "filmstack: expected the whole number 1, got 1.0. Leave the decimal point out" in str(told.value)


def test_a_design_made_in_python_is_written_and_read(tmp_path):
    layers = [fs.Layer(fs.constant(2.0, 1e-3), 12.5, locked=True), fs.Plate(fs.constant(1.5), 2.0)]
    stack = fs.Stack(fs.constant(1.0), [*layers, fs.Layer(fs.material("SiO2"), 50.0)], fs.constant(1.0))
    made = fs.Design("made", stack, 600.0, incident_angle_deg=(0.0, 45.0), description="by hand")
    fs.save_design(made, tmp_path / "a.toml")
    read = fs.load_design(tmp_path / "a.toml")
    assert read.name == "made"
    assert read.description == "by hand"
    assert read.incident_angle_deg == (0.0, 45.0)
    assert read.stack.thickness_nm.tolist() == [12.5, 50.0]
    assert [film.locked for film in read.stack.films] == [True, False]
    assert read.stack.plates[0].thickness_mm == 2.0
    assert read.stack.films[1].material.key == fs.material("SiO2").key
    assert complex(read.stack.films[0].material.index(600.0)) == 2.0 - 1e-3j


def test_a_new_stack_keeps_the_names_of_the_design(design, tmp_path):
    write_table(tmp_path / "materials", "mine.csv", 1.75)
    text = (
        f"{HEAD}[materials]\nhigh = {{ n = 2.5 }}\n[letters]\nH = {{ material = 'high', quarter_waves = 1 }}\n"
        "L = { material = 'mine', quarter_waves = 1, locked = true }\n[[layer]]\nsequence = 'H L H'\n"
    )
    read = design(text)
    high, low = read.stack.materials[1:3]
    stack = fs.Stack(read.stack.incident, [fs.Layer(low, 10.0), fs.Layer(high, 20.0, locked=True)], read.stack.exit)
    (tmp_path / "results").mkdir()
    made = read.with_stack(stack)
    fs.save_design(made, tmp_path / "b.toml")
    fs.save_design(made.with_thickness([11.0, 21.0]), tmp_path / "results" / "c.toml")
    written = tomllib.loads((tmp_path / "b.toml").read_text())
    assert written["parent"] == "a.toml"
    assert written["materials"] == {"high": {"n": 2.5}}
    assert "letters" not in written
    assert written["layer"] == [
        {"material": "mine", "thickness_nm": 10.0},
        {"material": "high", "thickness_nm": 20.0, "locked": True},
    ]
    written = tomllib.loads((tmp_path / "results" / "c.toml").read_text())
    assert written["parent"] == "../a.toml"
    assert written["layer"][0] == {"material": "../materials/mine.csv", "thickness_nm": 11.0}
    again = fs.load_design(tmp_path / "results" / "c.toml")
    assert again.stack.films[0].material.index(600.0).real == pytest.approx(1.75, abs=1e-9)


def test_changes_by_hand_are_written(design, tmp_path):
    text = f"{HEAD}description = 'old'\nincident_angle_deg = [0, 45]\n{film(2.0, 'quarter_waves = 1')}"
    read = design(text)
    other = fs.Stack(read.stack.incident, [fs.Layer(fs.constant(3.0), 7.0)], read.stack.exit)
    changes = [
        ({"name": "new"}, {"name": "new", "description": "old", "incident_angle_deg": [0, 45]}),
        ({"description": ""}, {"description": None}),
        ({"incident_angle_deg": (0.0,)}, {"incident_angle_deg": None}),
        ({"incident_angle_deg": (30.0,)}, {"incident_angle_deg": 30.0}),
        # quarter waves of another wavelength are other thicknesses: the stack counts
        ({"reference_wavelength_nm": 800.0}, {"layer": [{"material": {"n": 2.0}, "thickness_nm": 75.0}]}),
        ({"stack": other}, {"layer": [{"material": {"n": 3.0}, "thickness_nm": 7.0}]}),
    ]
    for number, (change, expected) in enumerate(changes):
        changed = replace(read, **change)
        fs.save_design(changed, tmp_path / f"{number}.toml")
        written = tomllib.loads((tmp_path / f"{number}.toml").read_text())
        assert {key: written.get(key) for key in expected} == expected
        again = fs.load_design(tmp_path / f"{number}.toml")
        assert again.stack.thickness_nm.tolist() == changed.stack.thickness_nm.tolist()
        assert (again.name, again.description) == (changed.name, changed.description)
        assert again.incident_angle_deg == changed.incident_angle_deg
        assert again.reference_wavelength_nm == changed.reference_wavelength_nm


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"name": " "}, "Design.name: expected a text, got ' '"),
        ({"stack": None}, "Design.stack: expected a Stack, got None"),
        (
            {"reference_wavelength_nm": -1.0},
            "Design.reference_wavelength_nm: expected a wavelength > 0 nm, got -1 nm. Correct the sign",
        ),
        (
            {"reference_wavelength_nm": "550"},
            "Design.reference_wavelength_nm: expected a wavelength > 0 nm, got the text '550'. "
            "Leave out the quotation marks",
        ),
        (
            {"incident_angle_deg": (0.0, 91.0)},
            "Design.incident_angle_deg: expected an angle from 0 to 90 degrees, got 91 degrees",
        ),
        ({"incident_angle_deg": ()}, "Design.incident_angle_deg: expected at least one angle, got none"),
    ],
)
def test_a_wrong_design_in_python(change, message):
    stack = fs.Stack(fs.constant(1.0), [], fs.constant(1.5))
    with pytest.raises(fs.ArgumentError) as told:
        fs.Design(**{"name": "a", "stack": stack, "reference_wavelength_nm": 550.0} | change)
    assert str(told.value) == message


def test_a_material_that_has_no_name_is_refused(tmp_path):
    medium = fs.sellmeier([1.1], [0.01])
    made = fs.Design("made", fs.Stack(fs.constant(1.0), [fs.Layer(medium, 1.0)], fs.constant(1.5)), 600.0)
    with pytest.raises(fs.ArgumentError, match="expected a material of the library, of the design's own file, or"):
        fs.save_design(made, tmp_path / "a.toml")
    assert list(tmp_path.iterdir()) == []


def test_two_plates_are_no_design_file(tmp_path):
    glass, air = fs.constant(1.5), fs.constant(1.0)
    stack = fs.Stack(air, [fs.Plate(glass, 1.0), fs.Plate(glass, 1.0)], air)
    with pytest.raises(fs.ArgumentError, match="one thick plate at most, as in a design file, got 2 plates"):
        fs.save_design(fs.Design("two", stack, 600.0), tmp_path / "a.toml")
    assert list(tmp_path.iterdir()) == []


def test_the_help_tells_every_key_of_the_table():
    told = help_text()
    for key in DESIGN.keys:
        (line,) = [line for line in told.split("\n\n")[0].splitlines() if line.split()[:1] == [key.name]]
        assert key.help in line
        assert key.kind.expected in line
        assert line.endswith("; required)") == key.required
    required = [key.name for key in DESIGN.keys if key.required]
    assert required == ["filmstack", "name", "reference_wavelength_nm", "incident", "substrate"]


def test_a_file_is_read_without_numpy_values(tmp_path):
    (tmp_path / "a.toml").write_text(HEAD)
    read = read_design_file(tmp_path / "a.toml")
    assert read.values == tomllib.loads(HEAD)
    assert read.faults.found == []
