"""Tabulated media: rows of wavelength, n and k -> here -> `filmstack.materials.library`.

The shipped tables carry their description in a header of `# key: value` lines; their splines are
fitted beforehand (`fit_tables`) and kept with the hash of the table, so that no table is read with
the spline of another. N = n - ik; the files print k as a positive number.
"""

from __future__ import annotations

import hashlib
from functools import cache, cached_property, partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from filmstack.constants import PLANCK_EV_NM
from filmstack.errors import ArgumentError
from filmstack.materials.interpolation import (
    Curve,
    MonotoneCurve,
    SplineCurve,
    derivative_deviation,
    fit_curve,
    monotone_curve,
)
from filmstack.materials.material import Material, Provenance
from filmstack.materials.shipped import shipped_folder

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray

CURVES = "curves.npz"
"""File of fitted splines beside the shipped tables."""


class Table(Material):
    """A medium given by rows of wavelength, n and k.

    Parameters
    ----------
    provenance : Provenance
        Source and the rest.
    wavelength_nm, n, k : ndarray of float, shape (rows,)
        Rows, wavelength increasing [nm], N = n - ik [1].
    tolerance : ndarray of float, shape (rows,)
        Half a unit of the last printed digit of n. [1]
    n_curve : Curve, optional
        n over photon energy, if fitted before.
    deviation : callable, optional
        Returns what `derivative_deviation` found for that curve.
    allow_gain : bool
        k < 0 was permitted.
    """

    def __init__(
        self,
        provenance: Provenance,
        wavelength_nm: FloatArray,
        n: FloatArray,
        k: FloatArray,
        tolerance: FloatArray,
        *,
        n_curve: Curve | None = None,
        deviation: Callable[[], FloatArray] | None = None,
        allow_gain: bool = False,
    ) -> None:
        super().__init__(provenance, allow_gain=allow_gain)
        self.reading_report = ""
        """How a person's own file was understood, in words; also the first note of its provenance."""
        self.wavelength_nm, self.n, self.k, self.tolerance = wavelength_nm, n, k, tolerance
        self.energy_ev = PLANCK_EV_NM / wavelength_nm[::-1]
        self._deviation = deviation
        self.n_curve = n_curve or fit_curve(self.energy_ev, n[::-1], tolerance[::-1], quick=True)
        self.k_curve: MonotoneCurve = monotone_curve(self.energy_ev, k[::-1])

    @property
    def derivative_order(self) -> int:
        """Highest derivative by photon energy that is continuous in n; those of k are piecewise from the second on."""
        return self.n_curve.derivative_order

    def derivative_uncertainty(self, order: int, wavelength_nm: ArrayLike | None = None) -> FloatArray:
        """Return how far the rounding of the printed digits moves a derivative of n.

        Parameters
        ----------
        order : int
            Order of the derivative by photon energy, 0 to `derivative_order`.
        wavelength_nm : array_like of float, optional
            Vacuum wavelengths; those of the rows if not given. [nm]

        Returns
        -------
        ndarray of float, shape of `wavelength_nm`
            Standard deviation, that of the rows or between them. [1/eV^order]

        Raises
        ------
        ArgumentError
            If `order` is not supported by the data.
        """
        if not 0 <= order <= self.derivative_order:
            raise ArgumentError(f"order: {self.label}: expected 0 to {self.derivative_order}, got {order}")
        at = self._checked(self.wavelength_nm if wavelength_nm is None else wavelength_nm)
        return np.asarray(np.exp(np.interp(PLANCK_EV_NM / at, self.energy_ev, np.log(self.deviation[order]))))

    @cached_property
    def deviation(self) -> FloatArray:
        """Standard deviations of n and its derivatives, shape (order, row), by rising photon energy. [1/eV^order]"""
        if self._deviation is not None:
            return self._deviation()
        return derivative_deviation(self.n_curve, self.energy_ev, self.tolerance[::-1])

    def _index(self, wavelength_nm: FloatArray, temperature_c: float | None) -> ComplexArray:
        return self._index_derivatives(wavelength_nm, 0, temperature_c)[0]

    def _index_derivatives(self, wavelength_nm: FloatArray, order: int, temperature_c: float | None) -> ComplexArray:
        energy = np.clip(PLANCK_EV_NM / wavelength_nm, self.energy_ev[0], self.energy_ev[-1])
        rows = np.empty((order + 1, *energy.shape), dtype=complex)
        for j in range(order + 1):
            rows[j].real = self.n_curve.derivative(energy, j)
            rows[j].imag = 0.0 - self.k_curve.derivative(energy, j)
        return rows


def read_header(path: Path) -> dict[str, str]:
    """Return the `# key: value` lines at the head of a shipped table."""
    head: dict[str, str] = {}
    with path.open(encoding="utf-8") as file:
        for line in file:
            if not line.startswith("#"):
                break
            key, _, value = line[1:].partition(":")
            head[key.strip()] = value.strip()
    return head


def table_path(key: str) -> Path:
    """Return the file of a shipped table, which is named after its key."""
    return shipped_folder("materials") / f"{key.replace('/', '_')}.csv"


_MAKING = ("thinned ", "linear interpolation ", "formula sampled ", "source covers ", "cut here")
"""How a note begins that tells the making of a table; it belongs to the status, not to the warnings."""


