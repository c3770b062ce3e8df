"""Writes two_delay_loops_data.hpp: the exact controller Q / (1 - T) on a process that is not the one it was made for, and what
`robustness` says of the loop, computed without the library.
Run once: python3 make_two_delay_loops.py > two_delay_loops_data.hpp (NumPy, mpmath; five minutes).

L = Q G / (1 - T) holds two dead times, so nothing is polynomial. Crossings, peaks and turns come from a grid far finer than the
dead times and roots ask for, every sign change then refined at 50 digits. Roots to the right of 1 - T and of 1 - T + Q G
are counted from their turn along the axis, halved until a step turns by less than 0.5. Over the dead time of the process
alone, root pairs cross the axis where |Q G| = |1 - T|, to the right where |L| falls (Walton and Marshall, IEE Proc. D 134, 1987);
the count that follows is compared with the turn at five dead times.

Where part of the gain stays at infinite frequency, with t = |T| and q = |Q G| there, 1 - T + Q G comes near every point of
1 - t exp(-j a) + q exp(-j b): with different dead times infinitely many roots lie to the right where t + q > 1.
"""
import math

import mpmath as mp
import numpy as np

from make_certified_loops import refined, text
from make_sampled_loops import rows_of

mp.mp.dps = 50
SEED = 20260613
LEVEL = 0.01  # phase crossovers are listed where |L| is at least this, and at most about
MOST = 15     # so many


def rational(f, s):
    """Without the dead time; s may be an mpmath number or an array."""
    real = mp.mpf if isinstance(s, mp.mpc) else float
    value = f["gain"] * s ** (f.get("zeros_at_origin", 0) - f.get("integrators", 0))
    for name, sign in (("leads", 1), ("lags", -1)):
        for T in f.get(name, []):
            value = value * (1 + real(T) * s) ** sign
    for name, sign in (("lead_pairs", 1), ("lag_pairs", -1)):
        for T, z in f.get(name, []):
            value = value * (1 + real(T) * s * (2 * real(z) + real(T) * s)) ** sign
    return value


def slope_of(f, s):
    """d log of the rational part / ds."""
    total = (f.get("zeros_at_origin", 0) - f.get("integrators", 0)) / s
    for name, sign in (("leads", 1), ("lags", -1)):
        total += sum(sign / (s + 1 / mp.mpf(T)) for T in f.get(name, []))
    for name, sign in (("lead_pairs", 1), ("lag_pairs", -1)):
        total += sum(sign * (2 * mp.mpf(T) * z + 2 * mp.mpf(T) ** 2 * s) / (1 + mp.mpf(T) * s * (2 * mp.mpf(z) + mp.mpf(T) * s)) for T, z in f.get(name, []))
    return total


def at_infinity(*factors):
    k = mp.mpf(1)
    degree = 0
    for f in factors:
        k *= f["gain"]
        degree += f.get("integrators", 0) - f.get("zeros_at_origin", 0) + len(f.get("lags", [])) - len(f.get("leads", []))
        degree += 2 * len(f.get("lag_pairs", [])) - 2 * len(f.get("lead_pairs", []))
        for T in f.get("leads", []) + [T for T, _ in f.get("lead_pairs", []) for _ in "12"]:
            k *= T
        for T in f.get("lags", []) + [T for T, _ in f.get("lag_pairs", []) for _ in "12"]:
            k /= T
    assert degree >= 0
    return abs(k) if degree == 0 else mp.mpf(0)


