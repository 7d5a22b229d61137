"""Sellmeier formula: n^2 = A + sum B L^2 / (L^2 - C)."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import (
    Formula,
    checked_numbers,
    from_square,
    given_or,
    same_length,
    wavelength_um,
)
from filmstack.wave.series import Number

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


class Sellmeier(Formula):
    """n^2 = A + sum B L^2 / (L^2 - C), L the wavelength in um."""

    def __init__(
        self, b: FloatArray, c_um2: FloatArray, a: float, provenance: Provenance, *, relative_to_air: bool
    ) -> None:
        super().__init__(provenance, relative_to_air=relative_to_air)
        self.b, self.c_um2, self.a = b, c_um2, a

    def published(self, energy_ev: Number) -> Number:
        """Return n."""
        square = wavelength_um(energy_ev) ** 2
        n_square = self.a + 0.0 * square
        for b, c in zip(self.b.tolist(), self.c_um2.tolist(), strict=True):
            n_square = n_square + b * square / (square - c)
        return from_square(n_square)


def sellmeier(
    B: ArrayLike,
    C_um2: ArrayLike | None = None,
    A: float = 1.0,
    *,
    L_um: ArrayLike | None = None,
    relative_to_air: bool = False,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a medium after Sellmeier.

    Parameters
    ----------
    B : array_like of float
        Strengths. [1]
    C_um2 : array_like of float
        Squared resonance wavelengths. [um^2]
    A : float
        Constant term. [1]
    L_um : array_like of float, optional
        Resonance wavelengths, in place of `C_um2`. [um]
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
    W. Sellmeier, Ann. Phys. 223, 386 (1872).

    Examples
    --------
    Fused silica after I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965):

    >>> b, l = [0.6961663, 0.4079426, 0.8974794], [0.0684043, 0.1162414, 9.896161]
    >>> sellmeier(b, L_um=l).index(587.562).real.round(5).item()
    1.45846
    """
    from filmstack.errors import ArgumentError

    if (C_um2 is None) == (L_um is None):
        raise ArgumentError("sellmeier: expected either C_um2 or L_um, got both or neither")
    b = checked_numbers("B", B)
    c = (
        checked_numbers("L_um", L_um) ** 2
        if L_um is not None
        else checked_numbers("C_um2", () if C_um2 is None else C_um2)
    )
    same_length(B=b, C=c)
    (a,) = checked_numbers("A", A).tolist()
    return Sellmeier(b, c, a, given_or(provenance, "Sellmeier", label, range_nm), relative_to_air=relative_to_air)
