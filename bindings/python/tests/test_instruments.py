"""Valve and transmitter blocks, and the rate limit of the controller's output."""

import math

import numpy as np
import pytest

import tauwright as tw
from conftest import refusal


def wandering(seed, n=400, size=2.0):
    print(f"seed {seed}")
    return 50 + size * np.random.default_rng(seed).standard_normal(n).cumsum().clip(-20, 20)


def test_sticking():
    # independent computation: the rule itself
    valve, position = tw.Valve(tw.ValveSettings(stick=1.5), scan_time=1, initial_position=50), 50.0
    for demand in wandering(1, size=0.6):
        if abs(demand - position) > 1.5:
            position = demand
        assert valve.step(demand) == position == valve.position


def test_dead_band():
    # independent computation: the position is pushed by either side of a gap of that width
    valve, position = tw.Valve(tw.ValveSettings(dead_band=3), scan_time=1, initial_position=50), 50.0
    for demand in wandering(2):
        position = min(max(position, demand - 1.5), demand + 1.5)
        assert valve.step(demand) == pytest.approx(position, abs=1e-12)


def test_resolution_and_travel():
    valve = tw.Valve(tw.ValveSettings(resolution=0.5), scan_time=1, initial_position=50)
    steps = np.array([valve.step(u) for u in wandering(3)]) / 0.5
    np.testing.assert_allclose(steps, np.round(steps), atol=1e-9)
    slow = tw.Valve(tw.ValveSettings(travel_rate_per_s=4), scan_time=0.5)
    # closed form: 4 per s in scans of 0.5 s
    assert [slow.step(7) for _ in range(5)] == [2, 4, 6, 7, 7]
    assert slow.step(math.nan) == 7 and slow.step(500) == 9
    ends = tw.Valve(tw.ValveSettings(), scan_time=1, position_low=10, position_high=90)
    assert (ends.position, ends.step(200), ends.step(-200)) == (10, 90, 10)
    assert (ends.position_low, ends.position_high, ends.settings.perfect) == (10, 90, True)


def test_transmitter():
    # closed form: a first-order lag of a held step
    transmitter = tw.Transmitter(tw.TransmitterSettings(lag=4), scan_time=1, initial_value=20)
    values = [transmitter.step(30) for _ in range(20)]
    np.testing.assert_allclose(values, 30 - 10 * np.exp(-np.arange(1, 21) / 4), rtol=1e-13)
    coarse = tw.Transmitter(tw.TransmitterSettings(resolution=0.25), scan_time=1)
    assert coarse.measured is None
    assert [coarse.step(x) for x in (50.1, 50.2, -0.13, -0.12)] == [50, 50.25, -0.25, 0]
    assert coarse.measured == 0 and math.isnan(coarse.step(math.nan)) and coarse.measured == 0
    first = tw.Transmitter(tw.TransmitterSettings(lag=4), scan_time=1)
    assert first.step(math.inf) == math.inf and first.measured is None
    assert first.step(33) == 33  # at rest at the first value it is given


def test_transmitter_noise():
    settings = tw.TransmitterSettings()
    columns = []
    for seed in (5, 5, 6):
        transmitter = tw.Transmitter(settings, scan_time=1, noise=0.2, seed=seed)
        columns.append(np.array([transmitter.step(50.0) for _ in range(20000)]))
    np.testing.assert_array_equal(columns[0], columns[1])
    assert np.abs(columns[0] - columns[2]).max() > 0.1
    # closed form: mean and standard deviation of 20,000 draws, within five standard errors
    assert columns[0].mean() == pytest.approx(50, abs=5 * 0.2 / np.sqrt(20000))
    assert columns[0].std() == pytest.approx(0.2, abs=5 * 0.2 / np.sqrt(40000))
    assert (transmitter.noise, transmitter.seed, transmitter.settings) == (0.2, 6, settings)


