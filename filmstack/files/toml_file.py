"""TOML on disk: a file -> a dictionary, with clear words for what is no TOML; and back, in a steady order.

The order of keys is that of the dictionary and every layer has lines of its own, so that version
control shows what really changed.
"""

from __future__ import annotations

import hashlib
import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from filmstack.errors import FilmstackError

_PLACE = re.compile(r"^(?P<what>.*) \(at (?:line (?P<line>\d+), column (?P<column>\d+)|end of document)\)$", re.DOTALL)
_VERSION_LINE = "filmstack = 1"


@dataclass(frozen=True)
class TomlFile:
    """What stands in a file.

    Parameters
    ----------
    table : dict
        The dictionary of tomllib.
    sha256 : str
        Hash of the bytes of the file, as hexadecimal digits.
    """

    table: dict[str, Any]
    sha256: str


def read_toml(path: str | Path, error: type[FilmstackError]) -> TomlFile:
    """Read a TOML file.

    Parameters
    ----------
    path : str or Path
        The file.
    error : type of FilmstackError
        Kind of the error.

    Returns
    -------
    TomlFile

    Raises
    ------
    error
        If it is not there, not a file, not UTF-8 or not TOML.
    """
    content = _content(Path(path), str(path), error)
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        line = content[: fault.start].count(b"\n") + 1
        raise error(f"{path}: line {line}", "expected text in UTF-8", "Save the file as UTF-8") from fault
    try:
        return TomlFile(tomllib.loads(text), hashlib.sha256(content).hexdigest())
    except tomllib.TOMLDecodeError as fault:
        raise _no_toml(str(path), text, str(fault), error) from fault
    except RecursionError as fault:
        raise error(str(path), "expected tables and lists at most a hundred deep, got more") from fault


def _content(path: Path, name: str, error: type[FilmstackError]) -> bytes:
    try:
        return path.read_bytes()
    except FileNotFoundError as fault:
        raise error(name, "expected a file, got none of that name", "Check the name and the folder") from fault
    except IsADirectoryError as fault:
        raise error(name, "expected a file, got a folder", "Name a .toml file in it") from fault
    except (OSError, ValueError) as fault:
        raise error(name, f"can not be read: {getattr(fault, 'strerror', None) or fault}") from fault


def _no_toml(name: str, text: str, message: str, error: type[FilmstackError]) -> FilmstackError:
    place = _PLACE.match(message)
    if not place:
        return error(name, f"not valid TOML: {message}")
    lines = text.split("\n")
    number = int(place["line"] or len(lines))
    what = place["what"][:1].lower() + place["what"][1:]
    if not place["line"]:
        return error(name, f"not valid TOML at the end of the file: {what}")
    found = lines[number - 1].strip()
    shown = found if len(found) <= 60 else f"{found[:57]}..."
    where = f"{name}: line {number}, column {place['column']}"
    return error(where, f"not valid TOML: {what}, in {shown!r}", _advice(found, what))


def _advice(line: str, what: str) -> str:
    if what.startswith("cannot overwrite"):
        return "A key stands once in a table; a new layer begins with [[layer]]"
    if what == r"illegal character '\n'":
        return "Close the text with a quotation mark"
    if re.search(r"=\s*[-+]?\d+,\d+\s*(#.*)?$", line):
        return "Write a decimal point, not a comma"
    if re.search(r"=\s*[^\W\d][^\"'\[{]*$", line):
        return "Put a text in quotation marks"
    return ""


def toml_text(table: Mapping[str, Any]) -> str:
    """Return the text of a TOML file.

    Parameters
    ----------
    table : mapping
        Values first, then tables and lists of tables, in the order in which they are to stand.

    Returns
    -------
    str

    Examples
    --------
    >>> print(toml_text({"name": "one", "layer": [{"material": "SiO2", "thickness_nm": 90.5}]}))
    name = "one"
    <BLANKLINE>
    [[layer]]
    material = "SiO2"
    thickness_nm = 90.5
    <BLANKLINE>
    """
    blocks = [_lines({key: value for key, value in table.items() if not _is_section(value)})]
    for key, value in table.items():
        if isinstance(value, Mapping) and _is_section(value):
            blocks.append([f"[{_key(key)}]", *_lines(value)])
        elif _is_section(value):
            blocks += [[f"[[{_key(key)}]]", *_lines(item)] for item in value]
    return "\n".join("\n".join([*block, ""]) for block in blocks if block)


def _is_section(value: object) -> bool:
    """Tell whether a value at the top of the file gets a heading of its own."""
    if isinstance(value, Mapping):
        return not set(value) <= {"n", "k"}  # a constant index stays in its line
    return isinstance(value, list) and bool(value) and all(isinstance(item, Mapping) for item in value)


def _lines(table: Mapping[str, Any]) -> list[str]:
    return [f"{_key(key)} = {_value(value)}" for key, value in table.items()]


def _value(value: object, indent: str = "") -> str:
    """Return the text of a value; a list of tables has a line each, tables in them too."""
    if isinstance(value, Mapping):
        inner = [f"{_key(key)} = {_value(item, indent)}" for key, item in value.items()]
        return f"{{ {', '.join(inner)} }}" if inner else "{}"
    if isinstance(value, list) and any(isinstance(item, Mapping) for item in value):
        deeper = f"{indent}    "
        return "[\n" + "".join(f"{deeper}{_value(item, deeper)},\n" for item in value) + f"{indent}]"
    if isinstance(value, list):
        return f"[{', '.join(map(_value, value))}]"
    import tomli_w

    several = isinstance(value, str) and "\n" in value and "\r" not in value
    return tomli_w.dumps({"v": value}, multiline_strings=several)[4:].removesuffix("\n")


def _key(name: str) -> str:
    if re.fullmatch("[A-Za-z0-9_-]+", name):
        return name
    import tomli_w

    return tomli_w.dumps({name: 0}).removesuffix(" = 0\n")
