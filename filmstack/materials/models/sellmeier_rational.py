"""Sellmeier terms with any numerator, and powers: n^2 = A + sum B L^p / (L^2 - C) + sum D L^q."""

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


class SellmeierRational(Formula):
    """n^2 = A + sum B L^p / (L^2 - C) + sum D L^q, L the wavelength in um."""

    def __init__(
        self,
        a: float,
        poles: tuple[FloatArray, ...],
        powers: tuple[FloatArray, ...],
        provenance: Provenance,
        *,
        relative_to_air: bool,
    ) -> None:
        super().__init__(provenance, relative_to_air=relative_to_air)
        self.a, self.poles, self.powers = a, poles, powers

    def published(self, energy_ev: Number) -> Number:
        """Return n."""
        length = wavelength_um(energy_ev)
        n_square = self.a + 0.0 * length
        for b, c, p in zip(*(x.tolist() for x in self.poles), strict=True):
            n_square = n_square + b * length**p / (length**2 - c)
        for d, q in zip(*(x.tolist() for x in self.powers), strict=True):
            n_square = n_square + d * length**q
        return from_square(n_square)


def sellmeier_rational(
    A: float,
    B: ArrayLike = (),
    C_um2: ArrayLike = (),
    p: ArrayLike | None = None,
    D: ArrayLike = (),
    q: ArrayLike = (),
    *,
    relative_to_air: bool = False,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a medium with poles and powers of the wavelength in n^2.

    Parameters
    ----------
    A : float
        Constant term. [1]
    B, C_um2, p : array_like of float
        Strength, squared resonance wavelength and exponent of L in the numerator of each pole; p is 0
        if not given. [um^(2-p)], [um^2], [1]
    D, q : array_like of float
        Factor and exponent of each power. [um^-q], [1]
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

    Examples
    --------
    >>> sellmeier_rational(5.913, B=[0.2441], C_um2=[0.0803]).index(632.8).real.round(4).item()
    2.5837
    """
    b, c, d, e = (checked_numbers(n, v) for n, v in (("B", B), ("C_um2", C_um2), ("D", D), ("q", q)))
    exponents = 0.0 * b if p is None else checked_numbers("p", p)
    same_length(B=b, C_um2=c, p=exponents)
    same_length(D=d, q=e)
    (a,) = checked_numbers("A", A).tolist()
    made = given_or(provenance, "Sellmeier terms and powers", label, range_nm)
    return SellmeierRational(a, (b, c, exponents), (d, e), made, relative_to_air=relative_to_air)
