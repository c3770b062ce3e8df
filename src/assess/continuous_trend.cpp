#include "tauwright/assess/continuous_trend.hpp"

#include <cmath>
#include <string>

#include "assess/continuous_run.hpp"
#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

[[noreturn]] void refuse_member(std::string_view member, std::string_view what) {
    throw Error(error_code::conflicting_arguments,
                detail::joined({"duty.", member, " asks for ", what,
                                ", which the continuous trend does not have; leave it out, or use simulate"}));
}

void refuse_what_is_not_linear(const Duty& duty) {
    if (duty.noise != 0.0) refuse_member("noise", "measurement noise");
    if (duty.output_rate_limit) refuse_member("output_rate_limit", "a limit on the output's rate");
    if (duty.valve != ValveSettings{}) refuse_member("valve", "a valve with faults");
    if (duty.transmitter != TransmitterSettings{}) refuse_member("transmitter", "a transmitter");
    if (!duty.disturbance.empty()) refuse_member("disturbance", "a record of disturbances, one value a scan");
}

void check_extent(const TransferFunction& process, double horizon_s, std::size_t points) {
    detail::require_positive("horizon", horizon_s);
    if (points < 2 || points > 10'000'000)
        detail::refuse(error_code::out_of_domain, "points", static_cast<double>(points), "give from 2 to ten million points");
    const double theta = process.dead_time();
    if (theta > 0.0 && !(horizon_s / theta <= 1e6))
        detail::refuse(error_code::out_of_domain, "horizon", horizon_s,
                       detail::joined({"give at most a million dead times of ", text_of(theta),
                                       " s, or leave out a dead time as short as this"}));
}

// What drives the loop at every point: it ends at a constant, which most points have.
std::vector<double> column_of(const detail::Drive& drive, const std::vector<double>& time, double rest) {
    std::vector<double> column(time.size(), rest + drive.size);
    const double end = drive.start + drive.duration;
    for (std::size_t j = 0; j < time.size(); ++j) {
        const double after = time[j] + detail::time_rounding(time[j]);
        if (after >= end) break;
        column[j] = rest + drive.at(after).value;
    }
    return column;
}

}  // namespace

Trend continuous_trend(const TransferFunction& process, const PidSettings& settings, const Duty& duty, double horizon_s,
                       std::size_t points) {
    check(duty);
    refuse_what_is_not_linear(duty);
    check_extent(process, horizon_s, points);
    const detail::LoopStates loop = detail::loop_states(process, settings);

    const double rest_value = duty.resting_process_value(), rest_output = duty.resting_output();
    detail::ContinuousRun run;
    run.horizon = horizon_s;
    run.points = points;
    const auto ramp = [&](double duration) { return duration > detail::time_rounding(horizon_s) ? duration : 0.0; };
    run.setpoint = {duty.setpoint_step, 0.0, ramp(duty.setpoint_ramp_time)};
    run.load = {duty.load_step, duty.load_time, ramp(duty.load_ramp_time)};
    // An output that rests on a limit does not leave it by rounding.
    const double slack = 1e-12 * (duty.output_high - duty.output_low);
    run.room_below = rest_output - duty.output_low + slack;
    run.room_above = duty.output_high - rest_output + slack;
    for (auto* column : {&run.time, &run.value, &run.output}) column->resize(points);
    for (std::size_t j = 0; j < points; ++j) run.time[j] = horizon_s * static_cast<double>(j) / static_cast<double>(points - 1);
    if (loop.dead_time > 0.0) detail::run_by_steps(loop, run);
    else detail::run_instantly(loop, run);

    Trend trend;
    trend.duty = duty;
    trend.limited = run.limited;
    trend.setpoint = column_of(run.setpoint, run.time, rest_value);
    trend.load = column_of(run.load, run.time, 0.0);
    for (double& y : run.value) y += rest_value;
    for (double& u : run.output) u += rest_output;
    trend.time_s = std::move(run.time);
    trend.measured = trend.process_value = std::move(run.value);
    trend.valve_position = trend.output = std::move(run.output);
    return trend;
}

}  // namespace v0
}  // namespace tauwright
