"""Forouhi-Bloomer interband model of amorphous films."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import Formula, checked_numbers, given_or, same_length
from filmstack.wave.series import Number, value, where

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


class ForouhiBloomer(Formula):
    """k = sum A (E - Eg)^2 / (E^2 - B E + C) above Eg; n with the constants of the paper."""

    def __init__(self, terms: tuple[FloatArray, ...], eg_ev: float, n_inf: float, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.terms, self.eg_ev, self.n_inf = terms, eg_ev, n_inf

    def published(self, energy_ev: Number) -> Number:
        """Return N."""
        gap = self.eg_ev
        n, k = self.n_inf + 0.0 * energy_ev, 0.0 * energy_ev
        for a, b, c in zip(*(x.tolist() for x in self.terms), strict=True):
            quadratic = energy_ev * energy_ev - b * energy_ev + c
            q = 0.5 * np.sqrt(4.0 * c - b * b)
            b0 = a / q * (-0.5 * b * b + gap * b - gap * gap + c)
            c0 = a / q * (0.5 * b * (gap * gap + c) - 2.0 * gap * c)
            n = n + (b0 * energy_ev + c0) / quadratic
            k = k + a * (energy_ev - gap) ** 2 / quadratic
        return n - 1j * where(np.real(value(energy_ev)) > gap, k, 0.0 * energy_ev)


def forouhi_bloomer(
    A: ArrayLike,
    B_ev: ArrayLike,
    C_ev2: ArrayLike,
    Eg_ev: float,
    n_inf: float,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return an amorphous medium after Forouhi and Bloomer.

    Parameters
    ----------
    A, B_ev, C_ev2 : array_like of float
        Parameters of each term; 4 C > B^2. [1], [eV], [eV^2]
    Eg_ev : float
        Gap. [eV]
    n_inf : float
        Index far above. [1]
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
    A. R. Forouhi, I. Bloomer, Phys. Rev. B 34, 7018 (1986). n and k of this model are not a strict Kramers-Kronig
    pair: k is cut at the gap and does not vanish at high energy.

    Examples
    --------
    One term, from the formula by hand at 2 eV with a gap of 1 eV:

    >>> complex(forouhi_bloomer(0.5, 6.0, 10.0, 1.0, 2.0).index(619.920992).round(4))
    (3.75-0.25j)
    """
    from filmstack.errors import ArgumentError

    terms = (checked_numbers("A", A), checked_numbers("B_ev", B_ev), checked_numbers("C_ev2", C_ev2))
    same_length(A=terms[0], B_ev=terms[1], C_ev2=terms[2])
    if np.any(4.0 * terms[2] <= terms[1] ** 2):
        raise ArgumentError("C_ev2: expected 4 C > B^2 in every term, so that the denominator has no real zero")
    (gap,), (n_inf_value,) = checked_numbers("Eg_ev", Eg_ev).tolist(), checked_numbers("n_inf", n_inf).tolist()
    return ForouhiBloomer(terms, gap, n_inf_value, given_or(provenance, "Forouhi-Bloomer", label, range_nm))
