#include "tauwright/assess/simulate.hpp"

namespace tauwright {
inline namespace v0 {

bool operator==(const Duty&, const Duty&) = default;
bool operator==(const Figures&, const Figures&) = default;

namespace {

// Squares and sums of these stay numbers.
bool of_this_world(double value) noexcept { return value <= 1e60 && value >= -1e60; }

void require_of_this_world(std::string_view name, double value) {
    detail::require_finite(name, value);
    if (!of_this_world(value)) detail::refuse(error_code::out_of_domain, name, value, "give a number between -1e60 and 1e60");
}

// Figures are divided by these.
void require_size(std::string_view name, double value) {
    require_of_this_world(name, value);
    if (value != 0.0 && value < 1e-60 && value > -1e-60)
        detail::refuse(error_code::out_of_domain, name, value, "give a number of a size above 1e-60");
}

}  // namespace

void check(const Duty& duty) {
    require_size("duty.setpoint_step", duty.setpoint_step);
    if (duty.scan_time) {
        detail::require_positive("duty.scan_time", *duty.scan_time);
        require_size("duty.scan_time", *duty.scan_time);
    }
    const struct { const char* name; double value; } numbers[] = {
        {"duty.load_step", duty.load_step},          {"duty.noise", duty.noise},
        {"duty.rest_output", duty.resting_output()}, {"duty.rest_process_value", duty.resting_process_value()},
        {"duty.output_low", duty.output_low},        {"duty.output_high", duty.output_high}};
    for (const auto& number : numbers) require_of_this_world(number.name, number.value);
    detail::require_not_negative("duty.noise", duty.noise);
    detail::require_not_negative("duty.load_time", duty.load_time);
    detail::require_not_negative("duty.setpoint_ramp_time", duty.setpoint_ramp_time);
    detail::require_not_negative("duty.load_ramp_time", duty.load_ramp_time);
    if (duty.output_rate_limit) detail::require_positive("duty.output_rate_limit", *duty.output_rate_limit);
    check(duty.valve, "duty.valve");
    check(duty.transmitter, "duty.transmitter");
    for (std::size_t i = 0; i < duty.disturbance.size(); ++i)
        if (!of_this_world(duty.disturbance[i]))
            require_of_this_world(detail::item_name("duty.disturbance", i), duty.disturbance[i]);
    if (!(duty.output_low < duty.output_high))
        detail::refuse(error_code::out_of_domain, "duty.output_high", duty.output_high,
                       detail::joined({"give a high limit above the low one, ", text_of(duty.output_low)}));
    if (!(duty.output_low <= duty.resting_output() && duty.resting_output() <= duty.output_high))
        detail::refuse(error_code::out_of_domain, "duty.rest_output", duty.resting_output(),
                       detail::joined({"give a rest output within the limits ", text_of(duty.output_low), " to ",
                                       text_of(duty.output_high)}));
}

}  // namespace v0
}  // namespace tauwright
