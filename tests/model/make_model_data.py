"""Writes values_data.hpp, polynomials_data.hpp and steps_data.hpp: transfer functions at complex s, and step responses, by mpmath.

Inputs are exact doubles; 60 digits throughout. Step responses come from partial fractions and are checked
here against a numerical inverse Laplace transform (Talbot's method) before they are written.
Run once for each: /usr/bin/python3 make_model_data.py values > values_data.hpp, and so on.
"""
import random
import sys

import mpmath as mp

mp.mp.dps = 60
random.seed(20240712)


def text(x):
    return mp.nstr(x, 20, min_fixed=0, max_fixed=0)


def c_text(z):
    return "{%s, %s}" % (text(mp.re(z)), text(mp.im(z)))


def scaled(low, high):
    return low * (high / low) ** random.random()


# --- values at s ---------------------------------------------------------------------------------


def draw_factors():
    pick = lambda: random.choice([1, 1, 1, -1]) * scaled(0.01, 100)
    pairs = lambda n: [(scaled(0.01, 100), random.uniform(-0.5, 1.5)) for _ in range(n)]
    return dict(gain=random.choice([1, -1]) * scaled(0.01, 100), integrators=random.randint(0, 2),
                zeros=random.choice([0, 0, 1]), leads=[pick() for _ in range(random.randint(0, 3))],
                lags=[pick() for _ in range(random.randint(0, 5))], lead_pairs=pairs(random.randint(0, 1)),
                lag_pairs=pairs(random.randint(0, 2)), dead_time=random.choice([0.0, scaled(0.01, 10)]))


def value(f, s):
    s = mp.mpc(s)
    v = mp.mpf(f["gain"])
    for T in f["leads"]:
        v *= T * s + 1
    for T in f["lags"]:
        v /= T * s + 1
    for T, z in f["lead_pairs"]:
        v *= (mp.mpf(T) * s) ** 2 + 2 * mp.mpf(z) * T * s + 1
    for T, z in f["lag_pairs"]:
        v /= (mp.mpf(T) * s) ** 2 + 2 * mp.mpf(z) * T * s + 1
    return v * s ** (f["zeros"] - f["integrators"]) * mp.exp(-mp.mpf(f["dead_time"]) * s)


def factors_text(f):
    reals = lambda list_: "{" + ", ".join(repr(x) for x in list_) + "}"
    pairs = lambda list_: "{" + ", ".join("{%r, %r}" % p for p in list_) + "}"
    return "{.gain = %r, .integrators = %d, .zeros_at_origin = %d, .leads = %s, .lags = %s, .lead_pairs = %s, .lag_pairs = %s, .dead_time = %r}" % (
        f["gain"], f["integrators"], f["zeros"], reals(f["leads"]), reals(f["lags"]), pairs(f["lead_pairs"]),
        pairs(f["lag_pairs"]), f["dead_time"])


def print_values():
    print("struct ValueRow {\n    tauwright::Factors factors;\n    std::complex<double> s, value;\n};\n")
    print("inline const std::vector<ValueRow> value_rows = {")
    for _ in range(80):
        f = draw_factors()
        w = scaled(1e-3, 1e2)
        s = complex(0, w) if random.random() < 0.6 else complex(random.uniform(-0.3, 0.5) * w, w)
        print("    {%s,\n     {%r, %r}, %s}," % (factors_text(f), s.real, s.imag, c_text(value(f, s))))
    print("};\n")


# --- polynomials ----------------------------------------------------------------------------------


def horner(p, s):
    v = mp.mpc(0)
    for c in p:
        v = v * s + mp.mpf(c)
    return v


def print_polynomials():
    print("/// Coefficients highest power first; the value at s of numerator / denominator exp(-dead_time s).")
    print("struct PolynomialRow {\n    std::vector<double> numerator, denominator;\n    double dead_time;\n    std::complex<double> s, value;\n};\n")
    print("inline const std::vector<PolynomialRow> polynomial_rows = {")
    rows = []
    for _ in range(60):
        den = [random.uniform(-3, 3) for _ in range(random.randint(1, 9))] + [0.0] * random.choice([0, 0, 0, 1, 2])
        num = [0.0] * random.choice([0, 0, 1]) + [random.uniform(-3, 3) for _ in range(random.randint(1, 5))]
        num += [0.0] * random.choice([0, 0, 0, 1])
        rows.append((num, den))
    rows.append(([2.0], [1.0, 4.0, 6.0, 4.0, 1.0]))                      # 2 / (s+1)^4
    rows.append(([-2.0, 1.0], [1.0, 3.0, 3.0, 1.0]))                     # (-2 s+1) / (s+1)^3
    rows.append(([1.0], [1.0, 2.0, 1.0]))                                # 1 / (s+1)^2
    rows.append(([1.0], [1.0, 0.0, 1.0]))                                # 1 / (s^2+1)
    rows.append(([1e-6, 1.0], [1e-12, 1e-6, 1e3, 1.0]))                  # wide scales
    rows.append(([5.0], [4.0]))
    for i, (num, den) in enumerate(rows):
        if i == 60:
            print("};\n\n/// The same with multiple roots or wide scales.")
            print("inline const std::vector<PolynomialRow> hard_polynomial_rows = {")
        w = scaled(1e-2, 1e2)
        s = complex(random.choice([0.0, 0.2 * w]), w)
        theta = random.choice([0.0, scaled(0.01, 3)])
        v = horner(num, mp.mpc(s)) / horner(den, mp.mpc(s)) * mp.exp(-mp.mpf(theta) * mp.mpc(s))
        list_ = lambda p: "{" + ", ".join(repr(x) for x in p) + "}"
        print("    {%s,\n     %s,\n     %r, {%r, %r}, %s}," % (list_(num), list_(den), theta, s.real, s.imag, c_text(v)))
    print("};\n")


