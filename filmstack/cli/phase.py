"""`filmstack phase`: phase, group delay, GDD and TOD of a design over wavelength and angle."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from filmstack.cli.designs import load_designs, naming
from filmstack.cli.options import add_options
from filmstack.cli.parser import Options, one_of
from filmstack.cli.spectrum import DEFAULTS_OF_THE_DESIGN, default_wavelengths, with_back_face
from filmstack.errors import ArgumentError

if TYPE_CHECKING:
    from filmstack.analysis.phase import Phase
    from filmstack.design import Design
    from filmstack.stack import Stack

HELP = (
    "Phase, group delay, GDD and TOD of reflected or transmitted light for s and p, by exact differentiation through "
    "layers and dispersion at a fixed angle. A thick substrate counts as semi-infinite: its back face has no phase. "
    "A later pulse counts as a positive delay (near a resonance it can be negative); units are rad, fs, fs^2, fs^3."
)


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument("designs", nargs=1, metavar="DESIGN", help="design file (.toml)")
    add_options(parser, "wavelength", "angle", **DEFAULTS_OF_THE_DESIGN)
    parser.add_argument(
        "--of",
        type=one_of("--of", "r", "t"),
        default="r",
        metavar="AMPLITUDE",
        help="r, the reflected light (default), or t, the transmitted light",
    )
    parser.add_argument(
        "--plane",
        type=one_of("--plane", "front", "substrate"),
        default="front",
        metavar="PLANE",
        help="plane to which r is referred: front, the first interface (default), or substrate",
    )
    add_options(parser, "output", "plot", "json")


def run(options: Options) -> int:
    """Read a design, compute its phase, write and print it; return the exit status."""
    from filmstack.analysis.phase import phase
    from filmstack.cli.output import deliver

    if options.of == "t" and options.plane != "front":
        raise ArgumentError("--plane: the phase of t runs from the first to the last interface. Leave --plane out")
    design = load_designs(options.designs)[0]
    stack = with_back_face(design.stack, "ideal", options.designs[0])
    wavelength, remarks = default_wavelengths(design, stack, options)
    with naming(options.designs[0]):
        result = phase(stack, wavelength, options.angle or design.incident_angle_deg, plane=options.plane)
    if options.plot:
        _draw(design, stack, result, options)
    head = [f"{design.name} ({options.designs[0]})", _conditions(result, options.of), *remarks]
    deliver(
        options, _table(result, options.of), _record(design, result, options.of), head, _body(stack, result, options)
    )
    return 0


def _part(result: Phase, of: str) -> Any:  # noqa: ANN401 - PhaseOf, loaded late
    return result.transmission if of == "t" else result.reflection


def _table(result: Phase, of: str) -> tuple[list[str], list[list[float]]]:
    part = _part(result, of)
    names = [f"{name}_{p}" for p in "sp" for name in ("phase_rad", "gd_fs", "gdd_fs2", "tod_fs3")]
    rows = [
        [wavelength, angle, *(float(getattr(part, name)[j, i]) for name in names)]
        for j, angle in enumerate(result.angle_deg.tolist())
        for i, wavelength in enumerate(result.wavelength_nm.tolist())
    ]
    return ["wavelength_nm", "angle_deg", *(f"{of}_{name}" for name in names)], rows


def _record(design: Design, result: Phase, of: str) -> dict[str, Any]:
    headings, rows = _table(result, of)
    columns = {name: [row[column] for row in rows] for column, name in enumerate(headings)}
    return {"design": design.name, "amplitude": of, "plane": result.plane, "notes": list(result.notes), **columns}


def _conditions(result: Phase, of: str) -> str:
    if of == "t":
        return "transmitted light, from the first to the last interface; the substrate counts as semi-infinite"
    place = "at the first interface" if result.plane == "front" else "referred to the plane of the substrate"
    return f"reflected light, {place}; the substrate counts as semi-infinite"


def _body(stack: Stack, result: Phase, options: Options) -> list[str]:
    from filmstack.cli.output import format_table, material_lines, thinned

    _, rows = _table(result, options.of)
    lines: list[str] = []
    for angle in dict.fromkeys(result.angle_deg.tolist()):
        alike = angle == 0.0
        headings = ["wavelength\nnm"]
        headings += [
            f"{name}{'' if alike else f' {p}'}\n{unit}" for p in ("s" if alike else "sp") for name, unit in _UNITS
        ]
        shown, left_out = thinned([row for row in rows if row[1] == angle], "wavelengths")
        cells = [
            [f"{row[0]:g}", *(f"{round(value, 4) + 0.0:.4f}" for value in row[2 : 1 + len(headings)])] for row in shown
        ]
        title = f"angle of incidence {angle:g} deg{', s and p alike' if alike else ''}"
        lines += ["", title, *format_table(headings, cells), *left_out]
    lines += ["", "materials", *material_lines(stack.materials)]
    return [*lines, *(f"note: {note}" for note in result.notes)]


_UNITS = (("phase", "rad"), ("delay", "fs"), ("GDD", "fs^2"), ("TOD", "fs^3"))


def _draw(design: Design, stack: Stack, result: Phase, options: Options) -> None:
    from filmstack.report.phase_plot import phase_figure
    from filmstack.report.style import save_figure

    labels = dict.fromkeys(material.label for material in stack.materials)
    text = _conditions(result, options.of)
    figure = phase_figure(
        result,
        transmitted=options.of == "t",
        title=design.name,
        conditions=f"{text[0].upper()}{text[1:]}.",
        small_print=[f"Materials: {'; '.join(labels)}.", *(f"Note: {note}." for note in result.notes)],
    )
    save_figure(figure, options.plot)
