"""`filmstack ellipsometry`: psi and delta of a design over wavelength and angle."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from filmstack.cli.designs import load_designs, naming
from filmstack.cli.options import add_options
from filmstack.cli.parser import Options
from filmstack.cli.spectrum import DEFAULTS_OF_THE_DESIGN, default_wavelengths, with_back_face

if TYPE_CHECKING:
    from filmstack.analysis.ellipsometry import Ellipsometry
    from filmstack.design import Design
    from filmstack.stack import Stack

HELP = (
    "Ellipsometric psi and delta, in degrees, of the light that a design reflects: tan(psi) exp(i delta) = -r_p / r_s, "
    "so delta is 180 at normal incidence and between 0 and 180 on a bare absorber. A thick substrate counts as "
    "semi-infinite."
)
USUAL_ANGLE = 70.0


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument("designs", nargs=1, metavar="DESIGN", help="design file (.toml)")
    add_options(
        parser,
        "wavelength",
        "angle",
        wavelength=DEFAULTS_OF_THE_DESIGN["wavelength"],
        angle={"help": f"angles of incidence in degrees: a list or START:STOP:STEP (default: {USUAL_ANGLE:g})"},
    )
    add_options(parser, "output", "plot", "json")


def run(options: Options) -> int:
    """Read a design, compute psi and delta, write and print them; return the exit status."""
    from filmstack.analysis.ellipsometry import ellipsometry
    from filmstack.cli.output import deliver

    design = load_designs(options.designs)[0]
    stack = with_back_face(design.stack, "ideal", options.designs[0])
    wavelength, remarks = default_wavelengths(design, stack, options)
    with naming(options.designs[0]):
        found = ellipsometry(stack, wavelength, options.angle or [USUAL_ANGLE])
    headings, rows = _table(found)
    record = {
        "design": design.name,
        "notes": list(found.notes),
        **{name: [row[j] for row in rows] for j, name in enumerate(headings)},
    }
    if options.plot:
        _draw(design, stack, found, options)
    head = [f"{design.name} ({options.designs[0]})", "reflected light; the substrate counts as semi-infinite", *remarks]
    deliver(options, (headings, rows), record, head, _body(stack, found))
    return 0


def _table(found: Ellipsometry) -> tuple[list[str], list[list[float]]]:
    psi, delta = found.psi_deg, found.delta_deg
    rows = [
        [wavelength, angle, float(psi[j, i]), float(delta[j, i])]
        for j, angle in enumerate(found.angle_deg.tolist())
        for i, wavelength in enumerate(found.wavelength_nm.tolist())
    ]
    return ["wavelength_nm", "angle_deg", "psi_deg", "delta_deg"], rows


def _body(stack: Stack, found: Ellipsometry) -> list[str]:
    from filmstack.cli.output import format_table, material_lines, thinned

    lines: list[str] = []
    for angle in dict.fromkeys(found.angle_deg.tolist()):
        rows, left_out = thinned([row for row in _table(found)[1] if row[1] == angle], "wavelengths")
        cells = [[f"{row[0]:g}", f"{row[2]:.4f}", f"{row[3]:.4f}"] for row in rows]
        lines += ["", f"angle of incidence {angle:g} deg"]
        lines += [*format_table(["wavelength\nnm", "psi\ndeg", "delta\ndeg"], cells), *left_out]
    lines += ["", "materials", *material_lines(stack.materials)]
    return [*lines, *(f"note: {note}" for note in found.notes)]


def _draw(design: Design, stack: Stack, found: Ellipsometry, options: Options) -> None:
    from filmstack.report.ellipsometry_plot import ellipsometry_figure
    from filmstack.report.style import save_figure

    labels: Any = dict.fromkeys(material.label for material in stack.materials)
    figure = ellipsometry_figure(
        found,
        title=design.name,
        conditions="Reflected light; the substrate counts as semi-infinite.",
        small_print=[f"Materials: {'; '.join(labels)}.", *(f"Note: {note}." for note in found.notes)],
    )
    save_figure(figure, options.plot)
