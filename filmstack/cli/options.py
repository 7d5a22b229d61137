"""Options shared by commands, in one table: text of the command line -> checked values.

Wavelengths come out in nm whatever unit they were given in, angles in degrees. A new shared option
is one line of `OPTIONS`; a command takes what it needs by `add_options(parser, "wavelength", ...)`.
"""

from __future__ import annotations

import argparse
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

from filmstack.cli.grids import angles, wavelengths
from filmstack.cli.parser import one_of
from filmstack.errors import FilmstackError

TABLE_ENDINGS = (".csv", ".json")
PLOT_ENDINGS = (".png", ".svg", ".pdf")


def output_file(option: str, endings: Sequence[str]) -> Callable[[str], Path]:
    """Return a converter for the name of a file to write.

    Parameters
    ----------
    option : str
        Name of the option, for the message.
    endings : sequence of str
        The endings allowed, which choose the format.

    Returns
    -------
    callable
        For the `type` of an argument; it checks the ending and that the folder is there.
    """

    def convert(text: str) -> Path:
        path = Path(text)
        if path.suffix.lower() not in endings:
            allowed = f"{', '.join(endings[:-1])} or {endings[-1]}"
            raise FilmstackError(option, f"expected a file name ending in {allowed}, got {text!r}")
        if path.is_dir():
            raise FilmstackError(option, f"expected the name of a file, got the folder {text!r}")
        if not path.parent.is_dir():
            raise FilmstackError(
                option, f"expected a file in an existing folder, got {text!r}", f"Make the folder {path.parent} first"
            )
        return path

    return convert


OPTIONS: dict[str, dict[str, Any]] = {
    "wavelength": {
        "type": wavelengths,
        "metavar": "WAVELENGTHS",
        "help": "vacuum wavelengths: START:STOP:STEP (STOP included when it lies on the grid), a list such as "
        "450,550,650, or a file with one a line; in nm, or with um, eV or cm-1 at the end (0.4:0.7:0.01um)",
    },
    "angle": {
        "type": angles,
        "metavar": "ANGLES",
        "help": "angles of incidence in degrees, 0 to 90: a list such as 0,30,45 or START:STOP:STEP",
    },
    "polarization": {
        "type": one_of("--polarization", "s", "p", "mean", "all"),
        "default": "all",
        "metavar": "WHICH",
        "help": "s, p, mean (of s and p: unpolarized light) or all (default)",
    },
    "side": {
        "type": one_of("--side", "front", "back"),
        "default": "front",
        "metavar": "SIDE",
        "help": "light comes from the front (default) or from the back",
    },
    "output": {
        "type": output_file("--output", TABLE_ENDINGS),
        "metavar": "FILE",
        "help": "write the whole result to a .csv or .json file",
    },
    "plot": {
        "type": output_file("--plot", PLOT_ENDINGS),
        "metavar": "FILE",
        "help": "draw a picture: .png, .svg or .pdf",
    },
    "json": {"action": "store_true", "help": "print the result as JSON"},
}
"""Settings of each shared option `--NAME`, as argparse takes them."""


def add_options(parser: argparse.ArgumentParser, *names: str, **changes: dict[str, Any]) -> None:
    """Add shared options to the parser of a command.

    Parameters
    ----------
    parser : argparse.ArgumentParser
        Parser of the command.
    *names : str
        Keys of `OPTIONS`.
    **changes : dict
        Settings of an option that differ for this command, such as ``wavelength={"help": "..."}``.
    """
    for name in names:
        parser.add_argument(f"--{name}", **{**OPTIONS[name], **changes.get(name, {})})
