"""Writes continuous_trend_data.hpp: closed-loop responses with exact dead time by two ways that share nothing with the library.

1. First-order process with dead time under PI: on every dead time the solution is p(s) exp(-s/tau) + q(s) with polynomials
   p and q, followed exactly in mpmath with 120 digits (Bellman and Cooke, Differential-Difference Equations, 1963). Ramps
   are differences of the integrated step response.
2. Higher orders and PID with filters: SciPy's DOP853 by steps at rtol 1e-13, process in companion form.
3. Without dead time: residues of the closed loop at the roots mpmath finds.

Run once: python3 make_continuous_trend_data.py > continuous_trend_data.hpp (SciPy, mpmath)
"""
import mpmath as mp
import numpy as np
from scipy.integrate import solve_ivp
from scipy.signal import tf2ss

mp.mp.dps = 120


class PolyExp:
    """p(s) exp(-s/tau) + q(s), coefficients ascending."""

    def __init__(self, p, q, tau):
        self.p, self.q, self.tau = p, q, tau

    def __call__(self, s):
        value = lambda c: mp.polyval(c[::-1], s) if c else mp.mpf(0)
        return value(self.p) * mp.exp(-s / self.tau) + value(self.q)

    def plus(self, other, a=1, b=1):
        add = lambda x, y: [a * (x[i] if i < len(x) else 0) + b * (y[i] if i < len(y) else 0) for i in range(max(len(x), len(y)))]
        return PolyExp(add(self.p, other.p), add(self.q, other.q), self.tau)

    def integral(self, start):
        """The integral that is `start` at s = 0."""
        n = len(self.p)
        p = [mp.mpf(0)] * n  # P' - P/tau = p
        for i in reversed(range(n)):
            p[i] = self.tau * ((i + 1) * p[i + 1] if i + 1 < n else 0) - self.tau * self.p[i]
        q = [mp.mpf(0)] + [c / (i + 1) for i, c in enumerate(self.q)]
        out = PolyExp(p, q, self.tau)
        out.q[0] = start - (p[0] if p else 0)
        return out

    def lagged(self, gain, start):
        """tau x' + x = gain * this, x = start at s = 0."""
        p = [mp.mpf(0)] + [gain * c / (self.tau * (i + 1)) for i, c in enumerate(self.p)]
        q = [mp.mpf(0)] * len(self.q)
        for i in reversed(range(len(q))):
            q[i] = gain * self.q[i] - self.tau * ((i + 1) * q[i + 1] if i + 1 < len(q) else 0)
        p[0] = start - (q[0] if q else 0)
        return PolyExp(p, q, self.tau)


class FirstOrderLoop:
    """y and u after a unit step of the set point or of the load, and their integrals, a dead time a piece."""

    def __init__(self, K, tau, theta, Kc, Ti, b, pieces, load):
        K, tau, theta, Kc, Ti, b = map(mp.mpf, (K, tau, theta, Kc, Ti, b))
        self.theta, self.y, self.u, self.Y, self.U = theta, [], [], [], []
        r = mp.mpf(0 if load else 1)
        v = PolyExp([], [mp.mpf(0)], tau)
        x = integral = Y = U = mp.mpf(0)
        for k in range(pieces):
            if load and k >= 1:
                v = v.plus(PolyExp([], [mp.mpf(1)], tau))
            y = v.lagged(K, x)
            action = y.plus(PolyExp([], [r], tau), -Kc / Ti, Kc / Ti).integral(integral)
            u = action.plus(y.plus(PolyExp([], [b * r], tau), -Kc, Kc))
            self.y.append(y), self.u.append(u)
            self.Y.append(y.integral(Y)), self.U.append(u.integral(U))
            x, integral, Y, U = y(theta), action(theta), self.Y[-1](theta), self.U[-1](theta)
            v = u

    def at(self, pieces, t):
        if t < 0:
            return mp.mpf(0)
        k = int(mp.floor(t / self.theta + mp.mpf(10) ** -14))
        return pieces[k](t - k * self.theta)

    def driven(self, t, size, start, ramp):
        t = mp.mpf(t) - mp.mpf(start)
        if ramp == 0:
            return size * self.at(self.y, t), size * self.at(self.u, t)
        late = t - mp.mpf(ramp)
        return [size * (self.at(c, t) - self.at(c, late)) / mp.mpf(ramp) for c in (self.Y, self.U)]


