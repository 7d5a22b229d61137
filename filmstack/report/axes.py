"""Axes of pictures of spectra: units and limits that a person would choose."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import MaxNLocator

if TYPE_CHECKING:
    from filmstack.analysis.spectrum import Spectrum
    from filmstack.arraytypes import FloatArray

_INFRARED_NM = 2500.0
_NEAR_ALL = 70.0  # percent; above it an axis need not start at zero


def micrometres(spectra: Sequence[Spectrum]) -> bool:
    """Tell whether the wavelengths are long enough to be read in micrometres."""
    return max(float(np.max(spectrum.wavelength_nm, initial=0.0)) for spectrum in spectra) > _INFRARED_NM


def wavelength_label(spectra: Sequence[Spectrum]) -> str:
    """Return the label of a wavelength axis, with its unit."""
    return "vacuum wavelength (µm)" if micrometres(spectra) else "vacuum wavelength (nm)"


def percent_limits(values: FloatArray) -> tuple[float, float]:
    """Return the limits of an axis in percent: from zero, unless all values are near 100.

    Parameters
    ----------
    values : ndarray
        What will be drawn. [percent]

    Returns
    -------
    (float, float)
        Limits, a little wider than the values so that no line hides behind the frame. [percent]

    Examples
    --------
    >>> print("{:.3f} {:.3f}".format(*percent_limits(np.array([0.2, 1.3]))))
    -0.028 1.400
    """
    finite = values[np.isfinite(values)]
    low, high = float(np.min(finite, initial=100.0)), float(np.max(finite, initial=0.0))
    if low < _NEAR_ALL or high <= 0.0:
        low = 0.0
    if high - low < 1e-3 * max(high, 1e-6):  # a flat line
        low, high = 0.0, 1.25 * max(high, 0.8)
    steps = MaxNLocator(8, steps=[1, 2, 4, 5, 10]).tick_values(low, high)
    bottom, top = float(steps[0]), float(steps[-1])
    if top > 100.0 >= high:
        top = 100.0
    room = 0.02 * (top - bottom)
    return bottom - room, top + (room if top - high < room else 0.0)
