"""Pictures of the field inside a stack: `Field` -> here -> a matplotlib figure."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from filmstack.report.style import (
    FAINT,
    GREY,
    MOST_LINES,
    Margins,
    head_lines,
    label_lines,
    line_style,
    panel_grid,
    quiet_style,
    refuse_many,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure
    from matplotlib.lines import Line2D

    from filmstack.analysis.field import Field

MOST_NAMES = 12


def field_figure(
    fields: Sequence[Field],
    materials: Sequence[str],
    *,
    title: str,
    conditions: str,
    small_print: Sequence[str] = (),
) -> Figure:
    """Return a figure of |E|^2 against depth, a panel a polarization.

    Parameters
    ----------
    fields : sequence of Field
        Fields of one design, of s, p or both.
    materials : sequence of str
        Short names of incident medium, films and exit medium.
    title, conditions : str
        Name of the design, and what light it is.
    small_print : sequence of str
        Materials and notes for the foot.

    Returns
    -------
    Figure
    """
    with quiet_style():
        figure, panels = panel_grid(
            len(fields), 1, panel=(7.0, 2.7), margins=Margins(top=0.95, right=1.6, down=0.45), small_print=small_print
        )
        for axes, one in zip(panels[:, 0], fields, strict=True):
            _draw(axes, one)
            _name_films(axes, one, materials)
            axes.set_title(f"{one.polarization} polarization", color=GREY, size=8, pad=14)
        panels[-1, 0].set_xlabel("depth below the first interface (nm)")
        head_lines(figure, title, conditions)
    return figure


def draw_field(field: Field, axes: Axes | None = None) -> Axes:
    """Draw |E|^2 against depth, up to four wavelengths and angles.

    Parameters
    ----------
    field : Field
        What to draw.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes
    """
    with quiet_style():
        if axes is None:
            _, panels = panel_grid(1, 1, panel=(5.6, 3.2), margins=Margins(top=0.3, right=1.6))
            axes = panels[0, 0]
        _draw(axes, field)
        axes.set_xlabel("depth below the first interface (nm)")
        axes.set_title(f"{field.polarization} polarization", color=GREY, size=8)
    return axes


def _draw(axes: Axes, field: Field) -> None:
    for number, (a, b) in enumerate(zip(field.boundaries_nm[:-1], field.boundaries_nm[1:], strict=True)):
        if number % 2 == 0:
            axes.axvspan(a, b, color=FAINT, alpha=0.6, linewidth=0, zorder=0)
    refuse_many(field.intensity[0].size, MOST_LINES, "Choose fewer wavelengths or angles")
    lines: list[Line2D] = []
    labels: list[str] = []
    for j, angle in enumerate(field.angle_deg.tolist()):
        for i, wavelength in enumerate(field.wavelength_nm.tolist()):
            lines += axes.plot(field.depth_nm, field.intensity[:, j, i], **line_style(len(labels)))
            labels.append(f"{wavelength:g} nm, {angle:g}°")
    axes.set_ylim(0.0, 1.06 * max(float(np.max(line.get_ydata())) for line in lines))
    axes.grid(False)
    axes.margins(x=0)
    axes.set_ylabel("|E|² over the incident |E|²")
    label_lines(axes, lines, labels)


def _name_films(axes: Axes, field: Field, materials: Sequence[str]) -> None:
    """Write the materials above their films, where there is room."""
    low, high = axes.get_xlim()
    edges = [low, *field.boundaries_nm.tolist(), high]
    if len(materials) > MOST_NAMES + 2:
        return
    for name, a, b in zip(materials, edges[:-1], edges[1:], strict=True):
        if (b - a) / (high - low) > 0.012 * len(name):
            place = axes.get_xaxis_transform()
            axes.text((a + b) / 2, 1.02, name, transform=place, ha="center", va="bottom", size=7, color=GREY)
