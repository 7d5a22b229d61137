"""Pictures of phase and delay: `Phase` -> here -> a matplotlib figure."""

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

    from filmstack.analysis.phase import Phase, PhaseOf
    from filmstack.arraytypes import FloatArray

PANELS = {"phase_rad": "phase (rad)", "gd_fs": "group delay (fs)", "gdd_fs2": "GDD (fs²)", "tod_fs3": "TOD (fs³)"}


def phase_figure(
    phase: Phase, *, transmitted: bool, title: str, conditions: str, small_print: Sequence[str] = ()
) -> Figure:
    """Return a figure of phase, group delay, GDD and TOD against wavelength, s and p.

    Parameters
    ----------
    phase : Phase
        What to draw.
    transmitted : bool
        Of t instead of r.
    title, conditions : str
        Name of the design, and what light it is.
    small_print : sequence of str
        Materials and notes for the foot.

    Returns
    -------
    Figure
    """
    part = phase.transmission if transmitted else phase.reflection
    with quiet_style():
        figure, panels = panel_grid(
            len(PANELS), 1, panel=(6.2, 1.8), margins=Margins(top=0.85, right=1.1), small_print=small_print
        )
        for axes, (name, label) in zip(panels[:, 0], PANELS.items(), strict=True):
            _draw(axes, phase, part, name)
            axes.set_ylabel(label)
        panels[-1, 0].set_xlabel("vacuum wavelength (nm)")
        head_lines(figure, title, conditions)
    return figure


def draw_phase(phase: Phase, axes: Axes | None = None) -> Axes:
    """Draw the group delay of the reflected light against wavelength.

    Parameters
    ----------
    phase : Phase
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
        _draw(axes, phase, phase.reflection, "gd_fs")
        axes.set_ylabel(f"{PANELS['gd_fs']} of r")
        axes.set_xlabel("vacuum wavelength (nm)")
        axes.set_title(f"reflected light, referred to the {phase.plane}", color=GREY, size=8)
    return axes


def _draw(axes: Axes, phase: Phase, part: PhaseOf, name: str) -> None:
    labels: list[str] = []
    lines = []
    refuse_many(int(np.sum(np.where(phase.angle_deg == 0.0, 1, 2))), MOST_LINES, "Choose fewer angles")
    for j, angle in enumerate(phase.angle_deg.tolist()):
        for p in "s" if angle == 0.0 else "sp":
            values: FloatArray = getattr(part, f"{name}_{p}")[j]
            lines += axes.plot(phase.wavelength_nm, values, **line_style(len(labels)))
            labels.append(f"{angle:g}°" if angle == 0.0 else f"{angle:g}° {p}")
    axes.margins(x=0)
    drawn = np.concatenate([np.asarray(line.get_ydata()) for line in lines])
    low, high = np.nanpercentile(drawn, [1.0, 99.0])
    room = 0.15 * (high - low) or 0.1 * abs(high) or 1.0
    # A resonance would hide all else: the axis shows 98 % of the points, and says so where it cuts.
    if np.nanmin(drawn) < low - room or np.nanmax(drawn) > high + room:
        axes.set_title("axis cut to 98 % of the points", color=GREY, size=7, loc="right")
    axes.set_ylim(low - room, high + room)
    axes.ticklabel_format(axis="y", style="sci", scilimits=(-3, 4))
    label_lines(axes, lines, labels)