class TwoDelayLoop:
    def __init__(self, Q, T, G):
        self.Q, self.T, self.G = Q, T, G
        self.own, self.dead_time = mp.mpf(T["dead_time"]), mp.mpf(G["dead_time"])
        self.t, self.q = at_infinity(T), at_infinity(Q, G)
        self.m = 0  # 1 - T vanishes at 0 to this order
        while abs(self.one_minus(mp.mpc(0, "1e-8")) / mp.mpf("1e-8") ** self.m) < mp.mpf("1e-6"):
            self.m += 1
        times = [abs(float(T)) for f in (Q, T, G) for T in f.get("leads", []) + f.get("lags", []) + [p[0] for p in f.get("lead_pairs", []) + f.get("lag_pairs", [])]]
        self.slow, self.fast = max(times + [float(self.own)]), min(times)
        self.longest = float(max(self.own, self.dead_time))

    def one_minus(self, s):
        delay = self.own if isinstance(s, mp.mpc) else float(self.own)
        return 1 - rational(self.T, s) * (mp.exp if isinstance(s, mp.mpc) else np.exp)(-delay * s)

    def product(self, s, dead_time=None):
        delay = self.dead_time if dead_time is None else dead_time
        return rational(self.Q, s) * rational(self.G, s) * (mp.exp(-delay * s) if isinstance(s, mp.mpc) else np.exp(-float(delay) * s))

    def at(self, w, dead_time=None):
        s = mp.mpc(0, w)
        return self.product(s, dead_time) / self.one_minus(s)

    def slope(self, w, dead_time=None):
        """d log L / dw."""
        s, delay = mp.mpc(0, w), self.dead_time if dead_time is None else dead_time
        T = 1 - self.one_minus(s)
        return 1j * (slope_of(self.Q, s) + slope_of(self.G, s) - delay + (slope_of(self.T, s) - self.own) * T / (1 - T))

    def grid(self, end, longest=None, step=0.02):
        longest = self.longest if longest is None else longest
        low = 1e-4 / self.slow
        w = [np.geomspace(low, end, int(500 * math.log(end / low))), np.arange(low, end, step / longest)]
        for f in (self.Q, self.T, self.G):
            w += [np.linspace(max(low, (1 - 40 * z) / T), min(end, (1 + 40 * z) / T), 2001) for T, z in f.get("lag_pairs", []) + f.get("lead_pairs", []) if z < 0.2]
        return np.unique(np.concatenate(w))

    def end(self, level):
        """Beyond it |Q G| / (1 - |T|) stays below the level, or as near its limit as matters."""
        w = 1.0 / self.fast
        size = lambda: abs(complex(rational(self.Q, mp.mpc(0, w)) * rational(self.G, mp.mpc(0, w)))) + level * abs(complex(rational(self.T, mp.mpc(0, w))))
        limit = float(self.q + level * self.t)
        while size() > level * 0.98 and size() > 1.0001 * limit or w < 30 / self.fast and limit > 0:
            w *= 1.2
        return w

    def roots_to_the_right(self, dead_time=None, controller=False):
        """Of 1 - T + Q G, or of 1 - T itself but for those at 0."""
        scale = mp.mpf(self.slow)
        def exact(w):
            s = mp.mpc(0, w)
            return self.one_minus(s) * ((scale * s + 1) / (scale * s)) ** self.m if controller else self.one_minus(s) + self.product(s, dead_time)
        longest = max(self.longest, float(dead_time or 0))
        w = self.grid(self.end(1.0), longest, 0.1)
        s = 1j * w
        f = self.one_minus(s) * ((self.slow * s + 1) / (self.slow * s)) ** self.m if controller else self.one_minus(s) + self.product(s, dead_time)
        def turn(a, at_a, b, at_b, depth=0):
            step = mp.arg(at_b / at_a)
            if abs(step) < 0.5 and abs(at_b - at_a) < 0.5 * min(abs(at_a), abs(at_b)):
                return step
            assert depth < 60, "a root on the axis"
            m = (a + b) / 2
            at_m = exact(m)
            return turn(a, at_a, m, at_m, depth + 1) + turn(m, at_m, b, at_b, depth + 1)
        rest = mp.mpf("1e-9") / self.slow
        first = exact(rest)
        total = turn(rest, first, mp.mpf(w[0]), exact(mp.mpf(w[0]))) + mp.atan2(first.imag, first.real)
        steps = np.angle(f[1:] / f[:-1])
        bad = np.abs(f[1:] - f[:-1]) > 0.5 * np.minimum(np.abs(f[1:]), np.abs(f[:-1]))
        total += float(steps[~bad].sum())
        for i in np.nonzero(bad)[0]:
            a, b = mp.mpf(w[i]), mp.mpf(w[i + 1])
            total += turn(a, exact(a), b, exact(b))
        count = (mp.arg(exact(mp.mpf(w[-1]))) - total) / mp.pi
        if first.real < 0:  # from the negative axis: at rest the angle is pi, not 0
            count += 1
        assert abs(count - mp.nint(count)) < 1e-3, count
        return int(mp.nint(count))

    def gain_crossings(self):
        w = self.grid(self.end(1.0))
        above = np.abs(self.product(1j * w)) > np.abs(self.one_minus(1j * w))
        return [refined(lambda x: abs(self.at(x)) - 1, mp.mpf(w[i]), mp.mpf(w[i + 1])) for i in np.nonzero(above[1:] != above[:-1])[0]]

    def phase_crossings(self):
        end = min(self.end(LEVEL), 2 * math.pi * MOST / float(self.dead_time))
        w = self.grid(end)
        L = self.product(1j * w) / self.one_minus(1j * w)
        turned = (L.imag[1:] > 0) != (L.imag[:-1] > 0)
        near = np.abs(np.angle(-L))
        found = []
        for i in np.nonzero(turned & (near[1:] < 1.5) & (near[:-1] < 1.5))[0]:
            x = refined(lambda x: self.at(x).imag, mp.mpf(w[i]), mp.mpf(w[i + 1]))
            if abs(self.at(x)) >= LEVEL:
                found.append(x)
        return found, mp.mpf(end) if end < self.end(LEVEL) or self.q > 0 else mp.inf

    def peak(self, side):
        """Smallest |1 + L| (1) or |1 + 1/L| (-1), and its frequency."""
        w = self.grid(self.end(0.01))
        L = self.product(1j * w) / self.one_minus(1j * w)
        d = np.abs(1 + L**side)
        def slope(x):
            X = self.at(x) ** side
            return ((1 + mp.conj(X)) * side * self.slope(x) * X).real
        t, q = self.t, self.q
        if self.dead_time == self.own:
            limit = [(1 - t + q) / (1 - t), (1 + t - q) / (1 + t)] if side > 0 else [(1 - abs(t - q)) / q if q else mp.inf]
        else:
            limit = [(1 - t - q) / (1 - t)] if side > 0 else [(1 - t - q) / q if q else mp.inf]
        found = [(min(limit), mp.inf)] + [(mp.mpf(1), mp.mpf(0))] * (side < 0)
        for i in np.nonzero((d[1:-1] <= d[:-2]) & (d[1:-1] <= d[2:]) & (d[1:-1] < d.min() * 1.002))[0]:
            ends = mp.mpf(w[i]), mp.mpf(w[i + 2])
            if slope(ends[0]) < 0 < slope(ends[1]):
                x = refined(slope, *ends)
                found.append((abs(1 + self.at(x) ** side), x))
        if slope(mp.mpf(w[0])) < 0 and side < 0 and d[0] < d.min() * 1.0001:
            return None  # rises right from rest
        best = min(x for x, _ in found)
        return min((f for f in found if f[0] <= best * (1 + mp.mpf("1e-30"))), key=lambda f: f[1])

    def stable_dead_times(self, gains, at_rest, limit):
        """Intervals of the process's dead time up to the limit, from the count without dead time and the pairs that cross."""
        steps = []
        for w in gains:
            angle = mp.arg(-self.at(w, 0))
            angle += 2 * mp.pi * (angle < 0)
            falls = self.slope(w, 0).real < 0
            steps += [(x, 2 if falls else -2) for x in ((angle + 2 * mp.pi * k) / w for k in range(int(limit * w / (2 * mp.pi)) + 2)) if x <= limit]
        count, start, found, counts = at_rest, mp.mpf(0), [], [(mp.mpf(0), at_rest)]
        for x, step in sorted(steps):
            if count == 0:
                found.append([start, x])
            count += step
            assert count >= 0, "more pairs leave than are there"
            start = x
            counts.append((x, count))
        if count == 0:
            found.append([start, mp.inf if not gains else limit])
        return found, counts


