"""Moist air after Ciddor: any temperature, pressure, humidity and carbon dioxide content."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import ArgumentError, MaterialRangeError
from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import MICRON_EV, given_or
from filmstack.wave.series import Number, Series

if TYPE_CHECKING:
    from filmstack.arraytypes import ComplexArray, FloatArray

_LOWEST_C, _HIGHEST_C = -40.0, 100.0


@dataclass(frozen=True)
class Weather:
    """State of the air."""

    temperature_c: float
    pressure_pa: float
    relative_humidity: float
    co2_ppm: float


def _compressibility(kelvin: float, pressure: float, x: float) -> float:
    t, ratio = kelvin - 273.15, pressure / kelvin
    linear = 1.58123e-6 - 2.9331e-8 * t + 1.1043e-10 * t * t
    linear += (5.707e-6 - 2.051e-8 * t) * x + (1.9898e-4 - 2.376e-6 * t) * x * x
    return 1.0 - ratio * linear + ratio * ratio * (1.83e-11 - 0.765e-8 * x * x)


def _water_fraction(air: Weather) -> float:
    kelvin = air.temperature_c + 273.15
    if air.temperature_c >= 0.0:
        saturation = np.exp(1.2378847e-5 * kelvin**2 - 1.9121316e-2 * kelvin + 33.93711047 - 6343.1645 / kelvin)
    else:
        saturation = 10.0 ** (-2663.5 / kelvin + 12.537)
    enhancement = 1.00062 + 3.14e-8 * air.pressure_pa + 5.6e-7 * air.temperature_c**2
    return float(enhancement * air.relative_humidity * saturation / air.pressure_pa)


def refractivity(energy_ev: Number, air: Weather) -> Number:
    """Return n - 1 of moist air at photon energies. [1]"""
    s = (energy_ev / MICRON_EV) ** 2
    standard = (5792105.0 / (238.0185 - s) + 167917.0 / (57.362 - s)) * 1e-8
    standard = standard * (1.0 + 0.534e-6 * (air.co2_ppm - 450.0))
    vapour = 1.022e-8 * (295.235 + 2.6422 * s - 0.032380 * s * s + 0.004028 * s * s * s)
    kelvin, pressure, x = air.temperature_c + 273.15, air.pressure_pa, _water_fraction(air)
    # Densities over the molar mass and under the gas constant: both cancel in the ratios.
    density = pressure / (_compressibility(kelvin, pressure, x) * kelvin)
    dry_standard = 101325.0 / (_compressibility(288.15, 101325.0, 0.0) * 288.15)
    vapour_standard = 1333.0 / (_compressibility(293.15, 1333.0, 1.0) * 293.15)
    return standard * (density * (1.0 - x) / dry_standard) + vapour * (density * x / vapour_standard)


class MoistAir(Material):
    """n of moist air; `temperature_c` of `index` replaces the air's own."""

    def __init__(self, weather: Weather, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.weather = weather

    def _at(self, temperature_c: float | None) -> Weather:
        if temperature_c is None:
            return self.weather
        return replace(self.weather, temperature_c=_checked_temperature(temperature_c, self.label))

    def _thermal_change(self, wavelength_nm: FloatArray, temperature_c: float | None) -> float:
        """Return 0: the formula holds the temperature."""
        return 0.0

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        return np.asarray(1.0 + refractivity(PLANCK_EV_NM / wavelength_nm, self._at(temperature_c)), dtype=complex)

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        energy = Series.variable(PLANCK_EV_NM / wavelength_nm, order)
        n: Series = 1.0 + refractivity(energy, self._at(temperature_c))
        return n.derivatives()


def _checked_temperature(temperature_c: float, label: str) -> float:
    if not _LOWEST_C <= temperature_c <= _HIGHEST_C:
        raise MaterialRangeError(
            label, f"expected a temperature from {_LOWEST_C:g} to {_HIGHEST_C:g} deg C, got {temperature_c:g} deg C"
        )
    return float(temperature_c)


def moist_air(
    temperature_c: float = 20.0,
    pressure_pa: float = 101325.0,
    relative_humidity: float = 0.0,
    co2_ppm: float = 450.0,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return moist air after Ciddor.

    Parameters
    ----------
    temperature_c : float
        Temperature, -40 to 100. [deg C]
    pressure_pa : float
        Pressure, 10 to 140 kPa. [Pa]
    relative_humidity : float
        Fraction of saturation, 0 to 1. [1]
    co2_ppm : float
        Carbon dioxide, 0 to 2000. [ppm]
    label : str, optional
        Name for people.
    range_nm : pair of float, optional
        Vacuum wavelengths in which the model holds; without it there is no limit. [nm]
    provenance : Provenance, optional
        Source and the rest of a shipped entry.

    Returns
    -------
    Material

    Raises
    ------
    ArgumentError
        If the pressure, humidity or carbon dioxide lies outside the model.
    MaterialRangeError
        If the temperature does.

    Notes
    -----
    P. E. Ciddor, Appl. Opt. 35, 1566 (1996); 300 to 1690 nm.

    Examples
    --------
    >>> moist_air(20.0, relative_humidity=0.5).index(633.0).real.round(9).item()
    1.000271373
    """
    for name, number, low, high, unit in (
        ("pressure_pa", pressure_pa, 1e4, 1.4e5, " Pa"),
        ("relative_humidity", relative_humidity, 0.0, 1.0, ""),
        ("co2_ppm", co2_ppm, 0.0, 2000.0, " ppm"),
    ):
        if not low <= number <= high:
            raise ArgumentError(f"{name}: expected {low:g} to {high:g}{unit}, got {number:g}{unit}")
    text = f"moist air, {temperature_c:g} C, {pressure_pa:g} Pa, {100 * relative_humidity:g} % (Ciddor 1996)"
    made = given_or(provenance, "moist air", label or (None if provenance else text), range_nm)
    if made.range_nm == (0.0, float("inf")):
        made = replace(made, range_nm=(300.0, 1690.0))
    temperature = _checked_temperature(temperature_c, made.label)
    return MoistAir(Weather(temperature, float(pressure_pa), float(relative_humidity), float(co2_ppm)), made)
