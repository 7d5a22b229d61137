"""Admittance of a growing stack at one wavelength: the locus of the coating designer's diagram."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from filmstack.analysis.field import Solved
from filmstack.analysis.points import request
from filmstack.errors import ArgumentError, CoherenceError

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes

    from filmstack.arraytypes import ComplexArray, FloatArray, IntArray
    from filmstack.stack import Stack

STEPS_A_LAYER, MOST_HALVINGS = 65, 40


@dataclass(frozen=True, eq=False)
class AdmittanceLocus:
    """Admittance H / E seen from the light's side while the stack grows, from the substrate outwards.

    Parameters
    ----------
    wavelength_nm, angle_deg : float
        Where. [nm], [deg]
    polarization : str
        s or p.
    grown_nm : ndarray, shape (step,)
        Thickness deposited so far. [nm]
    layer : ndarray of int, shape (step,)
        Film that grows, from 0 at the light; the number of films is the bare substrate.
    admittance : ndarray of complex, shape (step,)
        In units of the admittance of free space; tilted ones at oblique incidence. [1]
    incident : float
        Admittance of the incident medium: where the locus ends there, nothing is reflected. [1]
    notes : tuple of str
        Assumptions made on the way.
    """

    wavelength_nm: float
    angle_deg: float
    polarization: str
    grown_nm: FloatArray
    layer: IntArray
    admittance: ComplexArray
    incident: float
    notes: tuple[str, ...]

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a step; layers count from 1 at the light."""
        import pandas as pd

        return pd.DataFrame(
            {
                "grown_nm": self.grown_nm,
                "layer": self.layer + 1,
                "admittance_real": self.admittance.real,
                "admittance_imag": self.admittance.imag,
            }
        )

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw the locus on `ax`, or on a new figure, and return the axes."""
        from filmstack.report.admittance_plot import draw_locus

        return draw_locus(self, ax)


def admittance_locus(
    stack: Stack, wavelength_nm: float, angle_deg: float = 0.0, *, polarization: Literal["s", "p"] = "s"
) -> AdmittanceLocus:
    """Compute the admittance of a stack layer by layer, in the order of deposition.

    Parameters
    ----------
    stack : Stack
        Films between two media; no thick plates.
    wavelength_nm, angle_deg : float
        One wavelength and one angle below 90 degrees. [nm], [deg]
    polarization : str
        s or p.

    Returns
    -------
    AdmittanceLocus

    Raises
    ------
    CoherenceError
        If the stack holds a thick plate.
    ArgumentError
        If more than one wavelength or angle is given, or the angle is 90 degrees.

    Notes
    -----
    H. A. Macleod, Thin-Film Optical Filters. With N = n - ik a lossless film moves Y clockwise on a circle.

    Examples
    --------
    A quarter wave of 1.38 on 1.52 ends at 1.38^2 / 1.52:

    >>> import filmstack as fs
    >>> stack = fs.Stack(fs.constant(1.0), [fs.Layer(fs.constant(1.38), 550 / 4 / 1.38)], fs.constant(1.52))
    >>> abs(fs.admittance_locus(stack, 550.0).admittance[-1]).round(6).item()
    1.252895
    """
    if polarization not in ("s", "p"):
        raise ArgumentError(f"polarization: expected 's' or 'p', got {polarization!r}")
    asked = request(stack, wavelength_nm, angle_deg)
    if asked.shape != (1, 1):
        raise ArgumentError(f"admittance_locus: expected one wavelength and one angle, got {asked.shape[::-1]}")
    if asked.angle_deg[0, 0] == 90.0:
        raise ArgumentError("angle_deg: expected an angle below 90 deg, got 90 deg")
    if stack.plates:
        raise CoherenceError("admittance_locus: a stack with a thick plate has no admittance. Take stack.front()")
    (group,) = asked.groups()
    solved = Solved(asked, group, polarization == "p")
    edges, films = solved.boundaries, len(stack.films)
    depths, layers, values = [edges[-1:]], [np.array([films])], [_admittance(solved, films, edges[-1:])]
    for film in range(films - 1, -1, -1):
        depth, admittance = _sampled(solved, film, edges[film + 1], edges[film])
        depths.append(depth)
        layers.append(np.full(depth.size, film))
        values.append(admittance)
    depth, layer, admittance = (np.concatenate(parts) for parts in (depths, layers, values))
    (a1, _), (a2, _) = group.ends.incident_pair(polarization == "p")
    return AdmittanceLocus(
        float(asked.wavelength_nm[0]),
        float(asked.angle_deg[0, 0]),
        polarization,
        edges[-1] - depth,
        layer,
        admittance,
        float(a1[0, 0] / a2[0, 0]),
        asked.notes,
    )


def _admittance(solved: Solved, film: int, depth: FloatArray) -> ComplexArray:
    e, h = solved.at(np.full(depth.size, film), depth)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray((h / e)[:, 0])


def _sampled(solved: Solved, film: int, start: float, stop: float) -> tuple[FloatArray, ComplexArray]:
    """Return depths and admittances of one film, closer where the locus runs fast: no chord over 2 % of its size."""
    depth = np.linspace(start, stop, STEPS_A_LAYER)
    admittance = _admittance(solved, film, depth)
    for _ in range(MOST_HALVINGS):
        chord = np.abs(np.diff(admittance))
        size = max(float(np.ptp(admittance.real)), float(np.ptp(admittance.imag)))
        long = np.flatnonzero(chord > 0.02 * size)
        if not long.size or not np.isfinite(size):
            break
        depth = np.insert(depth, long + 1, 0.5 * (depth[long] + depth[long + 1]))
        admittance = _admittance(solved, film, depth)
    return depth, admittance
