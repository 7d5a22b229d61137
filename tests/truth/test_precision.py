"""Random stacks against 50 digits by another route, and gradients against high-precision derivatives."""

from functools import cache

import mpmath as mp
import numpy as np
import pytest
from truth.reference import DIGITS, Media, plate, solve

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant
STEP = mp.mpf(10) ** -24


def _random(kind, seed):
    """Return media, wavelength and angle; every number is a double, so both sides see the same input."""
    rng = np.random.default_rng([seed, len(kind)])
    n, k, d = [2.0 if kind in ("evanescent", "mixed") else 1.0], [0.0], [0.0]
    for _ in range(int(rng.integers(1, 40))):
        n.append(float(rng.uniform(1.3, 2.6)))
        k.append(0.0)
        d.append(float(rng.uniform(0.0, 300.0)))
        if kind in ("absorbing", "mixed") and rng.random() < 0.9:
            k[-1] = float(10.0 ** rng.uniform(-8.0, -0.5))
        if kind in ("metal", "mixed") and rng.random() < 0.2:
            n[-1], k[-1], d[-1] = float(rng.uniform(0.05, 2.0)), float(rng.uniform(1.0, 6.0)), float(rng.uniform(2, 40))
        if kind in ("evanescent", "mixed") and rng.random() < 0.3:
            n[-1], d[-1] = float(rng.uniform(0.8, 1.2)), float(rng.uniform(0.0, 150.0))
    n.append(1.52)
    k.append(0.4 if seed % 3 == 0 else 0.0)
    d.append(0.0)
    return Media(n, k, d), float(rng.uniform(400.0, 900.0)), float(rng.choice([0.0, rng.uniform(0.0, 89.9)]))


@cache
def _truths(kind, seed, p):
    """Return the reference at a random stack and next to it, one for both routes."""
    media, wavelength, angle = _random(kind, seed)
    return tuple(solve(m, wavelength, angle, p) for m in (media, _nudged(media)))


def _stack(media):
    layers = [fs.Layer(C(n, k), d) for n, k, d in zip(media.n, media.k, media.d, strict=True)][1:-1]
    return fs.Stack(C(media.n[0], media.k[0]), layers, C(media.n[-1], media.k[-1]))


def _nudged(media):
    """Return the media with every index and thickness moved by one rounding, in a fixed random direction."""
    rng = np.random.default_rng(1)

    def move(values):
        return [float(np.nextafter(x, np.inf if rng.random() < 0.5 else -np.inf)) if x else x for x in values]

    return Media(move(media.n), move(media.k), move(media.d))


KINDS = ["lossless", "absorbing", "metal", "evanescent", "mixed"]


@pytest.mark.parametrize("route", ["small", "compiled"])
@pytest.mark.parametrize("kind", KINDS)
def test_spectra_of_random_stacks(kind, route):
    # 1e-12 relative, or ten times what one rounding of the inputs changes.
    for seed in range(12):
        media, wavelength, angle = _random(kind, seed)
        with forced(route):
            s = fs.spectrum(_stack(media), wavelength, angle)
        for p in (False, True):
            true, near = _truths(kind, seed, p)
            for name in ("r", "t", "R", "T"):
                value = mp.mpmathify(complex(getattr(s, f"{name}_{'p' if p else 's'}")[0, 0]))
                wanted, moved = getattr(true, name), getattr(near, name)
                allowed = max(mp.mpf(10) ** -12 * abs(wanted), 10 * abs(moved - wanted))
                assert abs(value - wanted) <= allowed, (kind, seed, name, p, wavelength, angle)


@pytest.mark.parametrize("route", ["small", "compiled"])
@pytest.mark.parametrize("kind", ["absorbing", "metal", "mixed"])
def test_absorptance_of_each_layer(kind, route):
    # 1e-12 relative, or ten times what one rounding of the inputs changes.
    for seed in range(8):
        media, wavelength, angle = _random(kind, seed)
        with forced(route):
            s = fs.spectrum(_stack(media), wavelength, angle)
        for p, found in ((False, s.A_layers_s), (True, s.A_layers_p)):
            true, near = _truths(kind, seed, p)
            with mp.workdps(DIGITS):  # of the reference itself
                assert abs(true.R + true.T + mp.fsum(true.A) - 1) < mp.mpf(10) ** -30
            for value, wanted, moved in zip(found[:, 0, 0], true.A, near.A, strict=True):
                allowed = max(mp.mpf(10) ** -12 * abs(wanted), 10 * abs(moved - wanted))
                assert abs(mp.mpf(float(value)) - wanted) <= allowed, (seed, p, wavelength, angle)


def test_absorptance_of_a_very_good_mirror():
    # k = 1e-10 in every layer of 40 quarter waves: A about 1e-10 and less, right to 1e-9.
    n = [1.0, *([2.35, 1.45] * 20), 1.52]
    media = Media(n, [0.0, *([1e-10, 1e-12] * 20), 0.0], [0.0, *(550.0 / (4.0 * x) for x in n[1:-1]), 0.0])
    s, true = fs.spectrum(_stack(media), 550.0), solve(media, 550.0, 0.0, False)
    total = sum(true.A)
    assert 1e-12 < total < 1e-9
    assert abs(mp.mpf(float(s.A_s[0, 0])) - total) < 1e-9 * total
    assert abs(mp.mpf(float(s.one_minus_R_s[0, 0])) - (1 - true.R)) < 1e-9 * (1 - true.R)


