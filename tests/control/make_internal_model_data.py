"""Writes internal_model_data.hpp: the exact controller C = (1/G) T / (1 - T) near s = 0 and beyond, by mpmath.

60 digits, exact doubles as inputs. Run once: /usr/bin/python3 make_internal_model_data.py > internal_model_data.hpp
"""
import mpmath as mp

mp.mp.dps = 60

# G: gain, integrators, lags, leads, dead time; T: leads, lags, dead time (gain 1).
CASES = [
    ("first order", (2.0, 0, [10.0], [], 3.0), ([], [5.0], 3.0)),
    ("first order, quick", (0.5, 0, [100.0], [], 1.0), ([], [0.5], 1.0)),
    ("second order, no dead time", (1.5, 0, [20.0, 5.0], [], 0.0), ([], [4.0], 0.0)),
    ("integrating", (0.05, 1, [], [], 1.0), ([9.0], [4.0, 4.0], 1.0)),
    ("integrating with lag", (0.25, 1, [3.0], [], 1.5), ([7.5], [3.0, 3.0], 1.5)),
    ("right-half-plane zero", (1.0, 0, [6.0, 2.0], [-1.5], 2.0), ([-1.5], [4.0], 2.0)),
    ("long dead time", (1.0, 0, [1.0], [], 50.0), ([], [10.0], 50.0)),
    ("later than the process", (1.0, 0, [1.0], [], 2.0), ([], [1.0], 2.5)),
]


def text(x):
    return mp.nstr(x, 20, min_fixed=0, max_fixed=0)


def product(list_, s):
    v = mp.mpc(1)
    for t in list_:
        v *= mp.mpf(t) * s + 1
    return v


print("// Made by make_internal_model_data.py (mpmath, 60 digits); do not edit.")
print("#pragma once\n\n#include <complex>\n#include <vector>\n\nnamespace oracle {\n")
print("struct InternalModelCase {\n    const char* name;\n    double gain;\n    int integrators;\n    std::vector<double> lags, leads;\n    double dead_time;\n    std::vector<double> response_leads, response_lags;\n    double response_dead_time;\n};\n")
print("struct InternalModelRow {\n    std::size_t which;\n    std::complex<double> s, controller;\n};\n")
list_text = lambda a: "{" + ", ".join(repr(x) for x in a) + "}"
print("inline const std::vector<InternalModelCase> internal_model_cases = {")
for name, (k, m, lags, leads, theta), (rl, rg, rt) in CASES:
    print("    {\"%s\", %r, %d, %s, %s, %r, %s, %s, %r}," % (name, k, m, list_text(lags), list_text(leads), theta, list_text(rl), list_text(rg), rt))
print("};\n")
print("inline const std::vector<InternalModelRow> internal_model_rows = {")
for i, (name, (k, m, lags, leads, theta), (rl, rg, rt)) in enumerate(CASES):
    for w in [1e-8, 1e-6, 1e-4, 1e-3, 0.01, 0.03, 0.1, 0.2, 0.5, 1.0, 3.0, 10.0, 100.0]:
        for at in [complex(0.0, w), complex(w, 0.3 * w)]:
            s = mp.mpc(at)
            T = product(rl, s) / product(rg, s) * mp.exp(-mp.mpf(rt) * s)
            G = mp.mpf(k) * product(leads, s) / product(lags, s) / s**m * mp.exp(-mp.mpf(theta) * s)
            if abs(T) < 1e-200:
                continue
            C = T / (1 - T) / G
            print("    {%d, {%r, %r}, {%s, %s}}," % (i, at.real, at.imag, text(C.real), text(C.imag)))
print("};\n\n}  // namespace oracle")
