"""Bandwidths, dead times, touches, sampled loops, exact controllers, the delay budget."""

import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

import tauwright as tw
from conftest import refusal

PROCESS, SETTINGS = tw.first_order_plus_dead_time(2, 10, 3), tw.PidSettings(10 / 12, integral_time=10)


@pytest.mark.parametrize("scan_time, extra, gain, phase, peak", [
    (None, 0, 3.141607649, 61.3520144735634, 1.5904902331329802),
    (1, 0, 2.566065737262941, 56.46702142536884, 1.7873060539373125),
    (1, 1, 2.008281790260677, 46.55080731797952, 2.2074622801656756)])
def test_margins_lost_to_the_scan(scan_time, extra, gain, phase, peak):
    # independent computation: backward PI and held process on a frequency grid, recomputed outside this project to 2e-3
    r = tw.robustness(PROCESS, SETTINGS, scan_time=scan_time, extra_delay=extra)
    assert r.gain_margin == pytest.approx(gain, rel=2e-3)
    assert r.phase_margin_deg == pytest.approx(phase, rel=2e-3)
    assert r.max_sensitivity == pytest.approx(peak, rel=2e-3)
    assert r.stable_dead_times == ([] if scan_time else [(0.0, pytest.approx(3 + r.delay_margin, rel=1e-9))])
    assert r.unstable_poles == 0 and not r.fragile and not r.phase_crossovers_capped
    assert (r.process, r.settings, r.scan_time, r.extra_delay) == (PROCESS, SETTINGS, scan_time, extra)
    assert isinstance(r, tw.Robustness) and r == tw.robustness(PROCESS, SETTINGS, scan_time=scan_time, extra_delay=extra)


def test_bandwidths():
    # independent computation: SciPy's root finder on |S| and |T|
    r = tw.robustness(PROCESS, SETTINGS)

    def L(w):
        return PROCESS(1j * w) * SETTINGS(1j * w)

    low = brentq(lambda w: abs(1 / (1 + L(w))) - np.sqrt(0.5), 1e-3, 0.2)
    high = brentq(lambda w: abs(L(w) / (1 + L(w))) - np.sqrt(0.5), 0.2, 1)
    assert r.sensitivity_bandwidth == pytest.approx(low, rel=1e-9)
    assert r.complementary_bandwidth == pytest.approx(high, rel=1e-9)
    still = tw.robustness(tw.first_order_plus_dead_time(0.2, 10, 3))
    assert still.sensitivity_bandwidth is None


def test_all_stable_dead_times():
    # closed form: k/(s^2 + 2 z s + 1) crosses gain 1 at x = w^2 with (1 - x)^2 + 4 z^2 x = k^2; a pair of poles crosses the axis
    # at every dead time with w d = pi + arg L + 2 pi n, to the right at the higher w, back at the lower
    k, z = 0.3, 0.05
    half = 1 - 2 * z**2
    changes = []
    for sign in (-1, 1):
        w = np.sqrt(half + sign * np.sqrt(half**2 - 1 + k**2))
        first = (np.pi + np.angle(k / (1 - w**2 + 2j * z * w))) / w
        changes += [(first + 2 * np.pi * n / w, sign) for n in range(40)]
    expected, start, poles = [], 0.0, 0
    for d, sign in sorted(changes):
        if poles == 0 and sign > 0:
            expected.append((start, d))
        poles += 2 * sign
        if poles == 0:
            start = d
    expected = expected[:3]
    assert len(expected) == 3  # the process is worth the name
    for dead_time in (0.0, *(0.5 * (a + b) for a, b in expected)):
        r = tw.robustness(tw.TransferFunction.from_factors(k, lag_pairs=[(1, z)], dead_time=dead_time))
        assert r.stable
        np.testing.assert_allclose(r.stable_dead_times[:3], expected, rtol=1e-9)
        inside = next(i for i, (a, b) in enumerate(expected) if a <= dead_time < b)
        assert r.delay_margin == pytest.approx(expected[inside][1] - dead_time, rel=1e-9)
        if inside == 0:
            assert r.delay_reduction_margin == np.inf
        else:
            assert r.delay_reduction_margin == pytest.approx(dead_time - expected[inside][0], rel=1e-9)
    unstable = tw.robustness(tw.TransferFunction.from_factors(k, lag_pairs=[(1, z)], dead_time=0.5 * (expected[0][1] + expected[1][0])))
    assert unstable.verdict == "unstable" and unstable.unstable_poles == 2


