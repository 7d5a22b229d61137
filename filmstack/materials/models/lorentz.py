"""Lorentz oscillators, one or many."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import Formula, checked_numbers, from_permittivity, given_or, same_length
from filmstack.wave.series import Number

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


def oscillators(f: FloatArray, w_ev: FloatArray, g_ev: FloatArray, energy_ev: Number) -> Number:
    """Return sum f w^2 / (w^2 - E^2 - i E g), the textbooks' sign."""
    total = 0.0 * energy_ev
    for strength, w, g in zip(f.tolist(), w_ev.tolist(), g_ev.tolist(), strict=True):
        total = total + strength * w * w / (w * w - energy_ev * energy_ev - 1j * g * energy_ev)
    return total


class Lorentz(Formula):
    """eps = eps_inf + sum f w^2 / (w^2 - E^2 - i E g)."""

    def __init__(
        self, f: FloatArray, w_ev: FloatArray, g_ev: FloatArray, eps_inf: float, provenance: Provenance
    ) -> None:
        super().__init__(provenance)
        self.f, self.w_ev, self.g_ev, self.eps_inf = f, w_ev, g_ev, eps_inf

    def published(self, energy_ev: Number) -> Number:
        """Return N."""
        return from_permittivity(self.eps_inf + oscillators(self.f, self.w_ev, self.g_ev, energy_ev))


def lorentz(
    f: ArrayLike,
    w_ev: ArrayLike,
    g_ev: ArrayLike,
    eps_inf: float = 1.0,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a medium of Lorentz oscillators.

    Parameters
    ----------
    f, w_ev, g_ev : array_like of float
        Strength, resonance energy and width of each oscillator. [1], [eV], [eV]
    eps_inf : float
        Permittivity far above all resonances. [1]
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
    H. A. Lorentz, The Theory of Electrons (1909).

    Examples
    --------
    >>> complex(lorentz(1.0, 5.0, 0.1).index(1239.841984).round(4))
    (1.4289-0.0015j)
    """
    values = {"f": checked_numbers("f", f), "w_ev": checked_numbers("w_ev", w_ev, positive=True)}
    values["g_ev"] = checked_numbers("g_ev", g_ev)
    same_length(**values)
    (eps,) = checked_numbers("eps_inf", eps_inf).tolist()
    return Lorentz(**values, eps_inf=eps, provenance=given_or(provenance, "Lorentz oscillators", label, range_nm))
