"""Writes certified_loops_data.hpp: open loops with exact dead time and what `robustness` says of them, computed without
the library. Run once: python3 make_certified_loops.py > certified_loops_data.hpp (NumPy, mpmath; two minutes).

Crossings are complete by proof: gain crossovers are the positive roots of |N|^2 - |D|^2 in w^2, and the phase turns back
only at those of the numerator of its slope. Both are polynomials with exact integer coefficients (doubles are dyadic),
isolated by Descartes' rule of signs with bisection (Collins and Akritas, SYMSAC 1976); so are the peaks without dead time.
With dead time the peaks come from branch and bound over annular sectors that hold L on an interval. Every number is then
refined at 50 digits.

Closed-loop poles to the right are counted at 50 digits from the turn of D + N exp(-dead_time s) along the axis, in steps from
crossover to crossover: |L| < 1 keeps 1 + L, |L| > 1 keeps 1 + 1/L in a half plane. Without dead time the roots of D + N agree.
"""
import math
import random
import sys
from fractions import Fraction

import mpmath as mp
import numpy as np

mp.mp.dps = 50
SEED = 20260511
LEVEL = Fraction(1, 1000)  # phase crossovers are listed where |L| is at least this,
MOST = 200                 # and about so many of them at most
EPS = 3e-8                 # branch and bound proves peaks to this, relative; near -1 to 1e-10 absolute
# Polynomials with exact integer coefficients, lowest power first; (p, e) stands for p * 2^-e.
def times(p, q):
    return [sum(p[i] * q[k - i] for i in range(max(0, k - len(q) + 1), min(k + 1, len(p)))) for k in range(len(p) + len(q) - 1)]
def plus(p, q, factor=1):
    return [(p[i] if i < len(p) else 0) + (factor * q[i] if i < len(q) else 0) for i in range(max(len(p), len(q)))]
def slope_of(p):
    return [i * c for i, c in enumerate(p)][1:] or [0]
def dyadic(x):
    n, d = float(x).as_integer_ratio()
    return n, d.bit_length() - 1

def expanded(at_origin, real, pairs, gain=1.0):
    p, e = dyadic(gain)
    p = [0] * at_origin + [p]
    for T, z in [(T, None) for T in real] + list(pairs):
        (m, k), (n, g) = dyadic(T), dyadic(z or 0)
        p, e = (times(p, [1 << k, m]), e + k) if z is None else (times(p, [1 << (2 * k + g), 2 * m * n << k, m * m << g]), e + 2 * k + g)
    return p, e

def square(p):
    """|p(jw)|^2 in w^2."""
    even, odd = ([c * (-1) ** k for k, c in enumerate(p[i::2])] for i in (0, 1))
    return plus(times(even, even), [0] + times(odd, odd) if odd else [])

def shifted(p):
    """p(x + 1)."""
    p = list(p)
    for i in range(len(p) - 1):
        for k in range(len(p) - 2, i - 1, -1):
            p[k] += p[k + 1]
    return p

def variations(p):
    signs = [c > 0 for c in p if c]
    return sum(a != b for a, b in zip(signs, signs[1:]))

def positive_roots(p):
    """Intervals with exactly one positive root each, ascending, as square roots at 50 digits."""
    used = [i for i, c in enumerate(p) if c]
    if variations(p) == 0:
        return []
    p = p[used[0]:used[-1] + 1]
    n, size = len(p) - 1, [abs(c).bit_length() for c in p]
    bits = max(math.ceil((size[n - k] - size[n] + 1) / k) for k in range(1, n + 1) if p[n - k]) + 1
    found, todo = [], [([c << (bits * i if bits > 0 else -bits * (n - i)) for i, c in enumerate(p)], 0, 0)]
    while todo:
        q, place, depth = todo.pop()
        v = variations(shifted(q[::-1]))
        if v == 1:
            found.append((place, place + 1, depth))
        if v < 2:
            continue
        assert depth < 400, "a multiple root"
        left = [c << (len(q) - 1 - i) for i, c in enumerate(q)]
        right = shifted(left)
        if right[0] == 0:
            found.append((2 * place + 1, 2 * place + 1, depth + 1))
            right = right[1:]
        todo += [(left, 2 * place, depth + 1), (right, 2 * place + 1, depth + 1)]
    return sorted(tuple(mp.sqrt(mp.ldexp(x, bits - depth)) for x in (a, b)) for a, b, depth in found)

