"""`filmstack show`: table, totals, JSON, help on keys, and the picture of the index profile."""

import json
from itertools import pairwise

import numpy as np
import pytest
from matplotlib.collections import PolyCollection

import filmstack as fs
from filmstack.cli.main import main
from filmstack.files.design_file import help_text
from filmstack.materials.shipped import shipped_folder
from filmstack.report.profile_plot import faces, profile_figure

# Quarter waves at 600 nm of n = 2 and n = 1.5: 75 nm and 100 nm. A silver-like film has none at 60 degrees:
# Re N < sin(60 degrees).
PART = """\
filmstack = 1
name = "part"
description = "two faces"
reference_wavelength_nm = 600
incident_angle_deg = [0, 45]
incident = "air"
substrate = { n = 1.5 }
substrate_thickness_mm = 1.5
exit = "air"
sequence = "(H L)^2"

[letters]
H = { material = { n = 2.0 }, quarter_waves = 1 }
L = { material = { n = 1.5 }, quarter_waves = 0.5, locked = true }

[[back_layer]]
material = { n = 2.0 }
thickness_nm = 250
"""
METAL = """\
filmstack = 1
name = "metal"
reference_wavelength_nm = 600
reference_angle_deg = 60
incident = "air"
substrate = { n = 1.5 }

[[layer]]
material = { n = 0.05, k = 4.0 }
thickness_nm = 0.0
"""


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "part.toml").write_text(PART)
    (tmp_path / "metal.toml").write_text(METAL)
    return tmp_path


def test_the_page_for_people(folder, capsys):
    assert main(["show", "part.toml"]) == 0
    assert (
        capsys.readouterr().out
        == """\
part (part.toml)
two faces
quarter waves at 600 nm and 0 deg; angle of incidence 0, 45 deg where no other is asked for

            from                      thickness  quarter  share
layer  substrate  material                   nm    waves      %  remark
-----  ---------  ------------------  ---------  -------  -----  -----------------
                  air                                            incident medium
    1          4  constant index 2       75.000   1.0000  15.00
    2          3  constant index 1.5     50.000   0.5000  10.00  locked
    3          2  constant index 2       75.000   1.0000  15.00
    4          1  constant index 1.5     50.000   0.5000  10.00  locked
                  constant index 1.5                             substrate, 1.5 mm
    5          1  constant index 2      250.000   3.3333  50.00
                  air                                            exit medium

                            thickness   share
films of            layers         nm       %
------------------  ------  ---------  ------
constant index 2         3    400.000   80.00
constant index 1.5       2    100.000   20.00
all                      5    500.000  100.00

materials
  air           index 1 exactly
  constant 2    constant index 2
  constant 1.5  constant index 1.5
"""
    )


def test_a_film_without_quarter_waves_and_without_thickness(folder, capsys):
    assert main(["show", "metal.toml"]) == 0
    lines = [" ".join(line.split()) for line in capsys.readouterr().out.splitlines()]
    assert "1 1 constant index 0.05 - 4i 0.000 evanescent 0.00" in lines
    assert "constant index 1.5 substrate, semi-infinite" in lines
    assert "all 1 0.000 0.00" in lines


def test_json_tells_the_same(folder, capsys):
    assert main(["show", "part.toml", "metal.toml", "--json"]) == 0
    part, metal = json.loads(capsys.readouterr().out)["designs"]
    assert part["design"] == "part"
    assert part["file"] == "part.toml"
    assert part["substrate_thickness_mm"] == 1.5
    assert [layer["layer"] for layer in part["layers"]] == [1, 2, 3, 4, 5]
    assert [layer["from_substrate"] for layer in part["layers"]] == [4, 3, 2, 1, 1]
    assert [layer["face"] for layer in part["layers"]] == ["front"] * 4 + ["back"]
    assert [layer["locked"] for layer in part["layers"]] == [False, True, False, True, False]
    assert [layer["thickness_nm"] for layer in part["layers"]] == [75.0, 50.0, 75.0, 50.0, 250.0]
    assert [layer["share"] for layer in part["layers"]] == pytest.approx([0.15, 0.1, 0.15, 0.1, 0.5], rel=1e-15)
    assert part["totals"][0] == {"material": "constant 2", "layers": 3, "thickness_nm": 400.0, "share": 0.8}
    assert part["incident_angle_deg"] == [0.0, 45.0]
    assert metal["substrate_thickness_mm"] is None
    assert metal["layers"][0]["quarter_waves"] is None
    assert metal["exit"] == metal["substrate"] == "constant 1.5"


