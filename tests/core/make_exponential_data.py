"""Writes exponential_data.hpp: phi functions and e^z - 1 by mpmath with 60 digits at exact doubles.

Run once: /usr/bin/python3 make_exponential_data.py > exponential_data.hpp
"""
import random

import mpmath as mp

mp.mp.dps = 60
random.seed(20240711)


def text(x):
    return mp.nstr(x, 20, min_fixed=0, max_fixed=0)


def phi_1(x):
    return mp.mpf(1) if x == 0 else mp.expm1(x) / x


def phi_2(x):
    if x == 0:
        return mp.mpf("0.5")
    if abs(x) < mp.mpf("1e-15"):  # below this the difference eats the digits
        return mp.mpf("0.5") + x / 6 + x * x / 24
    return (mp.expm1(x) - x) / x**2


def reals():
    fixed = [0.0, 5e-324, -5e-324, 1e-300, 1e-17, -1e-17, 1e-8, -1e-8, 0.5, -0.5, 0.9999999999999999,
             -0.9999999999999999, 1.0, -1.0, 1.0000000000000002, -1.0000000000000002, 2.0, -2.0, 30.0, -30.0,
             -745.0, 300.0]
    drawn = [random.choice([-1, 1]) * 10 ** random.uniform(-16, 2.4) for _ in range(80)]
    return fixed + drawn


def complexes():
    fixed = [complex(0, 0), complex(1e-12, 1e-12), complex(0, 6.283185307179586), complex(1e-9, 6.283185307179586),
             complex(-1e-3, 3.141592653589793), complex(5e-7, 1e-3), complex(-20, 100), complex(0, -1e-100),
             complex(2.0, 0.0)]
    drawn = [complex(random.choice([-1, 1]) * 10 ** random.uniform(-12, 1), random.choice([-1, 1]) * 10 ** random.uniform(-12, 1.5))
             for _ in range(80)]
    return fixed + drawn


print("// Made by make_exponential_data.py (mpmath, 60 digits); do not edit.")
print("#pragma once\n\nnamespace oracle {\n")
print("struct PhiRow {\n    double x, phi_1, phi_2;\n};\n")
print("constexpr PhiRow phi_rows[] = {")
for x in reals():
    print("    {%r, %s, %s}," % (x, text(phi_1(mp.mpf(x))), text(phi_2(mp.mpf(x)))))
print("};\n")
print("/// e^z - 1.\nstruct ComplexRow {\n    double re, im, value_re, value_im;\n};\n")
print("constexpr ComplexRow exponential_rows[] = {")
for z in complexes():
    v = mp.expm1(mp.mpc(z)) if z != 0 else mp.mpc(0)
    print("    {%r, %r, %s, %s}," % (z.real, z.imag, text(v.real), text(v.imag)))
print("};\n\n}  // namespace oracle")
