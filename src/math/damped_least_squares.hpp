// Levenberg-Marquardt on few parameters, fed with normal equations.
#pragma once

#include <array>
#include <cstddef>
#include <functional>
#include <optional>
#include <vector>

namespace tauwright {
inline namespace v0 {
namespace detail {

constexpr std::size_t most_parameters = 6;

/// J'J, J'r and r'r at one set of parameters.
struct NormalEquations {
    std::array<std::array<double, most_parameters>, most_parameters> gram = {};
    std::array<double, most_parameters> gradient = {};
    double sum_of_squares = 0.0;
};

using ParameterArray = std::array<double, most_parameters>;

struct LeastSquaresProblem {
    std::function<NormalEquations(const ParameterArray&)> evaluate;
    std::array<bool, most_parameters> free = {};
    ParameterArray lowest = {};  ///< bounds; a parameter stops at one and may leave it again
    ParameterArray highest = {};
    std::size_t samples = 0;
    double tolerance = 1e-6;     ///< stop where the decrease predicted is this share of the variance
    double damping = 1e-4;       ///< at the start; 0 for a problem that is linear
    int most_passes = 60;
    bool polished = false;       ///< go on by the gradient, to the last digits
};

struct LeastSquaresResult {
    ParameterArray parameters = {};
    NormalEquations equations = {};
    bool converged = false;
};

LeastSquaresResult minimize(const LeastSquaresProblem& problem, const ParameterArray& start);

using ParameterMatrix = std::array<std::array<double, most_parameters>, most_parameters>;

/// Inverse of the free part of `gram`, as a full matrix with zeros elsewhere; empty where singular.
std::optional<ParameterMatrix> inverse_of_free(const NormalEquations& equations,
                                               const std::array<bool, most_parameters>& free);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
