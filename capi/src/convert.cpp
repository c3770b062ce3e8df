#include "convert.hpp"

#include <cstring>

namespace tauwright::shell {

std::optional<double> optional(std::int32_t has, double value, const std::string& name) {
    const std::size_t member = name.rfind('.') + 1;
    if (!flag(has, name.substr(0, member) + "has_" + name.substr(member))) return std::nullopt;
    return value;
}

std::optional<double> optional(std::int32_t has, double value, const char* owner, const char* member) {
    if (has == 0) return std::nullopt;
    if (has == 1) return value;
    return optional(has, value, std::string(owner) + "." + member);
}

void set(const std::optional<double>& from, std::int32_t& has, double& value) noexcept {
    has = from ? 1 : 0;
    value = from.value_or(0.0);
}

Range range(const tauw_range* source, const char* name) {
    const tauw_range r = read(source, name);
    if (std::memchr(r.unit, '\0', sizeof r.unit) == nullptr)
        throw Error(error_code::wrong_length, std::string(name) + ".unit has no terminating zero; give at most " +
                                                  std::to_string(sizeof r.unit - 1) + " bytes and a zero");
    return {.low = r.low, .high = r.high, .unit = r.unit};
}

std::optional<Range> optional_range(const tauw_range* source, const char* name) {
    if (source == nullptr) return std::nullopt;
    return range(source, name);
}

PidSettings settings(const tauw_pid_settings* source, const char* name) {
    const tauw_pid_settings c = read(source, name);
    return {.gain = c.gain,
            .integral_time = optional(c.has_integral_time, c.integral_time, name, "integral_time"),
            .derivative_time = c.derivative_time,
            .filter_time = c.filter_time,
            .measurement_filter_time = c.measurement_filter_time,
            .setpoint_weight = c.setpoint_weight,
            .integral_gain = optional(c.has_integral_gain, c.integral_gain, name, "integral_gain")};
}

ControllerForm controller_form(const tauw_controller_form* source, const char* name) {
    const tauw_controller_form c = read(source, name);
    const std::string at = std::string(name) + ".";
    const char* time_units = "0 (seconds), 1 (minutes)";
    const char* inputs = "0 (error), 1 (process value)";
    ControllerForm form;
    form.equation = choice(c.equation, Equation::parallel, at + "equation", "0 (ideal), 1 (series), 2 (parallel)");
    form.gain_as = choice(c.gain_as, GainAs::proportional_band, at + "gain_as", "0 (gain), 1 (proportional band)");
    form.gain_unit = choice(c.gain_unit, GainUnit::engineering, at + "gain_unit", "0 (percent), 1 (engineering)");
    form.integral_as = choice(c.integral_as, IntegralAs::gain, at + "integral_as", "0 (time), 1 (repeats), 2 (gain)");
    form.integral_unit = choice(c.integral_unit, TimeUnit::minutes, at + "integral_unit", time_units);
    form.derivative_unit = choice(c.derivative_unit, TimeUnit::minutes, at + "derivative_unit", time_units);
    form.filter_as = choice(c.filter_as, FilterAs::ratio, at + "filter_as", "0 (time), 1 (ratio)");
    form.proportional_on = choice(c.proportional_on, ActsOn::process_value, at + "proportional_on", inputs);
    form.derivative_on = choice(c.derivative_on, ActsOn::process_value, at + "derivative_on", inputs);
    form.action_as = choice(c.action_as, ActionAs::sign, at + "action_as", "0 (switch), 1 (sign)");
    form.fixed_filter = optional(c.has_fixed_filter, c.fixed_filter, at + "fixed_filter");
    form.integral_off = c.integral_off;
    form.process_value_range = optional_range(c.process_value_range, (at + "process_value_range").c_str());
    form.output_range = optional_range(c.output_range, (at + "output_range").c_str());
    form.gain_limits = {optional(c.has_gain_low, c.gain_low, at + "gain_low"),
                        optional(c.has_gain_high, c.gain_high, at + "gain_high")};
    form.integral_limits = {optional(c.has_integral_low, c.integral_low, at + "integral_low"),
                            optional(c.has_integral_high, c.integral_high, at + "integral_high")};
    form.derivative_limits = {optional(c.has_derivative_low, c.derivative_low, at + "derivative_low"),
                              optional(c.has_derivative_high, c.derivative_high, at + "derivative_high")};
    form.filter_limits = {optional(c.has_filter_low, c.filter_low, at + "filter_low"),
                          optional(c.has_filter_high, c.filter_high, at + "filter_high")};
    form.gain_resolution = c.gain_resolution;
    form.integral_resolution = c.integral_resolution;
    form.derivative_resolution = c.derivative_resolution;
    form.filter_resolution = c.filter_resolution;
    return form;
}

Entered entered(const tauw_entered* source, const char* name) {
    const tauw_entered c = read(source, name);
    const std::string at = std::string(name) + ".";
    return {.gain = optional(c.has_gain, c.gain, at + "gain"),
            .proportional_band = optional(c.has_proportional_band, c.proportional_band, at + "proportional_band"),
            .integral_time = optional(c.has_integral_time, c.integral_time, at + "integral_time"),
            .repeats = optional(c.has_repeats, c.repeats, at + "repeats"),
            .integral_gain = optional(c.has_integral_gain, c.integral_gain, at + "integral_gain"),
            .derivative_time = optional(c.has_derivative_time, c.derivative_time, at + "derivative_time"),
            .derivative_gain = optional(c.has_derivative_gain, c.derivative_gain, at + "derivative_gain"),
            .filter_time = optional(c.has_filter_time, c.filter_time, at + "filter_time"),
            .filter_ratio = optional(c.has_filter_ratio, c.filter_ratio, at + "filter_ratio"),
            .measurement_filter_time = c.measurement_filter_time,
            .setpoint_weight = c.setpoint_weight,
            .action = choice(c.action, Action::direct, at + "action", "0 (reverse), 1 (direct)")};
}

ValveSettings valve_settings(const tauw_valve_settings* source, const char* name) {
    const tauw_valve_settings c = read(source, name);
    return {.dead_band = c.dead_band,
            .stick = c.stick,
            .resolution = c.resolution,
            .travel_rate_per_s = optional(c.has_travel_rate_per_s, c.travel_rate_per_s, name, "travel_rate_per_s")};
}

TransmitterSettings transmitter_settings(const tauw_transmitter_settings* source, const char* name) {
    const tauw_transmitter_settings c = read(source, name);
    return {.lag = c.lag, .resolution = c.resolution};
}

RobustnessOptions robustness_options(const tauw_robustness_options* source, const char* name) {
    if (source == nullptr) return {};
    const tauw_robustness_options c = read(source, name);
    return {.scan_time = optional(c.has_scan_time, c.scan_time, name, "scan_time"),
            .extra_delay = c.extra_delay};
}

Duty duty(const tauw_duty* source, const char* name) {
    const tauw_duty c = read(source, name);
    const std::string at = std::string(name) + ".";
    return {.setpoint_step = c.setpoint_step,
            .load_step = c.load_step,
            .load_time = c.load_time,
            .noise = c.noise,
            .seed = c.seed,
            .scan_time = optional(c.has_scan_time, c.scan_time, at + "scan_time"),
            .output_low = c.output_low,
            .output_high = c.output_high,
            .rest_output = optional(c.has_rest_output, c.rest_output, at + "rest_output"),
            .rest_process_value = optional(c.has_rest_process_value, c.rest_process_value, at + "rest_process_value"),
            .setpoint_ramp_time = c.setpoint_ramp_time,
            .load_ramp_time = c.load_ramp_time,
            .output_rate_limit = optional(c.has_output_rate_limit, c.output_rate_limit, at + "output_rate_limit"),
            .valve = c.valve == nullptr ? ValveSettings{} : valve_settings(c.valve, (at + "valve").c_str()),
            .transmitter = c.transmitter == nullptr
                               ? TransmitterSettings{}
                               : transmitter_settings(c.transmitter, (at + "transmitter").c_str()),
            .disturbance = copied(c.disturbance, c.disturbance_count, (at + "disturbance").c_str())};
}

IdentifyOptions identify_options(const tauw_identify_options* source, const char* name) {
    const tauw_identify_options c = read(source, name);
    const std::string at = std::string(name) + ".";
    return {.form = choice(c.form, Form::integrating_plus_dead_time, at + "form",
                           "0 (automatic), 1 (first order plus dead time), 2 (integrating plus dead time)"),
            .drift = flag(c.drift, at + "drift"),
            .fixed = {.gain = optional(c.has_fixed_gain, c.fixed_gain, at + "fixed_gain"),
                      .slope = optional(c.has_fixed_slope, c.fixed_slope, at + "fixed_slope"),
                      .lag_1 = optional(c.has_fixed_lag_1, c.fixed_lag_1, at + "fixed_lag_1"),
                      .dead_time = optional(c.has_fixed_dead_time, c.fixed_dead_time, at + "fixed_dead_time"),
                      .offset = optional(c.has_fixed_offset, c.fixed_offset, at + "fixed_offset")}};
}

}  // namespace tauwright::shell
