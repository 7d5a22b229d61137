"""Every extremum of a stack's T over photon energy, without a sampling grid: `Stack` -> here -> `peaks`.

T = f / |D|^2, f the flux of the end media and D the wave towards the stack that gives one unit behind it. However
narrow a peak of T, D(x) is an entire function of the layers' phases, resolved by a few points a half wave of
the whole optical thickness. So the band is covered by intervals on which D and f of each polarization are
polynomials, checked against the engine at further points; intervals end at the knots of tabulated indices and are
halved until the check holds. There the sign of G = f' |D|^2 - f (|D|^2)' is that of dT/dx. A Chebyshev series whose
first coefficient exceeds the sum of all others in size has no zero: each interval is cut until every piece either
has no zero of G, or one only because G' has none.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from filmstack.analysis.points import request
from filmstack.constants import PLANCK_EV_NM
from filmstack.wave import chebyshev, kernels
from filmstack.wave.finish import LOG10_2, LOG10_E, Front, halvings
from filmstack.wave.route import dark, states

if TYPE_CHECKING:
    from filmstack.arraytypes import AnyArray, BoolArray, ComplexArray, FloatArray, IntArray
    from filmstack.materials.material import Material
    from filmstack.stack import Stack

TERMS = 24
"""Coefficients of a model of D."""
PHASE = 6.0
"""Change of the layers' phases over an interval to begin with, for which TERMS coefficients suffice. [rad]"""
CHECKS = np.array([-0.9731, -0.3127, 0.2691, 0.8917])
"""Points of an interval at which a model is compared with the engine."""
RANGE = 1e-3
"""Least over largest |D|, or flux, of an interval below which it is halved, so that no digits are lost."""
CUT = 0.0371
"""Where a piece is cut: not in its middle, where symmetric designs have their peaks."""
DEEPEST, FINEST = 44, 52
"""Most halvings of an interval of the band and of a piece."""
MOST_INTERVALS = 20_000
"""Intervals in hand at which the search gives up, and says so."""
STALLED, LARGEST_NOISE = 1.7, 1e-6
"""An error that one halving lowers by less than this many powers of two is rounding, if it is below that noise."""
BLIND, MOST_ROUNDS = 1e-6, 6
"""Noise over |D| above which a piece is not judged before D is modelled closer to it, and how often that is done."""
LEAST_CHANGE = 1e-12
"""Change of ln T over a piece below which T is constant there, if its sign is not known."""
MOST_PIECES = 50_000
"""Pieces in hand at which the search gives up, and says so."""
EPSILON = float(np.finfo(float).eps)


@dataclass(frozen=True)
class Sampled:
    """D and f of each polarization at points; the true D is the stored one times 2^log2."""

    d: ComplexArray
    log2: FloatArray
    flux: FloatArray


@dataclass(frozen=True)
class Models:
    """Polynomials of D and f on intervals of photon energy, rising.

    Parameters
    ----------
    low, high : ndarray, shape (interval,)
        Ends. [eV]
    d, flux : ndarray, shapes (interval, polarization, TERMS)
        Chebyshev coefficients; |D| is 1 at most, and T = flux / |D|^2 times 2^log2.
    log2 : ndarray, shape (interval,)
    noise : ndarray, shape (interval,)
        What rounding and truncation leave uncertain of D, which is 1 at most. [1]
    resolved : ndarray of bool, shape (interval,)
        Whether the models met their check.
    """

    low: FloatArray
    high: FloatArray
    d: ComplexArray
    flux: FloatArray
    log2: FloatArray
    noise: FloatArray
    resolved: BoolArray

    def picked(self, chosen: AnyArray) -> Models:
        """Return some of the intervals."""
        return Models(*(getattr(self, name)[chosen] for name in Models.__dataclass_fields__))

    def log2_transmittance(self, energy: FloatArray) -> FloatArray:
        """Return log2 T at photon energies of the band. [1]"""
        place = np.clip(np.searchsorted(self.low, energy, side="right") - 1, 0, len(self.low) - 1)
        low, high = self.low[place], self.high[place]
        s = ((energy - low) - (high - energy)) / (high - low)
        d = chebyshev.value(self.d[place], s[:, np.newaxis])
        flux = chebyshev.value(self.flux[place], s[:, np.newaxis])
        with np.errstate(divide="ignore", invalid="ignore"):
            total = np.mean(flux / np.abs(d) ** 2, axis=1)
            return np.asarray(np.log2(total) + self.log2[place])


