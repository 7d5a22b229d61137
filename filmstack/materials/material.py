"""The one face of every medium: `models`, `tables`, `mixtures` -> here -> `filmstack.stack`.

Fields vary as exp(+i omega t), so N = n - ik with k >= 0 for absorption. Wavelengths are vacuum
wavelengths in nm. A new kind of medium is one subclass with `_index` and `_index_derivatives`.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from filmstack.errors import ArgumentError, MaterialRangeError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray


@dataclass(frozen=True, kw_only=True)
class Provenance:
    """Where the numbers of a material come from; every listing, table and plot shows it."""

    key: str
    """Short name, such as `SiO2/ion-assisted-2013`; what a design file says."""
    label: str
    """For people, such as "SiO2, ion-assisted film (Gao 2013)"."""
    source: str = ""
    """Full citation."""
    form: str = ""
    """Bulk, evaporated film, sputtered film and so on."""
    range_nm: tuple[float, float] = (0.0, float("inf"))
    """Vacuum wavelengths covered by the source. [nm]"""
    temperature: str = ""
    """Temperature of the measurement, in the source's words."""
    status: str = ""
    """How the numbers were obtained and checked."""
    notes: tuple[str, ...] = field(default=())
    """Warnings and assumptions, in words (residual absorption, k taken as 0, radioactive ...)."""


@dataclass(frozen=True, kw_only=True)
class Thermal:
    """How a medium changes with temperature, where a source gives it."""

    dn_dt_per_k: float
    """Change of n with temperature, near `reference_c`. [1/K]"""
    reference_c: float
    """Temperature of the index data. [deg C]"""
    range_c: tuple[float, float]
    """Temperatures in which dn/dT holds. [deg C]"""
    range_nm: tuple[float, float]
    """Vacuum wavelengths in which dn/dT holds. [nm]"""
    expansion_per_k: float
    """Linear expansion. [1/K]"""
    source: str
    """Where the numbers come from."""


class Material(ABC):
    """A homogeneous isotropic medium N(lambda) = n - ik.

    Equality and hash go by identity: two materials are the same if they are the same object.
    """

    def __init__(self, provenance: Provenance, *, allow_gain: bool = False) -> None:
        self.provenance = provenance
        self.allow_gain = allow_gain
        self.thermal: Thermal | None = None

    @property
    def key(self) -> str:
        """Short name, unique in the library."""
        return self.provenance.key

    @property
    def label(self) -> str:
        """Name for people, with the source."""
        return self.provenance.label

    @property
    def range_nm(self) -> tuple[float, float]:
        """Vacuum wavelengths covered. [nm]"""
        return self.provenance.range_nm

    @property
    def derivative_order(self) -> int:
        """Highest derivative by photon energy that the data support."""
        return 4

    def __repr__(self) -> str:
        return f"<{type(self).__name__} {self.key!r}>"

    def index(self, wavelength_nm: ArrayLike, temperature_c: float | None = None) -> ComplexArray:
        """Return the complex refractive index.

        Parameters
        ----------
        wavelength_nm : array_like of float
            Vacuum wavelength. [nm]
        temperature_c : float, optional
            Temperature; the source's own if not given. [deg C]

        Returns
        -------
        ndarray of complex, shape of `wavelength_nm`
            N = n - ik. [1]

        Raises
        ------
        ArgumentError
            If a wavelength is not a finite positive number.
        MaterialRangeError
            If a wavelength or the temperature lies outside the data.
        """
        wavelength = self._checked(wavelength_nm)
        n: ComplexArray = np.asarray(self._index(wavelength.ravel(), temperature_c), dtype=complex).reshape(
            wavelength.shape
        )
        change = self._thermal_change(wavelength, temperature_c)
        return np.asarray(n + change, dtype=complex)

    def index_derivatives(
        self, wavelength_nm: ArrayLike, order: int, temperature_c: float | None = None
    ) -> ComplexArray:
        """Return N and its derivatives by photon energy.

        Parameters
        ----------
        wavelength_nm : array_like of float
            Vacuum wavelength. [nm]
        order : int
            Highest derivative, 0 to `derivative_order`.
        temperature_c : float, optional
            Temperature; the source's own if not given. [deg C]

        Returns
        -------
        ndarray of complex, shape (order + 1, *shape of `wavelength_nm`)
            Row j holds d^j N / dE^j. [1/eV^j]

        Raises
        ------
        ArgumentError
            If `order` is not supported by the data.
        MaterialRangeError
            If a wavelength or the temperature lies outside the data.
        """
        if not 0 <= order <= self.derivative_order:
            raise ArgumentError(f"order: {self.label}: expected 0 to {self.derivative_order} derivatives, got {order}")
        wavelength = self._checked(wavelength_nm)
        rows = np.array(self._index_derivatives(wavelength.ravel(), order, temperature_c), dtype=complex)
        rows = rows.reshape(order + 1, *wavelength.shape)
        rows[0] += self._thermal_change(wavelength, temperature_c)
        return rows

    def _checked(self, wavelength_nm: ArrayLike) -> FloatArray:
        wavelength = np.asarray(wavelength_nm, dtype=float)
        bad = ~(np.isfinite(wavelength) & (wavelength > 0.0))
        if np.any(bad):
            raise ArgumentError(f"wavelength_nm: expected a finite length > 0 nm, got {wavelength[bad].flat[0]:g} nm")
        low, high = self.range_nm
        outside = (wavelength < low) | (wavelength > high)
        if np.any(outside):
            raise MaterialRangeError(
                self.label,
                f"expected a wavelength from {low:g} to {high:g} nm, got {wavelength[outside].flat[0]:g} nm",
                "Narrow the wavelengths or choose another source of this material",
            )
        return wavelength

    def _thermal_change(self, wavelength_nm: FloatArray, temperature_c: float | None) -> float:
        """Return what dn/dT adds to n; media with a temperature of their own override this with 0."""
        if temperature_c is None:
            return 0.0
        if self.thermal is None:
            raise MaterialRangeError(
                self.label, f"expected no temperature, got {temperature_c:g} deg C", "The source gives no dn/dT"
            )
        thermal = self.thermal
        low, high = thermal.range_c
        if not low <= temperature_c <= high:
            raise MaterialRangeError(
                self.label, f"expected a temperature from {low:g} to {high:g} deg C, got {temperature_c:g} deg C"
            )
        outside = (wavelength_nm < thermal.range_nm[0]) | (wavelength_nm > thermal.range_nm[1])
        if np.any(outside):
            raise MaterialRangeError(
                self.label,
                f"dn/dT is known from {thermal.range_nm[0]:g} to {thermal.range_nm[1]:g} nm, "
                f"got {wavelength_nm[outside].flat[0]:g} nm",
                "Narrow the wavelengths or leave the temperature out",
            )
        return thermal.dn_dt_per_k * (temperature_c - thermal.reference_c)

    @abstractmethod
    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        """Return N at a row of wavelengths inside the range."""

    @abstractmethod
    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        """Return N and its derivatives by photon energy at a row of wavelengths inside the range."""
