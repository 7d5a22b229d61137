"""Entry of the command line: finds the command, runs it, turns errors into an exit status.

Exit status: 0 done, 1 a requirement is not met, 2 the input is wrong, 130 interrupted. `--help` and
`--version` import no command module. A new command is one line of `COMMANDS` and one module.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack import __version__
from filmstack.errors import FilmstackError

if TYPE_CHECKING:
    from filmstack.cli.parser import CommandParser

DONE, NOT_MET, WRONG_INPUT, INTERRUPTED = 0, 1, 2, 130

COMMANDS = {
    "spectrum": "reflectance, transmittance and absorptance of designs over wavelength and angle",
    "peaks": "every transmission peak of a design in a band, with width, Q, free spectral range and finesse",
    "phase": "phase, group delay, GDD and TOD of a design",
    "field": "electric field inside a design, its largest values, and where light is absorbed",
    "ellipsometry": "psi and delta of a design over wavelength and angle",
    "admittance": "admittance of a design, layer by layer, at one wavelength",
    "show": "the layers of a design as a table, and its index profile as a plot",
    "materials": "list the materials, print n and k, judge a table of your own",
}
"""Name of the command, which is also its module under `filmstack.cli`, and what it does."""


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command line and return its exit status.

    Parameters
    ----------
    arguments : sequence of str, optional
        The words after `filmstack`; those of the process if not given.

    Returns
    -------
    int
        0 done, 1 a requirement is not met, 2 the input is wrong, 130 interrupted.
    """
    words = list(sys.argv[1:] if arguments is None else arguments)
    try:
        status = _run(words)
        sys.stdout.flush()
        return status
    except FilmstackError as error:
        return _complain(str(error))
    except KeyboardInterrupt:
        print("filmstack: interrupted", file=sys.stderr)
        return INTERRUPTED
    except BrokenPipeError:  # the reader of the pipe, such as `head`, has all it wanted
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DONE
    except OSError as error:
        return _complain(f"{error.filename}: {error.strerror}" if error.filename else str(error))


def command_parser(name: str) -> CommandParser:
    """Return the parser of one command, which imports the command's module.

    Parameters
    ----------
    name : str
        A key of `COMMANDS`.

    Returns
    -------
    CommandParser
        Parser whose result carries the function to call as `run`.
    """
    from importlib import import_module

    from filmstack.cli.parser import CommandParser

    module = import_module(f"filmstack.cli.{name}")
    parser = CommandParser(f"filmstack {name}", module.HELP)
    module.add_arguments(parser)
    parser.set_defaults(run=module.run)
    return parser


def _run(words: list[str]) -> int:
    if not words or words[0] in ("-h", "--help", "help"):
        print(_help())
        return DONE
    if words[0] == "--version":
        print(f"filmstack {__version__}")
        return DONE
    if words[0] not in COMMANDS:
        raise _unknown(words[0])
    try:
        options = command_parser(words[0]).parse_args(words[1:])
    except SystemExit:  # --help of the command, printed
        return DONE
    return int(options.run(options))


def _help() -> str:
    width = max(map(len, COMMANDS))
    lines = [f"  {name:<{width}}  {text}" for name, text in COMMANDS.items()]
    return "\n".join(
        [
            "usage: filmstack COMMAND ... [options]",
            "",
            "Optical coatings: from a design file and real materials to spectra.",
            "",
            "commands:",
            *lines,
            "",
            "filmstack COMMAND --help tells the arguments of a command; filmstack --version the version.",
            "Exit status: 0 done, 1 a requirement is not met, 2 the input is wrong, 130 interrupted.",
        ]
    )


def _unknown(word: str) -> FilmstackError:
    from filmstack.files.hints import nearest

    if word.startswith("-"):
        return FilmstackError(
            f"unknown option {word}", "", nearest(word, ["--help", "--version"], "See filmstack --help")
        )
    return FilmstackError(
        f"unknown command {word!r}", "", nearest(word, COMMANDS, f"The commands are {', '.join(COMMANDS)}")
    )


def _complain(message: str) -> int:
    separator = "\n  " if "\n" in message else " "  # several faults: a line each
    print(f"filmstack:{separator}" + separator.join(message.splitlines()), file=sys.stderr)
    return WRONG_INPUT