@dataclass(frozen=True)
class Extrema:
    """Maxima and minima of T inside a band, by rising photon energy.

    Parameters
    ----------
    energy : ndarray, shape (extremum,)
        Photon energy. [eV]
    maximum : ndarray of bool, shape (extremum,)
        Maximum, else minimum; they alternate.
    rises : (int, int)
        Sign of dT/dx at the lower and the upper end of the band; 0 where T does not change.
    unresolved : tuple of (float, float)
        Photon energies between which nothing can be said. [eV]
    models : Models
        What the search rests on.
    """

    energy: FloatArray
    maximum: BoolArray
    rises: tuple[int, int]
    unresolved: tuple[tuple[float, float], ...]
    models: Models


def extrema(stack: Stack, low_ev: float, high_ev: float, angle_deg: float, polarizations: tuple[bool, ...]) -> Extrema:
    """Return every extremum of T, the mean of some polarizations (True for p), between two photon energies."""
    a, b = first_intervals(stack, low_ev, high_ev)
    models = model_band(stack, a, b, angle_deg, polarizations)
    pieces = _pieces(models)
    for _ in range(MOST_ROUNDS):
        if not np.any(pieces.blind):
            break
        kept, a, b = _closer(models, pieces)
        models = _joined([kept, model_band(stack, a, b, angle_deg, polarizations)])
        pieces = _pieces(models)
    return _walk(models, pieces)


# Models of D and f.


def sample(stack: Stack, energy: FloatArray, angle_deg: float, polarizations: tuple[bool, ...]) -> Sampled:
    """Return D and f of the engine, shapes (polarization, point)."""
    ends = [min(material.range_nm[1] for material in stack.materials), max(m.range_nm[0] for m in stack.materials)]
    asked = request(stack, np.clip(PLANCK_EV_NM / energy, ends[1], ends[0]), angle_deg)
    (group,) = asked.groups()
    state, closed = states(group)[0], dark(group)
    sign = 1.0 - 2.0 * np.mod(state[0, kernels.TURNS], 2.0)
    d, log2, flux = [], [], []
    for p in polarizations:
        re, im = Front(group.ends, state, p, closed).waves[0]
        d.append(sign * (re[0] + 1j * im[0]))
        log2.append(0.5 * state[0, kernels.DECAY] * (LOG10_E / LOG10_2) + 200.0 * halvings(state, p)[0])
        open_ = ~closed if p else np.ones((1, 1), dtype=bool)
        flux.append(np.where(open_, group.ends.flux(p), 0.0)[0])
    return Sampled(np.stack(d), np.stack(log2), np.stack(flux))


def phase_thickness(stack: Stack, energy: FloatArray) -> FloatArray:
    """Return N d k0 of every film, shape (film, point). [rad]"""
    k0 = 2.0 * np.pi * energy / PLANCK_EV_NM
    index = {material: material.index(PLANCK_EV_NM / energy) for material in {film.material for film in stack.films}}
    rows = [index[film.material] * (film.thickness_nm * k0) for film in stack.films]
    return np.abs(np.array(rows)) if rows else np.zeros((1, energy.size))


