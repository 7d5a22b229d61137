"""What `filmstack materials` says: records and materials -> here -> lines of text and JSON values."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from filmstack.cli.output import format_table, material_records

if TYPE_CHECKING:
    from filmstack.materials.library import MaterialRecord
    from filmstack.materials.material import Material
    from filmstack.materials.tables import Table

Row = tuple[float, float, float]
"""Wavelength [nm], n and k [1]."""

_WIDTH = 100


def values(material: Material, wavelength_nm: Sequence[float]) -> list[Row]:
    """Return n and the positive k at each wavelength."""
    index = material.index(wavelength_nm)
    return [(float(w), float(N.real), 0.0 - float(N.imag)) for w, N in zip(wavelength_nm, index, strict=True)]


def value_page(materials: Sequence[Material], tables: Sequence[Sequence[Row]]) -> list[str]:
    """Return n and k of each material under its description."""
    lines: list[str] = []
    for material, rows in zip(materials, tables, strict=True):
        lines += [*description(material), ""]
        cells = [(f"{w:g}", f"{n:.5f}", f"{k:.4g}") for w, n, k in rows]
        lines += [*format_table(("nm", "n", "k"), cells), ""]
    return lines[:-1]


def value_record(material: Material, rows: Sequence[Row]) -> dict[str, Any]:
    """Return the same for JSON."""
    names = ("wavelength_nm", "n", "k")
    return {**material_records([material])[0], **{name: [row[i] for row in rows] for i, name in enumerate(names)}}


def description(material: Material) -> list[str]:
    """Return label, source and the rest of a material, a line each."""
    p = material.provenance
    return _described(p.label, p.key, p.form, p.range_nm, p.temperature, p.source, p.status, p.notes)


def _described(
    label: str,
    key: str,
    form: str,
    range_nm: tuple[float, float],
    temperature: str,
    source: str,
    status: str,
    notes: Sequence[str],
) -> list[str]:
    told = {
        "key": key,
        "form": form,
        "temperature": temperature,
        "wavelengths": _span(range_nm),
        "source": source,
        "status": status,
        "note": "; ".join(notes),
    }
    lines = [label]
    for name, text in told.items():
        if text:
            lines += textwrap.wrap(f"  {name + ':':<13}{text}", _WIDTH, subsequent_indent=" " * 15)
    return lines


def _span(range_nm: tuple[float, float]) -> str:
    low, high = range_nm
    return f"{low:g} to {high:g} nm" if math.isfinite(high) else "all"


def list_page(records: Sequence[MaterialRecord]) -> str:
    """Return the list, or the whole description of a record alone."""
    if len(records) == 1:
        one = records[0]
        lines = _described(one.label, one.key, one.form, one.range_nm, "", one.source, one.status, one.notes)
        names = [f"  {'plain name:':<13}{', '.join(one.default_of)}"] if one.default_of else []
        return "\n".join([*lines, *names])
    rows = [
        (one.key, ", ".join(one.default_of), _span(one.range_nm).replace(" nm", ""), one.kind, one.label)
        for one in records
    ]
    table = format_table(("key", "plain name", "nm", "kind", "label"), rows, left=(0, 1, 2, 3, 4))
    foot = "A design file says the key, or the plain name where one stands; filmstack materials KEY tells the source."
    return "\n".join([*table, "", f"{len(records)} materials. {foot}"])


def list_record(record: MaterialRecord) -> dict[str, Any]:
    """Return a line of the list for JSON."""
    return {
        "key": record.key,
        "label": record.label,
        "form": record.form,
        "range_nm": list(record.range_nm),
        "plain_names": list(record.default_of),
        "kind": record.kind,
        "source": record.source,
        "status": record.status,
        "notes": list(record.notes),
    }


def check_page(material: Table) -> list[str]:
    """Return how a person's file was understood."""
    rows = _check_rows(material)
    cells = [(f"{w:g}", f"{n:.5f}", f"{k:.4g}") for w, n, k in rows]
    supports = material.derivative_order
    return [
        f"{material.key}: can be used as a material",
        *textwrap.wrap(material.reading_report, _WIDTH, initial_indent="  ", subsequent_indent="  "),
        f"  n from {min(r[1] for r in rows):g} to {max(r[1] for r in rows):g}, "
        f"k from {min(r[2] for r in rows):g} to {max(r[2] for r in rows):g}; "
        f"{supports} continuous derivative{'s' if supports != 1 else ''} of n",
        "",
        *format_table(("nm", "n", "k"), cells if len(cells) <= 6 else [*cells[:3], ("...", "", ""), *cells[-3:]]),
    ]


def check_record(material: Table) -> dict[str, Any]:
    """Return the same for JSON."""
    return {
        **value_record(material, _check_rows(material)),
        "reading_report": material.reading_report,
        "derivative_order": material.derivative_order,
    }


def _check_rows(table: Table) -> list[Row]:
    return [(float(w), float(n), float(k)) for w, n, k in zip(table.wavelength_nm, table.n, table.k, strict=True)]
