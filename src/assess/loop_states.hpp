// Process and controller as differential equations, driven by the delayed process input and the set point.
#pragma once

#include <cstddef>
#include <vector>

#include "tauwright/control/pid_settings.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// A signal as a sum over the states, the delayed input and the set point.
struct SignalForm {
    std::vector<double> states;
    double input = 0.0, setpoint = 0.0;
};

/// z' = M z + B v + E r, process value y and controller output u as forms of z, v and r, all about rest. M is lower
/// block triangular with blocks of one or two states; v is the process input, the dead time ago.
struct LoopStates {
    std::vector<SignalForm> rates;          ///< one row of [M, B, E] a state
    std::vector<std::size_t> block_sizes;   ///< 1 or 2, in order
    SignalForm value, output;
    double dead_time = 0.0;
    double fastest = 0.0;                   ///< largest magnitude of an eigenvalue of M, rad/s

    std::size_t size() const noexcept { return rates.size(); }
};

/// Throws `require(settings)`, and `out_of_domain` for an improper process, one of order above 20, or unfiltered
/// derivative action on a process of relative degree 0.
LoopStates loop_states(const TransferFunction& process, const PidSettings& settings);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
