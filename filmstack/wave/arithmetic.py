"""Elementary functions of the engine, written once for compiled and for array work.

Plain Python over numbers that may be scalars or whole arrays, + - * / and comparisons on reals only:
`filmstack.wave.kernels` says why.
"""

from __future__ import annotations

from typing import Any

import numpy as np

LARGE, SMALL = 2.0**200, 2.0**-200
POWERS_OF_HALF = 0.5 ** np.arange(1200)
MOST_HALVINGS = 1150.0

LN2_HIGH, LN2_LOW, LOG2_E = 6.93147180369123816490e-01, 1.90821492927058770002e-10, 1.4426950408889634

# Polynomials, highest power first. Sine over f and (cosine - 1) over f^2, in f^2, of f quarter waves up to a half:
# least largest error. Then (exp(r) - 1 - r) / r^2 by its power series, for |r| up to half of ln 2.
SINE = (
    5.633933781537854e-08,
    -3.59864335298231e-06,
    0.0001604411507421909,
    -0.004681754132340976,
    0.07969262624604301,
    -0.6459640975062443,
    1.5707963267948966,
)
COSINE = (
    -6.329396344967424e-09,
    4.710678405505227e-07,
    -2.5202039028029178e-05,
    0.0009192602745468447,
    -0.020863480763340773,
    0.2536695079010478,
    -1.2337005501361697,
)
EXPONENTIAL = tuple(1.0 / float(np.prod(np.arange(1.0, n + 1.0))) for n in range(14, 1, -1))

COMPILED = ("polynomial", "sine_cosine", "exponential_minus_1", "halved", "rescaled")
"""Functions of the compiled copy, each after those it calls."""


def polynomial(x: Any, coefficients: Any) -> Any:
    """Return a polynomial by Horner's rule, the highest coefficient first."""
    total = coefficients[0]
    for place in range(1, len(coefficients)):
        total = coefficients[place] + x * total
    return total


def sine_cosine(x: Any) -> tuple[Any, Any, Any]:
    """Return s, c, t with sin = (-1)^t s and cos = (-1)^t c of x quarter waves.

    The reduction x - rint(x) is exact and the polynomials are right to 1e-16. The common sign is counted,
    not applied: it drops out of R and T.
    """
    q = np.rint(x)
    f = x - q
    z = f * f
    sine, cosine = f * polynomial(z, SINE), 1.0 + z * polynomial(z, COSINE)
    turns = np.floor(0.5 * q)
    odd = q - 2.0 * turns
    even = 1.0 - odd
    return even * sine + odd * cosine, even * cosine - odd * sine, turns


def exponential_minus_1(y: Any) -> Any:
    """Return exp(y) - 1 for y <= 0, right to the last digits also next to 0."""
    deep = (y < -75.0) * 1.0
    y = (1.0 - deep) * y - 75.0 * deep
    k = np.rint(y * LOG2_E)
    r = (y - k * LN2_HIGH) - k * LN2_LOW
    p = r + r * r * polynomial(r, EXPONENTIAL)
    power = np.int64((np.int64(k) + 1023) << 52).view(np.float64)
    return power * p + (power - 1.0)


def halved(x: Any, y: Any, halvings: Any) -> Any:
    """Return x exp(-y) 2^-halvings for y >= 0, without a false underflow on the way."""
    k = np.rint(y * LOG2_E)
    r = k * LN2_HIGH - y + k * LN2_LOW
    p = 1.0 + (r + r * r * polynomial(r, EXPONENTIAL))
    total = k + halvings
    up = (total < 0.0) * 1.0
    total = total * (1.0 - 2.0 * up)
    over = (total > 2.0 * MOST_HALVINGS) * 1.0
    total = total * (1.0 - over) + 2.0 * MOST_HALVINGS * over
    first = np.floor(0.5 * total)
    a, b = POWERS_OF_HALF[np.int64(first)], POWERS_OF_HALF[np.int64(total - first)]
    down = ((p * x) * a) * b
    return down * (1.0 - up) + (p * x) / (a * up + (1.0 - up)) / (b * up + (1.0 - up)) * up


def rescaled(size: Any) -> tuple[Any, Any]:
    """Return the power of two that brings `size` back to the middle, and its exponent over 200."""
    big, little = (size > LARGE) * 1.0, (size < SMALL) * 1.0
    return (1.0 - big - little) + big * SMALL + little * LARGE, big - little
