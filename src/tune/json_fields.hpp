// One description of every structure on the sheet, from which both writing and reading follow.
//
// `describe(visitor, object)` calls visitor("key", member) for each member. The writer and the reader
// are two such visitors, so that no field can be written and not read. Members that version 2 of the sheet added
// go through `visitor.since_2`: a sheet of version 1 leaves them at their defaults.
#pragma once

#include "tauwright/tune/tuning_sheet.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

template <class Visitor, class T> void describe_range(Visitor& v, T& x) {
    v("low", x.low);
    v("high", x.high);
    v("unit", x.unit);
}

template <class Visitor, class T> void describe_pair(Visitor& v, T& x) {
    v("time_constant_s", x.time_constant);
    v("damping", x.damping);
}

template <class Visitor, class T> void describe_factors(Visitor& v, T& x) {
    v("gain", x.gain);
    v("integrators", x.integrators);
    v("zeros_at_origin", x.zeros_at_origin);
    v("leads_s", x.leads);
    v("lags_s", x.lags);
    v("lead_pairs", x.lead_pairs);
    v("lag_pairs", x.lag_pairs);
    v("dead_time_s", x.dead_time);
}

template <class Visitor, class T> void describe_finding(Visitor& v, T& x) {
    v("code", x.code);
    v("advice", x.advice);
    v("message", x.message);
    v("value", x.value);
    v("first_sample", x.first);
    v("last_sample", x.last);
}

template <class Visitor, class T> void describe_move(Visitor& v, T& x) {
    v("sample", x.sample);
    v("size", x.size);
    v("gain", x.gain);
    v("standard_error", x.standard_error);
}

template <class Visitor, class T> void describe_span(Visitor& v, T& x) {
    v("low", x.low);
    v("high", x.high);
}

template <class Visitor, class T> void describe_fit(Visitor& v, T& x) {
    v("form", x.form);
    v("form_reason", x.form_reason);
    v("model", x.model);
    v("gain", x.gain);
    v("lags_s", x.lags);
    v("dead_time_s", x.dead_time);
    v("first_output", x.first_output);
    v("offset", x.offset);
    v("drift_per_s", x.drift_per_s);
    v("drift_per_s2", x.drift_per_s2);
    v("parameter_names", x.parameter_names);
    v("covariance", x.covariance);
    v("sum_of_squares", x.sum_of_squares);
    v("residual_rms", x.residual_rms);
    v("noise", x.noise);
    v("r_squared", x.r_squared);
    v("residual_correlation", x.residual_correlation);
    v("response_to_noise", x.response_to_noise);
    v("samples_used", x.samples_used);
    v("tested_output", x.tested_output);
    v("tested_process_value", x.tested_process_value);
    v("moves", x.moves);
    v("findings", x.findings);
}

template <class Visitor, class T> void describe_settings(Visitor& v, T& x) {
    v("gain", x.gain);
    v("integral_time_s", x.integral_time);
    v("derivative_time_s", x.derivative_time);
    v("filter_time_s", x.filter_time);
    v("measurement_filter_time_s", x.measurement_filter_time);
    v("setpoint_weight", x.setpoint_weight);
    v("integral_gain_per_s", x.integral_gain);
}

template <class Visitor, class T> void describe_limits(Visitor& v, T& x) {
    v("low", x.low);
    v("high", x.high);
}

template <class Visitor, class T> void describe_form(Visitor& v, T& x) {
    v("equation", x.equation);
    v("gain_as", x.gain_as);
    v("gain_unit", x.gain_unit);
    v("integral_as", x.integral_as);
    v("integral_unit", x.integral_unit);
    v("derivative_unit", x.derivative_unit);
    v("filter_as", x.filter_as);
    v("proportional_on", x.proportional_on);
    v("derivative_on", x.derivative_on);
    v("action_as", x.action_as);
    v("integral_off", x.integral_off);
    v("process_value_range", x.process_value_range);
    v("output_range", x.output_range);
    v("gain_limits", x.gain_limits);
    v("integral_limits", x.integral_limits);
    v("derivative_limits", x.derivative_limits);
    v("filter_limits", x.filter_limits);
    v("gain_resolution", x.gain_resolution);
    v("integral_resolution", x.integral_resolution);
    v("derivative_resolution", x.derivative_resolution);
    v("filter_resolution", x.filter_resolution);
    v("fixed_filter", x.fixed_filter);
}

template <class Visitor, class T> void describe_entered(Visitor& v, T& x) {
    v("gain", x.gain);
    v("proportional_band", x.proportional_band);
    v("integral_time", x.integral_time);
    v("repeats", x.repeats);
    v("integral_gain", x.integral_gain);
    v("derivative_time", x.derivative_time);
    v("derivative_gain", x.derivative_gain);
    v("filter_time", x.filter_time);
    v("filter_ratio", x.filter_ratio);
    v("measurement_filter_time_s", x.measurement_filter_time);
    v("setpoint_weight", x.setpoint_weight);
    v("action", x.action);
}

