"""Writes held_any_order_data.hpp: sampled responses and zeros of processes of order 0 to 20, by mpmath.

Nothing of the library's way is used: the process is expanded into polynomials and a companion form at 160 digits, the
matrix exponential is mpmath's own, and a linear input is the integral of its held slope, so that its response is that
of the process times 1/s to a held input, times (z - 1) / scan time. A sample is read before the input changes. The
zeros are the roots of the determinant of the system matrix, interpolated at 160 digits.
Run once: /usr/bin/python3 make_held_any_order_data.py > held_any_order_data.hpp
"""
import mpmath as mp

mp.mp.dps = 160


def times(p, q):
    out = [mp.mpf(0)] * (len(p) + len(q) - 1)
    for i, a in enumerate(p):
        for j, b in enumerate(q):
            out[i + j] += a * b
    return out


def expanded(at_origin, reals, pairs, unit):
    """Highest power first, with `unit` seconds as the unit of time."""
    p = [mp.mpf(1)]
    for _ in range(at_origin):
        p = p + [mp.mpf(0)]
    for T in reals:
        p = times(p, [mp.mpf(T) / unit, 1])
    for T, z in pairs:
        T = mp.mpf(T) / unit
        p = times(p, [T * T, 2 * mp.mpf(z) * T, 1])
    return p


class Sampled:
    """z^-whole * (outputs (z - F)^-1 (now + before / z) + direct / z) of a held input."""

    def __init__(self, c, extra_integrators=0):
        h = mp.mpf(c["scan"])
        below = expanded(c["integrators"] + extra_integrators, c["lags"], c["lag_pairs"], h)
        above = expanded(c["zeros_at_origin"], c["leads"], c["lead_pairs"], h)
        gain = mp.mpf(c["gain"]) * h ** (c["integrators"] + extra_integrators - c["zeros_at_origin"])
        n = len(below) - 1
        self.n = n
        above = [mp.mpf(0)] * (n + 1 - len(above)) + above
        above = [gain * a / below[0] for a in above]
        below = [b / below[0] for b in below]
        self.direct = above[0]
        delay = mp.mpf(c["dead_time"]) / h
        self.whole = int(mp.floor(delay + mp.mpf("1e-9")))
        early = delay - self.whole
        if abs(early) < mp.mpf("1e-9"):
            early = mp.mpf(0)
        late = 1 - early
        self.fraction = early
        if n == 0:
            return
        A = mp.zeros(n + 1, n + 1)  # the state and its input
        for i in range(n - 1):
            A[i, i + 1] = 1
        for j in range(n):
            A[n - 1, j] = -below[n - j]
        A[n - 1, n] = 1
        self.outputs = mp.matrix([[above[n - j] - self.direct * below[n - j] for j in range(n)]])
        full, part, rest = mp.expm(A), mp.expm(A * late), mp.expm(A * early)
        self.F = full[:n, :n]
        self.now = part[:n, n]
        self.before = part[:n, :n] * rest[:n, n]

    def rational(self, z):
        value = self.direct / z
        if self.n:
            value += (self.outputs * mp.lu_solve(z * mp.eye(self.n) - self.F, self.now + self.before / z))[0]
        return value

    def at(self, z):
        return self.rational(z) * z ** -self.whole


def response(c):
    if c["between"] == "constant":
        return Sampled(c).at
    held = Sampled(c, extra_integrators=1)
    return lambda z: held.at(z) * (z - 1) / mp.mpf(c["scan"])


def zeros(c):
    """Of the rational part, z - 1 of each, with its poles at z = 0 as in the library."""
    s = Sampled(c)
    n = s.n
    older = s.fraction > 0 or s.direct != 0

    def numerator(w):
        z = 1 + w
        M = w * mp.eye(n) - (s.F - mp.eye(n))
        return mp.det(M) * s.rational(z) * (z if older else 1)

    degree = n if older else n - 1
    if degree < 1:
        return []
    points = [mp.mpf(k) / 7 + mp.mpf(1) / 3 for k in range(degree + 1)]
    V = mp.matrix(degree + 1, degree + 1)
    for i, p in enumerate(points):
        for j in range(degree + 1):
            V[i, j] = p ** (degree - j)
    coefficients = list(mp.lu_solve(V, mp.matrix([mp.re(numerator(p)) for p in points])))
    return mp.polyroots(coefficients, maxsteps=2000, extraprec=2000)


