#include "assess/lane_setup.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "assess/duty_columns.hpp"
#include "tauwright/discretize/process.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr std::int64_t longest_delay_of_lanes = 10000;  // the memory of a block's line

struct OneStateStep {
    double growth, input;
};

// `held_step` of one state, without the operations on what stays 0.
OneStateStep one_state_step(double pole, double input, double t) noexcept {
    const double first = pole * t, second = input * t;
    int doublings = 0;
    for (double scaled = std::abs(first); scaled > 0.125; scaled *= 0.5) ++doublings;
    const double scale = std::ldexp(1.0, -doublings), a = first * scale, b = second * scale;
    OneStateStep sum{a, b};
    double growth_term = a;
    for (int k = 2; k <= 12; ++k) {
        sum.input += growth_term * b / k;
        growth_term = growth_term * a / k;
        sum.growth += growth_term;
    }
    for (int n = 0; n < doublings; ++n) {
        sum.input = 2.0 * sum.input + sum.growth * sum.input;
        sum.growth = 2.0 * sum.growth + sum.growth * sum.growth;
    }
    return sum;
}

// No value on the way can come near the 1e150 from where the controller would hold, as long as the process value
// stays within `value` of 0. The integral takes in at most these shares of error and excess at every scan.
bool cannot_overflow(const run::PidCoefficients& c, const SharedDuty& duty, const DutySizes& sizes, double integral,
                     double value) noexcept {
    const double measured = value + sizes.noise, error = sizes.setpoint + measured;
    const double P = std::abs(c.gain) * (std::abs(c.setpoint_weight) * sizes.setpoint + measured);
    const double D = 2.0 * std::abs(c.derivative_per_scan) * measured;
    const double output = std::max(std::abs(duty.output_low), std::abs(duty.output_high));
    const double taken_in = std::abs(c.integral_per_scan) * error + output + P + D;
    const bool shares = c.tracking_per_scan >= 0.0 && c.tracking_per_scan <= 1.0;
    return shares && std::abs(integral) + sizes.scans * taken_in + P + D < 1e140;
}

// Far below where a trend ends: a state that does not grow by itself takes in at most the largest input every scan.
bool cannot_run_away(const run::ProcessCoefficients& c, const SharedDuty& duty, const DutySizes& sizes) noexcept {
    const double output = std::max(std::abs(duty.output_low), std::abs(duty.output_high));
    const double input = output + sizes.load + std::abs(duty.rest_output);
    const double state = sizes.scans * (std::abs(c.now[0]) + std::abs(c.before[0])) * input;
    return c.growth[0][0] <= 0.0 && c.growth[0][0] >= -2.0 && std::abs(c.outputs[0]) * state < 1e-3 * duty.run_away;
}

bool has_one_state(const run::ProcessCoefficients& c) noexcept {
    for (double x : {c.growth[0][1], c.growth[1][0], c.growth[1][1], c.now[1], c.before[1], c.outputs[1], c.direct})
        if (x != 0.0) return false;
    return true;
}

void put(LoopLanes& lanes, std::size_t j, const run::PidCoefficients& c) noexcept {
    lanes.gain[j] = c.gain;
    lanes.setpoint_weight[j] = c.setpoint_weight;
    lanes.integral_per_scan[j] = c.integral_per_scan;
    lanes.minus_derivative_per_scan[j] = -c.derivative_per_scan;
    lanes.derivative_smoothing[j] = c.derivative_smoothing;
    lanes.measurement_smoothing[j] = c.measurement_smoothing;
    lanes.tracking_per_scan[j] = c.tracking_per_scan;
}

void put(LoopLanes& lanes, std::size_t j, const run::ProcessCoefficients& c) noexcept {
    lanes.growth00[j] = c.growth[0][0];
    lanes.growth01[j] = c.growth[0][1];
    lanes.growth10[j] = c.growth[1][0];
    lanes.growth11[j] = c.growth[1][1];
    lanes.now0[j] = c.now[0];
    lanes.now1[j] = c.now[1];
    lanes.before0[j] = c.before[0];
    lanes.before1[j] = c.before[1];
    lanes.outputs0[j] = c.outputs[0];
    lanes.outputs1[j] = c.outputs[1];
    lanes.direct[j] = c.direct;
    lanes.delay_scans[j] = static_cast<std::size_t>(c.delay_scans);
}

void put_at_rest(LoopLanes& lanes, std::size_t j, double rest, double measured, double integral, double output) noexcept {
    lanes.measured[j] = lanes.lagged[j] = measured;
    lanes.integral[j] = integral;
    lanes.output[j] = output;
    lanes.state0[j] = lanes.state1[j] = lanes.ran_away[j] = 0.0;
    lanes.process_value[j] = rest;
}

}  // namespace

