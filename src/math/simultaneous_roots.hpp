// All roots of a polynomial at once, each in a scale of its own: the working part of polynomial_roots.
#pragma once

#include <complex>
#include <span>
#include <vector>

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The root lies within radius 2^exponent of value 2^exponent.
struct EnclosedRoot {
    std::complex<double> value;
    double radius;
    int exponent;
};

/// The roots of c[0] + c[1] x + ... + c[n] x^n; neither end is 0, n >= 1. Conjugates are found separately
/// and agree within their radii only. Roots that cannot be told apart share a radius that covers the
/// whole group. Always ends: what has not converged by then has a large radius.
std::vector<EnclosedRoot> simultaneous_roots(std::span<const double> coefficients_lowest_first);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
