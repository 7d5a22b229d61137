"""Dispersion of a gas: n = 1 + A + sum B / (C - 1/L^2)."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import MICRON_EV, Formula, checked_numbers, given_or, same_length
from filmstack.wave.series import Number

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


class Gas(Formula):
    """n = 1 + A + sum B / (C - 1/L^2), L the wavelength in um."""

    def __init__(self, a: float, b: FloatArray, c: FloatArray, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.a, self.b, self.c = a, b, c

    def published(self, energy_ev: Number) -> Number:
        """Return n."""
        s = (energy_ev / MICRON_EV) ** 2
        n = 1.0 + self.a + 0.0 * s
        for b, c in zip(self.b.tolist(), self.c.tolist(), strict=True):
            n = n + b / (c - s)
        return n


def gas(
    B: ArrayLike,
    C_per_um2: ArrayLike,
    A: float = 0.0,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a gas.

    Parameters
    ----------
    B, C_per_um2 : array_like of float
        Strengths and squared resonance wavenumbers. [1/um^2]
    A : float
        Constant refractivity. [1]
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
    Dry air after P. E. Ciddor, Appl. Opt. 35, 1566 (1996):

    >>> gas([0.05792105, 0.00167917], [238.0185, 57.362]).index(633.0).real.round(8).item()
    1.00027653
    """
    b, c = checked_numbers("B", B), checked_numbers("C_per_um2", C_per_um2)
    same_length(B=b, C_per_um2=c)
    (a,) = checked_numbers("A", A).tolist()
    return Gas(a, b, c, given_or(provenance, "gas", label, range_nm))
