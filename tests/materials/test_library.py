"""Names of materials: what a plain name stands for, a person's own files, and what is not found."""

import os
import subprocess
import sys
import textwrap

import numpy as np
import pytest

import filmstack as fs
from filmstack.materials.library import DEFAULTS, UNITY, list_materials

# n at a wavelength, as handbooks and catalogues print it: a default must be the material that people mean.
# Films: table of nominal indices (shipped standards, origin "table"), which vary with the process; dense films of
# HfO2 and Y2O3 lie 8 % above.
NOMINAL_FILMS = [
    ("SiO2", 550, 1.46), ("TiO2", 600, 2.29), ("Ta2O5", 550, 2.09), ("Nb2O5", 600, 2.22), ("HfO2", 500, 1.95),
    ("Al2O3", 500, 1.65), ("Sc2O3", 550, 1.89), ("ZrO2", 400, 2.10), ("MgF2", 550, 1.38), ("ZnS", 550, 2.35),
    ("ITO", 500, 2.05), ("SiO", 1000, 1.85), ("Y2O3", 500, 1.80),
]  # fmt: skip
# Bulk: d line of glass codes (517642: 1.517, 620364: 1.620, 785258: 1.785); the others from the handbooks, from memory.
BULK = [
    ("glass", 587.56, 1.5168, 5e-4), ("flint glass", 587.56, 1.6200, 1e-3), ("dense flint glass", 587.56, 1.7847, 1e-3),
    ("fused silica", 587.56, 1.4585, 1e-3), ("sapphire", 587.56, 1.768, 2e-3), ("CaF2", 587.56, 1.4338, 5e-4),
    ("BaF2", 587.56, 1.4744, 5e-4), ("water", 589.3, 1.333, 2e-3), ("Ge", 10000, 4.003, 5e-3),
    ("Si", 1550, 3.478, 5e-3), ("GaAs", 1550, 3.377, 1e-2), ("ZnSe", 10600, 2.403, 2e-3),
    ("diamond", 589.3, 2.417, 2e-3),
]  # fmt: skip


@pytest.mark.parametrize(("name", "wavelength", "n"), NOMINAL_FILMS)
def test_default_films_are_near_the_nominal_index(name, wavelength, n):
    assert fs.material(name).index(wavelength).real == pytest.approx(n, rel=0.09)


@pytest.mark.parametrize(("name", "wavelength", "n", "tolerance"), BULK)
def test_default_substrates_have_the_handbook_index(name, wavelength, n, tolerance):
    assert fs.material(name).index(wavelength).real == pytest.approx(n, abs=tolerance)


@pytest.mark.parametrize(
    "name",
    ["SiO2", "TiO2", "Ta2O5", "Nb2O5", "HfO2", "Al2O3", "MgF2", "ZrO2", "LaF3", "YbF3", "ZnS", "Si3N4", "SiNx", "Y2O3"],
)
def test_default_films_carry_no_residual_absorption(name):
    wavelength = np.linspace(650.0, 1100.0, 101)
    assert np.all(-fs.material(name).index(wavelength).imag <= 2e-8)


@pytest.mark.parametrize("name", ["Ag", "Al", "Au", "Cu"])
def test_mirror_metals_reflect(name):
    # at 1 um, as handbooks print it (from memory)
    published = {"Ag": 0.992, "Al": 0.940, "Au": 0.985, "Cu": 0.985}[name]
    index = fs.material(name).index(1000.0)
    assert abs((1 - index) / (1 + index)) ** 2 == pytest.approx(published, abs=0.012)


@pytest.mark.parametrize("name", [*DEFAULTS, *UNITY])
def test_every_plain_name_gives_one_material_with_a_source(name):
    first = fs.material(name)
    assert fs.material(name) is first
    assert first.key == DEFAULTS.get(name, name)
    assert fs.material(first.key) is first
    assert first.provenance.source
    assert first.provenance.status


def test_air_and_vacuum_are_one_exactly():
    for name in UNITY:
        assert np.all(fs.material(name).index([0.1, 550.0, 1e9]) == 1.0)


