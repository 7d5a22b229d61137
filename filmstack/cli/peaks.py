"""`filmstack peaks`: every transmission peak of a design in a band."""

from __future__ import annotations

import argparse
import math
from typing import TYPE_CHECKING, Any

from filmstack.cli.designs import load_designs, naming
from filmstack.cli.options import add_options
from filmstack.cli.parser import Options
from filmstack.cli.spectrum import default_wavelengths, with_back_face
from filmstack.errors import FilmstackError

if TYPE_CHECKING:
    from filmstack.analysis.peaks import Peaks, Polarization
    from filmstack.design import Design
    from filmstack.stack import Stack

HELP = (
    "Every transmission peak of a design in a band of wavelengths, however narrow: the search does not rest on a "
    "grid. Of each peak: wavelength, T, half-maximum points, full width (FWHM), Q, free spectral range (FSR) and "
    "finesse. A thick substrate counts as semi-infinite."
)

MOST_ROWS = 60
"""Peaks of a table on the page; all stand in the files."""


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument("designs", nargs=1, metavar="DESIGN", help="design file (.toml)")
    add_options(
        parser,
        "wavelength",
        "angle",
        "polarization",
        "side",
        wavelength={
            "help": "band of vacuum wavelengths, its two ends such as 550,650 (of more, the shortest and the longest); "
            "nm, or um, eV, cm-1 by suffix (default: that of `filmstack spectrum`)"
        },
    )
    add_options(parser, "output", "plot", "json")


def run(options: Options) -> int:
    """Read a design, find its peaks, write and print them; return the exit status."""
    from filmstack.cli.output import json_text, write_csv, write_json

    design = load_designs(options.designs)[0]
    front = with_back_face(design.stack, "ideal", options.designs[0])
    stack = front if options.side == "front" else front.reversed()
    band, remarks = _band(design, stack, options)
    with naming(options.designs[0]):
        results = _results(design, stack, band, options)
    if options.output and options.output.suffix.lower() == ".csv":
        write_csv(options.output, *_table(results))
    elif options.output:
        write_json(options.output, _record(design, results))
    if options.plot:
        _draw(design, stack, results, options)
    if options.json:
        print(json_text(_record(design, results)))
    else:
        print("\n".join(_page(design, stack, results, remarks)))
    return 0


def _band(design: Design, stack: Stack, options: Options) -> tuple[tuple[float, float], tuple[str, ...]]:
    if not options.wavelength:
        values, _ = default_wavelengths(design, stack, options)
        remark = f"band: {values[0]:g} to {values[-1]:g} nm, as --wavelength was not given"
        return (values[0], values[-1]), (remark,)
    low, high = min(options.wavelength), max(options.wavelength)
    if low == high:
        raise FilmstackError("--wavelength", f"expected the two ends of a band, got {low:g} nm alone", "Give two")
    return (low, high), (f"band: {low:g} to {high:g} nm",)


def _results(design: Design, stack: Stack, band: tuple[float, float], options: Options) -> list[Peaks]:
    """Return the peaks of each angle and polarization asked for; at normal incidence all are alike."""
    from filmstack.analysis.peaks import transmission_peaks

    wanted: tuple[Polarization, ...] = ("s", "p", "mean") if options.polarization == "all" else (options.polarization,)
    return [
        transmission_peaks(stack, band, float(angle), polarization)
        for angle in options.angle or design.incident_angle_deg
        for polarization in (wanted[:1] if angle == 0.0 else wanted)
    ]


_COLUMNS = (
    "wavelength_nm",
    "transmittance",
    "half_low_nm",
    "half_high_nm",
    "fwhm_nm",
    "q",
    "fsr_nm",
    "finesse",
    "one_sided",
    "note",
)


def _table(results: list[Peaks]) -> tuple[list[str], list[list[Any]]]:
    rows = [
        [one.angle_deg, one.polarization, *("" if _missing(x) else x for x in (getattr(peak, c) for c in _COLUMNS))]
        for one in results
        for peak in one
    ]
    return ["angle_deg", "polarization", *_COLUMNS], rows


