"""Oscillators broadened by a Gaussian distribution of resonances, with Drude electrons."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import Formula, checked_numbers, from_permittivity, given_or, same_length
from filmstack.wave.series import Number, faddeeva, sqrt

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray

_ROOT_2, _ROOT_PI = 2.0**0.5, 3.141592653589793**0.5


class BrendelBormann(Formula):
    """eps = 1 - f0 wp^2 / (E (E + i g0)) + sum chi, chi by the Faddeeva function."""

    def __init__(
        self, wp_ev: float, f0: float, g0_ev: float, terms: tuple[FloatArray, ...], provenance: Provenance
    ) -> None:
        super().__init__(provenance)
        self.wp_ev, self.f0, self.g0_ev, self.terms = wp_ev, f0, g0_ev, terms

    def published(self, energy_ev: Number) -> Number:
        """Return N."""
        square = self.wp_ev**2
        permittivity = 1.0 - self.f0 * square / (energy_ev * (energy_ev + 1j * self.g0_ev))
        for f, w, g, s in zip(*(x.tolist() for x in self.terms), strict=True):
            a = sqrt(energy_ev * energy_ev + 1j * g * energy_ev)
            shape = faddeeva((a - w) / (_ROOT_2 * s)) + faddeeva((a + w) / (_ROOT_2 * s))
            permittivity = permittivity + (1j * _ROOT_PI * f * square / (2.0 * _ROOT_2 * s)) * shape / a
        return from_permittivity(permittivity)


def brendel_bormann(
    wp_ev: float,
    f0: float,
    g0_ev: float,
    f: ArrayLike,
    w_ev: ArrayLike,
    g_ev: ArrayLike,
    s_ev: ArrayLike,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return a metal or glass of Gaussian-broadened oscillators.

    Parameters
    ----------
    wp_ev : float
        Plasma energy. [eV]
    f0, g0_ev : float
        Strength and damping of the free electrons. [1], [eV]
    f, w_ev, g_ev, s_ev : array_like of float
        Strength, resonance energy, width and standard deviation of the resonance of each oscillator.
        [1], [eV], [eV], [eV]
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
    R. Brendel, D. Bormann, J. Appl. Phys. 71, 1 (1992); parameters of metals in A. D. Rakic and others, Appl.
    Opt. 37, 5271 (1998).
    """
    terms = tuple(
        checked_numbers(n, v, positive=n == "s_ev")
        for n, v in (("f", f), ("w_ev", w_ev), ("g_ev", g_ev), ("s_ev", s_ev))
    )
    same_length(f=terms[0], w_ev=terms[1], g_ev=terms[2], s_ev=terms[3])
    (wp,), (f_free,), (g_free,) = (
        checked_numbers(n, v).tolist() for n, v in (("wp_ev", wp_ev), ("f0", f0), ("g0_ev", g0_ev))
    )
    return BrendelBormann(wp, f_free, g_free, terms, given_or(provenance, "Brendel-Bormann", label, range_nm))