def refined(f, low, high):
    """The one root of f between, to about 45 digits: bisection, then false position (Anderson and Bjorck, BIT 13, 1973)."""
    at_high = f(high)
    if low == high or at_high == 0:
        return high
    assert low == 0 or f(low) * at_high < 0, "no change of sign"
    while high - low > mp.mpf("1e-3") * high:
        x = mp.sqrt(low * high) if low > 0 else high / 16
        low, high = (low, x) if f(x) * at_high > 0 else (x, high)
    return mp.findroot(f, (low, high), solver="anderson", tol=mp.mpf("1e-46") * high, maxsteps=200, verify=False) if f(low) else low

class Curve:
    """L(jw) of a loop: exactly as polynomials, at 50 digits, and in doubles on arrays."""
    def __init__(self, gain, integrators=0, zeros_at_origin=0, leads=(), lags=(), lead_pairs=(), lag_pairs=(), dead_time=0.0):
        self.given = (gain, integrators, zeros_at_origin, leads, lags, lead_pairs, lag_pairs, dead_time)
        leads, lags = list(leads), list(lags)
        for T in [T for T in leads if T > 0 and T in lags]:  # equal to the last bit: no part of the curve
            leads.remove(T)
            lags.remove(T)
        self.gain, self.dead_time, self.m = gain, dead_time, integrators - zeros_at_origin
        self.factors = [(s, T, None) for s, real in ((1, leads), (-1, lags)) for T in real]
        self.factors += [(s, T, z) for s, pairs in ((1, lead_pairs), (-1, lag_pairs)) for T, z in pairs]
        (N, e), (D, g) = expanded(zeros_at_origin, leads, lead_pairs, gain), expanded(integrators, lags, lag_pairs)
        self.N, self.D = [c << max(g - e, 0) for c in N], [c << max(e - g, 0) for c in D]
        self.order, self.relative_degree = len(D) - 1, len(D) - len(N)
        self.at_infinity = mp.mpf(self.N[-1]) / self.D[-1] if self.relative_degree == 0 else mp.mpf(0)
        self.NN, self.DD = square(self.N), square(self.D)
        self.exact = [(s, mp.mpf(T), None if z is None else mp.mpf(z)) for s, T, z in self.factors]
        self.offset = 2 * (gain < 0) - self.m  # quarter turns of the phase at rest
        self.near = min([1 / abs(T) for _, T, _ in self.factors] + ([1 / dead_time] if dead_time else []), default=1.0)
        # Below `lowest` L stays within 1e-9 of rest, beyond 1e9, or below 1e-9.
        self.lowest = min(1e-3 * self.near, (abs(gain) * 0.5e-9 ** math.copysign(1, self.m)) ** (1 / self.m)) if self.m else 1e-9 * self.near

    def at(self, w):
        """L and the derivative of log L with respect to w."""
        L, first = mp.mpc(self.gain) / mp.mpc(0, w) ** self.m, mp.mpc(0, -self.dead_time) - self.m / w
        for s, T, z in self.exact:
            f = mp.mpc(1, T * w) if z is None else mp.mpc((1 - T * w) * (1 + T * w), 2 * z * T * w)
            L, first = L * f if s > 0 else L / f, first + s * (mp.mpc(0, T) if z is None else mp.mpc(-2 * T * T * w, 2 * z * T)) / f
        return L * mp.expj(-self.dead_time * w) if self.dead_time else L, first

    def turned(self, w, side=0):
        """Phase from rest on, unwrapped, of L, of the numerator with dead time (1) or of the denominator (-1)."""
        total = -mp.mpf(self.dead_time) * w if side >= 0 and self.dead_time else mp.mpf(0)
        for s, T, z in self.exact:
            if side in (0, s):
                end = mp.sign(T) * mp.pi / 2 if z is None else mp.pi if z >= 0 else -mp.pi
                total += (s if side == 0 else 1) * (end if w == mp.inf else mp.atan(T * w) if z is None else
                                                    mp.atan2(2 * z * T * w, (1 - T * w) * (1 + T * w)))
        return total

    def gain_crossings(self, level=Fraction(1)):
        p = plus([level.denominator**2 * c for c in self.NN], [level.numerator**2 * c for c in self.DD], -1)
        return [refined(lambda w: abs(self.at(w)[0]) - mp.mpf(level.numerator) / level.denominator, *ends) for ends in positive_roots(p)]

    def phase_turns(self):
        """Frequencies at which the phase turns back."""
        n, d = [0], [1]
        for T, z in sorted({f[1:] for f in self.factors}, key=str):
            count, (m, k), (b, g) = sum(s for s, *f in self.factors if f == [T, z]), dyadic(T), dyadic(z or 0)
            above, below = [m << k], [1 << 2 * k, m * m]  # T / (1 + T^2 x)
            if z is not None:  # 2 z T (1 + T^2 x) / ((1 - T^2 x)^2 + 4 z^2 T^2 x)
                above = [2 * b * m << (3 * k + g), 2 * b * m**3 << (k + g)]
                below = [1 << (4 * k + 2 * g), (4 * b * b - (2 << 2 * g)) * m * m << 2 * k, m**4 << 2 * g]
            n, d = plus(times(n, below), times(above, d), count), times(d, below)
        b, g = dyadic(self.dead_time)
        return [refined(lambda w: self.at(w)[1].imag, *ends) for ends in positive_roots(plus([c << g for c in n], d, -b))]

    def pieces(self, end):
        """Intervals on which the phase only rises or only falls."""
        points = [mp.mpf(0)] + [w for w in self.phase_turns() if w < end] + [end]
        return zip(points, points[1:])

    def part(self, T, z, w):
        u = T * w
        real, imaginary = (1, u) if z is None else ((1 - u) * (1 + u), 2 * z * u)
        return 0.5 * np.log1p(u * u) if z is None else np.log(np.hypot(real, imaginary)), np.arctan2(imaginary, real)

    def polar(self, w):
        """log |L| and unwrapped phase."""
        size, phase = math.log(abs(self.gain)) - self.m * np.log(w), self.offset * math.pi / 2 - self.dead_time * w
        for s, *f in self.factors:
            size, phase = (x + s * y for x, y in zip((size, phase), self.part(*f, w)))
        return size, phase

    def sectors(self, a, b):
        """log |L| and phase at a, and how far either may fall and rise up to b."""
        step = -self.m * np.log(b / a)
        fall, rise, back, ahead = np.minimum(step, 0) - 1e-13, np.maximum(step, 0) + 1e-13, self.dead_time * (a - b) - 1e-13, 0 * a + 1e-13
        for s, T, z in self.factors:
            (ga, pa), (gb, pb) = self.part(T, z, a), self.part(T, z, b)
            low, high = np.minimum(gb - ga, 0), np.maximum(gb - ga, 0)
            if z is not None and 2 * z * z < 1:  # smallest on the way
                w = math.sqrt(1 - 2 * z * z) / T
                low = np.where((a < w) & (w < b), (math.log(2 * abs(z) * math.sqrt(1 - z * z)) if z else -math.inf) - ga, low)
            fall, rise = (fall + low, rise + high) if s > 0 else (fall - high, rise - low)
            back, ahead = back + np.minimum(s * (pb - pa), 0), ahead + np.maximum(s * (pb - pa), 0)
        return (*self.polar(a), fall, rise, back, ahead)

