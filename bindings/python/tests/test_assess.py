import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

import tauwright as tw
from conftest import first_order_step, integrating_step, refusal


@pytest.mark.parametrize("slope, dead_time", [(0.02, 10.0), (0.5, 1.0), (1e-4, 300.0)])
def test_integrator_with_dead_time(slope, dead_time):
    # closed form: L = k exp(-d s)/s crosses gain 1 at k and phase -180 degrees at pi/(2 d)
    r = tw.robustness(tw.integrating_plus_dead_time(slope, dead_time))
    assert r.verdict == "stable" and r.stable is True and r.unstable_poles == 0
    assert r.gain_margin == pytest.approx(np.pi / (2 * dead_time * slope), rel=1e-9)
    assert r.gain_reduction_margin == 0
    assert r.phase_margin_deg == pytest.approx(90 - np.degrees(slope * dead_time), rel=1e-9)
    assert r.delay_margin == pytest.approx((np.pi / 2 - slope * dead_time) / slope, rel=1e-9)
    assert r.gain_crossovers[0].frequency_rad_s == pytest.approx(slope, rel=1e-9)
    assert r.gain_crossovers[0].delay_margin == r.delay_margin
    assert r.phase_crossovers[0].frequency_rad_s == pytest.approx(np.pi / (2 * dead_time), rel=1e-9)
    assert r.phase_crossovers[0].gain_factor == r.gain_margin


@pytest.mark.parametrize("settings, scan_time, extra", [
    (tw.PidSettings(2.0, integral_time=25), None, 0.0), (tw.PidSettings(1.0, integral_time=60), 2.0, 0.0),
    (tw.PidSettings(3.0, integral_time=30, derivative_time=4, filter_time=0.5, measurement_filter_time=1.5), 0.5, 0.7)], ids=str)
def test_margins_and_peaks(settings, scan_time, extra):
    # independent computation: NumPy's complex arithmetic, SciPy's root finder and bounded search on a fine grid
    G = tw.first_order_plus_dead_time(0.8, 30, 7)
    r = tw.robustness(G, settings, scan_time=scan_time, extra_delay=extra)
    delay = 7 + extra

    def sampled(w):  # the block's differences and the first-order process held over each scan
        h, z = scan_time, np.exp(1j * w * scan_time)
        d = int(np.floor(delay / h + 1e-9))
        late = h - (delay - d * h)
        now, before = 1 - np.exp(-late / 30), np.exp(-late / 30) - np.exp(-h / 30)
        process = 0.8 * (now + before / z) / (z - np.exp(-h / 30)) * z**-d
        Tf, Tm = settings.filter_time if settings.derivative_time else 0, settings.measurement_filter_time
        action = 1 + h / settings.integral_time / (1 - 1 / z) + settings.derivative_time * (1 - 1 / z) / (h + Tf * (1 - 1 / z))
        return process * settings.gain * action * h / (h + Tm * (1 - 1 / z))

    def L(w):
        if scan_time:
            return sampled(w)
        s = 1j * w
        tail = settings.derivative_time * s / (settings.filter_time * s + 1)
        c = settings.gain * (1 + 1 / (settings.integral_time * s) + tail) / (settings.measurement_filter_time * s + 1)
        return 0.8 * np.exp(-delay * s) / (30 * s + 1) * c

    w = np.geomspace(1e-4, 1.0, 40001)
    phase = np.unwrap(np.angle(L(w)))
    phase += 2 * np.pi * round((-np.pi / 2 - phase[0]) / (2 * np.pi))
    k = int(np.argmax(phase < -np.pi))
    w180 = brentq(lambda x: L(x).imag, w[k - 1], w[k], xtol=1e-14)
    assert r.gain_margin == pytest.approx(1 / abs(L(w180)), rel=1e-8)
    k = int(np.argmax(np.abs(L(w)) < 1))
    w1 = brentq(lambda x: abs(L(x)) - 1, w[k - 1], w[k], xtol=1e-14)
    assert r.phase_margin_deg == pytest.approx(180 + np.degrees(np.interp(w1, w, phase)), rel=1e-6)
    assert r.gain_crossovers[0].delay_margin == pytest.approx(np.radians(r.phase_margin_deg) / w1, rel=1e-9)
    assert r.delay_margin == pytest.approx(r.gain_crossovers[0].delay_margin, rel=1e-2 if scan_time else 1e-12)
    for function, peak, at in ((lambda x: abs(1 / (1 + L(x))), r.max_sensitivity, r.max_sensitivity_frequency),
                               (lambda x: abs(L(x) / (1 + L(x))), r.max_complementary_sensitivity, None)):
        k = int(np.argmax(function(w)))
        if k == 0:  # at rest |T| = 1
            assert peak == pytest.approx(1, abs=1e-6)
            continue
        best = minimize_scalar(lambda x: -function(x), bounds=(w[k - 1], w[k + 1]), method="bounded", options={"xatol": 1e-13})
        assert peak == pytest.approx(-best.fun, rel=1e-8)
        if at is not None:
            assert at == pytest.approx(best.x, rel=1e-4)
    if not scan_time:
        assert tw.robustness(G.with_dead_time(delay) * tw.transfer_function(settings)).gain_margin == pytest.approx(r.gain_margin, rel=1e-9)