def _missing(value: object) -> bool:
    return isinstance(value, float) and math.isnan(value)


def _record(design: Design, results: list[Peaks]) -> dict[str, Any]:
    cases = [
        {
            "angle_deg": one.angle_deg,
            "polarization": one.polarization,
            "band_nm": list(one.band_nm),
            "complete": one.complete,
            "resonances": one.resonances,
            "notes": list(one.notes),
            "peaks": [{name: getattr(peak, name) for name in _COLUMNS} for peak in one],
        }
        for one in results
    ]
    return {"design": design.name, "cases": cases}


def _page(design: Design, stack: Stack, results: list[Peaks], remarks: tuple[str, ...]) -> list[str]:
    from filmstack.cli.output import material_lines

    lines = [design.name, f"T is into {stack.exit.label}; the substrate counts as semi-infinite", *remarks]
    for one in results:
        alike = "s and p alike" if one.angle_deg == 0.0 else {"mean": "mean of s and p"}.get(one.polarization)
        lines += ["", f"angle of incidence {one.angle_deg:g} deg, {alike or one.polarization + ' polarization'}"]
        lines += [_summary(one), *_peak_lines(one), *(f"note: {note}" for note in one.notes)]
    return [*lines, "", "materials", *material_lines(stack.materials)]


def _summary(one: Peaks) -> str:
    count = f"{len(one)} peak{'' if len(one) == 1 else 's'}"
    closed = "none missed" if one.complete else "search not closed, see the notes"
    if one.resonances is None:
        return f"{count}, {closed}"
    return f"{count}, {closed}; {one.resonances} resonance{'' if one.resonances == 1 else 's'} narrower than the band"


def _peak_lines(one: Peaks) -> list[str]:
    from filmstack.analysis.peaks import MOST_Q
    from filmstack.cli.output import format_table

    if not len(one):
        return []
    widths = [peak.fwhm_nm for peak in one if not _missing(peak.fwhm_nm)]
    places = min(max(4, 3 - math.floor(math.log10(min(widths, default=1.0)))), 11)
    rows = [
        [
            f"{peak.wavelength_nm:.{places}f}",
            f"{100 * peak.transmittance:.4f}",
            *("-" if _missing(x) else f"{x:.{places}f}" for x in (peak.half_low_nm, peak.half_high_nm)),
            *("-" if _missing(x) else f"{x:.5g}" for x in (peak.fwhm_nm, peak.q, peak.fsr_nm, peak.finesse)),
            "; ".join(["one-sided FSR"] * peak.one_sided + ["at the limit of rounding"] * (peak.q > MOST_Q)),
        ]
        for peak in one.peaks[:MOST_ROWS]
    ]
    headings = [
        "wavelength\nnm",
        "T\n%",
        "half low\nnm",
        "half high\nnm",
        "FWHM\nnm",
        "Q",
        "FSR\nnm",
        "finesse",
        "remark",
    ]
    lines = format_table(headings, rows, left=(8,))
    if len(one) > MOST_ROWS:
        lines.append(f"... {len(one) - MOST_ROWS} more; --output writes all")
    if any(_missing(peak.fwhm_nm) for peak in one):
        lines.append("-: T does not fall to half before the next peak or the end of the band")
    if len(one) == 1:
        lines.append("no FSR: a single peak has no neighbour in the band")
    return lines


def _draw(design: Design, stack: Stack, results: list[Peaks], options: Options) -> None:
    from filmstack.report.peaks_plot import peaks_figure
    from filmstack.report.style import save_figure

    labels = dict.fromkeys(material.label for material in stack.materials)
    notes = dict.fromkeys(note for one in results for note in one.notes)
    figure = peaks_figure(
        results,
        title=design.name,
        conditions=f"Transmission peaks into {stack.exit.label}; the substrate counts as semi-infinite.",
        small_print=[f"Materials: {'; '.join(labels)}.", *(f"Note: {note}." for note in notes)],
    )
    save_figure(figure, options.plot)
