// Where a loop's effective dead time comes from.
#pragma once

#include "tauwright/assess/robustness.hpp"

namespace tauwright {
inline namespace v0 {

/// What takes part in the dead time that the loop feels, s, and in its working gain: why the sampled
/// loop's margins are smaller than those of process and settings on paper. The sums are the usual first-order
/// estimates; `robustness` with the scan time has the exact figures.
/// Source: Astrom and Wittenmark, Computer-Controlled Systems (sampling and hold as half a scan).
struct DelayBudget {
    double process_dead_time = 0.0;
    double half_scan = 0.0;                ///< sampling and hold
    double extra_delay = 0.0;              ///< computation, transport
    double measurement_filter_time = 0.0;  ///< on the process value
    double working_gain = 1.0;             ///< backward integration raises the gain by scan time / (2 integral time)

    double total() const noexcept { return process_dead_time + half_scan + extra_delay + measurement_filter_time; }

    friend bool operator==(const DelayBudget&, const DelayBudget&) = default;
};

/// Throws as `robustness(process, settings, options)`. Does not allocate.
inline DelayBudget delay_budget(const TransferFunction& process, const PidSettings& settings, const RobustnessOptions& options = {}) {
    require(settings);
    detail::require_not_negative("extra_delay", options.extra_delay);
    const double h = options.scan_time.value_or(0.0);
    if (options.scan_time) detail::require_positive("scan_time", h);
    return {.process_dead_time = process.dead_time(),
            .half_scan = 0.5 * h,
            .extra_delay = options.extra_delay,
            .measurement_filter_time = settings.measurement_filter_time,
            .working_gain = settings.integral_time ? 1.0 + 0.5 * h / *settings.integral_time : 1.0};
}

}  // namespace v0
}  // namespace tauwright
