"""Random stacks of hostile pieces: grazing and critical angles, metals, gain, N = 0, nothing, plates of any kind."""

import numpy as np
import pytest

import filmstack as fs
from filmstack.wave.route import forced

WAVELENGTH, ANGLE = [300.0, 550.0, 1e5], [0.0, 1e-9, 30.0, 45.0, 60.0, 89.9999999, 90.0]
FILMS = [(2.35, 0.0), (1.38, 1e-9), (0.05, 3.3), (0.5, 0.0), (1.0, 0.0), (0.0, 0.0), (1e-8, 5.0), (2.0, 0.5)]
PLATES = [(1.5, 0.0), (1.5, 1e-5), (1.5, 0.1), (0.7, 0.0)]
INCIDENT = [(1.0, 0.0), (1.5, 0.0), (2.0, 1e-5)]
EXIT = [(1.0, 0.0), (1.5, 0.0), (0.05, 3.0), (2.0, 0.1), (0.0, 3.0)]
NAMES = ("R", "T", "A", "log10_T", "one_minus_R")


def _stack(rng, plates):
    def pick(media):
        return fs.constant(*media[rng.integers(len(media))])

    pieces = [
        fs.Layer(pick(FILMS), float(rng.choice([0.0, 1e-6, 50.0, 300.0, 1e6]))) for _ in range(rng.integers(0, 5))
    ]
    for _ in range(plates):
        pieces.insert(rng.integers(len(pieces) + 1), fs.Plate(pick(PLATES), 1.0))
    return fs.Stack(pick(INCIDENT), pieces, pick(EXIT))


@pytest.mark.parametrize("route", ["small", "compiled"])
@pytest.mark.parametrize("plates", [0, 1, 2])
@pytest.mark.parametrize("seed", range(20))
def test_energy_is_kept_and_nothing_warns(seed, plates, route):
    # Conservation of energy: R + T + A = 1. Warnings are errors in this suite.
    stack = _stack(np.random.default_rng(100 * plates + seed), plates)
    with forced(route):
        spectrum = fs.spectrum(stack, WAVELENGTH, ANGLE)
        for p in ("_s", "_p"):
            values = {name: getattr(spectrum, name + p) for name in NAMES}
            assert not any(np.any(np.isnan(value)) for value in values.values())
            np.testing.assert_allclose(values["R"] + values["T"] + values["A"], 1.0, atol=1e-11)
            assert np.all(values["R"] >= 0.0)
            assert np.all(values["T"] >= 0.0)
            with np.errstate(divide="ignore"):
                written = np.log10(values["T"])
            seen = values["T"] > 1e-300
            np.testing.assert_allclose(written[seen], values["log10_T"][seen], atol=1e-11)
        if plates:
            with pytest.raises(fs.CoherenceError):
                _ = spectrum.r_s
        else:
            np.testing.assert_allclose(np.abs(spectrum.r_p) ** 2, spectrum.R_p, atol=1e-11)
        if not any(abs(film.material.index(500.0)) == 0.0 for film in stack.films):
            gradient = fs.thickness_gradient(stack, WAVELENGTH, ANGLE)
            assert np.all(np.isfinite(gradient.dR_s + gradient.dT_p))
            gradient = fs.index_gradient(stack, WAVELENGTH, ANGLE)
            assert np.all(np.isfinite(gradient.dR_p_dn + gradient.dT_s_dk))


def test_gain_in_a_film_amplifies():
    # A film with k < 0 between equal media amplifies on the way: T = exp(-4 pi k d / lambda) without interfaces.
    film = fs.constant(1.0, -1e-3, allow_gain=True)
    for angle, p in ((0.0, "s"), (0.0, "p")):
        spectrum = fs.spectrum(fs.Stack(fs.constant(1.0), [fs.Layer(film, 5000.0)], fs.constant(1.0)), 500.0, angle)
        expected = np.exp(4.0 * np.pi * 1e-3 * 5000.0 / 500.0)
        assert getattr(spectrum, f"T_{p}")[0, 0] == pytest.approx(expected, rel=1e-5)
        assert (spectrum.R_s + spectrum.T_s + spectrum.A_s)[0, 0] == pytest.approx(1.0, abs=1e-12)
        assert spectrum.A_s[0, 0] < 0.0


def test_gain_beyond_loss_between_plates_is_refused():
    film = fs.constant(1.5, -0.01, allow_gain=True)
    stack = fs.Stack(fs.constant(1.0), [fs.Layer(film, 1e5), fs.Plate(fs.constant(1.5), 1.0)], fs.constant(0.05, 3.0))
    with pytest.raises(fs.ArgumentError, match="the gain between its plates exceeds the loss"):
        _ = fs.spectrum(stack, 500.0).R_s
