#!/usr/bin/python3
"""Trends against plain Python, NumPy and SciPy on the same loops in the same session.

compare_trends.py (with PYTHONPATH=<build>/python): one pinned core, the best of several runs, results compared. Tables are there before the clock starts.
One loop against the same recursion as a Python loop; 10,000 loops against that recursion in NumPy, vectorized over
the loops; the continuous loop against solve_ivp from dead time to dead time. Our times include the Python call.
"""

import os
import time

import numpy as np
from scipy.integrate import solve_ivp

import tauwright as tw

SCAN_TIME, SCANS, LOOPS = 0.5, 600, 10_000
DUTY = tw.Duty(setpoint_step=30.0, load_step=10.0, load_time=150.0, scan_time=SCAN_TIME)
HORIZON = SCAN_TIME * (SCANS - 1)


def seconds(function, repeats):
    times = []
    for _ in range(repeats):
        began = time.perf_counter()
        result = function()
        times.append(time.perf_counter() - began)
    return min(times), result


def invented_loops(n, seed=1):
    """Columns of gain, lag, dead time and of the PID's gain, integral, derivative, filter and measurement filter time."""
    random = np.random.default_rng(seed)
    K, T, theta = random.uniform(0.5, 3.0, n), random.uniform(5.0, 40.0, n), random.uniform(0.0, 20.0, n)
    return {"K": K, "T": T, "theta": theta, "gain": T / (2.0 * K * (theta + 1.0)), "Ti": T, "Td": np.full(n, 0.4), "Tf": np.full(n, 0.1), "Tm": np.full(n, 1.0)}


def coefficients(p, h=SCAN_TIME):
    """The block's and the process's, of one loop or of arrays of loops."""
    whole = np.floor(p["theta"] / h)
    older = p["theta"] - whole * h
    late = np.exp(-(h - older) / p["T"])
    return {
        "integral_share": p["gain"] * h / p["Ti"], "tracking": h / np.maximum(np.sqrt(p["Ti"] * p["Td"]) if np.all(p["Td"]) else p["Ti"], h),
        "derivative": p["gain"] * p["Td"] / (p["Tf"] + h), "smoothing": h / (p["Tf"] + h), "filter": h / (p["Tm"] + h),
        "growth": np.expm1(-h / p["T"]), "now": -p["K"] * np.expm1(-(h - older) / p["T"]),
        "before": -p["K"] * late * np.expm1(-older / p["T"]), "delay": whole.astype(np.int64),
    }


def python_loop(gain, integral_share, tracking, growth, now, before, delay):
    """PI with limits and first order with dead time, scan by scan; no filter and no derivative, which this loop has not."""
    delay = int(delay)
    inputs = [0.0] * (SCANS + delay + 1)
    values, outputs = [0.0] * SCANS, [0.0] * SCANS
    state, integral, load, load_scan = 0.0, 50.0, 0.0, 300
    for k in range(SCANS):
        if k == load_scan:
            load = 10.0
        error = 30.0 - state
        integral += integral_share * error
        wanted = gain * error + integral
        output = 0.0 if wanted < 0.0 else 100.0 if wanted > 100.0 else wanted
        integral += tracking * (output - wanted)
        values[k] = 50.0 + state
        outputs[k] = output
        inputs[k + delay + 1] = output + load - 50.0
        state += growth * state + now * inputs[k + 1] + before * inputs[k]
    return values, outputs


def python_pid_loop(gain, integral_share, derivative, smoothing, filter_share, tracking, growth, now, before, delay):
    """The whole block: measurement filter and filtered derivative too."""
    delay = int(delay)
    inputs = [0.0] * (SCANS + delay + 1)
    values, outputs = [0.0] * SCANS, [0.0] * SCANS
    state, integral, measured, lagged, load, load_scan = 0.0, 50.0, 0.0, 0.0, 0.0, 300
    for k in range(SCANS):
        if k == load_scan:
            load = 10.0
        measured += filter_share * (state - measured)
        slope = derivative * (measured - lagged)
        lagged += smoothing * (measured - lagged)
        error = 30.0 - measured
        integral += integral_share * error
        wanted = gain * error + integral - slope
        output = 0.0 if wanted < 0.0 else 100.0 if wanted > 100.0 else wanted
        integral += tracking * (output - wanted)
        values[k] = 50.0 + state
        outputs[k] = output
        inputs[k + delay + 1] = output + load - 50.0
        state += growth * state + now * inputs[k + 1] + before * inputs[k]
    return values, outputs


def compare_one_loop(what, loop, names, **controller):
    p = {"K": 2.0, "T": 10.0, "theta": 3.2, "gain": 2.0, "Ti": 10.0, "Td": 0.0, "Tf": 0.0, "Tm": 0.0} | controller
    c = {name: x.item() for name, x in coefficients({n: np.float64(x) for n, x in p.items()}).items()}
    numbers = [p["gain"]] + [c[n] for n in names]
    G = tw.first_order_plus_dead_time(2.0, 10.0, 3.2)
    settings = tw.PidSettings(2.0, integral_time=10.0, derivative_time=p["Td"], filter_time=p["Tf"], measurement_filter_time=p["Tm"])
    ours, trend = seconds(lambda: tw.simulate(G, settings, DUTY, horizon=HORIZON), 1000)
    theirs, (values, outputs) = seconds(lambda: loop(*numbers), 100)
    assert trend.limited and np.abs(trend.process_value - values).max() < 1e-9 and np.abs(trend.output - outputs).max() < 1e-9
    report(f"one {what} loop, 600 scans, against a Python loop", ours, theirs, 30)


