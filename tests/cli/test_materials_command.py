"""`filmstack materials`: the list and its filters, n and k, pictures, and the judgement of a file."""

# ruff: noqa: E501 - whole messages

import json

import pytest

from filmstack.cli.main import main
from filmstack.materials.library import list_materials


def said(capsys, *words):
    status = main(["materials", *words])
    captured = capsys.readouterr()
    return status, captured.out, captured.err


def test_the_list_names_every_material(capsys):
    status, out, _ = said(capsys)
    assert status == 0
    lines = out.splitlines()
    assert lines[0].split() == ["key", "plain", "name", "nm", "kind", "label"]
    records = list_materials()
    assert [line.split("  ")[0].strip() for line in lines[2 : 2 + len(records)]] == [record.key for record in records]
    assert lines[-1].startswith(f"{len(records)} materials. ")


def test_words_filter_by_name_and_source(capsys):
    keys = {one["key"] for one in json.loads(said(capsys, "sio2", "ion-assisted", "--json")[1])}
    assert keys == {"SiO2/ion-assisted-2013"}
    keys = {one["key"] for one in json.loads(said(capsys, "malitson", "--json")[1])}
    assert "SiO2/bulk-1965" in keys
    assert "Ag/evaporated-1972" not in keys


def test_covers_and_kind_filter(capsys):
    found = json.loads(said(capsys, "SiO2", "--covers", "0.4:6um", "--kind", "formula", "--json")[1])
    assert [one["key"] for one in found] == ["SiO2/bulk-1965"]
    for one in json.loads(said(capsys, "--covers", "700:400", "--json")[1]):
        assert one["range_nm"][0] <= 400.0
        assert one["range_nm"][1] is None or one["range_nm"][1] >= 700.0


def test_one_material_alone_is_described_in_full(capsys):
    assert said(capsys, "SiO2/ion-assisted-2013")[1].splitlines() == [
        "SiO2, ion-assisted film (Gao 2013)",
        "  key:         SiO2/ion-assisted-2013",
        "  form:        ion-assisted electron-beam film, 300 nm, on fused silica",
        "  wavelengths: 252 to 1250 nm",
        "  source:      L. Gao, F. Lemarchand, M. Lequime. Refractive index determination of SiO2 layer in",
        "               the UV/Vis/NIR range: spectrophotometric reverse engineering on single and bi-layer",
        "               designs. J. Europ. Opt. Soc. Rap. Public. 8, 13010 (2013)",
        "  status:      read from the stored CC0 compilation, not from the printed paper",
    ]


def test_values_stand_under_their_source(capsys):
    status, out, _ = said(capsys, "SiO2/ion-assisted-2013", "air", "--at", "550,1064")
    assert status == 0
    lines = out.splitlines()
    assert lines[0] == "SiO2, ion-assisted film (Gao 2013)"
    # check points of the table: n = 1.47909 at 550 nm, 1.47025 at 1064 nm, k = 0
    at = lines.index("  nm        n  k")
    assert lines[at + 2 : at + 5] == [" 550  1.47909  0", "1064  1.47025  0", ""]
    assert lines[at + 5] == "air"
    assert lines[-1] == "1064  1.00000  0"


def test_values_as_json(capsys):
    (found,) = json.loads(said(capsys, "Ag", "--at", "1.24:1.26:0.02um", "--json")[1])
    assert found["key"] == "Ag/evaporated-1972"
    assert found["wavelength_nm"] == pytest.approx([1240.0, 1260.0])
    assert found["source"].startswith("P. B. Johnson and R. W. Christy")
    assert all(k > 8.0 for k in found["k"])


@pytest.mark.parametrize("ending", ["png", "svg", "pdf"])
def test_a_plot_is_written(capsys, tmp_path, ending):
    file = tmp_path / f"n.{ending}"
    assert said(capsys, "SiO2", "TiO2", "Ag", "--plot", str(file), "--covers", "400:800") == (0, "", "")
    assert file.stat().st_size > 5_000