CASES = []


def add(name, scan, dead=0.0, between="constant", gain=1.5, integrators=0, zeros_at_origin=0, leads=(), lags=(),
        lead_pairs=(), lag_pairs=(), with_zeros=False):
    """`dead` in scans."""
    CASES.append(dict(name=name, scan=scan, dead_time=dead * scan, between=between, gain=gain, integrators=integrators,
                      zeros_at_origin=zeros_at_origin, leads=list(leads), lags=list(lags), lead_pairs=list(lead_pairs),
                      lag_pairs=list(lag_pairs), with_zeros=with_zeros))


TEN = [0.3, 0.4, 0.5, 0.7, 0.9, 1.2, 1.5, 2.0, 2.5, 3.0]
TWENTY = [0.3 + 0.14 * k for k in range(20)]
for scan in (1e-4, 1e-2, 0.3, 1.0, 10.0):
    for dead in (0.0, 2.37):
        add("one lag", scan, dead, lags=[1.0])
        add("lag and lead", scan, dead, lags=[1.0], leads=[2.5])
        add("lag and right half plane lead", scan, dead, lags=[1.0], leads=[-0.4], gain=-2.0)
        add("integrator", scan, dead, integrators=1)
        add("two lags", scan, dead, lags=[1.0, 0.35], with_zeros=True)
        add("equal lags", scan, dead, lags=[1.0, 1.0])
        add("integrator and lag", scan, dead, integrators=1, lags=[1.0], with_zeros=dead > 0)
        add("two lags and a lead", scan, dead, lags=[1.0, 0.35], leads=[4.0], with_zeros=True)
        add("oscillatory", scan, dead, lag_pairs=[(1.0, 0.1)], with_zeros=True)
        add("three lags and two leads", scan, dead, lags=[1.0, 0.35, 3.0], leads=[2.0, -0.5], with_zeros=True)
        add("ten lags", scan, dead, lags=TEN, with_zeros=scan in (1e-4, 1.0))
        add("pairs in all", scan, dead, lags=[0.5], lag_pairs=[(1.0, 0.2), (2.0, 0.7)], lead_pairs=[(1.5, 0.3)], leads=[0.8],
            with_zeros=True)
    add("one lag", scan, 0.37, "linear", lags=[1.0])
    add("two lags and a lead", scan, 3.5, "linear", lags=[1.0, 0.35], leads=[4.0])
    add("ten lags", scan, 0.0, "linear", lags=TEN)
    add("pairs in all", scan, 1.25, "linear", lags=[0.5], lag_pairs=[(1.0, 0.2), (2.0, 0.7)], lead_pairs=[(1.5, 0.3)],
        leads=[0.8])
