"""Writes sampled_loops_data.hpp: loops as they run, a process held constant over each scan and the PID block on its error,
and what `robustness` says of them, computed without the library.
Run once: python3 make_sampled_loops.py > sampled_loops_data.hpp (NumPy, mpmath; ten minutes).

The process is sampled exactly: its pulse response follows from its step response (matrix exponential), and has as many terms
as its numerator needs. All at 120 digits, so that scans of a thousandth of the time constant cost nothing that shows.

|L| = 1 and the turns of the phase are real roots of polynomials in y = sin(w h / 2)^2, found all at once (Durand, Kerner).
Poles outside the unit circle are counted from the turn of D(z) z^d + N(z) from crossover to crossover, where |L| < 1 keeps
1 + L and |L| > 1 keeps 1 + 1/L in a half plane; up to degree 40 the roots themselves agree. Peaks are the best of
a grid that resolves every root and the dead time, refined.
"""
import math
import sys

import mpmath as mp
import numpy as np

from make_certified_loops import Draws, expanded, plus, refined, text, times

mp.mp.dps = 120
SEED = 20260612
LEVEL = mp.mpf("1e-3")  # phase crossovers are listed where |L| is at least this


def polynomial(*args):
    p, e = expanded(*args)
    return [mp.ldexp(c, -e) for c in p]


def from_roots(roots):
    p = [mp.mpf(1)]
    for r in roots:
        p = plus([mp.mpf(0)] + p, p, -r)
    return p


def value(p, z):
    return mp.polyval(p[::-1], z)


def roots_of(p):
    return mp.polyroots(p[::-1], maxsteps=500, extraprec=1200, error=False) if len(p) > 1 else []


def power_roots(at_origin, real, pairs):
    roots = [mp.mpf(0)] * at_origin + [-1 / mp.mpf(T) for T in real]
    for T, z in ((mp.mpf(T), mp.mpf(z)) for T, z in pairs):
        roots += [(-z + sign * mp.sqrt(z * z - 1)) / T for sign in (1, -1)]
    return roots


def in_half_angle(products):
    """sum over k of r_k cos(k x) as a polynomial in y = sin(x / 2)^2, by Chebyshev's recurrence in 1 - 2 y."""
    before, now, total = [mp.mpf(1)], [mp.mpf(1), mp.mpf(-2)], [products[0]]
    for r in products[1:]:
        total = plus(total, now, r)
        before, now = now, plus([2 * c for c in times([mp.mpf(1), mp.mpf(-2)], now)], before, -1)
    return total


def real_part(p, q):
    """Re p(z) conj(q(z)) on the unit circle, in y."""
    n = max(len(p), len(q))
    product = lambda k: sum(p[i + k] * q[i] for i in range(len(q)) if 0 <= i + k < len(p))
    return in_half_angle([product(0)] + [product(k) + product(-k) for k in range(1, n)])


def between(p):
    """Real roots of a polynomial between 0 and 1, with odd multiplicity or not."""
    while p and abs(p[-1]) < mp.mpf("1e-100") * max(map(abs, p)):
        p = p[:-1]
    found = [r.real for r in roots_of(p) if 0 < r.real < 1 and abs(r.imag) < mp.mpf("1e-30") * abs(r.real)]
    return sorted(found)


