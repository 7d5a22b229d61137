"""Pictures of results with many rows: samples of a batch, and layers or depths of a gradient."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from filmstack.analysis.gradients import IndexGradient, ThicknessGradient
from filmstack.report.style import GREY, INK, Margins, line_style, panel_grid, quiet_style

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from filmstack.analysis.batch import BatchSpectrum


def draw_batch(batch: BatchSpectrum, axes: Axes | None = None) -> Axes:
    """Draw the first quantity of every sample at the first angle: single lines, and their mean.

    Parameters
    ----------
    batch : BatchSpectrum
        What to draw.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes
    """
    name, values = next(iter(batch.values.items()))
    lines = np.abs(values.reshape(-1, *values.shape[-2:])[:, 0])
    with quiet_style():
        axes = _axes(axes)
        axes.plot(batch.wavelength_nm, lines.T, color=GREY, linewidth=0.5, alpha=max(0.05, min(1.0, 20 / len(lines))))
        axes.plot(batch.wavelength_nm, lines.mean(axis=0), color=INK, linewidth=1.6)
        axes.set_xlabel("vacuum wavelength (nm)")
        axes.set_ylabel(name)
        axes.set_title(f"{len(lines)} samples and their mean at {batch.angle_deg[0]:g} deg", color=GREY, size=8)
        axes.margins(x=0)
    return axes


def draw_gradient(gradient: ThicknessGradient | IndexGradient, axes: Axes | None = None) -> Axes:
    """Draw the derivative of R, mean of s and p, of every row at the first angle.

    Parameters
    ----------
    gradient : ThicknessGradient, NeedleGradient or IndexGradient
        What to draw.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes
    """
    by_index = not isinstance(gradient, ThicknessGradient)
    values = (gradient.dR_dn if isinstance(gradient, IndexGradient) else gradient.dR)[:, 0]
    depth = getattr(gradient, "depth_nm", None)
    with quiet_style():
        axes = _axes(axes)
        if depth is not None and gradient.wavelength_nm.size <= len(values):
            for number, column in enumerate(values.T[:8]):
                axes.plot(depth, column, label=f"{gradient.wavelength_nm[number]:g} nm", **line_style(number))
            axes.set_xlabel("depth of the inserted needle (nm)")
        else:
            for number, row in enumerate(values[:8]):
                axes.plot(gradient.wavelength_nm, row, label=f"layer {number + 1}", **line_style(number))
            axes.set_xlabel("vacuum wavelength (nm)")
        axes.set_ylabel("dR / dn" if by_index else "dR / dd (1/nm)")
        axes.axhline(0.0, color=GREY, linewidth=0.6)
        axes.margins(x=0)
        axes.legend(frameon=False, fontsize=8)
        shown = "" if len(values) <= 8 or depth is not None else f", the first 8 of {len(values)} rows"
        axes.set_title(f"mean of s and p at {gradient.angle_deg[0]:g} deg{shown}", color=GREY, size=8)
    return axes


def _axes(axes: Axes | None) -> Axes:
    if axes is not None:
        return axes
    _, panels = panel_grid(1, 1, panel=(5.6, 3.2), margins=Margins(top=0.3, right=0.3))
    return panels[0, 0]