def test_the_source_stands_on_the_plot(capsys, tmp_path):
    from filmstack.materials.library import material
    from filmstack.report.material_plot import material_figure

    figure = material_figure([material("Ag"), material("glass")])
    text = " ".join(" ".join(item.get_text().split()) for item in figure.texts)
    assert "P. B. Johnson and R. W. Christy. Optical constants of the noble metals." in text
    assert len(figure.axes) == 2
    assert len(material_figure([material("glass")]).axes) == 1


def test_a_good_file_is_told_how_it_was_understood(capsys, tmp_path):
    path = tmp_path / "ours.csv"
    path.write_bytes(b"wavelength_nm;n\n320;1,52\n500;1,49\n1100;1,48\n")
    status, out, _ = said(capsys, "--check", str(path))
    assert status == 0
    assert out.splitlines() == [
        "ours.csv: can be used as a material",
        "  read 3 rows, 320 to 1100 nm, separated by semicolons, decimal comma, k taken as 0",
        "  n from 1.48 to 1.52, k from 0 to 0; 1 continuous derivative of n",
        "",
        "  nm        n  k",
        "----  -------  -",
        " 320  1.52000  0",
        " 500  1.49000  0",
        "1100  1.48000  0",
    ]
    checked = json.loads(said(capsys, "--check", str(path), "--json")[1])
    assert checked["n"] == [1.52, 1.49, 1.48]


def test_a_bad_file_ends_with_status_2(capsys, tmp_path):
    path = tmp_path / "ours.csv"
    path.write_bytes(b"wavelength_nm,n\n0.4,1.5\n0.8,1.4\n")
    assert said(capsys, "--check", str(path)) == (
        2,
        "",
        f"filmstack: {path}: line 2: wavelength_nm: expected numbers in nm, found 0.4 to 0.8. "
        "If they are of another unit, name the column wavelength_um\n",
    )


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (["unobtainium"], "materials: nothing in the library fits the words 'unobtainium'. filmstack materials lists all"),
        (["saphire"], "materials: nothing in the library fits the words 'saphire'. Did you mean sapphire?"),
        (
            ["--covers", "1:2", "--kind", "table"],
            "materials: nothing in the library fits 1 to 2 nm and the kind table. filmstack materials lists all",
        ),
        (["--covers", "400"], "--covers: expected LOW:HIGH, got '400'. For example 400:700 or 0.4:2um"),
        (["--covers", "400:400"], "--covers: expected two different wavelengths, got '400:400'"),
        (["--kind", "tables"], "--kind: expected table, formula or constant, got 'tables'. Did you mean table?"),
        (["--at", "550"], "--at: expected a material before it. For example: filmstack materials SiO2 --at ..."),
        (["SiO3", "Silber", "--at", "550"], None),
        (
            ["Ag", "--at", "5000"],
            "Ag, evaporated film (Johnson 1972): expected a wavelength from 187.9 to 1937 nm, got 5000 nm. "
            "Narrow the wavelengths or choose another source of this material",
        ),
        (["Ag", "--at", "550", "--kind", "table"], "--kind: filters the list: not with --at or --plot. Leave it out"),
        (["--check", "none.csv"], "--check: no such file: none.csv. Correct the path"),
        (["Ag", "--check", "none.csv"], "--check: expected alone or with --json. Use the path of the file as a NAME with --at"),
    ],
)  # fmt: skip
def test_wrong_words_end_with_status_2_and_one_message(capsys, words, message):
    status, out, err = said(capsys, *words)
    assert (status, out) == (2, "")
    if message is None:
        message = (
            "\n  material 'SiO3': no such material in the library. Did you mean SiO?\n"
            "  material 'Silber': no such material in the library. filmstack materials lists all"
        )
    assert err == f"filmstack: {message}\n".replace(": \n", ":\n")


def test_nothing_is_written_after_an_error(capsys, tmp_path):
    file = tmp_path / "n.png"
    assert said(capsys, "Ag", "--plot", str(file), "--covers", "3000:4000") == (
        2,
        "",
        "filmstack: --covers: Ag, evaporated film (Johnson 1972) is known from 187.9 to 1937 nm, got 3000 to 4000 nm. "
        "Ask for wavelengths inside\n",
    )
    assert not file.exists()