def analyzed(kind, Q, T, G):
    c = TwoDelayLoop(Q, T, G)
    if abs(1 - c.t - c.q) < 0.02 or c.t > 0.98 or c.dead_time == c.own and abs(c.t - c.q) > 0.98:
        return None
    row = lambda f: [float(f["gain"]), f.get("integrators", 0), f.get("zeros_at_origin", 0), *([float(T) for T in f.get(k, [])] for k in ("leads", "lags")),
                     f.get("lead_pairs", []), f.get("lag_pairs", []), f.get("dead_time", 0.0)]
    given = ['"%s"' % kind, row(Q), row(T), row(G)]
    lasting = c.t + c.q > 1
    if lasting and c.dead_time != c.own:
        return "    " + text(given + [-1, -1, 0.0, [], [], [], mp.mpf(0), "\n     {}", "{}"]), False
    gains, held = c.gain_crossings(), [[c.dead_time, c.dead_time]]
    own, poles = c.roots_to_the_right(controller=True), c.roots_to_the_right()
    limit = 20 * c.dead_time
    if not lasting:
        held, counts = c.stable_dead_times(gains, c.roots_to_the_right(mp.mpf(0)), limit)
        followed = lambda x: [n for start, n in counts if start <= x][-1]
        assert followed(c.dead_time) == poles, "two counts differ"
        for share in (0.3, 0.77, 1.9, 4.1):
            x = c.dead_time * share
            if min([abs(x - start) for start, _ in counts]) > 1e-3 * x:
                assert followed(x) == c.roots_to_the_right(x), "two counts differ"
    elif poles:
        return None
    near, far = c.peak(1), c.peak(-1)
    if near is None or far is None or near[0] < 1e-5 or any(abs(c.slope(w).real * w) < 1e-3 for w in gains):
        return None
    phases, complete_to = c.phase_crossings()
    factors, angles = [1 / abs(c.at(w)) for w in phases], [mp.arg(-c.at(w)) for w in gains]
    ends = [] if c.q == 0 else [(1 + c.t) / c.q if c.dead_time == c.own else (1 - c.t) / c.q]
    if poles == 0 and not any(f > 1 for f in factors + ends):
        return None
    if poles == 0 and complete_to < mp.inf:  # beyond the list no factor is below this, as |T| and |Q G| go to their limits
        s = mp.mpc(0, complete_to)
        beyond = min([(1 - abs(rational(T, s))) / abs(rational(Q, s) * rational(G, s))] + ([(1 - c.t) / c.q] if c.q else []))
        if min(f for f in factors + ends if f > 1) > beyond * (1 + mp.mpf("1e-20")):
            return None
    margins = []
    if poles == 0:
        above, below = min(f for f in factors + ends if f > 1), max([f for f in factors + ends if f < 1], default=mp.mpf(0))
        mine = next(x for x in held if x[0] <= c.dead_time <= x[1])
        delay = min([((a + 2 * mp.pi * (a < 0)) / w) for a, w in zip(angles, gains)], default=mp.inf)
        if lasting:  # any other dead time makes infinitely many roots; the crossovers have no end either
            delay, gains, angles = mp.mpf(0), [], []
        assert lasting or delay > limit - c.dead_time or abs(delay - (mine[1] - c.dead_time)) < mp.mpf("1e-30") * delay
        margins = [above, below, min([abs(a) * 180 / mp.pi for a in angles], default=mp.inf), delay, c.dead_time - mine[0] if mine[0] > 0 else mp.inf]
    peaks = [1 / near[0], near[1], 1 / far[0], far[1]] if poles == 0 else []
    def crossing(w, value):
        slope = c.slope(w) * w
        return [w, value, float("%.2g" % slope.real), float("%.2g" % slope.imag)]
    lists = [[crossing(w, a) for w, a in zip(gains, angles)], [crossing(w, f) for w, f in zip(phases, factors)]]
    return "    " + text(given + [own, poles, near[0], margins, peaks, held, complete_to, "\n     " + text(lists[0]), "\n     " + text(lists[1])]), poles == 0


