// What tuning and auditing share: the speed chosen when none is asked for, and what counts as weak.
#pragma once

#include <optional>
#include <string>

#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/control/pid_settings.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// What the default speed of a loop rests on; times in s.
struct SpeedBasis {
    bool integrating = false;
    double effective_dead_time = 0.0;  ///< dead time + half a scan + measurement filter
    double lag = 0.0;                  ///< the slowest; self-regulating processes only
    double scan_time = 0.0;            ///< 0 where unknown
    std::optional<double> dead_time_error = {};  ///< standard error
};

struct DefaultSpeed {
    double time_constant = 0.0;
    const char* reason = "";
};

/// Self-regulating max(D, 0.1 lag, 3 scans, two standard errors of the dead time); integrating
/// max(3 D, 3 scans, two standard errors). 0 where nothing bounds the speed.
DefaultSpeed default_speed(const SpeedBasis& basis);

/// Brings the integral time down to 4 (time constant + effective dead time), so that loads do not
/// drag; true where it did.
bool limit_integral_time(PidSettings& settings, double time_constant, double effective_dead_time);

/// Eight times closed-loop time constant plus effective dead time from the later of the duty's
/// steps, at least two scans.
double horizon_for(const Duty& duty, double time_constant, double effective_dead_time);

/// Why the margins are weak ("the largest sensitivity is 2.9, above 2"); empty where they are not.
std::string weakness_of(const Robustness& margins);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