def phase_crossings(curve, level=LEVEL):
    """Frequencies, and up to where all with |L| >= level are among them."""
    ends, limit, small = curve.gain_crossings(level), mp.inf, mp.mpf("1e-40")
    end = mp.inf if abs(curve.at_infinity) > float(level) else ends[-1] if ends else mp.mpf(0)
    if curve.dead_time and 2 * mp.pi * MOST / curve.dead_time < end:
        limit = end = 2 * mp.pi * MOST / curve.dead_time
    found = []
    for a, b in curve.pieces(end):
        low, high = sorted(2 * curve.turned(w) / mp.pi + curve.offset for w in (a, b))  # quarter turns
        turns = [k for k in range(int(mp.floor(low / 4)), int(mp.ceil(high / 4))) if low + small < 4 * k + 2 < high - small]
        wanted, rises, top = np.array([(2 * k + 1) * math.pi for k in turns]), curve.turned(b) > curve.turned(a), min(b, mp.mpf(1))
        while b == mp.inf and np.any((curve.polar(np.array([float(top)]))[1] > wanted) != rises):
            top = 4 * max(top, a)
        x, y = np.full(len(turns), max(float(a), 1e-300)), np.full(len(turns), float(b if b < mp.inf else top))
        while np.any(y - x > 4e-16 * y):
            middle = np.where(y > 4 * x, np.sqrt(x) * np.sqrt(y), 0.5 * (x + y))
            beyond = (curve.polar(middle)[1] > wanted) == rises
            x, y = np.where(beyond, x, middle), np.where(beyond, middle, y)
        for w in (mp.mpf(float(w)) for w in y):
            step = w
            while abs(step) > mp.mpf("1e-35") * w:
                L, first = curve.at(w)
                step = mp.arg(-L) / first.imag
                w -= step
                assert a * (1 - mp.mpf("1e-12")) <= w <= b * (1 + mp.mpf("1e-12"))
            found.append(w)
    return sorted(w for w in found if abs(curve.at(w)[0]) >= mp.mpf(level.numerator) / level.denominator), limit

