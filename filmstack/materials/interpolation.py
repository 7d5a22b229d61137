"""Curves through tabulated constants over photon energy: table rows -> here -> `tables`.

n follows a smoothing spline that stays within the printed rounding of the rows, so that its
derivatives do not follow the rounding; k follows a shape-preserving cubic, never below zero.
Evaluation is plain numpy; only the fit of a spline imports scipy.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Protocol

import numpy as np

if TYPE_CHECKING:
    from filmstack.arraytypes import FloatArray


class Curve(Protocol):
    """A function of photon energy with derivatives."""

    @property
    def derivative_order(self) -> int:
        """Highest continuous derivative."""

    def derivative(self, x: FloatArray, order: int) -> FloatArray:
        """Return the derivative of a given order; order 0 is the value."""


@dataclass(frozen=True, eq=False)
class SplineCurve:
    """A spline as knots and B-spline coefficients.

    Parameters
    ----------
    knots, coefficients : ndarray
        As in the textbooks: `degree` + 1 equal knots at each end, one coefficient a B-spline.
    """

    knots: FloatArray
    coefficients: FloatArray

    @property
    def degree(self) -> int:
        """Degree of the pieces."""
        return len(self.knots) - len(self.coefficients) - 1

    @property
    def derivative_order(self) -> int:
        """Highest continuous derivative."""
        return self.degree - 1

    def derivative(self, x: FloatArray, order: int) -> FloatArray:
        """Return the derivative of a given order by de Boor's recursion (A Practical Guide to Splines, chapter X)."""
        degree, knots, c = self.degree, self.knots, self.coefficients
        if order > degree:
            return np.zeros(np.shape(x))
        for _ in range(order):
            knots, width = knots[1:-1], knots[degree + 1 : -1] - knots[1 : -degree - 1]
            c = degree * np.diff(c) / width
            degree -= 1
        return _de_boor(knots, c, degree, np.asarray(x, dtype=float))


def _de_boor(knots: FloatArray, c: FloatArray, degree: int, x: FloatArray) -> FloatArray:
    last = len(knots) - degree - 2
    piece = np.clip(np.searchsorted(knots, x, side="right") - 1, degree, last)
    values = [c[piece - degree + j] for j in range(degree + 1)]
    for level in range(1, degree + 1):
        for j in range(degree, level - 1, -1):
            left, right = knots[piece + j - degree], knots[piece + j + 1 - level]
            share = (x - left) / (right - left)
            values[j] = (1.0 - share) * values[j - 1] + share * values[j]
    return np.asarray(values[degree])


@dataclass(frozen=True, eq=False)
class MonotoneCurve:
    """A cubic that keeps the shape of its points: no new extrema, no overshoot.

    F. N. Fritsch and J. Butland, SIAM J. Sci. Stat. Comput. 5, 300 (1984): weighted harmonic
    means of the slopes, zero where they change sign.
    """

    x: FloatArray
    y: FloatArray
    slopes: FloatArray

    @property
    def derivative_order(self) -> int:
        """Highest continuous derivative."""
        return 1

    def derivative(self, x: FloatArray, order: int) -> FloatArray:
        """Return the derivative of a given order; the second and third are piecewise."""
        x = np.asarray(x, dtype=float)
        if order > 3:
            return np.zeros(x.shape)
        i = np.clip(np.searchsorted(self.x, x, side="right") - 1, 0, len(self.x) - 2)
        h = self.x[i + 1] - self.x[i]
        rise, d0, d1 = (self.y[i + 1] - self.y[i]) / h, self.slopes[i], self.slopes[i + 1]
        second, third = (3.0 * rise - 2.0 * d0 - d1) / h, (d0 + d1 - 2.0 * rise) / (h * h)
        u = x - self.x[i]
        if order == 0:
            value = self.y[i] + u * (d0 + u * (second + u * third))
            low, high = np.minimum(self.y[i], self.y[i + 1]), np.maximum(self.y[i], self.y[i + 1])
            return np.clip(value, low, high)  # a rounding error below zero would be gain
        if order == 1:
            return d0 + u * (2.0 * second + 3.0 * u * third)
        return 2.0 * second + 6.0 * u * third if order == 2 else 6.0 * third