template <class Visitor, class T> void describe_gain_crossover(Visitor& v, T& x) {
    v("frequency_rad_s", x.frequency_rad_s);
    v("phase_margin_deg", x.phase_margin_deg);
    v("delay_margin_s", x.delay_margin);
    v.since_2("touches", x.touches);
    v.since_2("error_bound_rad_s", x.error_bound);
}

template <class Visitor, class T> void describe_phase_crossover(Visitor& v, T& x) {
    v("frequency_rad_s", x.frequency_rad_s);
    v("gain_factor", x.gain_factor);
    v.since_2("touches", x.touches);
    v.since_2("error_bound_rad_s", x.error_bound);
}

template <class Visitor, class T> void describe_delay_range(Visitor& v, T& x) {
    v("low_s", x.low);
    v("high_s", x.high);
}

template <class Visitor, class T> void describe_robustness(Visitor& v, T& x) {
    v("verdict", x.verdict);
    v("stable", x.stable);
    v("unstable_poles", x.unstable_poles);
    v("gain_margin", x.gain_margin);
    v("gain_reduction_margin", x.gain_reduction_margin);
    v("phase_margin_deg", x.phase_margin_deg);
    v("delay_margin_s", x.delay_margin);
    v("max_sensitivity", x.max_sensitivity);
    v("max_sensitivity_frequency_rad_s", x.max_sensitivity_frequency);
    v("max_complementary_sensitivity", x.max_complementary_sensitivity);
    v("max_complementary_sensitivity_frequency_rad_s", x.max_complementary_sensitivity_frequency);
    v("gain_crossovers", x.gain_crossovers);
    v("phase_crossovers", x.phase_crossovers);
    v.since_2("phase_crossovers_capped", x.phase_crossovers_capped);
    v.since_2("sensitivity_bandwidth_rad_s", x.sensitivity_bandwidth);
    v.since_2("complementary_bandwidth_rad_s", x.complementary_bandwidth);
    v.since_2("delay_reduction_margin_s", x.delay_reduction_margin);
    v.since_2("stable_dead_times", x.stable_dead_times);
    v.since_2("fragile", x.fragile);
}

template <class Visitor, class T> void describe_figures(Visitor& v, T& x) {
    v("overshoot_percent", x.overshoot_percent);
    v("settling_time_s", x.settling_time);
    v("peak_load_error", x.peak_load_error);
    v("integrated_absolute_error", x.integrated_absolute_error);
    v("valve_travel", x.valve_travel);
    v.since_2("rise_time_s", x.rise_time);
    v.since_2("decay_ratio", x.decay_ratio);
    v.since_2("peak_load_error_time_s", x.peak_load_error_time);
    v.since_2("integrated_squared_error", x.integrated_squared_error);
    v.since_2("integrated_time_absolute_error", x.integrated_time_absolute_error);
    v.since_2("integrated_error", x.integrated_error);
    v.since_2("reversals", x.reversals);
    v.since_2("time_at_limits_s", x.time_at_limits);
}

template <class Visitor, class T> void describe_speed(Visitor& v, T& x) {
    v("time_constant_s", x.time_constant);
    v("reason", x.reason);
    v("effective_dead_time_s", x.effective_dead_time);
    v("half_scan_s", x.half_scan);
    v("integral_time_limited", x.integral_time_limited);
    v("measurement_filter_time_s", x.measurement_filter_time);
}

template <class Visitor, class T> void describe_obstacle(Visitor& v, T& x) {
    v("code", x.code);
    v("severity", x.severity);
    v("message", x.message);
    v("value", x.value);
    v("repair", x.repair);
}

template <class Visitor, class T> void describe_valve(Visitor& v, T& x) {
    v("dead_band", x.dead_band);
    v("stick", x.stick);
    v("resolution", x.resolution);
    v("travel_rate_per_s", x.travel_rate_per_s);
}

template <class Visitor, class T> void describe_transmitter(Visitor& v, T& x) {
    v("lag_s", x.lag);
    v("resolution", x.resolution);
}

template <class Visitor, class T> void describe_valve_cycle(Visitor& v, T& x) {
    v("existence", x.existence);
    v("period_s", x.period);
    v("process_value_amplitude", x.process_value_amplitude);
    v("output_amplitude", x.output_amplitude);
    v("reason", x.reason);
    v("retuning_cures", x.retuning_cures);
}

template <class Visitor, class T> void describe_worst_case(Visitor& v, T& x) {
    v("verdict", x.verdict);
    v("certified", x.certified);
    v("max_sensitivity", x.max_sensitivity);
    v("max_sensitivity_bound", x.max_sensitivity_bound);
    v("gain_margin", x.gain_margin);
    v("gain_margin_bound", x.gain_margin_bound);
    v("phase_margin_deg", x.phase_margin_deg);
    v("phase_margin_deg_bound", x.phase_margin_deg_bound);
    v("delay_margin_s", x.delay_margin);
    v("delay_margin_bound_s", x.delay_margin_bound);
    v("at", x.at);
}

