// PID settings among transfer functions, and the throwing check.
#pragma once

#include <cmath>
#include <string>

#include "tauwright/control/pid_settings.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// Throws the first problem `check(settings)` finds, naming `name`.member, value and remedy.
inline void require(const PidSettings& settings, std::string_view name = "settings") {
    const PidSettingsProblem problem = check(settings);
    if (problem.code != error_code::ok)
        detail::refuse(problem.code, detail::joined({name, ".", problem.member}), problem.value, problem.remedy);
}

/// C(s) of the settings in factors, both filters included; the numerator is factored in closed
/// form. Throws as `require`. Allocates.
inline TransferFunction transfer_function(const PidSettings& settings) {
    require(settings);
    const double ki = settings.integral_gain_per_s();
    const double Kc = settings.gain, Td = settings.derivative_time, Tf = Td == 0.0 ? 0.0 : settings.filter_time;
    Factors f;
    f.integrators = ki != 0.0 ? 1 : 0;
    f.gain = ki != 0.0 ? ki : Kc;
    if (Tf > 0.0) f.lags.push_back(Tf);
    if (settings.measurement_filter_time > 0.0) f.lags.push_back(settings.measurement_filter_time);
    if (ki == 0.0) {  // Kc ((Td + Tf) s + 1) / (Tf s + 1)
        if (Td > 0.0) f.leads.push_back(Td + Tf);
        return TransferFunction::from_factors(std::move(f));
    }
    if (Kc == 0.0) return TransferFunction::from_factors(std::move(f));
    const double Ti = *settings.integral_time;
    if (Td == 0.0) {
        f.leads.push_back(Ti);
        return TransferFunction::from_factors(std::move(f));
    }
    // Ti (Td + Tf) s^2 + (Ti + Tf) s + 1; its discriminant without cancellation:
    const double discriminant = (Ti - Tf) * (Ti - Tf) - 4.0 * Ti * Td;
    if (discriminant >= 0.0) {
        const double large = 0.5 * (Ti + Tf + std::sqrt(discriminant));
        f.leads = {large, Ti * (Td + Tf) / large};
    } else {
        const double T = std::sqrt(Ti * (Td + Tf));
        f.lead_pairs = {{.time_constant = T, .damping = 0.5 * (Ti + Tf) / T}};
    }
    return TransferFunction::from_factors(std::move(f));
}

}  // namespace v0
}  // namespace tauwright
