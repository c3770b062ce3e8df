// PID settings as a value. Needs no other floor's objects, never throws, never allocates.
#pragma once

#include <complex>
#include <limits>
#include <optional>

#include "tauwright/core/error_code.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {

/// C(s) = Kc (1 + 1/(Ti s) + Td s/(Tf s + 1)) / (Tm s + 1), the ideal form, times in seconds.
/// Positive gain is reverse acting. Bare gains are in percent of span per percent of span.
/// Legal: P, PI, PID, PD, and I alone (gain 0, `integral_gain` given).
struct PidSettings {
    double gain = 0.0;                            ///< Kc; 0 only for integral action alone
    std::optional<double> integral_time = {};     ///< Ti > 0 in s; empty means no integral action
    double derivative_time = 0.0;                 ///< Td >= 0 in s
    double filter_time = 0.0;                     ///< Tf >= 0 in s, on the derivative alone
    double measurement_filter_time = 0.0;         ///< Tm >= 0 in s, on the process value
    double setpoint_weight = 1.0;                 ///< share of the set point that proportional action sees
    std::optional<double> integral_gain = {};     ///< Ki in 1/s; only for integral action alone

    /// Ki = Kc / Ti in 1/s, or the gain of integral action alone; 0 without integral action.
    double integral_gain_per_s() const noexcept {
        const double Ti = integral_time.value_or(0.0);
        return Ti != 0.0 ? gain / Ti : integral_gain.value_or(0.0);
    }

    /// Response to the error at a complex s in rad/s; infinite at 0 with integral action.
    std::complex<double> operator()(std::complex<double> s) const noexcept {
        const double ki = integral_gain_per_s();
        if (ki != 0.0 && s == 0.0) return {ki > 0.0 ? std::numeric_limits<double>::infinity() : -std::numeric_limits<double>::infinity(), 0.0};
        std::complex<double> value = gain;
        if (ki != 0.0) value += ki / s;
        if (derivative_time != 0.0) value += gain * derivative_time * s / (filter_time * s + 1.0);
        return measurement_filter_time == 0.0 ? value : value / (measurement_filter_time * s + 1.0);
    }

    friend bool operator==(const PidSettings&, const PidSettings&) = default;
};

/// The member of PidSettings that `check` objects to, or nullptr.
struct PidSettingsProblem {
    error_code code = error_code::ok;
    const char* member = nullptr;
    double value = 0.0;
    const char* remedy = nullptr;
};

/// Finds the first thing wrong with the settings; `code` is `ok` when nothing is. Real-time safe.
inline PidSettingsProblem check(const PidSettings& s) noexcept {
    using enum error_code;
    struct Item {
        const char* name;
        double value;
        bool must_not_be_negative;
    };
    const Item items[] = {{"gain", s.gain, false},
                          {"integral_time", s.integral_time.value_or(1.0), false},
                          {"derivative_time", s.derivative_time, true},
                          {"filter_time", s.filter_time, true},
                          {"measurement_filter_time", s.measurement_filter_time, true},
                          {"setpoint_weight", s.setpoint_weight, true},
                          {"integral_gain", s.integral_gain.value_or(0.0), false}};
    for (const Item& item : items) {
        if (!is_finite(item.value)) return {not_finite, item.name, item.value, "give a finite number"};
        if (item.must_not_be_negative && item.value < 0.0)
            return {out_of_domain, item.name, item.value, "give 0 or a number above it"};
    }
    if (s.integral_time && !(*s.integral_time > 0.0))
        return {out_of_domain, "integral_time", *s.integral_time, "give a time above 0, or none for no integral action"};
    if (s.integral_gain && s.gain != 0.0 && !(s.integral_time && *s.integral_gain == s.gain / *s.integral_time))
        return {conflicting_arguments, "integral_gain", *s.integral_gain,
                "give integral_time with a gain, or integral_gain alone"};
    if (s.gain == 0.0 && s.integral_gain.value_or(0.0) == 0.0)
        return {out_of_domain, "gain", s.gain, "give a gain other than 0, or integral_gain for integral action alone"};
    if (s.gain == 0.0 && s.integral_time)
        return {conflicting_arguments, "integral_time", *s.integral_time,
                "an integral time belongs to a gain other than 0; give integral_gain alone"};
    if (s.gain == 0.0 && s.derivative_time != 0.0)
        return {out_of_domain, "derivative_time", s.derivative_time, "derivative action needs a gain other than 0"};
    return {};
}

}  // namespace v0
}  // namespace tauwright