SharedDuty shared_duty(const Duty& duty) noexcept {
    constexpr double infinite = std::numeric_limits<double>::infinity();
    return {.output_low = duty.output_low,
            .output_high = duty.output_high,
            .output_change_per_scan = duty.output_rate_limit ? *duty.output_rate_limit * duty.scan_time.value_or(infinite) : infinite,
            .rest_output = duty.resting_output(),
            .rest_process_value = duty.resting_process_value(),
            .run_away = run_away};
}

DutySizes sizes_of(const Duty& duty, std::size_t scans) noexcept {
    double disturbance = 0.0;
    for (double x : duty.disturbance) disturbance = std::max(disturbance, std::abs(x));
    return {.setpoint = std::abs(duty.resting_process_value()) + std::abs(duty.setpoint_step),
            .load = std::abs(duty.load_step) + disturbance,
            .noise = 6.0 * duty.noise,  // the most that run::Noise makes
            .scans = static_cast<double>(scans)};
}

bool is_plain_first_order(const run::PidCoefficients& pid, const run::ProcessCoefficients& process, double integral,
                          const SharedDuty& duty, const DutySizes& sizes) noexcept {
    const double farthest = std::abs(duty.rest_process_value) + duty.run_away;
    return has_one_state(process) && cannot_run_away(process, duty, sizes) && cannot_overflow(pid, duty, sizes, integral, farthest) &&
           duty.output_change_per_scan == std::numeric_limits<double>::infinity();
}

run::ProcessCoefficients lane_coefficients(const TransferFunction& process, double scan_time) {
    if (process.order() != 1) return discretize(process, scan_time);
    const double scans = process.dead_time() / scan_time;
    if (!(scans < 1e7)) return discretize(process, scan_time);  // which refuses it
    const TwoStates system = two_states(process);
    double whole = std::floor(scans), fraction = scans - whole;
    if (fraction > 1.0 - 1e-9) whole += 1.0, fraction = 0.0;
    if (fraction < 1e-9) fraction = 0.0;
    const double older = fraction * scan_time, pole = system.A[0][0], input = system.b[0];
    const OneStateStep full = one_state_step(pole, input, scan_time);
    if (!is_finite(full.growth) || !is_finite(full.input)) return discretize(process, scan_time);

    run::ProcessCoefficients c;
    c.delay_scans = static_cast<std::int64_t>(whole);
    c.growth[0][0] = full.growth;
    c.now[0] = full.input;
    c.outputs[0] = system.outputs[0];
    if (older > 0.0) {
        const OneStateStep late = one_state_step(pole, input, scan_time - older), early = one_state_step(pole, input, older);
        c.now[0] = late.input;
        c.before[0] = early.input + late.growth * early.input;
    }
    return c;
}

void set_idle_lane(LoopLanes& lanes, std::size_t j, const SharedDuty& duty) noexcept {
    put(lanes, j, run::PidCoefficients{});
    put(lanes, j, run::ProcessCoefficients{});
    put_at_rest(lanes, j, duty.rest_process_value, duty.rest_process_value, duty.rest_output, duty.rest_output);
}

LaneKind set_lane(LoopLanes& lanes, std::size_t j, const TransferFunction& process, const PidSettings& settings,
                  double scan_time, const SharedDuty& duty, const DutySizes& sizes) {
    run::PidCoefficients pid = discretize(settings, scan_time);
    pid.output_change_per_scan = duty.output_change_per_scan;
    const run::ProcessCoefficients c = lane_coefficients(process, scan_time);
    const double rest = duty.rest_process_value;
    run::PidBlock controller(pid, duty.output_low, duty.output_high, duty.rest_output);
    controller.step(rest, rest);  // at rest before time 0, as `simulate` does

    const double farthest = std::abs(rest) + duty.run_away;
    const bool good_start = (controller.flags() & run::flag_bad_input) == 0;
    if (!good_start || c.delay_scans > longest_delay_of_lanes ||
        !cannot_overflow(pid, duty, sizes, controller.integral(), farthest)) {
        set_idle_lane(lanes, j, duty);
        return LaneKind::alone;
    }
    put(lanes, j, pid);
    put(lanes, j, c);
    const double measured = rest < 1e-200 && rest > -1e-200 ? 0.0 : rest;
    put_at_rest(lanes, j, rest, measured, controller.integral(), controller.output());
    if (!is_plain_first_order(pid, c, controller.integral(), duty, sizes)) return LaneKind::any;
    return pid.derivative_per_scan == 0.0 ? LaneKind::first_order_pi : LaneKind::first_order_pid;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