def test_fragile_loops():
    # closed form: 2 (s + 1)/(s + 2) keeps gain 2 at high frequency, so any dead time has infinitely many poles to the right
    r = tw.robustness(tw.TransferFunction.from_factors(1, leads=[1], lags=[0.5]))
    assert r.stable and r.fragile and r.delay_margin == 0 and "fragile=True" in repr(r)
    assert not tw.robustness(tw.TransferFunction.from_factors(0.4, leads=[1], lags=[0.5])).fragile


def test_touches():
    # closed form: |k/(s^2 + 2 z s + 1)| peaks at 1 for k = 2 z sqrt(1 - z^2), at w = sqrt(1 - 2 z^2)
    z = 0.3
    r = tw.robustness(tw.TransferFunction.from_factors(2 * z * np.sqrt(1 - z**2), lag_pairs=[(1, z)]))
    touching = [c for c in r.gain_crossovers if c.touches]
    assert len(touching) == 1 and len(r.gain_crossovers) == 1
    assert abs(touching[0].frequency_rad_s - np.sqrt(1 - 2 * z**2)) <= max(touching[0].error_bound, 1e-9)
    assert 0 < touching[0].error_bound < 1e-5 and "touches=True" in repr(touching[0])
    plain = tw.robustness(PROCESS, SETTINGS)
    for crossing in (*plain.gain_crossovers, *plain.phase_crossovers):
        assert crossing.touches is False and crossing.error_bound == 0


@pytest.mark.parametrize("factor", [1.0, 1.3])
def test_exact_controllers(factor):
    # independent computation: S = 1/(1 + G C) with C = Q/(1 - T) in NumPy, its peak by SciPy. A perfect model: S = 1 - T
    controller = tw.synthesize(PROCESS, tw.DesiredResponse(3.0)).controller
    process = PROCESS.with_gain(2 * factor)
    r = tw.robustness(process, controller)

    def S(w):
        T = np.exp(-3j * w) / (3j * w + 1)
        return abs((1 - T) / (1 - T + factor * T))

    w = np.geomspace(1e-3, 10, 20001)
    k = int(np.argmax(S(w)))
    best = minimize_scalar(lambda x: -S(x), bounds=(w[k - 1], w[k + 1]), method="bounded", options={"xatol": 1e-13})
    assert r.stable and r.max_sensitivity == pytest.approx(-best.fun, rel=1e-9)
    assert r.settings == controller and "exp" in repr(r.settings)
    assert r.gain_margin > 1
    with refusal("out_of_domain"):
        tw.robustness(process, controller, scan_time=1)


def test_delay_budget():
    # closed form: half a scan for sampling and hold, backward integration raises the gain by h/(2 Ti)
    budget = tw.delay_budget(PROCESS, tw.PidSettings(1, integral_time=10, measurement_filter_time=0.7), scan_time=2, extra_delay=1.5)
    assert (budget.process_dead_time, budget.half_scan, budget.extra_delay, budget.measurement_filter_time) == (3, 1, 1.5, 0.7)
    assert budget.total == pytest.approx(6.2) and budget.working_gain == pytest.approx(1.1)
    assert tw.delay_budget(PROCESS, SETTINGS).total == 3 and tw.delay_budget(PROCESS, SETTINGS).working_gain == 1
    assert "total=6.2 s" in repr(budget)
    for bad in ({"scan_time": 0}, {"extra_delay": -1}):
        with refusal("out_of_domain"):
            tw.delay_budget(PROCESS, SETTINGS, **bad)
    with refusal("not_finite"):
        tw.delay_budget(PROCESS, SETTINGS, scan_time=np.nan)


def test_bad_input():
    for bad, code in (({"scan_time": -1}, "out_of_domain"), ({"scan_time": np.inf}, "not_finite"), ({"extra_delay": np.nan}, "not_finite")):
        with refusal(code):
            tw.robustness(PROCESS, SETTINGS, **bad)
    with pytest.raises(TypeError):
        tw.robustness(PROCESS, "settings")
