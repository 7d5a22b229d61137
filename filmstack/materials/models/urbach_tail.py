"""Exponential absorption tail below the edge of a host material."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import ArgumentError
from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import checked_numbers, given_or
from filmstack.wave.series import Series, exp

if TYPE_CHECKING:
    from filmstack.arraytypes import ComplexArray, FloatArray


class UrbachTail(Material):
    """k of the host plus k_edge exp((E - E_edge) / E_u), at and below the edge."""

    def __init__(self, host: Material, k_edge: float, edge_ev: float, slope_ev: float, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.host, self.k_edge, self.edge_ev, self.slope_ev = host, k_edge, edge_ev, slope_ev

    @property
    def derivative_order(self) -> int:
        """Highest derivative, that of the host."""
        return self.host.derivative_order

    def _thermal_change(self, wavelength_nm: FloatArray, temperature_c: float | None) -> float:
        """Return 0: the host knows its own."""
        return 0.0

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        energy = PLANCK_EV_NM / wavelength_nm
        tail = self.k_edge * np.exp((energy - self.edge_ev) / self.slope_ev)
        return self.host.index(wavelength_nm, temperature_c) - 1j * tail

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        energy = Series.variable(PLANCK_EV_NM / wavelength_nm, order)
        tail = self.k_edge * exp((energy - self.edge_ev) / self.slope_ev)
        return self.host.index_derivatives(wavelength_nm, order, temperature_c) - 1j * tail.derivatives()


def urbach_tail(
    host: Material,
    k_edge: float,
    edge_ev: float,
    urbach_ev: float,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a host with an exponential absorption tail below its edge.

    Parameters
    ----------
    host : Material
        Medium whose n (and own k) stay.
    k_edge : float
        Extinction coefficient of the tail at the edge. [1]
    edge_ev : float
        Photon energy of the edge; above it the tail does not hold and the index is refused. [eV]
    urbach_ev : float
        Energy over which the tail falls by e. [eV]
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
        If a coefficient is not finite or lists differ in length.

    Notes
    -----
    F. Urbach, Phys. Rev. 92, 1324 (1953). Only k is changed: the effect of so weak a tail on n is left out, so the
    result is not a Kramers-Kronig pair.

    Examples
    --------
    >>> from filmstack.materials.models.constant import constant
    >>> film = urbach_tail(constant(2.3), k_edge=1e-2, edge_ev=3.3, urbach_ev=0.1)
    >>> (-film.index(1239.8419843320025 / 3.0).imag).round(6).item()
    0.000498
    """
    if not isinstance(host, Material):
        raise ArgumentError(f"host: expected a Material, got {host!r}")
    (k,) = checked_numbers("k_edge", k_edge).tolist()
    if k < 0.0:
        raise ArgumentError(f"k_edge: expected a number >= 0, got {k:g}")
    (edge,), (slope,) = (
        checked_numbers(n, v, positive=True).tolist() for n, v in (("edge_ev", edge_ev), ("urbach_ev", urbach_ev))
    )
    made = given_or(provenance, "Urbach tail", label or f"{host.label} with an Urbach tail", range_nm)
    low, high = max(made.range_nm[0], host.range_nm[0], PLANCK_EV_NM / edge), min(made.range_nm[1], host.range_nm[1])
    return UrbachTail(host, k, edge, slope, replace(made, range_nm=(low, high)))