def knots(material: Material) -> FloatArray:
    """Return the photon energies at which a material changes from one formula to another. [eV]"""
    found = [knots(part) for part in getattr(material, "materials", ())]
    curve = getattr(material, "n_curve", None)
    if curve is not None:
        found.append(np.asarray(getattr(curve, "knots", getattr(curve, "x", ())), dtype=float))
        k = material.k_curve  # type: ignore[attr-defined]
        if np.any(k.y != 0.0):
            found.append(k.x)
    return np.concatenate(found) if found else np.empty(0)


def first_intervals(stack: Stack, low: float, high: float) -> tuple[FloatArray, FloatArray]:
    """Return intervals that end at knots and over which the phases change little."""
    inner = np.concatenate([knots(material) for material in stack.materials])
    inner = np.unique(inner[(inner > low) & (inner < high)])
    edges = np.concatenate([[low], inner, [high]])
    edges = edges[np.concatenate([[True], np.diff(edges) > 1e-12 * high])]
    edges[-1] = high
    wavelengths = [min(m.range_nm[1] for m in stack.materials), max(m.range_nm[0] for m in stack.materials)]
    safe = PLANCK_EV_NM / np.clip(PLANCK_EV_NM / edges, wavelengths[1], wavelengths[0])
    change = np.abs(np.diff(phase_thickness(stack, safe), axis=1)).sum(axis=0)
    parts = np.maximum(1, np.ceil(change / PHASE)).astype(int)
    rows = [np.linspace(a, b, n + 1)[:-1] for a, b, n in zip(edges[:-1], edges[1:], parts, strict=True)]
    cuts = np.concatenate([*rows, [high]])
    return cuts[:-1], cuts[1:]


def model_band(stack: Stack, a: FloatArray, b: FloatArray, angle_deg: float, polarizations: tuple[bool, ...]) -> Models:
    """Return models of D and f, checked, on intervals a to b or parts of them."""
    low, high = a.min(), b.max()
    phase = float(phase_thickness(stack, np.array([0.5 * (low + high)])).sum())
    rounding = 4.0 * EPSILON * (8.0 + phase)
    done: list[Models] = []
    before = np.full(len(a), np.inf)
    for level in range(DEEPEST + 1):
        last = level == DEEPEST or len(a) > MOST_INTERVALS
        models, log2_error, wide = _fit(stack, a, b, angle_deg, polarizations, rounding)
        # An error that halving does not lower is rounding: it is kept as the noise of the model.
        floor = (log2_error > before - STALLED) & (models.noise < LARGEST_NOISE)
        models.resolved[floor] = True
        ready = (models.resolved & ~wide) | last
        done.append(models.picked(ready))
        a, b, before = a[~ready], b[~ready], log2_error[~ready]
        if not a.size:
            break
        middle = 0.5 * (a + b)
        a, b, before = np.concatenate([a, middle]), np.concatenate([middle, b]), np.tile(before, 2)
    return _joined(done)


def _joined(parts: list[Models]) -> Models:
    """Return models of all intervals, by rising photon energy."""
    order = np.argsort(np.concatenate([m.low for m in parts]))
    return Models(*(np.concatenate([getattr(m, n) for m in parts])[order] for n in Models.__dataclass_fields__))


