"""Cauchy formula: n = A + sum D L^q."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import Formula, checked_numbers, given_or, same_length, wavelength_um
from filmstack.wave.series import Number

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


class Cauchy(Formula):
    """n = A + sum D L^q, L the wavelength in um."""

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
        return n


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
    d, e = checked_numbers("D", D), checked_numbers("q", q)
    same_length(D=d, q=e)
    (a,) = checked_numbers("A", A).tolist()
    made = given_or(provenance, "Cauchy formula", label, range_nm)
    return Cauchy(a, d, e, made, relative_to_air=relative_to_air)
