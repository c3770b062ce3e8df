#!/usr/bin/python3
"""Writes any_order_data.hpp: closed loops with processes of higher order, by SciPy.

The process is a series of first-order and second-order state equations. One scan is exp of the augmented
matrix (states, input, slope of the input), cut in two where a dead time ends within the scan. The controller is the block's
equations, written again. Run: /usr/bin/python3 make_any_order_data.py > any_order_data.hpp
"""

import numpy as np
from scipy.linalg import expm


def lag(T):
    return np.array([[-1 / T]]), np.array([1 / T]), np.array([1.0]), 0.0


def lead_lag(lead, T):  # (lead s + 1)/(T s + 1)
    return np.array([[-1 / T]]), np.array([1 / T]), np.array([1 - lead / T]), lead / T


def pair(T, z):
    return np.array([[0.0, 1.0], [-1 / T**2, -2 * z / T]]), np.array([0.0, 1 / T**2]), np.array([1.0, 0.0]), 0.0


def integrator():
    return np.array([[0.0]]), np.array([1.0]), np.array([1.0]), 0.0


def series(parts, gain):
    A, b, c, d = np.zeros((0, 0)), np.zeros(0), np.zeros(0), gain
    for A2, b2, c2, d2 in parts:
        n, m = len(b), len(b2)
        both = np.zeros((n + m, n + m))
        both[:n, :n], both[n:, n:], both[n:, :n] = A, A2, np.outer(b2, c)
        A, b, c, d = both, np.concatenate([b, b2 * d]), np.concatenate([d2 * c, c2]), d * d2
    return A, b, c, d


class Process:
    """Inputs are piecewise straight: value at the start of a scan and slope in it. Output at the end of a scan."""

    def __init__(self, parts, gain, dead_time, h):
        self.A, self.b, self.c, self.d = series(parts, gain)
        self.h, self.whole = h, int(np.floor(dead_time / h + 1e-9))
        self.rest = max(dead_time - self.whole * h, 0.0)
        self.x = np.zeros(len(self.b))
        self.past = [(0.0, 0.0)] * (self.whole + 2)
        self.early, self.late = self.steps(self.rest), self.steps(h - self.rest)

    def steps(self, t):
        n = len(self.b)
        M = np.zeros((n + 2, n + 2))
        M[:n, :n], M[:n, n], M[n, n + 1] = self.A, self.b, 1.0
        return expm(M * t)

    def go(self, E, value, slope):
        self.x = (E @ np.concatenate([self.x, [value, slope]]))[: len(self.b)]

    def step(self, value, slope=0.0):
        self.past = [(value, slope)] + self.past[:-1]
        (v0, s0), (v1, s1) = self.past[self.whole], self.past[self.whole + 1]
        if self.rest > 0:
            self.go(self.early, v1 + s1 * (self.h - self.rest), s1)
        self.go(self.late, v0, s0)
        return self.c @ self.x + self.d * (v0 + s0 * (self.h - self.rest))


def loop(case):
    h, n = case["h"], case["n"]
    own = Process(case["parts"], case["gain"], case["dead_time"], h)
    lagged = Process(case["parts"] + [lag(case["lag"])], case["gain"], case["dead_time"], h) if case["lag"] else None
    Kc, Ti, Td, Tf, w = case["Kc"], case["Ti"], case["Td"], case["Tf"], case["weight"]
    low, high, rest, change = 0.0, 100.0, 50.0, case["rate"] * h
    Tt = max(np.sqrt(Ti * Td) if Td > 0 else Ti, h)
    share = lambda t, start, ramp: (float(t >= start - 1e-9) if ramp == 0 else float(np.clip((t - start) / ramp, 0, 1)))
    y = seen = before = 50.0
    u, D, I, rows = rest, 0.0, rest - Kc * (w * 50.0 - 50.0), []
    for k in range(n):
        t = k * h
        r = 50.0 + case["step"] * share(t, 0.0, case["step_ramp"])
        D = (Tf * D - Kc * Td * (seen - before)) / (Tf + h)
        before = seen
        I += Kc * h / Ti * (r - seen)
        v = Kc * (w * r - seen) + I + D
        u = min(max(v, low, u - change), high, u + change)
        I += h / Tt * (u - v)
        rows.append((y, seen, u))
        now, then = (case["load"] * share(x, case["load_time"], case["load_ramp"]) for x in (t, t + h))
        slope = (then - now) / h if case["load_ramp"] else 0.0
        y = 50.0 + own.step(u - rest + now, slope)
        seen = 50.0 + lagged.step(u - rest + now, slope) if lagged else y
    return rows


DEFAULT = dict(lag=0.0, rate=np.inf, step=5.0, step_ramp=0.0, load=-8.0, load_time=60.0, load_ramp=0.0, Td=0.0, Tf=0.0, weight=1.0)
CASES = [
    dict(DEFAULT, name="order 5 with a lead", parts=[lead_lag(1.5, 6.0), lag(4.0), lag(3.0), lag(2.0), lag(1.0)], gain=1.3, dead_time=2.3,
         h=0.5, n=320, Kc=0.6, Ti=9.0),
    dict(DEFAULT, name="inverse response, PID, rate", parts=[lead_lag(-2.0, 5.0), lag(3.0)], gain=0.9, dead_time=1.0, h=0.25, n=640,
         Kc=0.8, Ti=7.0, Td=1.5, Tf=0.3, weight=0.6, rate=0.4),
    dict(DEFAULT, name="pair and integrator, lag, ramps", parts=[pair(1.5, 0.4), integrator()], gain=0.04, dead_time=0.0, h=0.5, n=400,
         Kc=1.1, Ti=60.0, lag=2.0, step_ramp=20.0, load_ramp=30.0, load=3.0),
    dict(DEFAULT, name="answers at once", parts=[lead_lag(3.0, 8.0)], gain=0.7, dead_time=0.7, h=0.5, n=320, Kc=0.5, Ti=8.0, load_ramp=12.0),
    dict(DEFAULT, name="first order with a lag", parts=[lag(10.0)], gain=2.0, dead_time=3.1, h=0.5, n=320, Kc=0.5, Ti=10.0, lag=3.0,
         load_ramp=7.5, step_ramp=4.0),
]


def main():
    print("// Written by make_any_order_data.py with SciPy: process value, measured value and output of closed loops.")
    print("#pragma once\n\nnamespace any_order {\n")
    print("struct Sample {\n    int loop, scan;\n    double process_value, measured, output;\n};\n")
    print("inline constexpr Sample samples[] = {")
    for i, case in enumerate(CASES):
        rows = loop(case)
        print(f"    // {case['name']}")
        for k in sorted(set(range(0, case["n"], case["n"] // 40)) | {case["n"] - 1}):
            print("    {%d, %d, %r, %r, %r}," % (i, k, *map(float, rows[k])))
    print("};\n\n}  // namespace any_order")


main()
