"""The kernels of the engine, written once for compiled and for array work.

Every function here is plain Python over numbers that may be scalars or whole arrays, with
+ - * / and comparisons on reals only. `filmstack.wave.compiled` compiles a copy in which a point
index `i` walks over the points of a tile; `filmstack.wave.route` runs the functions as they stand,
with TILE = 1, one point index and an array in every cell. Both do the same operations in the same
order, so both give the same bytes. For the same reason no formula may use complex numbers,
`abs` of a complex, fused operations or a library function that rounds in its own way.

A point is one (angle, wavelength). Per point and polarization the wave is the pair (E, H) of
tangential fields, four reals: Re E, Im H, Re H, Im E. With S = sin(delta) / kappa a layer maps

    E' = cos(delta) E + i u S H,      H' = i v S E + cos(delta) H.

Fields vary as exp(+i omega t). A new kernel is a function here and one name in `COMPILED`.
"""

from __future__ import annotations

from typing import Any

from filmstack.wave.arithmetic import exponential_minus_1, halved, rescaled, sine_cosine

TILE = 1
"""Points in a row of scratch; the compiled copy has its own constant."""

# Rows of a state, each TILE long: s, then p, then what was factored out of both.
STATE_ROWS = 12
TURNS, DECAY, SCALE_S, SCALE_P = 8, 9, 10, 11

# Rows of a lossless medium and of an absorbing or evanescent one.
QUARTERS, INVERSE, V_S, U_P, V_P, LOSSLESS_ROWS = 0, 1, 2, 3, 4, 5
DAMPING, INVERSE_IM, ZERO, V_S_IM, U_P_IM, V_P_IM, LOSSY_ROWS = 5, 6, 7, 8, 9, 10, 11

# Rows of the end media: exit fields (s, p), incident pair (s, p), flux of T, closed exit.
EXIT_S, EXIT_P, INCIDENT_S, INCIDENT_P, FLUX_S, FLUX_P, CLOSED, END_ROWS = 0, 4, 8, 10, 12, 13, 14, 15

RESCALE_EVERY = 16

COMPILED = (
    "lossless_step",
    "lossy_step",
    "phase_lossy",
    "lossless_layer",
    "lossy_layer",
    "rescale",
    "start",
    "powers",
    "write_powers",
    "write_state",
    "run_lossless",
    "run_lossy",
    "quadratic",
    "bilinear",
    "gradient_rows",
    "run_gradient",
)
"""Functions of the compiled copy, each after those it calls."""


def lossless_step(c: Any, us: Any, vs: Any, er: Any, hi: Any, hr: Any, ei: Any) -> tuple[Any, Any, Any, Any]:
    """Carry (E, H) over a layer of real cos(delta), u S and v S."""
    return c * er - us * hi, c * hi + vs * er, c * hr - vs * ei, c * ei + us * hr


def lossy_step(
    cr: Any, ci: Any, ur: Any, ui: Any, vr: Any, vi: Any, er: Any, hi: Any, hr: Any, ei: Any
) -> tuple[Any, Any, Any, Any]:
    """Carry (E, H) over a layer of complex cos(delta), u S and v S."""
    return (
        (cr * er - ci * ei) - (ur * hi + ui * hr),
        (cr * hi + ci * hr) + (vr * er - vi * ei),
        (cr * hr - ci * hi) - (vr * ei + vi * er),
        (cr * ei + ci * er) + (ur * hr - ui * hi),
    )


def phase_lossy(
    quarters: Any, damping: Any, inverse_re: Any, inverse_im: Any, zero: Any, d: Any
) -> tuple[Any, Any, Any, Any, Any, Any]:
    """Return Re and Im of cos(delta) and of S, both over exp|Im delta|, then the turns and 2 |Im delta|."""
    s, c, turns = sine_cosine(quarters * d)
    y = damping * d
    e = exponential_minus_1(-y)
    ch, sh = 1.0 + 0.5 * e, -0.5 * e
    sr, si = s * ch, -(c * sh)
    return (
        c * ch,
        s * sh,
        (sr * inverse_re - si * inverse_im) + zero * d,
        sr * inverse_im + si * inverse_re,
        turns,
        y,
    )


