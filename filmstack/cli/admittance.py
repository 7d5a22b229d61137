"""`filmstack admittance`: the admittance of a design, layer by layer, at one wavelength."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from filmstack.cli.designs import load_designs, naming
from filmstack.cli.options import add_options
from filmstack.cli.parser import Options, one_of
from filmstack.cli.spectrum import with_back_face
from filmstack.errors import ArgumentError

if TYPE_CHECKING:
    from filmstack.analysis.admittance import AdmittanceLocus
    from filmstack.design import Design
    from filmstack.stack import Stack

HELP = (
    "Admittance of a design while it grows, from the substrate outwards, at one wavelength: real against imaginary "
    "part in units of the admittance of free space. Where the locus ends at the incident medium nothing is reflected. "
    "A thick substrate counts as semi-infinite; layers count from 1 as the light meets them."
)


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument("designs", nargs=1, metavar="DESIGN", help="design file (.toml)")
    add_options(
        parser,
        "wavelength",
        "angle",
        wavelength={
            "help": "one vacuum wavelength in nm, or um, eV, cm-1 by suffix (default: the reference wavelength)"
        },
        angle={"help": "one angle of incidence in degrees (default: the first of the design)"},
    )
    parser.add_argument(
        "--polarization",
        type=one_of("--polarization", "s", "p"),
        default="s",
        metavar="P",
        help="s (default) or p",
    )
    add_options(parser, "output", "plot", "json")


def run(options: Options) -> int:
    """Read a design, compute its locus, write and print it; return the exit status."""
    from filmstack.analysis.admittance import admittance_locus
    from filmstack.cli.output import deliver

    design = load_designs(options.designs)[0]
    stack = with_back_face(design.stack, "ideal", options.designs[0])
    wavelength = _one("--wavelength", options.wavelength, design.reference_wavelength_nm)
    angle = _one("--angle", options.angle, design.incident_angle_deg[0])
    with naming(options.designs[0]):
        locus = admittance_locus(stack, wavelength, angle, polarization=options.polarization)
    headings, rows = _table(locus)
    record = {"design": design.name, "wavelength_nm": wavelength, "angle_deg": angle,
              "polarization": locus.polarization, "incident_admittance": locus.incident, "notes": list(locus.notes),
              **{name: [row[j] for row in rows] for j, name in enumerate(headings)}}  # fmt: skip
    if options.plot:
        _draw(design, stack, locus, options)
    head, body = _page(design, stack, locus, options.designs[0])
    deliver(options, (headings, rows), record, head, body)
    return 0


def _one(option: str, values: Any, usual: float) -> float:  # noqa: ANN401 - sequence or None
    if not values:
        return usual
    if len(values) > 1:
        raise ArgumentError(f"{option}: expected one value, got {len(values)}. A locus is drawn at one")
    return float(values[0])


def _table(locus: AdmittanceLocus) -> tuple[list[str], list[list[float]]]:
    columns = (locus.grown_nm, locus.layer + 1, locus.admittance.real, locus.admittance.imag)
    rows = [list(row) for row in zip(*(column.tolist() for column in columns), strict=True)]
    return ["grown_nm", "layer", "admittance_real", "admittance_imag"], rows


def _page(design: Design, stack: Stack, locus: AdmittanceLocus, path: str) -> tuple[list[str], list[str]]:
    from filmstack.cli.output import format_table

    head = [
        f"{design.name} ({path})",
        f"admittance in free-space units at {locus.wavelength_nm:g} nm, {locus.angle_deg:g} deg, "
        f"{locus.polarization} polarization; after each layer in the order of deposition",
    ]
    rows = [["", "substrate " + stack.exit.label, "", *_parts(locus.admittance[0], locus.incident)]]
    for film in range(len(stack.films) - 1, -1, -1):
        last = max(step for step, layer in enumerate(locus.layer.tolist()) if layer == film)
        name = stack.films[film].material.label
        values = _parts(locus.admittance[last], locus.incident)
        rows.append([str(film + 1), name, f"{locus.grown_nm[last]:.2f}", *values])
    body = format_table(["layer", "material", "grown\nnm", "real\npart", "imaginary\npart", "R\n%"], rows, left=(1,))
    return head, ["", *body, *(f"note: {note}" for note in locus.notes)]


def _parts(y: complex, incident: float) -> list[str]:
    reflected = 100.0 * abs((incident - y) / (incident + y)) ** 2
    return [f"{y.real:.4f}", f"{round(y.imag, 4) + 0.0:.4f}", f"{reflected:.4f}"]


def _draw(design: Design, stack: Stack, locus: AdmittanceLocus, options: Options) -> None:
    from filmstack.report.admittance_plot import locus_figure
    from filmstack.report.style import save_figure

    labels = dict.fromkeys(material.label for material in stack.materials)
    figure = locus_figure(
        locus,
        [film.material.key.split("/")[0] for film in stack.films],
        title=design.name,
        conditions=f"Admittance at {locus.wavelength_nm:g} nm, {locus.angle_deg:g}°, {locus.polarization} polarization."
        " Arrows in the order of deposition.",
        small_print=[f"Materials: {'; '.join(labels)}.", *(f"Note: {note}." for note in locus.notes)],
    )
    save_figure(figure, options.plot)
