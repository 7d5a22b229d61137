"""A medium whose index is the same at every wavelength."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from filmstack.errors import ArgumentError
from filmstack.materials.material import Material, Provenance

if TYPE_CHECKING:
    from filmstack.arraytypes import ComplexArray, FloatArray


LARGEST, SMALLEST = 1e9, 1e-30
"""Indices beyond these are no medium; their fourth powers would leave the range of doubles."""


class Constant(Material):
    """N = n - ik at all wavelengths and temperatures."""

    def __init__(self, n: float, k: float, provenance: Provenance, *, allow_gain: bool = False) -> None:
        super().__init__(provenance, allow_gain=allow_gain)
        self.n, self.k = n, k

    def _thermal_change(self, wavelength_nm: FloatArray, temperature_c: float | None) -> float:
        """Return 0: a constant has no temperature."""
        return 0.0

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        return np.full(wavelength_nm.shape, complex(self.n, 0.0 - self.k))

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        rows = np.zeros((order + 1, *wavelength_nm.shape), dtype=complex)
        rows[0] = complex(self.n, 0.0 - self.k)
        return rows


def constant(n: float, k: float = 0.0, allow_gain: bool = False) -> Material:
    """Return a medium of constant index.

    Parameters
    ----------
    n, k : float
        Refractive index and extinction coefficient, N = n - ik; k >= 0 absorbs. [1]
    allow_gain : bool
        Permit k < 0, a medium that amplifies.

    Returns
    -------
    Material

    Raises
    ------
    ArgumentError
        If n or k is not finite, n is negative, or k is negative without `allow_gain`.

    Examples
    --------
    >>> complex(constant(1.5).index(550.0))
    (1.5+0j)
    """
    for name, given in (("n", n), ("k", k)):
        if isinstance(given, str | bool | complex):
            raise ArgumentError(f"{name}: expected a real number, got {given!r}. N = n - ik is given as n and k")
    n, k = float(n), float(k)
    if not (np.isfinite(n) and n >= 0.0):
        raise ArgumentError(f"n: expected a finite index >= 0, got {n:g}")
    if max(n, abs(k)) > LARGEST or 0.0 < max(n, abs(k)) < SMALLEST:
        raise ArgumentError(f"n, k: expected 0 or numbers from {SMALLEST:g} to {LARGEST:g}, got n = {n:g}, k = {k:g}")
    if not np.isfinite(k) or (k < 0.0 and not allow_gain):
        raise ArgumentError(
            f"k: expected a finite extinction coefficient >= 0, got {k:g}. Pass allow_gain=True for a medium with gain"
        )
    text = f"{n:g}" if k == 0.0 else f"{n:g} - {k:g}i" if k > 0.0 else f"{n:g} + {-k:g}i"
    return Constant(n, k, Provenance(key=f"constant {text}", label=f"constant index {text}"), allow_gain=allow_gain)
