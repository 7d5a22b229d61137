"""Pictures of transmission peaks: `Peaks` -> here -> a matplotlib figure."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.report.style import GREY, INK, Margins, head_lines, line_style, panel_grid, quiet_style

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from filmstack.analysis.peaks import Peaks

MOST_PANELS = 4
MOST_NAMES = 16
"""Peaks of a panel up to which each is named by its wavelength."""
ROOM = 0.068
"""Room of a name, in parts of a panel's width."""


def peaks_figure(results: Sequence[Peaks], *, title: str, conditions: str, small_print: Sequence[str] = ()) -> Figure:
    """Return a figure of T over the band with its peaks marked, a panel a polarization and angle.

    Parameters
    ----------
    results : sequence of Peaks
        What to draw; the first four.
    title, conditions : str
        Name of the design, and what light it is.
    small_print : sequence of str
        Materials and notes for the foot.

    Returns
    -------
    Figure
    """
    shown = results[:MOST_PANELS]
    with quiet_style():
        figure, panels = panel_grid(
            len(shown), 1, panel=(6.6, 2.4), margins=Margins(top=0.85, down=0.5), small_print=small_print
        )
        for axes, one in zip(panels[:, 0], shown, strict=True):
            _draw(axes, one)
        panels[-1, 0].set_xlabel("vacuum wavelength (nm)")
        head_lines(figure, title, conditions)
    return figure


def draw_peaks(peaks: Peaks, axes: Axes | None = None) -> Axes:
    """Draw T over the band with its peaks marked.

    Parameters
    ----------
    peaks : Peaks
        What to draw.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes
    """
    with quiet_style():
        if axes is None:
            _, panels = panel_grid(1, 1, panel=(5.6, 3.2), margins=Margins(top=0.5))
            axes = panels[0, 0]
        _draw(axes, peaks)
        axes.set_xlabel("vacuum wavelength (nm)")
    return axes


def _draw(axes: Axes, peaks: Peaks) -> None:
    wavelength, transmittance = peaks.curve()
    axes.plot(wavelength, 100.0 * transmittance, **line_style(0))
    mark = line_style(1)["color"]
    tops = [(peak.wavelength_nm, 100.0 * peak.transmittance) for peak in peaks]
    axes.plot([x for x, _ in tops], [y for _, y in tops], "v", color=mark, markersize=5, linestyle="none", zorder=3)
    for peak in peaks:
        if not math.isnan(peak.fwhm_nm):
            half = 50.0 * peak.transmittance
            axes.plot(
                [peak.half_low_nm, peak.half_high_nm], [half, half], "|-", color=mark, linewidth=1.2, markersize=5
            )
    axes.margins(x=0)
    top = max(100.0 * float(transmittance.max()), 1e-6)
    axes.set_ylim(0.0, 1.25 * top)
    axes.set_yticks([tick for tick in axes.get_yticks() if tick <= 1.02 * top])
    low, high = peaks.band_nm
    axes.set_xlim(low, high)
    axes.set_ylabel("T (%)")
    polarization = "s and p alike" if peaks.angle_deg == 0.0 else peaks.polarization
    count = f"{len(peaks)} peak{'' if len(peaks) == 1 else 's'}"
    axes.set_title(f"{peaks.angle_deg:g}°, {polarization}; {count}, half-maximum widths as bars", color=GREY, size=8)
    if len(peaks) <= MOST_NAMES:
        _name(axes, peaks)


def _name(axes: Axes, peaks: Peaks) -> None:
    """Write the wavelengths above the peaks, in two rows where they stand close together."""
    low, high = peaks.band_nm
    level = 100.0 * max(peak.transmittance for peak in peaks)
    ends = [-1.0, -1.0]
    for peak in peaks:
        place = (peak.wavelength_nm - low) / (high - low)
        row = 0 if place - ends[0] > ROOM else 1
        if place - ends[row] <= ROOM:
            continue  # no room in either row; the table has it
        ends[row] = place
        side = "left" if place < 0.04 else "right" if place > 0.96 else "center"
        axes.annotate(
            f"{peak.wavelength_nm:.2f}",
            (peak.wavelength_nm, level),
            xytext=(0, 5 + 9 * row),
            textcoords="offset points",
            ha=side,
            size=7,
            color=INK,
        )