class SampledCurve:
    """L = N(z) / (D(z) z^delay) on z = exp(j x), x = w h from 0 to pi."""
    def __init__(self, plant, settings, scan, extra):
        self.h = mp.mpf(scan)
        N, D, self.delay, plant_poles = self.sampled(plant, mp.mpf(plant["dead_time"]) + mp.mpf(extra))
        above, poles = self.controller(*settings)
        N, self.poles = times(N, above), plant_poles + poles
        while 0 in self.poles:
            self.poles.remove(0)
            self.delay += 1
        while N[0] == 0 and self.delay > 0:  # a common z
            N, self.delay = N[1:], self.delay - 1
        self.N, self.D = N, [c.real for c in from_roots(self.poles)]
        self.zeros = roots_of(self.N)
        self.integrators = sum(r == 1 for r in self.poles)
        assert all(abs(abs(r) - 1) > 1e-20 or r == 1 for r in self.poles)
        offsets = lambda roots: np.array([complex(r - 1) for r in roots])
        self.lead, self.zero_offsets, self.pole_offsets = float(self.N[-1]), offsets(self.zeros), offsets(self.poles)

    def sampled(self, plant, dead_time):
        """Numerator, denominator, whole scans and poles of the held process."""
        lags, pairs, m = plant["lags"], plant["lag_pairs"], plant["integrators"]
        b, a = polynomial(0, plant["leads"], plant["lead_pairs"], plant["gain"]), polynomial(m, lags, pairs)
        n = len(a) - 1
        A = mp.zeros(n + 1)
        for i in range(n - 1):
            A[i, i + 1] = 1
        for i in range(n):
            A[n - 1, i] = -a[i] / a[n]
        A[n - 1, n] = 1 / a[n]
        step = lambda t: sum(c * mp.expm(A * t)[i, n] for i, c in enumerate(b)) if t > 0 else mp.mpf(0)
        whole = int(mp.floor(dead_time / self.h))
        rest = dead_time - whole * self.h
        after = [step(k * self.h - rest) for k in range(n + 3)]
        pulses = [y - x for x, y in zip([mp.mpf(0)] + after, after)]  # the term at k is in z^-k
        poles = [mp.exp(p * self.h) if p != 0 else mp.mpf(1) for p in power_roots(m, lags, pairs)]
        D = [c.real for c in from_roots(poles)]
        # D(z) sum pulses z^-k ends at z^-1; without a rest at z^0.
        product = times(D[::-1], pulses)
        assert abs(product[n + 2]) < mp.mpf("1e-90") * max(map(abs, product[:n + 2]))
        N = product[1:n + 2][::-1]
        return (N[1:], D, whole, poles) if rest == 0 else (N, D, whole + 1, poles)

    def controller(self, kc, ti, td, tf, tm):
        h, kc = self.h, mp.mpf(kc)
        z1, one = [mp.mpf(-1), mp.mpf(1)], [mp.mpf(1)]
        share = h / (mp.mpf(tf) + h)
        lag = [share - 1, mp.mpf(1)] if td else one
        rate = kc * mp.mpf(td) / (mp.mpf(tf) + h)
        integral = z1 if ti else one
        above = [kc * c for c in times(integral, lag)]
        if ti:
            above = plus(above, times([mp.mpf(0), kc / mp.mpf(ti) * h], lag))
        if td:
            above = plus(above, times([rate * c for c in z1], integral))
        poles = ([mp.mpf(1)] if ti else []) + ([1 - share] if td else [])
        if tm:
            smooth = h / (mp.mpf(tm) + h)
            above, poles = times([mp.mpf(0), smooth], above), poles + [1 - smooth]
        return above, poles

    def at(self, x):
        z = mp.expj(x)
        return value(self.N, z) / value(self.D, z) * mp.expj(-self.delay * x)

    def slope(self, x):
        """Derivative of log L with respect to x."""
        z = mp.expj(x)
        return 1j * (sum(z / (z - r) for r in self.zeros) - sum(z / (z - r) for r in self.poles) - self.delay)

    def part(self, roots, x):
        """Angle of product (z - root) at exp(j x), continuous in x."""
        total, z = mp.mpf(0), mp.expj(x)
        for r in roots:
            total += (x + mp.pi) / 2 if r == 1 else x + mp.arg(1 - r / z) if abs(r) < 1 else mp.arg(-r) + mp.arg(1 - z / r)
        return total

    def phase(self, x):
        return (mp.pi if self.N[-1] < 0 else 0) + self.part(self.zeros, x) - self.part(self.poles, x) - self.delay * x

    def approximate(self, x):
        """L in doubles on an array."""
        d = -2 * np.sin(x / 2) ** 2 + 1j * np.sin(x)  # z - 1
        L = self.lead * np.exp(-1j * self.delay * x)
        for r in self.zero_offsets:
            L = L * (d - r)
        for r in self.pole_offsets:
            L = L / (d - r)
        return L

    def angle_of(self, y):
        return 2 * mp.asin(mp.sqrt(y))

    def gain_crossings(self):
        p = plus(real_part(self.N, self.N), real_part(self.D, self.D), -1)
        return [self.angle_of(y) for y in between(p)]

    def phase_turns(self):
        NN, DD = real_part(self.N, self.N), real_part(self.D, self.D)
        slope_of = lambda p: real_part([k * c for k, c in enumerate(p)], p)
        p = plus(times(slope_of(self.N), DD), times(slope_of(self.D), NN), -1)
        return [self.angle_of(y) for y in between(plus(p, times(NN, DD), -self.delay))]

    def phase_crossings(self):
        points, found = [mp.mpf(0)] + self.phase_turns() + [mp.pi], []
        for a, b in zip(points, points[1:]):
            low, high = sorted(self.phase(x) / mp.pi for x in (a, b))
            for k in range(int(mp.floor(low)), int(mp.ceil(high)) + 1):
                if k % 2 and low + mp.mpf("1e-40") < k < high - mp.mpf("1e-40"):
                    found.append(refined(lambda x: self.phase(x) - k * mp.pi, a, b) if a > 0 else self.from_rest(k, b))
        if self.at(mp.pi).real < 0:
            found.append(mp.pi)
        return sorted(found)

    def from_rest(self, k, b):
        f, a = lambda x: self.phase(x) - k * mp.pi, b / 2
        while f(a) * f(b) > 0:
            a /= 2
        return refined(f, a, b)

    def outside(self, crossings):
        """Closed-loop poles outside the unit circle."""
        total, points = mp.mpf(0), [mp.mpf(0)] + crossings + [mp.pi]
        for a, b in zip(points, points[1:]):
            large = abs(self.at((a + b) / 2)) > 1
            turned = (lambda x: self.part(self.zeros, x)) if large else (lambda x: self.part(self.poles, x) + self.delay * x)
            rest = lambda x: mp.mpf(0) if x == 0 and self.integrators else mp.arg(1 + self.at(max(x, mp.mpf("1e-60"))) ** (-1 if large else 1))
            total += turned(b) - turned(a) + rest(b) - rest(a)
        degree = len(self.poles) + self.delay
        inside = total / mp.pi
        assert abs(inside - mp.nint(inside)) < mp.mpf("1e-15"), inside
        if degree <= 40:
            both = roots_of(plus([mp.mpf(0)] * self.delay + self.D, self.N))
            assert sum(abs(r) < 1 for r in both) == int(mp.nint(inside)), "two counts differ"
        return degree - int(mp.nint(inside))

    def closest(self, side):
        """Smallest |1 + L| (side 1) or |1 + 1/L| (-1): distance and angle."""
        distance = lambda x: np.abs(1 + self.approximate(x) ** side)
        exact = lambda x: abs(1 + self.at(x) ** side)
        def slope(x):
            L = self.at(x) ** side
            return ((1 + mp.conj(L)) * side * self.slope(x) * L).real
        near = [np.angle(1 + r) for r in np.concatenate([self.zero_offsets, self.pole_offsets]) if abs(1 + r) > 0.5]
        sizes = [max(abs(r), 1e-12) for r in np.concatenate([self.zero_offsets, self.pole_offsets]) if abs(r) > 1e-30]
        around = [abs(c) + s * abs(abs(1 + r) - 1) for c, r in ((np.angle(1 + r), r) for r in np.concatenate([self.zero_offsets, self.pole_offsets]))
                  for s in np.linspace(-30, 30, 601)]
        grid = np.unique(np.concatenate([np.geomspace(1e-5 * min(sizes + [1.0]), math.pi, 12000), np.array(around),
                                         np.linspace(0, math.pi, 200 * (self.delay + 4))]))
        grid = grid[(grid > 1e-14) & (grid <= math.pi)]
        d = distance(grid)
        found = [(exact(mp.pi), mp.pi)]
        if self.integrators == 0:
            found.append((exact(mp.mpf(0)), mp.mpf(0)))
        elif side < 0:
            found.append((mp.mpf(1), mp.mpf(0)))
        for i in np.nonzero((d[1:-1] <= d[:-2]) & (d[1:-1] <= d[2:]) & (d[1:-1] < d.min() * 1.002))[0]:
            a, b = mp.mpf(grid[i]), mp.mpf(grid[i + 2])
            if slope(a) < 0 < slope(b):
                x = refined(slope, a, b)
                found.append((exact(x), x))
        if slope(mp.mpf(grid[0])) < 0 and d[0] < d.min() * 1.0001:
            return None  # rises right from rest: left to the loops in s
        best = min(f[0] for f in found)
        return max(((d, x) for d, x in found if d <= best * (1 + mp.mpf("1e-30"))), key=lambda f: -f[1])


