import numpy as np
import pytest
from scipy.linalg import expm

import tauwright as tw
from conftest import refusal


def test_evaluates_at_numbers_and_arrays_of_any_shape():
    G = tw.TransferFunction.from_factors(-2, integrators=1, leads=[-4], lags=(10, 3), lag_pairs=[(5, 0.3)], dead_time=1.5)

    def oracle(s):  # closed form, in NumPy's complex arithmetic
        return -2 * (1 - 4 * s) * np.exp(-1.5 * s) / (s * (10 * s + 1) * (3 * s + 1) * (25 * s**2 + 3 * s + 1))

    s = np.linspace(0.01, 3, 24).reshape(2, 3, 4) * (0.2 + 1j)
    assert G(s).shape == s.shape and G(s).dtype == np.complex128
    np.testing.assert_allclose(G(s), oracle(s), rtol=1e-13)
    np.testing.assert_allclose(G(s[:, ::2, ::-1].T), oracle(s[:, ::2, ::-1].T), rtol=1e-13)
    many = 1j * np.geomspace(1e-3, 10, 5000)  # long enough to be computed without the interpreter's lock
    np.testing.assert_allclose(G(many), oracle(many), rtol=1e-12)
    for number in (0.3j, 0.3, 2, np.complex128(1j), np.float64(0.5)):
        value = G(number)
        assert type(value) is complex
        assert value == pytest.approx(oracle(complex(number)), rel=1e-13)
    assert G([]).shape == (0,)
    owned = G(s)
    assert owned.flags.owndata and owned.flags.writeable


def test_builders_by_position_and_by_name():
    F = tw.TransferFunction.from_factors
    assert tw.first_order_plus_dead_time(2, 10, 3) == F(2, lags=[10], dead_time=3)
    assert tw.first_order_plus_dead_time(gain=2, lag=10, dead_time=3) == F(2, lags=[10], dead_time=3)
    assert tw.second_order_plus_dead_time(2, 10, 4, 3) == F(2, lags=[10, 4], dead_time=3)
    assert tw.integrating_plus_dead_time(0.02, 3) == F(0.02, integrators=1, dead_time=3)
    assert tw.integrating_plus_dead_time(slope=0.02, dead_time=3, lag=5) == F(0.02, integrators=1, lags=[5], dead_time=3)
    assert tw.oscillatory_plus_dead_time(2, 5, 0.3, 1) == F(2, lag_pairs=[(5, 0.3)], dead_time=1)
    with pytest.raises(TypeError):
        F(2, 1)  # only the first argument is positional


def test_polynomials():
    # independent computation: numpy.polyval and numpy.roots
    above, below = [3.0, -1.0, 2.0], [5.0, 6.0, 4.0, 1.0, 0.0]
    G = tw.TransferFunction.from_polynomials(above, below, dead_time=0.5)
    s = 1j * np.geomspace(1e-2, 1e2, 50)
    np.testing.assert_allclose(G(s), np.polyval(above, s) / np.polyval(below, s) * np.exp(-0.5 * s), rtol=1e-12)
    np.testing.assert_allclose(np.sort_complex(G.poles), np.sort_complex(np.roots(below)), rtol=1e-9, atol=1e-12)
    np.testing.assert_allclose(np.sort_complex(G.zeros), np.sort_complex(np.roots(above)), rtol=1e-12)
    assert (G.order, G.relative_degree, G.integrators, G.right_half_plane_zeros) == (4, 2, 1, 2)
    with refusal("out_of_domain"):
        tw.TransferFunction.from_polynomials([0.0], [1.0])


def test_series_product_and_attributes():
    A = tw.first_order_plus_dead_time(2, 10, 3)
    B = tw.TransferFunction.from_factors(0.5, leads=[4], lag_pairs=[(2, 0.7)], dead_time=1)
    C = A * B
    assert (C.gain, C.dead_time, C.leads, C.lags, C.lead_pairs, C.lag_pairs) == (1, 4, (4,), (10,), (), ((2, 0.7),))
    assert (C.zeros_at_origin, C.unstable_poles, C.steady_gain) == (0, 0, 1)
    assert tw.integrating_plus_dead_time(-1, 0).steady_gain == -np.inf
    assert C.with_dead_time(0).inverse() * C.with_dead_time(0) != C
    assert (A.with_dead_time(0) * A.with_dead_time(0).inverse()).cancelled() == tw.TransferFunction.from_factors(1)
    assert A.with_gain(7).gain == 7
    with refusal("out_of_domain"):
        A.inverse()
    with pytest.raises(TypeError):
        hash(A)
    assert A != 3
    assert repr(A) == "TransferFunction(2 exp(-3 s) / (10 s + 1), times in s)"
    with pytest.raises(AttributeError):
        A.gain = 1


@pytest.mark.parametrize("G, A, b, c", [
    (tw.first_order_plus_dead_time(-2, 10, 1.25), [[-0.1]], [0.1], [-2]),
    (tw.second_order_plus_dead_time(3, 10, 4, 0), [[-0.1, 0], [0.25, -0.25]], [0.1, 0], [0, 3]),
    (tw.oscillatory_plus_dead_time(3, 5, 0.2, 2), [[0, 0.2], [-0.2, -0.08]], [0, 0.2], [3, 0]),
    (tw.integrating_plus_dead_time(0.02, 2, 6), [[-1 / 6, 0], [1, 0]], [1 / 6, 0], [0, 0.02]),
])
def test_step_response(G, A, b, c):
    # independent computation: exponential of the state matrix with the held input appended (SciPy)
    n = len(b)
    M = np.zeros((n + 1, n + 1))
    M[:n, :n], M[:n, n] = A, b
    time_s = np.linspace(0, 60, 41)
    expected = [np.dot(c, expm(M * (t - G.dead_time))[:n, n]) if t >= G.dead_time else 0.0 for t in time_s]
    np.testing.assert_allclose(tw.step_response(G, time_s), expected, atol=3e-14)
    np.testing.assert_allclose(tw.step_response(G, time_s[::-2]), expected[::-2], atol=3e-14)


def test_in_percent():
    # closed form: gain * output span / process-value span
    G = tw.first_order_plus_dead_time(0.8, 30, 5)
    assert tw.in_percent(G, process_value_range=(0, 200, "degC"), output_range=tw.Range(20, 120)).gain == pytest.approx(0.4)
    with refusal("missing_range"):
        tw.in_percent(G, process_value_range=None, output_range=(0, 100))
