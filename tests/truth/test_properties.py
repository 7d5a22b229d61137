"""Physical laws as properties over random stacks, and the same bytes however the work is cut."""

import hashlib
import os
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant
QUICK = settings(max_examples=40, deadline=None, derandomize=True)

index = st.floats(1.3, 4.0)
extinction = st.one_of(st.just(0.0), st.floats(1e-6, 4.0))
thickness = st.floats(0.0, 400.0)
film = st.builds(lambda n, k, d: fs.Layer(C(n, k), d), index, extinction, thickness)
lossless_film = st.builds(lambda n, d: fs.Layer(C(n), d), index, thickness)
wavelength, angle = st.floats(300.0, 2000.0), st.floats(0.0, 89.0)


@QUICK
@given(st.lists(film, max_size=8), index, extinction, wavelength, angle)
def test_energy_is_conserved(films, n, k, lam, theta):
    s = fs.spectrum(fs.Stack(C(1.0), films, C(n, k)), lam, theta)
    np.testing.assert_allclose([s.R_s + s.T_s + s.A_s, s.R_p + s.T_p + s.A_p], 1.0, atol=1e-11)


@QUICK
@given(st.lists(film, max_size=8), st.floats(1.0, 2.0), wavelength, st.floats(0.0, 60.0))
def test_transmittance_is_reciprocal(films, n, lam, theta):
    # Lorentz reciprocity (Born and Wolf 1.6): T is the same from either side, for the ray and its reverse.
    stack = fs.Stack(C(n), films, C(2.0))
    behind = float(np.degrees(np.arcsin(n * np.sin(np.radians(theta)) / 2.0)))
    there, back = fs.spectrum(stack, lam, theta), fs.spectrum(stack.reversed(), lam, behind)
    np.testing.assert_allclose(there.log10_T_s, back.log10_T_s, atol=1e-9)
    np.testing.assert_allclose(there.log10_T_p, back.log10_T_p, atol=1e-9)


@QUICK
@given(st.lists(lossless_film, max_size=6), index, wavelength, st.integers(1, 5))
def test_half_wave_layer_is_absent(films, n, lam, halves):
    # Absentee layer (Macleod): a lossless film of whole half waves changes neither R nor T.
    half_waves = fs.Layer(C(n), halves * lam / (2.0 * n))
    plain = fs.spectrum(fs.Stack(C(1.0), films, C(1.52)), lam)
    more = fs.spectrum(fs.Stack(C(1.0), [*films[:2], half_waves, *films[2:]], C(1.52)), lam)
    np.testing.assert_allclose(more.R_s, plain.R_s, atol=1e-12)


@QUICK
@given(st.lists(film, max_size=6), wavelength, angle, st.sampled_from([0.25, 0.5, 2.0, 8.0]))
def test_scaling_of_all_lengths_changes_no_byte(films, lam, theta, scale):
    # Maxwell's equations without dispersion have no length of their own; powers of two are exact.
    stack = fs.Stack(C(1.0), films, C(1.52))
    a = fs.spectrum(stack, lam, theta)
    b = fs.spectrum(stack.with_thickness(scale * stack.thickness_nm), scale * lam, theta)
    for name in ("R_s", "R_p", "T_s", "T_p"):
        assert getattr(a, name).tobytes() == getattr(b, name).tobytes()


@QUICK
@given(st.lists(film, min_size=1, max_size=6), wavelength, angle, st.floats(0.0, 1.0))
def test_a_layer_may_be_cut_in_two(films, lam, theta, share):
    first = films[0]
    halves = [
        fs.Layer(first.material, share * first.thickness_nm),
        fs.Layer(first.material, (1 - share) * first.thickness_nm),
    ]
    a = fs.spectrum(fs.Stack(C(1.0), films, C(1.52)), lam, theta)
    b = fs.spectrum(fs.Stack(C(1.0), [*halves, *films[1:]], C(1.52)), lam, theta)
    np.testing.assert_allclose([a.R_s, a.R_p], [b.R_s, b.R_p], atol=1e-11)
    np.testing.assert_allclose(a.A_layers_p[0], b.A_layers_p[:2].sum(axis=0), atol=1e-11)


@QUICK
@given(st.lists(film, max_size=6), wavelength)
def test_p_is_s_at_normal_incidence(films, lam):
    for angles in (0.0, [0.0, 30.0]):
        s = fs.spectrum(fs.Stack(C(1.0), films, C(1.52)), lam, angles)
        for name in ("R", "T", "r", "t", "log10_T", "A"):
            a, b = (getattr(s, f"{name}_{p}")[0] for p in "sp")
            assert a.tobytes() == b.tobytes()


