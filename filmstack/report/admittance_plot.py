"""Pictures of admittance: `AdmittanceLocus` -> here -> a matplotlib figure."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from filmstack.report.style import GREY, INK, Margins, head_lines, line_style, panel_grid, quiet_style

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from filmstack.analysis.admittance import AdmittanceLocus


def locus_figure(
    locus: AdmittanceLocus, materials: Sequence[str], *, title: str, conditions: str, small_print: Sequence[str] = ()
) -> Figure:
    """Return a figure of the locus, a style of line a material.

    Parameters
    ----------
    locus : AdmittanceLocus
        What to draw.
    materials : sequence of str
        Short name of each film's material, the film next to the light first.
    title, conditions : str
        Name of the design, and what light it is.
    small_print : sequence of str
        Materials and notes for the foot.

    Returns
    -------
    Figure
    """
    with quiet_style():
        margins = Margins(top=0.85, right=1.6)
        figure, panels = panel_grid(1, 1, panel=(5.6, 5.0), margins=margins, small_print=small_print)
        _draw(panels[0, 0], locus, materials)
        head_lines(figure, title, conditions)
    return figure


def draw_locus(locus: AdmittanceLocus, axes: Axes | None = None) -> Axes:
    """Draw the locus, from the substrate (square) to the front (dot).

    Parameters
    ----------
    locus : AdmittanceLocus
        What to draw.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes
    """
    with quiet_style():
        if axes is None:
            _, panels = panel_grid(1, 1, panel=(5.0, 4.6), margins=Margins(top=0.3, right=1.6))
            axes = panels[0, 0]
        _draw(axes, locus, [f"layer {layer + 1}" for layer in range(int(locus.layer[0]))])
        axes.set_title(f"{locus.wavelength_nm:g} nm, {locus.angle_deg:g}°, {locus.polarization}", color=GREY, size=8)
    return axes


def _draw(axes: Axes, locus: AdmittanceLocus, materials: Sequence[str]) -> None:
    names = list(dict.fromkeys(materials))
    for film in range(int(locus.layer[0]) - 1, -1, -1):
        y = locus.admittance[locus.layer == film]
        name = materials[film]
        told = name not in [line.get_label() for line in axes.get_lines()]
        axes.plot(y.real, y.imag, label=name if told else "_", **line_style(names.index(name)))
        along = np.concatenate([[0.0], np.cumsum(np.abs(np.diff(y)))])
        middle = min(int(np.searchsorted(along, 0.5 * along[-1])), len(y) - 2)
        axes.annotate(
            "", (y[middle + 1].real, y[middle + 1].imag), (y[middle].real, y[middle].imag),
            arrowprops={"arrowstyle": "-|>", "color": INK, "shrinkA": 0, "shrinkB": 0},
        )  # fmt: skip
    start, end = locus.admittance[0], locus.admittance[-1]
    axes.plot(start.real, start.imag, marker="s", color=INK, linestyle="none", label="substrate")
    axes.plot(end.real, end.imag, marker="o", color=INK, linestyle="none", label="whole stack")
    axes.plot(locus.incident, 0.0, marker="x", color=INK, linestyle="none", label="incident medium")
    axes.set_xlabel("real part of the admittance (free-space units)")
    axes.set_ylabel("imaginary part")
    axes.axhline(0.0, color=GREY, linewidth=0.6)
    if np.all(np.isfinite(locus.admittance)):
        axes.set_aspect("equal", adjustable="datalim")
    axes.legend(frameon=False, fontsize=8, loc="center left", bbox_to_anchor=(1.0, 0.5))