def lossless_layer(points: int, row: Any, d: Any, state: Any, both: bool) -> None:
    """Carry a state over one lossless layer in which the wave propagates."""
    for i in range(points):
        s, c, turns = sine_cosine(row[QUARTERS * TILE + i] * d)
        state[TURNS * TILE + i] = state[TURNS * TILE + i] + turns
        s = s * row[INVERSE * TILE + i]
        v = row[V_S * TILE + i] * s
        er, hi, hr, ei = state[i], state[TILE + i], state[2 * TILE + i], state[3 * TILE + i]
        er, hi, hr, ei = lossless_step(c, s, v, er, hi, hr, ei)
        state[i], state[TILE + i], state[2 * TILE + i], state[3 * TILE + i] = er, hi, hr, ei
        if both:
            u, v = row[U_P * TILE + i] * s, row[V_P * TILE + i] * s
            er, hi, hr, ei = state[4 * TILE + i], state[5 * TILE + i], state[6 * TILE + i], state[7 * TILE + i]
            er, hi, hr, ei = lossless_step(c, u, v, er, hi, hr, ei)
            state[4 * TILE + i], state[5 * TILE + i], state[6 * TILE + i], state[7 * TILE + i] = er, hi, hr, ei


def lossy_layer(points: int, row: Any, d: Any, state: Any, both: bool) -> None:
    """Carry a state over one layer that absorbs, amplifies or is evanescent."""
    for i in range(points):
        cr, ci, sr, si, turns, y = phase_lossy(
            row[QUARTERS * TILE + i],
            row[DAMPING * TILE + i],
            row[INVERSE * TILE + i],
            row[INVERSE_IM * TILE + i],
            row[ZERO * TILE + i],
            d,
        )
        state[TURNS * TILE + i] = state[TURNS * TILE + i] + turns
        state[DECAY * TILE + i] = state[DECAY * TILE + i] + y
        xr, xi = row[V_S * TILE + i], row[V_S_IM * TILE + i]
        vr, vi = xr * sr - xi * si, xr * si + xi * sr
        er, hi, hr, ei = state[i], state[TILE + i], state[2 * TILE + i], state[3 * TILE + i]
        er, hi, hr, ei = lossy_step(cr, ci, sr, si, vr, vi, er, hi, hr, ei)
        state[i], state[TILE + i], state[2 * TILE + i], state[3 * TILE + i] = er, hi, hr, ei
        if both:
            xr, xi = row[U_P * TILE + i], row[U_P_IM * TILE + i]
            ur, ui = xr * sr - xi * si, xr * si + xi * sr
            xr, xi = row[V_P * TILE + i], row[V_P_IM * TILE + i]
            vr, vi = xr * sr - xi * si, xr * si + xi * sr
            er, hi, hr, ei = state[4 * TILE + i], state[5 * TILE + i], state[6 * TILE + i], state[7 * TILE + i]
            er, hi, hr, ei = lossy_step(cr, ci, ur, ui, vr, vi, er, hi, hr, ei)
            state[4 * TILE + i], state[5 * TILE + i], state[6 * TILE + i], state[7 * TILE + i] = er, hi, hr, ei


def rescale(points: int, state: Any, both: bool) -> None:
    """Bring a state back to the middle of the range by exact powers of two, and count them."""
    for i in range(points):
        er, hi, hr, ei = state[i], state[TILE + i], state[2 * TILE + i], state[3 * TILE + i]
        factor, count = rescaled(abs(er) + abs(hi) + abs(hr) + abs(ei))
        state[i], state[TILE + i] = er * factor, hi * factor
        state[2 * TILE + i], state[3 * TILE + i] = hr * factor, ei * factor
        state[SCALE_S * TILE + i] = state[SCALE_S * TILE + i] + count
        if both:
            er, hi, hr, ei = state[4 * TILE + i], state[5 * TILE + i], state[6 * TILE + i], state[7 * TILE + i]
            factor, count = rescaled(abs(er) + abs(hi) + abs(hr) + abs(ei))
            state[4 * TILE + i], state[5 * TILE + i] = er * factor, hi * factor
            state[6 * TILE + i], state[7 * TILE + i] = hr * factor, ei * factor
            state[SCALE_P * TILE + i] = state[SCALE_P * TILE + i] + count