def _fit(
    stack: Stack,
    a: FloatArray,
    b: FloatArray,
    angle_deg: float,
    polarizations: tuple[bool, ...],
    rounding: float,
) -> tuple[Models, FloatArray, BoolArray]:
    """Return models on intervals, log2 of their absolute errors, and whether |D| has a wide range on them."""
    places = np.concatenate([chebyshev.nodes(TERMS), CHECKS])
    energy = 0.5 * (a + b)[:, np.newaxis] + 0.5 * (b - a)[:, np.newaxis] * places
    got = sample(stack, energy.ravel(), angle_deg, polarizations)
    d, log2, flux = (np.moveaxis(x.reshape(-1, *energy.shape), 0, 1) for x in (got.d, got.log2, got.flux))
    size = np.log2(np.maximum(np.abs(d), 1e-300)) + log2
    top = np.max(size, axis=2, keepdims=True)  # of each polarization
    d = d * np.exp2(log2 - top)
    log2_flux = -2.0 * top
    whole = np.max(log2_flux, axis=1, keepdims=True)
    flux = flux * np.exp2(np.maximum(log2_flux - whole, -900.0))
    matrix = chebyshev.fit(TERMS)
    c, f = d[..., :TERMS] @ matrix.T, flux[..., :TERMS] @ matrix.T
    at = chebyshev.basis(CHECKS, TERMS)
    largest = np.maximum(np.max(np.abs(flux), axis=2), 1e-300)
    error_d = np.max(np.abs(c @ at.T - d[..., TERMS:]), axis=2) + np.abs(c[..., -2:]).sum(axis=2)
    error_f = (np.max(np.abs(f @ at.T - flux[..., TERMS:]), axis=2) + np.abs(f[..., -2:]).sum(axis=2)) / largest
    error = np.maximum(error_d, error_f).max(axis=1)
    tolerance = 1e-13 + 4.0 * rounding
    wide = (np.min(np.abs(d), axis=(1, 2)) < RANGE) | np.any(np.min(np.abs(flux), axis=2) < RANGE * largest, axis=1)
    wide &= np.max(np.abs(flux), axis=(1, 2)) > 0.0
    c, f = _without_tail(c, rounding), _without_tail(f, 32.0 * EPSILON)
    models = Models(a, b, c, f, whole[:, 0, 0], np.maximum(error, rounding), error <= tolerance)
    return models, np.max(np.log2(np.maximum(error_d, EPSILON)) + top[:, :, 0], axis=1), wide


def _without_tail(c: AnyArray, share: float) -> AnyArray:
    """Drop the last coefficients that are nothing but rounding, which differentiation would enlarge."""
    tail = np.maximum.accumulate(np.abs(c[..., ::-1]), axis=-1)[..., ::-1]
    return np.where(tail > share * tail[..., :1], c, 0.0)


# Signs of dT/dx.


@dataclass(frozen=True)
class _Piece:
    """Part first..last (of -1..1) of an interval on which the sign of dT/dx is known, or has one change.

    left and right are the signs at the ends, equal where there is no change, 0 where T is constant to rounding. Of a
    lost piece nothing is known; a blind one is lost because |D| is far below its largest value on the interval.
    """

    interval: IntArray
    first: FloatArray
    last: FloatArray
    left: IntArray
    right: IntArray
    root: FloatArray
    lost: BoolArray
    blind: BoolArray


@dataclass(frozen=True)
class _Slope:
    """The sign of dT/dx at points of pieces, shapes (piece, point).

    g has that sign; t is T times the same positive factor; doubt is how far g is uncertain; dim the noise over |D|.
    """

    g: FloatArray
    t: FloatArray
    doubt: FloatArray
    dim: FloatArray


