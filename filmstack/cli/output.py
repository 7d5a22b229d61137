"""Ways out of a command: tables for people, CSV and JSON for machines.

Results of `analysis` -> here -> standard output and files. No number is made here; values are only
written down: rounded for people, in full for machines.
"""

from __future__ import annotations

import csv
import json
import math
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from filmstack.files.atomic import atomic_writer

if TYPE_CHECKING:
    from filmstack.materials.material import Material


def format_table(headings: Sequence[str], rows: Iterable[Sequence[str]], *, left: Sequence[int] = ()) -> list[str]:
    r"""Return the lines of a table with aligned columns and a rule below the headings.

    Parameters
    ----------
    headings : sequence of str
        One a column; line breaks make a heading of several lines.
    rows : iterable of sequence of str
        Cells as text, as many as headings.
    left : sequence of int
        Columns aligned to the left; the others, of numbers, to the right.

    Returns
    -------
    list of str

    Examples
    --------
    >>> print(*format_table(["nm", "R"], [["550", "4.26"]]), sep="\n")
     nm     R
    ---  ----
    550  4.26
    """
    cells = [list(row) for row in rows]
    split = [heading.split("\n") for heading in headings]
    height = max(map(len, split))
    head = [[""] * (height - len(lines)) + lines for lines in split]
    widths = [
        max([*map(len, lines), *(len(row[column]) for row in cells)], default=0) for column, lines in enumerate(head)
    ]

    def line(texts: Sequence[str]) -> str:
        padded = [
            text.ljust(width) if column in left else text.rjust(width)
            for column, (text, width) in enumerate(zip(texts, widths, strict=True))
        ]
        return "  ".join(padded).rstrip()

    return [
        *(line([lines[level] for lines in head]) for level in range(height)),
        "  ".join("-" * width for width in widths),
        *(line(row) for row in cells),
    ]


def material_lines(materials: Iterable[Material]) -> list[str]:
    """Return a line a material: key, label with the source, range, and its own notes below.

    Parameters
    ----------
    materials : iterable of Material
        Media used by a result.

    Returns
    -------
    list of str
    """
    known = list(dict.fromkeys(materials))
    width = max((len(material.key) for material in known), default=0)
    lines = []
    for material in known:
        low, high = material.range_nm
        span = [f"{low:g} to {high:g} nm"] if math.isfinite(high) else []
        texts = [material.label, *span] if material.label != material.key else [*span, *material.provenance.notes]
        lines.append(f"  {material.key:<{width}}  {', '.join(texts)}".rstrip())
        if material.label != material.key:
            lines += [f"  {'':<{width}}    {note}" for note in material.provenance.notes]
    return lines


def material_records(materials: Iterable[Material]) -> list[dict[str, Any]]:
    """Return what `material_lines` tells, and the full source, for JSON.

    Parameters
    ----------
    materials : iterable of Material
        Media used by a result.

    Returns
    -------
    list of dict
    """
    return [
        {
            "key": material.key,
            "label": material.label,
            "source": material.provenance.source,
            "form": material.provenance.form,
            "range_nm": list(material.range_nm),
            "notes": list(material.provenance.notes),
        }
        for material in dict.fromkeys(materials)
    ]


def write_csv(path: Path, headings: Sequence[str], rows: Iterable[Sequence[object]]) -> None:
    """Write a table in full precision; the file appears whole or not at all.

    Parameters
    ----------
    path : Path
        Where to write.
    headings : sequence of str
        Names of the columns, with units.
    rows : iterable of sequence
        Cells; a float is written with every digit it has.

    Raises
    ------
    FilmstackError
        If the file can not be written.
    """
    with atomic_writer(path) as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(headings)
        writer.writerows(rows)


def json_text(value: object) -> str:
    """Return JSON; a number that JSON can not hold (inf, nan) becomes null.

    Parameters
    ----------
    value : object
        Dictionaries, lists, strings and numbers.

    Returns
    -------
    str

    Examples
    --------
    >>> json_text({"od": [1.5, float("inf")]})
    '{"od": [1.5, null]}'
    """
    return json.dumps(_finite(value), ensure_ascii=False, allow_nan=False)


def write_json(path: Path, value: object) -> None:
    """Write JSON as `json_text` makes it; the file appears whole or not at all.

    Parameters
    ----------
    path : Path
        Where to write.
    value : object
        Dictionaries, lists, strings and numbers.

    Raises
    ------
    FilmstackError
        If the file can not be written.
    """
    with atomic_writer(path) as file:
        file.write(json_text(value) + "\n")


def _finite(value: object) -> object:
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, dict):
        return {key: _finite(part) for key, part in value.items()}
    return [_finite(part) for part in value] if isinstance(value, list | tuple) else value


MOST_ROWS = 60
"""Rows of a table on the page; of more, every so many-th is shown."""


def thinned(rows: Sequence[Any], name: str) -> tuple[Sequence[Any], list[str]]:
    """Return the rows that a page shows, and what it leaves out, in words.

    Parameters
    ----------
    rows : sequence
        All rows.
    name : str
        What a row is, in the plural.

    Returns
    -------
    sequence, list of str
    """
    step = -(-len(rows) // MOST_ROWS)
    if step <= 1:
        return rows, []
    return rows[::step], [f"shown: 1 of every {step} of {len(rows)} {name}; --output FILE writes all"]


def deliver(
    options: Any,  # noqa: ANN401 - the options of a command with --output, --plot and --json
    table: tuple[Sequence[str], Iterable[Sequence[object]]],
    record: dict[str, Any],
    head: Sequence[str],
    body: Sequence[str],
) -> None:
    """Write what was asked for, and print: JSON, or a page that says what was written.

    Parameters
    ----------
    options : Options
        With `output`, `plot` and `json`; the picture is written already.
    table : (headings, rows)
        For CSV.
    record : dict
        For JSON.
    head, body : sequence of str
        The page; the body is left out where the numbers went to a file.
    """
    if options.output and options.output.suffix.lower() == ".csv":
        write_csv(options.output, *table)
    elif options.output:
        write_json(options.output, record)
    if options.json:
        print(json_text(record))
        return
    written = [f"wrote {path}" for path in (options.output, options.plot) if path]
    print("\n".join([*head, *([] if options.output else body), *([""] if written else []), *written]))