def closed_loop_poles(curve, crossings):
    total, points = mp.mpf(0), [mp.mpf(0)] + crossings + [mp.inf]
    for a, b in zip(points, points[1:]):
        side = 1 if abs(curve.at((a + b) / 2 if b < mp.inf else 2 * a + 1)[0]) > 1 else -1
        rest = lambda w: mp.arg(1 + curve.at(w)[0] ** -side) if 0 < w < mp.inf else mp.mpf(0)
        total += curve.turned(b, side) - curve.turned(a, side) + rest(b) - rest(a)
    poles = curve.order / 2 - float(total / mp.pi)
    assert abs(poles - round(poles)) < 1e-9
    return round(poles)

def closest(curve, side):
    """Smallest |1 + L| (side 1) or |1 + 1/L| (-1): distance and frequency."""
    def slope(w):
        L, first = curve.at(w)
        return ((1 + mp.conj(L**side)) * side * first * L**side).real
    k, found = curve.at_infinity, []
    if curve.m * side <= 0:
        found.append((abs(1 + mp.mpf(curve.gain) ** side) if curve.m == 0 else mp.mpf(1), mp.mpf(0)))
    if curve.relative_degree == 0 or side > 0:
        found.append((abs(1 - abs(k) ** side if curve.dead_time else 1 + k**side), mp.inf))
    if curve.dead_time == 0:
        A, B = square(plus(curve.D, curve.N)), curve.DD if side > 0 else curve.NN
        interior = [refined(slope, *ends) for ends in positive_roots(plus(times(slope_of(A), B), times(A, slope_of(B)), -1))]
    else:
        interior = searched(curve, side, min([float(d) for d, w in found], default=math.inf), slope)
    for w in interior:
        d = abs(1 + curve.at(w)[0] ** side)
        if d < min([d for d, _ in found], default=mp.inf) * (1 - mp.mpf("1e-25")):
            found.append((d, w))
    return min(found, key=lambda f: f[0])