def exact_case(K, tau, theta, Kc, Ti, b, duty, pieces, points):
    setpoint, setpoint_ramp, load, load_time, load_ramp = duty
    loops = [FirstOrderLoop(K, tau, theta, Kc, Ti, b, pieces + 2, l) for l in (False, True)]
    horizon, rows = pieces * theta, []
    for j in range(points):
        t = horizon * j / (points - 1)  # the very doubles the library takes
        a = loops[0].driven(t, mp.mpf(setpoint), 0.0, setpoint_ramp)
        c = loops[1].driven(t, mp.mpf(load), load_time, load_ramp)
        rows.append((a[0] + c[0], a[1] + c[1]))
    return horizon, rows


def drive(t, size, start, ramp):
    if t < start:
        return 0.0
    return size if t >= start + ramp else size * (t - start) / ramp


def steps_case(numerator, denominator, theta, pid, duty, horizon, points, parts=1):
    Kc, Ti, Td, Tf, Tm, b = pid
    setpoint, setpoint_ramp, load, load_time, load_ramp = duty
    A, B, C, D = tf2ss(numerator, denominator)
    B, C, D = B[:, 0], C[0], D[0, 0]
    n = len(A)
    Ki = Kc / Ti if Ti else 0.0

    def signals(t, z, v, side):
        r = drive(side, setpoint, 0.0, setpoint_ramp) if setpoint_ramp == 0 else drive(t, setpoint, 0.0, setpoint_ramp)
        y = C @ z[:n] + D * v
        dz = A @ z[:n] + B * v
        measured = z[n + 1] if Tm else y
        rate = (y - z[n + 1]) / Tm if Tm else (C @ dz if Td and not Tf else 0.0)
        derivative = (measured - z[n + 2]) / Tf if Tf else rate
        u = Kc * (b * r - measured) + z[n] - Kc * Td * derivative
        dm = (y - z[n + 1]) / Tm if Tm else 0.0
        df = derivative if Tf else 0.0
        return y, u, np.concatenate([dz, [Ki * (r - measured), dm, df]])

    events = sorted({e for e in (0.0, setpoint_ramp, load_time, load_time + load_ramp)})
    breaks = sorted({round(e + k * theta, 12) for e in events for k in range(int(horizon / theta) + 2)})
    breaks = [x for x in breaks if x <= horizon + theta]
    pieces, z = [], np.zeros(n + 3)

    def delayed(t, middle):
        """Output plus load a dead time ago; `middle` tells the piece."""
        past = t - theta
        d = drive(middle - theta, load, load_time, load_ramp) if load_ramp == 0 else drive(past, load, load_time, load_ramp)
        if middle - theta < 0:
            return d
        for a, c, f in pieces:
            if a < middle - theta < c:
                return d + f(past)
        raise ValueError(t)

    rows, grid, at = [], [horizon * j / (points - 1) for j in range(points)], 0
    for a, c in zip(breaks, breaks[1:]):
        middle = 0.5 * (a + c)
        rate = lambda t, z: signals(t, z, delayed(t, middle), middle)[2]
        s = solve_ivp(rate, (a, c), z, method="DOP853", rtol=1e-13, atol=1e-16, dense_output=True, max_step=(c - a) / (12 * parts))
        z = s.y[:, -1]
        now = lambda t, s=s, middle=middle: signals(t, s.sol(t), delayed(t, middle), middle)
        # The output as Chebyshev interpolants of degree 24, so that delayed lookups stay cheap.
        edges = np.linspace(a, c, parts + 1)
        fits = [np.polynomial.chebyshev.Chebyshev.interpolate(lambda x: np.array([now(t)[1] for t in np.atleast_1d(x)]), 24, e)
                for e in zip(edges, edges[1:])]
        f = lambda t, a=a, c=c, fits=fits: fits[min(max(int((t - a) / (c - a) * parts), 0), parts - 1)](t)
        while at < points and (grid[at] < c - 1e-9):
            y, u, _ = now(max(grid[at], a))
            rows.append((y, u))
            at += 1
        pieces.append((a, c, f))
        pieces = pieces[-2 * len(events) - 4:]
    return rows


