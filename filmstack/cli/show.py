"""`filmstack show`: the layers of designs as a table, totals, and the index profile.

Design files -> `design` -> a table for people, JSON and pictures.
"""

from __future__ import annotations

import argparse
import math
import textwrap
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from filmstack.cli.designs import load_designs
from filmstack.cli.options import add_options
from filmstack.cli.parser import Options
from filmstack.errors import FilmstackError

if TYPE_CHECKING:
    from filmstack.design import Design
    from filmstack.materials.material import Material

HELP = (
    "The layers of one or several designs: number from the light and from the substrate, material and its source, "
    "thickness in nm and in quarter waves at the reference wavelength and angle, share of all films. "
    "--plot draws the index profile, --keys lists the keys of a design file."
)
PAGE_WIDTH = 110
"""Longest line of a description. [characters]"""


@dataclass(frozen=True)
class Row:
    """A film of a design as the table shows it.

    Parameters
    ----------
    layer, from_substrate : int
        Number from the light, and from the substrate on its face, from 1.
    face : {"front", "back"}
        Face of the substrate.
    material : Material
        Its medium.
    thickness_nm, quarter_waves, share : float
        Thickness [nm], in quarter waves (nan: evanescent) [1], part of the thickness of all films, 0 to 1.
    locked : bool
        A refinement must not change it.
    """

    layer: int
    from_substrate: int
    face: str
    material: Material
    thickness_nm: float
    quarter_waves: float
    share: float
    locked: bool


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument("designs", nargs="*", metavar="DESIGN", help="design files (.toml)")
    add_options(parser, "plot", "json")
    parser.add_argument("--keys", action="store_true", help="list the keys of a design file instead")


def run(options: Options) -> int:
    """Read the designs, print their layers, draw the profiles; return the exit status."""
    if options.keys:
        from filmstack.files.design_file import help_text

        print(help_text())
        return 0
    if not options.designs:
        raise FilmstackError("show", "expected DESIGN, got none", "See filmstack show --help")
    designs = load_designs(options.designs)
    if options.plot:
        from filmstack.report.profile_plot import profile_figure
        from filmstack.report.style import save_figure

        save_figure(profile_figure(designs), options.plot)
    if options.json:
        from filmstack.cli.output import json_text

        print(json_text({"designs": [record(design) for design in designs]}))
    else:
        pages = ["\n".join(page(design)) for design in designs]
        print("\n\n".join([*pages, f"wrote {options.plot}"] if options.plot else pages))
    return 0


def film_rows(design: Design) -> list[Row]:
    """Return a row for every film, in the order the light meets them.

    Parameters
    ----------
    design : Design
        What to show.

    Returns
    -------
    list of Row
    """
    stack = design.stack
    front = _front_films(design)
    total = float(stack.thickness_nm.sum()) or math.inf
    return [
        Row(
            layer=number,
            from_substrate=front - number + 1 if number <= front else number - front,
            face="front" if number <= front else "back",
            material=film.material,
            thickness_nm=film.thickness_nm,
            quarter_waves=quarter_waves,
            share=film.thickness_nm / total,
            locked=film.locked,
        )
        for number, (film, quarter_waves) in enumerate(
            zip(stack.films, design.quarter_waves.tolist(), strict=True), start=1
        )
    ]


def _front_films(design: Design) -> int:
    """Number of films before the plate, or of all."""
    from filmstack.stack import Plate

    layers = design.stack.layers
    return next((place for place, layer in enumerate(layers) if isinstance(layer, Plate)), len(layers))


def record(design: Design) -> dict[str, Any]:
    """Return what the table tells, for JSON; shares as fractions 0 to 1.

    Parameters
    ----------
    design : Design
        What to show.

    Returns
    -------
    dict
    """
    from filmstack.cli.output import material_records

    stack = design.stack
    rows = film_rows(design)
    return {
        "design": design.name,
        "file": str(design.path),
        "description": design.description,
        "reference_wavelength_nm": design.reference_wavelength_nm,
        "reference_angle_deg": design.reference_angle_deg,
        "incident_angle_deg": list(design.incident_angle_deg),
        "incident": stack.incident.key,
        "substrate": _substrate(design).key,
        "substrate_thickness_mm": stack.plates[0].thickness_mm if stack.plates else None,
        "exit": stack.exit.key,
        "layers": [
            {
                "layer": row.layer,
                "face": row.face,
                "from_substrate": row.from_substrate,
                "material": row.material.key,
                "label": row.material.label,
                "thickness_nm": row.thickness_nm,
                "quarter_waves": row.quarter_waves,
                "share": row.share,
                "locked": row.locked,
            }
            for row in rows
        ],
        "totals": [
            {"material": material.key, "layers": count, "thickness_nm": thickness, "share": share}
            for material, count, thickness, share in _totals(rows)
        ],
        "materials": material_records(stack.materials),
    }


