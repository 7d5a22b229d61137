"""Power series of n^2: n^2 = A + sum D L^q."""

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


class PowerSeries(Formula):
    """n^2 = A + sum D L^q, L the wavelength in um."""

    def __init__(
        self, a: float, d: FloatArray, q: FloatArray, provenance: Provenance, *, relative_to_air: bool
    ) -> None:
        super().__init__(provenance, relative_to_air=relative_to_air)
        self.a, self.d, self.q = a, d, q

    def published(self, energy_ev: Number) -> Number:
        """Return n."""
        length = wavelength_um(energy_ev)
        n = self.a + 0.0 * length
        for d, q in zip(self.d.tolist(), self.q.tolist(), strict=True):
            n = n + d * length**q
        return from_square(n)


def power_series(
    A: float,
    D: ArrayLike = (),
    q: ArrayLike = (),
    *,
    relative_to_air: bool = False,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a medium with n^2 = A + sum D L^q.

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
    Common form of glass catalogues (q = 2, -2, -4, -6, -8).

    Examples
    --------
    >>> power_series(2.25, [0.01], [-2]).index(1000.0).real.round(4).item()
    1.5033
    """
    d, e = checked_numbers("D", D), checked_numbers("q", q)
    same_length(D=d, q=e)
    (a,) = checked_numbers("A", A).tolist()
    made = given_or(provenance, "Power series of n^2", label, range_nm)
    return PowerSeries(a, d, e, made, relative_to_air=relative_to_air)
