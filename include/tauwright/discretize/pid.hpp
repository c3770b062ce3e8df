// PID settings to the coefficients of one scan. Never throws, never allocates: fit for firmware.
#pragma once

#include "tauwright/control/pid_settings.hpp"
#include "tauwright/run/pid_block.hpp"

namespace tauwright {
inline namespace v0 {

namespace detail {

// Square root by Newton's iteration from above, so that this header needs no libm.
constexpr double square_root(double x) noexcept {
    if (!(x > 0.0)) return 0.0;
    double r = x > 1.0 ? x : 1.0;
    for (int i = 0; i < 1100; ++i) {
        const double next = 0.5 * (r + x / r);
        if (!(next < r)) break;
        r = next;
    }
    return r;
}

// How fast the integral gives up what exceeds a limit (common practice, no source): the integral
// time of a PI, the geometric mean of integral and derivative time of a PID, at least one scan.
constexpr double tracking_time_s(const PidSettings& s, double scan_time) noexcept {
    const double Ti = s.integral_time.value_or(0.0);
    const double Tt = s.derivative_time > 0.0 ? square_root(Ti * s.derivative_time) : Ti;
    return Tt > scan_time ? Tt : scan_time;
}

}  // namespace detail

/// Backward differences for integral, derivative and both filters: stable at every scan time, never
/// ringing. `scan_time` > 0. On an error `coefficients` is left as it was and the code says why.
inline error_code discretize(const PidSettings& settings, double scan_time, run::PidCoefficients& coefficients) noexcept {
    if (!is_finite(scan_time)) return error_code::not_finite;
    if (!(scan_time > 0.0)) return error_code::out_of_domain;
    if (const error_code code = check(settings).code; code != error_code::ok) return code;
    const double h = scan_time, ki = settings.integral_gain_per_s();
    const double Tf = settings.derivative_time > 0.0 ? settings.filter_time : 0.0;
    run::PidCoefficients c;
    c.gain = settings.gain;
    c.setpoint_weight = settings.setpoint_weight;
    c.integral_per_scan = ki * h;
    c.derivative_per_scan = settings.gain * settings.derivative_time / (Tf + h);
    c.derivative_smoothing = h / (Tf + h);
    c.measurement_smoothing = h / (settings.measurement_filter_time + h);
    c.tracking_per_scan = ki == 0.0 ? 0.0 : h / detail::tracking_time_s(settings, h);
    for (double x : {c.integral_per_scan, c.derivative_per_scan, c.derivative_smoothing, c.measurement_smoothing})
        if (!is_finite(x)) return error_code::out_of_domain;
    coefficients = c;
    return error_code::ok;
}

}  // namespace v0
}  // namespace tauwright
