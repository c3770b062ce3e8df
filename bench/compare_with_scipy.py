#!/usr/bin/python3
"""The fit against scipy.optimize.curve_fit on the same record in the same session.

compare_with_scipy.py (with PYTHONPATH=<build>/python): prints, for 1,000 and 100,000 samples, medians on
one pinned core, their ratio, and by how much of the noise variance the sums of squares differ. The rival gets the closed-form model,
bounds, and a good start (the truth within 10 %); ours searches globally.
"""

import os
import statistics
import time

import numpy as np
from scipy.optimize import curve_fit

import tauwright as tw

MOVES, SIZES = np.array([40.0, 130.0, 220.0, 310.0]), np.array([5.0, -5.0, -5.0, 5.0])
GAIN, LAG, DEAD_TIME, NOISE = 1.2, 12.0, 3.3, 0.3


def record(samples, seed):
    t = np.arange(samples) * (400.0 / samples)
    seen = np.array([t[np.searchsorted(t, m - 1e-9)] for m in MOVES])
    u = 50.0 + np.sum(SIZES[:, None] * (t >= seen[:, None]), axis=0)

    def model(t, offset, gain, lag, dead_time):
        y = np.full_like(t, offset)
        for when, size in zip(seen, SIZES):
            since = t - when - dead_time
            y -= gain * size * np.expm1(-np.maximum(since, 0.0) / lag)
        return y

    y = model(t, 60.0, GAIN, LAG, DEAD_TIME) + NOISE * np.random.default_rng(seed).standard_normal(samples)
    return t, u, y, model


def median_of(function, repeats):
    times = []
    for _ in range(repeats):
        began = time.perf_counter()
        result = function()
        times.append(time.perf_counter() - began)
    return statistics.median(times), result


def main():
    os.sched_setaffinity(0, {max(os.sched_getaffinity(0))})
    print(f"{'samples':>8} {'tauwright':>12} {'curve_fit':>12} {'ratio':>8}   sum of squares, ours less SciPy's / noise variance")
    for samples, repeats in ((1000, 60), (100_000, 15)):
        worst = -np.inf
        for seed in range(3):
            t, u, y, model = record(samples, seed)
            plant = tw.Record(t, u, y)
            ours, fit = median_of(lambda: tw.identify(plant, form="first_order_plus_dead_time"), repeats)
            start = [60.2, 1.1 * GAIN, 0.9 * LAG, 1.1 * DEAD_TIME]
            bounds = ([0, 0, 0.1, 0], [100, 10, 200, 60])
            rival, (p, _) = median_of(lambda: curve_fit(model, t, y, p0=start, bounds=bounds), max(repeats // 3, 5))
            rival_ss = float(np.sum((y - model(t, *p)) ** 2))
            worst = max(worst, (fit.sum_of_squares - rival_ss) / NOISE**2)
            print(f"{samples:8d} {ours * 1e6:9.0f} us {rival * 1e6:9.0f} us {rival / ours:7.1f}x   {(fit.sum_of_squares - rival_ss) / NOISE**2:+.4f}")
        assert worst <= 0.01, f"a fit left a larger sum of squares than SciPy's by {worst} noise variances"


if __name__ == "__main__":
    main()
