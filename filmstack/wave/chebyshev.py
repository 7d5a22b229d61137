"""Polynomials on an interval as Chebyshev series: values at points -> here -> `filmstack.analysis.extrema`.

A series is a row of coefficients c[..., k] of T_k(s), s from -1 to 1; every function works on many rows at once.
Sources: L. N. Trefethen, Approximation Theory and Approximation Practice, chapters 3 and 8; A. Bjorck and
G. Dahlquist, Numerical Methods, section 4.6.
"""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from filmstack.arraytypes import AnyArray, FloatArray


@cache
def nodes(count: int) -> FloatArray:
    """Return the zeros of T_count, from -1 to 1; none lies at an end."""
    return np.asarray(-np.cos(np.pi * (np.arange(count) + 0.5) / count))


def basis(s: FloatArray, count: int) -> FloatArray:
    """Return T_0 ... T_(count - 1) at points, shape (*shape of s, count)."""
    s = np.asarray(s, dtype=float)
    out = np.empty((*s.shape, count))
    out[..., 0] = 1.0
    if count > 1:
        out[..., 1] = s
    for k in range(2, count):
        out[..., k] = 2.0 * s * out[..., k - 1] - out[..., k - 2]
    return out


@cache
def fit(count: int) -> FloatArray:
    """Return the matrix from values at `nodes(count)` to coefficients."""
    turn = np.pi * (np.arange(count) + 0.5) / count
    out = 2.0 / count * np.cos(np.outer(np.arange(count), np.pi - turn))
    out[0] *= 0.5
    return out


@cache
def slope(count: int) -> FloatArray:
    """Return the matrix from the coefficients of a series to those of its derivative."""
    out = np.zeros((count, count))
    for k in range(1, count):
        for j in range(k - 1, -1, -2):
            out[j, k] = 2.0 * k if j else float(k)
    return out


@cache
def part(first: float, last: float, count: int) -> FloatArray:
    """Return the matrix from a series on -1 to 1 to that of the same polynomial on first to last."""
    s = 0.5 * (first + last) + 0.5 * (last - first) * nodes(count)
    return np.asarray(fit(count) @ basis(s, count))


def value(c: AnyArray, s: FloatArray) -> AnyArray:
    """Return each row's polynomial at its own point, shape of s."""
    return np.asarray(np.einsum("...k,...k->...", c, basis(s, c.shape[-1])))