def instant_case(numerator, denominator, pid, duty, horizon, points):
    Kc, Ti, Td, Tf, Tm, b = [mp.mpf(x or 0) for x in pid]
    setpoint, setpoint_ramp, load, load_time, load_ramp = duty
    mul = lambda x, y: [mp.fsum(x[i] * y[k - i] for i in range(len(x)) if 0 <= k - i < len(y)) for k in range(len(x) + len(y) - 1)]
    padded = lambda x, n: [mp.mpf(0)] * (n - len(x)) + x
    add = lambda x, y: [i + j for i, j in zip(padded(x, max(len(x), len(y))), padded(y, max(len(x), len(y))))]
    N, D = [mp.mpf(x) for x in numerator], [mp.mpf(x) for x in denominator]
    s, f, filt = [mp.mpf(1), mp.mpf(0)], [Tf, mp.mpf(1)] if Tf else [mp.mpf(1)], [Tm, mp.mpf(1)] if Tm else [mp.mpf(1)]
    Ki = Kc / Ti if Ti else mp.mpf(0)
    top = add(mul(mul([Kc], s), f), add(mul([Ki], f), mul([Kc * Td], mul(s, s))))  # of C, over s f filt
    bottom = mul(mul(s, f), filt)
    reference = mul(add(mul([Kc * b], s), [Ki]), mul(f, filt))                    # of the set point's path, over bottom
    loop = add(mul(D, bottom), mul(N, top))
    responses = {"yr": mul(N, reference), "ur": mul(D, reference), "yd": mul(N, bottom), "ud": [-x for x in mul(N, top)]}
    while loop[0] == 0:
        loop = loop[1:]
    roots = mp.polyroots(loop, maxsteps=500, extraprec=600)
    slope = [c * (len(loop) - 1 - i) for i, c in enumerate(loop[:-1])]

    def step(name, t, integrated):
        """Of numerator/loop to a unit step, or its integral, over the roots and 0 (the loop has no root there)."""
        if t < 0:
            return mp.mpf(0)
        over, value = responses[name], mp.mpf(0)
        rest = mp.polyval(over, 0) / mp.polyval(loop, 0)
        for r in roots:
            residue = mp.polyval(over, r) / mp.polyval(slope, r) / r
            value += residue * ((mp.exp(r * t) - 1) / r if integrated else mp.exp(r * t))
        return mp.re(value + (rest * t if integrated else rest))

    def driven(name, t, size, start, ramp):
        t = mp.mpf(t) - mp.mpf(start)
        if ramp == 0:
            return size * step(name, t, False)
        return size * (step(name, t, True) - step(name, t - mp.mpf(ramp), True)) / mp.mpf(ramp)

    return [tuple(driven(side + "r", horizon * j / (points - 1), mp.mpf(setpoint), 0.0, setpoint_ramp) +
                  driven(side + "d", horizon * j / (points - 1), mp.mpf(load), load_time, load_ramp) for side in "yu") for j in range(points)]


