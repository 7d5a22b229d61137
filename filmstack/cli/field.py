"""`filmstack field`: |E|^2 against depth, its largest values, and where light is absorbed."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from filmstack.cli.designs import load_designs, naming
from filmstack.cli.options import add_options
from filmstack.cli.parser import Options, number_from
from filmstack.cli.spectrum import DEFAULTS_OF_THE_DESIGN, with_back_face

if TYPE_CHECKING:
    from filmstack.analysis.field import Field
    from filmstack.design import Design
    from filmstack.stack import Stack

HELP = (
    "Electric field inside a design: |E|^2 over that of the incident wave, its largest value in each layer and at each "
    "interface, and the absorptance of each layer. A thick substrate counts as semi-infinite. Layers count from 1 as "
    "the light meets them. The field is a design proxy for laser damage, not a threshold."
)


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument("designs", nargs=1, metavar="DESIGN", help="design file (.toml)")
    add_options(
        parser,
        "wavelength",
        "angle",
        angle=DEFAULTS_OF_THE_DESIGN["angle"],
        wavelength={
            "help": "vacuum wavelengths: a list, START:STOP:STEP or a file; nm, or um, eV, cm-1 by suffix "
            "(default: the reference wavelength)"
        },
    )
    parser.add_argument(
        "--irradiance",
        type=number_from("--irradiance", 0.0, "W/cm^2"),
        metavar="W",
        help="also |E| in V/m at this irradiance of the incident beam, in W/cm^2",
    )
    add_options(parser, "output", "plot", "json")


def run(options: Options) -> int:
    """Read a design, compute its field, write and print it; return the exit status."""
    from filmstack.analysis.field import field
    from filmstack.analysis.spectrum import spectrum
    from filmstack.cli.output import deliver

    design = load_designs(options.designs)[0]
    stack = with_back_face(design.stack, "ideal", options.designs[0])
    wavelength = options.wavelength or [design.reference_wavelength_nm]
    angle = options.angle or design.incident_angle_deg
    with naming(options.designs[0]):
        fields = [field(stack, wavelength, angle, polarization=p) for p in ("s", "p")]
        absorbed = spectrum(stack, wavelength, angle)
    record = _record(design, fields, (absorbed.A_layers_s, absorbed.A_layers_p), options.irradiance)
    if options.plot:
        _draw(design, stack, fields, options)
    head = [f"{design.name} ({options.designs[0]})", _WHAT]
    deliver(options, _depth_table(fields), record, head, _body(stack, record))
    return 0


_WHAT = "|E|^2 over that of the incident wave; the substrate counts as semi-infinite"


def _depth_table(fields: list[Field]) -> tuple[list[str], list[list[Any]]]:
    rows = [
        [depth, int(one.layer[k]) + 1, angle, wavelength, one.polarization, float(one.intensity[k, j, i]),
         float(one.absorption_per_nm[k, j, i])]
        for one in fields
        for j, angle in enumerate(one.angle_deg.tolist())
        for i, wavelength in enumerate(one.wavelength_nm.tolist())
        for k, depth in enumerate(one.depth_nm.tolist())
    ]  # fmt: skip
    names = ["depth_nm", "layer", "angle_deg", "wavelength_nm", "polarization", "intensity", "absorption_per_nm"]
    return names, rows


def _record(design: Design, fields: list[Field], absorbed: tuple[Any, Any], irradiance: float | None) -> dict[str, Any]:
    """Return, per polarization, angle and wavelength, what each layer and interface sees."""
    cases = []
    for one, parts in zip(fields, absorbed, strict=True):
        largest, where = one.largest_in_layers
        interfaces = one.at_interfaces
        strength = None if irradiance is None else one.volt_per_metre(irradiance)
        for j, angle in enumerate(one.angle_deg.tolist()):
            for i, wavelength in enumerate(one.wavelength_nm.tolist()):
                case = {
                    "polarization": one.polarization,
                    "angle_deg": angle,
                    "wavelength_nm": wavelength,
                    "largest_in_layers": largest[:, j, i].tolist(),
                    "depth_of_largest_nm": where[:, j, i].tolist(),
                    "at_interfaces": interfaces[:, j, i].tolist(),
                    "absorptance_of_layers": parts[:, j, i].tolist(),
                }
                if strength is not None:
                    case["largest_volt_per_metre"] = float(strength[:, j, i].max())
                    case["depth_of_largest_volt_per_metre_nm"] = float(one.depth_nm[strength[:, j, i].argmax()])
                cases.append(case)
    return {"design": design.name, "cases": cases, "notes": list(fields[0].notes)}


def _body(stack: Stack, record: dict[str, Any]) -> list[str]:
    from filmstack.cli.output import format_table

    lines: list[str] = []
    names = [film.material.label for film in stack.films]
    for case in record["cases"]:
        straight = case["angle_deg"] == 0.0
        if straight and case["polarization"] == "p":
            continue
        seen = "s and p alike" if straight else f"{case['polarization']} polarization"
        lines += ["", f"{case['wavelength_nm']:g} nm, {case['angle_deg']:g} deg, {seen}"]
        if "largest_volt_per_metre" in case:
            depth = case["depth_of_largest_volt_per_metre_nm"]
            lines.append(f"largest field {case['largest_volt_per_metre']:.4g} V/m, at a depth of {depth:.1f} nm")
        rows = [
            [str(number + 1), name, f"{case['largest_in_layers'][number]:.4f}",
             f"{case['depth_of_largest_nm'][number]:.1f}", f"{case['at_interfaces'][number]:.4f}",
             f"{100 * case['absorptance_of_layers'][number]:.4f}"]
            for number, name in enumerate(names)
        ]  # fmt: skip
        rows.append(["", "substrate", "", "", f"{case['at_interfaces'][-1]:.4f}", ""])
        headings = ["layer", "material", "largest\n|E|^2", "at depth\nnm", "front face,\nlarger side", "absorbed\n%"]
        lines += format_table(headings, rows, left=(1,))
    return [*lines, "", *(f"note: {note}" for note in record["notes"])]


def _draw(design: Design, stack: Stack, fields: list[Field], options: Options) -> None:
    from filmstack.report.field_plot import field_figure
    from filmstack.report.style import save_figure

    media = [stack.incident, *(film.material for film in stack.films), stack.exit]
    labels = dict.fromkeys(material.label for material in media)
    straight = all(angle == 0.0 for angle in fields[0].angle_deg.tolist())
    figure = field_figure(
        fields[:1] if straight else fields,
        [material.key.split("/")[0] for material in media],
        title=design.name,
        conditions="Field relative to the incident wave; the substrate counts as semi-infinite.",
        small_print=[f"Materials: {'; '.join(labels)}.", *(f"Note: {note}." for note in fields[0].notes)],
    )
    save_figure(figure, options.plot)