def monotone_curve(x: FloatArray, y: FloatArray) -> MonotoneCurve:
    """Return the shape-preserving cubic through points.

    Parameters
    ----------
    x, y : ndarray of float, shape (points,)
        At least two points, x increasing.

    Returns
    -------
    MonotoneCurve
    """
    h = np.diff(x)
    rise = np.diff(y) / h
    if len(x) == 2:
        return MonotoneCurve(x, y, np.repeat(rise, 2))
    first, second = 2.0 * h[1:] + h[:-1], h[1:] + 2.0 * h[:-1]
    same = rise[1:] * rise[:-1] > 0.0
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        inner = np.where(same, (first + second) / (first / rise[:-1] + second / rise[1:]), 0.0)
    ends = [_end_slope(h[0], h[1], rise[0], rise[1]), _end_slope(h[-1], h[-2], rise[-1], rise[-2])]
    return MonotoneCurve(x, y, np.concatenate([ends[:1], inner, ends[1:]]))


def _end_slope(h0: float, h1: float, rise0: float, rise1: float) -> float:
    """Return the one-sided three-point slope, held within the shape of the points."""
    slope = ((2.0 * h0 + h1) * rise0 - h0 * rise1) / (h0 + h1)
    if slope * rise0 <= 0.0:
        return 0.0
    return 3.0 * rise0 if rise0 * rise1 <= 0.0 and abs(slope) > abs(3.0 * rise0) else slope


_MANY_ROWS = 200
_SCATTERED = 0.1
"""Share of rows off their neighbours from which the rows count as scattered."""


def fit_curve(x: FloatArray, y: FloatArray, tolerance: FloatArray, *, quick: bool = False) -> Curve:
    """Return the smoothest curve that passes every row within its tolerance.

    Parameters
    ----------
    x, y : ndarray of float, shape (points,)
        Photon energy, increasing [eV], and n [1].
    tolerance : ndarray of float, shape (points,)
        Half a unit of the last printed digit of each row. [1]
    quick : bool
        Of many rows that scatter beyond their printed digits take the monotone cubic at once, and try fewer
        weights: a smooth curve through thousands of them takes minutes and follows the scatter all the same.

    Returns
    -------
    Curve
        A quintic spline; a cubic one, or the monotone cubic, where a smoother one would leave the
        shape of the rows (few rows, sharp features, noise above the printed digits).
    """
    shape = monotone_curve(x, y)
    quick = quick and len(x) > _MANY_ROWS
    if quick and rough_share(x, y, tolerance) > _SCATTERED:
        return shape
    for degree in (5, 3):
        if len(x) > degree + 1:
            curve = _shaped(x, y, tolerance, degree, shape, quick)
            if curve is not None:
                return curve
    return shape


def rough_share(x: FloatArray, y: FloatArray, tolerance: FloatArray) -> float:
    """Return which share of the rows lies off the cubic through its four neighbours by more than rounding explains.

    Parameters
    ----------
    x, y, tolerance : ndarray of float, shape (points,)
        As for `fit_curve`, five points at least.

    Returns
    -------
    float
        0 for a smooth function on dense rows, rounded; towards 1 for scatter above the printed digits. [1]
    """
    here = slice(2, -2)
    beside = [slice(j, len(x) - 4 + j) for j in (0, 1, 3, 4)]
    value, allowed = np.zeros(len(x) - 4), tolerance[here].copy()
    for one in beside:
        weight = np.ones(len(x) - 4)
        for other in beside:
            if other is not one:
                weight *= (x[here] - x[other]) / (x[one] - x[other])
        value += weight * y[one]
        allowed += np.abs(weight) * tolerance[one]
    return float(np.mean(np.abs(y[here] - value) > allowed))


def _shaped(
    x: FloatArray, y: FloatArray, tolerance: FloatArray, degree: int, shape: MonotoneCurve, quick: bool
) -> SplineCurve | None:
    """Return a smooth spline that keeps the shape of the rows, led by points of the monotone cubic where it strays."""
    places, allowed = _between(shape, tolerance)
    guide = shape.derivative(places, 0)
    used = np.zeros(len(places), dtype=bool)
    for _ in range(4):
        at = np.concatenate([x, places[used]])
        order = np.argsort(at)
        values, room = np.concatenate([y, guide[used]]), np.concatenate([tolerance, 0.8 * allowed[used]])
        curve = _smoothest(at[order], values[order], room[order], degree, quick)
        if curve is None:
            return None
        value = curve.derivative(places, 0)
        stray = (np.abs(value - guide) > allowed) | (value < 0.0)
        if not np.any(stray):
            return curve
        if np.mean(stray) > 0.25:  # noise above the printed digits
            return None
        used |= np.repeat(stray.reshape(-1, 3).any(axis=1), 3)
    return None