EXACT = [  # K, tau, theta, Kc, Ti, b, (set point, its ramp, load, its time, its ramp), dead times, points
    (1.0, 1.0, 0.05, 8.0, 0.6, 1.0, (1.0, 0.0, 0.0, 0.0, 0.0), 30, 61),
    (2.0, 1.0, 0.34, 0.75, 1.7, 1.0, (1.0, 0.0, 0.0, 0.0, 0.0), 30, 61),
    (1.0, 4.0, 4.0, 0.7, 3.0, 0.4, (1.0, 0.0, 0.0, 0.0, 0.0), 30, 61),
    (-0.5, 1.0, 3.0, -0.9, 1.3, 1.0, (1.0, 0.0, 0.0, 0.0, 0.0), 30, 61),
    (1.0, 1.0, 10.0, 0.25, 2.5, 0.0, (1.0, 0.0, 0.0, 0.0, 0.0), 30, 61),
    (1.0, 1.0, 30.0, 0.2, 5.0, 1.0, (1.0, 0.0, 0.0, 0.0, 0.0), 30, 61),
    (1.0, 1.0, 100.0, 0.3, 22.0, 1.0, (1.0, 0.0, 0.0, 0.0, 0.0), 30, 121),
    (1.0, 1.0, 1.0, 1.9, 1.5, 1.0, (1.0, 0.0, 0.0, 0.0, 0.0), 12, 61),
    (1.0, 1.0, 0.34, 1.2, 1.4, 0.7, (1.0, 0.0, -0.75, 1.23, 0.0), 30, 61),
    (1.5, 2.0, 1.0, 0.6, 2.6, 1.0, (1.0, 3.3, 2.0, 7.77, 0.25), 30, 61),
    (1.0, 1.0, 20.0, 0.2, 4.0, 1.0, (0.5, 0.0, 1.0, 33.3, 50.5), 10, 61),
]

STEPS = [  # name, numerator, denominator, dead time, (Kc, Ti, Td, Tf, Tm, b), duty, horizon, points
    ("second order and PID, filtered, both events", [2.0], [50.0, 15.0, 1.0], 1.5, (2.2, 14.0, 3.0, 0.4, 0.5, 0.6), (1.0, 0.0, -0.5, 31.7, 0.0), 60.0, 41),
    ("lead, right half plane zero, pair", [1.2, -0.8, 1.0], [4.0, 6.4, 3.4, 1.0], 0.7, (0.35, 2.0, 0.5, 0.15, 0.0, 1.0), (1.0, 0.0, 0.0, 0.0, 0.0), 25.0, 41),
    ("lightly damped pair", [1.0], [1.0, 0.1, 1.0], 0.5, (0.05, 0.35, 0.0, 0.0, 0.0, 1.0), (1.0, 2.3, 0.0, 0.0, 0.0), 25.0, 41),
    ("integrating with lag, PD", [0.2], [3.0, 1.0, 0.0], 1.0, (1.5, None, 2.5, 0.0, 0.0, 1.0), (1.0, 0.0, 0.3, 8.25, 0.0), 25.0, 41),
    ("unstable process", [1.0], [1.0, -1.0], 0.3, (2.0, 6.0, 0.1, 0.05, 0.0, 0.5), (1.0, 0.0, 0.2, 2.05, 1.1), 9.0, 41),
    ("neutral: unfiltered derivative on a first-order process", [1.0], [2.0, 1.0], 0.8, (1.3, 2.5, 0.6, 0.0, 0.0, 1.0), (1.0, 0.0, 0.4, 5.5, 0.0), 12.0, 41),
    ("process that answers at once", [0.6, 1.0], [2.0, 1.0], 0.5, (0.8, 2.2, 0.0, 0.0, 0.0, 1.0), (1.0, 0.0, 0.0, 0.0, 0.0), 9.0, 41),
    ("fast filters beside a slow lag", [1.0], [20.0, 1.0], 2.0, (4.0, 15.0, 0.8, 0.02, 0.05, 1.0), (1.0, 0.0, 0.0, 0.0, 0.0), 20.0, 41, 50),
]

