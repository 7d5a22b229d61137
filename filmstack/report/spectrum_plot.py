"""Pictures of spectra: `Spectrum` -> here -> a matplotlib figure.

Three views: against wavelength, against angle, and a map over both. Quantities stand in rows of
panels, polarizations in columns, designs and angles (or wavelengths) are lines. T may be drawn as
optical density. Spectra hold fractions; percent is made here.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal, TypeAlias

import numpy as np
from matplotlib.patheffects import Normal, Stroke

from filmstack.errors import FilmstackError
from filmstack.report.axes import micrometres, percent_limits, wavelength_label
from filmstack.report.style import (
    COLOUR_MAP,
    GREY,
    INK,
    MOST_LINES,
    Margins,
    head_lines,
    label_lines,
    label_room,
    line_style,
    panel_grid,
    quiet_style,
    refuse_many,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.collections import QuadMesh
    from matplotlib.figure import Figure
    from matplotlib.lines import Line2D

    from filmstack.analysis.spectrum import Spectrum
    from filmstack.arraytypes import FloatArray

View: TypeAlias = Literal["wavelength", "angle", "map"]
Scale: TypeAlias = Literal["percent", "od"]

QUANTITIES = {"T": "transmittance T", "R": "reflectance R", "A": "absorptance A"}
POLARIZATIONS = {"_s": "s", "_p": "p", "": "mean of s and p"}
_ROUND_PERCENT = (0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 80, 90, 95, 98, 99, 99.5, 99.9)
_MOST_CROSSINGS = 9  # of lines on a map, along a row
_ROUND_DENSITIES = (0.5, 1, 2, 3, 4, 5, 6, 8, 10, 15, 20)
LEAST_DRAWN_ABSORPTANCE = 5e-4
"""Below this A is left out: on an axis in percent it would be a line at zero."""


@dataclass(frozen=True)
class Labelled:
    """A spectrum and the name of its design."""

    name: str
    spectrum: Spectrum


@dataclass(frozen=True)
class Curve:
    """One line of a panel: where it is read from, and its label."""

    spectrum: Spectrum
    row: int
    label: str


def spectrum_figure(
    spectra: Sequence[Labelled],
    *,
    view: View = "wavelength",
    scale: Scale = "percent",
    polarization: str = "all",
    conditions: str = "",
    small_print: Sequence[str] = (),
) -> Figure:
    """Return a figure of the spectra of one or several designs.

    Parameters
    ----------
    spectra : sequence of Labelled
        What to draw; several are compared line by line.
    view : {"wavelength", "angle", "map"}
        The axis, or both as a map (one design).
    scale : {"percent", "od"}
        T in percent or as optical density.
    polarization : {"all", "s", "p", "mean"}
        Which are drawn.
    conditions : str
        Under the title: what T is, from which side the light comes.
    small_print : sequence of str
        At the foot: materials with their sources, notes.

    Returns
    -------
    Figure

    Raises
    ------
    FilmstackError
        If there would be too many lines to tell apart, or a map of several designs or of one row.
    """
    suffixes = _suffixes(polarization, spectra)
    quantities = [name for name in QUANTITIES if name != "A" or _absorbs(spectra)]
    title = spectra[0].name if len(spectra) == 1 else f"{len(spectra)} designs compared"
    with quiet_style():
        if view == "map":
            figure = _map_figure(spectra, quantities, suffixes, scale, small_print)
        else:
            figure = _line_figure(spectra, quantities, suffixes, view, scale, small_print)
        head_lines(figure, title, conditions)
    return figure


def draw_spectrum(spectrum: Spectrum, axes: Axes | None = None) -> Axes:
    """Draw R and T, and A when there is any, of unpolarized light against wavelength.

    Parameters
    ----------
    spectrum : Spectrum
        What to draw; against angle if it has one wavelength only.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes

    Raises
    ------
    FilmstackError
        If there would be too many lines to tell apart.
    """
    view: View = "angle" if spectrum.wavelength_nm.size == 1 and spectrum.angle_deg.size > 1 else "wavelength"
    quantities = [name for name in "RTA" if name != "A" or _absorbs([Labelled("", spectrum)])]
    with quiet_style():
        if axes is None:
            sources = "; ".join(material.label for material in spectrum.stack.materials)
            small_print = [f"Materials: {sources}.", *(f"Note: {note}." for note in spectrum.notes)]
            margins = Margins(top=0.3, right=1.1)
            _, panels = panel_grid(1, 1, panel=(5.6, 3.2), margins=margins, small_print=small_print)
            axes = panels[0, 0]
        curves = list(_curves([Labelled("", spectrum)], view))
        _refuse_many(len(quantities) * len(curves), view)
        earlier = [line for line in axes.get_lines() if line.get_transform() == axes.transData]
        lines: list[Line2D] = []
        labels: list[str] = []
        for name in quantities:
            for curve in curves:
                x, y = _points(curve, name, "", view, "percent")
                lines += axes.plot(x, y, **line_style(len(earlier) + len(labels)))
                labels.append(f"{name} {curve.label}" if len(curves) > 1 else name)
        axes.set_ylim(*percent_limits(np.concatenate([np.asarray(line.get_ydata()) for line in earlier + lines])))
        axes.margins(x=0)
        axes.set_ylabel("R, T, A (%)" if "A" in quantities else "R, T (%)")
        axes.set_xlabel(_x_label([spectrum], view))
        axes.set_title(f"Unpolarized light. T is {spectrum.transmittance_into}.", color=GREY, size=8)
        label_lines(axes, lines, labels)
    return axes


def _line_figure(
    spectra: Sequence[Labelled],
    quantities: Sequence[str],
    suffixes: Sequence[str],
    view: View,
    scale: Scale,
    small_print: Sequence[str],
) -> Figure:
    """One column of panels, or a row a polarization where several curves leave no room for both."""
    curves = list(_curves(spectra, view))
    _refuse_many(len(curves), view)
    table = len(curves) > 1 and len(suffixes) > 1
    lines = [(curve, suffix) for curve in curves for suffix in ([""] if table else suffixes)]
    labels = [curve.label for curve in curves] if len(curves) > 1 else [POLARIZATIONS[suffix] for suffix in suffixes]
    room = label_room(labels)
    figure, panels = panel_grid(
        len(suffixes) if table else len(quantities),
        len(quantities) if table else 1,
        panel=(2.9, 1.7) if table else (5.6, 1.75 if len(quantities) > 1 else 3.0),
        margins=Margins(right=room, top=0.95 if table else 0.78, across=0.55 + room),
        small_print=small_print,
    )
    for row, suffix in enumerate(suffixes if table else [""]):
        for place, name in enumerate(quantities):
            axes = panels[row, place] if table else panels[place, 0]
            for number, (curve, own) in enumerate(lines):
                x, y = _points(curve, name, suffix + own, view, scale)
                marker = {"marker": "o", "markersize": 3.0} if x.size <= 12 else {}
                axes.plot(x, y, **line_style(number), **marker)
            axes.margins(x=0)
            axes.set_ylabel(_y_label(name, scale))
            if table:
                axes.set_title(_polarization_title(suffix), size=8, color=GREY)
    for place, name in enumerate(quantities):
        _same_limits(list(panels[:, place]) if table else [panels[place, 0]], _as_od(name, scale))
    if len(labels) > 1:
        for axes in panels.flat:
            label_lines(axes, list(axes.get_lines()), labels)
    for axes in panels[-1]:
        axes.set_xlabel(_x_label([item.spectrum for item in spectra], view))
    return figure


def _map_figure(
    spectra: Sequence[Labelled],
    quantities: Sequence[str],
    suffixes: Sequence[str],
    scale: Scale,
    small_print: Sequence[str],
) -> Figure:
    """A row of maps a polarization, a column a quantity, its scale of colours on top."""
    spectrum = spectra[0].spectrum
    _refuse_map(spectra)
    figure, panels = panel_grid(
        len(suffixes),
        len(quantities),
        panel=(3.1, 2.0 if len(suffixes) > 1 else 2.6),
        margins=Margins(top=1.55),
        small_print=small_print,
    )
    unit = 1000.0 if micrometres([spectrum]) else 1.0
    wavelength, columns = np.unique(spectrum.wavelength_nm / unit, return_index=True)
    angle, rows = np.unique(spectrum.angle_deg, return_index=True)
    for column, name in enumerate(quantities):
        grids = [_values(spectrum, name, suffix, scale)[np.ix_(rows, columns)] for suffix in suffixes]
        low, high = _limits(np.concatenate([grid.ravel() for grid in grids]), _as_od(name, scale))
        levels = _round_levels(grids, _as_od(name, scale))
        for axes, grid, suffix in zip(panels[:, column], grids, suffixes, strict=True):
            axes.grid(visible=False)
            image = axes.pcolormesh(
                wavelength,
                angle,
                grid,
                cmap=COLOUR_MAP,
                vmin=max(low, 0.0),
                vmax=high if _as_od(name, scale) else min(high, 100.0),
                shading="nearest",
                rasterized=True,
            )
            _contours(axes, wavelength, angle, grid, levels)
            axes.set_xlim(wavelength[0], wavelength[-1])
            axes.set_ylim(angle[0], angle[-1])
            axes.set_title(_polarization_title(suffix), size=8, color=GREY)
        panels[-1, column].set_xlabel(wavelength_label([spectrum]))
        _scale_of_colours(figure, panels[0, column], image, _y_label(name, scale))
    for axes in panels[:, 0]:
        axes.set_ylabel("angle of incidence (deg)")
    return figure


def _round_levels(grids: Sequence[FloatArray], density: bool) -> FloatArray:
    """A few round values that lie among the values drawn, for lines on a map."""
    values = np.concatenate([grid[np.isfinite(grid)] for grid in grids])
    if values.size == 0:
        return np.empty(0)
    steps = np.array(_ROUND_DENSITIES if density else _ROUND_PERCENT)
    wanted = np.quantile(values, (0.15, 0.4, 0.65, 0.88))
    levels = np.unique(steps[np.argmin(np.abs(steps[:, np.newaxis] - wanted), axis=0)])
    crossings = [sum(np.mean(np.sum(np.diff(grid > level), axis=1)) for grid in grids) / len(grids) for level in levels]
    order = np.argsort(crossings, kind="stable")  # a forest of lines hides the map: the plainest first
    return np.sort(levels[order][np.cumsum(np.array(crossings)[order]) <= _MOST_CROSSINGS])


def _contours(axes: Axes, wavelength: FloatArray, angle: FloatArray, grid: FloatArray, levels: FloatArray) -> None:
    """Lines of round value, so that a map can be read without its colours."""
    finite = grid[np.isfinite(grid)]
    inside = levels[(levels > np.min(finite, initial=np.inf)) & (levels < np.max(finite, initial=-np.inf))]
    if inside.size == 0:
        return
    lines = axes.contour(wavelength, angle, grid, levels=inside, colors="white", linewidths=0.7)
    for text in axes.clabel(lines, fmt="%g", fontsize=6.5):
        text.set_path_effects([Stroke(linewidth=1.5, foreground=INK), Normal()])
    lines.set_path_effects([Stroke(linewidth=1.3, foreground=INK), Normal()])


def _scale_of_colours(figure: Figure, below: Axes, image: QuadMesh, label: str) -> None:
    place, height = below.get_position(), figure.get_figheight()
    axes = figure.add_axes((place.x0, place.y1 + 0.3 / height, place.width, 0.1 / height))
    figure.colorbar(image, cax=axes, orientation="horizontal", ticklocation="top", label=label)
    axes.grid(visible=False)


def _refuse_map(spectra: Sequence[Labelled]) -> None:
    wavelengths, angles = spectra[0].spectrum.wavelength_nm.size, spectra[0].spectrum.angle_deg.size
    if len(spectra) > 1:
        raise FilmstackError("--view map", f"expected one design, got {len(spectra)}", "Draw one map a design")
    if wavelengths < 2 or angles < 2:
        raise FilmstackError(
            "--view map",
            f"expected at least two wavelengths and two angles, got {wavelengths} and {angles}",
            "Give --angle 0:80:1 and --wavelength START:STOP:STEP",
        )


def _suffixes(polarization: str, spectra: Sequence[Labelled]) -> list[str]:
    """Attribute endings to draw; at normal incidence s, p and their mean are one."""
    if polarization != "all":
        return ["" if polarization == "mean" else f"_{polarization}"]
    oblique = any(np.any(item.spectrum.angle_deg > 0.0) for item in spectra)
    return list(POLARIZATIONS) if oblique else [""]


def _absorbs(spectra: Sequence[Labelled]) -> bool:
    return any(float(np.max(item.spectrum.A, initial=0.0)) >= LEAST_DRAWN_ABSORPTANCE for item in spectra)


def _curves(spectra: Sequence[Labelled], view: View) -> Iterator[Curve]:
    """Lines of a panel; a label tells the design and the angle (or wavelength) unless all share them."""
    by_wavelength = view == "wavelength"
    axes = [item.spectrum.angle_deg if by_wavelength else item.spectrum.wavelength_nm for item in spectra]
    shared = len(spectra) > 1 and all(axis.size == 1 and axis[0] == axes[0][0] for axis in axes)
    for item, axis in zip(spectra, axes, strict=True):
        for row, value in enumerate(axis.tolist()):
            text = f"{value:g}°" if by_wavelength else f"{value:g} nm"
            parts = [item.name] * (len(spectra) > 1) + [text] * (not shared)
            yield Curve(item.spectrum, row, ", ".join(parts))


def _points(curve: Curve, name: str, suffix: str, view: View, scale: Scale) -> tuple[FloatArray, FloatArray]:
    """Abscissa in rising order, and the values of a curve."""
    values = _values(curve.spectrum, name, suffix, scale)
    if view == "wavelength":
        x = curve.spectrum.wavelength_nm / (1000.0 if micrometres([curve.spectrum]) else 1.0)
        y = values[curve.row]
    else:
        x, y = curve.spectrum.angle_deg, values[:, curve.row]
    order = np.argsort(x, kind="stable")
    return x[order], y[order]


def _as_od(name: str, scale: Scale) -> bool:
    return name == "T" and scale == "od"


def _values(spectrum: Spectrum, name: str, suffix: str, scale: Scale) -> FloatArray:
    """Percent, or optical density of T (nan where no light passes), shape (angle, wavelength)."""
    if not _as_od(name, scale):
        return 100.0 * np.asarray(getattr(spectrum, name + suffix), dtype=float)
    density = -np.asarray(getattr(spectrum, f"log10_T{suffix}"), dtype=float)
    return np.where(np.isfinite(density), density, np.nan)


def _limits(values: FloatArray, density: bool) -> tuple[float, float]:
    if not density:
        return percent_limits(values)
    finite = values[np.isfinite(values)]
    return 0.0, 1.05 * max(float(np.max(finite, initial=0.0)), 0.1)


def _same_limits(panels: Sequence[Axes], density: bool) -> None:
    values = [np.asarray(line.get_ydata(), dtype=float) for axes in panels for line in axes.get_lines()]
    for axes in panels:
        axes.set_ylim(*_limits(np.concatenate(values), density))


def _y_label(name: str, scale: Scale) -> str:
    return "optical density of T" if _as_od(name, scale) else f"{QUANTITIES[name]} (%)"


def _x_label(spectra: Sequence[Spectrum], view: View) -> str:
    return wavelength_label(spectra) if view == "wavelength" else "angle of incidence (deg)"


def _polarization_title(suffix: str) -> str:
    return "unpolarized (mean of s and p)" if suffix == "" else f"{POLARIZATIONS[suffix]} polarization"


def _refuse_many(lines: int, view: View) -> None:
    other = "angles" if view == "wavelength" else "wavelengths"
    refuse_many(lines, MOST_LINES, f"Choose fewer designs or {other}, or draw a map over wavelength and angle")