def searched(curve, side, best, slope):
    """Frequencies of the smallest |1 + X|: the best of a grid, until branch and bound leaves nothing better."""
    def distance(w):
        size, phase = curve.polar(w)
        return np.abs(1 + np.exp(np.clip(side * size, -600, 600) + 1j * side * phase))
    crossing = lambda level: max([float(w) for w in curve.gain_crossings(Fraction(level))], default=0.0)
    around = [abs(1 / T) * (1 + 40 * (z or 1) * x) for _, T, z in curve.factors for x in np.linspace(-1, 1, 81) / 2]
    end = max(crossing(max(0.02, 1.0001 * float(abs(curve.at_infinity)))), 10 * curve.near)
    grid = np.unique([w for w in around if curve.lowest < w < end] + list(np.geomspace(curve.lowest, end, 3000)) +
                     list(np.linspace(0, min(end, 300 / curve.dead_time), 3000)[1:]))
    d = distance(grid)
    sides, best = np.minimum(d[:-8], d[8:]) * (1 - 1e-13), min(best, d.min())  # a dent, not rounding
    spots = [grid[i] for i in range(4, len(d) - 4) if d[i] <= min(d[i - 1], d[i + 1]) and d[i] < min(sides[i - 4], best * 1.001)]
    high = crossing(1 - best * (1 - EPS / 2) if side > 0 else 1 / (1 + best * (1 - EPS / 2)))
    a = np.geomspace(curve.lowest, high, 300) if high > curve.lowest else np.array([1.0])
    a, b = a[:-1], a[1:]
    while len(a):
        size, phase, fall, rise, back, ahead = curve.sectors(a, b)
        small, large = (size + fall, size + rise) if side > 0 else (-size - rise, -size - fall)
        turn = (phase + (back + ahead) / 2) % (2 * math.pi) - math.pi
        away = np.maximum(np.abs(turn) - (ahead - back) / 2, 0)
        r = np.clip(np.cos(away), np.exp(np.minimum(small, 600)), np.exp(np.minimum(large, 600)))
        middle = 0.5 * (a + b)
        d = distance(middle)
        if d.min() < best:
            best, spots = d.min(), spots[-12:] + [middle[d.argmin()]]
        left = np.hypot(r - np.cos(away), np.sin(away)) < best * (1 - max(EPS, 1e-10 / best))
        assert left.sum() < 3_000_000, "branch and bound does not end"
        a, b = np.concatenate([a[left], middle[left]]), np.concatenate([middle[left], b[left]])
    brackets, w = [], mp.mpf(curve.lowest)
    for x in sorted({x for x in spots if distance(np.array([x]))[0] <= best * 1.002}):
        steps = (mp.mpf(2) ** -k for k in range(24, 0, -1))
        brackets += [ends for ends in ((x * (1 - step), x * (1 + step)) for step in steps) if slope(ends[0]) < 0 < slope(ends[1])][:1]
    if slope(w) < 0:  # the peak rises from rest, however little
        while slope(2 * w) < 0:
            w *= 2
        brackets.append((w, 2 * w))
    return [refined(slope, *ends) for ends in brackets]

class Draws(random.Random):
    def scaled(self, low, high, n=None):
        return low * (high / low) ** self.random() if n is None else [self.scaled(low, high) for _ in range(n)]
    def pair(self, low, high, z_low, z_high, share=1.0):
        return [(self.scaled(low, high), self.scaled(z_low, z_high))] if self.random() < share else []
    def dead_time(self):
        return self.choice([0.0, self.scaled(0.01, 1), self.scaled(0.1, 10)])

# Families of loops: each draws the arguments of Curve.
def lag_rule(r):  # first order under PI with Ti = tau and closed-loop time constant tc
    tau, theta = r.scaled(0.1, 100), r.scaled(0.02, 20)
    tc = theta * r.choice([0.5, 1, 1, 1, 1.5, 2, 3, 10, 100, 1000])
    return dict(gain=tau / (tc + theta) / tau, integrators=1, leads=[tau], lags=[tau], dead_time=theta)
