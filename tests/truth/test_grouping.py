"""One point alone has the same bytes as in any company: IEEE 754 rounds every operation once, whatever stands beside.

Stacks of every kind of film and plate; both routes; spectra, batches and gradients.
"""

import numpy as np
import pytest

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant
WAVELENGTH = np.array([410.0, 550.0, 633.0, 700.5, 1064.0])
ANGLE = np.array([0.0, 1e-7, 30.0, 41.8, 60.0, 89.99, 90.0])
POWERS = ("R", "T", "A", "log10_T", "one_minus_R")
AMPLITUDES = ("r", "t")


def _stack(kind):
    high, low, metal = fs.material("TiO2"), fs.material("SiO2"), fs.material("Ag")
    films = [fs.Layer(high, 57.0), fs.Layer(low, 94.0), fs.Layer(high, 61.0), fs.Layer(C(1.8), 0.0)]
    if kind == "lossless":
        return fs.Stack(C(1.0), [fs.Layer(C(2.35 - 0.9 * (j % 2)), 60.0 + j) for j in range(40)], C(1.52))
    if kind == "dispersive":
        return fs.Stack(C(1.0), films * 5, low)
    if kind == "metal":
        return fs.Stack(C(1.5), [*films, fs.Layer(metal, 23.0), *films], C(1.0))
    if kind == "opaque":
        return fs.Stack(C(1.0), [films[0], fs.Layer(metal, 3e4), films[1]], C(1.5, 0.1))
    if kind == "evanescent":
        return fs.Stack(C(1.5), [fs.Layer(C(1.0), 300.0), fs.Layer(C(2.1), 80.0), fs.Layer(C(0.7), 40.0)] * 9, C(1.5))
    if kind == "empty index":
        return fs.Stack(C(1.0), [films[0], fs.Layer(C(0.0), 20.0), films[1]], C(1.52))
    if kind == "gain":
        return fs.Stack(C(1.0), [films[0], fs.Layer(C(1.7, -0.02, allow_gain=True), 300.0), films[1]], C(1.52))
    plates = [*films, fs.Plate(C(1.52, 1e-7), 1.0), films[0], fs.Plate(C(1.46), 2.0), fs.Layer(metal, 10.0)]
    return fs.Stack(C(1.0), plates, C(1.0))


KINDS = ("lossless", "dispersive", "metal", "opaque", "evanescent", "empty index", "gain", "plates")


def _names(kind):
    names = POWERS if kind == "plates" else POWERS + AMPLITUDES
    return [f"{name}_{q}" for name in names for q in "sp"]


@pytest.mark.parametrize("kind", KINDS)
def test_a_point_alone_on_either_route(kind):
    stack = _stack(kind)
    names = [*_names(kind), "A_layers_s", "A_layers_p", "A_plates_s", "A_plates_p"]
    with forced("small"):
        whole = {name: getattr(fs.spectrum(stack, WAVELENGTH, ANGLE), name) for name in names}
    for route in ("small", "compiled"):
        with forced(route):
            again = fs.spectrum(stack, WAVELENGTH[::-1], ANGLE[::-1])
            for name in names:
                turned = np.ascontiguousarray(getattr(again, name)[..., ::-1, ::-1])
                assert turned.tobytes() == whole[name].tobytes(), (route, name)
            for j, angle in enumerate(ANGLE):
                alone = fs.spectrum(stack, WAVELENGTH[j % 5], angle)
                for name in names:
                    wanted = np.ascontiguousarray(whole[name][..., j, j % 5])
                    assert getattr(alone, name).tobytes() == wanted.tobytes(), (route, name, angle)


@pytest.mark.parametrize("kind", KINDS)
def test_samples_on_either_route(kind):
    stack = _stack(kind)
    d = stack.thickness_nm * (1.0 + 0.05 * np.random.default_rng(4).standard_normal((3, len(stack.films))))
    d[1, 0] = 0.0
    quantities = POWERS if kind == "plates" else POWERS + AMPLITUDES
    for route in ("small", "compiled"):
        with forced(route):
            batch = fs.batch_spectrum(stack, WAVELENGTH, ANGLE, thickness_nm=d, quantities=(*quantities, "A_layers"))
        with forced("small"):
            for sample in range(3):
                single = fs.spectrum(stack.with_thickness(d[sample]), WAVELENGTH, ANGLE)
                for name in _names(kind):
                    found = np.ascontiguousarray(getattr(batch, name)[sample])
                    assert found.tobytes() == getattr(single, name).tobytes(), (route, sample, name)
                for name in ("A_layers_s", "A_layers_p"):
                    found = np.ascontiguousarray(getattr(batch, name)[:, sample])
                    assert found.tobytes() == getattr(single, name).tobytes(), (route, sample, name)


@pytest.mark.parametrize("kind", [kind for kind in KINDS if kind != "empty index"])
def test_gradients_of_a_point_alone_on_either_route(kind):
    stack = _stack(kind)
    names = [f"d{name}_{q}" for name in ("RT" if kind == "plates" else "RTrt") for q in "sp"]

    def gradients(wavelength, angle):
        by_d, by_n = fs.thickness_gradient(stack, wavelength, angle), fs.index_gradient(stack, wavelength, angle)
        needle = fs.needle_gradient(stack, wavelength, angle, material=C(1.9, 0.01), layer=1, depth_nm=[0.0, 11.0])
        found = {name: getattr(by_d, name) for name in names}
        found |= {f"{name}_{x}": getattr(by_n, f"{name}_{x}") for name in names for x in ("dn", "dk")}
        return found | {f"needle {name}": getattr(needle, name) for name in names}

    with forced("small"):
        whole = gradients(WAVELENGTH, ANGLE)
    for route in ("small", "compiled"):
        with forced(route):
            for j, angle in enumerate(ANGLE):
                for name, values in gradients(WAVELENGTH[j % 5], angle).items():
                    wanted = np.ascontiguousarray(whole[name][:, j, j % 5])
                    assert values.tobytes() == wanted.tobytes(), (route, name, angle)
