"""Transmission peaks of a coherent stack: `Stack` -> here -> tables, plots, requirements.

`extrema` finds every maximum of T in a band; here each is computed once more at its own wavelength lambda0 (1 + eps):
D and its derivatives at lambda0, widths and half-maximum points from eps, so that the rounding of a wavelength does
not enter the width of a narrow line.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from filmstack.analysis.extrema import Extrema, extrema
from filmstack.analysis.points import checked_axis, request
from filmstack.analysis.resonances import resonances
from filmstack.analysis.spectrum import result_of
from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import ArgumentError, CoherenceError
from filmstack.wave.angles import cosine_degrees, sine_degrees
from filmstack.wave.local import Local, local
from filmstack.wave.series import Series

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray
    from filmstack.stack import Stack

Polarization = Literal["s", "p", "mean"]

ORDER = 6
"""Taylor coefficients of D next to a peak, beyond the value."""
SMALL_TERM = 1e-11
"""First term that the series of |D|^2 leaves out, over it, below which it gives the half-maximum points; else the
band's models do."""

MOST_Q = 1e11
"""Q above which the rounding of the layers' phases, 1e-16 of a turn, shows in T of a peak."""

NO_LOW = "no half-maximum point on the side of short wavelengths"
NO_HIGH = "no half-maximum point on the side of long wavelengths"
TOO_NARROW = "the line is so narrow that the rounding of the layers' phases shows in its T and width"


@dataclass(frozen=True)
class Peak:
    """One local maximum of T; nan where there is no value, and `note` says why."""

    wavelength_nm: float
    """Vacuum wavelength of the maximum. [nm]"""
    transmittance: float
    """T at the maximum. [1]"""
    half_low_nm: float
    """Half-maximum point at the shorter wavelength. [nm]"""
    half_high_nm: float
    """Half-maximum point at the longer wavelength. [nm]"""
    fwhm_nm: float
    """Full width at half maximum, not formed as a difference of rounded wavelengths. [nm]"""
    q: float
    """Frequency over full width in frequency. [1]"""
    fsr_nm: float
    """Free spectral range: half the frequency distance of the two neighbours, at this wavelength. [nm]"""
    finesse: float
    """Free spectral range over full width, in frequency. [1]"""
    one_sided: bool
    """The free spectral range is the distance to the only neighbour, the peak being the first or last of the band."""
    note: str
    """Why a value is missing, or empty."""


@dataclass(frozen=True, eq=False)
class Peaks:
    """The transmission peaks of a band, by rising wavelength; iterable, with a length and an index.

    Parameters
    ----------
    peaks : tuple of Peak
        Every local maximum of T inside the band.
    band_nm : (float, float)
        Ends of the band. [nm]
    angle_deg : float
        Angle of incidence. [deg]
    polarization : str
        s, p or mean.
    complete : bool
        Whether the search is closed: no maximum above the rounding of T was missed or invented.
    resonances : int or None
        Poles of t with a photon energy in the band and a full width below the width of the band; None if they could
        not be counted. For mean at oblique incidence, those of s and of p together. Where coupled cavities merge
        there are more poles than peaks.
    notes : tuple of str
        Assumptions made on the way.
    stack : Stack
        The stack, for the picture.
    """

    peaks: tuple[Peak, ...]
    band_nm: tuple[float, float]
    angle_deg: float
    polarization: str
    complete: bool
    resonances: int | None
    notes: tuple[str, ...]
    stack: Stack

    def __iter__(self) -> Iterator[Peak]:
        """Go through the peaks by rising wavelength."""
        return iter(self.peaks)

    def __len__(self) -> int:
        """Return the number of peaks."""
        return len(self.peaks)

    def __getitem__(self, place: int) -> Peak:
        """Return one peak."""
        return self.peaks[place]

    def curve(self, points: int = 1001) -> tuple[FloatArray, FloatArray]:
        """Return T over the band for a picture, with more points where the peaks are narrow.

        Parameters
        ----------
        points : int
            Evenly spaced points over the band.

        Returns
        -------
        ndarray, ndarray
            Vacuum wavelength, rising [nm], and T [1].
        """
        even = np.linspace(*self.band_nm, points)
        offsets = np.sinh(np.linspace(-6.0, 6.0, 41)) / 20.0
        near = [peak.wavelength_nm + offsets * peak.fwhm_nm for peak in self.peaks if not math.isnan(peak.fwhm_nm)]
        tops = [peak.wavelength_nm for peak in self.peaks]
        wavelength = np.unique(np.concatenate([even, tops, *near]))
        wavelength = wavelength[(wavelength >= self.band_nm[0]) & (wavelength <= self.band_nm[1])]
        spectrum = result_of(request(self.stack, wavelength, self.angle_deg))
        return wavelength, {"s": spectrum.T_s, "p": spectrum.T_p, "mean": spectrum.T}[self.polarization][0]

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a peak."""
        import pandas as pd

        return pd.DataFrame([vars(peak) for peak in self.peaks], columns=list(Peak.__dataclass_fields__))

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw T over the band with its peaks on `ax`, or on a new figure, and return the axes."""
        from filmstack.report.peaks_plot import draw_peaks

        return draw_peaks(self, ax)