template <class Visitor, class T> void describe_duty(Visitor& v, T& x) {
    v("setpoint_step", x.setpoint_step);
    v("load_step", x.load_step);
    v("load_time_s", x.load_time);
    v("noise", x.noise);
    v("seed", x.seed);
    v("scan_time_s", x.scan_time);
    v("output_low", x.output_low);
    v("output_high", x.output_high);
    v("rest_output", x.rest_output);
    v("rest_process_value", x.rest_process_value);
    v.since_2("setpoint_ramp_time_s", x.setpoint_ramp_time);
    v.since_2("load_ramp_time_s", x.load_ramp_time);
    v.since_2("output_rate_limit_per_s", x.output_rate_limit);
    v.since_2("valve", x.valve);
    v.since_2("transmitter", x.transmitter);
    v.since_2("disturbance", x.disturbance);
}

template <class Visitor, class T> void describe_controller(Visitor& v, T& x) {
    v("settings", x.settings);
    v("entered", x.entered);
    v("margins", x.margins);
    v("figures", x.figures);
    v.since_2("worst_case", x.worst_case);
    v.since_2("valve_cycle", x.valve_cycle);
}

template <class Visitor, class T> void describe_sheet(Visitor& v, T& x) {
    v("library_version", x.library_version);
    v("loop_name", x.loop_name);
    v("source", x.source);
    v("first_stamp", x.first_stamp);
    v("input_sha256", x.input_sha256);
    v("process_value_range", x.process_value_range);
    v("output_range", x.output_range);
    v("gain_unit", x.gain_unit);
    v("fit", x.fit);
    v("model", x.model);
    v("speed", x.speed);
    v("obstacles", x.obstacles);
    v("duty", x.duty);
    v("form", x.form);
    v("as_found", x.as_found);
    v("proposed", x.proposed);
    v("withheld", x.withheld);
    v("weak_margins_accepted_by", x.weak_margins_accepted_by);
    v("cautions", x.cautions);
}

// Which description belongs to which type.
#define TAUWRIGHT_DETAIL_DESCRIBED(Type, function) \
    template <class Visitor> void describe(Visitor& v, Type& x) { function(v, x); } \
    template <class Visitor> void describe(Visitor& v, const Type& x) { function(v, x); }
TAUWRIGHT_DETAIL_DESCRIBED(Range, describe_range)
TAUWRIGHT_DETAIL_DESCRIBED(QuadraticFactor, describe_pair)
TAUWRIGHT_DETAIL_DESCRIBED(Factors, describe_factors)
TAUWRIGHT_DETAIL_DESCRIBED(Finding, describe_finding)
TAUWRIGHT_DETAIL_DESCRIBED(Move, describe_move)
TAUWRIGHT_DETAIL_DESCRIBED(Span, describe_span)
TAUWRIGHT_DETAIL_DESCRIBED(FittedModel, describe_fit)
TAUWRIGHT_DETAIL_DESCRIBED(PidSettings, describe_settings)
TAUWRIGHT_DETAIL_DESCRIBED(FieldLimits, describe_limits)
TAUWRIGHT_DETAIL_DESCRIBED(ControllerForm, describe_form)
TAUWRIGHT_DETAIL_DESCRIBED(Entered, describe_entered)
TAUWRIGHT_DETAIL_DESCRIBED(GainCrossover, describe_gain_crossover)
TAUWRIGHT_DETAIL_DESCRIBED(PhaseCrossover, describe_phase_crossover)
TAUWRIGHT_DETAIL_DESCRIBED(Robustness, describe_robustness)
TAUWRIGHT_DETAIL_DESCRIBED(DelayRange, describe_delay_range)
TAUWRIGHT_DETAIL_DESCRIBED(ValveSettings, describe_valve)
TAUWRIGHT_DETAIL_DESCRIBED(TransmitterSettings, describe_transmitter)
TAUWRIGHT_DETAIL_DESCRIBED(ValveCycle, describe_valve_cycle)
TAUWRIGHT_DETAIL_DESCRIBED(WorstCase, describe_worst_case)
TAUWRIGHT_DETAIL_DESCRIBED(Figures, describe_figures)
TAUWRIGHT_DETAIL_DESCRIBED(SpeedChoice, describe_speed)
TAUWRIGHT_DETAIL_DESCRIBED(Obstacle, describe_obstacle)
TAUWRIGHT_DETAIL_DESCRIBED(Duty, describe_duty)
TAUWRIGHT_DETAIL_DESCRIBED(SheetController, describe_controller)
TAUWRIGHT_DETAIL_DESCRIBED(TuningSheet, describe_sheet)
#undef TAUWRIGHT_DETAIL_DESCRIBED

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
