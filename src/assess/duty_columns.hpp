// What a duty asks for, scan by scan.
#pragma once

#include <algorithm>
#include <cmath>

#include "tauwright/assess/simulate.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// A trend ends before the process value is farther than this from its rest.
inline constexpr double run_away = 1e60;

/// How much of a step that begins at `start` is made at `t`, 0 to 1.
inline double progress(double t, double start, double ramp_time) noexcept {
    if (ramp_time == 0.0) return t >= start * (1.0 - 1e-12) ? 1.0 : 0.0;
    return std::clamp((t - start) / ramp_time, 0.0, 1.0);
}

inline bool load_ramps(const Duty& duty) noexcept { return duty.load_step != 0.0 && duty.load_ramp_time > 0.0; }

/// Throws `out_of_domain` naming the horizon.
inline std::size_t count_of_scans(double scan_time, double horizon_s) {
    require_positive("horizon", horizon_s);
    const double scans = std::floor(horizon_s / scan_time * (1.0 + 1e-12));
    if (!(scans >= 1.0))
        refuse(error_code::out_of_domain, "horizon", horizon_s,
                       joined({"duty.scan_time is ", text_of(scan_time), " s, longer than this; give a horizon of at least two scans"}));
    if (!(scans >= 2.0) || !(scans <= 1e7))
        refuse(error_code::out_of_domain, "horizon", horizon_s,
                       joined({"give from two to ten million scans of ", text_of(scan_time), " s"}));
    return static_cast<std::size_t>(scans) + 1;
}

/// A trend with what is known beforehand: time, set point and load.
inline Trend known_columns(const Duty& duty, double h, std::size_t n) {
    Trend trend;
    trend.duty = duty;
    const double rest = duty.resting_process_value();
    trend.time_s.resize(n);
    for (std::size_t k = 0; k < n; ++k) trend.time_s[k] = static_cast<double>(k) * h;
    trend.setpoint.assign(n, rest + duty.setpoint_step);
    if (duty.setpoint_ramp_time > 0.0)
        for (std::size_t k = 0; k < n; ++k)
            trend.setpoint[k] = rest + duty.setpoint_step * progress(trend.time_s[k], 0.0, duty.setpoint_ramp_time);
    trend.load.resize(n);
    if (load_ramps(duty))
        for (std::size_t k = 0; k < n; ++k)
            trend.load[k] = duty.load_step * progress(trend.time_s[k], duty.load_time, duty.load_ramp_time);
    else
        for (auto k = n; k-- > 0 && progress(trend.time_s[k], duty.load_time, 0.0) == 1.0;) trend.load[k] = duty.load_step;
    for (std::size_t k = 0; k < std::min(n, duty.disturbance.size()); ++k) trend.load[k] += duty.disturbance[k];
    return trend;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
