// Closed-loop trends of the sampled loop and their figures. Compiled.
#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <vector>

#include "tauwright/control/pid_response.hpp"
#include "tauwright/discretize/transmitter_coefficients.hpp"
#include "tauwright/discretize/valve_coefficients.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// What a loop must face, about an operating point. Numbers are in the units of process and
/// settings: percent of span unless said otherwise. A duty that asks for nothing is legal: nothing happens.
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
    double setpoint_ramp_time = 0.0;              ///< s over which the set point makes its step; 0 is at once
    double load_ramp_time = 0.0;                  ///< s over which the load makes its step; 0 is at once
    std::optional<double> output_rate_limit = {}; ///< fastest change of the controller output per s; empty: none
    ValveSettings valve = {};                     ///< between the output and the process
    TransmitterSettings transmitter = {};         ///< between the process and the controller
    /// A measured disturbance, added at the process input: one value a scan from time 0 on, held; 0 after its end.
    std::vector<double> disturbance = {};

    double resting_output() const noexcept { return rest_output.value_or(0.5 * (output_low + output_high)); }
    double resting_process_value() const noexcept { return rest_process_value.value_or(50.0); }

    friend bool operator==(const Duty&, const Duty&);
};

/// Throws `not_finite` or `out_of_domain` naming the member of `duty` that makes no sense.
void check(const Duty& duty);

/// A closed-loop trend, one value a scan, all columns of one length. `process_value` is the process's own; the
/// controller sees `measured`: behind the transmitter's lag, with the duty's noise, quantized. The process is driven
/// by `valve_position` plus `load` (which has the duty's disturbance in it), both as held from the scan on; a ramp of
/// the load goes straight from scan to scan.
struct Trend {
    std::vector<double> time_s = {}, setpoint = {}, process_value = {}, output = {};
    Duty duty = {};
    bool limited = false;   ///< the output stood on a limit at least once
    std::vector<double> measured = {}, valve_position = {}, load = {};
    bool ran_away = false;  ///< an unstable process left its rest by more than 1e60; the trend ends before that

    std::size_t size() const noexcept { return time_s.size(); }
};

/// Runs the block of `settings` against the exact sampled process over `horizon_s` (in s). Derivative and
/// measurement filter act on the measured value, the set point is weighted; the output is held within its limits and
/// within its rate of change of the output before, and the integral tracks what is left of it. Loads enter behind
/// the valve and know no limits.
///
/// Any proper process of order up to 20 (19 with a transmitter lag, one less again with a ramp of the load), any dead
/// time. The transmitter's lag is part of the continuous process, a ramp of the load is exact where it begins and ends
/// on a scan; noise is added behind the lag. Accuracy about 1e-14 of the largest deviation while the loop is stable.
///
/// Throws what `check(duty)` and `require(settings)` throw; `missing_argument` without `duty.scan_time`;
/// `out_of_domain` for a horizon that is not above 0, shorter than two scans or longer than ten million, for an
/// improper process or one of too high an order. Allocates the trend.
Trend simulate(const TransferFunction& process, const PidSettings& settings, const Duty& duty, double horizon_s);

/// Figures of a trend. Times count from the step, those of a load from the time it enters. What looks at the set-point
/// step (overshoot, rise, settling) looks at the time before a load that comes later. Set-point figures of a ramp are
/// taken against the set point it ends at. A load is the duty's load step or, without one, its disturbance from the
/// first value that is not 0. Integrals are by trapezoids between the scans.
struct Figures {
    std::optional<double> overshoot_percent = {};  ///< of the set-point step; empty without one
    std::optional<double> settling_time = {};    ///< until it stays within 2 % of the set-point step; empty where it does not within the horizon
    std::optional<double> peak_load_error = {};    ///< largest |error| after the load step; empty without one
    double integrated_absolute_error = 0.0;        ///< IAE, unit of the process value times s
    double valve_travel = 0.0;                     ///< sum of |changes| of the valve position (without a valve: of the output), from the rest output on

    /// s from 10 to 90 % of the set-point step, straight between scans; empty without one, or where it does not get there.
    std::optional<double> rise_time = {};
    /// Second peak beyond the set point over the first (of a load alone: second peak of the error over the first to the
    /// same side). Empty without two such peaks, or where the first is below a thousandth of the step.
    std::optional<double> decay_ratio = {};
    std::optional<double> peak_load_error_time = {};  ///< s from the load to the peak; empty without one
    double integrated_squared_error = 0.0;            ///< ISE
    double integrated_time_absolute_error = 0.0;      ///< ITAE, time from the set-point step, without one from the load
    double integrated_error = 0.0;                    ///< IE, set point less process value
    std::size_t reversals = 0;      ///< turns of the valve (or output) by more than a millionth of the output's range
    double time_at_limits = 0.0;    ///< s the controller output stands on its low or high limit

    friend bool operator==(const Figures&, const Figures&);
};

/// Does not throw or allocate. Of a trend shorter than two scans, all empty or 0.
Figures figures(const Trend& trend);

}  // namespace v0
}  // namespace tauwright
