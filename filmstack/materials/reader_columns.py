"""What the columns of a person's table mean: header cells -> here -> `reader`.

A new unit of the spectral axis is one line of `SPECTRAL`.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import FilmstackError, MaterialFileError
from filmstack.files.hints import nearest

if TYPE_CHECKING:
    from filmstack.arraytypes import FloatArray


@dataclass(frozen=True)
class Spectral:
    """A kind of spectral axis."""

    unit: str
    to_nm: Callable[[FloatArray], FloatArray]
    low: float
    """Numbers all below this are of another unit."""
    high: float
    """Numbers all above this are of another unit."""
    below: str
    """Header that numbers all below `low` could belong to; empty if none."""
    above: str
    """Header that numbers all above `high` could belong to; empty if none."""


SPECTRAL = {
    "wavelength_nm": Spectral("nm", lambda x: x, 10.0, 1e7, "wavelength_um", ""),
    "wavelength_um": Spectral("um", lambda x: 1000.0 * x, 0.005, 120.0, "", "wavelength_nm"),
    "energy_ev": Spectral("eV", lambda x: PLANCK_EV_NM / x, 1e-4, 130.0, "", "wavelength_nm"),
    "wavenumber_per_cm": Spectral("cm^-1", lambda x: 1e7 / x, 10.0, 1e6, "energy_ev or wavelength_um", ""),
}
"""Header of the spectral column, in nm or converted to it."""

_MEANT = {
    "lambda_nm": "wavelength_nm", "wl_nm": "wavelength_nm", "lambda_um": "wavelength_um", "wl_um": "wavelength_um",
    "ev": "energy_ev", "cm_1": "wavenumber_per_cm", "wavenumber_cm": "wavenumber_per_cm",
    "refractive_index": "n", "index": "n", "re_n": "n", "extinction_coefficient": "k", "extinction": "k", "im_n": "k",
    "eps1": "eps_real", "eps_1": "eps_real", "eps2": "eps_imag", "eps_2": "eps_imag",
}  # fmt: skip
"""Other headers in use: named in the advice, not read in silence."""
_CONSTANTS = ("n", "k", "eps_real", "eps_imag")
_SPELLINGS = {
    "wavelength": "", "lambda": "", "wl": "", "energy": "", "wavenumber": "",
    "wavelength_micron": "wavelength_um", "wavelength_µm": "wavelength_um", "wavelength_μm": "wavelength_um",
    "wavenumber_cm_1": "wavenumber_per_cm", "wavenumber_1_cm": "wavenumber_per_cm", "photon_energy_ev": "energy_ev",
    "n_1": "n", "k_1": "k",
}  # fmt: skip


@dataclass(frozen=True)
class Columns:
    """Which cells of a row are read, and as what."""

    spectral: str
    used: tuple[int, ...]
    """Places of the spectral column, of n or eps_real, and of k or eps_imag where there is one."""
    permittivity: bool
    notes: tuple[str, ...]


def find_columns(path: Path, header: list[str], line: int, faults: list[FilmstackError]) -> Columns | None:
    """Return which columns are read; what is wrong with the header goes to `faults`."""
    where = f"{path}: line {line}"
    if all(_is_number(cell) for cell in header if cell):
        faults.append(
            MaterialFileError(
                where,
                f"expected a header such as wavelength_nm,n,k, found numbers ({', '.join(header)})",
                "Write a first line that names the columns and their unit",
            )
        )
        return None
    names = [_plain(cell) for cell in header]
    _judge_names(where, header, names, faults)
    if faults:
        return None
    spectral = next(name for name in names if name in SPECTRAL)
    permittivity = "eps_real" in names
    wanted = [spectral, *(("eps_real", "eps_imag") if permittivity else ("n", "k"))]
    used = tuple(names.index(name) for name in wanted if name in names)
    notes = []
    if spectral != "wavelength_nm":
        notes.append(f"{spectral} turned into nm")
    if permittivity:
        notes.append("n and k from eps_real and eps_imag, eps_imag > 0 taken as absorbing")
    elif "k" not in names:
        notes.append("k taken as 0")
    return Columns(spectral, used, permittivity, tuple(notes))


def _plain(cell: str) -> str:
    """Return a header cell as a plain name: "Wavelength (nm)" is wavelength_nm."""
    name = re.sub(r"[^\w]+", "_", cell.strip().strip("\"'").lower()).strip("_")
    return _SPELLINGS.get(name) or name


def _judge_names(where: str, header: list[str], names: list[str], faults: list[FilmstackError]) -> None:
    known = (*SPECTRAL, *_CONSTANTS)

    def fault(problem: str, advice: str) -> None:
        faults.append(MaterialFileError(where, problem, advice))

    if not any(name in known or name in _SPELLINGS or name in _MEANT for name in names) and not any(
        nearest(name, known, "") for name in names
    ):
        fault(
            f"expected a header such as wavelength_nm,n,k, found {' '.join(header)!r}",
            "Name the columns in the first line; lines of comment begin with #",
        )
        return
    for place, (cell, name) in enumerate(zip(header, names, strict=True)):
        if name in _SPELLINGS:
            fault(f"expected a column with its unit, found {cell!r}", f"Name it {nearest_unit(name)}")
        elif not name:
            fault(f"column {place + 1} has no name", "Name it or delete it")
        elif name in _MEANT:
            fault(f"unknown column {cell!r}", f"Name it {_MEANT[name]}")
        elif name not in known:
            advice = nearest(name, known, f"The columns are {', '.join(known)}")
            fault(f"unknown column {cell!r}", advice)
        elif name in names[:place]:
            fault(f"column {name} stands twice", "Keep one")
    if faults:
        return
    spectral = [name for name in names if name in SPECTRAL]
    if len(spectral) != 1:
        found = " and ".join(spectral) if spectral else "none"
        fault(f"expected one column of {', '.join(SPECTRAL)}, found {found}", "Name or keep one")
    if "n" in names and "eps_real" in names:
        fault("expected n and k, or eps_real and eps_imag, found both", "Keep one pair")
    elif "n" not in names and ("eps_real" not in names or "eps_imag" not in names):
        missing = "n"
        if "eps_real" in names or "eps_imag" in names:
            missing = "eps_imag" if "eps_real" in names else "eps_real"
        fault(f"expected a column {missing}, found {', '.join(header)}", "Add it")
    elif "n" in names and "eps_imag" in names:
        fault("expected n and k, or eps_real and eps_imag, found n and eps_imag", "Keep one pair")


def nearest_unit(name: str) -> str:
    """Return which headers a spectral name without unit could stand for."""
    if name.startswith("energy"):
        return "energy_ev"
    return "wavenumber_per_cm" if name.startswith("wavenumber") else "wavelength_nm or wavelength_um"


def _is_number(cell: str) -> bool:
    try:
        float(cell.replace(",", "."))
    except ValueError:
        return False
    return True
