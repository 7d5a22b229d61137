"""Pictures of psi and delta: `Ellipsometry` -> here -> a matplotlib figure."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from filmstack.report.style import (
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

    from filmstack.analysis.ellipsometry import Ellipsometry


def ellipsometry_figure(found: Ellipsometry, *, title: str, conditions: str, small_print: Sequence[str] = ()) -> Figure:
    """Return a figure of psi and delta against wavelength, a line an angle.

    Parameters
    ----------
    found : Ellipsometry
        What to draw.
    title, conditions : str
        Name of the design, and what light it is.
    small_print : sequence of str
        Materials and notes for the foot.

    Returns
    -------
    Figure
    """
    with quiet_style():
        margins = Margins(top=0.85, right=1.1)
        figure, panels = panel_grid(2, 1, panel=(6.2, 2.4), margins=margins, small_print=small_print)
        _draw(panels[0, 0], found, "psi_deg", "psi (deg)")
        _draw(panels[1, 0], found, "delta_deg", "delta (deg)")
        panels[1, 0].set_xlabel("vacuum wavelength (nm)")
        head_lines(figure, title, conditions)
    return figure


def draw_ellipsometry(found: Ellipsometry, axes: Axes | None = None) -> Axes:
    """Draw psi against wavelength.

    Parameters
    ----------
    found : Ellipsometry
        What to draw.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes
    """
    with quiet_style():
        if axes is None:
            _, panels = panel_grid(1, 1, panel=(5.6, 3.2), margins=Margins(top=0.3, right=1.1))
            axes = panels[0, 0]
        _draw(axes, found, "psi_deg", "psi (deg)")
        axes.set_xlabel("vacuum wavelength (nm)")
        axes.set_title("reflected light", color=GREY, size=8)
    return axes


def _draw(axes: Axes, found: Ellipsometry, name: str, label: str) -> None:
    refuse_many(found.angle_deg.size, MOST_LINES, "Choose fewer angles")
    # Delta starts anew at 360: the line is broken there.
    rows = getattr(found, name).copy()
    jumps = np.abs(np.diff(rows, axis=1)) > 180.0
    rows[:, 1:][jumps] = np.nan
    lines = [line for j, row in enumerate(rows) for line in axes.plot(found.wavelength_nm, row, **line_style(j))]
    axes.margins(x=0)
    # Labels are placed by the axis, so it is fixed first.
    low, high = (0.0, 90.0) if name == "psi_deg" else (0.0, 360.0)
    axes.set_ylim(low, high)
    axes.set_yticks(np.linspace(low, high, 7))
    axes.set_ylabel(label)
    label_lines(axes, lines, [f"{angle:g}°" for angle in found.angle_deg.tolist()])
