"""The library of materials: a name -> here -> a `Material`.

A name is a plain name ("SiO2"), a key ("SiO2/ion-assisted-2013"), a path to a table (CSV), or the name of a
CSV beside the design. A user's own file wins over the library. A new default is one line of `DEFAULTS`;
a new table is one CSV in the shipped folder, with its header.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from filmstack.errors import MaterialNotFoundError
from filmstack.materials.material import Material, Provenance
from filmstack.materials.shipped import shipped_folder

if TYPE_CHECKING:
    import os
    from collections.abc import Mapping

DEFAULTS: Mapping[str, str] = {
    # films: no residual k where the film is transparent, and a wide range
    "SiO2": "SiO2/sputtered-2013",
    "TiO2": "TiO2/evaporated-2015",
    "Ta2O5": "Ta2O5/evaporated-2015",
    "Nb2O5": "Nb2O5/sputtered-2013",
    "HfO2": "HfO2/evaporated-2015",
    "Al2O3": "Al2O3/evaporated-2015",
    "Sc2O3": "Sc2O3/sputtered-2018",
    "ZrO2": "ZrO2/cubic-2004",
    "MgF2": "MgF2/evaporated-2017",
    "LaF3": "LaF3/evaporated-2020",
    "YbF3": "YbF3/evaporated-2020",
    "GdF3": "GdF3/evaporated-2023",
    "CeF3": "CeF3/evaporated-2017",
    "ThF4": "ThF4/evaporated-1968",
    "Y2O3": "Y2O3/crystal-1968",
    "MgO": "MgO/crystal-1952",
    "ZnO": "ZnO/crystal-ordinary-1965",
    "SiO": "SiO/evaporated-1954",
    "WO3": "WO3/film-2020",
    "VO2": "VO2/insulating-2023",
    "Si3N4": "Si3N4/low-pressure-cvd-2015",
    "SiNx": "SiNx/plasma-cvd-2022",
    "AlN": "AlN/sputtered-2021",
    "GaN": "GaN/wurtzite-ordinary-1973",
    "TiN": "TiN/sputtered-2023",
    "ITO": "ITO/film-2024",
    "ZnS": "ZnS/evaporated-formula-2020",
    "ZnSe": "ZnSe/cvd-1984",
    "PbTe": "PbTe/crystal-1990",
    "CdTe": "CdTe/crystal-1964",
    # semiconductors
    "Ge": "Ge/crystal-2016",
    "Si": "Si/crystal-2017",
    "amorphous silicon": "Si/amorphous-fit-1972",
    "GaAs": "GaAs/crystal-2003",
    "AlAs": "AlAs/epitaxial-1971",
    "GaP": "GaP/crystal-1965",
    "InP": "InP/crystal-1965",
    "diamond": "C/diamond-1923",
    # substrates and windows
    "glass": "glass/crown-517642",
    "crown glass": "glass/crown-517642",
    "flint glass": "glass/flint-620364",
    "dense flint glass": "glass/dense-flint-785258",
    "soda-lime glass": "glass/soda-lime-1985",
    "fused silica": "SiO2/bulk-1965",
    "quartz": "SiO2/quartz-ordinary-1999",
    "sapphire": "Al2O3/sapphire-ordinary-1986",
    "rutile": "TiO2/rutile-ordinary-1951",
    "CaF2": "CaF2/crystal-1963",
    "BaF2": "BaF2/crystal-1964",
    "LiF": "LiF/crystal-1976",
    "SrF2": "SrF2/crystal-1978",
    "PbF2": "PbF2/crystal-1969",
    "NaCl": "NaCl/crystal-1976",
    "KBr": "KBr/crystal-1976",
    "As2S3": "As2S3/glass-1958",
    "LiNbO3": "LiNbO3/congruent-ordinary-1997",
    "SrTiO3": "SrTiO3/crystal-1965",
    "MgAl2O4": "MgAl2O4/spinel-1991",
    "TlBrI": "TlBrI/mixed-crystal-1956",
    "PMMA": "PMMA/bulk-2015",
    "polycarbonate": "polycarbonate/bulk-2009",
    "polystyrene": "polystyrene/bulk-2009",
    "PDMS": "PDMS/bulk-2009",
    "water": "H2O/water-1973",
    "moist air": "air/moist-1996",
    # metals: the lower-loss of the films measured as deposited (Cu: of the evaluated data)
    "Ag": "Ag/evaporated-1972",
    "Al": "Al/evaporated-1995",
    "Au": "Au/evaporated-2012",
    "Cu": "Cu/re-evaluated-2015",
    "Cr": "Cr/evaporated-1974",
    "Ni": "Ni/evaporated-1974",
    "Ti": "Ti/evaporated-1974",
    "Pd": "Pd/evaporated-1974",
    "Pt": "Pt/evaporated-2024",
    "W": "W/crystal-1975",
    "Mo": "Mo/bulk-1987",
    "Rh": "Rh/bulk-1977",
    "Ir": "Ir/sputtered-2022",
    "Be": "Be/lorentz-drude-1998",
    "steel": "steel/austenitic-1982",
}
"""Key that a plain name stands for."""

TABLE_FILES = (".csv", ".txt", ".tsv", ".dat", ".xls", ".xlsx", ".ods")
"""What the path of a table ends in; the reader tells that a spreadsheet has to be saved as CSV first."""

UNITY = {"air": "air", "vacuum": "vacuum"}
"""Media of index 1."""


@dataclass(frozen=True)
class MaterialRecord:
    """One line of the library's list."""

    key: str
    """What a design file says."""
    label: str
    """For people, with author and year."""
    form: str
    """Bulk, evaporated film and so on."""
    range_nm: tuple[float, float]
    """Vacuum wavelengths covered. [nm]"""
    default_of: tuple[str, ...]
    """Plain names that stand for this key."""
    kind: str
    """`table`, `formula` or `constant`."""
    source: str
    """Full citation."""
    status: str
    """How the numbers were obtained and checked."""
    notes: tuple[str, ...]
    """Warnings."""