def numpy_loops(p, values, outputs):
    """The same block for all loops at once: measurement filter, filtered derivative, tracking, limits, dead time of each loop."""
    c, n = coefficients(p), p["K"].size
    ring = int(c["delay"].max()) + 2
    inputs = np.zeros((ring, n))
    flat, every = inputs.reshape(-1), np.arange(n)
    state, measured, lagged, integral = np.zeros(n), np.zeros(n), np.zeros(n), np.full(n, 50.0)
    error, wanted, work, older, at = np.empty(n), np.empty(n), np.empty(n), np.zeros(n), np.empty(n, dtype=np.int64)
    newer = np.empty(n)
    for k in range(SCANS):
        np.add(state, 50.0, out=values[k])
        np.subtract(state, measured, out=work)
        work *= c["filter"]
        measured += work
        np.subtract(measured, lagged, out=wanted)
        np.multiply(wanted, c["smoothing"], out=work)
        lagged += work
        wanted *= c["derivative"]
        np.subtract(30.0, measured, out=error)
        np.multiply(error, c["integral_share"], out=work)
        integral += work
        error *= p["gain"]
        error += integral
        np.subtract(error, wanted, out=wanted)
        output = np.clip(wanted, 0.0, 100.0, out=outputs[k])
        np.subtract(output, wanted, out=work)
        work *= c["tracking"]
        integral += work
        np.subtract(output, 40.0 if k >= 300 else 50.0, out=inputs[k % ring])
        np.subtract(k, c["delay"], out=at)
        at %= ring
        at *= n
        at += every
        np.take(flat, at, out=newer, mode="clip")
        np.multiply(state, c["growth"], out=work)
        state += work
        np.multiply(newer, c["now"], out=work)
        state += work
        np.multiply(older, c["before"], out=work)
        state += work
        newer, older = older, newer
    return values, outputs


def compare_many_loops():
    p = invented_loops(LOOPS)
    loops = [(tw.first_order_plus_dead_time(K, T, theta),
              tw.PidSettings(gain, integral_time=Ti, derivative_time=Td, filter_time=Tf, measurement_filter_time=Tm))
             for K, T, theta, gain, Ti, Td, Tf, Tm in zip(*p.values())]
    many = tw.simulate_many(loops, DUTY, horizon=HORIZON)
    ours, many = seconds(lambda: tw.simulate_many(loops, DUTY, horizon=HORIZON, into=many), 15)
    values, outputs = np.ones((SCANS, LOOPS)), np.ones((SCANS, LOOPS))
    theirs, _ = seconds(lambda: numpy_loops(p, values, outputs), 3)
    assert np.abs(many.process_value - values).max() < 1e-9 and np.abs(many.output - outputs).max() < 1e-9
    report("10,000 loops, 600 scans, against NumPy over the loops", ours, theirs, 10)
    print(f"    a loop and scan: {ours / SCANS / LOOPS * 1e9:.2f} ns and {theirs / SCANS / LOOPS * 1e9:.1f} ns")


def by_steps(K, T, theta, gain, Ti, times):
    """Set-point step of 1: solve_ivp over one dead time after another, the delayed input from the interval before."""
    def output(t, x):  # x: process value, integral of the error
        return gain * (1.0 - x[0]) + gain / Ti * x[1]

    values, found, x, start, before = np.empty_like(times), 0, np.zeros(2), 0.0, None
    while found < times.size:
        end = min(start + theta, times[-1])
        last = before

        def slope(t, x):
            u = output(t - theta, last(t - theta)) if last is not None else 0.0
            return [(K * u - x[0]) / T, 1.0 - x[0]]

        solved = solve_ivp(slope, (start, end), x, method="DOP853", rtol=1e-10, atol=1e-12, dense_output=True)
        stop = np.searchsorted(times, end, side="right")
        values[found:stop] = solved.sol(times[found:stop])[0]
        found, x, start, before = stop, solved.y[:, -1], end, solved.sol
    return values


def compare_continuous():
    K, T, theta, gain, Ti = 2.0, 10.0, 3.0, 10.0 / 12.0, 10.0
    G, settings = tw.first_order_plus_dead_time(K, T, theta), tw.PidSettings(gain, integral_time=Ti)
    duty = tw.Duty(setpoint_step=1.0, rest_output=0.0, rest_process_value=0.0)
    ours, trend = seconds(lambda: tw.continuous_trend(G, settings, duty, horizon=30.0 * theta, points=121), 200)
    theirs, values = seconds(lambda: by_steps(K, T, theta, gain, Ti, trend.time_s), 3)
    assert np.abs(trend.process_value - values).max() < 1e-8
    report("continuous loop, 30 dead times, against solve_ivp", ours, theirs, 3000)


def report(what, ours, theirs, goal):
    print(f"  {what}: {ours * 1e6:.1f} us and {theirs * 1e6:.0f} us, ratio {theirs / ours:.1f} (goal {goal})")


def main():
    os.sched_setaffinity(0, {max(os.sched_getaffinity(0))})
    process = ("tracking", "growth", "now", "before", "delay")
    compare_one_loop("PID", python_pid_loop, ("integral_share", "derivative", "smoothing", "filter", *process), Td=0.4, Tf=0.1, Tm=1.0)
    compare_one_loop("PI", python_loop, ("integral_share", *process))
    compare_many_loops()
    compare_continuous()


if __name__ == "__main__":
    main()