def test_unstable_loops_have_no_margins():
    G = tw.first_order_plus_dead_time(0.8, 30, 7)
    stable = tw.robustness(G, tw.PidSettings(2, integral_time=25))
    r = tw.robustness(G, tw.PidSettings(2 * stable.gain_margin * 1.01, integral_time=25))
    assert (r.verdict, r.stable, r.unstable_poles) == ("unstable", False, 2)
    assert r.gain_margin is None and r.phase_margin_deg is None and r.delay_margin is None and r.max_sensitivity is None
    assert "None" in repr(r)
    calm = tw.robustness(tw.first_order_plus_dead_time(0.5, 30, 7))
    assert calm.phase_margin_deg == np.inf and calm.delay_margin == np.inf
    with refusal("conflicting_arguments"):
        tw.robustness(G, scan_time=1.0)
    with refusal("out_of_domain"):
        tw.robustness(G, tw.PidSettings(1), scan_time=0)
    with refusal("out_of_domain"):
        tw.robustness(G, tw.PidSettings(1), extra_delay=-1)


@pytest.mark.parametrize("G, step", [
    (tw.first_order_plus_dead_time(0.8, 30, 7.3), lambda t: first_order_step(t, 0.8, 30, 7.3)),
    (tw.integrating_plus_dead_time(0.01, 4.6), lambda t: integrating_step(t, 0.01, 4.6))], ids=["lag", "integrator"])
@pytest.mark.parametrize("limits", [(0.0, 100.0), (35.0, 47.0)], ids=["free", "limited"])
def test_closed_loop(G, step, limits):
    # independent computation: the process by superposition of closed-form steps, the controller by backward differences
    settings = tw.PidSettings(2.0, integral_time=40, derivative_time=2, filter_time=0.4, measurement_filter_time=1, setpoint_weight=0.7)
    duty = tw.Duty(5, load_step=4, load_time=150, scan_time=1, rest_output=40, rest_process_value=30, output_low=limits[0],
                   output_high=limits[1])
    trend = tw.simulate(G, settings, duty, horizon=300)
    n, h, low, high = 301, 1.0, *limits
    tracking = h / np.sqrt(40 * 2)
    time_s = h * np.arange(n)
    value, output, inputs = np.empty(n), np.empty(n), np.empty(n)
    filtered, derivative = 30.0, 0.0
    integral = 40 - 2.0 * (0.7 * 30 - 30)
    for k in range(n):
        moves = np.diff(np.concatenate([[40.0], inputs[:k]]))
        value[k] = 30 + np.dot(moves, step(time_s[k] - time_s[:k]))
        last = filtered
        filtered += h / (1 + h) * (value[k] - filtered)
        derivative = (0.4 * derivative - 2.0 * 2 * (filtered - last)) / (0.4 + h)
        integral += 2.0 / 40 * h * (35 - filtered)
        wanted = 2.0 * (0.7 * 35 - filtered) + integral + derivative
        output[k] = min(max(wanted, low), high)
        integral += tracking * (output[k] - wanted)
        inputs[k] = output[k] + (4 if time_s[k] >= 150 else 0)
    np.testing.assert_allclose(trend.time_s, time_s)
    np.testing.assert_allclose(trend.process_value, value, atol=1e-9)
    np.testing.assert_allclose(trend.output, output, atol=1e-9)
    np.testing.assert_array_equal(trend.setpoint, np.full(n, 35.0))
    assert trend.limited == (low > 0) and trend.duty == duty and len(trend) == n

    figures = tw.figures(trend)
    error = trend.setpoint - trend.process_value
    assert figures.integrated_absolute_error == pytest.approx(np.trapz(np.abs(error), dx=h))
    assert figures.valve_travel == pytest.approx(np.abs(np.diff(np.concatenate([[40.0], trend.output]))).sum())
    assert figures.peak_load_error == pytest.approx(np.abs(error[time_s >= 150]).max())
    before = time_s < 150
    assert figures.overshoot_percent == pytest.approx(100 * max(0, -error[before].min() / 5))
    outside = np.flatnonzero(np.abs(error[before]) > 0.02 * 5)
    assert figures.settling_time is None or figures.settling_time == time_s[outside[-1] + 1]


def test_noise_is_seeded_and_duty_is_a_value():
    G, settings = tw.first_order_plus_dead_time(0.8, 30, 7), tw.PidSettings(2, integral_time=30)
    trends = [tw.simulate(G, settings, tw.Duty(noise=0.3, seed=seed, scan_time=1), horizon=2000).output for seed in (1, 1, 2)]
    np.testing.assert_array_equal(trends[0], trends[1])
    assert np.abs(trends[0] - trends[2]).max() > 0.01
    duty = tw.Duty(1, scan_time=2)
    assert (duty.setpoint_step, duty.scan_time, duty.rest_output, duty.seed) == (1, 2, None, 1)
    assert duty == tw.Duty(setpoint_step=1, scan_time=2) != tw.Duty(1)
    assert repr(duty) == "Duty(setpoint_step=1, scan_time=2 s, output=0 to 100)"


@pytest.mark.parametrize("arguments, code", [
    ({"scan_time": 0}, "out_of_domain"), ({"scan_time": -2}, "out_of_domain"), ({"noise": -1}, "out_of_domain"),
    ({"load_time": -1}, "out_of_domain"), ({"output_low": 100}, "out_of_domain"), ({"rest_output": 120}, "out_of_domain"),
    ({"setpoint_step": float("nan")}, "not_finite")])
def test_duties_are_checked_when_made(arguments, code):
    with refusal(code):
        tw.Duty(**arguments)


def test_simulate_refuses():
    G, settings = tw.first_order_plus_dead_time(0.8, 30, 7), tw.PidSettings(2, integral_time=30)
    with refusal("missing_argument"):
        tw.simulate(G, settings, tw.Duty(1), horizon=100)
    with refusal("out_of_domain"):
        tw.simulate(G, settings, tw.Duty(1, scan_time=1), horizon=0)
    with refusal("out_of_domain"):
        tw.simulate(tw.TransferFunction.from_factors(1, leads=[2, 3], lags=[3]), settings, tw.Duty(1, scan_time=1), horizon=100)
