#!/usr/bin/python3
"""Writes polynomial_roots_data.hpp: polynomials with double coefficients and the roots of exactly those
coefficients, from mpmath at 120 digits or more.

    /usr/bin/python3 make_polynomial_roots_data.py > polynomial_roots_data.hpp

Every simple root is checked by its Newton correction at that precision; roots known in closed form (coefficients
that are exact integers) are taken from the closed form. A root is written as two doubles a component, the second
what the first leaves over. Of conjugates the one with the positive imaginary part is written.
"""
import random
from fractions import Fraction

import mpmath

SEED = 20240607
DIGITS = 120


def product(factors):
    """Coefficients, highest power first, in exact arithmetic when the factors are integers."""
    result = [1]
    for factor in factors:
        longer = [0] * (len(result) + len(factor) - 1)
        for i, a in enumerate(result):
            for j, b in enumerate(factor):
                longer[i + j] += a * b
        result = longer
    return result


def lag(root):
    return [1, -root]


def pair(frequency, damping):
    return [1.0, 2.0 * damping * frequency, frequency * frequency]


def random_real(n, rng):
    return product([lag(-(10.0 ** rng.uniform(-2, 2))) for _ in range(n)])


def damped_pairs(n, rng):
    factors = [pair(10.0 ** rng.uniform(-1, 1), 10.0 ** rng.uniform(-4, -1)) for _ in range(n // 2)]
    return product(factors + [lag(-rng.uniform(0.1, 10.0))] * (n % 2))


def both_half_planes(n, rng):
    factors = [pair(10.0 ** rng.uniform(-1, 1), rng.uniform(-0.9, 0.9)) for _ in range(n // 2)]
    return product(factors + [lag(rng.uniform(-10.0, 10.0))] * (n % 2))


def cluster(n, _):
    return product([lag(-(1.0 + i // 2 + 0.001 * (i % 2))) for i in range(n)])


def spread(n, rng):
    return product([lag(-(10.0 ** rng.uniform(-140.0 / n, 140.0 / n))) for _ in range(n)])


def dynamic_range(n, rng):
    return [rng.choice([-1.0, 1.0]) * 10.0 ** rng.uniform(-200, 200) for _ in range(n + 1)]


def at_zero(n, rng):
    zeros = 1 + n // 4
    return random_real(n - zeros, rng) + [0.0] * zeros


def integers(n, _):
    return product([lag(-(i + 1)) for i in range(n)])


def doubled(n, _):
    return product([lag(-(1 + i // 2)) for i in range(n)])


FAMILIES = [  # name, maker, degrees, how many of each
    ("random real", random_real, (2, 3, 6, 10, 20), 2),
    ("lightly damped pairs", damped_pairs, (2, 3, 6, 10, 20), 2),
    ("both half planes", both_half_planes, (2, 3, 6, 10, 20), 1),
    ("cluster", cluster, (2, 3, 6, 10, 20), 1),
    ("spread", spread, (2, 3, 6, 10, 20), 1),
    ("dynamic range", dynamic_range, (2, 3, 6, 10), 2),
    ("dynamic range", dynamic_range, (20,), 1),
    ("roots at zero", at_zero, (3, 6, 10, 20), 1),
    ("integers", integers, (2, 3, 6, 10, 20), 1),
    ("double roots", doubled, (2, 3, 6, 10, 20), 1),
]


def polished_roots(coefficients, digits):
    with mpmath.workdps(digits):
        a = [mpmath.mpf(c) for c in coefficients]
        roots = mpmath.polyroots(a, maxsteps=5000, extraprec=8 * digits)
        for x in roots:
            p, slope = mpmath.polyval(a, x, derivative=True)
            assert abs(p) <= abs(slope * x) * mpmath.mpf(10) ** -50, (coefficients, x)
        real_below = mpmath.mpf(10) ** -45
        return [mpmath.mpc(x.real, 0 if abs(x.imag) < real_below * abs(x) else x.imag) for x in roots]


def closed_form(coefficients, roots):
    """The given roots if the stored coefficients are exactly their polynomial, else None."""
    if [Fraction(float(c)) for c in coefficients] != [Fraction(c) for c in product([lag(r) for r in roots])]:
        return None
    return [mpmath.mpc(r) for r in roots]


def roots_of(name, coefficients):
    n = len(coefficients) - 1
    if name == "double roots":
        exact = closed_form(coefficients, [-(1 + i // 2) for i in range(n)])
        if exact:
            return exact
    zeros = 0
    while coefficients[n - zeros] == 0.0:
        zeros += 1
    stripped = coefficients[: n + 1 - zeros]
    wide = name in ("dynamic range", "spread")
    return [mpmath.mpc(0)] * zeros + polished_roots(stripped, 1500 if wide else DIGITS)


def two_doubles(x):
    high = float(x)
    low = float(x - mpmath.mpf(high)) if high else 0.0
    return f"{high!r}, {low:.3g}"


def written(name, coefficients, roots):
    listed = [f"{c!r}" for c in coefficients]
    upper = sorted((x for x in roots if x.imag >= 0), key=lambda x: (abs(x), x.real))
    assert sum(1 if x.imag == 0 else 2 for x in upper) == len(coefficients) - 1
    values = [f"{{{two_doubles(x.real)}, {two_doubles(x.imag)}}}" for x in upper]
    return f'{{"{name}",\n' + wrapped("{" + ", ".join(listed) + "},") + "\n" + wrapped("{" + ", ".join(values) + "}},")


def wrapped(text, width=118):
    lines, line = [], " "
    for word in text.split(" "):
        if len(line) + 1 + len(word) > width:
            lines.append(line)
            line = " "
        line += (" " if line.strip() else "") + word
    return "\n".join(lines + [line])


def in_range(roots):
    return all(x == 0 or mpmath.mpf("1e-290") < abs(x) < mpmath.mpf("1e290") for x in roots)


def main():
    rng = random.Random(SEED)
    mpmath.mp.dps = DIGITS
    print(f"""// Made by make_polynomial_roots_data.py; mpmath {mpmath.__version__}, {DIGITS} digits or more, seed {SEED}.
#pragma once

#include <vector>

/// Each component is high + low; of conjugates only the one with the positive imaginary part is listed.
struct ReferenceRoot {{
    double re, re_low, im, im_low;
}};

struct ReferencePolynomial {{
    const char* family;
    std::vector<double> coefficients;  // highest power first
    std::vector<ReferenceRoot> roots;
}};

inline const std::vector<ReferencePolynomial> reference_polynomials = {{""")
    for name, maker, degrees, count in FAMILIES:
        for n in degrees:
            made = 0
            while made < count:
                coefficients = [float(c) for c in maker(n, rng)]
                roots = roots_of(name, coefficients)
                if in_range(roots):
                    print(written(name, coefficients, roots))
                    made += 1
    for n in (2, 3, 6):
        coefficients = [float(c) for c in product([lag(-1)] * n)]
        print(written("multiple root", coefficients, closed_form(coefficients, [-1] * n)))
    print("};")


main()