def plant_of(r, kind, scale):
    """Family of processes with time constants near `scale`."""
    lag = lambda low=0.3, high=3: scale * r.scaled(low, high)
    p = dict(gain=r.choice([-1, 1]) * r.scaled(0.2, 5), integrators=0, leads=[], lags=[], lead_pairs=[], lag_pairs=[])
    if kind == "first":
        p["lags"] = [lag()]
    elif kind == "second":
        p["lags"] = [lag(), lag()]
    elif kind == "oscillating":
        p["lag_pairs"] = [(lag(), r.scaled(0.02, 0.9))]
    elif kind == "repeated":
        p["lags"] = [lag()] * r.randint(2, 4)
    elif kind == "integrating":
        p["integrators"], p["lags"] = 1, [lag(0.05, 1)] * r.randrange(2)
        p["gain"] /= scale
    elif kind == "inverse":
        p["lags"], p["leads"] = [lag(), lag()], [-lag(0.1, 1.5)]
    elif kind == "lead":
        p["lags"], p["leads"] = [lag(), lag()], [lag(0.1, 5)]
    elif kind == "fifth":
        p["lags"], p["lag_pairs"] = [lag(), lag(), lag()], [(lag(), r.scaled(0.1, 1.2))]
    elif kind == "unstable":
        p["lags"] = [-lag(1, 3)] + [lag(0.02, 0.1)] * r.randrange(2)
        p["gain"] = -abs(p["gain"])
    return p