for scan in (1e-3, 0.1, 2.0):
    for dead in (0.0, 0.61):
        add("gain alone", scan, dead)
        add("gain alone", scan, dead, "linear")
        add("integrator and lead", scan, dead, integrators=1, leads=[3.0])
        add("washed out", scan, dead, lags=[1.0], zeros_at_origin=1)
        add("unstable lag", scan, dead, lags=[-1.0, 0.2], with_zeros=True)
        add("unstable pair", scan, dead, lag_pairs=[(1.0, -0.3)], lags=[0.4], with_zeros=True)
        add("overdamped pair", scan, dead, lag_pairs=[(1.0, 2.5)], lags=[0.4], with_zeros=True)
        add("notch", scan, dead, lag_pairs=[(1.0, 0.8)], lead_pairs=[(1.0, 0.05)], with_zeros=True)
        add("lead pair over real lags", scan, dead, lags=[0.3, 1.0, 2.0], lead_pairs=[(0.6, 0.5)], with_zeros=True)
        add("two integrators, lag and leads", scan, dead, integrators=2, lags=[0.5], leads=[3.0, 2.0], with_zeros=True)
        add("washed out pair", scan, dead, lag_pairs=[(1.0, 0.3)], lags=[2.0], zeros_at_origin=1, leads=[0.7],
            with_zeros=True)
        add("six equal lags", scan, dead, lags=[1.0] * 6, with_zeros=True)
        add("large lead", scan, dead, lags=[1.0, 0.7], leads=[1000.0], with_zeros=True)
        add("equal leads", scan, dead, lags=[0.5, 0.6, 2.0], leads=[1.0, 1.0], with_zeros=True)
        add("wide apart", scan, dead, lags=[1000.0, 1.0, 0.001], leads=[30.0], with_zeros=True)
        add("twenty lags", scan, dead, lags=TWENTY)
        add("twenty mixed", scan, dead, lags=TWENTY[:8] + [-4.0], integrators=1, leads=[0.5, 1.7, -0.6],
            lag_pairs=[(0.5, 0.1), (0.8, 0.4), (1.3, 0.05), (2.0, 0.9), (3.0, 0.6)], lead_pairs=[(1.0, 0.2), (2.5, 0.1)])


def text(x):
    return mp.nstr(x, 19, min_fixed=0, max_fixed=0)


def root_text(x):
    return text(mp.mpf(0) if abs(x) < mp.mpf("1e-60") else x)


def number_list(numbers):
    return "{" + ", ".join("%r" % x for x in numbers) + "}"


def pair_list(pairs):
    return "{" + ", ".join("{%r, %r}" % p for p in pairs) + "}"


def main():
    print("// Made by make_held_any_order_data.py (mpmath, 160 digits); do not edit.")
    print("#pragma once\n\n#include <complex>\n#include <vector>\n")
    print('#include "tauwright/discretize/held.hpp"\n')
    print("namespace oracle {\n")
    print("/// H at exp(j rad_s scan_time); `size` is |H| + |d H / d log(rad_s)|, what a last digit of rad_s can change.")
    print("struct HeldPoint {\n    double rad_s;\n    std::complex<double> value;\n    double size;\n};\n")
    print("struct HeldCase {\n    const char* name;\n    tauwright::Factors factors;\n    double scan_time;\n"
          "    tauwright::Between between;\n    std::vector<HeldPoint> points;\n"
          "    std::vector<std::complex<double>> zero_offsets;  // empty where they are not compared\n};\n")
    print("inline std::vector<HeldCase> held_cases() {\n    using enum tauwright::Between;\n    return {")
    for c in CASES:
        H = response(c)
        h = mp.mpf(c["scan"])
        print('    {"%s",' % c["name"])
        print("     {%r, %d, %d, %s, %s, %s, %s, %r}, %r, %s, {" % (
            c["gain"], c["integrators"], c["zeros_at_origin"], number_list(c["leads"]), number_list(c["lags"]),
            pair_list(c["lead_pairs"]), pair_list(c["lag_pairs"]), c["dead_time"], c["scan"], c["between"]))
        lines = []
        for rad_s in (0.013, 1.1, 0.4 / c["scan"], 2.9 / c["scan"]):
            if rad_s * c["scan"] > 3.1:
                rad_s = 2.0 / c["scan"]
            at = lambda w: H(mp.expj(w * h))
            w = mp.mpf(rad_s)
            value = at(w)
            step = w * mp.mpf(10) ** -40
            slope = (at(w + step) - value) / step * w
            lines.append("      {%r, {%s, %s}, %s}" % (rad_s, text(value.real), text(value.imag), mp.nstr(abs(value) + abs(slope), 6)))
        print(",\n".join(lines) + "},")
        roots = zeros(c) if c["with_zeros"] else []
        print("     {" + ",\n      ".join("{%s, %s}" % (root_text(mp.re(r)), root_text(mp.im(r))) for r in roots) + "}},")
    print("    };\n}\n\n}  // namespace oracle")


if __name__ == "__main__":
    main()
