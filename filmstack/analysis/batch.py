"""Spectra of many samples of one stack: `variation` -> here -> `tolerancing`.

A sample differs from the nominal stack by thickness, index or angle; what is not given is nominal.
Only the quantities asked for are stored.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from filmstack.analysis.points import Request, incident_note, request
from filmstack.analysis.solution import Solution, log10_of_mean, solve, total
from filmstack.errors import ArgumentError, CoherenceError
from filmstack.materials.material import Material

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray
    from filmstack.stack import Stack

LARGEST_RESULT_BYTES = 1_000_000_000
"""A larger result is refused: `batch_blocks` gives it in pieces."""
PIECE_CELLS = 2_000_000
"""Samples x points computed at a time, so that scratch stays small beside the result."""

_AMPLITUDES = ("r", "t")
_PARTS = {
    "R": (("R_s", False), ("R_p", True)),
    "T": (("T_s", False), ("T_p", True)),
    "A": (("A_s", False), ("A_p", True)),
    "r": (("r_s", False), ("r_p", True)),
    "t": (("t_s", False), ("t_p", True)),
    "log10_T": (("log10_T_s", False), ("log10_T_p", True)),
    "one_minus_R": (("one_minus_R_s", False), ("one_minus_R_p", True)),
    "A_layers": (("A_layers_s", False), ("A_layers_p", True)),
}


@dataclass(frozen=True, eq=False)
class BatchSpectrum:
    """Spectra of many samples, shape (sample, angle, wavelength); A_layers has a first axis of layers.

    R_s, R_p, T_s ... hold what was asked for; names without _s and _p are means of the two.

    Parameters
    ----------
    wavelength_nm, angle_deg : ndarray, shapes (wavelength,) and (angle,)
        Axes; the nominal angles. [nm], [deg]
    first_sample : int
        Number of the first sample in the whole request.
    values : dict of str to ndarray
        The arrays by name.
    notes : tuple of str
        Assumptions made on the way.
    """

    wavelength_nm: FloatArray
    angle_deg: FloatArray
    first_sample: int
    values: Mapping[str, Any]
    notes: tuple[str, ...]

    def __getattr__(self, name: str) -> Any:  # noqa: ANN401 - real or complex array
        """Return an array by name, or the mean of its s and p."""
        values = self.__dict__.get("values", {})
        if name in values:
            return values[name]
        if f"{name}_s" in values and name not in _AMPLITUDES:
            s, p = values[f"{name}_s"], values[f"{name}_p"]
            return log10_of_mean(s, p) if name == "log10_T" else 0.5 * (s + p)
        raise AttributeError(f"{name!r} was not asked for; this batch holds {', '.join(values)}")

    def __dir__(self) -> list[str]:
        """List the arrays too."""
        means = [name[:-2] for name in self.values if name.endswith("_s") and name[:-2] not in _AMPLITUDES]
        return [*super().__dir__(), *self.values, *means]

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a sample, angle and wavelength."""
        import pandas as pd

        plain = {name: array for name, array in self.values.items() if not name.startswith("A_layers")}
        count = len(next(iter(self.values.values())))
        numbers = self.first_sample + np.arange(count)
        sample, angle, wavelength = np.meshgrid(numbers, self.angle_deg, self.wavelength_nm, indexing="ij")
        columns = {"sample": sample.ravel(), "angle_deg": angle.ravel(), "wavelength_nm": wavelength.ravel()}
        return pd.DataFrame(columns | {name: array.ravel() for name, array in plain.items()})

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw the first quantity of every sample at the first angle against wavelength."""
        from filmstack.report.rows_plot import draw_batch

        return draw_batch(self, ax)


@dataclass(frozen=True)
class _Samples:
    """Checked samples of a request."""

    nominal: Request
    count: int
    thickness: FloatArray | None
    index: Mapping[Material, ComplexArray]
    angle: FloatArray | None

    def piece(self, start: int, stop: int) -> Request:
        """Return the request of some samples."""
        asked = self.nominal
        index = {
            material: values + self.index[material][start:stop] if material in self.index else values
            for material, values in asked.index.items()
        }
        for material, values in index.items():
            if material in self.index:
                _check_index(asked, material, values, start)
        incident_note(asked.stack, index[asked.stack.incident], asked.wavelength_nm)
        count = stop - start
        thickness = asked.thickness if self.thickness is None else self.thickness[start:stop]
        return replace(
            asked,
            index=index,
            thickness=np.broadcast_to(thickness, (count, thickness.shape[1])),
            angle_deg=asked.angle_deg if self.angle is None else self.angle[start:stop],
        )


def _check_index(asked: Request, material: Material, values: ComplexArray, start: int) -> None:
    bad = ~np.isfinite(values) | (values.real < 0.0)
    if not material.allow_gain:
        bad |= values.imag > 0.0
    if np.any(bad):
        sample, place = (int(x) for x in np.argwhere(bad)[0])
        value = values[sample, place]
        raise ArgumentError(
            f"index_change: {material.label}: sample {start + sample}: expected n >= 0 and k >= 0, got n = "
            f"{value.real:g}, k = {-value.imag:g} at {asked.wavelength_nm[place]:g} nm. Change n by a real number "
            "and k by -i times a number, or allow gain"
        )


def _samples(
    stack: Stack,
    wavelength_nm: ArrayLike,
    angle_deg: ArrayLike,
    thickness_nm: ArrayLike | None,
    index_change: Mapping[Material, ArrayLike] | None,
    angle_change_deg: ArrayLike | None,
) -> _Samples:
    asked = request(stack, wavelength_nm, angle_deg)
    counts: dict[str, int] = {}
    thickness = None if thickness_nm is None else _checked_thickness(stack, thickness_nm)
    if thickness is not None:
        counts["thickness_nm"] = len(thickness)
    index: dict[Material, ComplexArray] = {}
    for material, change in (index_change or {}).items():
        if not isinstance(material, Material) or material not in asked.index:
            raise ArgumentError(f"index_change: expected a Material of the stack as key, got {material!r}")
        values = np.array(change, dtype=complex)
        if values.ndim not in (1, 2) or (values.ndim == 2 and values.shape[1] != asked.wavelength_nm.size):
            raise ArgumentError(
                f"index_change: {material.label}: expected shape (sample,) or (sample, {asked.wavelength_nm.size}), "
                f"got {values.shape}"
            )
        index[material] = np.broadcast_to(values.reshape(len(values), -1), (len(values), asked.wavelength_nm.size))
        counts[f"index_change of {material.label}"] = len(values)
    angle = None
    if angle_change_deg is not None:
        change = np.array(angle_change_deg, dtype=float)
        if change.ndim != 1:
            raise ArgumentError(f"angle_change_deg: expected shape (sample,), got {change.shape}")
        # A tilt past normal incidence is the same tilt to the other side.
        angle = np.abs(asked.angle_deg + change[:, np.newaxis])
        bad = np.argwhere(~(angle <= 90.0))
        if len(bad):
            sample, place = bad[0]
            raise ArgumentError(
                f"angle_change_deg[{sample}]: expected {asked.angle_deg[0, place]:g} deg plus the change to stay "
                f"within 90 deg, got {change[sample]:g} deg"
            )
        counts["angle_change_deg"] = len(change)
    if not counts:
        raise ArgumentError(
            "expected thickness_nm, index_change or angle_change_deg, got none. One sample: use spectrum"
        )
    if len(set(counts.values())) > 1 or 0 in counts.values():
        told = ", ".join(f"{name} has {count}" for name, count in counts.items())
        raise ArgumentError(f"expected the same number of samples, at least one, in every argument; {told}")
    return _Samples(asked, next(iter(counts.values())), thickness, index, angle)


def _checked_thickness(stack: Stack, thickness_nm: ArrayLike) -> FloatArray:
    values = np.array(thickness_nm, dtype=float)
    layers = len(stack.films)
    if values.ndim != 2 or values.shape[1] != layers:
        raise ArgumentError(f"thickness_nm: expected shape (sample, {layers}), a column a film, got {values.shape}")
    bad = np.argwhere(~(np.isfinite(values) & (values >= 0.0)))
    if len(bad):
        sample, layer = bad[0]
        raise ArgumentError(
            f"thickness_nm[{sample}, {layer}]: expected a finite length >= 0 nm, got {values[sample, layer]:g} nm"
        )
    return values


def _checked_quantities(stack: Stack, quantities: Sequence[str]) -> tuple[str, ...]:
    if isinstance(quantities, str):
        quantities = (quantities,)
    for name in quantities:
        if name not in _PARTS:
            raise ArgumentError(f"quantities: expected some of {', '.join(_PARTS)}, got {name!r}")
        if name in _AMPLITUDES and stack.plates:
            raise CoherenceError(f"quantities: {name}: a stack with a thick plate has no amplitudes. Ask for R and T")
    if not quantities:
        raise ArgumentError(f"quantities: expected some of {', '.join(_PARTS)}, got none")
    return tuple(dict.fromkeys(quantities))


def _value(solution: Solution, quantity: str, p: bool) -> Any:  # noqa: ANN401 - real or complex array
    match quantity:
        case "R":
            return solution.reflectance(p)
        case "T":
            return solution.transmittance(p)
        case "log10_T":
            return solution.log10_transmittance(p)
        case "r":
            return solution.amplitude_reflectance(p)
        case "t":
            return solution.amplitude_transmittance(p)
        case "A_layers":
            return solution.film_absorptance(p)
    absorbed = total(solution.film_absorptance(p)) + total(solution.plate_absorptance(p))
    return absorbed if quantity == "A" else solution.transmittance(p) + absorbed


def _computed(samples: _Samples, quantities: tuple[str, ...], start: int, stop: int) -> BatchSpectrum:
    """Compute samples start to stop, a piece at a time."""
    asked = samples.nominal
    layers = len(asked.stack.films) if {"A", "one_minus_R", "A_layers"} & set(quantities) else 1
    many = max(1, PIECE_CELLS // (math.prod(asked.shape) * max(1, layers)))
    if stop - start <= many:
        values = _pieces(solve(samples.piece(start, stop)), quantities)
    else:
        values = {}
        for a in range(start, stop, many):
            b = min(a + many, stop)
            for name, piece in _pieces(solve(samples.piece(a, b)), quantities).items():
                if name not in values:
                    values[name] = np.empty((*piece.shape[:-3], stop - start, *asked.shape), piece.dtype)
                values[name][..., a - start : b - start, :, :] = piece
    return BatchSpectrum(asked.wavelength_nm, asked.angle_deg[0], start, values, asked.notes)


def _pieces(solution: Solution, quantities: tuple[str, ...]) -> dict[str, Any]:
    """Return the arrays asked for; R and T share memory, so one without the other is copied out."""
    alone = len({"R", "T"} & set(quantities)) == 1
    return {
        name: np.array(_value(solution, quantity, p)) if alone and quantity in "RT" else _value(solution, quantity, p)
        for quantity in quantities
        for name, p in _PARTS[quantity]
    }


def batch_spectrum(
    stack: Stack,
    wavelength_nm: ArrayLike,
    angle_deg: ArrayLike = 0.0,
    *,
    thickness_nm: ArrayLike | None = None,
    index_change: Mapping[Material, ArrayLike] | None = None,
    angle_change_deg: ArrayLike | None = None,
    quantities: Sequence[str] = ("R", "T"),
) -> BatchSpectrum:
    """Compute the spectra of many samples of a stack.

    Parameters
    ----------
    stack : Stack
        The nominal stack.
    wavelength_nm, angle_deg : array_like of float
        As in `spectrum`. [nm], [deg]
    thickness_nm : array_like of float, shape (sample, layer), optional
        Thickness of every film of every sample. [nm]
    index_change : mapping of Material to array_like of complex, shape (sample,) or (sample, wavelength), optional
        Added to N = n - ik of a material of the stack, end media and plates included. [1]
    angle_change_deg : array_like of float, shape (sample,), optional
        Added to every angle; a sum below 0 is the same tilt to the other side. [deg]
    quantities : sequence of str
        From R, T, A, r, t, log10_T, one_minus_R, A_layers.

    Returns
    -------
    BatchSpectrum
        R_s, R_p ... of shape (sample, angle, wavelength).

    Raises
    ------
    ArgumentError
        If a value is out of range, shapes do not agree, or the result would pass 1 GB: use `batch_blocks`.
    MaterialRangeError
        If a wavelength lies outside the data of a material.

    Examples
    --------
    >>> import filmstack as fs
    >>> stack = fs.Stack(fs.constant(1.0), [fs.Layer(fs.constant(1.38), 100.0)], fs.constant(1.52))
    >>> fs.batch_spectrum(stack, 550.0, thickness_nm=[[99.0], [100.0], [101.0]]).R.round(6).ravel()
    array([0.012604, 0.012602, 0.012615])
    """
    wanted = _checked_quantities(stack, quantities)
    samples = _samples(stack, wavelength_nm, angle_deg, thickness_nm, index_change, angle_change_deg)
    size = _bytes_a_sample(samples, wanted) * samples.count
    if size > LARGEST_RESULT_BYTES:
        many = max(1, LARGEST_RESULT_BYTES // 4 // _bytes_a_sample(samples, wanted))
        raise ArgumentError(
            f"batch_spectrum: the result would take {size / 1e9:.1f} GB, more than "
            f"{LARGEST_RESULT_BYTES / 1e9:g} GB. Use batch_blocks(..., samples_per_block={many})"
        )
    return _computed(samples, wanted, 0, samples.count)


def batch_blocks(
    stack: Stack,
    wavelength_nm: ArrayLike,
    angle_deg: ArrayLike = 0.0,
    *,
    samples_per_block: int,
    thickness_nm: ArrayLike | None = None,
    index_change: Mapping[Material, ArrayLike] | None = None,
    angle_change_deg: ArrayLike | None = None,
    quantities: Sequence[str] = ("R", "T"),
) -> Iterator[BatchSpectrum]:
    """Compute what `batch_spectrum` does, a block of samples at a time.

    Parameters
    ----------
    samples_per_block : int
        Samples in each block; the last may have fewer.
    stack, wavelength_nm, angle_deg, thickness_nm, index_change, angle_change_deg, quantities
        As in `batch_spectrum`.

    Returns
    -------
    iterator of BatchSpectrum
        The blocks in order, the same bytes as in one piece.

    Raises
    ------
    ArgumentError
        As in `batch_spectrum`, before the first block.
    """
    if not samples_per_block >= 1:
        raise ArgumentError(f"samples_per_block: expected a whole number >= 1, got {samples_per_block}")
    wanted = _checked_quantities(stack, quantities)
    samples = _samples(stack, wavelength_nm, angle_deg, thickness_nm, index_change, angle_change_deg)
    many = int(samples_per_block)
    return (_computed(samples, wanted, a, min(a + many, samples.count)) for a in range(0, samples.count, many))


def _bytes_a_sample(samples: _Samples, quantities: tuple[str, ...]) -> int:
    layers = len(samples.nominal.stack.films)
    numbers = sum(
        2 * (2 if quantity in _AMPLITUDES else layers if quantity == "A_layers" else 1) for quantity in quantities
    )
    return 8 * numbers * math.prod(samples.nominal.shape)
