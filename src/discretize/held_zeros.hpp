// Zeros of a sampled cascade, to the last digits of a double where they are simple.
#pragma once

#include <complex>
#include <vector>

#include "discretize/held_step.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// value = leading * product(w - zeros) / product(w - poles), w = z - 1.
struct SampledZeros {
    double leading = 0.0;
    std::vector<std::complex<double>> zeros;
    double error = 0.0;  // relative, of the factored form away from its roots
};

/// `pole_offsets`: of the cascade, the one at z = 0 included where there is one. `starts`: offsets near zeros, in
/// any number. `at_one`: how many zeros lie exactly at z = 1. Always ends; `error` says how well.
SampledZeros zeros_of(const SampledCascade& cascade, const std::vector<std::complex<double>>& pole_offsets,
                      const std::vector<std::complex<double>>& starts, int at_one);

/// The zeros of N(w) = c2 w^2 + c1 w + c0, those beyond 1e18 left out with their share in `leading`.
SampledZeros zeros_of_quadratic(Twice c2, const Twice& c1, const Twice& c0);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