INSTANT = [  # as STEPS, without dead time
    ("second order and PID, filtered, both events", [2.0], [50.0, 15.0, 1.0], 0.0, (2.2, 14.0, 3.0, 0.4, 0.5, 0.6), (1.0, 0.0, -0.5, 31.7, 2.2), 60.0, 41),
    ("unfiltered derivative on a first-order process", [1.0], [2.0, 1.0], 0.0, (1.3, 2.5, 0.6, 0.0, 0.0, 1.0), (1.0, 1.7, 0.4, 5.5, 0.0), 12.0, 41),
    ("process that answers at once", [0.6, 1.0], [2.0, 1.0], 0.0, (0.8, 2.2, 0.0, 0.0, 0.0, 1.0), (1.0, 0.0, 0.4, 3.3, 0.0), 9.0, 41),
    ("unstable and lightly damped, fast filters", [1.0, 0.4, 4.0], [1.0, -0.9, 3.98, -0.4], 0.0, (2.0, 6.0, 0.5, 0.002, 0.001, 1.0), (1.0, 0.0, 0.2, 2.05, 0.0), 9.0, 41),
    ("five lags of three decades", [1.0], [1.0, 12.33, 26.53, 16.63, 1.474, 0.04], 0.0, (0.02, 9.0, 0.0, 0.0, 0.0, 1.0), (1.0, 0.0, 0.2, 10.0, 0.0), 90.0, 41),
]


def number(x):
    return repr(float(x))


def optional(x):
    return "{}" if x is None else number(x)


def pairs(rows):
    text, line = "", "       "
    for y, u in rows:
        item = " {%s, %s}," % (number(y), number(u))
        if len(line) + len(item) > 150:
            text += line + "\n"
            line = "       "
        line += item
    return text + line + "\n"


def main():
    print("// Made by make_continuous_trend_data.py (mpmath %s, SciPy DOP853); do not edit." % mp.__version__)
    print("#pragma once\n\n#include <optional>\n#include <vector>\n\nnamespace oracle {\n")
    print("struct TrendPoint {\n    double value, output;\n};\n")
    print("struct TrendDrive {\n    double setpoint, setpoint_ramp, load, load_time, load_ramp;\n};\n")
    print("/// First-order process with dead time under PI; exact to the last bit.\nstruct ExactTrend {\n"
          "    double K, tau, theta, Kc, Ti, b;\n    TrendDrive drive;\n    double horizon;\n    std::vector<TrendPoint> points;\n};\n")
    print("/// Any process and PID; to about 1e-11. Polynomials in s, highest power first.\nstruct StepsTrend {\n    const char* name;\n"
          "    std::vector<double> numerator, denominator;\n    double theta, Kc;\n    std::optional<double> Ti;\n    double Td, Tf, Tm, b;\n"
          "    TrendDrive drive;\n    double horizon;\n    std::vector<TrendPoint> points;\n};\n")
    print("inline const ExactTrend exact_trends[] = {")
    for K, tau, theta, Kc, Ti, b, duty, pieces, points in EXACT:
        horizon, rows = exact_case(K, tau, theta, Kc, Ti, b, duty, pieces, points)
        head = ", ".join(map(number, (K, tau, theta, Kc, Ti, b)))
        print("    {%s, {%s}, %s, {\n%s    }}," % (head, ", ".join(map(number, duty)), number(horizon), pairs(rows)))
    print("};\n\ninline const StepsTrend steps_trends[] = {")
    for name, numerator, denominator, theta, pid, duty, horizon, points, *parts in STEPS:
        rows = steps_case(numerator, denominator, theta, pid, duty, horizon, points, *parts)
        lists = "{%s}, {%s}" % (", ".join(map(number, numerator)), ", ".join(map(number, denominator)))
        print("    {\"%s\", %s, %s, %s, {%s}, %s, {\n%s    }}," % (name, lists, number(theta), ", ".join(map(optional, pid)),
                                                       ", ".join(map(number, duty)), number(horizon), pairs(rows)))
    print("};\n\ninline const StepsTrend instant_trends[] = {")
    for name, numerator, denominator, theta, pid, duty, horizon, points in INSTANT:
        rows = instant_case(numerator, denominator, pid, duty, horizon, points)
        lists = "{%s}, {%s}" % (", ".join(map(number, numerator)), ", ".join(map(number, denominator)))
        print("    {\"%s\", %s, %s, %s, {%s}, %s, {\n%s    }}," % (name, lists, number(theta), ", ".join(map(optional, pid)),
                                                       ", ".join(map(number, duty)), number(horizon), pairs(rows)))
    print("};\n\n}  // namespace oracle")


if __name__ == "__main__":
    main()
