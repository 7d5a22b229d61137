"""Rows of one to three thick plates with films between them, against 50 digits by conservation of flux."""

import mpmath as mp
import numpy as np
import pytest
from truth.plates_reference import solve_plates
from truth.reference import DIGITS

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant


def _random(seed):
    """Return ends, groups of films, plates (thickness in mm), wavelength and angle."""
    rng = np.random.default_rng([seed, 7])
    uniform = rng.uniform

    def film():
        kinds = [
            (uniform(1.3, 4.0), 0.0, uniform(0.0, 300.0)),
            (uniform(1.3, 4.0), 10.0 ** uniform(-8.0, -0.3), uniform(0.0, 300.0)),
            (uniform(0.05, 3.0), uniform(0.5, 6.0), uniform(0.0, 30.0)),
            (uniform(0.5, 1.3), 0.0, uniform(0.0, 100.0)),
        ]
        return tuple(float(x) for x in kinds[rng.integers(4)])

    def slab():
        kinds = [
            (0.0, 1.0),
            (10.0 ** uniform(-9.0, -5.0), 2.0),
            (10.0 ** uniform(-2.0, 0.0), 10.0 ** uniform(-4.0, -3.0)),
        ]
        k, d = kinds[rng.integers(3)]
        return float(uniform(1.55, 4.0)), float(k), float(d)

    count = 1 + seed % 3
    groups = [[film() for _ in range(rng.integers(0, 4))] for _ in range(count + 1)]
    ends = (float(rng.choice([1.0, 1.5])), 0.0), (float(rng.choice([1.0, 1.5])), float(rng.choice([0.0, 0.0, 0.3])))
    angle = float(rng.choice([0.0, uniform(0.0, 89.0), uniform(0.0, 89.0)]))
    return ends, groups, [slab() for _ in range(count)], float(uniform(400.0, 2000.0)), angle


def _stack(ends, groups, plates):
    layers = []
    for j, films in enumerate(groups):
        layers += [fs.Layer(C(n, k), d) for n, k, d in films]
        layers += [fs.Plate(C(n, k), d) for n, k, d in plates[j : j + 1]]
    return fs.Stack(C(*ends[0]), layers, C(*ends[1]))


def _true(ends, groups, plates, wavelength, angle, p):
    with mp.workdps(DIGITS):
        # The package's own conversion to nm rounds once.
        return solve_plates(ends, groups, [(n, k, float(d * 1e6)) for n, k, d in plates], wavelength, angle, p)


@pytest.mark.parametrize("route", ["small", "compiled"])
@pytest.mark.parametrize("seed", range(24))
def test_spectra_and_absorptances(seed, route):
    case = _random(seed)
    with forced(route):
        s = fs.spectrum(_stack(*case[:3]), *case[3:])
    for p, q in ((False, "s"), (True, "p")):
        true = _true(*case, p)
        with mp.workdps(DIGITS):  # of the reference itself
            assert abs(true.R + true.T + mp.fsum(true.films) + mp.fsum(true.plates) - 1) < mp.mpf(10) ** -35
        found = [getattr(s, f"R_{q}")[0, 0], getattr(s, f"T_{q}")[0, 0]]
        found += [*getattr(s, f"A_layers_{q}")[:, 0, 0], *getattr(s, f"A_plates_{q}")[:, 0, 0]]
        for value, wanted in zip(found, [true.R, true.T, *true.films, *true.plates], strict=True):
            # What the reference leaves of an exact 0 are its own last digits.
            assert abs(mp.mpf(float(value)) - wanted) <= 1e-12 * abs(wanted) + mp.mpf(10) ** -40


SLOPES = [seed for seed in range(24) if any(_random(seed)[1])][:4]


@pytest.mark.parametrize("seed", SLOPES)
def test_gradients(seed):
    # One-sided difference of the 50-digit reference with a step of 1e-24: 24 good digits.
    ends, groups, plates, wavelength, angle = _random(seed)
    stack = _stack(ends, groups, plates)
    by_d, by_n = fs.thickness_gradient(stack, wavelength, angle), fs.index_gradient(stack, wavelength, angle)
    places = [(j, i) for j, films in enumerate(groups) for i in range(len(films))]
    for p, q in ((False, "s"), (True, "p")):
        start = _true(ends, groups, plates, wavelength, angle, p)
        for layer, (j, i) in enumerate(places):
            for column, source, suffix in ((0, by_n, "_dn"), (1, by_n, "_dk"), (2, by_d, "")):
                with mp.workdps(DIGITS):
                    h, changed = mp.mpf(10) ** -24, [[list(film) for film in films] for films in groups]
                    changed[j][i][column] = mp.mpf(changed[j][i][column]) + h
                    end = _true(ends, changed, plates, wavelength, angle, p)
                    slopes = {"R": (end.R - start.R) / h, "T": (end.T - start.T) / h}
                for name, wanted in slopes.items():
                    value = mp.mpf(float(getattr(source, f"d{name}_{q}{suffix}")[layer, 0, 0]))
                    assert abs(value - wanted) <= 1e-9 * abs(wanted) + mp.mpf(10) ** -20, (layer, name, q, suffix)


@pytest.mark.parametrize("seed", SLOPES[:2])
def test_needles_of_a_foreign_material_in_all_films(seed):
    ends, groups, plates, wavelength, angle = _random(seed)
    stack = _stack(ends, groups, plates)
    needle = (1.9, 0.05)
    places = [(j, i) for j, films in enumerate(groups) for i in range(len(films))]
    # Depths from the first interface, films counted together, as layer=None gives them.
    found = fs.needle_gradient(stack, wavelength, angle, material=C(*needle))
    assert sorted(set(found.layer.tolist())) == list(range(len(places)))
    for layer, (j, i) in enumerate(places):
        rows = np.flatnonzero(found.layer == layer)
        for row in (rows[0], rows[len(rows) // 3], rows[-1]):
            n, k, d = groups[j][i]
            depth = float(found.depth_nm[row] - found.depth_nm[rows[0]])
            for p, q in ((False, "s"), (True, "p")):
                with mp.workdps(DIGITS):
                    h, ends_ = mp.mpf(10) ** -24, []
                    for thickness in (mp.mpf(0), h):
                        changed = [list(films) for films in groups]
                        back = mp.mpf(d) - mp.mpf(depth)
                        changed[j][i : i + 1] = [(n, k, mp.mpf(depth)), (*needle, thickness), (n, k, back)]
                        ends_.append(_true(ends, changed, plates, wavelength, angle, p))
                    slopes = {name: (getattr(ends_[1], name) - getattr(ends_[0], name)) / h for name in ("R", "T")}
                for name, wanted in slopes.items():
                    value = float(getattr(found, f"d{name}_{q}")[row, 0, 0])
                    # The depth itself is a difference of sums, right to some 1e-13 nm, worth 1e-17 here.
                    assert abs(value - wanted) <= 1e-9 * abs(wanted) + 1e-16, (layer, depth, name, q)
