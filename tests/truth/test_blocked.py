"""Films of N = 0 where they meet plates, needles and nothing; notes of a batch.

House law: at oblique incidence such a film blocks p (T = 0, log10 T = -inf), and derivatives are refused by name.
"""

import numpy as np
import pytest

import filmstack as fs
from filmstack.wave.route import forced

C = fs.constant
EMPTY, GLASS, AIR = C(0.0), C(1.52), C(1.0)


@pytest.fixture(params=["small", "compiled"], autouse=True)
def route(request):
    with forced(request.param):
        yield


PLATE, FILM = fs.Plate(GLASS, 1.0), fs.Layer(EMPTY, 50.0)


@pytest.mark.xfail(strict=True, reason="log10 T of a row of plates takes no notice of a blocking film")
@pytest.mark.parametrize("layers", [[PLATE, FILM], [FILM, PLATE], [PLATE, fs.Layer(C(2.0, 0.1), 20.0), FILM, PLATE]])
def test_a_blocking_film_beside_plates(layers):
    s = fs.spectrum(fs.Stack(AIR, layers, AIR), 550.0, [0.0, 30.0])
    assert s.T_p[1, 0] == 0.0
    assert np.isneginf(s.log10_T_p[1, 0])
    assert s.log10_T_p[0, 0] == pytest.approx(np.log10(s.T_p[0, 0]), abs=1e-14)
    assert s.log10_T[1, 0] == pytest.approx(np.log10(s.T[1, 0]), abs=1e-14)
    np.testing.assert_allclose(s.R_p + s.A_p + s.T_p, 1.0, atol=1e-14)


@pytest.mark.xfail(strict=True, reason="a needle of N = 0 is not told apart")
def test_a_needle_of_index_zero_is_refused_at_oblique_incidence():
    # u = 1 - b^2 / N^2 has no limit: half of nothing blocks p whole.
    stack = fs.Stack(AIR, [fs.Layer(C(2.0), 50.0)], GLASS)
    with pytest.raises(fs.ArgumentError, match="N = 0"):
        _ = fs.needle_gradient(stack, 550.0, 30.0, material=EMPTY).dR_p


def test_a_needle_of_index_zero_at_normal_incidence():
    # u = 1, v = N^2 = 0: the limit of small N, whose next term is N^2.
    stack = fs.Stack(AIR, [fs.Layer(C(2.0), 50.0)], GLASS)
    found, near = (fs.needle_gradient(stack, 550.0, material=m) for m in (EMPTY, C(1e-9)))
    for name in ("dR_s", "dT_p", "dr_s", "dt_p"):
        np.testing.assert_allclose(getattr(found, name), getattr(near, name), rtol=1e-12)


@pytest.mark.xfail(strict=True, reason="0 times infinity")
def test_no_silent_nan_for_an_empty_film_of_no_thickness():
    # Zero thickness is as if absent; a derivative that does not exist is refused by name, never nan.
    stack = fs.Stack(AIR, [fs.Layer(C(2.0), 40.0), fs.Layer(EMPTY, 0.0)], GLASS)
    try:
        gradient = fs.index_gradient(stack, 550.0, 30.0)
    except fs.ArgumentError as refused:
        assert "N = 0" in str(refused)  # noqa: PT017 - either is right
    else:
        assert np.all(np.isfinite([gradient.dR_p_dn, gradient.dR_p_dk, gradient.dT_p_dn, gradient.dT_p_dk]))


@pytest.mark.xfail(strict=True, reason="notes are those of the nominal stack")
def test_a_batch_tells_that_the_incident_medium_counts_as_lossless():
    prism = C(1.515)
    stack = fs.Stack(prism, [fs.Layer(C(0.06, 4.2), 50.0)], AIR)
    batch = fs.batch_spectrum(stack, 633.0, 43.0, index_change={prism: [0.0, -1e-6j]})
    assert batch.R_p[0].tobytes() == batch.R_p[1].tobytes()
    assert len(batch.notes) == 1
    assert "counts as lossless" in batch.notes[0]
