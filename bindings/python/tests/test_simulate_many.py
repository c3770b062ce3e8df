"""Many loops under one duty: the columns are the trends of each loop alone, and a NumPy recursion over all loops agrees."""

import numpy as np
import pytest

import tauwright as tw
from conftest import refusal

DUTY = tw.Duty(setpoint_step=20.0, load_step=5.0, load_time=60.0, noise=0.2, seed=4, scan_time=0.5)


def invented_loops(n, seed=11):
    random = np.random.default_rng(seed)
    loops = []
    for _ in range(n):
        K, T, theta = random.uniform(0.5, 3.0), random.uniform(5.0, 40.0), random.uniform(0.0, 20.0)
        settings = tw.PidSettings(T / (2.0 * K * (theta + 1.0)), integral_time=T)
        loops.append((tw.first_order_plus_dead_time(K, T, theta), settings))
    return loops


def test_columns_are_the_trends_of_each_loop():
    loops = invented_loops(37)
    loops[5] = (tw.TransferFunction.from_factors(1.0, lags=[3.0, 2.0, 1.0], dead_time=0.7), loops[5][1])
    many = tw.simulate_many(loops, DUTY, horizon=120.0)
    assert many.process_value.shape == many.output.shape == (241, 37)
    assert repr(many) == "ManyTrends(37 loops, 241 scans)"
    for i, (process, settings) in enumerate(loops):
        alone = tw.simulate(process, settings, DUTY, horizon=120.0)
        assert np.array_equal(many.time_s, alone.time_s)
        assert np.array_equal(many.process_value[:, i], alone.process_value)
        assert np.array_equal(many.output[:, i], alone.output)


def test_against_the_recursion_in_numpy():
    # Independent computation: exact held step of first order, fractional dead time, PI with tracking, written out.
    h, n, random = 0.5, 241, np.random.default_rng(5)
    K, T, theta = random.uniform(0.5, 3.0, 20), random.uniform(5.0, 40.0, 20), random.uniform(0.0, 20.0, 20)
    gain = T / (2.0 * K * (theta + 1.0))
    duty = tw.Duty(setpoint_step=30.0, scan_time=h)
    loops = [(tw.first_order_plus_dead_time(*p), tw.PidSettings(g, integral_time=p[1])) for p, g in zip(zip(K, T, theta), gain)]
    many = tw.simulate_many(loops, duty, horizon=h * (n - 1))
    whole = np.floor(theta / h).astype(int)
    older = theta - whole * h
    decay, now = np.exp(-h / T), -K * np.expm1(-(h - older) / T)
    before = -K * np.exp(-(h - older) / T) * np.expm1(-older / T)
    y, integral, inputs = np.zeros(20), np.full(20, 50.0), np.zeros((n + 50, 20))
    every = np.arange(20)
    for k in range(n):
        error = 30.0 - y
        integral = integral + gain * h / T * error
        wanted = gain * error + integral
        output = np.clip(wanted, 0.0, 100.0)
        integral = integral + h / np.maximum(T, h) * (output - wanted)
        assert np.abs(many.process_value[k] - (50.0 + y)).max() < 1e-9
        assert np.abs(many.output[k] - output).max() < 1e-9
        inputs[k + 50] = output - 50.0
        y = decay * y + now * inputs[k + 50 - whole, every] + before * inputs[k + 49 - whole, every]
    assert (many.output == 100.0).any()


def test_arrays_are_read_only_and_no_loops_are_fine():
    many = tw.simulate_many(invented_loops(2), DUTY, horizon=10.0)
    with pytest.raises(ValueError, match="read-only"):
        many.output[0, 0] = 1.0
    assert tw.simulate_many([], DUTY, horizon=10.0).process_value.shape == (21, 0)


def test_memory_can_be_used_again():
    first = tw.simulate_many(invented_loops(40, seed=1), DUTY, horizon=50.0)
    expected = tw.simulate_many(invented_loops(40, seed=2), DUTY, horizon=50.0)
    again = tw.simulate_many(invented_loops(40, seed=2), DUTY, horizon=50.0, into=first)
    assert again.process_value is first.process_value and again.output is first.output
    assert np.array_equal(again.process_value, expected.process_value) and np.array_equal(again.output, expected.output)
    with refusal("wrong_length") as refused:
        tw.simulate_many(invented_loops(40), DUTY, horizon=60.0, into=first)
    assert refused.message.startswith("into holds 101 scans of 40 loops; give one that holds 121 scans of 40")


def test_bad_input():
    loops = invented_loops(3)
    loops[1] = (tw.first_order_plus_dead_time(1.0, 5.0, 1e8), loops[1][1])
    with refusal("out_of_domain") as refused:
        tw.simulate_many(loops, DUTY, horizon=10.0)
    assert refused.message.startswith("loops[1]: dead_time")
    with refusal("missing_argument"):
        tw.simulate_many(loops, tw.Duty(), horizon=10.0)
    for wrong in ([loops[0], 3], [loops[0], (loops[0][0],)], [loops[0], loops[0][::-1]]):
        with pytest.raises(TypeError, match=r"loops\[1\] is .*give a pair"):
            tw.simulate_many(wrong, DUTY, horizon=10.0)
