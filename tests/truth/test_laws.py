"""Laws of a row of films that tie amplitudes, sides, halves and lengths together; random stacks, both routes."""

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant
QUICK = settings(
    max_examples=40, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.function_scoped_fixture]
)

index = st.floats(1.3, 4.0)
thickness = st.floats(0.0, 400.0)
film = st.builds(
    lambda n, k, d: fs.Layer(C(n, k), d), index, st.one_of(st.just(0.0), st.floats(1e-9, 4.0)), st.floats(0.0, 150.0)
)
lossless_film = st.builds(lambda n, d: fs.Layer(C(n), d), index, thickness)
wavelength, angle = st.floats(300.0, 2000.0), st.floats(0.0, 85.0)


@pytest.fixture(params=["small", "compiled"], autouse=True)
def route(request):
    with forced(request.param):
        yield


def _pair(stack, n0, n1, lam, theta):
    """Return the spectra of a ray and of its reverse, and the cosines in the end media."""
    sine = n0 * np.sin(np.radians(theta))
    behind = float(np.degrees(np.arcsin(sine / n1)))
    there, back = fs.spectrum(stack, lam, theta), fs.spectrum(stack.reversed(), lam, behind)
    return there, back, np.sqrt(1.0 - (sine / n0) ** 2), np.sqrt(1.0 - (sine / n1) ** 2)


@QUICK
@given(st.lists(lossless_film, max_size=8), st.floats(1.0, 1.9), wavelength, angle)
def test_lossless_films_and_their_reverse(films, n0, lam, theta):
    # Stokes' relations for a lossless row: |r'| = |r|, r' = -conj(r) t / conj(t), t t' - r r' = t / conj(t)
    # (Born and Wolf 1.6; time reversal). t of both sides differ by n cos alone, so t / conj(t) is common.
    there, back, _, _ = _pair(fs.Stack(C(n0), films, C(2.0)), n0, 2.0, lam, theta)
    for q in "sp":
        r, t, r_back, t_back = (getattr(s, f"{x}_{q}")[0, 0] for s in (there, back) for x in "rt")
        turn = t / np.conj(t)
        assert r_back == pytest.approx(-np.conj(r) * turn, abs=1e-11)
        assert t * t_back - r * r_back == pytest.approx(turn, abs=1e-11)
        assert getattr(there, f"R_{q}")[0, 0] == pytest.approx(getattr(back, f"R_{q}")[0, 0], abs=1e-11)


@QUICK
@given(st.lists(film, max_size=6), st.floats(1.0, 1.9), wavelength, angle)
def test_amplitudes_of_absorbing_films_are_reciprocal(films, n0, lam, theta):
    # Reciprocity (Knop, as remembered): n1 cos1 t = n0 cos0 t' for the full fields of both polarizations, phase too.
    there, back, cos_0, cos_1 = _pair(fs.Stack(C(n0), films, C(2.0)), n0, 2.0, lam, theta)
    for q in "sp":
        t, t_back = (getattr(s, f"t_{q}")[0, 0] for s in (there, back))
        forward, backward = 2.0 * cos_1 * t, n0 * cos_0 * t_back
        assert abs(forward - backward) <= 1e-10 * abs(forward) + 1e-300


@QUICK
@given(st.lists(film, max_size=5), st.lists(film, max_size=3), index, wavelength, angle, st.integers(1, 9))
def test_half_waves_at_any_angle_turn_t_alone(front, behind, n, lam, theta, halves):
    # A lossless film with kappa k0 d = m pi has the matrix (-1)^m (Macleod: absentee layer).
    kappa = np.sqrt(n * n - np.sin(np.radians(theta)) ** 2)
    layer = fs.Layer(C(n), halves * lam / (2.0 * kappa))
    plain = fs.spectrum(fs.Stack(C(1.0), [*front, *behind], C(1.52)), lam, theta)
    more = fs.spectrum(fs.Stack(C(1.0), [*front, layer, *behind], C(1.52)), lam, theta)
    for q in "sp":
        r, t, r_more, t_more = (getattr(s, f"{x}_{q}")[0, 0] for s in (plain, more) for x in "rt")
        assert r_more == pytest.approx(r, abs=1e-11)
        assert t_more == pytest.approx((-1.0) ** halves * t, abs=1e-11)


