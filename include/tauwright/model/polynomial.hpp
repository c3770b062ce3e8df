// Small polynomial arithmetic in ascending powers of s, for expansions around s = 0.
#pragma once

#include <complex>
#include <cstddef>
#include <vector>

#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Coefficients c[0] + c[1] s + c[2] s^2 + ...
using Polynomial = std::vector<double>;

inline Polynomial product(const Polynomial& a, const Polynomial& b) {
    Polynomial c(a.size() + b.size() - 1, 0.0);
    for (std::size_t i = 0; i < a.size(); ++i)
        for (std::size_t j = 0; j < b.size(); ++j) c[i + j] += a[i] * b[j];
    return c;
}

/// The product of real and quadratic factors, times s^at_origin; constant term 1 before that.
inline Polynomial expanded(const std::vector<double>& real, const std::vector<QuadraticFactor>& pairs, int at_origin = 0) {
    Polynomial p(static_cast<std::size_t>(at_origin) + 1, 0.0);
    p.back() = 1.0;
    for (double T : real) p = product(p, {1.0, T});
    for (const auto& f : pairs)
        p = product(p, {1.0, 2.0 * f.damping * f.time_constant, f.time_constant * f.time_constant});
    return p;
}

inline std::complex<double> value_at(const Polynomial& p, std::complex<double> s) noexcept {
    std::complex<double> value = 0.0;
    for (std::size_t k = p.size(); k-- > 0;) value = value * s + p[k];
    return value;
}

/// The first `count` Maclaurin coefficients of exp(-dead_time s).
inline Polynomial dead_time_series(double dead_time, std::size_t count) {
    Polynomial p(count, 0.0);
    double term = 1.0;
    for (std::size_t k = 0; k < count; ++k) {
        p[k] = term;
        term *= -dead_time / static_cast<double>(k + 1);
    }
    return p;
}

/// The first `count` coefficients of a / b as a power series; b[0] must not be 0.
inline Polynomial series_quotient(const Polynomial& a, const Polynomial& b, std::size_t count) {
    Polynomial q(count, 0.0);
    for (std::size_t k = 0; k < count; ++k) {
        double rest = k < a.size() ? a[k] : 0.0;
        for (std::size_t j = 1; j <= k && j < b.size(); ++j) rest -= b[j] * q[k - j];
        q[k] = rest / b[0];
    }
    return q;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
