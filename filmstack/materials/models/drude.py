"""Drude free electrons."""

from __future__ import annotations

from collections.abc import Sequence

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import Formula, checked_numbers, from_permittivity, given_or
from filmstack.wave.series import Number


class Drude(Formula):
    """eps = eps_inf - wp^2 / (E^2 + i E g)."""

    def __init__(self, wp_ev: float, g_ev: float, eps_inf: float, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.wp_ev, self.g_ev, self.eps_inf = wp_ev, g_ev, eps_inf

    def published(self, energy_ev: Number) -> Number:
        """Return N."""
        return from_permittivity(self.eps_inf - self.wp_ev**2 / (energy_ev * energy_ev + 1j * self.g_ev * energy_ev))


def drude(
    wp_ev: float,
    g_ev: float,
    eps_inf: float = 1.0,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a medium of free electrons.

    Parameters
    ----------
    wp_ev, g_ev : float
        Plasma energy and damping. [eV]
    eps_inf : float
        Permittivity of the bound electrons. [1]
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
    P. Drude, Ann. Phys. 306, 566 (1900).

    Examples
    --------
    >>> complex(drude(9.0, 0.05, 4.0).index(1000.0).round(3))
    (0.152-6.974j)
    """
    (wp,), (g,) = checked_numbers("wp_ev", wp_ev, positive=True).tolist(), checked_numbers("g_ev", g_ev).tolist()
    (eps,) = checked_numbers("eps_inf", eps_inf).tolist()
    return Drude(wp, g, eps, given_or(provenance, "Drude", label, range_nm))