def transmission_peaks(
    stack: Stack, band_nm: ArrayLike, angle_deg: float = 0.0, polarization: Polarization = "s"
) -> Peaks:
    """Find every transmission peak of a band, however narrow.

    Parameters
    ----------
    stack : Stack
        Films between two media; no thick plates.
    band_nm : (float, float)
        Shortest and longest vacuum wavelength. A peak at the very end of the band is none of it. [nm]
    angle_deg : float
        Angle of incidence, below 90. [deg]
    polarization : {"s", "p", "mean"}
        T of s, of p, or their mean.

    Returns
    -------
    Peaks

    Raises
    ------
    CoherenceError
        If the stack holds a thick plate.
    ArgumentError
        If the band, the angle or the polarization is not of the kind.
    MaterialRangeError
        If the band reaches outside the data of a material.

    Notes
    -----
    The search does not rest on a sampling grid: `filmstack.analysis.extrema`. Widths and finesse as in Born and Wolf,
    Principles of Optics, section 7.6.

    Examples
    --------
    A plate of 1 um and index 2 in air transmits fully where it is a multiple of half waves, at 4000 nm / m:

    >>> import filmstack as fs
    >>> plate = fs.Stack(fs.constant(1.0), [fs.Layer(fs.constant(2.0), 1000.0)], fs.constant(1.0))
    >>> [round(peak.wavelength_nm, 6) for peak in fs.transmission_peaks(plate, (450, 700))]
    [500.0, 571.428571, 666.666667]
    """
    low, high, angle = _checked(stack, band_nm, angle_deg, polarization)
    notes = request(stack, [low, high], angle).notes
    which = {"s": (False,), "p": (True,), "mean": (False, True)}[polarization]
    if angle == 0.0:
        which = which[:1]
    elif _blocked(stack, low, high):
        which = tuple(p for p in which if not p)  # p adds nothing
    if not which:
        note = "no p passes a film of N = 0"
        return Peaks((), (low, high), angle, polarization, True, None, (*notes, note), stack)
    found = extrema(stack, PLANCK_EV_NM / high, PLANCK_EV_NM / low, angle, which)
    peaks = _peaks(stack, found, angle, which, polarization)
    counts = [resonances(stack, PLANCK_EV_NM / high, PLANCK_EV_NM / low, angle, p) for p in which]
    total = None if None in counts else sum(count for count in counts if count is not None)
    return Peaks(
        peaks,
        (low, high),
        angle,
        polarization,
        not found.unresolved,
        total,
        (*notes, *_end_notes(found, low, high)),
        stack,
    )


def _checked(stack: Stack, band_nm: ArrayLike, angle_deg: float, polarization: str) -> tuple[float, float, float]:
    if polarization not in ("s", "p", "mean"):
        raise ArgumentError(f"polarization: expected 's', 'p' or 'mean', got {polarization!r}")
    band = checked_axis("band_nm", band_nm, "nm", 5e-324, math.inf)
    if band.size != 2 or not band[0] < band[1]:
        raise ArgumentError(f"band_nm: expected two wavelengths in nm, the shorter first, got {band_nm!r}")
    angle = checked_axis("angle_deg", angle_deg, "deg", 0.0, 90.0)
    if angle.size != 1 or angle[0] == 90.0:
        raise ArgumentError(f"angle_deg: expected one angle below 90 deg, got {angle_deg!r}")
    request(stack, band, angle)
    if stack.plates:
        raise CoherenceError(
            "transmission_peaks: reflections in a thick plate add by intensity and make no peaks. Drop the plate"
        )
    return float(band[0]), float(band[1]), float(angle[0])


def _blocked(stack: Stack, low: float, high: float) -> bool:
    """Return whether a film of N = 0 lets no p pass."""
    return any(film.thickness_nm > 0.0 and not np.any(film.material.index([low, high])) for film in stack.films)


def _end_notes(found: Extrema, low: float, high: float) -> tuple[str, ...]:
    notes = []
    if found.rises[1] > 0:
        notes.append(f"T rises towards {low:g} nm, the end of the band: a peak may stand beyond it")
    if found.rises[0] < 0:
        notes.append(f"T rises towards {high:g} nm, the end of the band: a peak may stand beyond it")
    for a, b in found.unresolved[:3]:
        notes.append(f"not resolved from {PLANCK_EV_NM / b:.12g} to {PLANCK_EV_NM / a:.12g} nm")
    return tuple(notes)


