"""Aluminium gallium arsenide, Al(x)Ga(1-x)As, below its band gap."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Literal

import numpy as np

from filmstack.arraytypes import ComplexArray, FloatArray
from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import ArgumentError, MaterialRangeError
from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import from_square, given_or
from filmstack.wave.series import Number, Series, log

_GEHRSITZ_EV_UM = 1.239856
_BOLTZMANN_EV = 0.0861708e-3


def _polynomial(coefficients: Sequence[float], x: float, first: int = 0) -> float:
    return float(sum(c * x ** (first + i) for i, c in enumerate(coefficients)))


class Afromowitz(Material):
    """Single effective oscillator, 300 K."""

    def __init__(self, x: float, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.e0 = _polynomial((3.65, 0.871, 0.179), x)
        self.ed = _polynomial((36.1, -2.45), x)
        self.gap_ev = _polynomial((1.424, 1.266, 0.26), x)

    def published(self, energy_ev: Number) -> Number:
        """Return n."""
        e0, ed, gap = self.e0, self.ed, self.gap_ev
        square = energy_ev * energy_ev
        eta = np.pi * ed / (2.0 * e0**3 * (e0**2 - gap**2))
        edge = log((2.0 * e0**2 - gap**2 - square) / (gap**2 - square))
        return from_square(1.0 + ed / e0 + ed / e0**3 * square + eta / np.pi * square * square * edge)

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        return np.asarray(self.published(PLANCK_EV_NM / wavelength_nm), dtype=complex)

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        n: Series = self.published(Series.variable(PLANCK_EV_NM / wavelength_nm, order))
        return n.derivatives()


class Gehrsitz(Material):
    """Two-resonance model with temperature."""

    def __init__(self, x: float, temperature_c: float, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.x, self.temperature_c = x, temperature_c

    def _gap_per_um(self, kelvin: float) -> float:
        v = 2.0 * _BOLTZMANN_EV * kelvin
        gap = (
            1.5192
            + 1.8 * 15.9e-3 * (1.0 - 1.0 / np.tanh(15.9e-3 / v))
            + 1.1 * 33.6e-3 * (1.0 - 1.0 / np.tanh(33.6e-3 / v))
        )
        return float(gap / _GEHRSITZ_EV_UM + _polynomial((1.1308, 0.1436), self.x, 1))

    def published(self, energy_ev: Number, kelvin: float) -> Number:
        """Return n."""
        x = self.x
        square = (energy_ev / (PLANCK_EV_NM / 1000.0)) ** 2
        a = _polynomial((5.9613, 7.7178e-4, -0.953e-6), kelvin)
        a += _polynomial((-16.159, 43.511, -71.317, 57.535, -17.451), x, 1)
        c0 = 1.0 / _polynomial((50.535, -150.7, -62.209, 797.16, -1125.0, 503.79), x)
        e1 = _polynomial((4.7171, -3.237e-4, -1.358e-6), kelvin) + _polynomial((11.006, -3.08), x, 1)
        c1 = _polynomial((21.5647, 113.74, -122.5, 108.401, -47.318), x)
        n_square = a + c0 / (self._gap_per_um(kelvin) ** 2 - square) + c1 / (e1 - square)
        n_square = n_square + (1.0 - x) * 1.55e-3 / (0.724e-3 - square) + x * 2.61e-3 / (1.331e-3 - square)
        return from_square(n_square)

    def _kelvin(self, temperature_c: float | None) -> float:
        celsius = self.temperature_c if temperature_c is None else temperature_c
        if not 0.0 <= celsius <= 60.0:
            raise MaterialRangeError(
                self.label,
                f"expected a temperature from 0 to 60 deg C (near room temperature), got {celsius:g} deg C",
            )
        return celsius + 273.15

    def _thermal_change(self, wavelength_nm: FloatArray, temperature_c: float | None) -> float:
        """Return 0: the formula holds the temperature."""
        return 0.0

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        return np.asarray(self.published(PLANCK_EV_NM / wavelength_nm, self._kelvin(temperature_c)), dtype=complex)

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        energy = Series.variable(PLANCK_EV_NM / wavelength_nm, order)
        n: Series = self.published(energy, self._kelvin(temperature_c))
        return n.derivatives()


def aluminium_gallium_arsenide(
    x: float,
    *,
    model: Literal["gehrsitz", "afromowitz"] = "gehrsitz",
    temperature_c: float = 23.0,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return Al(x)Ga(1-x)As of any composition.

    Parameters
    ----------
    x : float
        Aluminium fraction, 0 to 1. [1]
    model : str
        Gehrsitz (2000), with temperature, or Afromowitz (1974), at 300 K.
    temperature_c : float
        Temperature, 0 to 60, of the first. [deg C]
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
        If x lies outside 0 to 1 or the model is unknown.

    Notes
    -----
    S. Gehrsitz and others, J. Appl. Phys. 87, 7825 (2000); M. A. Afromowitz, Solid State Commun. 15, 59 (1974).
    The range ends 2 % above the direct gap's wavelength.

    Examples
    --------
    >>> aluminium_gallium_arsenide(0.3).index(980.0).real.round(4).item()
    3.3183
    """
    if not 0.0 <= x <= 1.0:
        raise ArgumentError(f"x: expected an aluminium fraction from 0 to 1, got {x:g}")
    if model not in ("gehrsitz", "afromowitz"):
        raise ArgumentError(f"model: expected 'gehrsitz' or 'afromowitz', got {model!r}")
    name = f"Al({x:g})Ga({1 - x:g})As"
    source = "Gehrsitz 2000" if model == "gehrsitz" else "Afromowitz 1974"
    made = given_or(provenance, name, label or (None if provenance else f"{name} ({source})"), range_nm)
    bare: Gehrsitz | Afromowitz
    if model == "gehrsitz":
        bare = Gehrsitz(x, temperature_c, made)
        gap_nm, widest = 1000.0 / bare._gap_per_um(bare._kelvin(None)), (440.0, 3100.0)
    else:
        bare = Afromowitz(x, made)
        gap_nm, widest = PLANCK_EV_NM / bare.gap_ev, (900.0, 2500.0)
    low, high = max(made.range_nm[0], widest[0], 1.02 * gap_nm), min(made.range_nm[1], widest[1])
    bare.provenance = replace(made, range_nm=(low, high), notes=(*made.notes, "valid below the direct gap only"))
    return bare