def loop_of(r, kind):
    scale = r.scaled(0.1, 100)
    plant, h = plant_of(r, kind, scale), scale * r.choice([r.scaled(1e-3, 2), r.scaled(0.01, 0.3)])
    h = float(np.float32(h))  # so that whole numbers of scans are exact
    scans = r.choice([0, r.uniform(0, 3), float(r.randint(1, 10)), r.uniform(3, 100) if r.random() < 0.5 else r.uniform(3, 20)])
    if kind == "unstable":
        h, scans = h / 8, min(scans, 0.3 * scale / h)
    plant["dead_time"] = scans * h
    extra = r.choice([0.0, 0.0, 0.0, h * r.uniform(0, 2)]) if kind != "unstable" else 0.0
    # A rule of thumb, then off by a factor: the loops should be of every kind, not well tuned.
    theta = plant["dead_time"] + extra + h + 0.1 * scale
    total = sum(abs(T) for T in plant["lags"]) + sum(2 * T * z for T, z in plant["lag_pairs"])
    ti = min(total, 8 * theta) if plant["integrators"] == 0 else 8 * theta
    kc = (total / plant["gain"] if plant["integrators"] == 0 else 1 / plant["gain"]) / (2 * theta) * r.scaled(0.15, 6)
    if kind == "unstable":
        kc, ti = r.scaled(0.9, 12) / abs(plant["gain"]), scale * r.scaled(3, 30)
    td = r.choice([0.0, 0.0, theta * r.uniform(0.1, 0.5)])
    tf, tm = td * r.choice([0.0, r.uniform(0.05, 0.3)]), r.choice([0.0, 0.0, theta * r.uniform(0.02, 0.4)])
    ti = r.choice([ti * r.uniform(0.5, 2)] * 5 + [0.0])
    return plant, (kc, ti, td, tf, tm), h, extra