@dataclass(frozen=True)
class Nearby:
    """T next to each peak: Taylor series in eta, photon energy = that of lambda0 times (1 + eta).

    parts : one a polarization; T is proportional to the sum of flux / power 2^-log2.
    """

    wavelength: FloatArray
    parts: tuple[Local, ...]

    def ratio(self, eta: FloatArray) -> FloatArray:
        """Return T at eta, in units that differ from peak to peak."""
        least = np.min([part.log2 for part in self.parts], axis=0)
        rows = [_at(x.flux, eta) / _at(x.power, eta) * np.exp2(least - x.log2) for x in self.parts]
        return np.asarray(np.sum(rows, axis=0))

    def slope(self, eta: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the first and second derivative of T by eta, in the same units."""
        least = np.min([part.log2 for part in self.parts], axis=0)
        first, second = np.zeros_like(eta), np.zeros_like(eta)
        for x in self.parts:
            f, df, ddf = (_at(x.flux, eta, j) for j in range(3))
            w, dw, ddw = (_at(x.power, eta, j) for j in range(3))
            scale = np.exp2(least - x.log2)
            first += scale * (df * w - f * dw) / w**2
            second += scale * ((ddf * w - f * ddw) / w**2 - 2.0 * dw * (df * w - f * dw) / w**3)
        return first, second

    def left_out(self, eta: FloatArray) -> FloatArray:
        """Return about the first term that |D|^2 leaves out, over |D|^2, the larger of the polarizations."""
        rows = []
        for part in self.parts:
            terms = [np.abs(part.power.c[k].real * eta**k) for k in (ORDER - 2, ORDER)]
            rows.append(terms[1] * np.sqrt(terms[1] / np.maximum(terms[0], 1e-300)) / np.abs(_at(part.power, eta)))
        return np.asarray(np.max(rows, axis=0))


def _at(series: Series, eta: FloatArray, order: int = 0) -> FloatArray:
    """Return a real series, or a derivative, at eta."""
    total = np.zeros_like(eta)
    for k in range(len(series.c) - 1, order - 1, -1):
        total = total * eta + series.c[k].real * math.perm(k, order)
    return total


def _nearby(stack: Stack, wavelength: FloatArray, angle: float, which: tuple[bool, ...]) -> Nearby:
    energy = PLANCK_EV_NM / wavelength
    factorial = np.array([math.factorial(j) for j in range(ORDER + 1)], dtype=float)[:, np.newaxis]
    power = energy ** np.arange(ORDER + 1)[:, np.newaxis]
    media: dict[object, Series] = {}
    for material in stack.materials:
        known = min(ORDER, material.derivative_order)  # further terms of N do not show over a narrow line
        c = np.zeros((ORDER + 1, wavelength.size), dtype=complex)
        c[: known + 1] = material.index_derivatives(wavelength, known)
        c = c / factorial * power
        media[material] = Series(c.real.astype(complex) if material is stack.incident else c)
    films = [(film.material, film.thickness_nm) for film in stack.films if film.thickness_nm > 0.0]
    k0 = Series.variable(np.ones(wavelength.size), ORDER) * (2.0 * np.pi / wavelength)
    sine, cosine = sine_degrees(angle), cosine_degrees(angle)
    with np.errstate(divide="ignore", invalid="ignore"):  # N = 0 at normal incidence has no series
        parts = tuple(local(media, films, (stack.incident, stack.exit), k0, sine, cosine, p) for p in which)
    return Nearby(wavelength, parts)


def _summits(near: Nearby, reach: FloatArray) -> FloatArray:
    """Return eta of each maximum by Newton's rule from 0, kept within reach."""
    eta = np.zeros_like(reach)
    for _ in range(8):
        first, second = near.slope(eta)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = np.where(second < 0.0, -first / second, 0.0)
        eta = np.where(np.abs(eta + step) <= reach, eta + step, eta)  # also where the step is no number
    return eta


def _peaks(
    stack: Stack, found: Extrema, angle: float, which: tuple[bool, ...], polarization: Polarization
) -> tuple[Peak, ...]:
    """Compute the peaks of a search, by rising wavelength."""
    top = np.flatnonzero(found.maximum)
    if not top.size:
        return ()
    energy, models = found.energy[top], found.models
    edges = np.concatenate([[models.low[0]], found.energy, [models.high[-1]]])
    below, above = edges[top], edges[top + 2]  # neighbouring minima, or the band's ends
    wavelength = PLANCK_EV_NM / energy
    near = _nearby(stack, wavelength, angle, which)
    reach = 0.25 * np.minimum(energy - below, above - energy) / energy
    eta = _summits(near, reach)
    if np.any(eta != 0.0):
        wavelength = wavelength / (1.0 + eta)
        near = _nearby(stack, wavelength, angle, which)
        eta = _summits(near, reach)
    energy = PLANCK_EV_NM / wavelength
    summit = near.ratio(eta)
    spectrum = result_of(request(stack, wavelength, angle))
    rows = {"s": spectrum.T_s, "p": spectrum.T_p, "mean": spectrum.T}[polarization]
    higher = summit / near.ratio(np.zeros_like(eta))
    transmittance = rows[0] * np.where(np.isfinite(higher), higher, 1.0)
    half = [_half_point(near, found, eta, end, energy) for end in (below, above)]
    return tuple(_table(wavelength, eta, transmittance, half[0], half[1])[::-1])


def _half_point(near: Nearby, found: Extrema, eta: FloatArray, end: FloatArray, energy: FloatArray) -> FloatArray:
    """Return eta of the half-maximum point between each peak and the minimum or band's end beside it; nan if none."""
    goal = found.models.log2_transmittance(energy * (1.0 + eta)) - 1.0
    with np.errstate(invalid="ignore"):
        there = found.models.log2_transmittance(end) <= goal
    inner, outer = eta.copy(), (end - energy) / energy
    series = _bisected(near, eta, outer)
    for _ in range(60):
        middle = 0.5 * (inner + outer)
        with np.errstate(invalid="ignore"):
            high = found.models.log2_transmittance(energy * (1.0 + middle)) > goal
        inner, outer = np.where(high, middle, inner), np.where(high, outer, middle)
    wide = 0.5 * (inner + outer)
    with np.errstate(divide="ignore", invalid="ignore"):
        fits = np.isfinite(series) & (near.left_out(series) < SMALL_TERM)
    return np.where(there, np.where(fits, series, wide), np.nan)


def _bisected(near: Nearby, eta: FloatArray, end: FloatArray) -> FloatArray:
    """Return the half-maximum point of the Taylor series, nan where it is not between the peak and the end."""
    goal = 0.5 * near.ratio(eta)
    _, second = near.slope(eta)
    with np.errstate(divide="ignore", invalid="ignore"):
        # A Lorentzian of this curvature has its half-maximum point here.
        step = np.sqrt(np.where(second < 0.0, -2.0 * near.ratio(eta) / second, np.nan)) * np.sign(end - eta)
    inner, outer = eta.copy(), eta + 4.0 * step
    outer = np.where(np.abs(outer - eta) < np.abs(end - eta), outer, end)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        fine = near.ratio(outer) < goal
        for _ in range(60):
            middle = 0.5 * (inner + outer)
            high = near.ratio(middle) > goal
            inner, outer = np.where(high, middle, inner), np.where(high, outer, middle)
    return np.where(fine, 0.5 * (inner + outer), np.nan)


def _table(
    wavelength: FloatArray, eta: FloatArray, transmittance: FloatArray, low: FloatArray, high: FloatArray
) -> list[Peak]:
    """Return the peaks by rising photon energy; `low` and `high` are half points by photon energy."""
    # Relative frequency of each peak and of its neighbours.
    frequency = (1.0 + eta) / wavelength
    count = len(wavelength)
    peaks = []
    for j in range(count):
        left, right = max(j - 1, 0), min(j + 1, count - 1)
        spacing = (frequency[right] - frequency[left]) / (2 if right - left == 2 else 1) if count > 1 else math.nan
        one_sided = count > 1 and right - left == 1
        width = (high[j] - low[j]) / (1.0 + eta[j])
        # lambda = lambda0 / (1 + eta): differences of lambda from those of eta.
        full = wavelength[j] * (high[j] - low[j]) / ((1.0 + high[j]) * (1.0 + low[j]))
        doubts = ((NO_LOW, math.isnan(high[j])), (NO_HIGH, math.isnan(low[j])), (TOO_NARROW, MOST_Q * width < 1.0))
        note = "; ".join(text for text, applies in doubts if applies)
        peak = wavelength[j] / (1.0 + eta[j])
        peaks.append(
            Peak(
                wavelength_nm=float(peak),
                transmittance=float(transmittance[j]),
                half_low_nm=float(wavelength[j] / (1.0 + high[j])),
                half_high_nm=float(wavelength[j] / (1.0 + low[j])),
                fwhm_nm=float(full),
                q=float(1.0 / width),
                fsr_nm=float(spacing / frequency[j] * peak),
                finesse=float(spacing / frequency[j] / width),
                one_sided=one_sided,
                note=note,
            )
        )
    return peaks
