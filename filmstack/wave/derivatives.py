"""Derivatives by thickness and index from one forward and one backward pass: `route` -> here -> `analysis.gradients`.

With the fields (E, H) in front of a layer and the row vector (w0, w1) that carries them to the
first interface, an extra dd of a medium (u, v) changes

    r by -2i k0 a1 a2 (v E^2 - u H^2) / D^2,      ln t by -i k0 (u w0 H + v w1 E) / D,

the first by reciprocity, without the cancellation of d(num / D). D = a1 E0 + a2 H0.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from filmstack.wave import arithmetic, kernels
from filmstack.wave.finish import Front, as_complex, fields, halvings
from filmstack.wave.media import Ends, Media, Pair, over, times
from filmstack.wave.route import BLOCK_CELLS, WORTH_SHARING, Group, compiler_pays, dark, states
from filmstack.work.pool import run_blocks

if TYPE_CHECKING:
    from filmstack.arraytypes import ComplexArray, FloatArray, IntArray


class RowStart(Ends):
    """Start values of the row vector (w0, w1) = (a1, a2), in the places of H and E."""

    def exit_fields(self, p: bool) -> tuple[Pair, Pair]:
        """Return (w1, w0)."""
        a1, a2 = self.incident_pair(p)
        return a2, a1


@dataclass(frozen=True)
class Passes:
    """Both passes through a group of one sample.

    Parameters
    ----------
    group : Group
        The films; one sample.
    """

    group: Group

    @cached_property
    def trace(self) -> FloatArray:
        """Fields in front of each layer and at the exit, shape (layer + 1, 1, STATE_ROWS, point)."""
        return states(self.group, every_layer=True)

    @cached_property
    def back(self) -> FloatArray:
        """Row vectors, level layer - j in front of layer j."""
        group, ends = self.group, self.group.ends
        start = RowStart(ends.incident, ends.exit, ends.direction, ends.outer)
        turned = replace(group, ends=start, order=group.order[::-1], thickness=group.thickness[:, ::-1])
        return states(turned, every_layer=True)

    def front(self, p: bool) -> Front:
        """Return the solved first interface."""
        return Front(self.group.ends, self.trace[0], p, dark(self.group))

    def factors(self, p: bool) -> tuple[Pair, Pair]:
        """Return -2i k0 a1 a2 / D^2 and i k0 / D, with the stored D."""
        front = self.front(p)
        k0 = self.group.media.k0 * np.ones_like(front.size)
        a1, a2 = self.group.ends.incident_pair(p)
        d = (np.where(front.grazing, 1.0, front.waves[0][0]), np.where(front.grazing, 0.0, front.waves[0][1]))
        product = times(a1, a2)
        nothing = np.zeros_like(k0)
        quadratic = over((2.0 * k0 * product[1], -2.0 * k0 * product[0]), times(d, d))
        return quadratic, over((nothing, k0), d)

    def _rows(self, p: bool, powers: bool) -> list[FloatArray]:
        """Return the rows of a gradient's front of one polarization."""
        front = self.front(p)
        quadratic, bilinear = self.factors(p)
        one = np.ones_like(front.size)
        shares = [one, 0.0 * one, one, 0.0 * one]
        if powers:
            r = front.r
            reflectance = r[0] * r[0] + r[1] * r[1]
            transmittance = front.part(self.group.ends.flux(p))
            quadratic = times((2.0 * r[0], -2.0 * r[1]), quadratic)
            bilinear = (-2.0 * transmittance * bilinear[0], -2.0 * transmittance * bilinear[1])
            lossless = self.group.media.lossless & (front.ends.exit[1] == 0.0)
            low, high = lossless & (transmittance < reflectance), lossless & ~(transmittance < reflectance)
            shares = [
                np.where(low, 0.0, one),
                np.where(low, -one, 0.0),
                np.where(high, 0.0, one),
                np.where(high, -one, 0.0),
            ]
        state = self.trace[0]
        rows = [*quadratic, *bilinear, *shares, halvings(state, p), state[:, kernels.DECAY]]
        return [np.where(front.grazing[0], 0.0, row[0]) for row in rows]

    def thickness(self, powers: bool) -> FloatArray:
        """Return dR_s, dT_s, dR_p, dT_p, or dr and d ln(1/t) of s and p as pairs of reals.

        Returns
        -------
        ndarray, shape (4 or 8, layer, point)
        """
        group = self.group
        layers, points = len(group.order), group.shape[1]
        if not layers:
            return np.empty((4 if powers else 8, 0, points))
        with np.errstate(divide="ignore", invalid="ignore"):
            front = np.stack(self._rows(False, powers) + self._rows(True, powers))
        media = self.media_rows(group.media)
        out = np.empty((4 if powers else 8, layers, points))
        scaled = bool(np.any(self.trace[:, :, kernels.DECAY :]) or np.any(self.back[:, :, kernels.SCALE_S :]))
        if compiler_pays(layers * points):
            self._compiled(media, front, out, powers, scaled)
        else:
            kernels.run_gradient(
                (0, layers),
                1,
                group.order,
                self.trace[:, :, :, np.newaxis],
                self.back[:, :, :, np.newaxis],
                media[:, :, np.newaxis],
                front[:, np.newaxis],
                out[:, :, np.newaxis],
                powers,
                scaled,
                group.oblique,
            )
        if not group.oblique:
            out[len(out) // 2 :] = out[: len(out) // 2]
        return out

    def _compiled(self, media: FloatArray, front: FloatArray, out: FloatArray, powers: bool, scaled: bool) -> None:
        from filmstack.wave.compiled import FUNCTIONS

        group = self.group
        layers, points = len(group.order), group.shape[1]
        order: IntArray = np.ascontiguousarray(group.order)
        many = layers if layers * points < WORTH_SHARING else max(1, min(BLOCK_CELLS // points, -(-layers // 8)))

        def do(work: tuple[int, int]) -> None:
            run = FUNCTIONS["run_gradient"]
            run(work, points, order, self.trace, self.back, media, front, out, powers, scaled, group.oblique)

        run_blocks(do, ((a, min(a + many, layers)) for a in range(0, layers, many)))

    @staticmethod
    def media_rows(media: Media) -> FloatArray:
        """Return u and v of s, then p, shape (medium, 8, point)."""
        one = np.ones_like(media.n[0])
        rows = [one, np.zeros_like(one), *media.v_s, *media.u_p, *media.v_p]
        return np.ascontiguousarray(np.stack(rows, axis=2)[0])

    def forms(
        self, level: int, host: int, host_back: int, p: bool, u: ComplexArray, v: ComplexArray
    ) -> tuple[ComplexArray, ComplexArray]:
        """Return dr and d ln(1/t) per nm of a medium (u, v) inserted at an interface of a host, shape (point,).

        What the host itself would do is taken at its back face (level `host_back`), the rest at the interface.
        """
        row = int(self.group.order[host])
        own_v = as_complex(self.group.media.v_p if p else self.group.media.v_s)[0, row]
        own_u = as_complex(self.group.media.u_p)[0, row] if p else np.ones_like(own_v)
        e, h, w0, w1 = self._waves(level, level, p)
        behind_e, behind_h, _, _ = self._waves(host_back, level, p)
        quadratic, bilinear = (as_complex(pair)[0] for pair in self.factors(p))
        square, product = self._scales(level, level, level, p)
        own_square, _ = self._scales(host_back, host_back, level, p)
        change = square * ((v - own_v) * e * e - (u - own_u) * h * h)
        own = own_square * (own_v * behind_e * behind_e - own_u * behind_h * behind_h)
        return quadratic * (change + own), product * bilinear * (u * w0 * h + v * w1 * e)

    def index(self, layer: int, p: bool) -> tuple[ComplexArray, ComplexArray]:
        """Return dr/dN and d ln(1/t)/dN of a layer, shape (point,)."""
        media, row = self.group.media, int(self.group.order[layer])
        n = as_complex(media.n)[0, row]
        v = as_complex(media.v_p if p else media.v_s)[0, row]
        u = as_complex(media.u_p)[0, row] if p else np.ones_like(v)
        with np.errstate(divide="ignore", invalid="ignore"):
            du = 2.0 * media.direction.b[0] ** 2 / n**3 if p else np.zeros_like(v)
        du = np.where(media.direction.straight[0], 0.0, du)
        dv = 2.0 * n
        e, h, w0, w1 = self._waves(layer + 1, layer, p)
        quadratic, bilinear = (as_complex(pair)[0] for pair in self.factors(p))
        square, product = self._scales(layer, layer + 1, layer, p)
        kappa, d = as_complex(media.kappa)[0, row], self.group.thickness[0, layer]
        cc, ss, cs, fcc, fss, fcs = layer_integrals(kappa, media.k0, d)
        e2 = e * e * cc + 2j * u * e * h * cs - u * u * h * h * ss
        h2 = h * h * cc + 2j * v * e * h * cs - v * v * e * e * ss
        we = w1 * e * fcc + 1j * u * (w1 * h + w0 * e) * fcs - u * u * w0 * h * fss
        wh = w0 * h * fcc + 1j * v * (w0 * e + w1 * h) * fcs - v * v * w1 * e * fss
        return square * quadratic * (dv * e2 - du * h2), product * bilinear * (du * wh + dv * we)

    def _waves(
        self, level: int, row_level: int, p: bool
    ) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
        """Return the stored E, H of one level and w0, w1 of another, shape (point,)."""
        e, h = (as_complex(pair)[0] for pair in fields(self.trace[level], p))
        w1, w0 = (as_complex(pair)[0] for pair in fields(self.back[len(self.group.order) - row_level], p))
        return e, h, w0, w1

    def _scales(self, decay_level: int, level: int, row_level: int, p: bool) -> tuple[FloatArray, FloatArray]:
        """Return what makes E^2 / D^2 and w E / D of the stored values true, shape (point,).

        The decays of both passes and of the layer between add up to that of D; signs (-1)^turns
        matter in the second product only.
        """
        first, ahead = self.trace[0], self.trace[level]
        behind = self.back[len(self.group.order) - row_level]
        decay = np.maximum((first[:, kernels.DECAY] - self.trace[decay_level, :, kernels.DECAY])[0], 0.0)
        one = np.ones_like(decay)
        count = (halvings(first, p) - halvings(ahead, p))[0]
        square = arithmetic.halved(one, decay, 400.0 * count)
        turns = (first - ahead - behind)[0, kernels.TURNS]
        product = arithmetic.halved(one, 0.0 * decay, 200.0 * (count - halvings(behind, p)[0]))
        return np.asarray(square), np.asarray(product) * (1.0 - 2.0 * np.mod(turns, 2.0))


def faded_cosine_sine(
    kappa: ComplexArray, k0: FloatArray, d: float | FloatArray
) -> tuple[ComplexArray, ComplexArray, FloatArray]:
    """Return cos(delta) and sin(delta), both over exp|Im delta|, and exp(-2 |Im delta|)."""
    turn = (2.0 / np.pi) * kappa.real * k0 * d
    s, c, turns = arithmetic.sine_cosine(turn)
    sign = 1.0 - 2.0 * np.mod(turns, 2.0)
    e = arithmetic.exponential_minus_1(2.0 * kappa.imag * k0 * d)
    ch, sh = 1.0 + 0.5 * e, -0.5 * e
    return sign * (c * ch + 1j * (s * sh)), sign * (s * ch - 1j * (c * sh)), 1.0 + e


def layer_integrals(kappa: ComplexArray, k0: FloatArray, d: float) -> tuple[ComplexArray, ...]:
    """Return the integrals over a layer that an index derivative needs, in nm.

    With C = cos(kappa k0 z) and S = sin(kappa k0 z) / kappa: of C^2, S^2 and C S, over exp(2 |Im delta|),
    and of C(z) C(d - z), S(z) S(d - z) and C(z) S(d - z), over exp|Im delta|.
    """
    cosine, sine, fade = faded_cosine_sine(kappa, k0, d)
    delta = kappa * k0 * d
    square = kappa * kappa
    small = np.abs(delta) < 0.4
    safe = np.where(small, 1.0, delta)
    inverse = np.where(small, 1.0, square)
    x: ComplexArray = np.where(small, delta, 0.0) ** 2
    plain = np.asarray(np.exp(-np.abs(delta.imag)), dtype=complex)
    sinc = np.where(small, plain * _sum(x, 0), sine / safe)
    sinc_2 = np.where(small, plain**2 * _sum(4.0 * x, 0), sine * cosine / safe)
    cube = 0.5 * d * (k0 * d) ** 2
    rows = (
        0.5 * d * (fade + sinc_2),
        np.where(small, 4.0 * cube * plain**2 * _sum(4.0 * x, 1), 0.5 * d * (fade - sinc_2) / inverse),
        0.5 * k0 * d * d * sinc * sinc,
        0.5 * d * (cosine + sinc),
        np.where(small, cube * plain * _sum(x, 2), 0.5 * d * (sinc - cosine) / inverse),
        0.5 * k0 * d * d * sinc,
    )
    return tuple(np.asarray(row, dtype=complex) for row in rows)


def _sum(x: ComplexArray, kind: int) -> ComplexArray:
    """Return a power series in x = delta^2.

    Of sin/delta (kind 0), (1 - sin/delta)/delta^2 (1), (sin/delta - cos)/delta^2 (2).
    """
    total, term = np.zeros_like(x), np.ones_like(x)
    for k in range(12):
        if kind == 0:
            total = total + term / (2 * k + 1)
        elif kind == 1:
            total = total + term / ((2 * k + 1) * (2 * k + 2) * (2 * k + 3))
        else:
            total = total + term * (2 * k + 2) / ((2 * k + 1) * (2 * k + 2) * (2 * k + 3))
        term = -term * x / ((2 * k + 1) * (2 * k + 2))
    return total