def material(
    name: str | os.PathLike[str], folder: str | os.PathLike[str] | None = None, allow_gain: bool = False
) -> Material:
    """Return a material of the library or of a user's own file.

    Parameters
    ----------
    name : str or path
        Plain name ("SiO2"), key ("SiO2/ion-assisted-2013"), path to a CSV, or the name of a CSV in `folder`.
    folder : path, optional
        Folder of the design: NAME.csv there, or in its folder `materials`, wins over the library.
    allow_gain : bool
        Permit k < 0 in a user's file.

    Returns
    -------
    Material
        The same object for the same name, as long as the file is the same.

    Raises
    ------
    MaterialNotFoundError
        If there is no such material; the message names the nearest known one.
    MaterialFileError
        If the user's file can not be read as a table of optical constants.

    Examples
    --------
    >>> material("SiO2/ion-assisted-2013").label
    'SiO2, ion-assisted film (Gao 2013)'
    """
    word = str(name)
    path = own_file(word, folder)
    if path is not None:
        changed = path.stat()
        return _user_table(path, path.resolve(), changed.st_mtime_ns, changed.st_size, allow_gain)
    if word in UNITY or word in DEFAULTS:
        return _shipped(DEFAULTS.get(word, word))
    if _is_table(word) or _is_formula(word):
        return _shipped(word)
    raise _not_found(word, folder)


def list_materials() -> tuple[MaterialRecord, ...]:
    """Return what the library holds, in the order of the keys.

    Returns
    -------
    tuple of MaterialRecord
        Read from the headers only: no table is loaded.

    Examples
    --------
    >>> [record.key for record in list_materials() if "TiO2" in record.default_of]
    ['TiO2/evaporated-2015']
    """
    return _records()


