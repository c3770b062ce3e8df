#include "math/polynomial_roots.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "math/double_double.hpp"
#include "math/simultaneous_roots.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double unit_roundoff = 0x1p-53;

/// A real root, or with im > 0 a conjugate pair.
struct Factor {
    double re, im, radius;
};

// value 2^exponent, widened by what rounding to a subnormal loses; beyond the range it is infinite.
Factor unscaled(double re, double im, double radius, int exponent) {
    // Adding 0 makes a negative zero positive.
    Factor f{std::ldexp(re, exponent) + 0.0, std::ldexp(im, exponent), std::ldexp(radius, exponent)};
    if (!is_finite(f.re) || !is_finite(f.im)) return {re < 0.0 ? -HUGE_VAL : HUGE_VAL, 0.0, HUGE_VAL};
    if (std::max(std::abs(f.re), std::abs(f.im)) < 0x1p-1021 || f.radius < 0x1p-1021) f.radius += 0x1p-1073;
    return f;
}

void append_linear(double a, double b, std::vector<Factor>& factors) {
    int power_a = 0, power_b = 0;
    const double y = -std::frexp(b, &power_b) / std::frexp(a, &power_a);
    factors.push_back(unscaled(y, 0.0, unit_roundoff * std::abs(y), power_b - power_a));
}

// a x^2 + b x + c in closed form. The discriminant is right to 2 units in the last place: W. Kahan, On the cost
// of floating-point computation without extra-precise arithmetic, 2004; proof by S. Boldo, IEEE TC 58, 2009.
void append_quadratic(double a, double b, double c, std::vector<Factor>& factors) {
    int power_a = 0, power_b = 0, power_c = 0;
    const double mantissa_a = std::frexp(a, &power_a), mantissa_c = std::frexp(c, &power_c);
    const double mantissa_b = std::frexp(b, &power_b);
    if (b != 0.0 && 2 * power_b - power_a - power_c > 120) {  // a c / b^2 does not count
        append_linear(b, c, factors);
        append_linear(a, b, factors);
        return;
    }
    // x = 2^e y makes the outer coefficients alike, and b is then not much larger.
    const int e = (power_c - power_a) >> 1;
    const int top = power_a + 2 * e;
    a = mantissa_a;
    b = std::ldexp(mantissa_b, power_b + e - top);
    c = std::ldexp(mantissa_c, power_c - top);
    const auto square = two_product(b, b);
    const auto outer = two_product(4.0 * a, c);
    const double discriminant = (square.value - outer.value) + (square.error - outer.error);
    const double slack = 6.0 * unit_roundoff;
    if (discriminant >= 0.0) {
        const double q = -0.5 * (b + std::copysign(std::sqrt(discriminant), b));
        for (double y : {q / a, c / q}) factors.push_back(unscaled(y, 0.0, slack * std::abs(y), e));
    } else {
        const double re = -0.5 * b / a, im = 0.5 * std::sqrt(-discriminant) / std::abs(a);
        const Factor pair = unscaled(re, im, slack * std::sqrt(re * re + im * im), e);
        factors.insert(factors.end(), pair.im == 0.0 ? 2 : 1, pair);  // out of range it is two real roots
    }
}

// The conjugate of a root is a root, so of each pair the half with the smaller radius speaks for both. What its
// radius cannot tell from real is real, and so is what finds no partner.
void append_symmetric(const std::vector<EnclosedRoot>& roots, std::vector<Factor>& factors) {
    std::vector<Factor> upper, lower;
    upper.reserve(roots.size());
    lower.reserve(roots.size());
    for (const EnclosedRoot& root : roots) {
        Factor f = unscaled(root.value.real(), root.value.imag(), root.radius, root.exponent);
        if (std::abs(f.im) <= f.radius) {
            factors.push_back({f.re, 0.0, f.radius + std::abs(f.im)});
        } else if (f.im > 0.0) {
            upper.push_back(f);
        } else {
            lower.push_back({f.re, -f.im, f.radius});
        }
    }
    for (const Factor& u : upper) {
        const auto distance = [&](const Factor& l) { return std::max(std::abs(u.re - l.re), std::abs(u.im - l.im)); };
        const auto partner = std::min_element(lower.begin(), lower.end(), [&](const Factor& a, const Factor& b) {
            return distance(a) < distance(b);
        });
        if (partner == lower.end()) {
            factors.push_back({u.re, 0.0, u.radius + u.im});
        } else {
            factors.push_back(u.radius <= partner->radius ? u : *partner);
            if (distance(*partner) > u.radius + partner->radius) factors.back().radius += 2.0 * distance(*partner);
            lower.erase(partner);
        }
    }
    for (const Factor& l : lower) factors.push_back({l.re, 0.0, l.radius + l.im});
}

}  // namespace

PolynomialRoots polynomial_roots(std::span<const double> coefficients) {
    if (coefficients.empty() || coefficients.front() == 0.0)
        throw std::invalid_argument("polynomial_roots: the first coefficient must be there and not be 0");
    for (double a : coefficients)
        if (!is_finite(a)) throw std::invalid_argument("polynomial_roots: every coefficient must be finite");
    std::vector<Factor> factors;
    const std::size_t coefficient_count = coefficients.size();
    factors.reserve(coefficient_count);
    for (; coefficients.back() == 0.0; coefficients = coefficients.first(coefficients.size() - 1))
        factors.push_back({0.0, 0.0, 0.0});
    const std::size_t degree = coefficients.size() - 1;
    if (degree == 1) {
        append_linear(coefficients[0], coefficients[1], factors);
    } else if (degree == 2) {
        append_quadratic(coefficients[0], coefficients[1], coefficients[2], factors);
    } else if (degree > 2) {
        append_symmetric(simultaneous_roots(std::vector<double>(coefficients.rbegin(), coefficients.rend())), factors);
    }
    std::sort(factors.begin(), factors.end(),
              [](const Factor& a, const Factor& b) { return std::hypot(a.re, a.im) < std::hypot(b.re, b.im); });
    PolynomialRoots roots;
    roots.values.reserve(coefficient_count);
    roots.error_radii.reserve(coefficient_count);
    for (const Factor& f : factors) {
        roots.values.emplace_back(f.re, f.im);
        roots.error_radii.push_back(f.radius);
        if (f.im == 0.0) continue;
        roots.values.emplace_back(f.re, -f.im);
        roots.error_radii.push_back(f.radius);
    }
    return roots;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