def typical(r):  # first and second order, integrating; PI and PID with filter
    tau, second, theta, kind = r.scaled(1, 50), r.choice([0, 0, 1]) * r.uniform(0.1, 0.9), r.scaled(0.1, 20), r.randrange(3)
    tc = theta * r.uniform(0.6, 4)
    lags, ti = [tau, tau * second] if second else [tau], min(tau, 4 * (tc + theta)) * r.choice([1, r.uniform(0.7, 1.5)])
    if kind == 2:
        ti, lags = 4 * (tc + theta), lags[1:] + [theta * r.uniform(0.02, 0.3)]
        return dict(gain=1 / (tc + theta) / ti, integrators=2, leads=[ti], lags=lags, dead_time=theta)
    td = [tau * second if second else theta / 2] * kind
    return dict(gain=tau / (tc + theta) / ti, integrators=1, leads=[ti] + td, lags=lags + [x * r.uniform(0.05, 0.2) for x in td], dead_time=theta)
def damped(r):
    pairs, theta = r.pair(0.05, 5, 1e-4, 0.1) + r.pair(0.05, 5, 1e-4, 0.1, 0.5), r.dead_time()
    if r.random() < 0.5:
        return dict(gain=r.scaled(1e-4, 0.3), integrators=1, lag_pairs=pairs, lags=r.scaled(0.1, 5, r.randrange(2)), dead_time=theta)
    return dict(gain=r.scaled(1e-3, 1), lag_pairs=pairs, lags=r.scaled(0.1, 20, 1), lead_pairs=r.pair(0.05, 5, 1e-3, 0.5, 0.5), dead_time=theta)
def inverse_response(r):
    leads, pairs = [-T for T in r.scaled(0.02, 5, r.randint(1, 2))], [(T, -z) for T, z in r.pair(0.1, 2, 0.01, 0.9, 0.25)]
    lags = r.scaled(0.1, 10, len(leads) + 2 * len(pairs) + 1)
    return dict(gain=r.scaled(0.05, 2), integrators=r.randrange(2), leads=leads, lead_pairs=pairs, lags=lags, dead_time=r.dead_time())
def unstable(r):
    T, k, lags, kind = r.scaled(0.2, 10), r.scaled(1.05, 8), r.scaled(0.01, 0.2, r.randrange(2)), r.randrange(3)
    theta, lags = T * r.choice([0, r.uniform(0.01, 0.7)]), [T * x for x in lags]
    if kind == 0:  # a pair held by a lead
        return dict(gain=2 * k, leads=[T * r.scaled(0.5, 5)], lag_pairs=[(T, -r.scaled(1e-3, 0.5))], lags=lags, dead_time=theta / 8)
    ti = [T * r.scaled(3, 30)] * (kind - 1)
    return dict(gain=-k / math.prod(ti), integrators=len(ti), leads=ti, lags=[-T] + lags, dead_time=theta)
def high_order(r):
    n, base, m = r.randint(5, 20), r.scaled(0.1, 10), r.randrange(2)
    pairs = [(base * T, z) for T, z in r.pair(0.1, 3, 0.05, 1.2, 0.5) + r.pair(0.1, 3, 0.05, 1.2, 0.5)]
    lags = ([base] * n if r.random() < 0.25 else [base * x for x in r.scaled(0.1, 10, n)])[m + 2 * len(pairs):]
    return dict(gain=r.scaled(0.05, 3) / (2 * n * base) ** m, integrators=m, lags=lags, lag_pairs=pairs,
                leads=[base * x for x in r.scaled(0.1, 3, r.randrange(3) * (1 - m))], dead_time=r.dead_time())
