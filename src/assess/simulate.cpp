#include "tauwright/assess/simulate.hpp"

#include <cmath>

#include "assess/noise.hpp"
#include "tauwright/discretize/process.hpp"
#include "tauwright/run/pid_block.hpp"

namespace tauwright {
inline namespace v0 {

bool operator==(const Duty&, const Duty&) = default;
bool operator==(const Figures&, const Figures&) = default;

void check(const Duty& duty) {
    const struct { const char* name; double value; } numbers[] = {
        {"duty.setpoint_step", duty.setpoint_step}, {"duty.load_step", duty.load_step},
        {"duty.rest_output", duty.resting_output()}, {"duty.rest_process_value", duty.resting_process_value()},
        {"duty.output_low", duty.output_low},       {"duty.output_high", duty.output_high}};
    for (const auto& number : numbers) detail::require_finite(number.name, number.value);
    detail::require_not_negative("duty.noise", duty.noise);
    detail::require_not_negative("duty.load_time", duty.load_time);
    if (duty.scan_time) detail::require_positive("duty.scan_time", *duty.scan_time);
    if (!(duty.output_low < duty.output_high))
        detail::refuse(error_code::out_of_domain, "duty.output_high", duty.output_high,
                       "give a high limit above the low one, " + text_of(duty.output_low));
    if (!(duty.output_low <= duty.resting_output() && duty.resting_output() <= duty.output_high))
        detail::refuse(error_code::out_of_domain, "duty.rest_output", duty.resting_output(),
                       "give a rest output within the limits " + text_of(duty.output_low) + " to " + text_of(duty.output_high));
}

Trend simulate(const TransferFunction& process, const PidSettings& settings, const Duty& duty, double horizon_s) {
    check(duty);
    detail::require_positive("horizon", horizon_s);
    if (!duty.scan_time)
        throw Error(error_code::missing_argument, "duty.scan_time is not given; the simulated controller needs one");
    const double h = *duty.scan_time, scans = std::floor(horizon_s / h * (1.0 + 1e-12));
    if (!(scans >= 2.0) || !(scans <= 1e7))
        detail::refuse(error_code::out_of_domain, "horizon", horizon_s,
                       "give from two to ten million scans of " + text_of(h) + " s");
    run::PidBlock controller(discretize(settings, h), duty.output_low, duty.output_high, duty.resting_output());
    run::ProcessBlock plant(discretize(process, h), duty.resting_output(), duty.resting_process_value());
    std::vector<double> line(run::delay_line_length(plant.coefficients()));
    plant.start(line.data(), line.size());
    controller.step(duty.resting_process_value(), duty.resting_process_value());  // at rest before time 0

    Trend trend;
    trend.duty = duty;
    const auto n = static_cast<std::size_t>(scans) + 1;
    for (auto* column : {&trend.time_s, &trend.setpoint, &trend.process_value, &trend.output}) column->reserve(n);
    detail::Noise noise(duty.seed);
    const double setpoint = duty.resting_process_value() + duty.setpoint_step;
    double value = duty.resting_process_value();
    for (std::size_t k = 0; k < n; ++k) {
        const double t = static_cast<double>(k) * h;
        const double measured = duty.noise > 0.0 ? value + duty.noise * noise.next() : value;
        const double output = controller.step(setpoint, measured);
        trend.time_s.push_back(t);
        trend.setpoint.push_back(setpoint);
        trend.process_value.push_back(value);
        trend.output.push_back(output);
        trend.limited |= (controller.flags() & (run::flag_limited_low | run::flag_limited_high)) != 0;
        // The load acts where the output does, without the output's limits.
        const bool loaded = t >= duty.load_time * (1.0 - 1e-12);
        value = plant.step(output + (loaded ? duty.load_step : 0.0), line.data());
    }
    return trend;
}

Figures figures(const Trend& trend) {
    Figures f;
    const std::size_t n = trend.size();
    if (n < 2) return f;
    const Duty& duty = trend.duty;
    const double step = duty.setpoint_step, h = trend.time_s[1] - trend.time_s[0];
    double previous = duty.resting_output(), highest = 0.0;
    // A load step later on is another story than the set-point step.
    const bool load_follows = duty.load_step != 0.0 && duty.load_time > 0.0;
    std::size_t outside = 0, followed = 0;  // one past the last sample outside the band; samples looked at
    for (std::size_t k = 0; k < n; ++k) {
        const double error = trend.setpoint[k] - trend.process_value[k];
        f.integrated_absolute_error += std::abs(error) * h;
        f.valve_travel += std::abs(trend.output[k] - previous);
        previous = trend.output[k];
        if (step != 0.0 && !(load_follows && trend.time_s[k] > duty.load_time)) {
            followed = k + 1;
            highest = std::max(highest, -error / step);
            if (std::abs(error) > 0.02 * std::abs(step)) outside = k + 1;
        }
        if (duty.load_step != 0.0 && trend.time_s[k] >= duty.load_time)
            f.peak_load_error = std::max(f.peak_load_error.value_or(0.0), std::abs(error));
    }
    if (step != 0.0) {
        f.overshoot_percent = 100.0 * highest;
        if (outside < followed) f.settling_time = trend.time_s[outside];
    }
    return f;
}

}  // namespace v0
}  // namespace tauwright