PLATES = [
    ([(2.35, 0.01, 70.0)], [(1.8, 0.2, 30.0), (1.38, 0.0, 90.0)], (1.52, 1e-6), 1e6),
    ([], [(2.35, 0.0, 60.0)], (1.52, 0.0), 1e6),
    ([(1.38, 0.0, 100.0)], [], (1.5, 0.3), 2000.0),
    ([(2.35, 0.0, 58.5), (1.45, 0.0, 94.8)] * 9, [(2.35, 0.0, 58.5), (1.45, 0.0, 94.8)] * 9, (1.52, 0.0), 1e6),
]


@pytest.mark.parametrize(("front", "back", "glass", "thickness"), PLATES)
def test_thick_plates(front, back, glass, thickness):
    layers = [*(fs.Layer(C(n, k), d) for n, k, d in front), fs.Plate(C(*glass), thickness / 1e6)]
    layers += [fs.Layer(C(n, k), d) for n, k, d in back]
    angles = [0.0, 30.0, 65.0]
    s = fs.spectrum(fs.Stack(C(1.0), layers, C(1.0)), 550.0, angles)
    for j, angle in enumerate(angles):
        for p in (False, True):
            reflected, passed = plate(front, back, glass, thickness, 550.0, angle, p)
            name = "p" if p else "s"
            assert abs(mp.mpf(float(getattr(s, f"R_{name}")[j, 0])) - reflected) <= 1e-12 * reflected
            assert abs(mp.mpf(float(getattr(s, f"T_{name}")[j, 0])) - passed) <= 2e-12 * passed
    np.testing.assert_allclose(s.R_s + s.T_s + s.A_s, 1.0, atol=1e-13)


def test_two_plates_add_ray_by_ray():
    # Ray sum of 1 | 1.5 | 2.2 | 1: closed form (1 - R12)(...) by the series of internal reflections, 0.19512.
    s = fs.spectrum(fs.Stack(C(1.0), [fs.Plate(C(1.5), 1.0), fs.Plate(C(2.2), 1.0)], C(1.0)), 550.0)
    r = [((a - b) / (a + b)) ** 2 for a, b in ((1.0, 1.5), (1.5, 2.2), (2.2, 1.0))]
    behind = r[1] + (1 - r[1]) ** 2 * r[2] / (1 - r[1] * r[2])
    whole = r[0] + (1 - r[0]) ** 2 * behind / (1 - r[0] * behind)
    assert s.R_s[0, 0] == pytest.approx(whole, rel=1e-14)
    assert s.R_s[0, 0] == pytest.approx(0.19512, abs=5e-6)


def _changed(media, layer, **change):
    rows = {"n": list(media.n), "k": list(media.k), "d": list(media.d)}
    for name, value in change.items():
        rows[name][layer + 1] = value
    return Media(**rows)


@pytest.mark.parametrize("kind", KINDS)
def test_gradients_by_thickness_and_index(kind):
    for seed in range(3):
        media, wavelength, angle = _random(kind, seed)
        stack = _stack(media)
        by_d, by_n = fs.thickness_gradient(stack, wavelength, angle), fs.index_gradient(stack, wavelength, angle)
        for layer in range(0, len(stack.films), 4):
            for p in (False, True):
                q = "p" if p else "s"
                found = {name: complex(getattr(by_d, f"d{name}_{q}")[layer, 0, 0]) for name in ("r", "t", "R", "T")}
                _compare(media, layer, "d", wavelength, angle, p, found)
                found = {n: complex(getattr(by_n, f"d{n}_{q}_dn")[layer, 0, 0]) for n in ("r", "t", "R", "T")}
                _compare(media, layer, "n", wavelength, angle, p, found)
                found = {n: complex(getattr(by_n, f"d{n}_{q}_dk")[layer, 0, 0]) for n in ("r", "t", "R", "T")}
                _compare(media, layer, "k", wavelength, angle, p, found)


def _slopes(media, layer, variable, wavelength, angle, p):
    """Differentiate the 50-digit reference by a one-sided difference with a step of 1e-24."""
    with mp.workdps(DIGITS):
        changed = _changed(media, layer, **{variable: mp.mpf(getattr(media, variable)[layer + 1]) + STEP})
        start, end = (solve(m, wavelength, angle, p) for m in (media, changed))
        return {n: (getattr(end, n) - getattr(start, n)) / STEP for n in ("r", "t", "R", "T")}


def _compare(media, layer, variable, wavelength, angle, p, found):
    """Compare to 1e-9, or to ten times what one rounding of the inputs changes."""
    near = None
    for name, wanted in _slopes(media, layer, variable, wavelength, angle, p).items():
        error = abs(mp.mpmathify(found[name]) - wanted)
        if error > mp.mpf(10) ** -9 * abs(wanted) + mp.mpf(10) ** -20:
            near = near or _slopes(_nudged(media), layer, variable, wavelength, angle, p)
            assert error <= 10 * abs(near[name] - wanted), (layer, variable, name, p)


