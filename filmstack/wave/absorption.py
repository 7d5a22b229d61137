"""Absorbed power of each film in closed form: `route.states(every_layer=True)` -> here.

The absorbed density is k0 (-Im v |E|^2 - Im u |H|^2) for s and p alike. With the fields E_b, H_b at
the back of the film, E = cos E_b + i u S H_b and H = cos H_b + i v S E_b at a distance from the
back, so the integral over the film is a sum of |E_b|^2, |H_b|^2 and a cross term, whose factors are
sinc and expm1 forms. Nothing is a difference of fluxes: a lossless film absorbs exactly 0 and the
loss of a mirror is right however small.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from filmstack.wave import arithmetic, kernels
from filmstack.wave.finish import as_complex, fields, halvings

if TYPE_CHECKING:
    from filmstack.arraytypes import ComplexArray, FloatArray
    from filmstack.wave.route import Group


def _series(x: FloatArray, sign: float) -> FloatArray:
    """Return x^2/3! + sign x^4/5! + ..., enough terms for x <= 1."""
    square, term, total = x * x, np.ones_like(x), np.zeros_like(x)
    for k in range(1, 10):
        term = term * square / (2 * k * (2 * k + 1))
        total = total + (term if k == 1 else sign ** (k - 1) * term)
    return total


def _sinc(x: FloatArray) -> FloatArray:
    return np.asarray(np.sinc(x / np.pi))


def _faded_sinhc(x: FloatArray) -> FloatArray:
    """Return exp(-x) sinh(x) / x for x >= 0."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(np.where(x > 0.0, -0.5 * np.expm1(-2.0 * x) / x, 1.0))


def _faded_difference(p: FloatArray, q: FloatArray) -> FloatArray:
    """Return exp(-p) (sinh(p)/p - sin(q)/q) without cancellation."""
    fade = np.exp(-p)
    up = np.where(p < 1.0, fade * _series(np.minimum(p, 1.0), 1.0), _faded_sinhc(p) - fade)
    small = np.abs(q) < 1.0
    down = np.where(small, _series(np.where(small, q, 0.0), -1.0), 1.0 - _sinc(q))
    return np.asarray(up + fade * down)


def absorbed(group: Group, trace: FloatArray, p: bool) -> FloatArray:
    """Return what each film absorbs, over |D|^2 of the first interface.

    Parameters
    ----------
    group : Group
        The films.
    trace : ndarray, shape (layer + 1, sample, STATE_ROWS, point)
        Fields in front of each layer and at the exit.
    p : bool
        p, else s.

    Returns
    -------
    ndarray, shape (layer, sample, point)
        To be multiplied by 4 a1 a2 / |D stored|^2 for a fraction of the incident light.
    """
    layers = len(group.order)
    out = np.zeros((layers, *group.shape))
    media = group.media
    if bool(np.all(media.n[1] == 0.0)):
        return out
    kappa = as_complex(media.kappa)
    v = as_complex(media.v_p if p else media.v_s)
    u = as_complex(media.u_p) if p else np.ones_like(v)
    first = trace[0]
    for layer in range(layers):
        row = int(group.order[layer])
        if bool(np.all(media.n[1][:, row] == 0.0)):
            continue
        e, h = (as_complex(pair) for pair in fields(trace[layer + 1], p))
        parts = _parts(kappa[:, row], media.k0 * group.thickness[:, layer, np.newaxis])
        total = -v[:, row].imag * _integral(e, 1j * u[:, row] * h, *parts)
        total = total - u[:, row].imag * _integral(h, 1j * v[:, row] * e, *parts)
        lossy = media.n[1][:, row] != 0.0
        decay = first[:, kernels.DECAY] - trace[layer, :, kernels.DECAY]
        count = 400.0 * (halvings(first, p) - halvings(trace[layer + 1], p))
        out[layer] = np.where(lossy, arithmetic.halved(total, decay, count) + 0.0, 0.0)
    return out


def _parts(kappa: ComplexArray, x: FloatArray) -> tuple[FloatArray, FloatArray, ComplexArray]:
    """Return k0 times the integrals of |cos|^2, |S|^2 and cos S*, each times exp(-2 |Im delta|)."""
    alpha, beta = kappa.real, -kappa.imag
    growth, turn = 2.0 * np.abs(beta) * x, 2.0 * alpha * x
    fade = np.exp(-growth)
    size = alpha * alpha + beta * beta
    even = 0.5 * x * (_faded_sinhc(growth) + fade * _sinc(turn))
    with np.errstate(divide="ignore", invalid="ignore"):
        odd = np.where(size > 0.0, 0.5 * x * _faded_difference(growth, turn) / size, x**3 / 3.0)
        cross = alpha * fade * _sinc(0.5 * turn) ** 2 + 1j * beta * _faded_sinhc(0.5 * growth) ** 2
        cross = 0.5 * x * x * np.where(size > 0.0, cross * kappa / size, 1.0)
    return even, np.asarray(odd), np.asarray(cross)


def _integral(a: ComplexArray, b: ComplexArray, even: FloatArray, odd: FloatArray, cross: ComplexArray) -> FloatArray:
    """Return the integral of |cos a + S b|^2."""
    return np.asarray(
        (a.real**2 + a.imag**2) * even + (b.real**2 + b.imag**2) * odd + 2.0 * (a * np.conj(b) * cross).real
    )
