"""Pictures of designs: `Design` -> here -> the index profile, Re N against depth.

Every material has a colour and a hatching of its own, so that it is told in grey too. The two faces
of a thick plate stand side by side; k is drawn where a film absorbs.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from matplotlib.collections import PolyCollection
from matplotlib.patches import Patch

from filmstack.errors import FilmstackError
from filmstack.report.style import GREY, INK, Margins, head_lines, line_style, panel_grid, quiet_style
from filmstack.stack import Layer, Plate

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from filmstack.design import Design
    from filmstack.materials.material import Material

MOST_DESIGNS = 6
LEAST_DRAWN_K = 0.01
MOST_HATCHED = 300
"""Of more layers, each is too narrow for a hatching to be seen."""
_HATCHES = ("", "////", "....", "\\\\\\\\", "xx", "--", "oo", "++")
_LEGEND_LINE = 0.185  # inch
_BORDER = 0.07  # part of the depth that is shown of the media before and behind


@dataclass(frozen=True)
class Face:
    """One row of films between two media; `start` says where its depth is 0."""

    title: str
    start: str
    before: Material
    films: tuple[Layer, ...]
    behind: Material


def profile_figure(designs: Sequence[Design]) -> Figure:
    """Return a figure of the index profiles of designs, a row each.

    Parameters
    ----------
    designs : sequence of Design
        What to draw.

    Returns
    -------
    Figure

    Raises
    ------
    FilmstackError
        If there are too many designs for one page.
    """
    if len(designs) > MOST_DESIGNS:
        raise FilmstackError("--plot", f"expected at most {MOST_DESIGNS} designs in one picture, got {len(designs)}")
    rows = [faces(design) for design in designs]
    columns = max(map(len, rows))
    materials = list(dict.fromkeys(material for design in designs for material in design.stack.materials))
    longest = max(len(material.key) for material in materials)
    several = len(designs) > 1
    margins = Margins(
        left=0.7, right=0.55 + 0.062 * longest, top=0.75 + 0.18 * (columns > 1) + 0.18 * several, down=1.0, across=0.75
    )
    height = max(2.3, _LEGEND_LINE * len(materials) / len(designs))
    small_print = [f"Materials: {'; '.join(material.label for material in materials)}."]
    with quiet_style():
        figure, panels = panel_grid(
            len(designs),
            columns,
            panel=(5.4 if columns == 1 else 3.6, height),
            margins=margins,
            small_print=small_print,
            share_x=False,
        )
        for row, design, panel_row in zip(rows, designs, panels, strict=True):
            for number, axes in enumerate(panel_row):
                if number >= len(row):
                    axes.set_visible(False)
                    continue
                name = design.name if several and number == 0 else ""
                title = f"{name}\n{row[number].title}" if columns > 1 else name
                draw_face(row[number], design.reference_wavelength_nm, materials, axes, title)
        _legend(figure, materials, margins)
        wavelengths = dict.fromkeys(f"{design.reference_wavelength_nm:g} nm" for design in designs)
        title = f"{len(designs)} designs compared" if several else designs[0].name
        head_lines(figure, title, f"Refractive index at {', '.join(wavelengths)}; light from the left")
    return figure


def draw_profile(design: Design, axes: Axes | None = None) -> Axes:
    """Draw the index profile of a design, of the films before the plate if there is one.

    Parameters
    ----------
    design : Design
        What to draw.
    axes : Axes, optional
        Where to draw; a new figure if not given.

    Returns
    -------
    Axes
    """
    materials = list(dict.fromkeys(design.stack.materials))
    with quiet_style():
        if axes is None:
            _, panels = panel_grid(1, 1, panel=(5.4, 2.6), margins=Margins(top=0.4))
            axes = panels[0, 0]
        face = faces(design)[0]
        draw_face(face, design.reference_wavelength_nm, materials, axes, f"{design.name} {face.title}".rstrip())
    return axes


def faces(design: Design) -> list[Face]:
    """Return the rows of films of a design: one, or those of both faces of its plate.

    Parameters
    ----------
    design : Design
        What to draw.

    Returns
    -------
    list of Face
    """
    stack = design.stack
    if not stack.plates:
        return [Face("", "first interface", stack.incident, stack.films, stack.exit)]
    place = next(place for place, layer in enumerate(stack.layers) if isinstance(layer, Plate))
    plate = stack.plates[0].material
    return [
        Face("front face", "first interface", stack.incident, stack.films[:place], plate),
        Face("back face", "plate", plate, stack.films[place:], stack.exit),
    ]


def draw_face(face: Face, wavelength_nm: float, materials: Sequence[Material], axes: Axes, title: str = "") -> None:
    """Draw one row of films: Re N as steps over filled areas, k as a dashed line where a film absorbs.

    Parameters
    ----------
    face : Face
        The films and the media around them.
    wavelength_nm : float
        Where the index is taken. [nm]
    materials : sequence of Material
        All materials of the figure; the place of one chooses its colour and hatching.
    axes : Axes
        Where to draw.
    title : str
        Above the panel.
    """
    depth = np.concatenate([[0.0], np.cumsum([film.thickness_nm for film in face.films])])
    border = _BORDER * (depth[-1] or 100.0)
    edges = np.concatenate([[-border], depth, [depth[-1] + border]])
    media = [face.before, *(film.material for film in face.films), face.behind]
    known = {medium: complex(medium.index(wavelength_nm)) for medium in set(media)}
    index = np.array([known[medium] for medium in media])
    hatched = len(media) <= MOST_HATCHED
    tops = np.maximum(index.real, np.where(-index.imag > LEAST_DRAWN_K, -index.imag, 0.0))
    for number, material in enumerate(materials):
        boxes = [
            [(left, 0.0), (left, top), (right, top), (right, 0.0)]
            for left, right, top, medium in zip(edges[:-1], edges[1:], tops, media, strict=True)
            if medium is material and right > left
        ]
        axes.add_collection(PolyCollection(boxes, **_fill(number, hatched)), autolim=False)
    axes.stairs(index.real, edges, baseline=None, color=INK, linewidth=1.1)
    if np.any(-index.imag > LEAST_DRAWN_K):
        axes.stairs(-index.imag, edges, baseline=None, color=INK, linewidth=1.1, linestyle=(0, (4, 1.5)))
        axes.text(0.08, 0.97, "solid: n, dashed: k", transform=axes.transAxes, size=7.5, color=GREY, va="top")
    for end in (depth[0], depth[-1]):
        axes.axvline(end, color=GREY, linewidth=0.8, linestyle=(0, (1, 2)))
    axes.set_xlim(edges[0], edges[-1])
    axes.set_ylim(0.0, 1.15 * max(index.real.max(), -index.imag.min()))
    axes.tick_params(labelbottom=True)
    axes.grid(visible=False)
    axes.set_xlabel(f"depth from the {face.start} (nm)")
    axes.set_ylabel("refractive index n")
    axes.set_title(title, color=GREY)


def _fill(number: int, hatched: bool = True) -> dict[str, Any]:
    """Colour and hatching of a material: 64 pairs differ."""
    style = line_style(number)["color"]
    hatch = _HATCHES[(number + number // len(_HATCHES)) % len(_HATCHES)] if hatched else None
    return {"facecolor": (*_light(style), 1.0), "edgecolor": style, "hatch": hatch, "linewidth": 0.4}


def _light(colour: str) -> tuple[float, ...]:
    red, green, blue = (int(colour[start : start + 2], 16) / 255 for start in (1, 3, 5))
    return tuple(1.0 - 0.45 * (1.0 - part) for part in (red, green, blue))


def _legend(figure: Figure, materials: Sequence[Material], margins: Margins) -> None:
    patches = [Patch(label=material.key, **_fill(number)) for number, material in enumerate(materials)]
    width, height = figure.get_size_inches()
    figure.legend(
        handles=patches,
        loc="upper left",
        bbox_to_anchor=(1.0 - (margins.right - 0.12) / width, 1.0 - (margins.top - 0.1) / height),
        frameon=False,
        fontsize=8,
        handlelength=1.6,
        handleheight=1.2,
    )
