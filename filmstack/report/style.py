"""The look that every figure shares: lines, direct labels, small print, and writing to a file.

A line is told by its dashes and by a label at its end as well as by its colour, so that a figure
can be read in grey and by people who confuse colours.
"""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import matplotlib
import numpy as np
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from filmstack.errors import FilmstackError
from filmstack.files.atomic import atomic_writer

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from filmstack.arraytypes import AnyArray, FloatArray

INK, GREY, FAINT = "#222222", "#5a5a5a", "#e3e3e3"
COLOUR_MAP = "cividis"  # even steps of lightness; the same to most colour-blind readers

_STYLE: dict[Any, Any] = {
    "font.family": "sans-serif",
    "font.size": 9.0,
    "text.color": INK,
    "axes.labelcolor": INK,
    "axes.edgecolor": GREY,
    "axes.linewidth": 0.8,
    "axes.labelsize": 9.0,
    "axes.titlesize": 9.0,
    "axes.titlelocation": "left",
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "axes.axisbelow": True,
    "axes.formatter.useoffset": False,
    "grid.color": FAINT,
    "grid.linewidth": 0.7,
    "grid.linestyle": "-",
    "xtick.color": GREY,
    "ytick.color": GREY,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "xtick.labelsize": 8.5,
    "ytick.labelsize": 8.5,
    "figure.facecolor": "white",
    "savefig.facecolor": "white",
    "savefig.dpi": 200,
    "svg.hashsalt": "filmstack",
    "svg.fonttype": "path",
    "pdf.fonttype": 42,
}

_COLOURS = ("#14304f", "#c2500d", "#1f8a8a", "#7d4a94", "#b8860b", "#6b7280", "#a02c5a", "#3f6b2f")
_DASHES: tuple[tuple[float, ...], ...] = (
    (),
    (5.5, 1.8),
    (1.6, 1.4),
    (6.0, 1.6, 1.3, 1.6),
    (9.0, 3.0),
    (3.0, 1.2),
    (6.0, 1.5, 1.3, 1.5, 1.3, 1.5),
    (1.0, 2.6),
)
MOST_LINES = len(_COLOURS)


@dataclass(frozen=True)
class Margins:
    """Room around the panels of a figure, and between them down and across. [inch]"""

    left: float = 0.75
    right: float = 0.3
    top: float = 0.75
    bottom: float = 0.55
    down: float = 0.35
    across: float = 0.6


@contextmanager
def quiet_style() -> Iterator[None]:
    """Draw in the style of the house inside the `with` block."""
    with matplotlib.rc_context(_STYLE):
        yield


def line_style(number: int) -> dict[str, Any]:
    """Return colour and dashes of a figure's line.

    Parameters
    ----------
    number : int
        Position of the line, from 0; at most `MOST_LINES` differ.

    Returns
    -------
    dict
        Keywords for `Axes.plot`.
    """
    dashes = _DASHES[number % MOST_LINES]
    return {"color": _COLOURS[number % MOST_LINES], "linewidth": 1.5, "linestyle": (0, dashes) if dashes else "-"}


def panel_grid(
    rows: int,
    columns: int,
    *,
    panel: tuple[float, float],
    margins: Margins,
    small_print: Sequence[str] = (),
    share_x: bool = True,
) -> tuple[Figure, AnyArray]:
    """Return a figure with a grid of panels of a given size, and small print below them.

    Parameters
    ----------
    rows, columns : int
        Number of panels down and across.
    panel : (float, float)
        Width and height of a panel. [inch]
    margins : Margins
        Room around and between the panels.
    small_print : sequence of str
        Paragraphs at the foot: materials and their sources, assumptions.
    share_x : bool
        The panels share the x axis of their column.

    Returns
    -------
    Figure, ndarray of Axes, shape (rows, columns)
        The panels.
    """
    width = margins.left + columns * panel[0] + (columns - 1) * margins.across + margins.right
    wrapped = [
        line for text in small_print for line in textwrap.wrap(text, int((width - 0.5) * 20.5), subsequent_indent="  ")
    ]
    foot = margins.bottom + (0.115 * len(wrapped) + 0.12 if wrapped else 0.0)
    height = margins.top + rows * panel[1] + (rows - 1) * margins.down + foot
    figure = Figure(figsize=(width, height))
    axes = figure.subplots(
        rows,
        columns,
        squeeze=False,
        sharex="col" if share_x else False,
        gridspec_kw={
            "left": margins.left / width,
            "right": 1.0 - margins.right / width,
            "top": 1.0 - margins.top / height,
            "bottom": foot / height,
            "wspace": margins.across / panel[0],
            "hspace": margins.down / panel[1],
        },
    )
    figure.text(
        0.25 / width, 0.1 / height, "\n".join(wrapped), size=6.5, color=GREY, va="bottom", ha="left", linespacing=1.25
    )
    return figure, np.asarray(axes)


