"""`filmstack materials`: list the library, print n and k, draw them, judge a person's own table.

Library and files -> here -> text, JSON and pictures. The texts stand in `materials_text.py`.
"""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from filmstack.cli.grids import wavelengths
from filmstack.cli.options import add_options
from filmstack.cli.parser import Options, one_of
from filmstack.errors import FilmstackError

if TYPE_CHECKING:
    from filmstack.materials.library import MaterialRecord
    from filmstack.materials.material import Material
    from filmstack.materials.tables import Table

HELP = (
    "List the materials of the library, by words of their names and sources; print n and k of some of them (--at), "
    "draw them (--plot), or judge a table of your own (--check). One material alone is described in full."
)


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command to its parser."""
    parser.add_argument(
        "names",
        nargs="*",
        metavar="NAME",
        help="words to look for in the list; with --at or --plot the materials themselves: "
        "a plain name (SiO2), a key (SiO2/ion-assisted-2013) or the path of a CSV",
    )
    parser.add_argument(
        "--at",
        type=lambda text: wavelengths(text, "--at"),
        metavar="WAVELENGTHS",
        help="print n and k at these vacuum wavelengths: a list such as 550,1064 or START:STOP:STEP, in nm, "
        "or with um, eV or cm-1 at the end",
    )
    parser.add_argument(
        "--covers",
        type=_window,
        metavar="LOW:HIGH",
        help="only materials known over all these wavelengths; with --plot, what to draw. In nm, or with a unit "
        "at the end",
    )
    parser.add_argument(
        "--kind",
        type=one_of("--kind", "table", "formula", "constant"),
        metavar="KIND",
        help="only materials given by a table, a formula or a constant",
    )
    parser.add_argument("--check", metavar="FILE", help="read a CSV of your own and tell how it was understood")
    add_options(parser, "plot", "json")


def run(options: Options) -> int:
    """List, print, draw or judge; return the exit status."""
    from filmstack.cli import materials_text as text
    from filmstack.cli.output import json_text

    _refuse_clashes(options)
    if options.check is not None:
        checked = _read_own(options.check)
        print(json_text(text.check_record(checked)) if options.json else "\n".join(text.check_page(checked)))
        return 0
    if options.at is None and options.plot is None:
        records = _found(options)
        print(json_text([text.list_record(one) for one in records]) if options.json else text.list_page(records))
        return 0
    materials = _named(options.names)
    values = [] if options.at is None else [text.values(material, options.at) for material in materials]
    if options.plot is not None:
        _draw(materials, options)
    if options.json:
        print(json_text([text.value_record(*pair) for pair in zip(materials, values, strict=False)]))
    elif values:
        print("\n".join(text.value_page(materials, values)))
    return 0


def _window(text: str) -> tuple[float, float]:
    if text.count(":") != 1 or "," in text:
        raise FilmstackError("--covers", f"expected LOW:HIGH, got {text!r}", "For example 400:700 or 0.4:2um")
    low, high = sorted(wavelengths(text.replace(":", ","), "--covers"))
    if low == high:
        raise FilmstackError("--covers", f"expected two different wavelengths, got {text!r}")
    return low, high


def _refuse_clashes(options: Options) -> None:
    if options.check is not None and (options.names or options.at or options.plot or options.covers or options.kind):
        raise FilmstackError("--check", "expected alone or with --json", "Use the path of the file as a NAME with --at")
    if (options.at is not None or options.plot is not None) and not options.names:
        option = "--at" if options.at is not None else "--plot"
        raise FilmstackError(
            option, "expected a material before it", f"For example: filmstack materials SiO2 {option} ..."
        )
    if options.kind and (options.at is not None or options.plot is not None):
        raise FilmstackError("--kind", "filters the list: not with --at or --plot", "Leave it out")
    if options.covers and options.at is not None and options.plot is None:
        raise FilmstackError("--covers", "filters the list or limits a plot: not with --at alone", "Leave it out")


def _read_own(path: str) -> Table:
    from filmstack.materials.reader import read_material

    if not Path(path).is_file():
        raise FilmstackError("--check", f"no such file: {path}", "Correct the path")
    return read_material(Path(path))


def _named(names: list[str]) -> list[Material]:
    from filmstack.errors import all_faults
    from filmstack.materials.library import material

    found, faults = [], []
    for name in names:
        try:
            found.append(material(name))
        except FilmstackError as error:
            faults.append(error)
    if faults:
        raise all_faults(faults)
    return list(dict.fromkeys(found))


def _found(options: Options) -> list[MaterialRecord]:
    """Return the records that the words, the wavelengths and the kind leave."""
    from filmstack.files.hints import nearest
    from filmstack.materials.library import DEFAULTS, list_materials

    records = list(list_materials())
    exact = [one for one in records if " ".join(options.names) == one.key]
    found = exact or [one for one in records if all(_mentions(one, word) for word in options.names)]
    if options.covers:
        low, high = options.covers
        found = [one for one in found if one.range_nm[0] <= low and high <= one.range_nm[1]]
    if options.kind:
        found = [one for one in found if one.kind == options.kind]
    if not found:
        words = " ".join(options.names)
        known = [*DEFAULTS, *(one.key for one in records)]
        advice = nearest(words, known, "filmstack materials lists all") if words else "filmstack materials lists all"
        asked = [f"the words {words!r}"] if words else []
        asked += [f"{options.covers[0]:g} to {options.covers[1]:g} nm"] if options.covers else []
        asked += [f"the kind {options.kind}"] if options.kind else []
        raise FilmstackError("materials", f"nothing in the library fits {' and '.join(asked)}", advice)
    return found


def _mentions(record: MaterialRecord, word: str) -> bool:
    texts = (record.key, record.label, record.form, record.source, *record.default_of)
    return any(word.lower() in text.lower() for text in texts)


def _draw(materials: list[Material], options: Options) -> None:
    from filmstack.report.material_plot import material_figure
    from filmstack.report.style import MOST_LINES, save_figure

    if len(materials) > MOST_LINES:
        raise FilmstackError("--plot", f"expected at most {MOST_LINES} materials, got {len(materials)}", "Name fewer")
    if options.covers:
        low, high = options.covers
        for one in materials:
            if one.range_nm[0] >= high or one.range_nm[1] <= low:
                raise FilmstackError(
                    "--covers",
                    f"{one.label} is known from {one.range_nm[0]:g} to {one.range_nm[1]:g} nm, "
                    f"got {low:g} to {high:g} nm",
                    "Ask for wavelengths inside",
                )
    save_figure(material_figure(materials, options.covers), options.plot)
