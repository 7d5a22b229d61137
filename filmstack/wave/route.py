"""Run the kernels on a coherent group of films, as array work or compiled, the same bytes either way.

`filmstack.analysis` -> `Group` -> here -> `filmstack.wave.finish`. Small work runs on NumPy and
never waits for a compiler; large work loads `filmstack.wave.compiled` and is cut into blocks for
the thread pool. Points whose films are all lossless and propagating take the shorter kernel.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal

import numpy as np

from filmstack.wave import kernels
from filmstack.wave.media import Ends, Media
from filmstack.work.pool import run_blocks

if TYPE_CHECKING:
    from filmstack.arraytypes import BoolArray, FloatArray, IntArray

Route = Literal["auto", "small", "compiled"]
_route: ContextVar[Route] = ContextVar("filmstack_route", default="auto")

WORTH_LOADING = 3_000_000
"""Layer x point x sample from which starting the compiler pays (about 0.4 s of array work)."""
WORTH_CALLING = 20_000
"""The same once the compiler is there."""
ARRAY_CELLS = 8192
"""Points x samples of one piece of array work: its rows stay in the nearest cache."""
WORTH_SHARING = 500_000
"""The same from which a second thread pays."""
BLOCK_CELLS = 8_000_000
"""Layer x point x sample of one block of compiled work, well below a tenth of a second."""


@contextmanager
def forced(route: Route) -> Iterator[None]:
    """Force array work ("small") or compiled work ("compiled") within a block, for tests and benchmarks."""
    token = _route.set(route)
    try:
        yield
    finally:
        _route.reset(token)


def compiler_pays(cells: int) -> bool:
    """Say whether work of this many layer x point x sample goes to the compiled kernels."""
    route = _route.get()
    if route != "auto":
        return route == "compiled"
    return cells >= (WORTH_CALLING if "filmstack.wave.compiled" in sys.modules else WORTH_LOADING)


@dataclass(frozen=True)
class Group:
    """Coherent films between two media at a set of points.

    Parameters
    ----------
    media : Media
        The distinct film media.
    ends : Ends
        Incident and exit medium.
    order : ndarray of int, shape (layer,)
        Row of `media` of each layer, the first the light meets first.
    thickness : ndarray, shape (sample, layer)
        Thickness. [nm]
    """

    media: Media
    ends: Ends
    order: IntArray
    thickness: FloatArray

    @property
    def oblique(self) -> bool:
        """Whether p differs from s at any point."""
        return not bool(np.all(self.media.direction.straight))

    @property
    def shape(self) -> tuple[int, int]:
        """Number of samples and of points."""
        direction = self.media.direction
        samples = max(len(self.thickness), len(direction.b), len(self.media.n[0]), len(self.ends.exit[0]))
        return samples, direction.b.shape[-1]


def powers(group: Group) -> FloatArray:
    """Return R_s, T_s, R_p, T_p, shape (4, sample, point)."""
    out = np.empty((4, *group.shape))
    _run(group, out, np.empty((0, group.shape[0], kernels.STATE_ROWS, group.shape[1])))
    if not group.oblique:
        out[2:] = out[:2]
    for chosen, cut in _blocked(group):
        part = powers(cut)
        out[2:, chosen[0], chosen[1]] = part[2:, 0]
    return out


def states(group: Group, every_layer: bool = False) -> FloatArray:
    """Return the fields in front of each layer, or of the first only.

    Returns
    -------
    ndarray, shape (1 or layer + 1, sample, STATE_ROWS, point)
        Level 0 is the first interface, the last level the exit.
    """
    levels = len(group.order) + 1 if every_layer else 1
    samples, points = group.shape
    trace = np.empty((levels, samples, kernels.STATE_ROWS, points))
    _run(group, np.empty((4, 0, 0)), trace)
    if not group.oblique:
        trace[:, :, 4:8], trace[:, :, kernels.SCALE_P] = trace[:, :, 0:4], trace[:, :, kernels.SCALE_S]
    p_rows = np.array([4, 5, 6, 7, kernels.SCALE_P])
    for (sample, chosen), cut in _blocked(group):
        part = states(cut, every_layer)
        for level in range(levels):
            for row in p_rows:
                trace[level, sample, row, chosen] = part[level, 0, row] if level < len(part) else 0.0
    return trace


def dark(group: Group) -> BoolArray:
    """Return where a film of N = 0 lets no p pass, shape (sample, point) or one that broadcasts to it."""
    if not _may_block(group):
        return np.zeros((1, 1), dtype=bool)
    return np.asarray(blocking_films(group).any(axis=1))


def _may_block(group: Group) -> bool:
    empty = (group.media.n[0] == 0.0) & (group.media.n[1] == 0.0)
    return bool(len(group.order) and np.any(empty) and group.oblique)


def blocking_films(group: Group) -> BoolArray:
    """Return True where a film of N = 0 and thickness > 0 meets p at oblique incidence, (sample, layer, point)."""
    empty = (group.media.n[0] == 0.0) & (group.media.n[1] == 0.0) & ~group.media.direction.of_media().straight
    return np.asarray(empty[:, group.order] & (group.thickness > 0.0)[:, :, np.newaxis])


def _blocked(group: Group) -> Iterator[tuple[tuple[int, IntArray], Group]]:
    """Yield the films in front of the first one that blocks p, for the samples and points it concerns."""
    if not _may_block(group):
        return
    where = blocking_films(group)
    for sample in range(group.shape[0]):
        rows = where[min(sample, len(where) - 1)]
        first = np.where(rows.any(axis=0), rows.argmax(axis=0), -1)
        for layer in np.unique(first[first >= 0]):
            points = np.flatnonzero(first == layer)
            cut = _picked(group, sample, points)
            cut = replace(cut, order=cut.order[:layer], thickness=np.ascontiguousarray(cut.thickness[:, :layer]))
            yield (sample, points), replace(cut, ends=replace(cut.ends, blocked=True))


def _picked(group: Group, sample: int, points: IntArray) -> Group:
    def one(values: FloatArray) -> FloatArray:
        return np.ascontiguousarray(values[min(sample, len(values) - 1)][np.newaxis][..., points])

    media, ends = group.media, group.ends
    direction = media.direction.picked(sample, points)
    incident, leaving = (one(ends.incident[0]), one(ends.incident[1])), (one(ends.exit[0]), one(ends.exit[1]))
    return Group(
        Media((one(media.n[0]), one(media.n[1])), direction, media.wavelength[points]),
        Ends(incident, leaving, direction, ends.outer),
        group.order,
        group.thickness[min(sample, len(group.thickness) - 1)][np.newaxis],
    )


def _run(group: Group, out: FloatArray, trace: FloatArray) -> None:
    """Fill `out` or `trace` by the kernel that fits each point."""
    simple = group.media.simple
    samples, points = group.shape
    compiled = compiler_pays(samples * points * max(1, len(group.order)))
    for name, chosen in (("run_lossless", np.flatnonzero(simple)), ("run_lossy", np.flatnonzero(~simple))):
        if not chosen.size:
            continue
        whole = chosen.size == points
        part_out = out if whole else np.empty((*out.shape[:-1], chosen.size if out.size else 0))
        part_trace = trace if whole else np.empty((*trace.shape[:-1], chosen.size))
        (_run_compiled if compiled else _run_arrays)(group, name, chosen, part_out, part_trace)
        if not whole and len(trace):
            trace[..., chosen] = part_trace
        elif not whole:
            out[..., chosen] = part_out


def _run_arrays(group: Group, name: str, chosen: IntArray, out: FloatArray, trace: FloatArray) -> None:
    """Run the plain kernel, an array in every cell, in pieces that stay in the cache."""
    kernel = getattr(kernels, name)
    samples, _ = group.shape
    media = group.media.rows(name == "run_lossless", chosen)
    ends = group.ends.rows(group.media.lossless, chosen)
    thickness = np.broadcast_to(group.thickness, (samples, len(group.order)))
    long = min(chosen.size, ARRAY_CELLS)
    many = max(1, ARRAY_CELLS // long)
    for a in range(0, samples, many):
        b = min(a + many, samples)
        for p in range(0, chosen.size, long):
            q = min(p + long, chosen.size)
            cut_media, cut_ends = (x[a:b] if len(x) > 1 else x for x in (media, ends))
            kernel(
                (0, 1, 0, 1),
                ((0, 1),),
                group.order,
                thickness[a:b].T[np.newaxis, :, :, np.newaxis],
                np.ascontiguousarray(cut_media[..., p:q].transpose(1, 2, 0, 3))[np.newaxis, np.newaxis],
                np.ascontiguousarray(cut_ends[..., p:q].transpose(1, 0, 2))[np.newaxis, np.newaxis],
                np.empty((kernels.STATE_ROWS, b - a, q - p)),
                out[:, np.newaxis, np.newaxis, a:b, p:q],
                trace[:, a:b, :, p:q].transpose(0, 2, 1, 3)[:, np.newaxis, :, np.newaxis],
                group.oblique,
            )


def _run_compiled(group: Group, name: str, chosen: IntArray, out: FloatArray, trace: FloatArray) -> None:
    """Run the compiled kernel in blocks on the thread pool."""
    from filmstack.wave.compiled import FUNCTIONS, TILE

    kernel, both = FUNCTIONS[name], group.oblique
    samples, layers = group.shape[0], max(1, len(group.order))
    media = _tiled(group.media.rows(name == "run_lossless", chosen), TILE)
    ends = _tiled(group.ends.rows(group.media.lossless, chosen), TILE)
    thickness = np.ascontiguousarray(np.broadcast_to(group.thickness, (samples, len(group.order))))
    order = np.ascontiguousarray(group.order, dtype=np.int64)
    starts = np.arange(0, chosen.size, TILE)
    tiles = np.stack([starts, np.minimum(TILE, chosen.size - starts)], axis=1)

    def do(work: tuple[int, int, int, int]) -> None:
        kernel(work, tiles, order, thickness, media, ends, np.empty(kernels.STATE_ROWS * TILE), out, trace, both)

    run_blocks(do, _blocks(samples, len(tiles), layers * min(TILE, chosen.size)))


def _blocks(samples: int, tiles: int, cells: int) -> list[tuple[int, int, int, int]]:
    """Cut samples and tiles into blocks; `cells` is layer x point of one sample and tile."""
    parts = 1 if samples * tiles * cells < WORTH_SHARING else 8
    many = max(1, min(BLOCK_CELLS // cells, -(-samples // parts)))
    wide = max(1, min(BLOCK_CELLS // (cells * many), -(-tiles * samples // (parts * many))))
    return [
        (a, min(a + many, samples), t, min(t + wide, tiles))
        for t in range(0, tiles, wide)
        for a in range(0, samples, many)
    ]


def _tiled(rows: FloatArray, tile: int) -> FloatArray:
    """Turn (sample, [medium,] row, point) into (sample, tile, [medium,] row * TILE)."""
    *lead, count, points = rows.shape
    tiles = -(-points // tile)
    padded = np.empty((*lead, count, tiles * tile))
    padded[..., :points] = rows
    padded[..., points:] = rows[..., -1:]
    split = padded.reshape(*lead, count, tiles, tile)
    moved = np.moveaxis(split, -2, 1)
    return np.ascontiguousarray(moved).reshape(lead[0], tiles, *lead[1:], count * tile)