def test_the_list_holds_every_key_once():
    records = list_materials()
    keys = [record.key for record in records]
    assert len(set(keys)) == len(keys)
    assert set(DEFAULTS.values()) <= set(keys)
    assert {record.kind for record in records} == {"table", "formula", "constant"}
    for record in records:
        made = fs.material(record.key)
        assert (made.label, made.range_nm) == (record.label, record.range_nm)
        assert made.provenance.source == record.source
        assert made.provenance.notes == record.notes
    named = {name for record in records for name in record.default_of}
    assert named == set(DEFAULTS)


def test_labels_are_all_different():
    labels = [record.label for record in list_materials()]
    assert len(set(labels)) == len(labels)


@pytest.mark.parametrize(
    ("name", "advice"),
    [
        ("SiO3", "Did you mean SiO?"),
        ("sio2", "Did you mean SiO2?"),
        ("saphire", "Did you mean sapphire?"),
        ("SiO2/ion-asisted-2013", "Did you mean SiO2/ion-assisted-2013?"),
        ("unobtainium", "filmstack materials lists all"),
    ],
)
def test_unknown_names_tell_the_nearest_known_one(name, advice):
    with pytest.raises(fs.MaterialNotFoundError) as caught:
        fs.material(name)
    assert str(caught.value) == f"material {name!r}: no such material in the library. {advice}"


def test_missing_files_tell_where_was_looked(tmp_path):
    with pytest.raises(fs.MaterialNotFoundError) as caught:
        fs.material("ours.csv", folder=tmp_path)
    assert str(caught.value) == (
        f"material 'ours.csv': no such file in {tmp_path} or its folder materials. Correct the path"
    )
    with pytest.raises(fs.MaterialNotFoundError) as caught:
        fs.material("unobtainium", folder=tmp_path)
    assert str(caught.value) == (
        f"material 'unobtainium': no such material in the library nor unobtainium.csv in {tmp_path} "
        "or its folder materials. filmstack materials lists all"
    )


@pytest.mark.parametrize("place", ["", "materials"])
def test_an_own_file_wins_over_the_library(tmp_path, place):
    (tmp_path / place).mkdir(exist_ok=True)
    path = tmp_path / place / "SiO2.csv"
    path.write_text("wavelength_nm,n\n400,1.5\n800,1.4\n")
    ours = fs.material("SiO2", folder=tmp_path)
    assert ours is not fs.material("SiO2")
    assert ours is fs.material("SiO2", folder=tmp_path)
    assert ours is fs.material("SiO2.csv", folder=tmp_path)
    assert ours.label == "SiO2, your file SiO2.csv"
    assert ours.provenance.source == f"your file {path}"
    assert fs.material("TiO2", folder=tmp_path) is fs.material("TiO2")


def test_a_file_is_found_by_its_path(tmp_path, monkeypatch):
    (tmp_path / "own.csv").write_text("wavelength_nm,n\n400,1.5\n800,1.4\n")
    monkeypatch.chdir(tmp_path)
    assert fs.material("own.csv") is fs.material("own.csv", folder="elsewhere")
    assert fs.material(str(tmp_path / "own.csv")).index(400.0).real == 1.5


def test_a_changed_file_is_read_again(tmp_path):
    path = tmp_path / "own.csv"
    path.write_text("wavelength_nm,n\n400,1.5\n800,1.4\n")
    first = fs.material(path)
    path.write_text("wavelength_nm,n\n400,1.6\n800,1.4\n")
    os.utime(path, ns=(1, 1))
    assert fs.material(path) is not first
    assert fs.material(path).index(400.0).real == 1.6


def test_shipped_materials_need_neither_scipy_nor_pandas():
    code = """
        import sys
        import filmstack as fs
        for name in ("SiO2", "TiO2", "Ag", "glass", "air", "Si"):
            material = fs.material(name)
            material.index_derivatives([600.0, 700.0], 1)
        fs.list_materials()
        print([name for name in ("scipy", "pandas", "matplotlib", "numba") if name in sys.modules])
    """
    done = subprocess.run([sys.executable, "-c", textwrap.dedent(code)], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