def near_cancellation(r):
    T, z, off = r.scaled(0.05, 10), r.scaled(1e-4, 0.5), 1 + r.choice([-1, 1]) * r.scaled(1e-12, 1e-2)
    lags, rest = r.scaled(0.1, 10, r.randint(1, 2)), dict(gain=r.scaled(0.05, 1), integrators=r.randrange(2), dead_time=r.dead_time())
    if r.random() < 0.5:
        return dict(lead_pairs=[(T * off, z)], lag_pairs=[(T, z * r.choice([1, off]))], lags=lags, **rest)
    return dict(leads=[T * off], lags=lags + [T], **rest)
def integrating(r):
    m, T = r.randrange(4), r.scaled(0.3, 10)
    return dict(gain=r.scaled(0.6, 5) / T**m, integrators=m, leads=[T * r.uniform(1, 3) for _ in range(m - 1)],
                lags=[T * x for x in r.scaled(0.005, 0.05, r.randrange(3))] + [T] * (m == 0), dead_time=T * r.choice([0, r.scaled(1e-4, 0.2)]))
def dead_time_range(r):
    tau = r.scaled(0.1, 10)
    theta = tau * r.choice([0, r.scaled(1e-4, 1e-1), r.scaled(0.1, 100), 100, 30])
    return dict(gain=r.uniform(0.1, 0.9) / (theta / 2 + tau * 0.2) * r.scaled(0.3, 1), integrators=1, leads=[tau + theta / 2],
                lags=[tau] + [tau * 0.05] * r.randrange(2), dead_time=theta)
def one_at_rest(r):
    return dict(gain=1.0, lags=r.scaled(0.1, 10, r.randint(1, 3)), lag_pairs=r.pair(0.1, 5, 0.02, 1.2, 0.5),
                leads=[T * r.choice([-1, 1, 1]) for T in r.scaled(0.05, 5, r.randrange(2))], dead_time=r.dead_time())
def kept_gain(r):  # at infinite frequency, less than 1
    k, n, m = r.uniform(0.02, 0.97), r.randint(1, 3), r.randrange(2)
    lags, leads = r.scaled(0.1, 10, n), r.scaled(0.1, 10, n)
    if m:  # PID without filter
        leads = [leads[0], leads[0] * r.scaled(0.05, 0.9)]
        return dict(gain=k * lags[0] / math.prod(leads), integrators=1, leads=leads, lags=lags[:1], dead_time=r.dead_time())
    return dict(gain=r.choice([-1, 1]) * k * math.prod(lags) / math.prod(leads), leads=leads, lags=lags, dead_time=r.dead_time())
def zero_at_rest(r):
    return dict(gain=r.scaled(0.1, 5), zeros_at_origin=r.randint(1, 2), lags=r.scaled(0.1, 10, 3), lag_pairs=r.pair(0.1, 5, 0.01, 0.9, 0.5), dead_time=r.dead_time())
def near_minus_one(r):  # past it at 1e-2 to 1e-8
    while True:
        given = r.choice([typical, damped, high_order, inverse_response])(r)
        sizes = [abs(Curve(**given).at(w)[0]) for w in phase_crossings(Curve(**given))[0]]
        if sizes:
            return dict(given, gain=given["gain"] / float(max(sizes)) * (1 - r.choice([-1, 1, 1]) * r.scaled(1e-8, 1e-2)))
def beyond_one(r):  # at infinite frequency, without dead time
    T = r.scaled(0.1, 10)
    return dict(gain=r.uniform(0.2, 2), leads=[T * r.uniform(6, 20)], lags=[T])

FAMILIES = [(lag_rule, 70), (typical, 100), (damped, 110), (inverse_response, 70), (unstable, 70), (high_order, 70), (near_cancellation, 100), (integrating, 60),
            (dead_time_range, 45), (one_at_rest, 40), (kept_gain, 50), (zero_at_rest, 15), (near_minus_one, 50), (beyond_one, 4)]

