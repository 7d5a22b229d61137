"""Bruggeman's symmetric effective medium: sum f (eps_i - eps) / (eps_i + 2 eps) = 0."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from filmstack.materials.material import Material
from filmstack.materials.models.mixture import Mixture, checked_fractions
from filmstack.wave.series import Number, Series, value

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray

_STEPS = 200


class Bruggeman(Mixture):
    """Grains of all constituents on the same footing."""

    def mixed(self, permittivities: list[Number]) -> Number:
        """Return the root in the half plane of the constituents, then its derivatives by Newton steps."""
        eps: Number = self._root([np.asarray(value(e)) for e in permittivities])
        if not isinstance(permittivities[0], Series):
            return eps
        eps = permittivities[0]._like(eps)
        for _ in range(len(eps.c).bit_length() + 1):
            eps = eps - self._step(permittivities, eps)
        return eps

    def _step(self, permittivities: list[Number], eps: Number) -> Number:
        """Return f / f' of the mixing equation."""
        f: Number = 0.0
        slope: Number = 0.0
        for share, e in zip(self.fractions.tolist(), permittivities, strict=True):
            below = e + 2.0 * eps
            f = f + share * (e - eps) / below
            slope = slope - 3.0 * share * e / (below * below)
        return f / slope

    def _root(self, permittivities: list[ComplexArray]) -> ComplexArray:
        """Return the physical root: it lies in the upper half plane, in the cone of the constituents.

        The equation as a polynomial has one root per constituent; the physical one is the only
        one with a passive continuation, and for lossless constituents the only positive one.
        """
        e = np.stack(np.broadcast_arrays(*permittivities)).astype(complex)
        out = np.empty(e.shape[1:], dtype=complex)
        for place in np.ndindex(out.shape):
            out[place] = self._root_of(e[(slice(None), *place)])
        return out

    def _root_of(self, e: ComplexArray) -> complex:
        total = np.zeros(len(e) + 1, dtype=complex)
        for i, (share, own) in enumerate(zip(self.fractions, e, strict=True)):
            product = np.array([-1.0, own]) * share
            for j, other in enumerate(e):
                if j != i:
                    product = np.convolve(product, [2.0, other])
            total = total + product
        roots = np.roots(total)
        size = np.max(np.abs(e))
        passive = roots[roots.imag >= -1e-12 * size]
        # In the cone spanned by the constituents the argument lies between theirs.
        angles = np.angle(e)
        centre = 0.5 * (angles.min() + angles.max())
        best = passive[np.argmin(np.abs(np.angle(passive) - centre))]
        for _ in range(3):
            best = best - self._step(list(e), best)
        return complex(best.real, max(best.imag, 0.0) if np.all(e.imag >= 0.0) else best.imag)


def bruggeman(materials: Sequence[Material], fractions: ArrayLike, *, label: str | None = None) -> Material:
    """Return Bruggeman's effective medium of two or more materials.

    Parameters
    ----------
    materials : sequence of Material
        The constituents; voids are `constant(1.0)`.
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
    D. A. G. Bruggeman, Ann. Phys. 416, 636 (1935).

    Examples
    --------
    Equal parts of permittivity 1 and 4: the positive root of 4 eps^2 - 5 eps - 8 = 0, (5 + sqrt(153)) / 8:

    >>> from filmstack.materials.models.constant import constant
    >>> complex(bruggeman([constant(1.0), constant(2.0)], [0.5, 0.5]).index(550.0) ** 2).real.__round__(6)
    2.171165
    """
    return Bruggeman(materials, checked_fractions(materials, fractions), "Bruggeman", label)
