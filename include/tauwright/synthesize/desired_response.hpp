// The closed-loop response asked for.
#pragma once

#include <optional>

#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// Either a closed-loop time constant, from which the default response of the process follows, or a
/// transfer function taken at its word; both, or neither, is an error.
///
/// Default, with m the integrators and unstable poles of the process G and theta its dead time:
///   T = N(s) * (zeros of G in the right half plane) * exp(-theta s) / (time_constant s + 1)^(order + m)
/// where N has degree m, N(0) = 1, and makes 1 - T vanish once more than G integrates at s = 0 and at
/// every unstable pole, so that the loop is internally stable and settles without offset.
struct DesiredResponse {
    std::optional<double> time_constant = {};             ///< tau_c > 0 in s
    int order = 1;                                        ///< 1 to 20
    std::optional<TransferFunction> transfer_function = {};
};

}  // namespace v0
}  // namespace tauwright
