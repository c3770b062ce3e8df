// One loop of a first-order process by the shortest chain of dependent operations.
#pragma once

#include "tauwright/assess/simulate.hpp"
#include "tauwright/run/pid_block.hpp"
#include "tauwright/run/process_block.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The bits of `run::PidBlock` on `run::ProcessBlock`, in half the time: fills process value, output and `limited` of a
/// trend whose time, set point and load are known, from a controller at rest. False, with nothing done, for loops of more
/// than one state, with a rate limit, or that it cannot prove to stay far from where a trend ends or a controller holds.
bool run_first_order_loop(Trend& trend, const run::PidBlock& controller, const run::ProcessCoefficients& process);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