def test_a_result_tells_what_it_was_made_from(folder, capsys):
    design = fs.load_design("part.toml")
    fs.save_design(design.with_thickness(design.stack.thickness_nm * 1.01), "result.toml")
    changes = [
        ("part.toml", PART, "made from part.toml"),
        ("part.toml", PART.replace("two faces", "other"), "made from part.toml, which has changed since"),
        ("gone.toml", PART, "made from part.toml, which is not there"),
    ]
    for name, text, line in changes:
        (folder / "part.toml").rename(folder / name)
        (folder / name).write_text(text)
        assert main(["show", "result.toml"]) == 0
        assert capsys.readouterr().out.splitlines()[1] == line


def test_keys_are_listed(capsys):
    assert main(["show", "--keys"]) == 0
    assert capsys.readouterr().out == f"{help_text()}\n"


def test_no_design_is_an_error(capsys):
    assert main(["show"]) == 2
    assert capsys.readouterr().err == "filmstack: show: expected DESIGN, got none. See filmstack show --help\n"


@pytest.mark.parametrize("ending", ["png", "svg", "pdf"])
def test_a_picture_is_written(ending, folder, capsys):
    assert main(["show", "part.toml", "metal.toml", "--plot", f"profile.{ending}"]) == 0
    assert capsys.readouterr().out.endswith(f"\n\nwrote profile.{ending}\n")
    start = {"png": b"\x89PNG", "svg": b"<?xml", "pdf": b"%PDF"}[ending]
    assert (folder / f"profile.{ending}").read_bytes().startswith(start)


def test_too_many_designs_for_a_picture(folder, capsys):
    assert main(["show", *["part.toml"] * 7, "--plot", "a.png"]) == 2
    assert capsys.readouterr().err == "filmstack: --plot: expected at most 6 designs in one picture, got 7\n"
    assert not (folder / "a.png").exists()


def steps(axes):
    """Height of each line of steps of a panel, and the depths where it changes."""
    return [(patch.get_data().values.tolist(), patch.get_data().edges.tolist()) for patch in axes.patches]


def test_the_profile_is_the_index_against_depth(folder):
    figure = profile_figure([fs.load_design("part.toml")])
    front, back = figure.axes
    ((heights, edges),) = steps(front)
    assert heights == [1.0, 2.0, 1.5, 2.0, 1.5, 1.5]
    assert edges[1:-1] == pytest.approx([0.0, 75.0, 125.0, 200.0, 250.0], abs=1e-9)
    ((heights, edges),) = steps(back)
    assert heights == [1.5, 2.0, 1.0]
    assert edges[1:-1] == [0.0, 250.0]
    assert front.get_title(loc="left") == "\nfront face"
    assert [text.get_text() for text in figure.legends[0].get_texts()] == ["air", "constant 2", "constant 1.5"]


def test_k_of_a_metal_is_drawn(folder):
    (axes,) = profile_figure([fs.load_design("metal.toml")]).axes
    (n, _), (k, _) = steps(axes)
    assert n == [1.0, 0.05, 1.5]
    assert k == [0.0, 4.0, 0.0]


def test_materials_differ_in_grey_too():
    # Without colour a material is told by its hatching: next to each other no two are alike.
    design = fs.load_design(shipped_folder("designs") / "graded-antireflection.toml")
    (axes,) = profile_figure([design]).axes
    fills = [part for part in axes.collections if isinstance(part, PolyCollection)]
    hatches = [fill.get_hatch() for fill in fills]
    assert len(fills) == 14
    assert all(left != right for left, right in pairwise(hatches))
    looks = {(fill.get_hatch(), tuple(fill.get_facecolor()[0])) for fill in fills}
    assert len(looks) == 14


def test_faces_of_a_plate(folder):
    front, back = faces(fs.load_design("part.toml"))
    assert [len(face.films) for face in (front, back)] == [4, 1]
    assert front.behind is back.before


def test_plot_of_a_design(folder):
    axes = fs.load_design("metal.toml").plot()
    assert axes.get_title(loc="left") == "metal"
    assert np.isfinite(axes.get_xlim()).all()
