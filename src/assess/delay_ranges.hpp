// For which dead times the loop is stable, everything else as it is.
#pragma once

#include <optional>
#include <vector>

#include "assess/sweep.hpp"
#include "tauwright/assess/robustness.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// `dead_time` is the one that varies, `unstable_poles` the count with it. Each gain crossing lets a pair of poles
/// pass the axis once every turn of the dead time (Walton and Marshall, IEE Proc. D 134, 1987).
std::vector<DelayRange> stable_dead_times(const LoopCurve& curve, const SweepResult& found, double dead_time, int unstable_poles);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
