"""Truncated Taylor series in the photon energy, so that one formula gives N and all its derivatives.

A dispersion model writes its formula once, over numbers that may be arrays or a `Series`. The functions
below (`sqrt`, `exp` ...) take either.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from filmstack.arraytypes import AnyArray

Number = Any
"""A float, a complex, an array or a `Series`."""


class Series:
    """c[0] + c[1] h + c[2] h^2 + ..., h the change of the variable; each c[j] is an array.

    Parameters
    ----------
    coefficients : ndarray, shape (order + 1, ...)
        Taylor coefficients, derivative over factorial.
    """

    __array_priority__ = 1000

    def __init__(self, coefficients: AnyArray) -> None:
        self.c = coefficients

    @classmethod
    def variable(cls, value: AnyArray, order: int) -> Series:
        """Return the variable itself at `value`."""
        c = np.zeros((order + 1, *np.shape(value)), dtype=complex)
        c[0] = value
        if order:
            c[1] = 1.0
        return cls(c)

    def derivatives(self) -> AnyArray:
        """Return value and derivatives, shape (order + 1, ...)."""
        factorial = np.cumprod(np.concatenate([[1.0], np.arange(1.0, len(self.c))]))
        return np.asarray(self.c * factorial.reshape(-1, *([1] * (self.c.ndim - 1))))

    def _like(self, other: Number) -> Series:
        if isinstance(other, Series):
            return other
        c = np.zeros_like(self.c)
        c[0] = other
        return Series(c)

    def __add__(self, other: Number) -> Series:
        return Series(self.c + self._like(other).c)

    __radd__ = __add__

    def __neg__(self) -> Series:
        return Series(-self.c)

    def __sub__(self, other: Number) -> Series:
        return Series(self.c - self._like(other).c)

    def __rsub__(self, other: Number) -> Series:
        return Series(self._like(other).c - self.c)

    def __mul__(self, other: Number) -> Series:
        if not isinstance(other, Series):
            return Series(self.c * other)
        return Series(np.stack([sum(self.c[i] * other.c[k - i] for i in range(k + 1)) for k in range(len(self.c))]))

    __rmul__ = __mul__

    def __truediv__(self, other: Number) -> Series:
        if not isinstance(other, Series):
            return Series(self.c / other)
        out = np.empty_like(self.c)
        for k in range(len(out)):
            out[k] = (self.c[k] - sum(other.c[i] * out[k - i] for i in range(1, k + 1))) / other.c[0]
        return Series(out)

    def __rtruediv__(self, other: Number) -> Series:
        return self._like(other) / self

    def __pow__(self, power: float) -> Series:
        if power == 2:
            return self * self
        if power == int(power) and 0 <= power <= 8:
            product = self._like(1.0)
            for _ in range(int(power)):
                product = product * self
            return product
        # From f = x^p: x f' = p x' f.
        out = np.empty_like(self.c)
        out[0] = self.c[0] ** power
        for k in range(1, len(out)):
            out[k] = sum((power * i - (k - i)) * self.c[i] * out[k - i] for i in range(1, k + 1)) / (k * self.c[0])
        return Series(out)


def value(x: Number) -> AnyArray:
    """Return the value without its derivatives."""
    return x.c[0] if isinstance(x, Series) else x


def where(condition: AnyArray, a: Number, b: Number) -> Number:
    """Choose element by element; either side may be a series."""
    if not isinstance(a, Series) and not isinstance(b, Series):
        return np.where(condition, a, b)
    series = a if isinstance(a, Series) else b
    return Series(np.where(condition, series._like(a).c, series._like(b).c))


def conjugate(x: Number) -> Number:
    """Return the complex conjugate; the variable is real."""
    return Series(np.conj(x.c)) if isinstance(x, Series) else np.conj(x)


def real(x: Number) -> Number:
    """Return the real part; the variable is real."""
    return Series(x.c.real.astype(complex)) if isinstance(x, Series) else np.real(x)


def sqrt(x: Number) -> Number:
    """Return the principal square root."""
    if not isinstance(x, Series):
        return np.sqrt(x)
    out = np.empty_like(x.c)
    out[0] = np.sqrt(x.c[0])
    for k in range(1, len(out)):
        out[k] = (x.c[k] - sum(out[i] * out[k - i] for i in range(1, k))) / (2.0 * out[0])
    return Series(out)


def _by_equation(x: Series, first: AnyArray, slope: Callable[[Series, int], AnyArray]) -> Series:
    """Solve y' = g(x, y) x' order by order; `slope(y, i)` gives coefficient i of g from those of y up to i."""
    y = Series(np.zeros_like(x.c))
    y.c[0] = first
    slopes: list[AnyArray] = []
    for k in range(len(x.c) - 1):
        slopes.append(slope(y, k))
        y.c[k + 1] = sum(slopes[i] * (k + 1 - i) * x.c[k + 1 - i] for i in range(k + 1)) / (k + 1)
    return y


def exp(x: Number) -> Number:
    """Return the exponential."""
    return _by_equation(x, np.exp(x.c[0]), lambda y, i: y.c[i]) if isinstance(x, Series) else np.exp(x)


def log(x: Number) -> Number:
    """Return the principal logarithm."""
    if not isinstance(x, Series):
        return np.log(x)
    inverse = 1.0 / x
    return _by_equation(x, np.log(x.c[0]), lambda y, i: inverse.c[i])


def log_size(x: Number) -> Number:
    """Return log|x| of a real x."""
    if not isinstance(x, Series):
        return np.log(np.abs(x))
    inverse = 1.0 / x
    return _by_equation(x, np.log(np.abs(x.c[0])), lambda y, i: inverse.c[i])


def faddeeva(z: Number) -> Number:
    """Return w(z) = exp(-z^2) erfc(-iz) for Im z >= 0.

    Derivatives follow w' = -2 z w + 2i / sqrt(pi), which cancels far from 0; there they follow Laplace's
    continued fraction (Abramowitz and Stegun 7.1.15).
    """
    from scipy.special import wofz

    if not isinstance(z, Series):
        return wofz(z)
    far = np.abs(z.c[0]) > _FAR
    near_z, far_z = where(far, z._like(0.0), z), where(far, z, z._like(2.0 * _FAR * 1j))
    constant = 2j / np.sqrt(np.pi)

    def slope(y: Series, i: int) -> AnyArray:
        product = sum(near_z.c[m] * y.c[i - m] for m in range(i + 1))
        return np.asarray(-2.0 * product + (constant if i == 0 else 0.0))

    near = _by_equation(near_z, wofz(near_z.c[0]), slope)
    fraction = far_z
    for level in range(_LEVELS, 0, -1):
        fraction = far_z - 0.5 * level / fraction
    return where(far, (1j / np.sqrt(np.pi)) / fraction, near)


_FAR, _LEVELS = 7.0, 24