def _with_needle(media, place, depth, needle, thickness):
    """Return the media with a needle at a depth of the medium at `place`, which keeps its thickness."""
    n, k, d = list(media.n), list(media.k), list(media.d)
    n[place : place + 1], k[place : place + 1] = [n[place], needle[0], n[place]], [k[place], needle[1], k[place]]
    d[place : place + 1] = [mp.mpf(depth), thickness, mp.mpf(media.d[place]) - mp.mpf(depth)]
    return Media(n, k, d)


NEEDLES = {5: (1.9, 0.1), 8: (2.5, 0.0)}


@cache
def _needle_slopes(kind, seed, layer, depth, p):
    """Differentiate the 50-digit reference by the thickness of a needle, a layer of 1e-24 nm."""
    media, wavelength, angle = _random(kind, seed)
    with mp.workdps(DIGITS):
        cut = [_with_needle(media, layer + 1, depth, NEEDLES[seed], h) for h in (mp.mpf(0), STEP)]
        start, end = (solve(m, wavelength, angle, p) for m in cut)
        return {n: (getattr(end, n) - getattr(start, n)) / STEP for n in ("r", "t", "R", "T")}


@pytest.mark.parametrize("route", ["small", "compiled"])
@pytest.mark.parametrize("kind", KINDS)
def test_needle_at_any_depth(kind, route):
    for seed, needle in NEEDLES.items():
        media, wavelength, angle = _random(kind, seed)
        for layer in (0, len(media.n) - 3):
            depths = [0.0, 0.4 * media.d[layer + 1], media.d[layer + 1]]
            with forced(route):
                arguments = {"material": C(*needle), "layer": layer, "depth_nm": depths}
                found = fs.needle_gradient(_stack(media), wavelength, angle, **arguments)
            for row, depth in enumerate(depths):
                for p, q in ((False, "s"), (True, "p")):
                    for name, slope in _needle_slopes(kind, seed, layer, depth, p).items():
                        value = mp.mpmathify(complex(getattr(found, f"d{name}_{q}")[row, 0, 0]))
                        assert abs(value - slope) <= 1e-9 * abs(slope) + mp.mpf(10) ** -19, (seed, layer, row, q, name)


def test_needle_of_the_hosts_own_material_is_the_hosts_thickness():
    # Identity: inserting host material thickens the host. With plates too.
    h, low = C(2.35), C(1.46, 1e-3)
    films = [fs.Layer(h, 80.0), fs.Layer(low, 95.0), fs.Layer(h, 60.0)]
    for layers in (films, [*films, fs.Plate(C(1.52, 1e-7), 1.0), *films]):
        stack = fs.Stack(C(1.0), layers, C(1.0 if len(layers) > 3 else 1.52))
        gradient = fs.thickness_gradient(stack, [480.0, 633.0], [0.0, 50.0])
        needle = fs.needle_gradient(stack, [480.0, 633.0], [0.0, 50.0], material=low, layer=1)
        for name in ("dR_s", "dR_p", "dT_s", "dT_p"):
            wanted = np.broadcast_to(getattr(gradient, name)[1], getattr(needle, name).shape)
            np.testing.assert_allclose(getattr(needle, name), wanted, rtol=1e-9, atol=1e-17)
        assert needle.depth_nm[0] == 0.0
        assert needle.depth_nm[-1] == 95.0
        assert set(needle.layer) == {1}


def test_gradients_through_plates():
    # Central differences of the 50-digit ray sum.
    front, back, glass, thickness = PLATES[0]
    layers = [*(fs.Layer(C(n, k), d) for n, k, d in front), fs.Plate(C(*glass), thickness / 1e6)]
    layers += [fs.Layer(C(n, k), d) for n, k, d in back]
    stack, angle = fs.Stack(C(1.0), layers, C(1.0)), 40.0
    by_d, by_n = fs.thickness_gradient(stack, 550.0, angle), fs.index_gradient(stack, 550.0, angle)
    for layer in range(3):
        for column, found in ((2, by_d), (0, by_n), (1, by_n)):
            with mp.workdps(DIGITS):
                h, ends = mp.mpf(10) ** -15, []
                for sign in (1, -1):
                    rows = [list(row) for row in (*front, *back)]
                    rows[layer][column] = mp.mpf(rows[layer][column]) + sign * h
                    ends += [plate(rows[:1], rows[1:], glass, thickness, 550.0, angle, p) for p in (False, True)]
                for p in (False, True):
                    slopes = [(ends[p][j] - ends[2 + p][j]) / (2 * h) for j in (0, 1)]
                    for name, wanted in zip(("R", "T"), slopes, strict=True):
                        key = f"d{name}_{'p' if p else 's'}" + ("", "_dn", "_dk")[(2, 0, 1).index(column)]
                        value = mp.mpf(float(getattr(found, key)[layer, 0, 0]))
                        assert abs(value - wanted) <= 1e-9 * abs(wanted) + 1e-18, (layer, key)