def analyzed(kind, plant, settings, h, extra):
    c = SampledCurve(plant, settings, h, extra)
    gains = c.gain_crossings()
    near, far = c.closest(1), c.closest(-1)
    if near is None or far is None or near[0] < 1e-6 or any(abs(c.slope(x).real * x) < 1e-3 for x in gains):
        return None
    outside, phases = c.outside(gains), c.phase_crossings()
    factors = [1 / abs(c.at(x)) for x in phases]
    listed = [(x, f) for x, f in zip(phases, factors) if f <= 1 / LEVEL]
    ends = [-1 / c.at(mp.mpf(0)).real] if c.integrators == 0 and c.at(mp.mpf(0)).real < 0 else []
    angles = [mp.arg(-c.at(x)) for x in gains]
    above, below = min([f for f in factors + ends if f > 1], default=mp.inf), max([f for f in factors + ends if f < 1], default=mp.mpf(0))
    margins = [above, below, min([abs(a) * 180 / mp.pi for a in angles], default=mp.inf)]
    peaks = [1 / near[0], near[1] / c.h, 1 / far[0], far[1] / c.h]
    def crossing(x, number):
        slope = c.slope(x) * x
        return [x / c.h, number, float("%.2g" % slope.real), float("%.2g" % slope.imag)]
    given = [[plant["gain"], plant["integrators"], 0, *(plant[k] for k in ("leads", "lags", "lead_pairs", "lag_pairs", "dead_time"))], list(settings), h, extra]
    rest = [outside, near[0], *([[], []] if outside else [margins, peaks])]
    lists = [[crossing(x, a) for x, a in zip(gains, angles)], [crossing(x, f) for x, f in listed]]
    return "    " + text(['"%s"' % kind, *given, *rest, *("\n     " + text(x) for x in lists)]), outside == 0


FAMILIES = [("first", 40), ("second", 30), ("oscillating", 35), ("repeated", 25), ("integrating", 35), ("inverse", 25), ("lead", 20), ("fifth", 20), ("unstable", 25)]


def rows_of(families, seed, loop, row, log=sys.stderr):
    """Rows of every family, at most two fifths of them unstable."""
    r, rows = Draws(seed), []
    for kind, wanted in families:
        made = unstable = 0
        while made < wanted:
            result = row(kind, *loop(r, kind))
            if result and (result[1] or unstable < 0.4 * wanted):
                rows.append(result[0])
                made, unstable = made + 1, unstable + (not result[1])
        print(kind, made, "of them unstable", unstable, file=log, flush=True)
    return rows


HEADER = """// Made by make_sampled_loops.py with seed %d; do not edit.
#pragma once

#include "assess/certified_rows.hpp"

namespace oracle {
struct SampledLoop {
    const char* family;
    CertifiedFactors process;
    std::initializer_list<double> settings;  ///< gain, integral time (0 for none), derivative time, filter time, measurement filter time
    double scan_time, extra_delay;
    int unstable_poles;  ///< of the closed loop, outside the unit circle
    double closest;      ///< smallest |1 + L|
    std::initializer_list<double> margins;  ///< stable loops: gain, gain reduction, phase in degrees
    std::initializer_list<double> peaks;    ///< stable loops: Ms, its frequency, Mt, its frequency
    std::initializer_list<CertifiedCrossing> gain_crossings, phase_crossings;  ///< phase: where |L| >= 1e-3, the end of the axis included
};
const SampledLoop sampled_loops[] = {
%s
};  // %d loops

}  // namespace oracle"""


def main():
    rows = rows_of(FAMILIES, SEED, loop_of, analyzed)
    print(HEADER % (SEED, ",\n".join(rows), len(rows)))


if __name__ == "__main__":
    main()
