"""What the mixing rules share: constituents, fractions, and permittivities of the textbooks' sign."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from filmstack.errors import ArgumentError
from filmstack.materials.material import Material, Provenance
from filmstack.materials.models.formula import checked_numbers, from_permittivity
from filmstack.wave.series import Number, Series, conjugate

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray


class Mixture(Material):
    """An effective medium of several materials.

    Parameters
    ----------
    materials : sequence of Material
        The constituents.
    fractions : ndarray, shape (constituent,)
        Volume fractions, of sum 1. [1]
    rule : str
        Name of the mixing rule, for the label.
    """

    def __init__(self, materials: Sequence[Material], fractions: FloatArray, rule: str, label: str | None) -> None:
        text = " + ".join(f"{f:.4g} {m.label}" for f, m in zip(fractions.tolist(), materials, strict=True))
        low = max(material.range_nm[0] for material in materials)
        high = min(material.range_nm[1] for material in materials)
        if not low < high:
            raise ArgumentError(f"materials: expected overlapping wavelength ranges, got none in common: {text}")
        made = Provenance(
            key=f"{rule}({text})",
            label=label or f"{rule} mixture of {text}",
            source="; ".join(material.provenance.source or material.label for material in materials),
            form="mixture",
            range_nm=(low, high),
        )
        super().__init__(made)
        self.materials, self.fractions = tuple(materials), fractions

    @property
    def derivative_order(self) -> int:
        """Highest derivative that all constituents support."""
        return min(material.derivative_order for material in self.materials)

    @abstractmethod
    def mixed(self, permittivities: list[Number]) -> Number:
        """Return the permittivity of the mixture, Im >= 0 absorbing."""

    def _thermal_change(self, wavelength_nm: FloatArray, temperature_c: float | None) -> float:
        """Return 0: the constituents know their own."""
        return 0.0

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        n = [np.conj(material.index(wavelength_nm, temperature_c)) for material in self.materials]
        return np.asarray(from_permittivity(self.mixed([x * x for x in n])))

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        rows: list[Number] = []
        factorial = np.cumprod(np.concatenate([[1.0], np.arange(1.0, order + 1)]))
        for material in self.materials:
            c = material.index_derivatives(wavelength_nm, order, temperature_c)
            n = conjugate(Series(c / factorial.reshape(-1, *([1] * wavelength_nm.ndim))))
            rows.append(n * n)
        mixed: Series = from_permittivity(self.mixed(rows))
        return mixed.derivatives()


def checked_fractions(materials: Sequence[Material], fractions: ArrayLike) -> FloatArray:
    """Return volume fractions that are at least 0 and sum to 1."""
    if len(materials) < 2:
        raise ArgumentError(f"materials: expected at least two, got {len(materials)}")
    for material in materials:
        if not isinstance(material, Material):
            raise ArgumentError(f"materials: expected Materials, got {material!r}")
    values = checked_numbers("fractions", fractions)
    if len(values) != len(materials):
        raise ArgumentError(f"fractions: expected {len(materials)}, one a material, got {len(values)}")
    if np.any(values < 0.0) or abs(float(values.sum()) - 1.0) > 1e-9:
        raise ArgumentError(f"fractions: expected numbers >= 0 of sum 1, got {values.tolist()} of sum {values.sum():g}")
    return np.asarray(values / values.sum())
