"""Writes held_data.hpp: processes driven by an output held over each scan, by mpmath.

The process value after n scans is the superposition of step responses (partial fractions, 50 digits) of the
output's changes. The output of scan k is ((37 k) mod 11 - 5) / 5, an exact function both sides compute.
Run once: /usr/bin/python3 make_held_data.py > held_data.hpp
"""
import mpmath as mp

mp.mp.dps = 50


def text(x):
    return mp.nstr(x, 20, min_fixed=0, max_fixed=0)


def two_lags(a, b, t):
    if a == b:
        return 1 - (1 + t / a) * mp.exp(-t / a)
    return 1 - (a * mp.exp(-t / a) - b * mp.exp(-t / b)) / (a - b)


def pair(T, z, t):
    if z == 1:
        return two_lags(T, T, t)
    r = mp.sqrt(mp.mpc(z * z - 1))
    p, q = (-z + r) / T, (-z - r) / T
    return mp.re(1 + (q * mp.exp(p * t) - p * mp.exp(q * t)) / (p - q))


STEPS = {
    "first_order": lambda p, t: 1 - mp.exp(-t / p[0]),
    "second_order": lambda p, t: two_lags(p[0], p[1], t),
    "oscillatory": lambda p, t: pair(p[0], p[1], t),
    "integrating": lambda p, t: t if p[0] == 0 else t - p[0] * (1 - mp.exp(-t / p[0])),
}


def output(k):
    return mp.mpf(((37 * k) % 11 - 5)) / 5


def value(form, p, theta, h, n):
    p = [mp.mpf(x) for x in p]
    h, theta, total, before = mp.mpf(h), mp.mpf(theta), mp.mpf(0), mp.mpf(0)
    for k in range(n):
        t = (n - k) * h - theta
        u = output(k)
        if t > 0:
            total += (u - before) * STEPS[form](p, t)
        before = u
    return total


FORMS = [("first_order", (10.0, 0.0)), ("second_order", (10.0, 3.0)), ("second_order", (10.0, 10.0)),
         ("second_order", (10.0, 10.000001)), ("oscillatory", (10.0, 0.2)), ("oscillatory", (10.0, 1.0)),
         ("oscillatory", (10.0, 2.5)), ("integrating", (0.0, 0.0)), ("integrating", (10.0, 0.0))]

print("// Made by make_held_data.py (mpmath, 50 digits); do not edit.")
print("#pragma once\n\nnamespace oracle {\n")
print("enum class HeldForm { first_order, second_order, oscillatory, integrating };\n")
print("/// Process value after `scans` scans; parameters as in the builders, gain or slope 1.")
print("struct HeldRow {\n    HeldForm form;\n    double parameters[2], dead_time, scan_time;\n    int scans;\n    double value;\n};\n")
print("constexpr HeldRow held_rows[] = {")
for form, p in FORMS:
    for ratio in [1e-4, 1e-2, 0.1, 1.0, 10.0]:
        h = 10.0 * ratio
        for scans_late, counts in [(0.0, [1, 60]), (0.37, [2, 60]), (2.999, [5, 60]), (7.5, [60])]:
            theta = scans_late * h
            for n in counts:
                print("    {HeldForm::%s, {%r, %r}, %r, %r, %d, %s}," % (form, p[0], p[1], theta, h, n, text(value(form, p, theta, h, n))))
print("};\n\n}  // namespace oracle")