def page(design: Design) -> list[str]:
    """Return the lines for people: layers, totals a material, sources.

    Parameters
    ----------
    design : Design
        What to show.

    Returns
    -------
    list of str
    """
    from filmstack.cli.output import format_table, material_lines

    rows = film_rows(design)
    headings = ["layer", "from\nsubstrate", "material", "thickness\nnm", "quarter\nwaves", "share\n%", "remark"]
    lines = [f"{design.name} ({design.path})", *_description(design), _reference(design), ""]
    lines += format_table(headings, _cells(design, rows), left=(2, 6))
    lines += ["", *format_table(["films of", "layers", "thickness\nnm", "share\n%"], _total_cells(rows), left=(0,))]
    return [*lines, "", "materials", *material_lines(design.stack.materials)]


def _description(design: Design) -> list[str]:
    lines = [part for line in design.description.strip().splitlines() for part in textwrap.wrap(line, PAGE_WIDTH)]
    return [*lines, *([f"made from {design.parent_name}{_parent_state(design)}"] if design.parent_name else [])]


def _parent_state(design: Design) -> str:
    """Tell if the parent is no longer the file that the design was made from."""
    from hashlib import sha256

    parent, recorded = design.written.folder / design.parent_name, design.written.values.get("parent_sha256")
    if not parent.is_file():
        return ", which is not there"
    return ", which has changed since" if recorded and sha256(parent.read_bytes()).hexdigest() != recorded else ""


def _reference(design: Design) -> str:
    angles = ", ".join(f"{angle:g}" for angle in design.incident_angle_deg)
    return (
        f"quarter waves at {design.reference_wavelength_nm:g} nm and {design.reference_angle_deg:g} deg; "
        f"angle of incidence {angles} deg where no other is asked for"
    )


def _cells(design: Design, rows: Sequence[Row]) -> Iterator[list[str]]:
    """Cells of the layers' table, the media before, between and behind the films among them."""
    stack = design.stack
    front = _front_films(design)
    yield _medium(stack.incident, "incident medium")
    yield from map(_film, rows[:front])
    if stack.plates:
        yield _medium(stack.plates[0].material, f"substrate, {stack.plates[0].thickness_mm:g} mm")
        yield from map(_film, rows[front:])
        yield _medium(stack.exit, "exit medium")
    else:
        yield _medium(stack.exit, "substrate, semi-infinite")


def _film(row: Row) -> list[str]:
    waves = "evanescent" if math.isnan(row.quarter_waves) else f"{row.quarter_waves:.4f}"
    numbers = [str(row.layer), str(row.from_substrate), row.material.label]
    return [*numbers, f"{row.thickness_nm:.3f}", waves, f"{100 * row.share:.2f}", "locked" if row.locked else ""]


def _medium(material: Material, role: str) -> list[str]:
    return ["", "", material.label, "", "", "", role]


def _substrate(design: Design) -> Material:
    return design.stack.plates[0].material if design.stack.plates else design.stack.exit


def _totals(rows: Sequence[Row]) -> list[tuple[Material, int, float, float]]:
    """Material, number of its layers, their thickness [nm] and share, in the order met."""
    totals = []
    for material in dict.fromkeys(row.material for row in rows):
        own = [row for row in rows if row.material is material]
        totals.append(
            (material, len(own), math.fsum(row.thickness_nm for row in own), math.fsum(row.share for row in own))
        )
    return totals


def _total_cells(rows: Sequence[Row]) -> Iterator[list[str]]:
    for material, count, thickness, share in _totals(rows):
        yield [material.label, str(count), f"{thickness:.3f}", f"{100 * share:.2f}"]
    thickness = math.fsum(row.thickness_nm for row in rows)
    yield ["all", str(len(rows)), f"{thickness:.3f}", "100.00" if thickness else "0.00"]