HIGH, LOW = C(2.35, 1e-4), C(1.46)
NOMINAL = fs.Stack(C(1.0), [fs.Layer(HIGH if j % 2 else LOW, 70.0 + j) for j in range(24)], C(1.52))
AXIS, ANGLES = np.linspace(400.0, 700.0, 301), [0.0, 20.0, 55.0]
NAMES = ("R_s", "R_p", "T_s", "T_p")


def _thicknesses(samples):
    return NOMINAL.thickness_nm * (1.0 + 0.02 * np.random.default_rng(3).standard_normal((samples, 24)))


def _bytes(result):
    return [getattr(result, name).tobytes() for name in NAMES]


@pytest.mark.parametrize("route", ["small", "compiled"])
def test_any_grouping_gives_the_same_bytes(route):
    d = _thicknesses(7)
    with forced(route):
        whole = fs.batch_spectrum(NOMINAL, AXIS, ANGLES, thickness_nm=d)
        blocks = list(fs.batch_blocks(NOMINAL, AXIS, ANGLES, thickness_nm=d, samples_per_block=3))
        assert [len(block.R_s) for block in blocks] == [3, 3, 1]
        assert [block.first_sample for block in blocks] == [0, 3, 6]
        for name in NAMES:
            joined = np.concatenate([getattr(block, name) for block in blocks])
            assert joined.tobytes() == getattr(whole, name).tobytes()
        for sample in (0, 6):
            single = fs.spectrum(NOMINAL.with_thickness(d[sample]), AXIS, ANGLES)
            for name in NAMES:
                assert getattr(single, name).tobytes() == getattr(whole, name)[sample].tobytes()
        for j, theta in enumerate(ANGLES):
            part = fs.batch_spectrum(NOMINAL, AXIS[37:90], theta, thickness_nm=d)
            for name in NAMES:
                wanted = np.ascontiguousarray(getattr(whole, name)[:, j : j + 1, 37:90])
                assert getattr(part, name).tobytes() == wanted.tobytes()


@pytest.fixture
def pools(monkeypatch):
    """Return the list of the sizes of the thread pools started so far."""
    started = []

    class Counted(ThreadPoolExecutor):
        def __init__(self, threads):
            started.append(threads)
            super().__init__(threads)

    monkeypatch.setattr("filmstack.work.pool.ThreadPoolExecutor", Counted)
    return started


def test_number_of_threads_and_route_change_no_byte(monkeypatch, pools):
    d = _thicknesses(600)
    found = []
    for threads, route in (("1", "compiled"), ("2", "compiled"), ("5", "compiled"), ("1", "small")):
        monkeypatch.setenv("FILMSTACK_THREADS", threads)
        with forced(route):
            found.append(_bytes(fs.batch_spectrum(NOMINAL, AXIS[::10], ANGLES, thickness_nm=d)))
    assert all(one == found[0] for one in found)
    assert pools == [2, 5]  # the work was large enough to be shared
    monkeypatch.setenv("FILMSTACK_THREADS", "many")
    with (
        pytest.raises(fs.ArgumentError, match="FILMSTACK_THREADS: expected a whole number >= 1, got 'many'"),
        forced("compiled"),
    ):
        fs.batch_spectrum(NOMINAL, AXIS, ANGLES, thickness_nm=d)


@pytest.mark.parametrize("plate", [False, True])
def test_number_of_threads_changes_no_byte_of_gradients_and_plates(monkeypatch, pools, plate):
    films = [*NOMINAL.films, *NOMINAL.films]
    stack = fs.Stack(C(1.0), [*films, fs.Plate(C(1.52, 1e-7), 1.0), *films[:3]] if plate else films, C(1.0))
    axis, angles, digests = np.linspace(400.0, 700.0, 2200), [0.0, 20.0, 55.0, 80.0, 90.0], []
    for threads in ("1", "2", "7"):
        monkeypatch.setenv("FILMSTACK_THREADS", threads)
        with forced("compiled"):
            s, by_d = fs.spectrum(stack, axis, angles), fs.thickness_gradient(stack, axis, angles)
            found = [s.R_p, s.T_s, s.A_layers_p, s.log10_T_p, by_d.dR_s, by_d.dT_p]
        digests.append(hashlib.sha256(b"".join(x.tobytes() for x in found)).hexdigest())
    assert len(set(digests)) == 1
    assert set(pools) >= {2, 7}


