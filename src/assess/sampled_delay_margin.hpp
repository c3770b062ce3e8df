// How much more dead time a sampled loop bears, fractions of a scan included.
#pragma once

#include "tauwright/control/pid_settings.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Dead time between whole scans changes the held process and with it |L|, so the angle at the crossover alone
/// tells only in which scan the loop is lost: `estimate` (s) is the smallest turn / w over the gain crossings, at
/// `crossover` (rad/s). The answer lies where a pole meets the unit circle; accurate to about 1e-9.
double sampled_delay_margin(const TransferFunction& process, const PidSettings& settings, double scan_time, double estimate,
                            double crossover);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
