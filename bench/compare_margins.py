#!/usr/bin/python3
"""Margins against a SciPy grid on the same loops in the same session.

compare_margins.py (with PYTHONPATH=<build>/python): the typical loops of timed_loops.hpp, one pinned core. The rival
evaluates L on 10,000 frequencies, looks for sign changes, and polishes crossings with brentq and peaks with a bounded search; it is
given the frequency limits for free. Our time includes the Python call. Then loops that the grid is too coarse for.
"""

import os
import statistics
import time

import numpy as np
from scipy.optimize import brentq, minimize_scalar

import tauwright as tw

POINTS = 10_000


def typical_loops():
    for i in range(200):
        lag, dead_time = 10.0, 10.0 * 0.05 * 100.0 ** ((i % 20) / 19.0)
        time_constant = dead_time * (0.5 + 0.25 * (i // 20))
        settings = {"gain": lag / (2.0 * (time_constant + dead_time)), "integral_time": lag}
        if i % 4 == 3:
            settings["measurement_filter_time"] = 0.1 * dead_time
        lags = [lag]
        if i % 2:
            lags.append(lag * (0.05 + 0.09 * (i // 20)))
            settings |= {"derivative_time": lags[1], "filter_time": 0.1 * lags[1]}
        yield lags, dead_time, settings


class Grid:
    """The open loop of process gain 2, its lags and dead time, with ideal PID settings."""

    def __init__(self, lags, dead_time, settings):
        self.lags, self.dead_time = lags, dead_time
        self.gain, self.Ti = settings["gain"], settings["integral_time"]
        self.Td, self.Tf = settings.get("derivative_time", 0.0), settings.get("filter_time", 0.0)
        self.Tm = settings.get("measurement_filter_time", 0.0)

    def __call__(self, w):
        s = 1j * w
        L = 2.0 * self.gain * np.exp(-self.dead_time * s) * (1.0 + 1.0 / (self.Ti * s) + self.Td * s / (self.Tf * s + 1.0))
        for T in self.lags:
            L = L / (T * s + 1.0)
        return L / (self.Tm * s + 1.0) if self.Tm else L

    def analyze(self, low, high, points=POINTS):
        w = np.geomspace(low, high, points)
        L = self(w)
        size, imaginary = np.abs(L), L.imag
        at_gain = np.nonzero((size[:-1] > 1.0) != (size[1:] > 1.0))[0]
        at_phase = np.nonzero((imaginary[:-1] * imaginary[1:] < 0.0) & (L.real[:-1] < 0.0))[0]
        gain = [brentq(lambda x: abs(self(x)) - 1.0, w[i], w[i + 1], xtol=1e-14) for i in at_gain]
        phase = [brentq(lambda x: self(x).imag, w[i], w[i + 1], xtol=1e-14) for i in at_phase[:1]]
        peaks = []
        for distance in (lambda x: abs(1.0 + self(x)), lambda x: abs(1.0 + 1.0 / self(x))):
            i = int(np.argmin(distance(w)))
            found = minimize_scalar(distance, bounds=(w[max(i - 1, 0)], w[min(i + 1, points - 1)]), method="bounded", options={"xatol": 1e-12})
            peaks.append(1.0 / found.fun)
        return gain, phase, peaks


def seconds(function, repeats):
    times = []
    for _ in range(repeats):
        began = time.perf_counter()
        result = function()
        times.append(time.perf_counter() - began)
    return min(times), result


def compare_times():
    ours, theirs = [], []
    for lags, dead_time, settings in typical_loops():
        G = tw.TransferFunction.from_factors(2.0, lags=lags, dead_time=dead_time)
        C, grid = tw.PidSettings(**settings), Grid(lags, dead_time, settings)
        limits = 1e-3 / (lags[0] + dead_time), 30.0 / min(lags[-1], dead_time)
        t, margins = seconds(lambda: tw.robustness(G, C), 20)
        ours.append(t)
        t, (gain, _, peaks) = seconds(lambda: grid.analyze(*limits), 3)
        theirs.append(t)
        assert abs(gain[0] / margins.gain_crossovers[0].frequency_rad_s - 1.0) < 1e-9
        assert abs(peaks[0] / margins.max_sensitivity - 1.0) < 1e-6
    a, b = statistics.median(ours), statistics.median(theirs)
    print(f"  typical loops, median: {a * 1e6:.1f} us and {b * 1e6:.0f} us, ratio {b / a:.0f}")


def show_misses():
    """Integrators with a resonance whose peak is 1.5: two gain crossings beside it, a damping apart."""
    missed = 0
    for damping in (1e-3, 1e-4, 1e-5):
        for at in (3.0, 7.0, 11.0):
            L = tw.TransferFunction.from_factors(3.0 * damping * at, integrators=1, lag_pairs=[(1.0 / at, damping)], dead_time=0.05)
            margins = tw.robustness(L)
            assert len(margins.gain_crossovers) == 3
            w = np.geomspace(1e-6, 1e2, POINTS)
            size = np.abs(L(1j * w))
            missed += 3 - int(np.sum((size[:-1] > 1.0) != (size[1:] > 1.0)))
    print(f"  resonances narrower than the grid: {missed} of 27 gain crossings missed by {POINTS} points, none by us")


def main():
    os.sched_setaffinity(0, {max(os.sched_getaffinity(0))})
    compare_times()
    show_misses()


if __name__ == "__main__":
    main()
