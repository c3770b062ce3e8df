"""Writes axis_loops_data.hpp: loops with poles and zeros exactly on the imaginary axis, and the bandwidths of |S| and |T| of
ordinary loops, computed without the library.
Run once: python3 make_axis_loops.py > axis_loops_data.hpp (NumPy, mpmath; a minute).

The first as make_certified_loops.py does it; the axis is cut at the roots on it, where the phase jumps. The bandwidths
are the first and the last change of sign of |1 + L|^2 - 2 and of |1 + 1/L|^2 - 2 on a grid far finer than the roots
and the dead time ask for, refined at 50 digits.
"""
import copy

import mpmath as mp
import numpy as np

import make_certified_loops as loops
from make_certified_loops import Curve, Draws, refined, rows_of, text

SEED = 20260614


class AxisCurve(Curve):
    def at(self, w):
        return Curve.at(self, w * (1 + mp.mpf("1e-40")) if any(z == 0 and T * w == 1 for _, T, z in self.exact) else w)

    def phase_turns(self):
        others = copy.copy(self)
        others.factors = [f for f in self.factors if f[2] != 0]  # those on the axis turn nothing, they jump
        return Curve.phase_turns(others)

    def pieces(self, end):
        cuts = sorted({1 / mp.mpf(T) for _, T, z in self.factors if z == 0} | {mp.mpf(0), end})
        turns, beside = [w for w in self.phase_turns() if w < end], mp.mpf("1e-25")
        for low, high in zip(cuts, cuts[1:]):
            if high <= end:
                inside = [low * (1 + beside)] + [w for w in turns if low < w < high] + [high if high == end else high * (1 - beside)]
                yield from zip(inside, inside[1:])


def undamped_poles(r):
    pair, theta = [(r.scaled(0.1, 10), 0.0)], r.choice([0.0, r.scaled(0.01, 10)])
    if r.random() < 0.5:
        return dict(gain=r.choice([-1, 1]) * r.scaled(1e-3, 1), lag_pairs=pair + r.pair(0.1, 10, 0.01, 0.5, 0.3), lags=r.scaled(0.1, 10, r.randint(1, 2)),
                    leads=r.scaled(0.1, 10, r.randrange(2)), dead_time=theta)
    return dict(gain=r.choice([-1, 1]) * r.scaled(1e-3, 0.3), integrators=1, lag_pairs=pair, leads=r.scaled(0.1, 10, r.randrange(3)),
                lags=r.scaled(0.05, 1, r.randrange(2)), dead_time=theta)


def undamped_zeros(r):
    pair, m, theta = [(r.scaled(0.1, 10), 0.0)], r.randrange(2), r.choice([0.0, r.scaled(0.01, 5)])
    return dict(gain=r.scaled(0.02, 2), integrators=m, lead_pairs=pair, lag_pairs=r.pair(0.1, 10, 0.02, 1, 0.4), lags=r.scaled(0.1, 10, r.randint(3 - m, 4)), dead_time=theta)


def undamped_both(r):
    T = r.scaled(0.1, 10)
    return dict(gain=r.choice([-1, 1]) * r.scaled(0.01, 1), lead_pairs=[(T * r.scaled(0.5, 2), 0.0)], lag_pairs=[(T, 0.0)],
                lags=r.scaled(0.1, 10, r.randint(1, 2)), dead_time=r.choice([0.0, r.scaled(0.01, 5)]))


def bandwidths(curve):
    """Of |S| and |T|, infinite for none; None where a touch is too near to tell."""
    k, theta = float(abs(curve.at_infinity)), curve.dead_time
    end = max([float(w) for w in curve.gain_crossings(loops.Fraction(2, 5))], default=10 * curve.near)
    around = [abs(1 / T) * (1 + 60 * (z or 1) * x) for _, T, z in curve.factors for x in np.linspace(-1, 1, 2001) / 2]
    w = np.unique([x for x in around if curve.lowest < x < end] + list(np.geomspace(curve.lowest, 1.01 * end, 40000)) +
                  (list(np.arange(1, 1.01 * end * theta / 0.01) * 0.01 / theta) if theta else []))
    size, phase = curve.polar(w)
    found = []
    for side in (1, -1):
        d = np.abs(1 + np.exp(np.clip(side * size, -300, 300) + 1j * side * phase)) ** 2 - 2
        inner = np.abs(d[1:-1])
        if np.any((inner < 1e-4) & (inner < np.abs(d[:-2])) & (inner < np.abs(d[2:])) & (d[:-2] * d[2:] > 0)):
            return None
        changes = np.nonzero((d[:-1] > 0) & (d[1:] <= 0) if side > 0 else (d[:-1] <= 0) & (d[1:] > 0))[0]
        i = (changes[0] if side > 0 else changes[-1]) if len(changes) else None
        f = lambda x: abs(1 + curve.at(x)[0] ** side) ** 2 - 2
        found.append(mp.inf if i is None else refined(f, mp.mpf(w[i]), mp.mpf(w[i + 1])))
    return found


def bandwidth_rows(seed):
    r, rows = Draws(seed), []
    families = [loops.typical, loops.damped, loops.inverse_response, loops.high_order, loops.integrating, loops.dead_time_range, loops.unstable, loops.one_at_rest]
    while len(rows) < 100:
        draw = families[len(rows) % len(families)]
        curve = Curve(**draw(r))
        if curve.relative_degree == 0 or loops.closed_loop_poles(curve, curve.gain_crossings()) != 0:
            continue
        found = bandwidths(curve)
        if found:
            rows.append("    " + text(['"%s"' % draw.__name__, [float(x) if i in (0, 7) else [float(T) for T in x] if i in (3, 4) else x
                                                                for i, x in enumerate(curve.given)], *found]))
    return rows


HEADER = """// Made by make_axis_loops.py with seed %d; do not edit.
#pragma once

#include "assess/certified_rows.hpp"

namespace oracle {
/// As in certified_loops_data.hpp, with roots on the imaginary axis.
const CertifiedLoop axis_loops[] = {
%s
};  // %d loops

/// rad/s; infinite for none.
struct Bandwidths {
    const char* family;
    CertifiedFactors loop;
    double sensitivity, complementary;
};
const Bandwidths bandwidths[] = {
%s
};  // %d loops

}  // namespace oracle"""


def main():
    rows, wide = rows_of([(undamped_poles, 35), (undamped_zeros, 20), (undamped_both, 20)], SEED, AxisCurve), bandwidth_rows(SEED + 1)
    print(HEADER % (SEED, ",\n".join(rows), len(rows), ",\n".join(wide), len(wide)))


if __name__ == "__main__":
    main()
