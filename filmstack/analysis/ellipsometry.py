"""Ellipsometric psi and delta of a stack: `spectrum` -> here -> tables and plots."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from filmstack.analysis.spectrum import spectrum

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray
    from filmstack.stack import Stack


@dataclass(frozen=True, eq=False)
class Ellipsometry:
    """Psi and delta of the reflected light, shape (angle, wavelength).

    Parameters
    ----------
    wavelength_nm, angle_deg : ndarray, shapes (wavelength,) and (angle,)
        Axes. [nm], [deg]
    rho : ndarray of complex
        tan(psi) exp(i delta), the ratio of p to s with the ellipsometrists' sign of p. [1]
    notes : tuple of str
        Assumptions made on the way.
    """

    wavelength_nm: FloatArray
    angle_deg: FloatArray
    rho: ComplexArray
    notes: tuple[str, ...]

    @property
    def psi_deg(self) -> FloatArray:
        """Angle of the amplitude ratio, 0 to 90; 90 where s is not reflected. [deg]"""
        size = np.abs(self.rho)
        return np.asarray(np.where(np.isinf(size), 90.0, np.degrees(np.arctan(size))))

    @property
    def delta_deg(self) -> FloatArray:
        """Phase of p against s, 0 to 360; 180 at normal incidence, nan where either amplitude is 0. [deg]"""
        size = np.abs(self.rho)
        angle = np.mod(np.degrees(np.angle(self.rho)), 360.0)
        return np.asarray(np.where((size > 0.0) & np.isfinite(size), angle, np.nan))

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a wavelength and angle."""
        import pandas as pd

        angle, wavelength = np.meshgrid(self.angle_deg, self.wavelength_nm, indexing="ij")
        columns = {
            "wavelength_nm": wavelength,
            "angle_deg": angle,
            "psi_deg": self.psi_deg,
            "delta_deg": self.delta_deg,
        }
        return pd.DataFrame({name: values.ravel() for name, values in columns.items()})

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw psi against wavelength on `ax`, or on a new figure, and return the axes."""
        from filmstack.report.ellipsometry_plot import draw_ellipsometry

        return draw_ellipsometry(self, ax)


def ellipsometry(stack: Stack, wavelength_nm: ArrayLike, angle_deg: ArrayLike = 70.0) -> Ellipsometry:
    """Compute psi and delta of the light that a stack reflects.

    Parameters
    ----------
    stack : Stack
        Films between two media; no thick plates, whose light has no phase.
    wavelength_nm, angle_deg : array_like of float
        As in `spectrum`. [nm], [deg]

    Returns
    -------
    Ellipsometry

    Raises
    ------
    CoherenceError
        If the stack holds a thick plate.
    ArgumentError, MaterialRangeError
        As in `spectrum`.

    Notes
    -----
    rho = -r_p / r_s: at normal incidence r_p = r_s here, while ellipsometry counts delta = 180 degrees; then
    0 < delta < 180 on a bare absorber (R. M. A. Azzam, N. M. Bashara, Ellipsometry and Polarized Light, 1977).

    Examples
    --------
    Glass of 1.5 at 70 degrees, beyond Brewster's angle:

    >>> import filmstack as fs
    >>> found = fs.ellipsometry(fs.Stack(fs.constant(1.0), [], fs.constant(1.5)), 633.0, 70.0)
    >>> found.psi_deg.round(3).item(), abs(found.delta_deg.item())
    (20.636, 0.0)
    """
    s = spectrum(stack, wavelength_nm, angle_deg)
    r_s, r_p = s.r_s, s.r_p
    with np.errstate(divide="ignore", invalid="ignore"):
        rho = np.where(r_s == 0.0, np.where(r_p == 0.0, np.nan, np.inf), -r_p / r_s)
    return Ellipsometry(s.wavelength_nm, s.angle_deg, rho, s.notes)
