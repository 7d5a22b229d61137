"""Reflectance, transmittance and absorptance: `Stack` -> here -> tables, plots and everything later."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from filmstack.analysis.points import Request, request
from filmstack.analysis.solution import Solution, log10_of_mean, solve, total

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray


@dataclass(frozen=True, eq=False)
class Spectrum:
    """What a stack does to light, shape (angle, wavelength); computed when asked for.

    Names with _s and _p are of one polarization, names without are means of the two: unpolarized
    light. Fractions are 0 to 1.

    Parameters
    ----------
    wavelength_nm : ndarray, shape (wavelength,)
        Vacuum wavelength, in the order asked for. [nm]
    angle_deg : ndarray, shape (angle,)
        Angle of incidence in the incident medium, in the order asked for. [deg]
    notes : tuple of str
        Assumptions made on the way.
    transmittance_into : str
        What T is: into the substrate, or through the part.
    """

    wavelength_nm: FloatArray
    angle_deg: FloatArray
    notes: tuple[str, ...]
    transmittance_into: str
    _solution: Solution

    @property
    def stack(self) -> Stack:
        """The stack that the light meets."""
        return self._solution.request.stack

    @cached_property
    def R_s(self) -> FloatArray:
        """Reflectance of s. [1]"""
        return self._solution.reflectance(False)[0]

    @cached_property
    def R_p(self) -> FloatArray:
        """Reflectance of p. [1]"""
        return self._solution.reflectance(True)[0]

    @property
    def R(self) -> FloatArray:
        """Reflectance, mean of s and p. [1]"""
        return 0.5 * (self.R_s + self.R_p)

    @cached_property
    def T_s(self) -> FloatArray:
        """Transmittance of s. [1]"""
        return self._solution.transmittance(False)[0]

    @cached_property
    def T_p(self) -> FloatArray:
        """Transmittance of p. [1]"""
        return self._solution.transmittance(True)[0]

    @property
    def T(self) -> FloatArray:
        """Transmittance, mean of s and p. [1]"""
        return 0.5 * (self.T_s + self.T_p)

    @cached_property
    def A_layers_s(self) -> FloatArray:
        """Absorptance of each film for s, shape (layer, angle, wavelength). [1]"""
        return self._solution.film_absorptance(False)[:, 0]

    @cached_property
    def A_layers_p(self) -> FloatArray:
        """Absorptance of each film for p, shape (layer, angle, wavelength). [1]"""
        return self._solution.film_absorptance(True)[:, 0]

    @property
    def A_layers(self) -> FloatArray:
        """Absorptance of each film, mean of s and p, shape (layer, angle, wavelength). [1]"""
        return 0.5 * (self.A_layers_s + self.A_layers_p)

    @cached_property
    def A_plates_s(self) -> FloatArray:
        """Absorptance of each plate for s, shape (plate, angle, wavelength). [1]"""
        return self._solution.plate_absorptance(False)[:, 0]

    @cached_property
    def A_plates_p(self) -> FloatArray:
        """Absorptance of each plate for p, shape (plate, angle, wavelength). [1]"""
        return self._solution.plate_absorptance(True)[:, 0]

    @property
    def A_plates(self) -> FloatArray:
        """Absorptance of each plate, mean of s and p, shape (plate, angle, wavelength). [1]"""
        return 0.5 * (self.A_plates_s + self.A_plates_p)

    @property
    def A_s(self) -> FloatArray:
        """Absorptance of films and plates for s, the sum of their own. [1]"""
        return total(self.A_layers_s) + total(self.A_plates_s)

    @property
    def A_p(self) -> FloatArray:
        """Absorptance of films and plates for p, the sum of their own. [1]"""
        return total(self.A_layers_p) + total(self.A_plates_p)

    @property
    def A(self) -> FloatArray:
        """Absorptance of films and plates, mean of s and p. [1]"""
        return 0.5 * (self.A_s + self.A_p)

    @property
    def one_minus_R_s(self) -> FloatArray:
        """1 - R of s as T + A, right to the last digits for the best mirror. [1]"""
        return self.T_s + self.A_s

    @property
    def one_minus_R_p(self) -> FloatArray:
        """1 - R of p as T + A. [1]"""
        return self.T_p + self.A_p

    @property
    def one_minus_R(self) -> FloatArray:
        """1 - R as T + A, mean of s and p. [1]"""
        return 0.5 * (self.one_minus_R_s + self.one_minus_R_p)

    @cached_property
    def log10_T_s(self) -> FloatArray:
        """log10 of T of s, finite where T is below the smallest double. [1]"""
        return self._solution.log10_transmittance(False)[0]

    @cached_property
    def log10_T_p(self) -> FloatArray:
        """log10 of T of p. [1]"""
        return self._solution.log10_transmittance(True)[0]

    @property
    def log10_T(self) -> FloatArray:
        """log10 of the mean T of s and p. [1]"""
        return log10_of_mean(self.log10_T_s, self.log10_T_p)

    @cached_property
    def r_s(self) -> ComplexArray:
        """Amplitude reflectance of s, at the first interface. [1]"""
        return self._solution.amplitude_reflectance(False)[0]

    @cached_property
    def r_p(self) -> ComplexArray:
        """Amplitude reflectance of p, at the first interface; equals r_s at normal incidence. [1]"""
        return self._solution.amplitude_reflectance(True)[0]

    @cached_property
    def t_s(self) -> ComplexArray:
        """Amplitude transmittance of s, from the first to the last interface. [1]"""
        return self._solution.amplitude_transmittance(False)[0]

    @cached_property
    def t_p(self) -> ComplexArray:
        """Amplitude transmittance of p, ratio of full electric fields. [1]"""
        return self._solution.amplitude_transmittance(True)[0]

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a wavelength and angle, R, T and A of s, p and their mean."""
        import pandas as pd

        angle, wavelength = np.meshgrid(self.angle_deg, self.wavelength_nm, indexing="ij")
        columns = {"wavelength_nm": wavelength.ravel(), "angle_deg": angle.ravel()}
        for name in ("R_s", "R_p", "R", "T_s", "T_p", "T", "A_s", "A_p", "A"):
            columns[name] = getattr(self, name).ravel()
        return pd.DataFrame(columns)

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw R and T against wavelength on `ax`, or on a new figure, and return the axes."""
        from filmstack.report.spectrum_plot import draw_spectrum

        return draw_spectrum(self, ax)


def spectrum(stack: Stack, wavelength_nm: ArrayLike, angle_deg: ArrayLike = 0.0) -> Spectrum:
    r"""Compute reflectance, transmittance and absorptance of a stack.

    Parameters
    ----------
    stack : Stack
        Films and thick plates between two media.
    wavelength_nm : array_like of float
        Vacuum wavelength; order and repeats are kept. [nm]
    angle_deg : array_like of float
        Angle of incidence in the incident medium, 0 to 90; order and repeats are kept. [deg]

    Returns
    -------
    Spectrum
        Arrays of shape (angle, wavelength); a scalar is an axis of length 1.

    Raises
    ------
    ArgumentError
        If a wavelength or an angle is not in range, or the incident medium absorbs (k > 1e-4).
    MaterialRangeError
        If a wavelength lies outside the data of a material.

    Notes
    -----
    Characteristic matrices (Abeles 1950; Born and Wolf, Principles of Optics, section 1.6) with
    fields exp(+i omega t), N = n - ik; thick plates add by intensity.

    Examples
    --------
    A quarter wave of index 1.38 on glass of 1.52:

    >>> import filmstack as fs
    >>> layer = fs.Layer(fs.constant(1.38), 550 / 4 / 1.38)
    >>> s = fs.spectrum(fs.Stack(fs.constant(1.0), [layer], fs.constant(1.52)), [550.0])
    >>> s.R_s.round(6)
    array([[0.012601]])
    """
    asked = request(stack, wavelength_nm, angle_deg)
    return result_of(asked)


def result_of(asked: Request) -> Spectrum:
    """Return the spectrum of a checked request."""
    exit_label = asked.stack.exit.label
    into = f"through the part, into {exit_label}" if asked.stack.plates else f"into {exit_label} (no exit face)"
    return Spectrum(asked.wavelength_nm, asked.angle_deg[0], asked.notes, into, solve(asked))


if TYPE_CHECKING:
    from filmstack.stack import Stack
