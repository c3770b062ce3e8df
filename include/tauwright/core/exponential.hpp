// Functions of e^x - 1 that stay accurate where the plain formulas cancel.
#pragma once

#include <cmath>
#include <complex>

namespace tauwright {
inline namespace v0 {

/// (e^x - 1) / x, 1 at x = 0. Relative error below 4e-16.
inline double phi_1(double x) noexcept {
    return x == 0.0 ? 1.0 : std::expm1(x) / x;
}

/// (e^x - 1 - x) / x^2, 1/2 at x = 0. Relative error below 1e-15.
inline double phi_2(double x) noexcept {
    if (std::abs(x) >= 1.0) return (std::expm1(x) - x) / (x * x);
    // Taylor: x^k / (k + 2)!, nineteen terms leave less than 1e-19 for |x| < 1.
    double sum = 0.0;
    for (int k = 18; k >= 1; --k) sum = (sum + 1.0) * x / (k + 2);
    return (1.0 + sum) / 2.0;
}

/// e^z - 1 for a complex z, accurate near 0. Relative error below 1e-15.
inline std::complex<double> exponential_minus_one(std::complex<double> z) noexcept {
    const double s = std::sin(0.5 * z.imag());
    const double growth = std::expm1(z.real());
    // e^a cos b - 1 = (e^a - 1) - e^a (1 - cos b), and 1 - cos b = 2 sin^2(b/2).
    return {growth - (growth + 1.0) * 2.0 * s * s, (growth + 1.0) * std::sin(z.imag())};
}

}  // namespace v0
}  // namespace tauwright
