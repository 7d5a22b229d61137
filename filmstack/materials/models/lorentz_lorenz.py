"""Lorentz-Lorenz mixture: polarizabilities add; the usual rule for packing density."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material
from filmstack.materials.models.mixture import Mixture, checked_fractions
from filmstack.wave.series import Number

if TYPE_CHECKING:
    from numpy.typing import ArrayLike


class LorentzLorenz(Mixture):
    """(eps - 1) / (eps + 2) is the mean of the constituents'."""

    def mixed(self, permittivities: list[Number]) -> Number:
        """Return the permittivity."""
        mean: Number = 0.0
        for share, e in zip(self.fractions.tolist(), permittivities, strict=True):
            mean = mean + share * ((e - 1.0) / (e + 2.0))
        return (1.0 + 2.0 * mean) / (1.0 - mean)


def lorentz_lorenz(materials: Sequence[Material], fractions: ArrayLike, *, label: str | None = None) -> Material:
    """Return the Lorentz-Lorenz mixture of two or more materials.

    A film of packing density p is `lorentz_lorenz([solid, constant(1.0)], [p, 1 - p])`; with water in
    the pores the second material is water.

    Parameters
    ----------
    materials : sequence of Material
        The constituents.
    fractions : array_like of float
        Volume fractions of sum 1. [1]
    label : str, optional
        Name for people.

    Returns
    -------
    Material

    Raises
    ------
    ArgumentError
        If fractions are negative or do not sum to 1, or the ranges do not overlap.

    Notes
    -----
    H. A. Lorentz, Ann. Phys. 245, 641 (1880); L. Lorenz, Ann. Phys. 247, 70 (1880).

    Examples
    --------
    >>> from filmstack.materials.models.constant import constant
    >>> complex(lorentz_lorenz([constant(1.46), constant(1.0)], [0.9, 0.1]).index(550.0)).real.__round__(5)
    1.40763
    """
    return LorentzLorenz(materials, checked_fractions(materials, fractions), "Lorentz-Lorenz", label)
