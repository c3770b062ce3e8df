// From the exact controller to PID settings.
#pragma once

#include <optional>

#include "tauwright/control/pid_settings.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

struct Reduced {
    std::optional<PidSettings> settings = {};
    bool exact = false;           ///< nothing but the dead time's series was cut
    double negative_time = 0.0;   ///< the time that came out negative where there are no settings
};

/// exp(-theta s) in 1 - T taken as 1 - theta s; a PID where the result is one (with one filter), else
/// the first three terms of s C(s) at s = 0. The response may have no less dead time than the process.
Reduced taylor_settings(const TransferFunction& process, const TransferFunction& response);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
