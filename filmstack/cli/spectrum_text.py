"""What `filmstack spectrum` says: page for people, CSV rows, JSON record.

Percent (or optical density) on the page, fractions 0 to 1 in the files.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from filmstack.cli.output import format_table, material_lines, material_records

if TYPE_CHECKING:
    from filmstack.analysis.spectrum import Spectrum
    from filmstack.arraytypes import FloatArray
    from filmstack.cli.parser import Options
    from filmstack.cli.spectrum import Part

SUFFIXES = {"s": ("_s",), "p": ("_p",), "mean": ("",), "all": ("_s", "_p", "")}
"""Endings of the attributes of a spectrum that belong to a choice of polarization."""

LEAST_FOR_SUMMARY = 5
"""Rows from which on mean, lowest and highest stand below a table."""

MOST_ROWS, MOST_BLOCKS = 60, 8
"""Rows of a table and tables of a page; of more, every so many-th is shown."""


def csv_table(parts: Sequence[Part], polarization: str, scale: str) -> tuple[list[str], Iterator[list[object]]]:
    """Return headings and rows of a tidy table: a row a design, angle and wavelength.

    Parameters
    ----------
    parts : sequence of Part
        Designs with their spectra.
    polarization : {"s", "p", "mean", "all"}
        Which columns.
    scale : {"percent", "od"}
        With "od", log10 T stands beside T.

    Returns
    -------
    (list of str, iterator of list)
    """
    names = _columns(polarization, scale)

    def rows() -> Iterator[list[object]]:
        for part in parts:
            spectrum = part.spectrum
            arrays = [getattr(spectrum, name).tolist() for name in names]
            for row, angle in enumerate(spectrum.angle_deg.tolist()):
                for column, wavelength in enumerate(spectrum.wavelength_nm.tolist()):
                    values = [array[row][column] for array in arrays]
                    yield [part.name, wavelength, angle, *values, spectrum.transmittance_into]

    return ["design", "wavelength_nm", "angle_deg", *names, "transmittance_into"], rows()


def record(parts: Sequence[Part], polarization: str, scale: str) -> dict[str, Any]:
    """Return the result for JSON: axes, arrays of shape (angle, wavelength), sources and notes.

    Parameters
    ----------
    parts, polarization, scale
        As for `csv_table`.

    Returns
    -------
    dict
    """
    return {
        "designs": [
            {
                "design": part.name,
                "file": part.file,
                "transmittance_into": part.spectrum.transmittance_into,
                "wavelength_nm": part.spectrum.wavelength_nm.tolist(),
                "angle_deg": part.spectrum.angle_deg.tolist(),
                **{name: getattr(part.spectrum, name).tolist() for name in _columns(polarization, scale)},
                "materials": material_records(part.stack.materials),
                "notes": [*part.spectrum.notes, *part.remarks],
            }
            for part in parts
        ]
    }


def page(parts: Sequence[Part], options: Options) -> list[str]:
    """Return the lines for people: tables (unless they go to a file), sources, notes, files written.

    Parameters
    ----------
    parts : sequence of Part
        Designs with their spectra.
    options : Options
        Of the command.

    Returns
    -------
    list of str
    """
    lines: list[str] = []
    for part in parts:
        lines += [f"{part.name} ({part.file})" if part.name != part.file else part.file]
        lines += [*conditions([part], options), ""]
        if not options.output:
            lines += _tables(part.spectrum, options.polarization, options.scale)
        lines += ["materials", *material_lines(part.stack.materials)]
        notes = [*part.spectrum.notes, *part.remarks]
        lines += ["notes", *(f"  {note}" for note in notes)] if notes else []
        lines.append("")
    written = [path for path in (options.output, options.plot) if path]
    return [*lines, *(f"wrote {path}" for path in written)] if written else lines[:-1]


def conditions(parts: Sequence[Part], options: Options) -> list[str]:
    """Return what holds for every number shown: what T is, and where the light comes from.

    Parameters
    ----------
    parts : sequence of Part
        Designs with their spectra.
    options : Options
        Of the command.

    Returns
    -------
    list of str
        Clauses without a full stop.
    """
    meanings = dict.fromkeys(part.spectrum.transmittance_into for part in parts)
    if len(meanings) == 1:
        lines = [f"T is {next(iter(meanings))}"]
    else:
        lines = [f"T of {part.name} is {part.spectrum.transmittance_into}" for part in parts]
    media = dict.fromkeys(part.stack.incident.label for part in parts)
    lines.append(f"light from the {options.side}, through {' or '.join(media)}")
    return lines


def polarization_text(polarization: str) -> str:
    """Return a choice of polarization in words, such as "s polarization"."""
    return "unpolarized light (mean of s and p)" if polarization == "mean" else f"{polarization} polarization"


def _columns(polarization: str, scale: str) -> list[str]:
    quantities = ("R", "T", "A", "log10_T") if scale == "od" else ("R", "T", "A")
    return [quantity + suffix for quantity in quantities for suffix in SUFFIXES[polarization]]


def _tables(spectrum: Spectrum, polarization: str, scale: str) -> list[str]:
    """A table an angle, or a wavelength where these are fewer."""
    angle, wavelength = spectrum.angle_deg, spectrum.wavelength_nm
    along = wavelength.size >= angle.size
    rows, blocks = (wavelength, angle) if along else (angle, wavelength)
    every_row, every_block = -(-rows.size // MOST_ROWS), -(-blocks.size // MOST_BLOCKS)
    every_row = next(step for step in (1, 2, 5, 10, *range(every_row, 10**7)) if step >= every_row)
    lines: list[str] = []
    for place in range(0, blocks.size, every_block):
        what = f"angle of incidence {blocks[place]:g} deg" if along else f"wavelength {blocks[place]:g} nm"
        normal = polarization == "all" and ((along and blocks[place] == 0.0) or bool(np.all(angle == 0.0)))
        lines += [what + (", s and p alike" if normal else "")]
        lines += _table(spectrum, place, along, "mean" if normal else polarization, scale, every_row)
        lines.append("")
    shown = [
        f"every {_ordinal(step)} of {axis.size} {name}"
        for step, axis, name in (
            (every_row, rows, "wavelengths" if along else "angles"),
            (every_block, blocks, "angles" if along else "wavelengths"),
        )
        if step > 1
    ]
    return (
        [*lines, f"Shown: {' and '.join(shown)}; mean, lowest and highest are of all. --output FILE writes all.", ""]
        if shown
        else lines
    )


def _table(spectrum: Spectrum, place: int, along: bool, polarization: str, scale: str, every: int) -> list[str]:
    axis = spectrum.wavelength_nm if along else spectrum.angle_deg
    names = [(quantity, suffix) for quantity in "RTA" for suffix in SUFFIXES[polarization]]
    fractions = [getattr(spectrum, quantity + suffix) for quantity, suffix in names]
    columns = [_readable(spectrum, quantity, suffix, scale) for quantity, suffix in names]
    columns = [column[place] if along else column[:, place] for column in columns]
    headings = [_heading(quantity, suffix, polarization, scale) for quantity, suffix in names]
    rows = [
        [f"{axis[number]:.9g}", *(f"{column[number]:.4f}" for column in columns)]
        for number in range(_first_round(axis, every), axis.size, every)
    ]
    if axis.size >= LEAST_FOR_SUMMARY:
        means = [float(np.mean(part[place] if along else part[:, place])) for part in fractions]
        rows.append([""] * (len(columns) + 1))
        rows.append(
            ["mean", *(_mean_text(mean, quantity, scale) for mean, (quantity, _) in zip(means, names, strict=True))]
        )
        rows.append(["lowest", *(f"{np.min(column):.4f}" for column in columns)])
        rows.append(["highest", *(f"{np.max(column):.4f}" for column in columns)])
    return format_table(["wavelength\nnm" if along else "angle\ndeg", *headings], rows)


def _first_round(axis: FloatArray, every: int) -> int:
    """Where to begin so that an even grid is shown at its round values, such as 390, 400 and not 385, 395."""
    if every == 1:
        return 0
    parts = axis[:every] / (every * abs(axis[1] - axis[0]))
    return int(np.argmin(np.abs(parts - np.round(parts))))


def _heading(quantity: str, suffix: str, polarization: str, scale: str) -> str:
    of = {"_s": " s", "_p": " p", "": " mean" if polarization in ("all", "mean") else ""}[suffix]
    return f"{quantity}{of}\n{'OD' if quantity == 'T' and scale == 'od' else '%'}"


def _readable(spectrum: Spectrum, quantity: str, suffix: str, scale: str) -> FloatArray:
    if quantity == "T" and scale == "od":
        return np.asarray(0.0 - getattr(spectrum, f"log10_T{suffix}"))
    return np.asarray(100.0 * getattr(spectrum, quantity + suffix))


def _mean_text(mean: float, quantity: str, scale: str) -> str:
    if quantity == "T" and scale == "od":
        return f"{-np.log10(mean):.4f}" if mean > 0.0 else "inf"
    return f"{100.0 * mean:.4f}"


def _ordinal(number: int) -> str:
    special = {1: "st", 2: "nd", 3: "rd"}
    ending = "th" if number % 100 in (11, 12, 13) else special.get(number % 10, "th")
    return f"{number}{ending}"