def test_values():
    valve = tw.ValveSettings(dead_band=1, travel_rate_per_s=5)
    assert valve == tw.ValveSettings(dead_band=1, travel_rate_per_s=5) != tw.ValveSettings(dead_band=1)
    assert repr(valve) == "ValveSettings(dead_band=1, travel_rate=5 per s)" and not valve.perfect
    assert (valve.stick, valve.resolution, tw.ValveSettings().travel_rate_per_s) == (0, 0, None)
    transmitter = tw.TransmitterSettings(lag=2, resolution=0.1)
    assert transmitter == tw.TransmitterSettings(lag=2, resolution=0.1) != tw.TransmitterSettings()
    assert repr(transmitter) == "TransmitterSettings(lag=2 s, resolution=0.1)" and tw.TransmitterSettings().perfect
    assert repr(tw.Valve(valve, scan_time=1)) == "Valve(position=0, settings=ValveSettings(dead_band=1, travel_rate=5 per s))"
    assert "measured=None" in repr(tw.Transmitter(transmitter, scan_time=1))


@pytest.mark.parametrize("make, code", [
    (lambda: tw.ValveSettings(dead_band=-1), "out_of_domain"), (lambda: tw.ValveSettings(stick=math.nan), "not_finite"),
    (lambda: tw.ValveSettings(resolution=math.inf), "not_finite"), (lambda: tw.ValveSettings(travel_rate_per_s=0), "out_of_domain"),
    (lambda: tw.TransmitterSettings(lag=-1), "out_of_domain"), (lambda: tw.TransmitterSettings(resolution=math.nan), "not_finite"),
    (lambda: tw.Valve(tw.ValveSettings(), scan_time=0), "out_of_domain"),
    (lambda: tw.Valve(tw.ValveSettings(), scan_time=1, position_low=100), "out_of_domain"),
    (lambda: tw.Valve(tw.ValveSettings(), scan_time=1, initial_position=math.nan), "not_finite"),
    (lambda: tw.Transmitter(tw.TransmitterSettings(), scan_time=-1), "out_of_domain"),
    (lambda: tw.Transmitter(tw.TransmitterSettings(), scan_time=1, noise=-1), "out_of_domain"),
    (lambda: tw.Transmitter(tw.TransmitterSettings(), scan_time=1, initial_value=math.inf), "not_finite"),
    (lambda: tw.PidBlock(tw.PidSettings(1), scan_time=1, output_rate_limit=0), "out_of_domain"),
    (lambda: tw.PidBlock(tw.PidSettings(1), scan_time=1, output_rate_limit=math.nan), "not_finite"),
    (lambda: tw.Duty(valve=tw.ValveSettings(), output_rate_limit=-1), "out_of_domain"),
    (lambda: tw.Duty(setpoint_ramp_time=-1), "out_of_domain"), (lambda: tw.Duty(load_ramp_time=math.nan), "not_finite"),
    (lambda: tw.Duty(disturbance=[1, math.nan]), "not_finite"), (lambda: tw.Duty(disturbance=[[1, 2]]), "wrong_length"),
    (lambda: tw.Duty(disturbance=["a"]), "out_of_domain")])
def test_bad_values_are_refused(make, code):
    with refusal(code):
        make()


def test_output_rate_limit():
    # closed form: an error of 30 asks for 60 at once; 5 per s in scans of 0.5 s gives 2.5 a scan, both ways
    block = tw.PidBlock(tw.PidSettings(2, integral_time=20), scan_time=0.5, initial_output=40, output_rate_limit=5)
    assert block.coefficients.output_change_per_scan == 2.5
    outputs = [block.step(50, 50)] + [block.step(80, 50) for _ in range(6)] + [block.step(20, 50) for _ in range(4)]
    np.testing.assert_allclose(np.diff(outputs), [2.5] * 6 + [-2.5] * 4, atol=1e-12)
    assert "output_change_per_scan=2.5" in repr(block.coefficients)
    free = tw.PidBlock(tw.PidSettings(2, integral_time=20), scan_time=0.5).coefficients
    assert free.output_change_per_scan == math.inf and "output_change" not in repr(free)