def text(x):
    if isinstance(x, (tuple, list)):
        return "{" + ", ".join(map(text, x)) + "}"
    return str(x) if isinstance(x, (int, str)) else "infinity" if x == mp.inf else repr(float(x))

def analyzed(family, given, unstable_too, kind=Curve):
    """The row of a loop, and whether it is stable; None to leave it out."""
    curve, pi = kind(**given), mp.pi
    if curve.dead_time and abs(curve.at_infinity) >= 1:
        return None
    gains = curve.gain_crossings()
    poles = closed_loop_poles(curve, gains)
    if curve.dead_time == 0:
        both = [mp.mpf(c) / max(map(abs, curve.D)) for c in plus(curve.D, curve.N)][::-1]
        assert poles == sum(root.real > 0 for root in mp.polyroots(both, maxsteps=2000, extraprec=400 + 60 * curve.order))
    near, far = closest(curve, 1), closest(curve, -1)
    if near[0] < 3e-9 or (poles and not unstable_too):
        return None
    phases, limit = phase_crossings(curve)
    factors = [1 / abs(curve.at(w)[0]) for w in phases]
    ends = [-1 / mp.mpf(curve.gain)] if curve.m == 0 and curve.gain < 0 else []
    if curve.relative_degree == 0 and (curve.dead_time or curve.at_infinity < 0):
        ends.append(abs(1 / curve.at_infinity))
    if all(f < 1 for f in factors + ends):  # the margin is beyond those listed
        factors += [1 / abs(curve.at(w)[0]) for w in phase_crossings(curve, Fraction(1, 10**9))[0]]
    above, below = min([f for f in factors + ends if f > 1], default=mp.inf), max([f for f in factors + ends if f < 1], default=mp.mpf(0))
    if not poles and limit < mp.inf and above not in ends:
        assert all(w < limit for w in curve.gain_crossings(Fraction(float(1 / above)))), "the nearest may lie beyond the list"
    angles = [mp.arg(-curve.at(w)[0]) for w in gains]
    delay = min([(a if a > 0 else a + 2 * pi) / w for a, w in zip(angles, gains)], default=mp.inf)
    if curve.dead_time == 0 and abs(curve.at_infinity) >= 1:
        delay = mp.mpf(0)  # with any dead time infinitely many poles go to the right
    margins, peaks = [above, below, min([abs(a) * 180 / pi for a in angles], default=mp.inf), delay], [1 / near[0], near[1], 1 / far[0], far[1]]
    def crossing(w, value):
        slope = curve.at(w)[1] * w
        return [w, value, float("%.2g" % slope.real), float("%.2g" % slope.imag)]
    lists = [[crossing(w, a) for w, a in zip(gains, angles)], [crossing(w, f) for w, f in zip(phases, factors)]]
    given = [float(x) if i in (0, 7) else [float(T) for T in x] if i in (3, 4) else x for i, x in enumerate(curve.given)]
    rest = [poles, near[0], *([[], []] if poles else [margins, peaks]), limit]
    return "    " + text(['"%s"' % family, given, *rest, *("\n     " + text(x) for x in lists)]), poles == 0

def rows_of(families, seed, kind=Curve):
    r, rows = Draws(seed), []
    for draw, wanted in families:
        made = unstable_made = 0
        while made < wanted:
            result = analyzed(draw.__name__, draw(r), unstable_made < 0.3 * wanted, kind)
            if result:
                rows.append(result[0])
                made, unstable_made = made + 1, unstable_made + (not result[1])
        print(draw.__name__, made, "of them unstable", unstable_made, file=sys.stderr, flush=True)
    return rows

def main():
    rows = rows_of(FAMILIES, SEED)
    print(HEADER % (SEED, ",\n".join(rows), len(rows)))

HEADER = """// Made by make_certified_loops.py with seed %s; do not edit.
#pragma once

#include "assess/certified_rows.hpp"

namespace oracle {
const CertifiedLoop certified_loops[] = {
%s
};  // %d loops

}  // namespace oracle"""

if __name__ == "__main__":
    main()
