"""Pictures of optical constants: n and k over wavelength, with the source on the picture."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter

from filmstack.report.style import (
    Margins,
    head_lines,
    label_lines,
    label_room,
    line_style,
    panel_grid,
    quiet_style,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from filmstack.arraytypes import FloatArray
    from filmstack.materials.material import Material

_POINTS = 1500
_MICROMETRES_FROM = 2500.0
_WIDEST_LINEAR = 6.0
"""Ratio of the ends above which the wavelength axis is logarithmic."""
_UNBOUNDED = (200.0, 20_000.0)
"""What is drawn of a medium without limits. [nm]"""


def material_figure(materials: Sequence[Material], window_nm: tuple[float, float] | None = None) -> Figure:
    """Draw n and k of materials over wavelength.

    Parameters
    ----------
    materials : sequence of Material
        What to draw, at most eight.
    window_nm : (float, float), optional
        Wavelengths wanted; all that the materials cover if not given. [nm]

    Returns
    -------
    Figure
        n above, k below, on a logarithmic scale where it spans decades; rows of tables as dots.
    """
    spans = [_span(material, window_nm) for material in materials]
    low, high = min(span[0] for span in spans), max(span[1] for span in spans)
    unit = 1000.0 if high > _MICROMETRES_FROM else 1.0
    keys = [material.key for material in materials]
    prints = [_small_print(material) for material in materials]
    curves = [_curve(material, span) for material, span in zip(materials, spans, strict=True)]
    absorbing = any(np.any(k != 0.0) for _, _, k in curves)
    with quiet_style():
        margins = Margins(right=label_room(keys), top=0.65)
        figure, panels = panel_grid(1 + absorbing, 1, panel=(6.0, 2.3), margins=margins, small_print=prints)
        lines = []
        for number, (wavelength, n, k) in enumerate(curves):
            style = line_style(number)
            lines += panels[0, 0].plot(wavelength / unit, n, **style)
            if absorbing:
                panels[1, 0].plot(wavelength / unit, k, **style)
            _dots(materials[number], spans[number], unit, list(panels[:, 0]), style["color"])
        panels[0, 0].set_ylabel("refractive index n")
        panels[-1, 0].set_xlabel(f"vacuum wavelength ({'µm' if unit > 1.0 else 'nm'})")
        _wavelength_scale(panels[-1, 0], low / unit, high / unit)
        if absorbing:
            panels[1, 0].set_ylabel("extinction coefficient k")
            _absorption_scale(panels[1, 0], np.concatenate([k for _, _, k in curves]))
        if len(materials) > 1:
            figure.canvas.draw()
            label_lines(panels[0, 0], lines, keys)
        title = materials[0].label if len(materials) == 1 else "Optical constants"
        head_lines(figure, title, _subtitle(materials, absorbing))
    return figure


def _span(material: Material, window_nm: tuple[float, float] | None) -> tuple[float, float]:
    low, high = material.range_nm
    if window_nm is not None:
        return max(low, window_nm[0]), min(high, window_nm[1])
    return (low, high) if math.isfinite(high) and low > 0.0 else _UNBOUNDED


def _curve(material: Material, span: tuple[float, float]) -> tuple[FloatArray, FloatArray, FloatArray]:
    wavelength = np.clip(np.geomspace(*span, _POINTS), *span)
    index = material.index(wavelength)
    return wavelength, index.real, 0.0 - index.imag


def _dots(material: Material, span: tuple[float, float], unit: float, panels: Sequence[Axes], colour: str) -> None:
    """Mark the rows of a table, as long as they can be told apart."""
    rows = getattr(material, "wavelength_nm", None)
    if rows is None:
        return
    shown = (rows >= span[0]) & (rows <= span[1])
    if np.count_nonzero(shown) > 120:
        return
    for axes, name in zip(panels, ("n", "k"), strict=False):
        axes.plot(rows[shown] / unit, getattr(material, name)[shown], ".", color=colour, markersize=3.5)


def _wavelength_scale(axes: Axes, low: float, high: float) -> None:
    if high > _WIDEST_LINEAR * low:
        axes.set_xscale("log")
        axes.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        axes.xaxis.set_major_formatter(FuncFormatter(lambda x, _: f"{x:g}"))
        axes.xaxis.set_minor_formatter(NullFormatter())
    axes.set_xlim(low, high)


def _absorption_scale(axes: Axes, k: FloatArray) -> None:
    """Draw k on a logarithmic scale where it spans decades."""
    positive = k[k > 0.0]
    if positive.size and k.min() >= 0.0 and k.max() > 30.0 * np.percentile(positive, 5):
        axes.set_yscale("log")
        axes.set_ylim(max(0.5 * positive.min(), 1e-9, 1e-10 * k.max()), 2.0 * k.max())


def _subtitle(materials: Sequence[Material], absorbing: bool) -> str:
    told = materials[0].provenance
    texts = [told.form, told.temperature] if len(materials) == 1 else ["N = n - ik", "sources below"]
    return ", ".join(text for text in (*texts, "" if absorbing else "k = 0 throughout") if text)


def _small_print(material: Material) -> str:
    told = material.provenance
    notes = f" Note: {'; '.join(told.notes)}." if told.notes else ""
    return f"{material.key}: {told.source}.{notes}"