def start(points: int, end: Any, state: Any) -> None:
    """Put the fields at the exit into a state."""
    for i in range(points):
        for k in range(8):
            state[k * TILE + i] = end[k * TILE + i]
        for k in range(8, STATE_ROWS):
            state[k * TILE + i] = 0.0


def powers(a1: Any, a2: Any, flux: Any, closed: Any, er: Any, hi: Any, hr: Any, ei: Any, y: Any, n: Any) -> Any:
    """Return R and T of one polarization from the fields at the first interface."""
    dr, di = a1 * er + a2 * hr, a1 * ei + a2 * hi
    nr, ni = a1 * er - a2 * hr, a1 * ei - a2 * hi
    size = (dr * dr + di * di) * (1.0 - closed) + closed
    reflectance = (nr * nr + ni * ni) / size
    return reflectance * (1.0 - closed) + closed, halved(flux / size, y, 400.0 * n)


def write_powers(points: int, first: int, sample: int, end: Any, state: Any, out: Any, both: bool) -> None:
    """Write R_s, T_s (and R_p, T_p) of a tile."""
    for i in range(points):
        y, closed = state[DECAY * TILE + i], end[CLOSED * TILE + i]
        a1, a2 = end[INCIDENT_S * TILE + i], end[(INCIDENT_S + 1) * TILE + i]
        er, hi, hr, ei = state[i], state[TILE + i], state[2 * TILE + i], state[3 * TILE + i]
        r, t = powers(a1, a2, end[FLUX_S * TILE + i], closed, er, hi, hr, ei, y, state[SCALE_S * TILE + i])
        out[0, sample, first + i], out[1, sample, first + i] = r, t
        if both:
            a1, a2 = end[INCIDENT_P * TILE + i], end[(INCIDENT_P + 1) * TILE + i]
            er, hi, hr, ei = state[4 * TILE + i], state[5 * TILE + i], state[6 * TILE + i], state[7 * TILE + i]
            r, t = powers(a1, a2, end[FLUX_P * TILE + i], closed, er, hi, hr, ei, y, state[SCALE_P * TILE + i])
            out[2, sample, first + i], out[3, sample, first + i] = r, t


def write_state(points: int, first: int, sample: int, state: Any, trace: Any) -> None:
    """Write the whole state of a tile."""
    for k in range(STATE_ROWS):
        for i in range(points):
            trace[sample, k, first + i] = state[k * TILE + i]


def run_lossless(
    work: Any,
    tiles: Any,
    order: Any,
    thickness: Any,
    media: Any,
    ends: Any,
    state: Any,
    out: Any,
    trace: Any,
    both: bool,
) -> None:
    """Compute a block of samples for lossless layers in which the wave propagates.

    Parameters
    ----------
    work : (int, int, int, int)
        First and last sample, first and last tile (the last ones excluded).
    tiles : sequence of (int, int)
        First point of each tile and how many it has.
    order : sequence of int, shape (layer,)
        Row of `media` of each layer, the layer next to the incident medium first.
    thickness : array, shape (sample, layer)
        Thickness. [nm]
    media, ends : array, shape (1 or sample, tile, medium, row * TILE) and (1 or sample, tile, row * TILE)
        What `filmstack.wave.media` prepared.
    state : array, shape (STATE_ROWS * TILE,)
        Scratch.
    out : array, shape (4, sample, point)
        R_s, T_s, R_p, T_p, written where `trace` has no level.
    trace : array, shape (level, sample, STATE_ROWS, point)
        No level; one, the fields at the first interface; or layer + 1, those in front of each
        layer and at the exit.
    both : bool
        Also p; at normal incidence p is s and need not be computed.
    """
    first_sample, last_sample, first_tile, last_tile = work
    layers, levels = len(order), len(trace)
    step_media, step_ends = min(1, len(media) - 1), min(1, len(ends) - 1)
    for tile in range(first_tile, last_tile):
        first, points = tiles[tile]
        for sample in range(first_sample, last_sample):
            end = ends[sample * step_ends, tile]
            start(points, end, state)
            for j in range(layers - 1, -1, -1):
                if levels > 1:
                    write_state(points, first, sample, state, trace[j + 1])
                lossless_layer(points, media[sample * step_media, tile, order[j]], thickness[sample, j], state, both)
                if (layers - j) % RESCALE_EVERY == 0:
                    rescale(points, state, both)
            if levels == 0:
                write_powers(points, first, sample, end, state, out, both)
            else:
                write_state(points, first, sample, state, trace[0])


