"""Exact derivatives of a spectrum by film thickness and index, and of a needle inserted at any depth.

`Stack` -> here -> `synthesis`, `tolerancing`. One forward and one backward pass give all of them;
nothing is a finite difference. With thick plates only R and T have derivatives, by the chain rule
through the ray sum.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np

from filmstack.analysis.gradient_rows import Amplitudes, ByIndex, ByNeedle, ByThickness, Place, Rows, Turned
from filmstack.analysis.points import checked_axis, request
from filmstack.errors import ArgumentError
from filmstack.materials.material import Material
from filmstack.stack import Layer, Stack
from filmstack.wave.media import Media

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray, IntArray

NEEDLE_DEPTHS = 16
"""Depths a layer at which a needle is tried by default, both faces included."""


def _pair_frame(result: Any, names: tuple[str, ...], row_name: str) -> pd.DataFrame:  # noqa: ANN401
    import pandas as pd

    first = getattr(result, names[0])
    row, angle, wavelength = np.meshgrid(np.arange(len(first)), result.angle_deg, result.wavelength_nm, indexing="ij")
    columns = {row_name: row.ravel(), "angle_deg": angle.ravel(), "wavelength_nm": wavelength.ravel()}
    return pd.DataFrame(columns | {name: getattr(result, name).ravel() for name in names})


@dataclass(frozen=True, eq=False)
class _Gradient:
    """Axes of a gradient and its rows; `d` names are computed when asked for."""

    wavelength_nm: FloatArray
    angle_deg: FloatArray
    notes: tuple[str, ...]
    _rows: Rows


@dataclass(frozen=True, eq=False)
class ThicknessGradient(_Gradient):
    """Derivatives by film thickness, shape (layer, angle, wavelength), per nm."""

    @cached_property
    def dR_s(self) -> FloatArray:
        """Of R of s. [1/nm]"""
        return self._rows.power(False, False)

    @cached_property
    def dR_p(self) -> FloatArray:
        """Of R of p. [1/nm]"""
        return self._rows.power(True, False)

    @property
    def dR(self) -> FloatArray:
        """Of R, mean of s and p. [1/nm]"""
        return 0.5 * (self.dR_s + self.dR_p)

    @cached_property
    def dT_s(self) -> FloatArray:
        """Of T of s. [1/nm]"""
        return self._rows.power(False, True)

    @cached_property
    def dT_p(self) -> FloatArray:
        """Of T of p. [1/nm]"""
        return self._rows.power(True, True)

    @property
    def dT(self) -> FloatArray:
        """Of T, mean of s and p. [1/nm]"""
        return 0.5 * (self.dT_s + self.dT_p)

    @cached_property
    def dr_s(self) -> ComplexArray:
        """Of the amplitude reflectance of s. [1/nm]"""
        return self._rows.amplitude(False, False)

    @cached_property
    def dr_p(self) -> ComplexArray:
        """Of the amplitude reflectance of p. [1/nm]"""
        return self._rows.amplitude(True, False)

    @cached_property
    def dt_s(self) -> ComplexArray:
        """Of the amplitude transmittance of s. [1/nm]"""
        return self._rows.amplitude(False, True)

    @cached_property
    def dt_p(self) -> ComplexArray:
        """Of the amplitude transmittance of p. [1/nm]"""
        return self._rows.amplitude(True, True)

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a layer, angle and wavelength."""
        return _pair_frame(self, ("dR_s", "dR_p", "dR", "dT_s", "dT_p", "dT"), "layer")

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw the derivative of R, mean of s and p, of every row against wavelength at the first angle."""
        from filmstack.report.rows_plot import draw_gradient

        return draw_gradient(self, ax)


@dataclass(frozen=True, eq=False)
class NeedleGradient(ThicknessGradient):
    """Derivatives by the thickness of an inserted needle, shape (depth, angle, wavelength), per nm inserted.

    The host layer keeps its thickness.
    """

    depth_nm: FloatArray
    """Depth of each row: from the named layer's front face, or from the first interface. [nm]"""
    layer: IntArray
    """Layer of each row, from 0."""

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a depth, angle and wavelength."""
        frame = _pair_frame(self, ("dR_s", "dR_p", "dR", "dT_s", "dT_p", "dT"), "row")
        frame.insert(1, "layer", self.layer[frame["row"]])
        frame.insert(2, "depth_nm", self.depth_nm[frame["row"]])
        return frame


@dataclass(frozen=True, eq=False)
class IndexGradient(_Gradient):
    """Derivatives by n and by k (positive) of each film, shape (layer, angle, wavelength), per unit."""

    def __dir__(self) -> list[str]:
        """List the derivatives too."""
        kinds = [f"{kind}{p}" for kind in ("dR", "dT") for p in ("", "_s", "_p")]
        kinds += [f"{kind}_{p}" for kind in ("dr", "dt") for p in "sp"]
        return [*super().__dir__(), *(f"{kind}_{variable}" for kind in kinds for variable in ("dn", "dk"))]

    def __getattr__(self, name: str) -> Any:  # noqa: ANN401 - real or complex array
        """Compute dR_s_dn ... dt_p_dk; dR_dn, dR_dk, dT_dn, dT_dk are means of s and p."""
        quantity, _, variable = name.rpartition("_")
        if variable not in ("dn", "dk") or quantity[:2] not in ("dR", "dT", "dr", "dt"):
            raise AttributeError(f"{type(self).__name__!r} has no attribute {name!r}")
        if quantity in ("dR", "dT"):
            return 0.5 * (getattr(self, f"{quantity}_s_{variable}") + getattr(self, f"{quantity}_p_{variable}"))
        kind, _, polarization = quantity.partition("_")
        if polarization not in ("s", "p"):
            raise AttributeError(f"{type(self).__name__!r} has no attribute {name!r}")
        factor = 1.0 if variable == "dn" else -1j
        transmitted = kind in ("dT", "dt")
        if kind in ("dR", "dT"):
            return self._rows.power(polarization == "p", transmitted, factor)
        return factor * self._rows.amplitude(polarization == "p", transmitted)

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a layer, angle and wavelength."""
        names = tuple(f"{kind}_{p}_{x}" for kind in ("dR", "dT") for p in "sp" for x in ("dn", "dk"))
        return _pair_frame(self, names, "layer")

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw the derivative of R, mean of s and p, of every row against wavelength at the first angle."""
        from filmstack.report.rows_plot import draw_gradient

        return draw_gradient(self, ax)


def thickness_gradient(stack: Stack, wavelength_nm: ArrayLike, angle_deg: ArrayLike = 0.0) -> ThicknessGradient:
    """Compute the derivatives of a spectrum by every film thickness.

    Parameters
    ----------
    stack : Stack
        Films and thick plates between two media; with a plate dR and dT only.
    wavelength_nm, angle_deg : array_like of float
        As in `spectrum`. [nm], [deg]

    Returns
    -------
    ThicknessGradient
        Arrays of shape (layer, angle, wavelength), per nm.

    Raises
    ------
    ArgumentError, MaterialRangeError
        As in `spectrum`; also if a film of N = 0 blocks p.

    Examples
    --------
    >>> import filmstack as fs
    >>> layer = fs.Layer(fs.constant(1.38), 90.0)
    >>> fs.thickness_gradient(fs.Stack(fs.constant(1.0), [layer], fs.constant(1.52)), 550.0).dR_s.round(8)
    array([[[-0.00014564]]])
    """
    asked = request(stack, wavelength_nm, angle_deg)
    fronts: list[Amplitudes] = [ByThickness(group) for group in asked.groups()]
    backs = [Turned(ByThickness(group)) for group in asked.reversed_groups()] if stack.plates else []
    return ThicknessGradient(asked.wavelength_nm, asked.angle_deg[0], asked.notes, Rows(asked, fronts, list(backs)))


def index_gradient(stack: Stack, wavelength_nm: ArrayLike, angle_deg: ArrayLike = 0.0) -> IndexGradient:
    """Compute the derivatives of a spectrum by n and k of every film.

    Parameters
    ----------
    stack : Stack
        Films and thick plates between two media; with a plate dR and dT only.
    wavelength_nm, angle_deg : array_like of float
        As in `spectrum`. [nm], [deg]

    Returns
    -------
    IndexGradient
        dR_s_dn, dR_s_dk, dT_s_dn ... dr_s_dn ... dt_p_dk, shape (layer, angle, wavelength), per unit of n
        and of positive k.

    Raises
    ------
    ArgumentError, MaterialRangeError
        As in `spectrum`; also if a film of N = 0 blocks p.

    Examples
    --------
    >>> import filmstack as fs
    >>> layer = fs.Layer(fs.constant(1.38), 90.0)
    >>> fs.index_gradient(fs.Stack(fs.constant(1.0), [layer], fs.constant(1.52)), 550.0).dR_s_dn.round(6)
    array([[[0.147233]]])
    """
    asked = request(stack, wavelength_nm, angle_deg)
    fronts: list[Amplitudes] = [ByIndex(group) for group in asked.groups()]
    backs = [Turned(ByIndex(group)) for group in asked.reversed_groups()] if stack.plates else []
    return IndexGradient(asked.wavelength_nm, asked.angle_deg[0], asked.notes, Rows(asked, fronts, list(backs)))


def needle_gradient(
    stack: Stack,
    wavelength_nm: ArrayLike,
    angle_deg: ArrayLike = 0.0,
    *,
    material: Material,
    layer: int | None = None,
    depth_nm: ArrayLike | None = None,
) -> NeedleGradient:
    """Compute the derivatives of a spectrum by the thickness of a needle inserted at a depth.

    The needle is inserted: its host keeps its thickness and the stack grows. The needle of the
    host's own material gives the host's thickness derivative at every depth.

    Parameters
    ----------
    stack : Stack
        Films and thick plates between two media; with a plate dR and dT only.
    wavelength_nm, angle_deg : array_like of float
        As in `spectrum`. [nm], [deg]
    material : Material
        Medium of the needle.
    layer : int, optional
        Film into which the needle goes, from 0; all films if not given.
    depth_nm : array_like of float, optional
        Depths from the named film's front face, or from the first interface (plates count as of no
        thickness); 16 a film, both faces included, if not given. [nm]

    Returns
    -------
    NeedleGradient
        Arrays of shape (depth, angle, wavelength), per nm of needle, with `depth_nm` and `layer` of each row.

    Raises
    ------
    ArgumentError
        If the layer does not exist or a depth lies outside it.
    """
    if not isinstance(material, Material):
        raise ArgumentError(f"material: expected a Material, got {material!r}")
    asked = request(stack, wavelength_nm, angle_deg)
    layers, depths = _needle_places(stack, layer, depth_nm)
    starts = np.concatenate([[0.0], np.cumsum(stack.thickness_nm)])
    cut, needles = _cut(stack, layers, depths)
    cut_asked = replace(
        asked,
        stack=cut,
        thickness=cut.thickness_nm[np.newaxis],
        index=dict(asked.index) | {material: material.index(asked.wavelength_nm)[np.newaxis]},
    )
    n = cut_asked.at_points(material)
    needle = Media((n[0][:, np.newaxis], n[1][:, np.newaxis]), asked.direction(), asked.wavelength)
    groups, turned = cut_asked.groups(), cut_asked.reversed_groups()
    fronts: list[Amplitudes] = []
    backs: list[Amplitudes] = []
    for number, group in enumerate(groups):
        places = [place for where, place in needles if where == number]
        fronts.append(ByNeedle(group, places, needle))
        if stack.plates:
            behind = [place.from_behind(len(group.order)) for place in places]
            backs.append(ByNeedle(turned[number], behind, needle))
    shown = depths if layer is not None else starts[layers] + depths
    return NeedleGradient(
        asked.wavelength_nm, asked.angle_deg[0], asked.notes, Rows(cut_asked, fronts, backs), shown, layers
    )


def _needle_places(stack: Stack, layer: int | None, depth_nm: ArrayLike | None) -> tuple[IntArray, FloatArray]:
    """Return the layer and the depth inside it of each needle, ordered as the light meets them."""
    thickness = stack.thickness_nm
    count = len(thickness)
    if count == 0:
        raise ArgumentError("stack: expected at least one film for a needle, got none")
    if layer is not None and not -count <= layer < count:
        raise ArgumentError(f"layer: expected 0 to {count - 1}, got {layer}")
    if depth_nm is None:
        chosen = range(count) if layer is None else [layer % count]
        layers = np.repeat(np.array(list(chosen), dtype=np.int64), NEEDLE_DEPTHS)
        depths = np.concatenate([np.linspace(0.0, thickness[j], NEEDLE_DEPTHS) for j in chosen])
        return layers, depths
    total = float(thickness.sum()) if layer is None else float(thickness[layer])
    depths = checked_axis("depth_nm", depth_nm, "nm", 0.0, total)
    if np.any(np.diff(depths) < 0.0):
        raise ArgumentError("depth_nm: expected ascending depths, got a step back. Sort them")
    if layer is not None:
        return np.full(depths.shape, layer % count, dtype=np.int64), depths
    starts = np.concatenate([[0.0], np.cumsum(thickness)])
    # A point on an interface belongs to the layer behind it; the last face to the last layer.
    layers = np.clip(np.searchsorted(starts, depths, side="right") - 1, 0, count - 1)
    return layers, np.minimum(depths - starts[layers], thickness[layers])


def _cut(stack: Stack, layers: IntArray, depths: FloatArray) -> tuple[Stack, list[tuple[int, Place]]]:
    """Cut the films at the depths; return the stack and, of each needle, its group and its place there."""
    pieces: list[Any] = []
    needles: list[tuple[int, Place]] = []
    group = level = film = 0
    for piece in stack.layers:
        if not isinstance(piece, Layer):
            pieces.append(piece)
            group, level = group + 1, 0
            continue
        front, done = level, 0.0
        inside: list[int] = []
        for depth in depths[layers == film].tolist():
            if depth > done:
                pieces.append(replace(piece, thickness_nm=depth - done))
                level += 1
            inside.append(level)
            done = depth
        pieces.append(replace(piece, thickness_nm=piece.thickness_nm - done))
        level, film = level + 1, film + 1
        needles += [(group, Place(at, front, level)) for at in inside]
    return Stack(stack.incident, pieces, stack.exit), needles
