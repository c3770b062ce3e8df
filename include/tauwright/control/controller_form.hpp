// What the controller at hand expects: its equation, units, ranges, limits and display.
#pragma once

#include <array>
#include <cstddef>
#include <optional>
#include <string>

#include "tauwright/core/range.hpp"

namespace tauwright {
inline namespace v0 {

/// Which equation the controller computes (e the error, all filters beside):
///   ideal     Kc (e + 1/Ti integral e + Td de/dt)
///   series    Kc (e + 1/Ti integral e) followed by (Td s + 1)/(Tf s + 1)
///   parallel  Kp e + Ki integral e + Kd de/dt
enum class Equation { ideal, series, parallel };
/// Gain itself, or proportional band = 100 / gain in percent.
enum class GainAs { gain, proportional_band };
/// Integral action as a time, as its reciprocal (repeats per time unit), or as a gain Ki.
enum class IntegralAs { time, repeats, gain };
enum class TimeUnit { seconds, minutes };
/// Derivative filter as its time Tf, or as the ratio Td / Tf.
enum class FilterAs { time, ratio };
/// Percent of span on both sides, or engineering units of both ranges.
enum class GainUnit { percent, engineering };
/// What an action looks at.
enum class ActsOn { error, process_value };
/// Direction entered as a switch beside an unsigned gain, or as the sign of the gain.
enum class ActionAs { action_switch, sign };
/// Reverse: the output rises when the process value falls (positive process gain).
enum class Action { reverse, direct };

/// The words of the enumerators, in the order of their values: `words_of(Equation{})[1]` is "series".
constexpr std::array<const char*, 3> words_of(Equation) noexcept { return {"ideal", "series", "parallel"}; }
constexpr std::array<const char*, 2> words_of(GainAs) noexcept { return {"gain", "proportional_band"}; }
constexpr std::array<const char*, 3> words_of(IntegralAs) noexcept { return {"time", "repeats", "gain"}; }
constexpr std::array<const char*, 2> words_of(TimeUnit) noexcept { return {"seconds", "minutes"}; }
constexpr std::array<const char*, 2> words_of(FilterAs) noexcept { return {"time", "ratio"}; }
constexpr std::array<const char*, 2> words_of(GainUnit) noexcept { return {"percent", "engineering"}; }
constexpr std::array<const char*, 2> words_of(ActsOn) noexcept { return {"error", "process_value"}; }
constexpr std::array<const char*, 2> words_of(ActionAs) noexcept { return {"action_switch", "sign"}; }
constexpr std::array<const char*, 2> words_of(Action) noexcept { return {"reverse", "direct"}; }

/// The word of an enumerator of this header; "unknown" for a value outside it.
template <class Enumeration>
    requires requires(Enumeration e) { words_of(e); }
constexpr const char* name_of(Enumeration value) noexcept {
    constexpr auto words = words_of(Enumeration{});
    const auto index = static_cast<std::size_t>(value);
    return index < words.size() ? words[index] : "unknown";
}

/// Lowest and highest number a field takes; empty means no limit.
struct FieldLimits {
    std::optional<double> low = {};
    std::optional<double> high = {};

    friend bool operator==(const FieldLimits&, const FieldLimits&) = default;
};

/// The controller at hand. Fields that are not set keep the meaning written beside them.
struct ControllerForm {
    Equation equation = Equation::ideal;
    GainAs gain_as = GainAs::gain;
    GainUnit gain_unit = GainUnit::percent;
    IntegralAs integral_as = IntegralAs::time;
    TimeUnit integral_unit = TimeUnit::seconds;
    TimeUnit derivative_unit = TimeUnit::seconds;
    FilterAs filter_as = FilterAs::time;             ///< a filter time is in the derivative's unit
    ActsOn proportional_on = ActsOn::error;
    ActsOn derivative_on = ActsOn::process_value;
    ActionAs action_as = ActionAs::action_switch;
    double integral_off = 0.0;                       ///< the integral number that means no integral action
    std::optional<Range> process_value_range = {};   ///< needed for engineering units
    std::optional<Range> output_range = {};
    FieldLimits gain_limits = {}, integral_limits = {}, derivative_limits = {}, filter_limits = {};
    /// Smallest step of each field's display; 0 means no rounding.
    double gain_resolution = 0.0, integral_resolution = 0.0, derivative_resolution = 0.0, filter_resolution = 0.0;
    std::optional<double> fixed_filter = {};         ///< the filter number built in, not to be entered

    friend bool operator==(const ControllerForm&, const ControllerForm&) = default;
};

/// The very numbers to key in. Which members are set follows from the form.
struct Entered {
    std::optional<double> gain = {};               ///< Kc or Kp, unsigned where the action is a switch
    std::optional<double> proportional_band = {};  ///< percent
    std::optional<double> integral_time = {};      ///< in the form's integral unit
    std::optional<double> repeats = {};            ///< per the form's integral unit
    std::optional<double> integral_gain = {};      ///< Ki per the form's integral unit
    std::optional<double> derivative_time = {};    ///< in the form's derivative unit
    std::optional<double> derivative_gain = {};    ///< Kd times the form's derivative unit
    std::optional<double> filter_time = {};        ///< in the form's derivative unit
    std::optional<double> filter_ratio = {};
    double measurement_filter_time = 0.0;          ///< seconds
    double setpoint_weight = 1.0;
    Action action = Action::reverse;               ///< stays reverse where the sign of the gain is the direction

    friend bool operator==(const Entered&, const Entered&) = default;
};

/// Throws where the form contradicts itself: reversed ranges or limits, negative resolution,
/// engineering units without both ranges (`missing_range`).
inline void check(const ControllerForm& form) {
    if (form.process_value_range) check(*form.process_value_range, "form.process_value_range");
    if (form.output_range) check(*form.output_range, "form.output_range");
    if (form.gain_unit == GainUnit::engineering && !(form.process_value_range && form.output_range))
        throw Error(error_code::missing_range,
                    "form.gain_unit is engineering, but a range is missing; give process_value_range and output_range");
    if (form.gain_unit == GainUnit::engineering && form.gain_as == GainAs::proportional_band)
        throw Error(error_code::conflicting_arguments,
                    "form.gain_as is proportional_band with engineering units; a proportional band is in percent of span");
    detail::require_not_negative("form.integral_off", form.integral_off);
    const struct { const char* name; double value; } steps[] = {{"form.gain_resolution", form.gain_resolution},
                                                                {"form.integral_resolution", form.integral_resolution},
                                                                {"form.derivative_resolution", form.derivative_resolution},
                                                                {"form.filter_resolution", form.filter_resolution}};
    for (const auto& step : steps) detail::require_not_negative(step.name, step.value);
    const struct { const char* name; const FieldLimits* limits; } fields[] = {{"form.gain_limits", &form.gain_limits},
                                                                              {"form.integral_limits", &form.integral_limits},
                                                                              {"form.derivative_limits", &form.derivative_limits},
                                                                              {"form.filter_limits", &form.filter_limits}};
    for (const auto& field : fields) {
        const auto& [low, high] = *field.limits;
        if (low) detail::require_finite(detail::joined({field.name, ".low"}), *low);
        if (high) detail::require_finite(detail::joined({field.name, ".high"}), *high);
        if (low && high && !(*low <= *high))
            detail::refuse(error_code::out_of_domain, detail::joined({field.name, ".high"}), *high,
                           "give a high limit that is not below the low one");
    }
    if (form.fixed_filter) {
        detail::require_not_negative("form.fixed_filter", *form.fixed_filter);
        if (form.filter_as == FilterAs::ratio) detail::require_positive("form.fixed_filter", *form.fixed_filter);
    }
}

}  // namespace v0
}  // namespace tauwright