def run_lossy(
    work: Any,
    tiles: Any,
    order: Any,
    thickness: Any,
    media: Any,
    ends: Any,
    state: Any,
    out: Any,
    trace: Any,
    both: bool,
) -> None:
    """Compute a block of samples for any layers; parameters as in `run_lossless`."""
    first_sample, last_sample, first_tile, last_tile = work
    layers, levels = len(order), len(trace)
    step_media, step_ends = min(1, len(media) - 1), min(1, len(ends) - 1)
    for tile in range(first_tile, last_tile):
        first, points = tiles[tile]
        for sample in range(first_sample, last_sample):
            end = ends[sample * step_ends, tile]
            start(points, end, state)
            for j in range(layers - 1, -1, -1):
                if levels > 1:
                    write_state(points, first, sample, state, trace[j + 1])
                lossy_layer(points, media[sample * step_media, tile, order[j]], thickness[sample, j], state, both)
                if (layers - j) % RESCALE_EVERY == 0:
                    rescale(points, state, both)
            if levels == 0:
                write_powers(points, first, sample, end, state, out, both)
            else:
                write_state(points, first, sample, state, trace[0])


# Rows of a gradient's front: factors of the quadratic and of the bilinear form, the shares of dR and dT
# that come from either, and the exponents; per polarization.
FORM_QUADRATIC, FORM_BILINEAR, SHARES, FRONT_SCALE, FRONT_DECAY, FRONT_ROWS = 0, 2, 4, 8, 9, 10


def quadratic(er: Any, ei: Any, hr: Any, hi: Any, ur: Any, ui: Any, vr: Any, vi: Any) -> tuple[Any, Any]:
    """Return v E^2 - u H^2: by reciprocity what a thickness does to r."""
    xr, xi = er * er - ei * ei, 2.0 * er * ei
    yr, yi = hr * hr - hi * hi, 2.0 * hr * hi
    return (vr * xr - vi * xi) - (ur * yr - ui * yi), (vr * xi + vi * xr) - (ur * yi + ui * yr)


def bilinear(
    er: Any, ei: Any, hr: Any, hi: Any, fr: Any, fi: Any, gr: Any, gi: Any, ur: Any, ui: Any, vr: Any, vi: Any
) -> tuple[Any, Any]:
    """Return u w0 H + v w1 E with w1 = f, w0 = g: what a thickness does to 1 / t."""
    xr, xi = gr * hr - gi * hi, gr * hi + gi * hr
    yr, yi = fr * er - fi * ei, fr * ei + fi * er
    return (ur * xr - ui * xi) + (vr * yr - vi * yi), (ur * xi + ui * xr) + (vr * yi + vi * yr)