@cache
def _records() -> tuple[MaterialRecord, ...]:
    from filmstack.materials.models.registry import entry_provenance, formula_entries
    from filmstack.materials.tables import read_header, table_provenance

    tables = [table_provenance(read_header(path)) for path in sorted(shipped_folder("materials").glob("*.csv"))]
    found = [_record(provenance, "table") for provenance in tables]
    found += [_record(entry_provenance(key, entry), "formula") for key, entry in formula_entries().items()]
    found += [_record(_unity_provenance(name), "constant") for name in UNITY]
    return tuple(sorted(found, key=lambda record: record.key.lower()))


def _record(provenance: Provenance, kind: str) -> MaterialRecord:
    p = provenance
    names = tuple(name for name, key in DEFAULTS.items() if key == p.key)
    return MaterialRecord(p.key, p.label, p.form, p.range_nm, names, kind, p.source, p.status, p.notes)


def own_file(word: str, folder: str | os.PathLike[str] | None) -> Path | None:
    """Return the user's own file of a name, if there is one.

    Parameters
    ----------
    word : str
        Name, key or path, as for `material`.
    folder : path, optional
        Folder of the design.

    Returns
    -------
    Path or None
    """
    if word.lower().endswith(TABLE_FILES):
        given = Path(word).expanduser()
        places = [given] if folder is None else [Path(folder) / given, Path(folder) / "materials" / given, given]
        for place in places:
            if place.is_file():
                return place
        return None
    if folder is None or "/" in word or "\\" in word:
        return None
    for place in (Path(folder) / f"{word}.csv", Path(folder) / "materials" / f"{word}.csv"):
        if place.is_file() and place.parent.resolve() != shipped_folder("materials"):
            return place
    return None


@cache
def _user_table(path: Path, resolved: Path, changed: int, size: int, allow_gain: bool) -> Material:
    """Read a user's file once; its place, time and size tell whether it is still the same file."""
    from filmstack.materials.reader import read_material

    return read_material(path, allow_gain=allow_gain)


def _is_table(key: str) -> bool:
    from filmstack.materials.tables import table_path

    return "/" in key and table_path(key).is_file()


def _is_formula(key: str) -> bool:
    from filmstack.materials.models.registry import formula_entries

    return key in formula_entries()


@cache
def _shipped(key: str) -> Material:
    if key in UNITY:
        from filmstack.materials.models.constant import Constant

        return Constant(1.0, 0.0, _unity_provenance(key))
    if _is_table(key):  # asked first: reading all formula entries takes longer than reading one table
        from filmstack.materials.tables import shipped_table

        return shipped_table(key)
    from filmstack.materials.models.registry import build_formula, formula_entries

    return build_formula(key, formula_entries()[key])


def _unity_provenance(name: str) -> Provenance:
    note = ("index 1 exactly",)
    return Provenance(
        key=name, label=UNITY[name], source="definition", form="gas or vacuum", status="exact", notes=note
    )


def _not_found(word: str, folder: str | os.PathLike[str] | None) -> MaterialNotFoundError:
    from filmstack.files.hints import nearest

    if word.lower().endswith(TABLE_FILES):
        place = f" in {folder} or its folder materials" if folder is not None else ""
        return MaterialNotFoundError(f"material {word!r}", f"no such file{place}", "Correct the path")
    lowered = {name.lower(): name for name in (*UNITY, *DEFAULTS, *(record.key for record in list_materials()))}
    advice = nearest(word.lower(), lowered, "filmstack materials lists all")
    start = "Did you mean "
    if advice.startswith(start):
        advice = f"{start}{lowered[advice[len(start) : -1]]}?"
    where = f" nor {word}.csv in {folder} or its folder materials" if folder is not None else ""
    return MaterialNotFoundError(f"material {word!r}", f"no such material in the library{where}", advice)