def refuse_many(lines: int, most: int, advice: str) -> None:
    """Refuse a picture of more lines than can be told apart.

    Parameters
    ----------
    lines, most : int
        Lines asked for, and how many a panel can hold.
    advice : str
        What to do.

    Raises
    ------
    FilmstackError
        If there are too many.
    """
    if lines > most:
        raise FilmstackError("picture", f"expected at most {most} lines a panel, got {lines}", advice)


def head_lines(figure: Figure, title: str, subtitle: str) -> None:
    """Write the title and one line below it at the upper left of a figure.

    Parameters
    ----------
    figure : Figure
        Figure with about 0.7 inch free at the top.
    title, subtitle : str
        What is shown, and under which conditions.
    """
    width, height = figure.get_size_inches()
    room = width - 0.45
    size = min(11.5, 11.5 * room / max(0.098 * len(title), 1e-3))
    text = textwrap.fill(subtitle, int(room * 16.5))
    figure.text(0.25 / width, 1.0 - 0.12 / height, title, size=size, weight="bold", va="top", ha="left")
    figure.text(0.25 / width, 1.0 - 0.35 / height, text, size=8.0, color=GREY, va="top", ha="left", linespacing=1.1)


def label_room(labels: Sequence[str]) -> float:
    """Return the room that `label_lines` needs to the right of a panel. [inch]

    Parameters
    ----------
    labels : sequence of str
        Labels of the panel; fewer than two need none.
    """
    return 0.25 + (0.4 + 0.062 * max(map(len, labels)) if len(labels) > 1 else 0.0)


def label_lines(axes: Axes, lines: Sequence[Line2D], labels: Sequence[str]) -> None:
    """Write the name of each line of a panel at its right end, with a sample of its dashes.

    Parameters
    ----------
    axes : Axes
        Panel whose limits are final.
    lines : sequence of Line2D
        Lines of the panel.
    labels : sequence of str
        One a line.
    """
    figure = axes.get_figure(root=True)
    place = axes.get_position()
    width, height = (figure.get_size_inches() if figure is not None else np.ones(2)) * (place.width, place.height)
    inside = axes.transLimits.transform(  # parts of the panel, on a logarithmic scale too
        [axes.transScale.transform((_last_finite(line.get_xdata()), _last_finite(line.get_ydata()))) for line in lines]
    )
    stops, ends = inside[:, 0], np.clip(inside[:, 1], 0.0, 1.0)
    places = _spread(ends, np.full(len(labels), 8.0 * 1.2 / 72.0 / height))
    start, stop = 1.0 + 0.12 / width, 1.0 + 0.4 / width
    for line, label, last, end, level in zip(lines, labels, stops, ends, places, strict=True):
        lead = Line2D([last, 1.0, start], [end, end, level], linewidth=0.5, alpha=0.5, color=line.get_color())
        sample = Line2D([start, stop], [level, level])
        sample.update_from(line)
        sample.set_marker("")
        for mark in (lead, sample):
            mark.set_transform(axes.transAxes)
            mark.set_clip_on(False)
            axes.add_artist(mark)
        axes.text(
            stop + 0.05 / width,
            level,
            label,
            size=8.0,
            va="center",
            ha="left",
            color=line.get_color(),
            transform=axes.transAxes,
            clip_on=False,
        )


def save_figure(figure: Figure, path: Path) -> None:
    """Write a figure as PNG, SVG or PDF, by the ending; the file appears whole or not at all.

    Parameters
    ----------
    figure : Figure
        What to write.
    path : Path
        Name ending in .png, .svg or .pdf.

    Raises
    ------
    FilmstackError
        If the file can not be written.
    """
    kind = path.suffix.lower().lstrip(".")
    undated: dict[str, Any] = {"svg": {"Date": None}, "pdf": {"CreationDate": None}}.get(kind, {})
    with quiet_style(), atomic_writer(path, "wb") as file:
        figure.savefig(file, format=kind, metadata=undated)


def _last_finite(values: Any) -> float:  # noqa: ANN401 - matplotlib's own
    finite = np.asarray(values, dtype=float)
    finite = finite[np.isfinite(finite)]
    return float(finite[-1]) if finite.size else 0.0


def _spread(wanted: FloatArray, heights: FloatArray) -> FloatArray:
    """Move labels apart, each as near to its place as the others allow (pool adjacent clashes)."""
    order = np.argsort(wanted, kind="stable")
    blocks: list[tuple[list[int], float, float]] = []  # members, centre, height
    for number in order:
        block = ([int(number)], float(wanted[number]), float(heights[number]))
        while blocks and blocks[-1][1] + blocks[-1][2] / 2 > block[1] - block[2] / 2:
            other = blocks.pop()
            share = len(other[0]) / (len(other[0]) + len(block[0]))
            block = (other[0] + block[0], share * other[1] + (1 - share) * block[1], other[2] + block[2])
        blocks.append(block)
    places = np.empty_like(wanted)
    for members, centre, height in blocks:
        bottom = centre - height / 2
        for member in members:
            places[member] = bottom + heights[member] / 2
            bottom += float(heights[member])
    return places