def gradient_rows(
    points: int,
    p: int,
    layer: int,
    psi: Any,
    behind: Any,
    w: Any,
    medium: Any,
    front: Any,
    out: Any,
    powers: bool,
    scaled: bool,
) -> None:
    """Write one layer's dR, dT, or dr and d ln(1/t), of one polarization (p = 0 or 1).

    Both forms are the same at every depth of the layer. The quadratic one is taken at its back face, where the
    forward and the backward wave are of one size: at the front of an opaque film it would cancel.
    """
    k, f, o = 4 * p, FRONT_ROWS * p, (2 if powers else 4) * p
    for i in range(points):
        er, hi, hr, ei = behind[k, i], behind[k + 1, i], behind[k + 2, i], behind[k + 3, i]
        fr, gi, gr, fi = w[k, i], w[k + 1, i], w[k + 2, i], w[k + 3, i]
        ur, ui, vr, vi = medium[k, i], medium[k + 1, i], medium[k + 2, i], medium[k + 3, i]
        qr, qi = quadratic(er, ei, hr, hi, ur, ui, vr, vi)
        er, hi, hr, ei = psi[k, i], psi[k + 1, i], psi[k + 2, i], psi[k + 3, i]
        zr, zi = bilinear(er, ei, hr, hi, fr, fi, gr, gi, ur, ui, vr, vi)
        ar, ai = front[f + FORM_QUADRATIC, i], front[f + FORM_QUADRATIC + 1, i]
        br, bi = front[f + FORM_BILINEAR, i], front[f + FORM_BILINEAR + 1, i]
        a_re, a_im = ar * qr - ai * qi, ar * qi + ai * qr
        b_re, b_im = br * zr - bi * zi, br * zi + bi * zr
        if scaled:
            n, m, n0 = behind[SCALE_S + p, i], w[SCALE_S + p, i], front[f + FRONT_SCALE, i]
            y = front[f + FRONT_DECAY, i] - behind[DECAY, i]
            y = y * ((y > 0.0) * 1.0)
            a_re, a_im = halved(a_re, y, 400.0 * (n0 - n)), halved(a_im, y, 400.0 * (n0 - n))
            n = psi[SCALE_S + p, i]
            b_re, b_im = halved(b_re, 0.0 * y, 200.0 * (n0 - n - m)), halved(b_im, 0.0 * y, 200.0 * (n0 - n - m))
        if powers:
            out[o, layer, i] = front[f + SHARES, i] * a_re + front[f + SHARES + 1, i] * b_re
            out[o + 1, layer, i] = front[f + SHARES + 2, i] * b_re + front[f + SHARES + 3, i] * a_re
        else:
            out[o, layer, i], out[o + 1, layer, i] = a_re, a_im
            out[o + 2, layer, i], out[o + 3, layer, i] = b_re, b_im


def run_gradient(
    work: Any,
    points: int,
    order: Any,
    trace: Any,
    back: Any,
    media: Any,
    front: Any,
    out: Any,
    powers: bool,
    scaled: bool,
    both: bool,
) -> None:
    """Compute the thickness gradients of a block of layers.

    Parameters
    ----------
    work : (int, int)
        First and last layer (the last excluded).
    points : int
        Number of points.
    order : sequence of int, shape (layer,)
        Row of `media` of each layer.
    trace, back : array, shape (layer + 1, 1, STATE_ROWS, point)
        Fields in front of each layer; the row vector (w0, w1) = (a1, a2) carried from the first
        interface, level counted from the exit.
    media : array, shape (medium, 8, point)
        u and v of s, then of p, real and imaginary part.
    front : array, shape (2 FRONT_ROWS, point)
        Factors, per polarization.
    out : array, shape (4 or 8, layer, point)
        dR_s, dT_s, dR_p, dT_p, or dr and d ln(1/t) as pairs of reals.
    powers, scaled, both : bool
        dR and dT instead of amplitudes; some power of two or decay was taken out; also p.
    """
    layers = len(order)
    first, last = work
    for j in range(first, last):
        psi, behind, w, medium = trace[j, 0], trace[j + 1, 0], back[layers - j, 0], media[order[j]]
        gradient_rows(points, 0, j, psi, behind, w, medium, front, out, powers, scaled)
        if both:
            gradient_rows(points, 1, j, psi, behind, w, medium, front, out, powers, scaled)
