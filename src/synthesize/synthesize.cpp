#include "tauwright/synthesize/synthesize.hpp"

#include <algorithm>

#include "synthesize/default_response.hpp"
#include "synthesize/obstacles.hpp"
#include "synthesize/reduction.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

TransferFunction response_asked(const TransferFunction& process, const DesiredResponse& desired) {
    if (desired.transfer_function && (desired.time_constant || desired.order != 1))
        throw Error(error_code::conflicting_arguments,
                    "desired.transfer_function is given together with " +
                        std::string(desired.time_constant ? "time_constant" : "order") + "; give one or the other");
    if (desired.transfer_function) {
        const TransferFunction& T = *desired.transfer_function;
        const auto& pairs = T.factors().lag_pairs;
        const bool on_axis = std::any_of(pairs.begin(), pairs.end(), [](const QuadraticFactor& f) { return f.damping == 0.0; });
        if (T.unstable_poles() > 0 || T.integrators() > 0 || on_axis)
            throw Error(error_code::out_of_domain, "desired.transfer_function is " + T.text() +
                                                       ", which is not stable; ask for a response that settles");
        return T;
    }
    if (!desired.time_constant)
        throw Error(error_code::missing_argument, "desired has neither time_constant nor transfer_function; give one");
    detail::require_positive("desired.time_constant", *desired.time_constant);
    if (desired.order < 1 || desired.order > 20)
        detail::refuse(error_code::out_of_domain, "desired.order", desired.order, "give an order from 1 to 20");
    return detail::default_response(process, desired);
}

}  // namespace

Synthesis synthesize(const TransferFunction& process, const DesiredResponse& desired) {
    Synthesis result{.process = process, .attained = response_asked(process, desired)};
    result.obstacles = detail::find_obstacles(process, result.attained);
    result.buildable = true;
    for (const Obstacle& o : result.obstacles) result.buildable &= o.severity != Severity::impossible;
    if (!result.buildable) return result;
    TransferFunction filter = detail::struck_out(result.attained, process);
    filter = filter.with_dead_time(std::max(0.0, result.attained.dead_time() - process.dead_time()));
    result.controller.emplace(std::move(filter), result.attained);
    const detail::Reduced reduced = detail::taylor_settings(process, result.attained);
    result.settings = reduced.settings;
    result.pid_expressible = reduced.exact;
    if (reduced.negative_time < 0.0)
        result.obstacles.push_back({ObstacleCode::negative_time, Severity::caution,
                                    "a PID with this response would need a negative integral or derivative time, " +
                                        text_of(reduced.negative_time) + " s; no settings are given",
                                    reduced.negative_time, "ask for a response of the same shape as the process allows, or slower"});
    return result;
}

std::complex<double> Synthesis::attained_with_settings(std::complex<double> s) const {
    if (!settings)
        throw Error(error_code::missing_argument, "settings are empty; only a synthesis that gives settings has this response");
    if (s == 0.0 && (settings->integral_gain_per_s() != 0.0 || process.integrators() > 0)) return 1.0;
    const std::complex<double> L = process(s) * (*settings)(s);
    return L / (1.0 + L);
}

}  // namespace v0
}  // namespace tauwright
