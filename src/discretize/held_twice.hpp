// Numbers of twice the digits of a double, real and complex, with just the operations that sampling needs.
// T. J. Dekker, Numer. Math. 18, 1971; relative error of each operation about 1e-31.
#pragma once

#include <cmath>
#include <complex>

#include "math/double_double.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The larger one; whichever is not a number where one is.
inline double larger(double a, double b) noexcept { return is_nan(a) || a > b ? a : b; }

/// high + low, with high the rounded sum.
struct Twice {
    double high = 0.0, low = 0.0;

    Twice() = default;
    Twice(double value) noexcept : high(value) {}  // NOLINT: doubles are such numbers
    Twice(double high_part, double low_part) noexcept : high(high_part), low(low_part) {}
};

inline double rounded(double x) noexcept { return x; }
inline double rounded(const Twice& x) noexcept { return x.high + x.low; }

// The sum of a number and one below its last digit.
inline Twice normal(double high, double low) noexcept {
    const double sum = high + low;
    return {sum, low - (sum - high)};
}

inline Twice operator-(const Twice& a) noexcept { return {-a.high, -a.low}; }
inline Twice operator+(const Twice& a, const Twice& b) noexcept {
    const auto s = two_sum(a.high, b.high), t = two_sum(a.low, b.low);
    const Twice first = normal(s.value, s.error + t.value);
    return normal(first.high, first.low + t.error);
}
inline Twice operator-(const Twice& a, const Twice& b) noexcept { return a + -b; }
inline Twice operator*(const Twice& a, const Twice& b) noexcept {
    const auto p = two_product(a.high, b.high);
    return normal(p.value, p.error + (a.high * b.low + a.low * b.high));
}
inline Twice operator/(const Twice& a, const Twice& b) noexcept {
    const double q = a.high / b.high;
    const Twice rest = a - b * Twice(q);
    const double r = rest.high / b.high;
    const Twice rest2 = rest - b * Twice(r);
    return normal(q, r) + Twice(rest2.high / b.high);
}

inline Twice square_root(const Twice& a) noexcept {
    if (!(a.high > 0.0)) return {};
    const double r = std::sqrt(a.high);
    const Twice rest = a - Twice(r) * Twice(r);
    return normal(r, rest.high / (2.0 * r));
}

/// A complex number of any of the two kinds.
template <class Real>
struct Point {
    Real re = Real(0.0), im = Real(0.0);
};

template <class Real>
Point<Real> operator+(const Point<Real>& a, const Point<Real>& b) noexcept { return {a.re + b.re, a.im + b.im}; }
template <class Real>
Point<Real> operator-(const Point<Real>& a, const Point<Real>& b) noexcept { return {a.re - b.re, a.im - b.im}; }
template <class Real>
Point<Real> operator*(const Point<Real>& a, const Point<Real>& b) noexcept {
    return {a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re};
}
template <class Real>
Point<Real> operator*(const Real& a, const Point<Real>& b) noexcept { return {a * b.re, a * b.im}; }
template <class Real>
Point<Real> operator/(const Point<Real>& a, const Point<Real>& b) noexcept {
    const Real square = b.re * b.re + b.im * b.im;
    return {(a.re * b.re + a.im * b.im) / square, (a.im * b.re - a.re * b.im) / square};
}

template <class Real>
std::complex<double> rounded(const Point<Real>& a) noexcept { return {rounded(a.re), rounded(a.im)}; }

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
