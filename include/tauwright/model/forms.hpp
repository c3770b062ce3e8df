// The named process forms, products in percent of span, and their step response in closed form.
#pragma once

#include <span>
#include <vector>

#include "tauwright/core/exponential.hpp"
#include "tauwright/core/range.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// gain exp(-dead_time s) / (lag s + 1). Times in seconds; `lag` > 0, `dead_time` >= 0, gain not 0;
/// throws `out_of_domain` or `not_finite` naming the argument. Allocates.
inline TransferFunction first_order_plus_dead_time(double gain, double lag, double dead_time) {
    detail::require_positive("lag", lag);
    return TransferFunction::from_factors({.gain = gain, .lags = {lag}, .dead_time = dead_time});
}

/// gain exp(-dead_time s) / ((lag_1 s + 1)(lag_2 s + 1)). Domain and errors as above. Allocates.
inline TransferFunction second_order_plus_dead_time(double gain, double lag_1, double lag_2, double dead_time) {
    detail::require_positive("lag_1", lag_1);
    detail::require_positive("lag_2", lag_2);
    return TransferFunction::from_factors({.gain = gain, .lags = {lag_1, lag_2}, .dead_time = dead_time});
}

/// slope exp(-dead_time s) / (s (lag s + 1)); `slope` in process-value units per second per output
/// unit, `lag` 0 means none. Errors as above. Allocates.
inline TransferFunction integrating_plus_dead_time(double slope, double dead_time, double lag = 0.0) {
    detail::require_not_zero("slope", slope);
    detail::require_not_negative("lag", lag);
    Factors f{.gain = slope, .integrators = 1, .dead_time = dead_time};
    if (lag > 0.0) f.lags.push_back(lag);
    return TransferFunction::from_factors(std::move(f));
}

/// gain exp(-dead_time s) / (T^2 s^2 + 2 damping T s + 1), T = time_constant > 0, damping >= 0.
/// Errors as above. Allocates.
inline TransferFunction oscillatory_plus_dead_time(double gain, double time_constant, double damping,
                                                   double dead_time) {
    detail::require_positive("time_constant", time_constant);
    detail::require_not_negative("damping", damping);
    return TransferFunction::from_factors(
        {.gain = gain, .lag_pairs = {{.time_constant = time_constant, .damping = damping}}, .dead_time = dead_time});
}

/// The same process with process value and output in percent of span: gain * output span /
/// process-value span. Throws what `check` says of a range. Allocates.
inline TransferFunction in_percent(const TransferFunction& process, const Range& process_value_range,
                                   const Range& output_range) {
    check(process_value_range, "process_value_range");
    check(output_range, "output_range");
    return process.with_gain(process.gain() * output_range.span() / process_value_range.span());
}

namespace detail {

// Unit step of 1/((a s + 1)(b s + 1)) without the cancellation of nearly equal lags.
inline double two_lag_step(double a, double b, double t) noexcept {
    const double z = t * (a - b) / (a * b);
    return -std::expm1(-t / a) - (t / a) * std::exp(-t / a) * phi_1(-z);
}

// Unit step of 1/(T^2 s^2 + 2 z T s + 1).
inline double pair_step(const QuadraticFactor& f, double t) noexcept {
    const double z = f.damping, x = t / f.time_constant;
    if (std::abs(z) < 1.0) {
        const double w = std::sqrt((1.0 - z) * (1.0 + z));
        return 1.0 - std::exp(-z * x) * (std::cos(w * x) + z / w * std::sin(w * x));
    }
    if (std::abs(z) == 1.0) return 1.0 - std::exp(-z * x) * (1.0 + z * x);
    const double root = z + std::copysign(std::sqrt((z - 1.0) * (z + 1.0)), z);
    return two_lag_step(f.time_constant * root, f.time_constant / root, t);
}

}  // namespace detail

/// Response to a unit step of the output at time 0, at each `time_s`; 0 before the dead time.
/// Closed form, absolute error about 1e-15 of the gain. For up to two lags, one oscillatory pair,
/// or one integrator with at most one lag, without leads; `unsupported_form` otherwise. Allocates.
inline std::vector<double> step_response(const TransferFunction& process, std::span<const double> time_s) {
    const Factors& f = process.factors();
    const bool plain = f.leads.empty() && f.lead_pairs.empty() && f.zeros_at_origin == 0;
    const bool self_regulating =
        f.integrators == 0 && ((f.lag_pairs.empty() && f.lags.size() <= 2) || (f.lag_pairs.size() == 1 && f.lags.empty()));
    const bool integrating = f.integrators == 1 && f.lag_pairs.empty() && f.lags.size() <= 1;
    if (!plain || !(self_regulating || integrating))
        throw Error(error_code::unsupported_form,
                    detail::joined({"process is ", process.text(),
                                    "; step_response knows up to two lags, one oscillatory pair, or an integrator with at "
                                    "most one lag"}));
    std::vector<double> response(time_s.size(), 0.0);
    for (std::size_t i = 0; i < time_s.size(); ++i) {
        detail::require_finite(detail::item_name("time_s", i), time_s[i]);
        const double t = time_s[i] - f.dead_time;
        if (t < 0.0) continue;
        double y = 1.0;
        if (integrating)
            y = f.lags.empty() ? t : t * t / f.lags[0] * phi_2(-t / f.lags[0]);
        else if (!f.lag_pairs.empty())
            y = detail::pair_step(f.lag_pairs[0], t);
        else if (f.lags.size() == 2)
            y = detail::two_lag_step(f.lags[0], f.lags[1], t);
        else if (f.lags.size() == 1)
            y = -std::expm1(-t / f.lags[0]);
        response[i] = f.gain * y;
    }
    return response;
}

}  // namespace v0
}  // namespace tauwright
