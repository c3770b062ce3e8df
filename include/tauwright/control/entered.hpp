// Exact conversion between PidSettings and the numbers a controller's fields take.
#pragma once

#include <cmath>

#include "tauwright/control/controller_form.hpp"
#include "tauwright/control/pid_response.hpp"

namespace tauwright {
inline namespace v0 {

/// Kc', Ti', Td', Tf of the series form Kc' (1 + 1/(Ti' s)) (Td' s + 1)/(Tf s + 1).
struct SeriesSettings {
    double gain = 0.0;
    std::optional<double> integral_time = {};
    double derivative_time = 0.0;
    double filter_time = 0.0;

    friend bool operator==(const SeriesSettings&, const SeriesSettings&) = default;
};

/// Ideal to series, exact. Exists when (Ti - Tf)^2 >= 4 Ti Td and Ti > Tf (Ti >= 4 Td without a
/// filter); throws `no_equivalent` otherwise, and for integral action alone.
inline SeriesSettings series_from(const PidSettings& s) {
    require(s);
    if (s.gain == 0.0)
        throw Error(error_code::no_equivalent,
                    "settings have integral action alone; a series form has none without gain: use a parallel form");
    const double Td = s.derivative_time, Tf = Td == 0.0 ? 0.0 : s.filter_time;
    if (Td == 0.0) return {s.gain, s.integral_time, 0.0, 0.0};
    if (!s.integral_time) return {s.gain, std::nullopt, Td + Tf, Tf};
    const double Ti = *s.integral_time;
    const double discriminant = (Ti - Tf) * (Ti - Tf) - 4.0 * Ti * Td;
    if (!(discriminant >= 0.0) || !(Ti > Tf))
        throw Error(error_code::no_equivalent,
                    detail::joined({"settings have integral_time ", text_of(Ti), " s, derivative_time ", text_of(Td),
                                    " s and filter_time ", text_of(Tf),
                                    " s; a real series form needs (integral - filter)^2 >= 4 integral derivative and integral > "
                                    "filter: use an ideal or parallel form, or ask for settings with less derivative action"}));
    const double large = 0.5 * (Ti + Tf + std::sqrt(discriminant));
    return {s.gain * large / Ti, large, Ti * (Td + Tf) / large, Tf};
}

/// Series to ideal, exact: Ti = Ti' + Td' - Tf, Td = Ti' Td' / Ti - Tf, Kc = Kc' Ti / Ti'.
/// Throws `no_equivalent` where the filter outweighs the lead, so that Ti or Td would not be positive.
inline PidSettings ideal_from(const SeriesSettings& series) {
    const double Td = series.derivative_time, Tf = Td == 0.0 ? 0.0 : series.filter_time;
    if (std::abs(Td - Tf) <= 1e-14 * Tf) return {.gain = series.gain, .integral_time = series.integral_time};
    PidSettings ideal{.gain = series.gain, .integral_time = series.integral_time, .filter_time = Tf};
    if (Td > 0.0 && series.integral_time) {
        const double Ti = *series.integral_time + Td - Tf;
        ideal.integral_time = Ti;
        ideal.derivative_time = *series.integral_time * Td / Ti - Tf;
        ideal.gain = series.gain * Ti / *series.integral_time;
    } else if (Td > 0.0) {
        ideal.derivative_time = Td - Tf;
    }
    if (ideal.derivative_time < 0.0 || (ideal.integral_time && !(*ideal.integral_time > 0.0)))
        throw Error(error_code::no_equivalent,
                    detail::joined({"derivative_time is ", text_of(Td), " s with a filter_time of ", text_of(Tf),
                                    " s; the filter outweighs the lead, so no PID has this response: give a filter shorter "
                                    "than the derivative time"}));
    return ideal;
}

namespace detail {

inline double seconds_in(TimeUnit unit) noexcept { return unit == TimeUnit::minutes ? 60.0 : 1.0; }

// Controller gain in the form's unit per gain in percent per percent (or in the settings' unit).
inline double gain_factor(const ControllerForm& form) {
    return form.gain_unit == GainUnit::engineering ? form.output_range->span() / form.process_value_range->span() : 1.0;
}

struct Field {
    const char* name;
    double resolution;
    const FieldLimits* limits;
};

// Nearest multiple of the step; steps such as 0.01 count in hundredths, so that 0.3 stays 0.3.
inline double on_grid(double value, double step) {
    if (step <= 0.0) return value;
    const double per_unit = std::round(1.0 / step);
    if (step < 1.0 && std::abs(per_unit * step - 1.0) < 1e-12) return std::round(value * per_unit) / per_unit;
    return std::round(value / step) * step;
}

// Rounds to the display and insists on the limits; a value must not fall to 0 on the way.
inline double shown(double value, const Field& field) {
    const double rounded = on_grid(value, field.resolution);
    if (value != 0.0 && rounded == 0.0)
        refuse(error_code::action_would_be_lost, field.name, value,
               joined({"the display's step of ", text_of(field.resolution), " would round it to 0 and switch the action off"}));
    const auto& [low, high] = *field.limits;
    if ((low && rounded < *low) || (high && rounded > *high))
        refuse(error_code::outside_field_limits, field.name, rounded,
               joined({"the field takes ", low ? text_of(*low) : "any", " to ", high ? text_of(*high) : "any",
                       ": ask for a response that needs less"}));
    return rounded;
}

inline void enter_integral(Entered& e, const ControllerForm& form, std::optional<double> time_s, double ki_per_s) {
    const Field field{"integral", form.integral_resolution, &form.integral_limits};
    const double unit = seconds_in(form.integral_unit);
    const bool off = ki_per_s == 0.0;
    const auto guarded = [&](double number) {
        const double entered = shown(number, field);
        if (entered == form.integral_off)
            refuse(error_code::action_would_be_lost, field.name, entered,
                   "this number switches integral action off in this controller");
        return entered;
    };
    if (form.integral_as == IntegralAs::gain) {
        e.integral_gain = off ? form.integral_off : guarded(std::abs(ki_per_s) * unit * gain_factor(form));
        if (!off && form.action_as == ActionAs::sign) e.integral_gain = std::copysign(*e.integral_gain, ki_per_s);
    } else if (form.integral_as == IntegralAs::repeats) {
        e.repeats = off ? form.integral_off : guarded(unit / *time_s);
    } else {
        e.integral_time = off ? form.integral_off : guarded(*time_s / unit);
    }
}

inline void enter_derivative(Entered& e, const ControllerForm& form, double time_s, double filter_s, double gain) {
    const Field field{"derivative", form.derivative_resolution, &form.derivative_limits};
    const double unit = seconds_in(form.derivative_unit);
    if (form.equation == Equation::parallel) {
        e.derivative_gain = time_s == 0.0 ? 0.0 : shown(std::abs(gain) * time_s / unit * gain_factor(form), field);
        if (form.action_as == ActionAs::sign && time_s != 0.0) e.derivative_gain = std::copysign(*e.derivative_gain, gain);
    } else {
        e.derivative_time = time_s == 0.0 ? 0.0 : shown(time_s / unit, field);
    }
    if (time_s == 0.0) return;
    const Field filter{"filter", form.filter_resolution, &form.filter_limits};
    const double number = form.filter_as == FilterAs::ratio ? (filter_s == 0.0 ? 0.0 : time_s / filter_s) : filter_s / unit;
    if (form.filter_as == FilterAs::ratio && filter_s == 0.0)
        throw Error(error_code::no_equivalent,
                    "filter_time is 0; a filter entered as a ratio cannot be 0: ask for settings with a derivative filter");
    if (form.fixed_filter) {
        if (std::abs(number - *form.fixed_filter) > 1e-9 * std::max(std::abs(number), std::abs(*form.fixed_filter)))
            refuse(error_code::no_equivalent, "filter", number,
                   joined({"this controller's filter is fixed at ", text_of(*form.fixed_filter),
                           ": ask for settings with that filter"}));
        return;
    }
    (form.filter_as == FilterAs::ratio ? e.filter_ratio : e.filter_time) = number == 0.0 ? 0.0 : shown(number, filter);
}

}  // namespace detail

/// The numbers to key in for `settings` (gain in percent per percent, times in seconds), rounded to
/// the form's display. Exact up to that rounding. A form whose proportional action looks at the process
/// value has set-point weight 0. Throws `no_equivalent`, `action_would_be_lost`,
/// `outside_field_limits`, `missing_range` with the field, the value and the remedy.
inline Entered entered_as(const PidSettings& settings, const ControllerForm& form) {
    require(settings);
    check(form);
    Entered e;
    e.measurement_filter_time = settings.measurement_filter_time;
    e.setpoint_weight = form.proportional_on == ActsOn::process_value ? 0.0 : settings.setpoint_weight;
    const double ki = settings.integral_gain_per_s();
    // Where the sign of the gain is the direction, a switch beside it stays on reverse.
    if (form.action_as == ActionAs::action_switch)
        e.action = (settings.gain != 0.0 ? settings.gain : ki) > 0.0 ? Action::reverse : Action::direct;
    if (settings.gain == 0.0 && (form.equation != Equation::parallel || form.gain_as == GainAs::proportional_band ||
                                 form.integral_as != IntegralAs::gain))
        throw Error(error_code::no_equivalent,
                    "settings have integral action alone; only a parallel form with gains can hold that");
    if (form.gain_as == GainAs::proportional_band && form.action_as == ActionAs::sign && settings.gain < 0.0)
        detail::refuse(error_code::no_equivalent, "gain", settings.gain,
                       "a proportional band has no sign: set the action by a switch");

    SeriesSettings own{settings.gain, settings.integral_time, settings.derivative_time, settings.filter_time};
    if (form.equation == Equation::series) own = series_from(settings);

    const detail::Field field{form.gain_as == GainAs::gain ? "gain" : "proportional_band", form.gain_resolution,
                              &form.gain_limits};
    if (form.gain_as == GainAs::proportional_band) {
        e.proportional_band = detail::shown(100.0 / std::abs(own.gain), field);
    } else {
        e.gain = detail::shown(std::abs(own.gain) * detail::gain_factor(form), field);
        if (form.action_as == ActionAs::sign) e.gain = std::copysign(*e.gain, own.gain);
    }
    // Of a controller in parallel form the integral gain is its own; elsewhere it is gain / time.
    detail::enter_integral(e, form, own.integral_time,
                           own.integral_time ? own.gain / *own.integral_time : ki);
    detail::enter_derivative(e, form, own.derivative_time, own.filter_time, own.gain);
    return e;
}

namespace detail {

inline double entered_number(const std::optional<double>& number, const char* name) {
    if (!number)
        throw Error(error_code::missing_argument,
                    joined({"entered.", name, " is not given; this form needs it"}));
    require_finite(joined({"entered.", name}), *number);
    return *number;
}

inline double entered_magnitude(const std::optional<double>& number, const char* name, const ControllerForm& form) {
    const double value = entered_number(number, name);
    if (form.action_as == ActionAs::action_switch && value < 0.0)
        refuse(error_code::out_of_domain, joined({"entered.", name}), value,
               "this form's gains have no sign: set the action instead");
    return value;
}

inline void refuse_foreign(const Entered& e, const ControllerForm& form) {
    const bool band = form.gain_as == GainAs::proportional_band;
    const bool parallel = form.equation == Equation::parallel;
    const struct { const char* name; bool given; bool fits; } fields[] = {
        {"gain", e.gain.has_value(), !band},
        {"proportional_band", e.proportional_band.has_value(), band},
        {"integral_time", e.integral_time.has_value(), form.integral_as == IntegralAs::time},
        {"repeats", e.repeats.has_value(), form.integral_as == IntegralAs::repeats},
        {"integral_gain", e.integral_gain.has_value(), form.integral_as == IntegralAs::gain},
        {"derivative_time", e.derivative_time.has_value(), !parallel},
        {"derivative_gain", e.derivative_gain.has_value(), parallel},
        {"filter_time", e.filter_time.has_value(), form.filter_as == FilterAs::time && !form.fixed_filter},
        {"filter_ratio", e.filter_ratio.has_value(), form.filter_as == FilterAs::ratio && !form.fixed_filter},
    };
    for (const auto& field : fields)
        if (field.given && !field.fits)
            throw Error(error_code::conflicting_arguments,
                        joined({"entered.", field.name, " is given, but this form has no such field; leave it out"}));
}

}  // namespace detail

/// The settings that numbers keyed into a controller of this form amount to; the inverse of
/// `entered_as`. Fields left empty are derivative 0 and filter 0. Throws `missing_argument`,
/// `conflicting_arguments`, `out_of_domain`, `not_finite`, `no_equivalent`.
inline PidSettings settings_from(const Entered& e, const ControllerForm& form) {
    check(form);
    detail::refuse_foreign(e, form);
    if (form.action_as == ActionAs::sign && e.action == Action::direct)
        throw Error(error_code::conflicting_arguments,
                    "entered.action is direct, but this form's direction is the sign of the gain; give the gain its sign and leave "
                    "action on reverse");
    const double sign = form.action_as == ActionAs::action_switch && e.action == Action::direct ? -1.0 : 1.0;
    SeriesSettings own;
    if (form.gain_as == GainAs::proportional_band) {
        const double band = detail::entered_number(e.proportional_band, "proportional_band");
        detail::require_positive("entered.proportional_band", band);
        own.gain = sign * 100.0 / band;
    } else {
        own.gain = sign * detail::entered_magnitude(e.gain, "gain", form) / detail::gain_factor(form);
    }

    const double unit = detail::seconds_in(form.integral_unit);
    double ki = 0.0;
    if (form.integral_as == IntegralAs::gain) {
        const double entered = detail::entered_magnitude(e.integral_gain, "integral_gain", form);
        if (entered != form.integral_off) ki = sign * entered / unit / detail::gain_factor(form);
        if (ki != 0.0 && own.gain != 0.0) own.integral_time = own.gain / ki;
    } else {
        const bool repeats = form.integral_as == IntegralAs::repeats;
        const char* name = repeats ? "repeats" : "integral_time";
        const double entered = detail::entered_number(repeats ? e.repeats : e.integral_time, name);
        if (entered != form.integral_off) {
            detail::require_positive(detail::joined({"entered.", name}), entered);
            own.integral_time = repeats ? unit / entered : entered * unit;
        }
    }

    const double derivative_unit = detail::seconds_in(form.derivative_unit);
    for (const auto& number : {e.derivative_time, e.derivative_gain, e.filter_time, e.filter_ratio})
        detail::require_not_negative("entered derivative or filter", form.action_as == ActionAs::sign ? std::abs(number.value_or(0.0)) : number.value_or(0.0));
    if (own.gain == 0.0 && e.derivative_gain.value_or(0.0) != 0.0)
        detail::refuse(error_code::no_equivalent, "entered.derivative_gain", *e.derivative_gain,
                       "with gain 0 there is no PID with derivative action; give a gain, or derivative gain 0");
    if (form.equation == Equation::parallel && e.derivative_gain && own.gain != 0.0)
        own.derivative_time = sign * detail::entered_magnitude(e.derivative_gain, "derivative_gain", form) *
                              derivative_unit / detail::gain_factor(form) / own.gain;
    else if (e.derivative_time)
        own.derivative_time = detail::entered_number(e.derivative_time, "derivative_time") * derivative_unit;
    detail::require_not_negative("entered derivative time in s", own.derivative_time);
    if (own.derivative_time > 0.0) {
        if (form.filter_as == FilterAs::ratio) {
            const double ratio = form.fixed_filter ? *form.fixed_filter : detail::entered_number(e.filter_ratio, "filter_ratio");
            detail::require_positive("entered.filter_ratio", ratio);
            own.filter_time = own.derivative_time / ratio;
        } else if (form.fixed_filter) {
            own.filter_time = *form.fixed_filter * derivative_unit;
        } else if (e.filter_time) {
            own.filter_time = detail::entered_number(e.filter_time, "filter_time") * derivative_unit;
        }
    }

    PidSettings settings{.gain = own.gain, .integral_time = own.integral_time, .derivative_time = own.derivative_time,
                         .filter_time = own.filter_time};
    if (form.equation == Equation::series) settings = ideal_from(own);
    if (settings.gain == 0.0 && ki != 0.0) settings.integral_gain = ki;
    settings.measurement_filter_time = e.measurement_filter_time;
    settings.setpoint_weight = form.proportional_on == ActsOn::process_value ? 0.0 : e.setpoint_weight;
    require(settings);
    return settings;
}

}  // namespace v0
}  // namespace tauwright