# --- step responses -------------------------------------------------------------------------------


def two_lags(a, b, t):
    a, b = mp.mpf(a), mp.mpf(b)
    if a == b:
        return 1 - (1 + t / a) * mp.exp(-t / a)
    return 1 - (a * mp.exp(-t / a) - b * mp.exp(-t / b)) / (a - b)


def pair(T, z, t):
    T, z = mp.mpf(T), mp.mpf(z)
    if z == 1:
        return two_lags(T, T, t)
    r = mp.sqrt(mp.mpc(z * z - 1))
    p, q = (-z + r) / T, (-z - r) / T
    return mp.re(1 + (q * mp.exp(p * t) - p * mp.exp(q * t)) / (p - q))


STEPS = {
    "first_order": lambda p, t: 1 - mp.exp(-t / mp.mpf(p[0])),
    "second_order": lambda p, t: two_lags(p[0], p[1], t),
    "oscillatory": lambda p, t: pair(p[0], p[1], t),
    "integrating": lambda p, t: t if p[0] == 0 else t - mp.mpf(p[0]) * (1 - mp.exp(-t / mp.mpf(p[0]))),
}
LAPLACE = {
    "first_order": lambda p, s: 1 / (s * (p[0] * s + 1)),
    "second_order": lambda p, s: 1 / (s * (p[0] * s + 1) * (p[1] * s + 1)),
    "oscillatory": lambda p, s: 1 / (s * ((mp.mpf(p[0]) * s) ** 2 + 2 * mp.mpf(p[1]) * p[0] * s + 1)),
    "integrating": lambda p, s: 1 / (s * s * (p[0] * s + 1)),
}
NAMES = list(STEPS)


def print_steps():
    cases = [("first_order", (10.0, 0.0), 3.0), ("first_order", (0.01, 0.0), 0.0), ("first_order", (3600.0, 0.0), 7.3)]
    for b in [2.0, 10.0, 10.000001, 10.0 * (1 + 1e-9), 10.0 * (1 + 4e-16), 9.9999, 0.001, 12.5]:
        cases.append(("second_order", (10.0, b), 1.5))
    for z in [0.0, 0.05, 0.3, 0.7, 0.99, 1 - 1e-6, 1 - 1e-10, 1 - 1.2e-16, 1.0, 1 + 2.3e-16, 1 + 1e-10, 1 + 1e-6, 1.01, 3.0, 50.0]:
        cases.append(("oscillatory", (2.0, z), 0.7))
    for lag in [0.0, 4.0, 1e-3, 1e5]:
        cases.append(("integrating", (lag, 0.0), 2.5))
    print("enum class StepForm { %s };\n" % ", ".join(NAMES))
    print("/// parameters: lag | lag_1, lag_2 | time constant, damping | lag; gain or slope 1.")
    print("struct StepRow {\n    StepForm form;\n    double parameters[2], dead_time, time_s, value;\n};\n")
    print("inline const std::vector<StepRow> step_rows = {")
    for form, p, theta in cases:
        scale = max(p[0], 1e-2) if form != "integrating" else 5.0
        for x in [1e-9, 1e-4, 0.05, 0.3, 1.0, 2.7, 8.0, 30.0]:
            time = theta + x * scale
            t = mp.mpf(time) - mp.mpf(theta)
            v = STEPS[form](p, t)
            if 0.05 <= x <= 3:
                with mp.workdps(40):
                    check = mp.invertlaplace(lambda s: LAPLACE[form](p, s), t, method="talbot")
                assert abs(check - v) < 1e-13 * max(1, abs(v)), (form, p, x, check, v)
            print("    {StepForm::%s, {%r, %r}, %r, %r, %s}," % (form, p[0], p[1], theta, time, text(v)))
    print("};\n")


print("// Made by make_model_data.py (mpmath, 60 digits); do not edit.")
print("#pragma once\n\n#include <complex>\n#include <vector>\n\n#include \"tauwright/model/transfer_function.hpp\"\n\nnamespace oracle {\n")
{"values": print_values, "polynomials": print_polynomials, "steps": print_steps}[sys.argv[1]]()
print("}  // namespace oracle")
