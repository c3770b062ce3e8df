import math

import numpy as np
import pytest

import tauwright as tw
from conftest import first_order_step, integrating_step, refusal, response


class Recursion:
    """Independent computation: the definition's three actions by backward differences, within limits."""

    def __init__(self, s, h):
        self.s, self.h, self.integral, self.derivative, self.filtered = s, h, None, 0.0, None

    def step(self, setpoint, value, output=None):
        s, h = self.s, self.h
        last = value if self.filtered is None else self.filtered
        self.filtered = last + h / (s.measurement_filter_time + h) * (value - last)
        self.derivative = (s.filter_time * self.derivative - s.gain * s.derivative_time * (self.filtered - last)) / (
            s.filter_time + h)
        proportional = s.gain * (s.setpoint_weight * setpoint - self.filtered)
        if output is not None:
            self.integral = output - proportional - self.derivative
        else:
            self.integral += s.integral_gain * h * (setpoint - self.filtered)
        return proportional + self.integral + self.derivative


@pytest.mark.parametrize("settings", [
    tw.PidSettings(1.5, integral_time=20), tw.PidSettings(-0.8, integral_time=30, derivative_time=4, filter_time=0.8),
    tw.PidSettings(1.5, integral_time=20, derivative_time=3, filter_time=0.3, measurement_filter_time=2, setpoint_weight=0.4),
    tw.PidSettings(integral_gain=0.03)], ids=str)
def test_block_follows_the_definition(settings):
    print("seed 7")
    random = np.random.default_rng(7)
    block = tw.PidBlock(settings, scan_time=0.5, output_low=-1e6, output_high=1e6, initial_output=40)
    oracle = Recursion(settings, 0.5)
    for k in range(200):
        setpoint, value = 50 + 3 * (k > 40), 50 + random.standard_normal()
        expected = oracle.step(setpoint, value, 40.0 if k == 0 else None)
        assert block.step(setpoint, value) == pytest.approx(expected, abs=1e-9), k
        assert block.flags == 0 and block.output == block.output


def test_starts_limits_and_returns():
    settings = tw.PidSettings(2, integral_time=10)
    block = tw.PidBlock(settings, scan_time=1)
    # closed form: proportional 2 * 5, integral 0 + 2 / 10 * 5
    assert block.step(55, 50) == pytest.approx(2 * 5 + 0.2 * 5 * 1)
    for _ in range(500):
        block.step(100, 0)
    assert block.output == 100 and block.flags == tw.flag_limited_high
    # Anti-windup: the output leaves its limit as soon as the error turns.
    outputs = [block.step(0, 10) for _ in range(3)]
    assert outputs[0] < 100 and block.output_high == 100 and block.output_low == 0


def test_bad_input_is_held_and_flagged():
    block = tw.PidBlock(tw.PidSettings(2, integral_time=10), scan_time=1, initial_output=30)
    assert block.step(50, 50) == 30
    for bad in (math.nan, math.inf, -math.inf):
        assert block.step(50, bad) == 30 and block.flags & tw.flag_bad_input
        assert block.step(bad, 50) == 30 and block.flags & tw.flag_bad_input
    assert block.step(52, 47) == 30 and block.flags == 0  # takes over without a bump


def test_manual_and_automatic_without_a_bump():
    block = tw.PidBlock(tw.PidSettings(2, integral_time=10), scan_time=1, initial_output=30)
    block.step(50, 50)
    assert block.mode == "automatic"
    block.mode = "manual"
    assert block.manual_output == 30 and block.step(80, 20) == 30 and block.flags & tw.flag_manual
    block.manual_output = 45
    assert block.step(80, 20) == 45
    block.mode = "automatic"
    assert block.step(80, 20) == 45 and block.step(80, 20) > 45
    block.manual_output = 500
    assert block.manual_output == 100
    with refusal("unknown_name"):
        block.mode = "auto"
    with refusal("not_finite"):
        block.manual_output = math.nan
    assert block.manual_output == 100 and "mode=automatic" in repr(block)


@pytest.mark.parametrize("dead_time", [0.0, 1.0, 1.7, 12.25])
@pytest.mark.parametrize("G, step", [
    (lambda d: tw.first_order_plus_dead_time(-2, 10, d), lambda t, d: first_order_step(t, -2, 10, d)),
    (lambda d: tw.integrating_plus_dead_time(0.02, d), lambda t, d: integrating_step(t, 0.02, d))], ids=["lag", "integrator"])
def test_process_block_is_exact(G, step, dead_time):
    # closed form: superposition of step responses
    print("seed 8")
    random = np.random.default_rng(8)
    h = 0.5
    output = np.concatenate([[20.0], 20 + random.standard_normal(120).cumsum()])
    block = tw.ProcessBlock(G(dead_time), scan_time=h, rest_output=20, rest_process_value=60)
    assert block.process_value == 60
    values = [block.step(u) for u in output[1:]]
    # The first move of the output is at the start of the first scan, at time 0.
    time_s = h * np.arange(-1, output.size)
    expected = response(time_s[:-1], output, lambda t: step(t, dead_time), 60)
    last = 60 + sum(d * step(time_s[-1] - time_s[k + 1], dead_time) for k, d in enumerate(np.diff(output)))
    np.testing.assert_allclose(values, np.append(expected[2:], last), atol=1e-11)
    before = block.step(math.nan)
    assert math.isfinite(before)


def test_coefficients():
    # closed form: backward differences
    c = tw.discretize(tw.PidSettings(2, integral_time=10, derivative_time=3, filter_time=0.5, measurement_filter_time=1), scan_time=0.5)
    assert (c.gain, c.setpoint_weight, c.integral_per_scan) == (2, 1, pytest.approx(0.1))
    assert (c.derivative_per_scan, c.derivative_smoothing, c.measurement_smoothing) == (6, 0.5, pytest.approx(1 / 3))
    assert c == tw.PidBlock(tw.PidSettings(2, integral_time=10, derivative_time=3, filter_time=0.5, measurement_filter_time=1),
                            scan_time=0.5).coefficients


@pytest.mark.parametrize("arguments, code", [
    ({"scan_time": 0}, "out_of_domain"), ({"scan_time": -1}, "out_of_domain"), ({"scan_time": math.nan}, "not_finite"),
    ({"scan_time": 1, "output_low": 100}, "out_of_domain"), ({"scan_time": 1, "output_high": math.inf}, "not_finite"),
    ({"scan_time": 1, "initial_output": math.nan}, "not_finite")])
def test_blocks_are_checked_when_made(arguments, code):
    with refusal(code):
        tw.PidBlock(tw.PidSettings(2), **arguments)


def test_process_block_takes_named_forms_only():
    with refusal("unsupported_form"):
        tw.ProcessBlock(tw.TransferFunction.from_factors(1, leads=[2], lags=[3]), scan_time=1)
    with refusal("out_of_domain"):
        tw.ProcessBlock(tw.first_order_plus_dead_time(1, 2, 3), scan_time=0)
