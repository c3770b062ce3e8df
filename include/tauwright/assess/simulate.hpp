// Closed-loop trends of the sampled loop and their figures. Compiled.
#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <vector>

#include "tauwright/control/pid_response.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// What a loop must face, about an operating point. Numbers are in the units of process and
/// settings: percent of span unless said otherwise.
struct Duty {
    double setpoint_step = 0.0;                   ///< at time 0
    double load_step = 0.0;                       ///< at the process input, from `load_time` on
    double load_time = 0.0;
    double noise = 0.0;                           ///< standard deviation of the measurement noise
    std::uint64_t seed = 1;                       ///< of the noise; equal seeds give equal trends
    std::optional<double> scan_time = {};
    double output_low = 0.0, output_high = 100.0; ///< limits of the controller output
    /// Output that holds the process at rest, and the process value it rests at, where the trend
    /// starts. Empty: the middle of the output limits, and 50.
    std::optional<double> rest_output = {}, rest_process_value = {};

    double resting_output() const noexcept { return rest_output.value_or(0.5 * (output_low + output_high)); }
    double resting_process_value() const noexcept { return rest_process_value.value_or(50.0); }

    friend bool operator==(const Duty&, const Duty&);
};

/// Throws `not_finite` or `out_of_domain` naming the member of `duty` that makes no sense.
void check(const Duty& duty);

/// A closed-loop trend, one value a scan. `process_value` is the process's own; the controller sees
/// it with the duty's noise.
struct Trend {
    std::vector<double> time_s = {}, setpoint = {}, process_value = {}, output = {};
    Duty duty = {};
    bool limited = false;  ///< the output stood on a limit at least once

    std::size_t size() const noexcept { return time_s.size(); }
};

/// Runs the block of `settings` against the exact sampled process over `horizon_s`. Derivative and
/// measurement filter act on the process value, the set point is weighted. Needs
/// `duty.scan_time` (`missing_argument`), a named process form (`unsupported_form`), a horizon of
/// at least two and at most ten million scans (`out_of_domain`). Allocates the trend.
Trend simulate(const TransferFunction& process, const PidSettings& settings, const Duty& duty, double horizon_s);

/// Figures of a trend. Times count from the step. Overshoot and settling look at the time before a
/// load step that comes later than the set-point step.
struct Figures {
    std::optional<double> overshoot_percent = {};  ///< of the set-point step; empty without one
    std::optional<double> settling_time = {};    ///< until it stays within 2 % of the set-point step; empty where it does not within the horizon
    std::optional<double> peak_load_error = {};    ///< largest |error| after the load step; empty without one
    double integrated_absolute_error = 0.0;        ///< IAE, unit of the process value times s
    double valve_travel = 0.0;                     ///< sum of |output changes|, from the rest output on

    friend bool operator==(const Figures&, const Figures&);
};

/// Does not throw. Of a trend shorter than two scans, all empty or 0.
Figures figures(const Trend& trend);

}  // namespace v0
}  // namespace tauwright
