"""`filmstack spectrum`: R, T and A of designs over wavelength and angle.

Design files -> `analysis.spectrum` -> a table for people, CSV, JSON and pictures. The texts stand
in `spectrum_text.py`.
"""

from __future__ import annotations

import argparse
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from filmstack.cli.designs import load_designs, naming
from filmstack.cli.options import OPTIONS, add_options
from filmstack.cli.parser import Options, one_of
from filmstack.errors import FilmstackError

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from filmstack.analysis.spectrum import Spectrum
    from filmstack.design import Design
    from filmstack.report.spectrum_plot import View
    from filmstack.stack import Stack

HELP = (
    "Reflectance R, transmittance T and absorptance A of one or several designs over wavelength and angle, for s, p "
    "and their mean. Prints a table in percent; --output writes fractions 0 to 1 in full, --plot draws."
)

MOST_CURVES = 8
SHORTEST, LONGEST = 0.7, 1.5
"""Default wavelengths, in parts of the reference wavelength."""
MOST_DEFAULT_WAVELENGTHS = 500

DEFAULTS_OF_THE_DESIGN = {
    "wavelength": {
        "help": f"{OPTIONS['wavelength']['help']} (default: {SHORTEST:g} to {LONGEST:g} times the reference wavelength)"
    },
    "angle": {"help": "angles of incidence in degrees: a list or START:STOP:STEP (default: those of the design)"},
}
"""Help of --wavelength and --angle where the design says what is usual."""


@dataclass(frozen=True)
class Part:
    """A design as the command computes it.

    Parameters
    ----------
    name, file : str
        Name for people, and the file it stands in.
    stack : Stack
        The stack that the light meets, after the choice of side and back face.
    spectrum : Spectrum
        Its spectrum.
    remarks : tuple of str
        What the command chose by itself, in words.
    """

    name: str
    file: str
    stack: Stack
    spectrum: Spectrum
    remarks: tuple[str, ...]


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument("designs", nargs="+", metavar="DESIGN", help="design files (.toml)")
    add_options(parser, "wavelength", "angle", "polarization", "side", **DEFAULTS_OF_THE_DESIGN)
    parser.add_argument(
        "--back-face",
        type=one_of("--back-face", "coated", "bare", "ideal"),
        default="coated",
        metavar="FACE",
        help="back face of the substrate: coated as in the design (default), bare (without the back layers), "
        "or ideal (no back face: light ends in the substrate)",
    )
    parser.add_argument(
        "--scale",
        type=one_of("--scale", "percent", "od"),
        default="percent",
        metavar="SCALE",
        help="T in percent (default) or as optical density, od, in table and picture",
    )
    add_options(parser, "output", "plot", "json")
    parser.add_argument(
        "--view",
        type=one_of("--view", "wavelength", "angle", "map"),
        metavar="AXIS",
        help="picture against wavelength, against angle, or as a map over both (default: what suits the request)",
    )


def run(options: Options) -> int:
    """Read the designs, compute their spectra, write and print them; return the exit status."""
    from filmstack.cli import spectrum_text as text
    from filmstack.cli.output import json_text, write_csv, write_json

    if options.view and not options.plot:
        raise FilmstackError("--view", "expected together with --plot FILE", "Name the picture to draw")
    parts = _parts(options)
    figure = _figure(parts, options) if options.plot else None
    if options.output and options.output.suffix.lower() == ".csv":
        write_csv(options.output, *text.csv_table(parts, options.polarization, options.scale))
    elif options.output:
        write_json(options.output, text.record(parts, options.polarization, options.scale))
    if figure is not None:
        from filmstack.report.style import save_figure

        save_figure(figure, options.plot)
    if options.json:
        print(json_text(text.record(parts, options.polarization, options.scale)))
    else:
        print("\n".join(text.page(parts, options)))
    return 0


def _parts(options: Options) -> list[Part]:
    designs = load_designs(options.designs)
    names = [design.name for design in designs]
    return [
        _part(design, path, path if names.count(design.name) > 1 else design.name, options)
        for design, path in zip(designs, options.designs, strict=True)
    ]


def _part(design: Design, path: str, name: str, options: Options) -> Part:
    from filmstack.analysis.spectrum import spectrum

    stack = with_back_face(design.stack, options.back_face, path)
    wavelength, remarks = default_wavelengths(design, stack, options)
    angle = options.angle or {"angle": _steps(0, 90), "map": _steps(0, 80)}.get(options.view)
    lit = stack if options.side == "front" else stack.reversed()
    with naming(path):
        result = spectrum(lit, wavelength, angle or design.incident_angle_deg)
    return Part(name, path, lit, result, remarks)


def _steps(first: int, last: int) -> tuple[float, ...]:
    return tuple(map(float, range(first, last + 1)))