def _slope(d: ComplexArray, flux: FloatArray, s: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Return G and T times the same factor, shape (piece, point), then |D|^2 and |D'| of each polarization.

    d, flux : shapes (piece, polarization, TERMS); s : shape (point,) or (piece, point).
    """
    at = chebyshev.basis(s, TERMS)
    spec = "cpk,cqk->cpq" if at.ndim == 3 else "cpk,qk->cpq"
    turn = chebyshev.slope(TERMS).T
    value, change, f, df = (np.einsum(spec, x, at) for x in (d, d @ turn, flux, flux @ turn))
    power = value.real**2 + value.imag**2
    rise = 2.0 * (value.real * change.real + value.imag * change.imag)
    g, t = df * power - f * rise, f * power
    if g.shape[1] == 1:
        return g[:, 0], t[:, 0], power, np.abs(change)
    others = power[:, ::-1] ** 2
    return (g * others).sum(axis=1), (t * others).sum(axis=1), power, np.abs(change)


def _judged(
    d: ComplexArray, flux: FloatArray, s: FloatArray, noise: FloatArray, share: FloatArray, largest: FloatArray
) -> _Slope:
    """Return the slope and its doubts; noise, share of the interval and its largest flux, shape (piece,)."""
    g, t, power, change = _slope(d, flux, s)
    f = np.abs(np.einsum("cpk,qk->cpq", flux, chebyshev.basis(s, TERMS))).max(axis=1)
    with np.errstate(divide="ignore", invalid="ignore"):
        least = np.sqrt(power.min(axis=1))
        steep = np.max(change / np.sqrt(power), axis=1)
        lift = 1.0 / least + largest[:, np.newaxis] / np.maximum(f, 1e-200 * largest[:, np.newaxis])
        # A polynomial known to the noise has a derivative known to TERMS^2 times that (Markov).
        doubt = noise[:, np.newaxis] * lift * (TERMS**2 * share[:, np.newaxis] + steep)
        doubt = np.abs(t) * (doubt + 64.0 * EPSILON / least)  # the second term: rounding in cutting the pieces
        return _Slope(g, t, doubt, noise[:, np.newaxis] / least)


def _pieces(models: Models) -> _Piece:
    """Cut the intervals until the sign of dT/dx is known on every piece."""
    points = (3 if models.d.shape[1] == 1 else 6) * TERMS
    s, matrix, turn = chebyshev.nodes(points), chebyshev.fit(points), chebyshev.slope(points)
    interval = np.flatnonzero(models.resolved)
    first, last = np.full(len(interval), -1.0), np.full(len(interval), 1.0)
    d, flux = models.d[interval], models.flux[interval]
    largest = np.maximum(np.abs(models.flux).sum(axis=2).max(axis=1), 1e-290)
    halves = [chebyshev.part(-1.0, CUT, TERMS).T, chebyshev.part(CUT, 1.0, TERMS).T]
    done = [_unknown(np.flatnonzero(~models.resolved))]
    for level in range(FINEST + 1):
        if not interval.size:
            break
        known = (models.noise[interval], 0.5 * (last - first), largest[interval])
        inside, ends = _judged(d, flux, s, *known), _judged(d, flux, np.array([-1.0, 1.0]), *known)
        c = inside.g @ matrix.T
        dc = c @ turn.T
        blind = inside.dim.max(axis=1) > BLIND
        sure = ~blind & (np.abs(c[:, 0]) - np.abs(c[:, 1:]).sum(axis=1) > inside.doubt.max(axis=1))
        size = np.abs(inside.g)
        flat = ~sure & ~blind & np.all((size <= inside.doubt) | (2.0 * size <= LEAST_CHANGE * np.abs(inside.t)), axis=1)
        bent = np.abs(dc[:, 0]) > np.abs(dc[:, 1:]).sum(axis=1)
        sign = np.where(np.abs(ends.g) > ends.doubt, np.sign(ends.g), 0.0).astype(int)
        one = ~sure & ~flat & ~blind & bent & (sign != 0).any(axis=1)
        lost = blind | (~(sure | flat | one) & (level == FINEST or len(interval) > MOST_PIECES))
        # An end too close to a zero for its sign takes that of the other: the next piece has the change.
        left, right = (np.where(sign[:, k] == 0, sign[:, 1 - k], sign[:, k]) for k in (0, 1))
        whole = np.where(sure, np.sign(c[:, 0]), 0.0).astype(int)
        left, right = (np.where(sure | flat | lost, whole, x) for x in (left, right))
        root = np.zeros(len(interval))
        change = np.flatnonzero(one & (left * right < 0))
        if change.size:
            middle = _root(d[change], flux[change], right[change])
            root[change] = first[change] + 0.5 * (middle + 1.0) * (last - first)[change]
        ready = sure | flat | one | lost
        done.append(_Piece(*(x[ready] for x in (interval, first, last, left, right, root, lost, blind))))
        go = ~ready
        cut = first[go] + 0.5 * (CUT + 1.0) * (last - first)[go]
        first, last = np.concatenate([first[go], cut]), np.concatenate([cut, last[go]])
        interval = np.tile(interval[go], 2)
        d, flux = (_without_tail(np.concatenate([x[go] @ half for half in halves]), 8.0 * EPSILON) for x in (d, flux))
    order = np.lexsort((np.concatenate([x.first for x in done]), np.concatenate([x.interval for x in done])))
    names = _Piece.__dataclass_fields__
    return _Piece(*(np.concatenate([getattr(piece, name) for piece in done])[order] for name in names))


def _unknown(interval: IntArray) -> _Piece:
    """Return intervals whose models did not meet their check, as lost pieces."""
    one, none = np.ones(len(interval)), np.zeros(len(interval), dtype=int)
    return _Piece(interval, -one, one, none, none, none.astype(float), one > 0.0, one < 0.0)


def _closer(models: Models, pieces: _Piece) -> tuple[Models, FloatArray, FloatArray]:
    """Return the models to keep, and intervals for the others that narrow towards their blind pieces."""
    cuts: list[FloatArray] = []
    for number in np.unique(pieces.interval[pieces.blind]):
        here = pieces.blind & (pieces.interval == number)
        first, last = pieces.first[here], pieces.last[here]
        inner = [first, last]
        reach = last - first
        while np.any(reach < 2.0):
            inner += [first - reach, last + reach]
            reach = 8.0 * reach
        s = np.unique(np.concatenate(inner))
        s = np.concatenate([[-1.0], s[(s > -1.0 + 1e-9) & (s < 1.0 - 1e-9)], [1.0]])
        low, high = models.low[number], models.high[number]
        edges = 0.5 * (low + high) + 0.5 * (high - low) * s
        edges[0], edges[-1] = low, high
        cuts.append(np.unique(edges))
    keep = np.ones(len(models.low), dtype=bool)
    keep[pieces.interval[pieces.blind]] = False
    return models.picked(keep), np.concatenate([x[:-1] for x in cuts]), np.concatenate([x[1:] for x in cuts])


def _root(d: ComplexArray, flux: FloatArray, right: IntArray) -> FloatArray:
    """Return the one zero of G of each piece by halving."""
    low, high = np.full(len(d), -1.0), np.full(len(d), 1.0)
    for _ in range(50):
        middle = 0.5 * (low + high)
        g = _slope(d, flux, middle[:, np.newaxis])[0][:, 0]
        beyond = g * right >= 0.0
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    return 0.5 * (low + high)


def _walk(models: Models, pieces: _Piece) -> Extrema:
    """Follow the signs through the band: a maximum stands where T rises and then falls."""
    middle, half = 0.5 * (models.low + models.high), 0.5 * (models.high - models.low)
    where = [middle[pieces.interval] + half[pieces.interval] * x for x in (pieces.first, pieces.root, pieces.last)]
    rows = zip(
        *(x.tolist() for x in where), pieces.left.tolist(), pieces.right.tolist(), pieces.lost.tolist(), strict=True
    )
    energy: list[float] = []
    maximum: list[bool] = []
    before, since, begin = 0, float(models.low[0]), 0
    for first, root, last, left, right, lost in rows:
        if lost:
            before = 0  # what happens across a gap is not known
        if left == 0:
            continue
        begin = begin or left
        if before not in (0, left):
            energy.append(0.5 * (since + first))
            maximum.append(before > 0)
        if right != left:
            energy.append(root)
            maximum.append(left > 0)
        before, since = right, last
    gaps = [*zip(where[0][pieces.lost].tolist(), where[2][pieces.lost].tolist(), strict=True)]
    return Extrema(np.array(energy), np.array(maximum, dtype=bool), (begin, before), tuple(sorted(gaps)), models)
