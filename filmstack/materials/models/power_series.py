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
    """A + sum D L^q, L the wavelength in um, which is n^2, or n itself if not `squared`."""

    def __init__(
        self, a: float, terms: tuple[FloatArray, FloatArray], provenance: Provenance, *, squared: bool, to_air: bool
    ) -> None:
        super().__init__(provenance, relative_to_air=to_air)
        self.a, self.terms, self.squared = a, terms, squared

    def published(self, energy_ev: Number) -> Number:
        """Return n."""
        length = wavelength_um(energy_ev)
        total = self.a + 0.0 * length
        for d, q in zip(*(x.tolist() for x in self.terms), strict=True):
            total = total + d * length**q
        return from_square(total) if self.squared else total


def checked_terms(A: float, D: ArrayLike, q: ArrayLike) -> tuple[float, tuple[FloatArray, FloatArray]]:
    """Return the checked coefficients of a power series."""
    terms = checked_numbers("D", D), checked_numbers("q", q)
    same_length(D=terms[0], q=terms[1])
    (a,) = checked_numbers("A", A).tolist()
    return a, terms


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
    a, terms = checked_terms(A, D, q)
    made = given_or(provenance, "power series of n^2", label, range_nm)
    return PowerSeries(a, terms, made, squared=True, to_air=relative_to_air)
