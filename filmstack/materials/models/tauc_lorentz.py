"""Tauc-Lorentz oscillators of amorphous films, the real part in closed form."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import Formula, checked_numbers, from_permittivity, given_or, same_length
from filmstack.wave.series import Number, log, log_size, real, value, where

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import FloatArray


def _oscillator(a: float, e0: float, c: float, eg: float, energy_ev: Number) -> Number:
    """Return the complex permittivity of one oscillator without its constant.

    The real part is the Kramers-Kronig integral by partial fractions over the four poles p of
    (x^2 - E0^2)^2 + C^2 x^2 and the two at +-E, each with log(Eg - p).
    """
    square = energy_ev * energy_ev
    quartic = (square - e0 * e0) ** 2 + c * c * square
    root = np.sqrt(complex(4.0 * e0 * e0 - c * c))
    poles = [0.5 * (sign * root + 1j * side * c) for sign in (1.0, -1.0) for side in (1.0, -1.0)]
    total = 0.0 * energy_ev
    for p in poles:
        slope = 4.0 * p * (p * p - e0 * e0) + 2.0 * c * c * p
        total = total + real((p - eg) ** 2 / slope * np.log(eg - p) / (p * p - square))
    # The poles at +-E; at E = Eg the first one drops out with (E - Eg)^2.
    at_gap = np.real(value(energy_ev)) == eg
    shift = where(at_gap, 1.0, energy_ev - eg)
    near = where(at_gap, 0.0 * energy_ev, shift * shift * log_size(shift))
    far = (energy_ev + eg) ** 2 * log(energy_ev + eg)
    total = total + (near - far) / (2.0 * energy_ev * quartic)
    absorbing = np.real(value(energy_ev)) > eg
    imaginary = where(absorbing, a * e0 * c * (energy_ev - eg) ** 2 / (quartic * energy_ev), 0.0 * energy_ev)
    return real(-2.0 * a * e0 * c / np.pi * total) + 1j * real(imaginary)


class TaucLorentz(Formula):
    """eps_2 = A E0 C (E - Eg)^2 / (((E^2 - E0^2)^2 + C^2 E^2) E) above Eg, eps_1 by Kramers-Kronig."""

    def __init__(self, terms: tuple[FloatArray, ...], eps_inf: float, provenance: Provenance) -> None:
        super().__init__(provenance)
        self.terms, self.eps_inf = terms, eps_inf

    def published(self, energy_ev: Number) -> Number:
        """Return N."""
        permittivity = self.eps_inf + 0.0 * energy_ev
        for a, e0, c, eg in zip(*(x.tolist() for x in self.terms), strict=True):
            permittivity = permittivity + _oscillator(a, e0, c, eg, energy_ev)
        return from_permittivity(permittivity)


def tauc_lorentz(
    A_ev: ArrayLike,
    E0_ev: ArrayLike,
    C_ev: ArrayLike,
    Eg_ev: ArrayLike,
    eps_inf: float = 1.0,
    *,
    label: str | None = None,
    range_nm: Sequence[float] | None = None,
    provenance: Provenance | None = None,
) -> Material:
    """Return an amorphous medium of Tauc-Lorentz oscillators.

    Parameters
    ----------
    A_ev, E0_ev, C_ev, Eg_ev : array_like of float
        Strength, peak energy, broadening and gap of each oscillator. [eV]
    eps_inf : float
        Permittivity far above. [1]
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
    G. E. Jellison, F. A. Modine, Appl. Phys. Lett. 69, 371 (1996), erratum 69, 2137. The real part is written
    with complex poles, which also covers C > 2 E0; C = 2 E0 exactly is refused.

    Examples
    --------
    Amorphous silicon of that paper:

    >>> complex(tauc_lorentz(122.0, 3.45, 2.54, 1.2, 1.15).index(550.0).round(3))
    (4.373-0.76j)
    """
    from filmstack.errors import ArgumentError

    named = (("A_ev", A_ev), ("E0_ev", E0_ev), ("C_ev", C_ev), ("Eg_ev", Eg_ev))
    terms = tuple(checked_numbers(n, v, positive=n in ("E0_ev", "C_ev")) for n, v in named)
    same_length(A_ev=terms[0], E0_ev=terms[1], C_ev=terms[2], Eg_ev=terms[3])
    if np.any(terms[2] == 2.0 * terms[1]):
        raise ArgumentError("C_ev: expected a broadening other than 2 E0, where two poles meet")
    (eps,) = checked_numbers("eps_inf", eps_inf).tolist()
    return TaucLorentz(terms, eps, given_or(provenance, "Tauc-Lorentz", label, range_nm))
