"""What every dispersion model shares: a formula over photon energy, and its range and source.

A model gives `published(energy_ev)`, N in the terms of its source but in the house's sign (N = n - ik).
Where the source's index is relative to air, wavelengths and index are both converted to vacuum here.
"""

from __future__ import annotations

from abc import abstractmethod
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import ArgumentError, MaterialRangeError
from filmstack.materials.material import Material, Provenance
from filmstack.wave.series import Number, Series, conjugate, sqrt, value

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray

MICRON_EV = PLANCK_EV_NM / 1000.0
"""Photon energy times wavelength in um. [eV um]"""


def standard_air(energy_ev: Number, temperature_c: float = 20.0) -> Number:
    """Return n of dry air at 101.325 kPa, for converting indices measured in air.

    P. E. Ciddor, Appl. Opt. 35, 1566 (1996) at 15 C and 450 ppm CO2, scaled with the density; below
    230 and above 1690 nm the formula is used beyond its stated range, where it is right to 1e-6.
    """
    s = energy_ev / MICRON_EV
    s = s * s
    refractivity = 0.05792105 / (238.0185 - s) + 0.00167917 / (57.362 - s)
    return 1.0 + refractivity * (288.15 / (273.15 + temperature_c))


class Formula(Material):
    """A dispersion model.

    Parameters
    ----------
    provenance : Provenance
        Source, range and the rest.
    relative_to_air : bool
        The formula gives n relative to air, at wavelengths in air.
    """

    def __init__(self, provenance: Provenance, *, relative_to_air: bool = False) -> None:
        super().__init__(provenance)
        self.relative_to_air = relative_to_air

    @abstractmethod
    def published(self, energy_ev: Number) -> Number:
        """Return N = n - ik of the formula as published, of an array or a series of photon energies. [eV]"""

    def published_index(self, wavelength_nm: ArrayLike) -> ComplexArray:
        """Return N as the source prints it, wavelengths in the source's own terms."""
        wavelength = np.asarray(wavelength_nm, dtype=float)
        return np.asarray(self.published(PLANCK_EV_NM / wavelength), dtype=complex).reshape(wavelength.shape)

    def _absolute(self, energy_ev: Number) -> Number:
        if not self.relative_to_air:
            return self.published(energy_ev)
        air = standard_air(energy_ev)
        return air * self.published(energy_ev * air)

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        n = np.asarray(self._absolute(PLANCK_EV_NM / wavelength_nm), dtype=complex)
        self._check(wavelength_nm, n)
        return n

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        n = self._absolute(Series.variable(PLANCK_EV_NM / wavelength_nm, order))
        if not isinstance(n, Series):
            n = Series(np.concatenate([np.asarray(n)[np.newaxis], np.zeros((order, *wavelength_nm.shape))]))
        self._check(wavelength_nm, n.c[0])
        return n.derivatives()

    def _check(self, wavelength_nm: FloatArray, n: ComplexArray) -> None:
        bad = ~np.isfinite(n) | (n.real < 0.0) | ((n.imag > 0.0) & (not self.allow_gain))
        if np.any(bad):
            raise MaterialRangeError(
                self.label,
                f"the formula gives no index n >= 0, k >= 0 at {wavelength_nm[bad].flat[0]:g} nm",
                "Narrow range_nm or correct the parameters",
            )


def from_square(n_square: Number) -> Number:
    """Return n from a real n^2, nan where n^2 is negative."""
    with np.errstate(invalid="ignore"):
        root = np.sqrt(np.real(value(n_square)))
    if isinstance(n_square, Series):
        bad = np.isnan(root)
        safe = Series(np.where(bad, np.nan, n_square.c))
        return sqrt(safe)
    return root


def from_permittivity(permittivity: Number) -> Number:
    """Return N = n - ik from a permittivity of the textbooks' sign, Im >= 0 absorbing."""
    root = sqrt(permittivity if isinstance(permittivity, Series) else np.asarray(permittivity, dtype=complex))
    return conjugate(root)


def wavelength_um(energy_ev: Number) -> Number:
    """Return the wavelength in um."""
    return MICRON_EV / energy_ev


def checked_numbers(name: str, values: ArrayLike, *, positive: bool = False) -> FloatArray:
    """Return finite numbers as a one-dimensional array."""
    try:
        array = np.array(values, dtype=float, ndmin=1)
    except (TypeError, ValueError):
        raise ArgumentError(f"{name}: expected numbers, got {values!r}") from None
    bad = ~np.isfinite(array) | ((array <= 0.0) & positive)
    if array.ndim != 1 or np.any(bad):
        wanted = "finite numbers > 0" if positive else "finite numbers"
        raise ArgumentError(f"{name}: expected {wanted}, got {values!r}")
    return array


def same_length(**lists: FloatArray) -> None:
    """Refuse parameter lists of different lengths."""
    if len({len(values) for values in lists.values()}) > 1:
        told = ", ".join(f"{name} has {len(values)}" for name, values in lists.items())
        raise ArgumentError(f"expected lists of one length, a number a term: {told}")


def given_or(
    provenance: Provenance | None, model: str, label: str | None, range_nm: Sequence[float] | None
) -> Provenance:
    """Return the provenance of a shipped entry, or one of a model made by hand."""
    made = provenance or Provenance(key=f"{model} by parameters", label=label or f"{model} by parameters")
    if range_nm is not None:
        low, high = (float(x) for x in range_nm)
        if not 0.0 < low < high:
            raise ArgumentError(f"range_nm: expected two wavelengths 0 < low < high in nm, got {range_nm!r}")
        made = replace(made, range_nm=(low, high))
    if label is not None:
        made = replace(made, label=label)
    return made
