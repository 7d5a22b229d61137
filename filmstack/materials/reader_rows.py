"""Whether the numbers of a person's table can be optical constants: numbers -> here -> `reader`."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from filmstack.errors import FilmstackError, MaterialFileError
from filmstack.materials.reader_columns import SPECTRAL, Columns

if TYPE_CHECKING:
    from filmstack.arraytypes import BoolArray, FloatArray, IntArray


_WIDEST_GAP = 100.0
"""Ratio of neighbours on the spectral axis from which they are of two units."""
_SOFT_X_RAYS = 25.0
"""Below this wavelength n of every medium is within a few per cent of 1, or less. [nm]"""
_NEAR_INFRARED = 3000.0
"""Below this wavelength no medium has an n or k above the next two: aluminium reaches k = 28 there. [nm]"""
_LARGEST_N, _LARGEST_K = 10.0, 60.0


@dataclass(frozen=True)
class Rows:
    """Checked rows, wavelength increasing."""

    wavelength_nm: FloatArray
    n: FloatArray
    k: FloatArray
    order: IntArray
    """Place in the file of each row."""
    read: int
    notes: tuple[str, ...]


def checked_rows(
    path: Path,
    values: FloatArray,
    lines: Sequence[int],
    columns: Columns,
    allow_gain: bool,
    faults: list[FilmstackError],
) -> Rows | None:
    """Return rows in rising wavelength; what is wrong with them goes to `faults`."""
    if faults:
        return None
    if values.shape[1] < 2:
        count = "one row" if values.shape[1] else "none"
        faults.append(
            MaterialFileError(
                str(path),
                f"expected at least two rows below the header, found {count}",
                "For an index without dispersion write it twice, at the ends of its range",
            )
        )
        return None
    axis = values[0]
    _judge_axis(path, axis, lines, columns, faults)
    if faults:
        return None
    n, k = _constants(values, columns)
    _judge_signs(path, n, k, values, lines, columns, allow_gain, faults)
    wavelength = np.asarray(SPECTRAL[columns.spectral].to_nm(axis))
    if not faults:
        _judge_kind(path, wavelength, n, k, values, columns, faults)
    if not faults:
        _judge_size(path, wavelength, n, k, axis, lines, columns, faults)
    order = np.argsort(wavelength, kind="stable")
    repeated = _repeated(path, axis, values, order, lines, columns, faults)
    if faults:
        return None
    notes = []
    if np.all(np.diff(axis) < 0.0):
        notes.append("descending order turned")
    elif np.any(np.diff(axis) < 0.0):
        notes.append("rows put in order")
    if repeated.any():
        dropped = int(repeated.sum())
        notes.append(f"{dropped} repeated row{'s' if dropped > 1 else ''} dropped")
    order = order[~repeated]
    return Rows(wavelength[order], n[order], k[order], order, len(axis), tuple(notes))


def _judge_axis(
    path: Path, axis: FloatArray, lines: Sequence[int], columns: Columns, faults: list[FilmstackError]
) -> None:
    kind = SPECTRAL[columns.spectral]
    faults += [
        MaterialFileError(
            f"{path}: line {lines[row]}: {columns.spectral}",
            f"expected a number > 0 {kind.unit}, found {axis[row]:g}",
            "Correct the cell",
        )
        for row in np.flatnonzero(axis <= 0.0).tolist()
    ]
    if faults:
        return
    _judge_gaps(path, axis, lines, columns, faults)
    if axis.max() < kind.low or axis.min() > kind.high:
        meant = kind.below if axis.max() < kind.low else kind.above
        faults.append(
            MaterialFileError(
                f"{path}: line {lines[0]}: {columns.spectral}",
                f"expected numbers in {kind.unit}, found {axis.min():g} to {axis.max():g}",
                f"If they are of another unit, name the column {meant}" if meant else f"Write them in {kind.unit}",
            )
        )


def _judge_gaps(
    path: Path, axis: FloatArray, lines: Sequence[int], columns: Columns, faults: list[FilmstackError]
) -> None:
    """Refuse rows of two units: 0.5 beside 400. Two rows alone may span what they like."""
    order = np.argsort(axis, kind="stable")
    rising = axis[order]
    gap = int(np.argmax(rising[1:] / rising[:-1]))
    if len(axis) < 3 or rising[gap + 1] < _WIDEST_GAP * rising[gap]:
        return
    odd, other = (gap, gap + 1) if gap + 1 <= len(axis) // 2 else (gap + 1, gap)
    faults.append(
        MaterialFileError(
            f"{path}: line {lines[order[odd]]}: {columns.spectral}",
            f"expected numbers of one unit, found {rising[odd]:g} beside {rising[other]:g}",
            "Correct the cell, or write all rows in one unit",
        )
    )


def _constants(values: FloatArray, columns: Columns) -> tuple[FloatArray, FloatArray]:
    """Return n and the positive k of each row."""
    first = values[1]
    second = values[2] if len(values) > 2 else np.zeros_like(first)
    if not columns.permittivity:
        return first, second
    root = np.sqrt(first + 1j * second)
    return np.asarray(root.real), np.asarray(root.imag)


def _judge_signs(
    path: Path,
    n: FloatArray,
    k: FloatArray,
    values: FloatArray,
    lines: Sequence[int],
    columns: Columns,
    allow_gain: bool,
    faults: list[FilmstackError],
) -> None:
    def fault(row: int, name: str, found: float, advice: str) -> None:
        faults.append(
            MaterialFileError(f"{path}: line {lines[row]}: {name}", f"expected a number >= 0, found {found:g}", advice)
        )

    for row in np.flatnonzero(n < 0.0).tolist():
        fault(row, "n", n[row], "Correct the cell")
    if allow_gain:
        return
    name, negative = ("eps_imag", values[-1]) if columns.permittivity else ("k", k)
    rows = np.flatnonzero(negative < 0.0).tolist()
    if len(rows) > 1 and len(rows) == np.count_nonzero(negative):
        row = rows[0]
        fault(row, name, negative[row], "Every k is negative: write absorption as a positive number")
        return
    for row in rows:
        fault(int(row), name, negative[row], "Absorption is positive; a medium with gain needs allow_gain=True")


def _judge_kind(
    path: Path,
    wavelength_nm: FloatArray,
    n: FloatArray,
    k: FloatArray,
    values: FloatArray,
    columns: Columns,
    faults: list[FilmstackError],
) -> None:
    """Refuse reflectance and transmittance in place of n and k. Below 120 nm every n is near or under 1."""
    if columns.permittivity or wavelength_nm.max() < 120.0:
        return
    total = n + k
    percent = np.all((total > 60.0) & (total <= 100.5))
    fraction = np.all((n <= 1.0) & (k <= 1.0) & (total <= 1.005))
    lone = len(values) == 2 and np.all(n < 1.0)
    if percent or fraction or lone:
        what = "percent" if percent else "fractions"
        found = f"n from {n.min():g} to {n.max():g}" + (
            f", k from {k.min():g} to {k.max():g}" if len(values) > 2 else ""
        )
        faults.append(
            MaterialFileError(
                str(path),
                f"expected optical constants, found {found}, which look like reflectance or transmittance in {what}",
                "Give n and k; if these are a medium's, give them as eps_real and eps_imag",
            )
        )


def _judge_size(
    path: Path,
    wavelength_nm: FloatArray,
    n: FloatArray,
    k: FloatArray,
    axis: FloatArray,
    lines: Sequence[int],
    columns: Columns,
    faults: list[FilmstackError],
) -> None:
    """Refuse constants that no medium has at their wavelength: a slip of the decimal sign, or of the unit."""
    soft = np.flatnonzero((wavelength_nm < _SOFT_X_RAYS) & (n > 1.2))
    if soft.size:
        row = int(soft[0])
        meant = " wavelength_um" if columns.spectral == "wavelength_nm" else " after it"
        faults.append(
            MaterialFileError(
                f"{path}: line {lines[row]}: n",
                f"expected n near 1 below {_SOFT_X_RAYS:g} nm, found {n[row]:g} at "
                f"{axis[row]:g} {SPECTRAL[columns.spectral].unit}",
                f"If the column {columns.spectral} is of another unit, name it{meant}",
            )
        )
        return
    for name, found, most in (("n", n, _LARGEST_N), ("k", k, _LARGEST_K)):
        faults += [
            MaterialFileError(
                f"{path}: line {lines[row]}: {name}",
                f"expected {name} below {most:g} at wavelengths below {_NEAR_INFRARED:g} nm, found {found[row]:g}",
                "Correct the cell; give no percent of reflectance or transmittance",
            )
            for row in np.flatnonzero((wavelength_nm < _NEAR_INFRARED) & (np.abs(found) > most)).tolist()
        ]


def _repeated(
    path: Path,
    axis: FloatArray,
    values: FloatArray,
    order: IntArray,
    lines: Sequence[int],
    columns: Columns,
    faults: list[FilmstackError],
) -> BoolArray:
    """Return which rows in rising order repeat the one before; those that disagree are faults."""
    same = np.append(False, np.diff(axis[order]) == 0.0)
    for place in np.flatnonzero(same).tolist():
        row, before = order[place], order[place - 1]
        if np.any(values[:, row] != values[:, before]):
            first, second = sorted((lines[row], lines[before]))
            faults.append(
                MaterialFileError(
                    f"{path}: line {second}",
                    f"expected one row for {columns.spectral} {axis[row]:g}, "
                    f"found another in line {first} that disagrees",
                    "Keep one of them",
                )
            )
    return np.asarray(same, dtype=bool)
