"""held, against SciPy's conversions and against superposition of steps."""

import math

import numpy as np
import pytest
from scipy.signal import cont2discrete

import tauwright as tw
from conftest import first_order_step, refusal

PROCESSES = [
    ([2.0], [10, 1]), ([0.3], [4, 1, 0]), ([1.0, 0.2], [6, 5, 1]), ([1.5], [4, 0.4, 1]), ([-1.0, 1], [8, 12, 6, 1]),
    ([2.0, 3, 1], [30, 31, 10, 1]), ([1.0, 1], [3, 1])]


@pytest.mark.parametrize("between, method", [("constant", "zoh"), ("linear", "foh")])
@pytest.mark.parametrize("numerator, denominator", PROCESSES, ids=str)
def test_values_are_those_of_scipy(numerator, denominator, between, method):
    # independent computation: SciPy's zero-order hold and triangle hold, a whole number of scans of dead time
    h = tw.held(tw.TransferFunction.from_polynomials(numerator, denominator, 1.5), 0.5, between=between)
    above, below, _ = cont2discrete((numerator, denominator), 0.5, method)
    direct = between == "constant" and len(numerator) == len(denominator)
    z = np.array([0.3 + 0.8j, 1.2, np.exp(0.4j), np.exp(2.5j), -0.7])
    expected = np.polyval(np.atleast_2d(above)[0], z) / np.polyval(below, z)
    if direct:  # a sample is read before the input changes
        jump = numerator[0] / denominator[0]
        expected = expected - jump + jump / z
    np.testing.assert_allclose(h(z), expected * z**-3.0, rtol=1e-9)
    np.testing.assert_allclose(h.at_frequency(np.array([[0.8], [5.0]])), h(np.exp(0.5j * np.array([[0.8], [5.0]]))), rtol=1e-10)
    factored = h.leading * z ** -float(h.delay_scans) * np.prod(z[:, None] - h.zeros, axis=1) / np.prod(z[:, None] - h.poles, axis=1)
    np.testing.assert_allclose(factored, h(z), rtol=1e-9)
    np.testing.assert_allclose(h.poles - 1, h.pole_offsets, atol=1e-15)
    np.testing.assert_allclose(h.zeros - 1, h.zero_offsets, atol=1e-13)
    # By their polynomial, which a triple root does not spoil.
    np.testing.assert_allclose(np.poly([p for p in h.poles if p != 0]), np.poly(np.exp(0.5 * np.roots(denominator))), rtol=1e-9)
    steady = numerator[-1] / denominator[-1] if denominator[-1] else np.inf
    assert h.steady_gain == pytest.approx(steady) and h.scan_time == 0.5 and h.between == between
    assert 0 <= h.factored_error < 1e-12 and h.order == len(denominator) - 1


def run(h, u):
    """The recursion as the class documents it."""
    d, x, y = h.delay_scans, np.zeros(h.order), []
    late = np.concatenate([np.zeros(d + 1), u, np.zeros(1)])  # late[k + 1] is u[k - d]
    for k in range(len(u)):
        y.append(h.outputs @ x + h.direct_now * late[k + 1] + h.direct_before * late[k])
        x = x + h.growth @ x + h.ahead * late[k + 2] + h.now * late[k + 1] + h.before * late[k]
    return np.array(y)


@pytest.mark.parametrize("dead_time", [0.0, 0.3, 1.0, 2.75])
def test_the_recursion_runs(dead_time):
    # closed form: superposition of first-order step responses
    print("seed 3")
    u = np.random.default_rng(3).standard_normal(60).cumsum()
    h = tw.held(tw.first_order_plus_dead_time(2, 10, dead_time), 1.0)
    time_s = np.arange(60.0)
    moves = np.diff(np.concatenate([[0.0], u]))
    expected = [moves @ first_order_step(t - time_s, 2, 10, dead_time) for t in time_s]
    np.testing.assert_allclose(run(h, u), expected, atol=1e-12)
    assert h.growth.shape == (1, 1) and h.now.shape == h.before.shape == h.ahead.shape == h.outputs.shape == (1,)


def test_linear_between_samples():
    # closed form: a ramp into an integrator is half its square
    h = tw.held(tw.integrating_plus_dead_time(0.5, 0.0), 2.0, between="linear")
    t = 2.0 * np.arange(20)
    np.testing.assert_allclose(run(h, t), 0.25 * t**2, atol=1e-11)


def test_short_scans_keep_their_digits():
    # closed form: (1 - a)/(z - a) with z - 1 and 1 - a by expm1
    w, lag, h = np.geomspace(1e-6, 1e-1, 25), 1e4, 1e-3
    one = -math.expm1(-h / lag)
    np.testing.assert_allclose(tw.held(tw.first_order_plus_dead_time(1, lag, 0), h).at_frequency(w),
                               one / (np.expm1(1j * w * h) + one), rtol=1e-13)


def test_one_number_and_text():
    h = tw.held(tw.first_order_plus_dead_time(2, 10, 3), 1.0)
    assert isinstance(h(1.5), complex) and isinstance(h.at_frequency(0.1), complex) and h([1.5, 2]).shape == (2,)
    assert h(1.5) == pytest.approx(2 * -math.expm1(-0.1) / (1.5 - math.exp(-0.1)) / 1.5**3)
    assert repr(h) == "DiscreteTransferFunction(0.190325 z^-3 / (z - 0.904837), scan_time=1 s)"
    text = repr(tw.held(tw.TransferFunction.from_factors(1, lag_pairs=[(3, 0.2)], dead_time=0.5), 1.0, between="linear"))
    assert "z^2" in text and "between=linear" in text and "\n" not in text
    assert np.isinf(tw.held(tw.integrating_plus_dead_time(0.5, 1), 1.0).steady_gain)


@pytest.mark.parametrize("arguments, code", [
    ((0.0,), "out_of_domain"), ((-1.0,), "out_of_domain"), ((math.nan,), "not_finite"), ((math.inf,), "not_finite"),
    ((1e-9,), "out_of_domain")])
def test_refusals(arguments, code):
    with refusal(code):
        tw.held(tw.first_order_plus_dead_time(2, 10, 3), *arguments)


def test_other_refusals():
    with refusal("unknown_name") as refused:
        tw.held(tw.first_order_plus_dead_time(2, 10, 3), 1.0, between="cubic")
    assert "constant, linear" in refused.message
    with refusal("out_of_domain"):
        tw.held(tw.TransferFunction.from_factors(1, leads=[1, 2], lags=[3]), 1.0)
    h = tw.held(tw.first_order_plus_dead_time(2, 10, 3), 1.0)
    with refusal("out_of_domain") as refused:
        h.at_frequency(np.array([1j]))
    assert "rad_s" in refused.message
    with refusal("out_of_domain") as refused:
        h(np.array(["a"]))
    assert refused.message.startswith("z ")
