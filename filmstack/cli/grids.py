"""Wavelengths and angles written on a command line: text -> numbers, without rounding of the grid.

START:STOP:STEP is counted in decimal arithmetic, so 0.4:0.7:0.1 ends at 0.7 and 400:700:0.1 holds
the very doubles that a person would type. A new unit is one line of `UNITS`.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from decimal import Decimal
from pathlib import Path

from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import FilmstackError

MOST_POINTS = 1_000_000

UNITS: dict[str, Callable[[Decimal], float]] = {
    "nm": float,
    "um": lambda value: float(value * 1000),
    "eV": lambda value: PLANCK_EV_NM / float(value),
    "cm-1": lambda value: float(10_000_000 / value),
}
"""Unit as written after the numbers, and what makes a vacuum wavelength in nm of it."""

COLUMNS = {"wavelength_nm": "nm", "wavelength_um": "um", "energy_ev": "eV", "wavenumber_per_cm": "cm-1"}
"""Heading of the column in a file of wavelengths, and its unit."""

_NUMBER = r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?"
_UNIT = "|".join(UNITS)
_VALUE = re.compile(rf"({_NUMBER})\s*({_UNIT})?", re.ASCII)
_FORMS = "expected START:STOP:STEP, a list such as 450,550,650 or a file"


def wavelengths(text: str, option: str = "--wavelength") -> tuple[float, ...]:
    """Return the vacuum wavelengths that a text tells, in its order.

    Parameters
    ----------
    text : str
        START:STOP:STEP, a list with commas, or the path of a file; a unit at the end, nm if none.
    option : str
        Name of the option, for the message.

    Returns
    -------
    tuple of float
        Vacuum wavelengths. [nm]

    Raises
    ------
    FilmstackError
        If the text is none of these, or a value is not above zero.

    Examples
    --------
    >>> wavelengths("0.4:0.7:0.1um")
    (400.0, 500.0, 600.0, 700.0)
    >>> wavelengths("550,1064")
    (550.0, 1064.0)
    >>> wavelengths("10000,5000cm-1")
    (1000.0, 2000.0)
    """
    if not _looks_like_numbers(text):
        return _wavelengths_of_file(text, option)
    values, unit = _numbers(text, option, _FORMS)
    return tuple(_to_nm(value, unit or "nm", option) for value in values)


def angles(text: str, option: str = "--angle") -> tuple[float, ...]:
    """Return the angles of incidence that a text tells, in its order.

    Parameters
    ----------
    text : str
        START:STOP:STEP or a list with commas, in degrees.
    option : str
        Name of the option, for the message.

    Returns
    -------
    tuple of float
        Angles of incidence, 0 to 90. [deg]

    Raises
    ------
    FilmstackError
        If the text is none of these, or an angle lies outside 0 to 90 degrees.

    Examples
    --------
    >>> angles("0:60:30")
    (0.0, 30.0, 60.0)
    """
    forms = "expected angles in degrees such as 45, 0,30,45 or 0:60:15"
    values, unit = _numbers(text, option, forms)
    if unit:
        raise FilmstackError(option, f"{forms}, got {text!r}", f"Leave out {unit}")
    for value in values:
        if not 0 <= value <= 90:
            raise FilmstackError(option, f"expected an angle of incidence from 0 to 90 degrees, got {value} degrees")
    return tuple(float(value) for value in values)


def _looks_like_numbers(text: str) -> bool:
    return re.match(rf"\s*{_NUMBER}\s*(?:{_UNIT})?\s*(?:[:,].*)?$", text) is not None


def _numbers(text: str, option: str, forms: str) -> tuple[list[Decimal], str]:
    """Return the numbers of a grid or list, and the one unit they are in ("" if none is written)."""
    ranged = ":" in text
    matches = [_VALUE.fullmatch(part.strip()) for part in text.split(":" if ranged else ",")]
    if any(match is None for match in matches) or (ranged and len(matches) != 3):
        raise FilmstackError(option, f"{forms}, got {text!r}")
    values = [Decimal(match[1]) for match in matches if match]
    units = [match[2] for match in matches if match]
    unit = units[-1] or ""
    if any(other is not None and other != unit for other in units):
        raise FilmstackError(option, f"expected one unit, got {text!r}", "Write the unit once, at the end")
    return (_grid(*values, text=text, option=option) if ranged else values), unit


def _grid(start: Decimal, stop: Decimal, step: Decimal, *, text: str, option: str) -> list[Decimal]:
    if step == 0:
        raise FilmstackError(option, f"expected a STEP other than 0, got {text!r}")
    if (stop - start) / step < 0:
        raise FilmstackError(
            option,
            f"expected a STEP that leads from START to STOP, got {text!r}",
            f"Write {start}:{stop}:{-step} or {stop}:{start}:{step}",
        )
    last = int((stop - start) / step)
    if last >= MOST_POINTS:
        raise FilmstackError(option, f"expected at most {MOST_POINTS:,} values, got {last + 1:,}", "Take a wider STEP")
    return [start + step * number for number in range(last + 1)]


def _to_nm(value: Decimal, unit: str, where: str) -> float:
    if not value > 0:
        raise FilmstackError(where, f"expected a value > 0 {unit}, got {value} {unit}")
    return UNITS[unit](value)


def _wavelengths_of_file(text: str, option: str) -> tuple[float, ...]:
    path = Path(text)
    if not path.is_file():
        raise FilmstackError(option, f"{_FORMS}, got {text!r}", "There is no file of that name")
    try:
        lines = path.read_text(encoding="utf-8-sig").splitlines()
    except UnicodeDecodeError as error:
        raise FilmstackError(f"{option}: {path}", "expected a text file in UTF-8", "Save it as UTF-8") from error
    rows = [(number, line.split("#")[0].strip()) for number, line in enumerate(lines, start=1)]
    values = tuple(_values_of_rows([row for row in rows if row[1]], path))
    if not values:
        raise FilmstackError(f"{option}: {path}", "expected one wavelength a line, got none")
    return values


def _values_of_rows(rows: list[tuple[int, str]], path: Path) -> Iterator[float]:
    """Yield the wavelengths of the lines; a first line without a number names the columns."""
    column, unit = 0, "nm"
    if rows and not _VALUE.fullmatch(rows[0][1].split(",")[0].strip()):
        number, heading = rows.pop(0)
        names = [name.strip().lower() for name in heading.split(",")]
        column = next((place for place, name in enumerate(names) if name in COLUMNS), -1)
        if column < 0:
            raise FilmstackError(f"{path}: line {number}", f"expected a column {' or '.join(COLUMNS)}, got {heading!r}")
        unit = COLUMNS[names[column]]
    for number, row in rows:
        cells = [cell.strip() for cell in row.split(",")]
        match = re.fullmatch(_NUMBER, cells[column]) if column < len(cells) else None
        if match is None:
            raise FilmstackError(f"{path}: line {number}", f"expected a number of {unit}, got {row!r}")
        yield _to_nm(Decimal(match[0]), unit, f"{path}: line {number}")