def off(r, x, most=0.6):
    return x * (1 + r.choice([0.0, 1.0, 1.0]) * r.uniform(-most, most))


def loop_of(r, kind):
    """Q, T, G: the controller for a process, and the process as it is."""
    scale, K = r.scaled(0.1, 100), r.choice([-1, 1]) * r.scaled(0.1, 10)
    theta, tau, second = scale * r.scaled(0.1, 1), scale * r.scaled(0.3, 3), scale * r.scaled(0.05, 0.5)
    tc = theta * r.scaled(0.05, 2)
    T, most = dict(gain=1.0, lags=[tc], dead_time=theta), r.choice([0.6, 0.3])
    G = lambda **f: dict(f, gain=off(r, K, most), dead_time=off(r, theta, most))
    if kind == "first":
        return dict(gain=1 / K, leads=[tau], lags=[tc]), T, G(lags=[off(r, tau, most)])
    if kind == "second":
        T["lags"] = [tc, tc]
        return dict(gain=1 / K, leads=[tau, second], lags=[tc, tc]), T, G(lags=[off(r, tau, most), off(r, second, most)])
    if kind == "oscillating":
        z = r.scaled(0.1, 0.9)
        T["lags"] = [tc, tc]
        return dict(gain=1 / K, lead_pairs=[(tau, z)], lags=[tc, tc]), T, G(lag_pairs=[(off(r, tau, 0.4 * most), off(r, z, most))])
    if kind == "inverse":
        lead = -scale * r.scaled(0.05, 0.5)
        T.update(leads=[lead], lags=[tc, tc])
        return dict(gain=1 / K, leads=[tau, second], lags=[tc, tc]), T, G(leads=[off(r, lead, most)], lags=[off(r, tau, most), off(r, second, most)])
    if kind == "integrating":
        lead = 2 * mp.mpf(tc) + mp.mpf(theta)
        T.update(leads=[lead], lags=[tc, tc])
        return dict(gain=1 / K, zeros_at_origin=1, leads=[lead], lags=[tc, tc]), T, G(integrators=1)
    if kind == "ringing":  # a response with a peak above 1, which a controller with unstable poles may make
        pair, most = [(theta * r.scaled(0.15, 1), r.uniform(0.08, 0.6))], r.choice([0.1, 0.4])
        T.update(lags=[], lag_pairs=pair)
        return dict(gain=1 / K, leads=[tau, second], lag_pairs=pair), T, G(lags=[off(r, tau, most), off(r, second, most)])
    lead, t = scale * r.scaled(0.05, 0.5), r.choice([r.uniform(0.05, 0.6), r.uniform(0.5, 0.95)])  # lasting gain
    T.update(leads=[tc * t])
    plant = G(leads=[off(r, lead, 0.4)], lags=[off(r, tau, 0.4)])
    if t > 0.5 and r.random() < 0.5:
        plant["dead_time"] = theta
    return dict(gain=1 / K, leads=[tc * t, tau], lags=[tc, lead]), T, plant


