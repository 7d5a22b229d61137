"""Laws of thick plates: piles of plates, reciprocity, cutting, thin against thick."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import filmstack as fs

C = fs.constant
QUICK = settings(max_examples=30, deadline=None, derandomize=True)

film = st.builds(
    lambda n, k, d: fs.Layer(C(n, k), d),
    st.floats(1.3, 4.0),
    st.one_of(st.just(0.0), st.floats(1e-6, 4.0)),
    st.floats(0.0, 200.0),
)
films = st.lists(film, max_size=3)
plate = st.builds(
    lambda n, k, d: fs.Plate(C(n, k), d),
    st.floats(1.3, 4.0),
    st.one_of(st.just(0.0), st.floats(1e-9, 1e-5)),
    st.floats(0.1, 5.0),
)
wavelength, angle = st.floats(400.0, 2000.0), st.floats(0.0, 89.0)
AIR = C(1.0)


@pytest.mark.parametrize("count", [1, 2, 5, 20])
@pytest.mark.parametrize("theta", [0.0, 30.0, 60.0, 80.0])
def test_pile_of_plates(count, theta):
    # G. G. Stokes, Proc. R. Soc. 11, 545 (1862) (from memory): m clear plates in air reflect 2 m r / (1 + (2 m - 1) r).
    glass = C(1.52)
    pile = [piece for _ in range(count) for piece in (fs.Plate(glass, 1.0), fs.Plate(AIR, 1.0))][:-1]
    s = fs.spectrum(fs.Stack(AIR, pile, AIR), 550.0, theta)
    # Fresnel's formulas of one face.
    cosine, inside = np.cos(np.radians(theta)), np.sqrt(1.0 - (np.sin(np.radians(theta)) / 1.52) ** 2)
    faces = {
        "s": ((cosine - 1.52 * inside) / (cosine + 1.52 * inside)) ** 2,
        "p": ((1.52 * cosine - inside) / (1.52 * cosine + inside)) ** 2,
    }
    for q, r in faces.items():
        assert getattr(s, f"R_{q}")[0, 0] == pytest.approx(2 * count * r / (1 + (2 * count - 1) * r), rel=1e-12)
        assert getattr(s, f"T_{q}")[0, 0] == pytest.approx((1 - r) / (1 + (2 * count - 1) * r), rel=1e-12)
        np.testing.assert_array_equal(getattr(s, f"A_{q}"), 0.0)


@QUICK
@given(films, plate, films, plate, films, wavelength, angle)
def test_energy_and_reciprocity(front, first, middle, second, back, lam, theta):
    # Conservation of energy; T is the same from either side (Stokes), whatever absorbs.
    stack = fs.Stack(AIR, [*front, first, *middle, second, *back], AIR)
    there, again = fs.spectrum(stack, lam, theta), fs.spectrum(stack.reversed(), lam, theta)
    for s in (there, again):
        np.testing.assert_allclose([s.R_s + s.T_s + s.A_s, s.R_p + s.T_p + s.A_p], 1.0, atol=1e-12)
        assert np.all(np.concatenate([s.A_layers_s, s.A_layers_p, s.A_plates_s, s.A_plates_p]) >= 0.0)
    np.testing.assert_allclose(there.log10_T_s, again.log10_T_s, rtol=1e-11, atol=1e-11)
    np.testing.assert_allclose(there.log10_T_p, again.log10_T_p, rtol=1e-11, atol=1e-11)


@QUICK
@given(films, plate, films, st.floats(0.01, 0.99), wavelength, angle)
def test_a_plate_may_be_cut_in_two(front, whole, back, share, lam, theta):
    # Two plates of one medium in contact have no step between them.
    halves = [fs.Plate(whole.material, x * whole.thickness_mm) for x in (share, 1.0 - share)]
    a = fs.spectrum(fs.Stack(AIR, [*front, whole, *back], AIR), lam, theta)
    b = fs.spectrum(fs.Stack(AIR, [*front, *halves, *back], AIR), lam, theta)
    for q in "sp":
        for name in ("R", "T"):
            np.testing.assert_allclose(getattr(a, f"{name}_{q}"), getattr(b, f"{name}_{q}"), rtol=1e-11)
        np.testing.assert_allclose(
            getattr(a, f"A_plates_{q}"), getattr(b, f"A_plates_{q}").sum(axis=0)[None], rtol=1e-9
        )


def test_a_plate_is_the_mean_of_a_coherent_film_over_its_phase():
    # One plate between bare or coated faces: the mean of Airy's R over one period of the phase (Born and Wolf 7.6).
    # An n-point mean of a smooth periodic function converges as exp(-n).
    front, back = [fs.Layer(C(2.35), 60.0), fs.Layer(C(0.06, 3.3), 8.0)], [fs.Layer(C(1.8, 0.1), 50.0)]
    n, thick, theta, lam = 1.52, 1e6, 40.0, 550.0
    period = lam / (2.0 * np.sqrt(n * n - np.sin(np.radians(theta)) ** 2))
    stack = fs.Stack(AIR, [*front, fs.Layer(C(n), thick), *back], AIR)
    d = np.tile(stack.thickness_nm, (64, 1))
    d[:, 2] = 100.0 + period * np.arange(64) / 64
    coherent = fs.batch_spectrum(stack, lam, theta, thickness_nm=d, quantities=("R", "T", "A_layers"))
    plate_ = fs.spectrum(fs.Stack(AIR, [*front, fs.Plate(C(n), 1.0), *back], AIR), lam, theta)
    for name in ("R_s", "R_p", "T_s", "T_p"):
        np.testing.assert_allclose(getattr(coherent, name).mean(axis=0), getattr(plate_, name), rtol=1e-12)
    for name in ("A_layers_s", "A_layers_p"):
        means = np.delete(getattr(coherent, name).mean(axis=1), 2, axis=0)
        np.testing.assert_allclose(means, getattr(plate_, name), rtol=1e-11)
