"""A person's own table of optical constants: CSV -> here -> `tables.Table`.

Dialects are read, assumptions told in words in the provenance, and whatever would be a guess is
refused with file, line, what was found and expected. All faults of a file come in one go.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from filmstack.errors import FilmstackError, MaterialFileError, all_faults
from filmstack.materials.material import Provenance
from filmstack.materials.reader_columns import Columns, find_columns
from filmstack.materials.reader_rows import Rows, checked_rows
from filmstack.materials.tables import Table, printed_tolerance

if TYPE_CHECKING:
    from filmstack.arraytypes import FloatArray

_COMMENTS = ("#", "%", "//", "!")
_SEPARATORS = {";": "semicolons", "\t": "tabs", "|": "bars", ",": "commas"}
_COMMAS = "Commas can not both separate and mark decimals: separate the columns by semicolons"
_MOST_FAULTS = 10
_FEW_ROWS = 6
"""So many rows are too few for a smooth curve in any case."""
_DESCRIPTION = ("key", "label", "source", "form", "temperature", "status")


@dataclass
class Text:
    """A file taken apart: the header line, the rows as cells, and what was assumed on the way."""

    path: Path
    header: list[str]
    header_line: int
    cells: list[list[str]]
    lines: list[int]
    separator: str | None
    """None: blanks."""
    comma: bool
    """The decimal sign is a comma."""
    described: dict[str, str]
    """What `# key: value` lines say."""
    notes: list[str] = field(default_factory=list)


def read_material(path: Path, allow_gain: bool = False) -> Table:
    """Read a person's table of optical constants.

    Parameters
    ----------
    path : Path
        CSV with a header of `wavelength_nm`, `wavelength_um`, `energy_ev` or `wavenumber_per_cm`, and `n` and `k`
        (k may be missing) or `eps_real` and `eps_imag`, both positive for absorption.
    allow_gain : bool
        Permit k < 0.

    Returns
    -------
    Table
        Its provenance tells the file and every assumption.

    Raises
    ------
    MaterialFileError
        With file, line, found, expected and what to do; all faults at once.
    """
    text = split_text(path)
    faults: list[FilmstackError] = []
    columns = find_columns(text.path, text.header, text.header_line, faults)
    _refuse(faults)
    assert columns is not None
    values = _numbers(text, columns, faults)
    _judge_commas(text, columns, values, faults)
    rows = checked_rows(path, values, text.lines, columns, allow_gain, faults)
    _refuse(faults)
    assert rows is not None
    return _table(text, columns, rows, allow_gain)


def _refuse(faults: list[FilmstackError]) -> None:
    if len(faults) > _MOST_FAULTS:
        more = len(faults) - _MOST_FAULTS
        faults = [*faults[:_MOST_FAULTS], MaterialFileError(f"{more} more fault{'s' if more > 1 else ''} in the file")]
    if faults:
        raise all_faults(faults)


def split_text(path: Path) -> Text:
    """Decode a file and split it into header and cells."""
    text, encoding_notes = _decode(path)
    described: dict[str, str] = {}
    kept: list[tuple[int, str]] = []
    comments = 0
    for number, line in enumerate(text.splitlines(), start=1):
        stripped = line.strip()
        if stripped.startswith(_COMMENTS):
            comments += 1
            key, _, value = stripped.lstrip("#%/! ").partition(":")
            if key.strip().lower() in _DESCRIPTION and value.strip():
                described[key.strip().lower()] = value.strip()
        elif stripped.strip(",;\t ") and not _names_separator(stripped):
            kept.append((number, line))
    if not kept:
        raise MaterialFileError(
            str(path),
            "expected a header such as wavelength_nm,n,k and rows below it, found no line of data",
            "Fill in the table",
        )
    (header_line, header), *body = kept
    separator = next((mark for mark in _SEPARATORS if mark in header), None)
    cells = [_split(line, separator) for _, line in body]
    comma = any("," in cell for row in cells for cell in row)  # between commas: in quoted cells
    notes = list(encoding_notes)
    if separator != ",":
        notes.append(f"separated by {_SEPARATORS[separator] if separator else 'blanks'}")
    if comma:
        notes.append("decimal comma")
    if comments and not described:
        notes.append(f"{comments} comment line{'s' if comments > 1 else ''} skipped")
    names = _split(header, separator)
    while len(names) > 1 and not names[-1]:
        names.pop()  # a separator at the end of the line
    lines = [number for number, _ in body]
    return Text(path, names, header_line, cells, lines, separator, comma, described, notes)


def _names_separator(line: str) -> bool:
    """Tell a line such as `sep=;`, by which a spreadsheet names its separator."""
    return line.lower().startswith("sep=") and len(line) <= 5


def _split(line: str, separator: str | None) -> list[str]:
    if separator is None:
        return line.split()
    cells = next(csv.reader([line], delimiter=separator, skipinitialspace=True))
    return [cell.strip() for cell in cells]


def _decode(path: Path) -> tuple[str, list[str]]:
    try:
        raw = path.read_bytes()
    except OSError as error:
        raise MaterialFileError(
            str(path), f"the file can not be read ({error.strerror})", "Correct the path or its rights"
        ) from None
    for mark, encoding, name in (
        (b"\xef\xbb\xbf", "utf-8-sig", "byte-order mark"),
        (b"\xff\xfe", "utf-16", "UTF-16"),
        (b"\xfe\xff", "utf-16", "UTF-16"),
    ):
        if raw.startswith(mark):
            return _decoded(path, raw, encoding), [name]
    if raw[1:2] == b"\0" and raw[:1] != b"\0":
        return _decoded(path, raw, "utf-16-le"), ["UTF-16 without a byte-order mark"]
    if raw[:1] == b"\0" and raw[1:2] != b"\0":
        return _decoded(path, raw, "utf-16-be"), ["UTF-16 without a byte-order mark"]
    if b"\0" in raw:
        raise _no_text(path)
    try:
        return raw.decode("utf-8"), []
    except UnicodeDecodeError:
        return raw.decode("latin-1"), ["letters beyond ASCII read as Latin-1"]


def _decoded(path: Path, raw: bytes, encoding: str) -> str:
    try:
        return raw.decode(encoding)
    except UnicodeDecodeError:
        raise _no_text(path) from None


def _no_text(path: Path) -> MaterialFileError:
    return MaterialFileError(
        str(path), "expected a text file, found bytes that are no text", "Save the table as CSV (UTF-8)"
    )


def _numbers(text: Text, columns: Columns, faults: list[FilmstackError]) -> FloatArray:
    """Return the wanted columns as numbers, shape (column, row); every cell that is none is a fault."""
    import pandas as pd

    width = len(text.header)
    cells, good = [], []
    for row, (line, number) in enumerate(zip(text.cells, text.lines, strict=True)):
        while len(line) > width and not line[-1]:
            line = line[:-1]  # a separator at the end of the line
        if len(line) == width:
            cells.append(line)
            good.append(row)
        else:
            faults.append(_ragged(text, line, number))
    if faults:
        return np.empty((len(columns.used), 0))
    frame = pd.DataFrame(cells, columns=range(width), dtype=str)[list(columns.used)]
    if text.comma and frame.apply(lambda column: column.str.contains(".", regex=False)).to_numpy().any():
        faults.append(_mixed(text, columns))
        return np.empty((len(columns.used), 0))
    if text.comma:
        frame = frame.apply(lambda column: column.str.replace(",", ".", regex=False))
    numbers = frame.apply(lambda column: pd.to_numeric(column, errors="coerce"))
    values = numbers.to_numpy(dtype=float).T.reshape(len(columns.used), len(cells))
    for row, column in zip(*np.nonzero(~np.isfinite(values.T)), strict=True):
        place = columns.used[column]
        found = cells[row][place]
        faults.append(
            MaterialFileError(
                f"{text.path}: line {text.lines[row]}: {text.header[place]}",
                f"expected a number, found {found!r}" if found else "expected a number, found nothing",
                "Correct the cell or delete the row",
            )
        )
    return np.asarray(values)


def _ragged(text: Text, line: list[str], number: int) -> MaterialFileError:
    extra = len(line) - len(text.header)
    doubled = text.separator == "," and extra > 0 and all(cell.isdigit() for cell in line)
    advice = _COMMAS if doubled else "Correct the row"
    return MaterialFileError(
        f"{text.path}: line {number}",
        f"expected {len(text.header)} cells as in the header, found {len(line)}",
        advice,
    )


def _judge_commas(text: Text, columns: Columns, values: FloatArray, faults: list[FilmstackError]) -> None:
    """Refuse n = 1.46 written as `1,46` between commas, where the column k would take the 46."""
    if faults or text.separator != "," or columns.permittivity or len(columns.used) < 3 or not values.size:
        return
    digits = all(line[place].isdigit() for line in text.cells for place in columns.used[1:])
    if digits and values[1].max() < 10.0 <= values[2].max():
        line = text.cells[0]
        faults.append(
            MaterialFileError(
                f"{text.path}: line {text.lines[0]}",
                f"expected n and k, found {line[columns.used[1]]} and {line[columns.used[2]]}, "
                "which look like one number with a decimal comma",
                _COMMAS,
            )
        )


def _mixed(text: Text, columns: Columns) -> MaterialFileError:
    row, cell = next(
        (row, line[place]) for row, line in enumerate(text.cells) for place in columns.used if "," in line[place]
    )
    return MaterialFileError(
        f"{text.path}: line {text.lines[row]}",
        f"expected one decimal sign, found {cell!r} beside numbers with a decimal point",
        "Write no thousands separators, and one decimal sign throughout",
    )


def _table(text: Text, columns: Columns, rows: Rows, allow_gain: bool) -> Table:
    """Return the material, with every assumption in words."""
    tolerance = _tolerance(text, columns, rows)
    low, high = float(rows.wavelength_nm[0]), float(rows.wavelength_nm[-1])
    told = ", ".join([f"read {rows.read} rows, {low:g} to {high:g} nm", *text.notes, *columns.notes, *rows.notes])
    said = text.described
    provenance = Provenance(
        key=text.path.name,
        label=said.get("label", f"{text.path.stem}, your file {text.path.name}"),
        source=f"your file {text.path}" + (f": {said['source']}" if "source" in said else ""),
        form=said.get("form", ""),
        range_nm=(low, high),
        temperature=said.get("temperature", ""),
        status=said.get("status", "as given by the file"),
        notes=(told,),
    )
    table = Table(provenance, rows.wavelength_nm, rows.n, rows.k, tolerance, allow_gain=allow_gain)
    moved = float(np.max(np.abs(table.n_curve.derivative(table.energy_ev, 0) - table.n[::-1])))
    if moved > 1e-5:
        told = f"{told}, n drawn smoothly, at most {moved:.1g} from the rows"
        table.provenance = replace(provenance, notes=(told,))
    if len(rows.n) > _FEW_ROWS and table.derivative_order < 2:
        told = f"{told}, n drawn from row to row without a smooth second derivative (its rows scatter or jump by more "
        told += "than their last digit: give n with the digits that are certain)"
        table.provenance = replace(provenance, notes=(told,))
    table.reading_report = told
    return table


def _tolerance(text: Text, columns: Columns, rows: Rows) -> FloatArray:
    """Return half a unit of the last digit of n, or what that of eps_real means for n."""
    place = columns.used[1]
    printed = printed_tolerance([row[place].replace(",", ".") for row in text.cells])[rows.order]
    if columns.permittivity:
        printed = printed / (2.0 * np.maximum(np.hypot(rows.n, rows.k), 1e-3))
    return np.clip(printed, 1e-9, None)