FAMILIES = [("first", 45), ("second", 30), ("oscillating", 25), ("inverse", 25), ("integrating", 25), ("ringing", 25), ("lasting gain", 25)]

HEADER = """// Made by make_two_delay_loops.py with seed %d; do not edit.
#pragma once

#include "assess/certified_rows.hpp"

namespace oracle {
struct DeadTimes { double low, high; };
/// The controller Q / (1 - T) on the process G. Where 1 - T + Q G has infinitely many roots to the right, the counts are -1 and
/// nothing else is given. Where any other dead time would make it so, the gain crossovers, without end, and the phase margin are left out.
struct TwoDelayLoop {
    const char* family;
    CertifiedFactors filter, response, process;
    int unstable_controller_poles, unstable_poles;
    double closest;  ///< smallest |1 + L|
    std::initializer_list<double> margins;  ///< stable loops: gain, gain reduction, phase in degrees, delay up, delay down
    std::initializer_list<double> peaks;    ///< stable loops: Ms, its frequency, Mt, its frequency
    std::initializer_list<DeadTimes> stable_dead_times;  ///< of the process, up to 20 times its dead time
    double complete_to;  ///< below this frequency every phase crossover with |L| >= 0.01 is listed
    std::initializer_list<CertifiedCrossing> gain_crossings, phase_crossings;
};
const TwoDelayLoop two_delay_loops[] = {
%s
};  // %d loops

}  // namespace oracle"""


def main():
    rows = rows_of(FAMILIES, SEED, loop_of, analyzed)
    print(HEADER % (SEED, ",\n".join(rows), len(rows)))


if __name__ == "__main__":
    main()
