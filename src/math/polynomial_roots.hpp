// All roots of a real polynomial, each with a bound on its error.
#pragma once

#include <complex>
#include <span>
#include <vector>

namespace tauwright {
inline namespace v0 {
namespace detail {

struct PolynomialRoots {
    /// Smallest magnitude first. Real roots have an imaginary part of exactly 0; complex roots come as
    /// exact conjugates side by side, positive imaginary part first.
    std::vector<std::complex<double>> values;
    /// error_radii[i] bounds the distance from values[i] to the root it stands for.
    std::vector<double> error_radii;
};

/// The roots of c[0] x^n + ... + c[n]. Coefficients are finite and c[0] is not 0; anything else throws
/// std::invalid_argument (callers strip leading zeros). Trailing zeros give roots of exactly 0; a single
/// coefficient gives no roots.
///
/// Accuracy: a simple root comes out within 2e-16 of its magnitude (6e-16 at degree 2), real and imaginary part
/// taken together, as long as its condition number stays below about 1e15; beyond that the radius tells. An
/// m-fold root comes out within about the m-th root of 1e-32 times its condition number: double roots of exact
/// coefficients (s+1)^2 (s+2)^2 ... to 1e-13 at degree 10 and 1e-9 at degree 20, (s+1)^3 to 1e-9, (s+1)^6 to 1e-4.
/// A complex root whose imaginary part is below its radius cannot be told from a real one and is made real.
///
/// Coefficients may lie anywhere in the range of a double. A root beyond that range comes out infinite or
/// 0, with a radius that says so. Always ends; allocates. About 2, 5 and 15 us at degree 6, 10 and 20, five times
/// that where all roots are double.
///
/// Source: O. Aberth, Math. Comp. 27, 1973, and L. W. Ehrlich, CACM 10, 1967 (iteration); D. A. Bini,
/// Numer. Algorithms 13, 1996 (starts); B. T. Smith, J. ACM 17, 1970 (error bound).
PolynomialRoots polynomial_roots(std::span<const double> coefficients_highest_first);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
