"""The arithmetic of the kernels against mpmath, and the two ways to run it against each other."""

import mpmath as mp
import numpy as np
import pytest

import filmstack as fs
from filmstack.wave import arithmetic
from filmstack.wave.derivatives import layer_integrals
from filmstack.wave.route import forced


def test_sine_and_cosine_are_right_to_1e_16_with_their_signs():
    # mpmath at 40 digits.
    x = np.random.default_rng(0).random(2000) * 60.0
    x[:12] = np.arange(12)
    s, c, turns = arithmetic.sine_cosine(x)
    sign = 1.0 - 2.0 * np.mod(turns, 2.0)
    with mp.workdps(40):
        for value, cosine, quarter_waves in zip(sign * s, sign * c, x, strict=True):
            angle = mp.pi / 2 * mp.mpf(float(quarter_waves))
            assert abs(mp.mpf(float(value)) - mp.sin(angle)) < 1.7e-16
            assert abs(mp.mpf(float(cosine)) - mp.cos(angle)) < 1.7e-16


def test_whole_quarter_waves_are_exact():
    # sin and cos of multiples of 90 degrees: 0 and +-1.
    s, c, turns = arithmetic.sine_cosine(np.arange(8.0))
    sign = 1.0 - 2.0 * np.mod(turns, 2.0)
    np.testing.assert_array_equal(sign * s, [0, 1, 0, -1, 0, 1, 0, -1])
    np.testing.assert_array_equal(sign * c, [1, 0, -1, 0, 1, 0, -1, 0])


def test_exponential_minus_1_keeps_its_digits_next_to_zero():
    # mpmath at 40 digits.
    y = -np.concatenate([np.logspace(-18, 1.8, 400), [0.0, 0.3466, 0.35, 1.04, 74.0]])
    with mp.workdps(40):
        for value, argument in zip(arithmetic.exponential_minus_1(y), y, strict=True):
            true = mp.expm1(mp.mpf(float(argument)))
            assert abs(mp.mpf(float(value)) - true) <= 3e-16 * abs(true)


@pytest.mark.parametrize(("y", "halvings"), [(0.0, 0.0), (0.3, 0.0), (700.0, 0.0), (10.0, 400.0), (745.0, -800.0)])
def test_halved_has_no_false_underflow(y, halvings):
    # mpmath at 40 digits.
    with mp.workdps(40):
        true = mp.mpf(1.3) * mp.exp(-mp.mpf(y)) * mp.mpf(2) ** -mp.mpf(halvings)
        value = mp.mpf(float(arithmetic.halved(np.float64(1.3), np.float64(y), np.float64(halvings))))
        assert abs(value - true) <= 4e-16 * true


@pytest.mark.parametrize("kappa", [0.3 - 0.02j, 1.7 - 0.4j, -0.9j, 1e-9 + 0j, 0j])
def test_integrals_over_a_layer(kappa):
    # mpmath quadrature of the definitions.
    k0, d = 2.0 * np.pi / 500.0, 120.0
    fade = abs((kappa * k0 * d).imag)

    def c(z):
        return mp.cos(kappa * k0 * z)

    def s(z):
        return mp.sin(kappa * k0 * z) / kappa if kappa else k0 * z

    integrands = [
        (lambda z: c(z) ** 2, 2),
        (lambda z: s(z) ** 2, 2),
        (lambda z: c(z) * s(z), 2),
        (lambda z: c(z) * c(d - z), 1),
        (lambda z: s(z) * s(d - z), 1),
        (lambda z: c(z) * s(d - z), 1),
    ]
    values = layer_integrals(np.array([kappa + 0j]), np.array([k0]), d)
    for value, (integrand, power) in zip(values, integrands, strict=True):
        true = complex(mp.quad(integrand, [0, d]) * mp.exp(-power * fade))
        assert abs(value[0] - true) <= 1e-14 * abs(true)


STACKS = {
    "lossless": [(2.35, 0.0, 80.0), (1.46, 0.0, 95.0), (2.1, 0.0, 0.0), (1.38, 0.0, 400.0)],
    "absorbing": [(2.35, 0.01, 80.0), (0.06, 3.3, 25.0), (1.38, 0.2, 60.0)],
    "evanescent": [(2.35, 0.0, 80.0), (0.7, 0.0, 90.0), (1.46, 0.0, 50.0)],
    "long": [(2.35 - 0.9 * (j % 2), 1e-5 * (j % 3), 60.0 + j) for j in range(70)],
}


def _stack(films):
    return fs.Stack(fs.constant(1.0), [fs.Layer(fs.constant(n, k), d) for n, k, d in films], fs.constant(1.52))


@pytest.mark.parametrize("name", STACKS)
def test_both_routes_give_the_same_bytes(name):
    # One rounding of every operation by IEEE 754; no outside value needed.
    stack, wavelength, angle = _stack(STACKS[name]), np.linspace(400.0, 800.0, 301), [0.0, 30.0, 71.0]
    found = {}
    for route in ("small", "compiled"):
        with forced(route):
            s, g = fs.spectrum(stack, wavelength, angle), fs.thickness_gradient(stack, wavelength, angle)
            names = ("R_s", "R_p", "T_s", "T_p", "r_s", "r_p", "t_s", "t_p", "A_layers_s", "A_layers_p", "log10_T_p")
            found[route] = [getattr(s, n).tobytes() for n in names]
            found[route] += [getattr(g, n).tobytes() for n in ("dR_s", "dR_p", "dT_s", "dT_p", "dr_p", "dt_s")]
    assert found["small"] == found["compiled"]


def test_a_lossless_point_has_the_same_bytes_in_either_kernel():
    # k = 1e-3 at one wavelength only moves that wavelength to the complex kernel; k = 0 points must not notice.
    stack, wavelength = _stack(STACKS["lossless"]), np.linspace(400.0, 800.0, 50)
    plain = fs.spectrum(stack, wavelength, [0.0, 40.0])
    grouped = fs.batch_spectrum(
        stack,
        wavelength,
        [0.0, 40.0],
        index_change={stack.films[0].material: [0.0, -1e-3j]},
    )
    assert plain.R_p.tobytes() == grouped.R_p[0].tobytes()
    assert plain.T_s.tobytes() == grouped.T_s[0].tobytes()
    assert np.all(grouped.R_p[1] != grouped.R_p[0])