def table_provenance(head: Mapping[str, str]) -> Provenance:
    """Return where the numbers of a shipped table come from."""
    ends = np.array(head["range_nm"].split(" to "), dtype=float)
    low, high = in_vacuum(head, ends)[0].tolist()
    notes = [note for note in head["notes"].split("; ") if note]
    making = [note for note in notes if note.startswith(_MAKING) or note.endswith("dropped")]
    medium = [f"index {head['index_of']}"] if "index_of" in head else []
    return Provenance(
        key=head["key"],
        label=head["label"],
        source=head["source"],
        form=head["form"],
        range_nm=(low, high),
        temperature=head["temperature"],
        status="; ".join([head["status"], *medium, *making]),
        notes=tuple(note for note in notes if note not in making),
    )


def in_vacuum(head: Mapping[str, str], wavelength_nm: FloatArray) -> tuple[FloatArray, FloatArray | float]:
    """Return vacuum wavelengths of a table's rows, and the index of the air in which they were measured.

    Parameters
    ----------
    head : mapping
        Header of the table; where its `index_of` is "relative to air", its wavelengths are those in air.
    wavelength_nm : ndarray of float
        Wavelengths as printed. [nm]

    Returns
    -------
    wavelength_nm : ndarray of float
        Vacuum wavelengths. [nm]
    air : ndarray of float or 1.0
        What the printed n and k are to be multiplied by. [1]
    """
    if head.get("index_of") != "relative to air":
        return wavelength_nm, 1.0
    from filmstack.materials.models.formula import standard_air

    air: FloatArray = np.ones(len(wavelength_nm))
    for _ in range(3):  # the index of air changes by 1e-9 between its own and the vacuum wavelength
        air = np.asarray(standard_air(PLANCK_EV_NM / (wavelength_nm * air)), dtype=float)
    return wavelength_nm * air, air


def shipped_table(key: str, *, fitted: bool = True) -> Table:
    """Return a shipped table as a material.

    Parameters
    ----------
    key : str
        Key of the table, such as `SiO2/ion-assisted-2013`.
    fitted : bool
        Use the spline fitted beforehand; else fit it now.

    Returns
    -------
    Table
    """
    path = table_path(key)
    text = path.read_text(encoding="utf-8")
    lines = [line for line in text.splitlines() if line and not line.startswith("#")][1:]
    cells = [line.split(",") for line in lines]
    head = read_header(path)
    printed, n, k = np.array(cells, dtype=float).T
    wavelength, air = in_vacuum(head, printed)
    n, k = n * air, k * air
    tolerance = printed_tolerance([row[1] for row in cells])
    curve = _fitted_curve(path.stem, text, wavelength, n) if fitted else None
    deviation = None if curve is None else partial(_fitted_deviation, path.stem)
    if not fitted:
        curve = fit_curve(PLANCK_EV_NM / wavelength[::-1], n[::-1], tolerance[::-1])
    return Table(table_provenance(head), wavelength, n, k, tolerance, n_curve=curve, deviation=deviation)


def printed_tolerance(cells: list[str]) -> FloatArray:
    """Return half a unit of the last digit of printed numbers.

    Parameters
    ----------
    cells : list of str
        Numbers as printed, decimal point. Trailing zeros may have been dropped, so that a number counts
        as printed with as many decimals as the longest of the five before and behind it, and two at least.

    Returns
    -------
    ndarray of float, shape (cells,)

    Examples
    --------
    >>> printed_tolerance(["1.46", "1.4585", "1.457"])
    array([5.e-05, 5.e-05, 5.e-05])
    """
    decimals = np.array([_decimals(cell) for cell in cells])
    padded = np.pad(decimals, 5, constant_values=-99)
    longest = np.max(np.lib.stride_tricks.sliding_window_view(padded, 11), axis=1)
    return np.asarray(0.5 * 10.0 ** -np.maximum(longest, 2).astype(float))


def _decimals(cell: str) -> int:
    mantissa, _, exponent = cell.lower().partition("e")
    return len(mantissa.partition(".")[2]) - int(exponent or 0)


def text_hash(text: str) -> str:
    """Return the hash of a table's text, the same for any line ends."""
    return hashlib.sha256("\n".join(text.splitlines()).encode()).hexdigest()


@cache
def _curves() -> Mapping[str, FloatArray]:
    path = shipped_folder("materials") / CURVES
    return np.load(path, allow_pickle=False) if path.is_file() else {}


def _fitted_curve(stem: str, text: str, wavelength_nm: FloatArray, n: FloatArray) -> Curve | None:
    """Return the spline fitted beforehand, if it belongs to this text."""
    curves = _curves()
    if f"{stem}.hash" not in curves or str(curves[f"{stem}.hash"]) != text_hash(text):
        return None
    if f"{stem}.knots" not in curves:  # no spline keeps the shape of its rows
        return monotone_curve(PLANCK_EV_NM / wavelength_nm[::-1], n[::-1])
    return SplineCurve(curves[f"{stem}.knots"], curves[f"{stem}.coefficients"])


def _fitted_deviation(stem: str) -> FloatArray:
    return np.asarray(10.0 ** _curves()[f"{stem}.deviation"].astype(float))
