"""Drude electrons and Lorentz oscillators with a common plasma energy, as metals are tabulated."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import Formula, checked_numbers, from_permittivity, given_or, same_length
from filmstack.wave.series import Number

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


class LorentzDrude(Formula):
    """eps = 1 - f0 wp^2 / (E (E + i g0)) + sum f wp^2 / (w^2 - E^2 - i E g)."""

    def __init__(
        self,
        wp_ev: float,
        f0: float,
        g0_ev: float,
        terms: tuple[FloatArray, FloatArray, FloatArray],
        provenance: Provenance,
    ) -> None:
        super().__init__(provenance)
        self.wp_ev, self.f0, self.g0_ev, self.terms = wp_ev, f0, g0_ev, terms

    def published(self, energy_ev: Number) -> Number:
        """Return N."""
        square = self.wp_ev**2
        permittivity = 1.0 - self.f0 * square / (energy_ev * (energy_ev + 1j * self.g0_ev))
        for f, w, g in zip(*(x.tolist() for x in self.terms), strict=True):
            permittivity = permittivity + f * square / (w * w - energy_ev * energy_ev - 1j * g * energy_ev)
        return from_permittivity(permittivity)


def lorentz_drude(
    wp_ev: float,
    f0: float,
    g0_ev: float,
    f: ArrayLike,
    w_ev: ArrayLike,
    g_ev: ArrayLike,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a metal of free and bound electrons.

    Parameters
    ----------
    wp_ev : float
        Plasma energy. [eV]
    f0, g0_ev : float
        Strength and damping of the free electrons. [1], [eV]
    f, w_ev, g_ev : array_like of float
        Strength, resonance energy and width of the bound ones. [1], [eV], [eV]
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
    A. D. Rakic, A. B. Djurisic, J. M. Elazar, M. L. Majewski, Appl. Opt. 37, 5271 (1998).
    """
    terms = (checked_numbers("f", f), checked_numbers("w_ev", w_ev), checked_numbers("g_ev", g_ev))
    same_length(f=terms[0], w_ev=terms[1], g_ev=terms[2])
    (wp,), (f_free,), (g_free,) = (
        checked_numbers(n, v).tolist() for n, v in (("wp_ev", wp_ev), ("f0", f0), ("g0_ev", g0_ev))
    )
    return LorentzDrude(wp, f_free, g_free, terms, given_or(provenance, "Lorentz-Drude", label, range_nm))
