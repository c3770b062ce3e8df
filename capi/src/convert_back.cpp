// C++ values to C structs, and the defaults, which come from the C++ values' own.
#include <cstring>

#include "coefficients.hpp"
#include "convert.hpp"

namespace tauwright::shell {

tauw_range from(const Range& range) noexcept {
    tauw_range c = blank<tauw_range>();
    c.low = range.low;
    c.high = range.high;
    const std::string_view unit = cut(range.unit, sizeof c.unit - 1);
    if (!unit.empty()) std::memcpy(c.unit, unit.data(), unit.size());
    return c;
}

tauw_pid_settings from(const PidSettings& settings) noexcept {
    tauw_pid_settings c = blank<tauw_pid_settings>();
    c.gain = settings.gain;
    set(settings.integral_time, c.has_integral_time, c.integral_time);
    c.derivative_time = settings.derivative_time;
    c.filter_time = settings.filter_time;
    c.measurement_filter_time = settings.measurement_filter_time;
    c.setpoint_weight = settings.setpoint_weight;
    set(settings.integral_gain, c.has_integral_gain, c.integral_gain);
    return c;
}

tauw_entered from(const Entered& entered) noexcept {
    tauw_entered c = blank<tauw_entered>();
    c.action = static_cast<std::int32_t>(entered.action);
    set(entered.gain, c.has_gain, c.gain);
    set(entered.proportional_band, c.has_proportional_band, c.proportional_band);
    set(entered.integral_time, c.has_integral_time, c.integral_time);
    set(entered.repeats, c.has_repeats, c.repeats);
    set(entered.integral_gain, c.has_integral_gain, c.integral_gain);
    set(entered.derivative_time, c.has_derivative_time, c.derivative_time);
    set(entered.derivative_gain, c.has_derivative_gain, c.derivative_gain);
    set(entered.filter_time, c.has_filter_time, c.filter_time);
    set(entered.filter_ratio, c.has_filter_ratio, c.filter_ratio);
    c.measurement_filter_time = entered.measurement_filter_time;
    c.setpoint_weight = entered.setpoint_weight;
    return c;
}

tauw_robustness from(const Robustness& r) noexcept {
    tauw_robustness c = blank<tauw_robustness>();
    c.verdict = static_cast<std::int32_t>(r.verdict);
    c.has_stable = r.stable ? 1 : 0;
    c.stable = r.stable.value_or(false) ? 1 : 0;
    c.has_unstable_poles = r.unstable_poles ? 1 : 0;
    c.unstable_poles = r.unstable_poles.value_or(0);
    set(r.gain_margin, c.has_gain_margin, c.gain_margin);
    set(r.gain_reduction_margin, c.has_gain_reduction_margin, c.gain_reduction_margin);
    set(r.phase_margin_deg, c.has_phase_margin_deg, c.phase_margin_deg);
    set(r.delay_margin, c.has_delay_margin, c.delay_margin);
    set(r.max_sensitivity, c.has_max_sensitivity, c.max_sensitivity);
    set(r.max_sensitivity_frequency, c.has_max_sensitivity_frequency, c.max_sensitivity_frequency);
    set(r.max_complementary_sensitivity, c.has_max_complementary_sensitivity, c.max_complementary_sensitivity);
    set(r.max_complementary_sensitivity_frequency, c.has_max_complementary_sensitivity_frequency,
        c.max_complementary_sensitivity_frequency);
    set(r.sensitivity_bandwidth, c.has_sensitivity_bandwidth, c.sensitivity_bandwidth);
    set(r.complementary_bandwidth, c.has_complementary_bandwidth, c.complementary_bandwidth);
    set(r.delay_reduction_margin, c.has_delay_reduction_margin, c.delay_reduction_margin);
    c.fragile = r.fragile ? 1 : 0;
    c.phase_crossovers_capped = r.phase_crossovers_capped ? 1 : 0;
    c.gain_crossover_count = r.gain_crossovers.size();
    c.phase_crossover_count = r.phase_crossovers.size();
    c.stable_dead_time_count = r.stable_dead_times.size();
    return c;
}

tauw_figures from(const Figures& figures) noexcept {
    tauw_figures c = blank<tauw_figures>();
    set(figures.overshoot_percent, c.has_overshoot_percent, c.overshoot_percent);
    set(figures.settling_time, c.has_settling_time, c.settling_time);
    set(figures.peak_load_error, c.has_peak_load_error, c.peak_load_error);
    c.integrated_absolute_error = figures.integrated_absolute_error;
    c.valve_travel = figures.valve_travel;
    set(figures.rise_time, c.has_rise_time, c.rise_time);
    set(figures.decay_ratio, c.has_decay_ratio, c.decay_ratio);
    set(figures.peak_load_error_time, c.has_peak_load_error_time, c.peak_load_error_time);
    c.integrated_squared_error = figures.integrated_squared_error;
    c.integrated_time_absolute_error = figures.integrated_time_absolute_error;
    c.integrated_error = figures.integrated_error;
    c.time_at_limits = figures.time_at_limits;
    c.reversals = figures.reversals;
    return c;
}

tauw_finding from(const Finding& finding) noexcept {
    tauw_finding c = blank<tauw_finding>();
    c.code = static_cast<std::int32_t>(finding.code);
    c.advice = static_cast<std::int32_t>(finding.advice);
    c.value = finding.value;
    c.first = finding.first;
    c.last = finding.last;
    return c;
}

tauw_obstacle from(const Obstacle& obstacle) noexcept {
    tauw_obstacle c = blank<tauw_obstacle>();
    c.code = static_cast<std::int32_t>(obstacle.code);
    c.severity = static_cast<std::int32_t>(obstacle.severity);
    c.value = obstacle.value;
    return c;
}

template <> tauw_range fresh() noexcept {
    tauw_range c = blank<tauw_range>();
    c.high = 100.0;
    c.unit[0] = '%';
    return c;
}
template <> tauw_factors fresh() noexcept {
    tauw_factors c = blank<tauw_factors>();
    c.gain = 1.0;
    return c;
}
template <> tauw_pid_settings fresh() noexcept { return from(PidSettings{}); }
template <> tauw_entered fresh() noexcept { return from(Entered{}); }
template <> tauw_robustness fresh() noexcept { return from(Robustness{}); }
template <> tauw_controller_form fresh() noexcept {
    tauw_controller_form c = blank<tauw_controller_form>();
    c.derivative_on = TAUW_ACTS_ON_PROCESS_VALUE;
    return c;
}
template <> tauw_duty fresh() noexcept {
    const Duty duty;
    tauw_duty c = blank<tauw_duty>();
    c.seed = duty.seed;
    c.output_low = duty.output_low;
    c.output_high = duty.output_high;
    return c;
}
template <> tauw_desired_response fresh() noexcept {
    tauw_desired_response c = blank<tauw_desired_response>();
    c.order = DesiredResponse{}.order;
    return c;
}
template <> tauw_pid_coefficients fresh() noexcept { return from(run::PidCoefficients{}); }
template <> tauw_valve_coefficients fresh() noexcept { return from(run::ValveCoefficients{}); }
template <> tauw_transmitter_coefficients fresh() noexcept { return from(run::TransmitterCoefficients{}); }

}  // namespace tauwright::shell