def _smoothest(x: FloatArray, y: FloatArray, tolerance: FloatArray, degree: int, quick: bool) -> SplineCurve | None:
    """Return a spline of few knots within the tolerance of every row.

    Rounding errors even over +- the tolerance have a mean square of tolerance^2 / 3, which sets the
    smoothing. Rows that come out beyond their tolerance get more weight until they are within; if
    that does not end, the curve may be less smooth, at last one through all rows.
    """
    patience, haste = (1, 4) if quick else (20, 1)
    for share in (1.0 / 3.0, 0.1, 0.01):
        weight = 1.0 / tolerance
        for turn in range(60):
            curve = _smoothed(x, y, weight, degree, share * len(x))
            if curve is None or (turn >= patience and len(curve.knots) > 0.5 * len(x)):  # slow, and little gain
                break
            misfit = np.abs(curve.derivative(x, 0) - y) / tolerance
            if np.all(misfit <= 1.0):
                return curve
            weight = weight * np.clip((misfit / 0.97) ** haste, 1.0, 4.0)
    return _smoothed(x, y, 1.0 / tolerance, degree, 0.0)


def _smoothed(x: FloatArray, y: FloatArray, weight: FloatArray, degree: int, s: float) -> SplineCurve | None:
    import warnings

    from scipy.interpolate import splrep

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # a failed fit shows in its residuals
        knots, c, _ = splrep(x, y, w=weight, k=degree, s=s)
    if not np.all(np.isfinite(c)):
        return None
    return SplineCurve(np.asarray(knots), np.asarray(c[: len(knots) - degree - 1]))


def _between(shape: MonotoneCurve, tolerance: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return three places between each pair of rows, and how far a spline may be from the monotone cubic there."""
    x, y = shape.x, shape.y
    places = (x[:-1, np.newaxis] + np.diff(x)[:, np.newaxis] * np.array([0.25, 0.5, 0.75])).ravel()
    change = np.abs(np.diff(y))
    beside = np.sqrt(np.append(change[1:], 0.0) * np.append(0.0, change[:-1]))  # a true extremum has both sides
    allowed = 0.15 * np.maximum(change, beside) + 2.0 * np.maximum(tolerance[1:], tolerance[:-1])
    return places, np.repeat(allowed, 3)


def derivative_deviation(curve: Curve, x: FloatArray, tolerance: FloatArray) -> FloatArray:
    """Return the standard deviation that the rounding of the rows gives to n and its derivatives, at the rows.

    Parameters
    ----------
    curve : Curve
        Fitted curve.
    x, tolerance : ndarray of float, shape (rows,)
        Photon energies of the rows [eV] and half a unit of their last digit [1].

    Returns
    -------
    ndarray of float, shape (curve.derivative_order + 1, rows)
        Standard deviation. [1/eV^order]

    Notes
    -----
    A rounding error is even over +- the tolerance; its variance, tolerance^2 / 3, is carried through the
    least-squares spline on the same knots. A coefficient that no row holds is taken as known to +-0.1.
    What the curve misses between rows is not included.
    """
    if not isinstance(curve, SplineCurve):
        # the rounding itself, and the difference of two of them over their distance
        step = np.diff(x)
        slope = np.hypot(tolerance[1:], tolerance[:-1]) / np.sqrt(3.0) / step
        return np.stack([tolerance / np.sqrt(3.0), np.maximum(np.append(slope, 0.0), np.append(0.0, slope))])
    from scipy.interpolate import BSpline
    from scipy.sparse import diags_array, eye_array
    from scipy.sparse.linalg import splu

    size = len(curve.coefficients)
    basis = BSpline.design_matrix(x, curve.knots, curve.degree)
    information = basis.T @ diags_array(3.0 / tolerance**2) @ basis + 100.0 * eye_array(size)
    factors = splu(information.tocsc())
    spline = BSpline(curve.knots, np.eye(size), curve.degree)
    deviations = []
    for order in range(curve.derivative_order + 1):
        rows = spline(x, nu=order)
        deviations.append(np.sqrt(np.einsum("ac,ca->a", rows, factors.solve(rows.T))))
    return np.stack(deviations)
