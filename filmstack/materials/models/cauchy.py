"""Cauchy formula: n = A + sum D L^q."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import given_or
from filmstack.materials.models.power_series import PowerSeries, checked_terms

if TYPE_CHECKING:
    from numpy.typing import ArrayLike


def cauchy(
    A: float,
    D: ArrayLike = (),
    q: ArrayLike = (),
    *,
    relative_to_air: bool = False,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a medium with n = A + sum D L^q.

    Parameters
    ----------
    A : float
        Constant term. [1]
    D, q : array_like of float
        Factor and exponent of each power of the wavelength in um. [um^-q], [1]
    relative_to_air : bool
        The coefficients give n relative to air at wavelengths in air; `index` is converted to vacuum.
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
    A. L. Cauchy (1836).

    Examples
    --------
    >>> cauchy(1.875, [0.00628, 0.00058], [-2, -4]).index(632.8).real.round(4).item()
    1.8943
    """
    a, terms = checked_terms(A, D, q)
    made = given_or(provenance, "Cauchy formula", label, range_nm)
    return PowerSeries(a, terms, made, squared=False, to_air=relative_to_air)