def with_back_face(stack: Stack, face: str, where: str) -> Stack:
    """Return a stack with another back face of its (last) thick plate.

    Parameters
    ----------
    stack : Stack
        The design's own.
    face : {"coated", "bare", "ideal"}
        As designed, without the films behind the plate, or with light ending in the plate's medium.
    where : str
        The design's file, for the message.

    Returns
    -------
    Stack

    Raises
    ------
    FilmstackError
        If there is no plate whose back face could be bare.
    """
    from filmstack.stack import Plate, Stack

    plates = [place for place, layer in enumerate(stack.layers) if isinstance(layer, Plate)]
    if face == "coated" or (face == "ideal" and not plates):
        return stack
    if not plates:
        raise FilmstackError(
            f"--back-face {face}",
            f"expected a substrate with a back face, but that of {where} is semi-infinite",
            "Give substrate_thickness_mm in the design",
        )
    if face == "ideal":
        return Stack(stack.incident, stack.layers[: plates[-1]], stack.layers[plates[-1]].material)
    return Stack(stack.incident, stack.layers[: plates[-1] + 1], stack.exit)


def default_wavelengths(design: Design, stack: Stack, options: Options) -> tuple[Sequence[float], tuple[str, ...]]:
    """Return what was asked for, or a default and what it is in words."""
    if options.wavelength:
        return options.wavelength, ()
    reference = design.reference_wavelength_nm
    if getattr(options, "view", None) == "angle":
        return (reference,), (f"wavelength: {reference:g} nm, the reference wavelength, as --wavelength was not given",)
    low, high = SHORTEST * reference, LONGEST * reference
    data_low = max(stack.materials, key=lambda material: material.range_nm[0])
    data_high = min(stack.materials, key=lambda material: material.range_nm[1])
    cuts = dict.fromkeys(
        material.label
        for material, cut in ((data_low, data_low.range_nm[0] > low), (data_high, data_high.range_nm[1] < high))
        if cut
    )
    low, high = max(low, data_low.range_nm[0]), min(high, data_high.range_nm[1])
    step = _round_step((LONGEST - SHORTEST) * reference / MOST_DEFAULT_WAVELENGTHS)
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    values = [float(f"{number * step:.12g}") for number in range(first, last + 1)]
    values = [value for value in values if data_low.range_nm[0] <= value <= data_high.range_nm[1]]
    if not values:
        raise FilmstackError(
            design.name,
            f"expected materials with data near the reference wavelength, {reference:g} nm, but those of "
            f"{data_low.label} begin at {data_low.range_nm[0]:g} nm and those of {data_high.label} end at "
            f"{data_high.range_nm[1]:g} nm",
            "Choose other sources of these materials",
        )
    remark = (
        f"wavelengths: {values[0]:g} to {values[-1]:g} nm in steps of {step:g} nm, that is {SHORTEST:g} to "
        f"{LONGEST:g} times the reference wavelength" + (f", cut to the data of {' and '.join(cuts)}" if cuts else "")
    )
    return values, (f"{remark}, as --wavelength was not given",)


def _round_step(least: float) -> float:
    """Return the smallest of 1, 2 or 5 times a power of ten that is not below `least`."""
    power = 10.0 ** math.floor(math.log10(least))
    return float(next(factor * power for factor in (1.0, 2.0, 5.0, 10.0) if factor * power >= least * (1 - 1e-12)))


def _figure(parts: Sequence[Part], options: Options) -> Figure:
    from filmstack.cli.spectrum_text import conditions, polarization_text
    from filmstack.report.spectrum_plot import Labelled, spectrum_figure

    labels = dict.fromkeys(material.label for part in parts for material in part.stack.materials)
    view: View = options.view or _usual_view(parts)
    notes = dict.fromkeys(note for part in parts for note in part.spectrum.notes)
    clauses = conditions(parts, options)
    angles = {tuple(part.spectrum.angle_deg.tolist()) for part in parts}
    if len(angles) == 1 and len(next(iter(angles))) == 1:  # else the lines or an axis tell it
        clauses.append(f"angle of incidence {next(iter(angles))[0]:g} deg")
    if options.polarization != "all":
        clauses.append(polarization_text(options.polarization))
    return spectrum_figure(
        [Labelled(part.name, part.spectrum) for part in parts],
        view=view,
        scale=options.scale,
        polarization=options.polarization,
        conditions=". ".join(line[0].upper() + line[1:] for line in clauses) + ".",
        small_print=[f"Materials: {'; '.join(labels)}.", *(f"Note: {note}." for note in notes)],
    )


def _usual_view(parts: Sequence[Part]) -> View:
    """Return the view that suits the numbers of wavelengths and angles."""
    wavelengths = max(part.spectrum.wavelength_nm.size for part in parts)
    angles = max(part.spectrum.angle_deg.size for part in parts)
    if wavelengths == 1 and angles > 1:
        return "angle"
    if angles <= MOST_CURVES or len(parts) > 1:
        return "wavelength"
    return "map" if wavelengths > MOST_CURVES else "angle"
