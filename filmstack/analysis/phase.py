"""Phase of r and t, group delay and its dispersion: `Stack` -> here -> tables, plots, requirements."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from filmstack.analysis.gradients import index_gradient
from filmstack.analysis.points import request
from filmstack.analysis.spectrum import spectrum
from filmstack.constants import HBAR_EV_FS, PLANCK_EV_NM
from filmstack.errors import ArgumentError, CoherenceError
from filmstack.wave.jets import Line
from filmstack.wave.series import Series

if TYPE_CHECKING:
    from typing import Literal

    import pandas as pd
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.analysis.points import Request
    from filmstack.arraytypes import FloatArray
    from filmstack.stack import Stack

ORDER = 3
"""Derivatives of the phase: group delay, its dispersion, and the third order."""

QUANTITIES = {"phase_rad": "phase", "gd_fs": "group delay", "gdd_fs2": "GDD", "tod_fs3": "TOD"}


@dataclass(frozen=True, eq=False)
class PhaseOf:
    """Phase of one amplitude and its derivatives by angular frequency, shape (angle, wavelength).

    A delay is positive: gd = - d phase / d omega with fields exp(+i omega t). nan where the amplitude is 0.
    """

    phase_rad_s: FloatArray
    """Unwrapped along the wavelengths as given. [rad]"""
    phase_rad_p: FloatArray
    """Unwrapped along the wavelengths as given. [rad]"""
    gd_fs_s: FloatArray
    """Group delay. [fs]"""
    gd_fs_p: FloatArray
    """Group delay. [fs]"""
    gdd_fs2_s: FloatArray
    """Group-delay dispersion, d gd / d omega. [fs^2]"""
    gdd_fs2_p: FloatArray
    """Group-delay dispersion, d gd / d omega. [fs^2]"""
    tod_fs3_s: FloatArray
    """Third-order dispersion, d^2 gd / d omega^2. [fs^3]"""
    tod_fs3_p: FloatArray
    """Third-order dispersion, d^2 gd / d omega^2. [fs^3]"""
    gd_uncertainty_fs_s: FloatArray
    """Standard deviation from the rounding of tabulated indices; 0 where all media are formulas. [fs]"""
    gd_uncertainty_fs_p: FloatArray
    """The same for p. [fs]"""
    gdd_uncertainty_fs2_s: FloatArray
    """The same of the GDD. [fs^2]"""
    gdd_uncertainty_fs2_p: FloatArray
    """The same for p. [fs^2]"""
    tod_uncertainty_fs3_s: FloatArray
    """The same of the TOD. [fs^3]"""
    tod_uncertainty_fs3_p: FloatArray
    """The same for p. [fs^3]"""


@dataclass(frozen=True, eq=False)
class Phase:
    """Phases of reflected and transmitted light.

    Parameters
    ----------
    wavelength_nm, angle_deg : ndarray, shapes (wavelength,) and (angle,)
        Axes. [nm], [deg]
    reflection, transmission : PhaseOf
        Of r, at `plane`, and of t, from the first to the last interface.
    plane : str
        Plane to which r is referred.
    notes : tuple of str
        Assumptions made on the way, and how well the materials' data support the derivatives.
    """

    wavelength_nm: FloatArray
    angle_deg: FloatArray
    reflection: PhaseOf
    transmission: PhaseOf
    plane: str
    notes: tuple[str, ...]

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a wavelength and angle; names begin with r_ or t_."""
        import pandas as pd

        angle, wavelength = np.meshgrid(self.angle_deg, self.wavelength_nm, indexing="ij")
        columns = {"wavelength_nm": wavelength.ravel(), "angle_deg": angle.ravel()}
        for letter, part in (("r", self.reflection), ("t", self.transmission)):
            for name in QUANTITIES:
                for p in "sp":
                    columns[f"{letter}_{name}_{p}"] = getattr(part, f"{name}_{p}").ravel()
        return pd.DataFrame(columns)

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw the group delay of the reflected light on `ax`, or on a new figure, and return the axes."""
        from filmstack.report.phase_plot import draw_phase

        return draw_phase(self, ax)


def phase(
    stack: Stack,
    wavelength_nm: ArrayLike,
    angle_deg: ArrayLike = 0.0,
    *,
    plane: Literal["front", "substrate"] = "front",
) -> Phase:
    """Compute phase, group delay, GDD and TOD of the reflected and the transmitted light.

    The derivatives are exact, through the layers and the dispersion of every material, at a fixed angle
    of incidence.

    Parameters
    ----------
    stack : Stack
        Films between two media; no thick plates.
    wavelength_nm, angle_deg : array_like of float
        As in `spectrum`; angles below 90. [nm], [deg]
    plane : str
        Refer r to the first interface, or to the plane of the substrate as if the incident medium
        reached there.

    Returns
    -------
    Phase

    Raises
    ------
    CoherenceError
        If the stack holds a thick plate.
    ArgumentError
        If an angle is 90 degrees, or the data of a material support fewer than three derivatives.

    Notes
    -----
    Babic and Corzine, IEEE J. Quantum Electron. 28, 514 (1992), for the delay of a mirror.

    Examples
    --------
    The delay of 10 um of index 1.5 between like media, n d / c:

    >>> import filmstack as fs
    >>> g = fs.constant(1.5)
    >>> fs.phase(fs.Stack(g, [fs.Layer(g, 1e4)], g), 800.0).transmission.gd_fs_s.round(6)
    array([[50.034614]])
    """
    if plane not in ("front", "substrate"):
        raise ArgumentError(f"plane: expected 'front' or 'substrate', got {plane!r}")
    asked = request(stack, wavelength_nm, angle_deg)
    if stack.plates:
        raise CoherenceError("phase: a stack with a thick plate has no phase. Take stack.front()")
    if np.any(asked.angle_deg == 90.0):
        raise ArgumentError("angle_deg: expected angles below 90 deg, where t has a phase, got 90 deg")
    oblique = bool(np.any(asked.direction().b != 0.0))
    rows = {False: _rows(asked, False, plane)}
    rows[True] = _rows(asked, True, plane) if oblique else rows[False]
    doubts = _doubts(asked)
    parts = []
    for which in (0, 1):
        values = {f"{name}_{'p' if p else 's'}": rows[p][which][j] for j, name in enumerate(QUANTITIES) for p in rows}
        parts.append(PhaseOf(**values, **doubts[which]))
    notes = (*asked.notes, *_doubt_note(parts))
    return Phase(asked.wavelength_nm, asked.angle_deg[0], parts[0], parts[1], plane, notes)


def _series(asked: Request) -> dict[object, Series]:
    """Return N of every medium as a series, shape (order + 1, angle, wavelength)."""
    angles, _ = asked.shape
    factorial = np.array([1.0, 1.0, 2.0, 6.0]).reshape(-1, 1)
    found: dict[object, Series] = {}
    for material in asked.stack.materials:
        c = material.index_derivatives(asked.wavelength_nm, ORDER) / factorial
        if material is asked.stack.incident:
            c = c.real.astype(complex)
        found[material] = Series(np.repeat(c[:, np.newaxis], angles, axis=1))
    return found


def _rows(asked: Request, p: bool, plane: str) -> tuple[list[FloatArray], list[FloatArray]]:
    """Return phase, gd, gdd and tod of r and of t."""
    n = _series(asked)
    stack, shape = asked.stack, asked.shape
    energy = np.broadcast_to(PLANCK_EV_NM / asked.wavelength_nm, shape)
    k0 = Series.variable(energy, ORDER) * (2.0 * np.pi / PLANCK_EV_NM)
    direction = asked.direction()
    sine, cosine = (x.reshape(shape) for x in (direction.sine, direction.cosine))
    films = [(n[film.material], film.thickness_nm) for film in stack.films if film.thickness_nm > 0.0]
    with np.errstate(divide="ignore", invalid="ignore"):
        r, t = Line(films, n[stack.incident], n[stack.exit], k0, sine, cosine, p).logarithms()
        if plane == "substrate":
            r = r + (2j * float(stack.thickness_nm.sum())) * (n[stack.incident] * k0 * cosine)
        return _derivatives(r, energy), _derivatives(t, energy)


def _derivatives(logarithm: Series, energy: FloatArray) -> list[FloatArray]:
    rows = logarithm.derivatives().imag
    rows = np.where(np.isfinite(rows), rows, np.nan)
    delays = [-(HBAR_EV_FS**j) * rows[j] for j in range(1, ORDER + 1)]
    return [_unwrapped(rows[0], rows[1], energy), *delays]


def _unwrapped(wrapped: FloatArray, slope: FloatArray, energy: FloatArray) -> FloatArray:
    """Unwrap along the wavelengths; the known slope says how far the phase goes from one to the next."""
    step = np.diff(wrapped, axis=1)
    width = np.diff(energy, axis=1)
    expected = 0.5 * (slope[:, 1:] + slope[:, :-1]) * width
    # A resonance narrower than the step tells nothing of the way between: there the nearest turn is taken.
    narrow = 0.5 * np.abs((slope[:, 1:] - slope[:, :-1]) * width) > np.pi
    expected = np.where(narrow, 0.0, expected)
    turns = np.nan_to_num(np.rint((expected - step) / (2.0 * np.pi)))
    out = wrapped.copy()
    out[:, 1:] += 2.0 * np.pi * np.cumsum(turns, axis=1)
    return np.asarray(out)


_DOUBTS = ("gd_uncertainty_fs", "gdd_uncertainty_fs2", "tod_uncertainty_fs3")


def _doubts(asked: Request) -> list[dict[str, FloatArray]]:
    """Return the uncertainties of r and of t by name.

    The phase depends on derivative j of an index as on the index itself: d phi^(j) = (d phi / d n) d n^(j). All
    films of one table share its error; different tables add in quadrature.
    """
    tables = {m for m in (film.material for film in asked.stack.films) if hasattr(m, "derivative_uncertainty")}
    found: list[dict[str, FloatArray]] = [
        {f"{name}_{p}": np.zeros(asked.shape) for name in _DOUBTS for p in "sp"} for _ in range(2)
    ]
    if not tables:
        return found
    gradient = index_gradient(asked.stack, asked.wavelength_nm, asked.angle_deg[0])
    amplitudes = spectrum(asked.stack, asked.wavelength_nm, asked.angle_deg[0])
    for material in tables:
        layers = [j for j, film in enumerate(asked.stack.films) if film.material is material]
        spread = [np.asarray(material.derivative_uncertainty(j, asked.wavelength_nm)) for j in (1, 2, 3)]
        for which, letter in enumerate("rt"):
            for p in "sp":
                change = getattr(gradient, f"d{letter}_{p}_dn")[layers].sum(axis=0)
                with np.errstate(divide="ignore", invalid="ignore"):
                    slope = np.abs((change / getattr(amplitudes, f"{letter}_{p}")).imag)
                for j, name in enumerate(_DOUBTS):
                    key = f"{name}_{p}"
                    found[which][key] = np.hypot(found[which][key], HBAR_EV_FS ** (j + 1) * slope * spread[j])
    return found


def _doubt_note(parts: list[PhaseOf]) -> tuple[str, ...]:
    """Say how far the rounding of tabulated indices moves the GDD at most."""
    largest = [max(float(np.nanmax(p.gdd_uncertainty_fs2_s)), float(np.nanmax(p.gdd_uncertainty_fs2_p))) for p in parts]
    if not any(largest):
        return ()
    return (
        f"the rounding of tabulated indices leaves the GDD uncertain by up to {largest[0]:.2g} fs^2 in reflection and "
        f"{largest[1]:.2g} fs^2 in transmission (one standard deviation)",
    )