@QUICK
@given(st.lists(film, max_size=5), st.floats(1.0, 2.0), st.floats(0.0, 1e5), wavelength, angle)
def test_a_film_of_the_incident_medium_turns_phases_alone(films, n0, d, lam, theta):
    # Moving the plane of reference by d: r gets exp(-2i delta), t exp(-i delta), exp(+i omega t).
    plain = fs.spectrum(fs.Stack(C(n0), films, C(1.52, 0.1)), lam, theta)
    more = fs.spectrum(fs.Stack(C(n0), [fs.Layer(C(n0), d), *films], C(1.52, 0.1)), lam, theta)
    delta = 2.0 * np.pi * n0 * np.cos(np.radians(theta)) * d / lam
    # One rounding of the phase itself is what can be asked.
    allowed = 1e-12 + 1e-15 * delta
    for q in "sp":
        r, t, r_more, t_more = (getattr(s, f"{x}_{q}")[0, 0] for s in (plain, more) for x in "rt")
        assert r_more == pytest.approx(r * np.exp(-2j * delta), abs=2.0 * allowed)
        assert t_more == pytest.approx(t * np.exp(-1j * delta), abs=allowed)


@QUICK
@given(
    st.lists(film, min_size=1, max_size=6), st.sampled_from([0.0, 1e-6, 0.3]), wavelength, angle,
    st.sampled_from([2.0**-7, 0.5, 2.0, 1024.0]),
)  # fmt: skip
def test_powers_of_two_of_all_lengths_change_no_byte(films, k, lam, theta, scale):
    # Maxwell's equations have no length of their own; a power of two is exact in every product.
    stack = fs.Stack(C(1.0), films, C(1.52, k))
    larger = stack.with_thickness(scale * stack.thickness_nm)
    a, b = fs.spectrum(stack, lam, theta), fs.spectrum(larger, scale * lam, theta)
    for name in ("R", "T", "A", "r", "t", "log10_T", "one_minus_R", "A_layers"):
        for q in "sp":
            assert getattr(a, f"{name}_{q}").tobytes() == getattr(b, f"{name}_{q}").tobytes(), (name, q)
    slope, flatter = fs.thickness_gradient(stack, lam, theta), fs.thickness_gradient(larger, scale * lam, theta)
    for name in ("dR_s", "dT_p", "dr_p", "dt_s"):
        # On the reals of complex values: numpy's complex product would lose the sign of a 0.
        parts = getattr(flatter, name).view(float)
        assert getattr(slope, name).tobytes() == (scale * parts).tobytes(), name


@QUICK
@given(st.lists(film, min_size=1, max_size=5), st.floats(0.01, 0.99), wavelength, angle)
def test_gradients_of_a_cut_film_are_those_of_the_whole(films, share, lam, theta):
    # d/dd of either half is d/dd of the whole, since only their sum counts; d/dN of the halves adds up.
    first = films[0]
    halves = [fs.Layer(first.material, x * first.thickness_nm) for x in (share, 1.0 - share)]
    whole, cut = (fs.Stack(C(1.0), rows, C(1.52)) for rows in (films, [*halves, *films[1:]]))
    by_d, by_d_cut = fs.thickness_gradient(whole, lam, theta), fs.thickness_gradient(cut, lam, theta)
    by_n, by_n_cut = fs.index_gradient(whole, lam, theta), fs.index_gradient(cut, lam, theta)
    for q in "sp":
        for name in ("dr", "dt"):
            wanted, found = getattr(by_d, f"{name}_{q}")[0], getattr(by_d_cut, f"{name}_{q}")[:2]
            np.testing.assert_allclose(found, np.stack([wanted, wanted]), rtol=1e-9, atol=1e-14)
            wanted, found = getattr(by_n, f"{name}_{q}_dn")[0], getattr(by_n_cut, f"{name}_{q}_dn")[:2]
            np.testing.assert_allclose(found.sum(axis=0), wanted, rtol=1e-9, atol=1e-12)


@QUICK
@given(st.lists(lossless_film, min_size=1, max_size=6), wavelength, angle)
def test_scaling_law_of_gradients(films, lam, theta):
    # All lengths together have no effect: sum over films of d dR/dd = -lambda dR/dlambda, by a five-point difference.
    stack = fs.Stack(C(1.0), films, C(1.52))
    gradient, d = fs.thickness_gradient(stack, lam, theta), stack.thickness_nm
    step = 1e-3 * lam / (1.0 + 4.0 * np.sum(d) / lam)
    r = fs.spectrum(stack, lam + step * np.array([-2.0, -1.0, 1.0, 2.0]), theta)
    for q in "sp":
        at = getattr(r, f"R_{q}")[0]
        slope = (at[0] - 8.0 * at[1] + 8.0 * at[2] - at[3]) / (12.0 * step)
        total = float(np.sum(d * getattr(gradient, f"dR_{q}")[:, 0, 0]))
        assert total == pytest.approx(-lam * slope, abs=1e-7 * (1.0 + 4.0 * np.sum(d) / lam))