def test_samples_of_index_and_angle_equal_single_spectra():
    change, tilt = np.array([0.0, 0.01 - 1e-3j, -0.02]), np.array([0.0, 1.5, -0.5])
    batch = fs.batch_spectrum(
        NOMINAL, AXIS, [10.0, 40.0], index_change={HIGH: change, NOMINAL.exit: 0.5 * change.real},
        angle_change_deg=tilt, quantities=("R", "T", "A", "r", "t", "log10_T", "one_minus_R", "A_layers"),
    )  # fmt: skip
    for sample in range(3):
        n = complex(2.35, -1e-4) + change[sample]
        high, exit_ = C(n.real, -n.imag), C(1.52 + 0.5 * change[sample].real)
        layers = [fs.Layer(high if f.material is HIGH else LOW, f.thickness_nm) for f in NOMINAL.films]
        single = fs.spectrum(fs.Stack(C(1.0), layers, exit_), AXIS, np.array([10.0, 40.0]) + tilt[sample])
        for name in ("R_s", "T_p", "A_s", "r_p", "t_s", "log10_T_p", "one_minus_R_s"):
            assert np.ascontiguousarray(getattr(batch, name)[sample]).tobytes() == getattr(single, name).tobytes(), name
        assert np.ascontiguousarray(batch.A_layers_p[:, sample]).tobytes() == single.A_layers_p.tobytes()


DIGEST = """
import hashlib, numpy as np, filmstack as fs
from filmstack.wave.route import forced
C = fs.constant
high, low = C(2.35, 1e-4), C(1.46)
stack = fs.Stack(C(1.0), [fs.Layer(high if j % 2 else low, 70.0 + j) for j in range(24)], C(1.52))
d = stack.thickness_nm * (1.0 + 0.02 * np.random.default_rng(3).standard_normal((20, 24)))
with forced("compiled"):
    lossy = fs.batch_spectrum(stack, np.linspace(400.0, 700.0, 301), [0.0, 20.0, 55.0], thickness_nm=d)
    plain = fs.Stack(C(1.0), [fs.Layer(C(2.1) if j % 2 else low, 70.0 + j) for j in range(24)], C(1.52))
    lossless = fs.batch_spectrum(plain, np.linspace(400.0, 700.0, 301), [0.0, 20.0, 55.0], thickness_nm=d)
digest = hashlib.sha256()
for batch in (lossy, lossless):
    for name in ("R_s", "R_p", "T_s", "T_p"):
        digest.update(getattr(batch, name).tobytes())
print(digest.hexdigest())
"""


def test_processors_without_wide_vectors_give_the_same_bytes():
    # numba compiles for the named processor: x86-64-v3 has no AVX-512.
    digests = []
    for name in ("", "x86-64-v3"):
        environment = {k: v for k, v in os.environ.items() if k != "NUMBA_CPU_NAME"}
        if name:
            environment |= {"NUMBA_CPU_NAME": name, "NUMBA_CPU_FEATURES": ""}
        run = subprocess.run(
            [sys.executable, "-c", DIGEST], env=environment, capture_output=True, text=True, check=True
        )
        digests.append(run.stdout.strip())
    assert len(digests[0]) == len(hashlib.sha256(b"").hexdigest())
    assert digests[0] == digests[1]


BAD_BATCHES = [
    ({}, "expected thickness_nm, index_change or angle_change_deg, got none. One sample: use spectrum"),
    ({"thickness_nm": [1.0, 2.0]}, "thickness_nm: expected shape (sample, 24), a column a film, got (2,)"),
    (
        {"thickness_nm": -np.ones((1, 24))},
        "thickness_nm[0, 0]: expected a finite length >= 0 nm, got -1 nm",
    ),
    (
        {"thickness_nm": np.ones((2, 24)), "angle_change_deg": [0.0]},
        "expected the same number of samples, at least one, in every argument; thickness_nm has 2, "
        "angle_change_deg has 1",
    ),
    (
        {"angle_change_deg": [50.0]},
        "angle_change_deg[0]: expected 55 deg plus the change to stay within 90 deg, got 50 deg",
    ),
    (
        {"index_change": {C(3.0): [0.1]}},
        "index_change: expected a Material of the stack as key, got <Constant 'constant 3'>",
    ),
    (
        {"thickness_nm": np.ones((1, 24)), "quantities": ("Q",)},
        "quantities: expected some of R, T, A, r, t, log10_T, one_minus_R, A_layers, got 'Q'",
    ),
    (
        {"index_change": {LOW: [0.1j]}},
        "index_change: constant index 1.46: sample 0: expected n >= 0 and k >= 0, got n = 1.46, k = -0.1 at 400 nm. "
        "Change n by a real number and k by -i times a number, or allow gain",
    ),
    (
        {"thickness_nm": np.ones((50000, 24))},
        "batch_spectrum: the result would take 1.4 GB, more than 1 GB. Use batch_blocks(..., samples_per_block=8651)",
    ),
]  # fmt: skip


@pytest.mark.parametrize(("arguments", "message"), BAD_BATCHES)
def test_bad_batches_are_refused(arguments, message):
    with pytest.raises(fs.ArgumentError) as caught:
        fs.batch_spectrum(NOMINAL, AXIS, ANGLES, **arguments)
    assert str(caught.value) == message
