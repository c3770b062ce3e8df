#include "tune/default_speed.hpp"

#include <algorithm>

#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// Margins below which settings need somebody's name (common practice, no source).
constexpr double weak_max_sensitivity = 2.0, weak_gain_margin = 1.7, weak_phase_margin_deg = 30.0;

std::string short_text(double x) { return text_of(x, 4); }

}  // namespace

DefaultSpeed default_speed(const SpeedBasis& basis) {
    const double D = basis.effective_dead_time;
    DefaultSpeed speed = basis.integrating ? DefaultSpeed{3.0 * D, "three times the effective dead time"}
                                           : DefaultSpeed{D, "the effective dead time"};
    const auto at_least = [&](double seconds, const char* reason) {
        if (seconds > speed.time_constant) speed = {seconds, reason};
    };
    if (!basis.integrating) at_least(0.1 * basis.lag, "a tenth of the lag");
    at_least(3.0 * basis.scan_time, "three scans");
    if (basis.dead_time_error) at_least(2.0 * *basis.dead_time_error, "two standard errors of the dead time");
    return speed;
}

bool limit_integral_time(PidSettings& settings, double time_constant, double effective_dead_time) {
    const double limit = 4.0 * (time_constant + effective_dead_time);
    if (!settings.integral_time || !(*settings.integral_time > limit)) return false;
    settings.integral_time = limit;
    return true;
}

double horizon_for(const Duty& duty, double time_constant, double effective_dead_time) {
    const double settle = 8.0 * (time_constant + effective_dead_time);
    const double both = duty.load_step != 0.0 ? duty.load_time + settle : settle;
    return std::max({settle, both, 2.0 * duty.scan_time.value_or(0.0)});
}

std::string weakness_of(const Robustness& m) {
    if (m.verdict != Verdict::stable) return std::string("the loop would be ") + name_of(m.verdict);
    if (*m.max_sensitivity > weak_max_sensitivity)
        return "the largest sensitivity is " + short_text(*m.max_sensitivity) + ", above " + short_text(weak_max_sensitivity);
    if (*m.gain_margin < weak_gain_margin)
        return "the gain margin is " + short_text(*m.gain_margin) + ", below " + short_text(weak_gain_margin);
    if (*m.phase_margin_deg < weak_phase_margin_deg)
        return "the phase margin is " + short_text(*m.phase_margin_deg) + " degrees, below " + short_text(weak_phase_margin_deg);
    return {};
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
