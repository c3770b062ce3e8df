#include "synthesize/default_response.hpp"

#include <algorithm>
#include <cmath>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// First coefficient of the power series of log(T) without its lags: what N must make up for.
double first_moment(const Factors& kept) {
    double sum = -kept.dead_time;
    for (double T : kept.leads) sum += T;
    for (const auto& f : kept.lead_pairs) sum += 2.0 * f.damping * f.time_constant;
    return sum;
}

}  // namespace

TransferFunction default_response(const TransferFunction& process, const DesiredResponse& desired) {
    const auto on_axis = [](const QuadraticFactor& f) { return f.damping == 0.0; };
    const auto& pairs = process.factors().lag_pairs;
    const auto& lead_pairs = process.factors().lead_pairs;
    if (process.unstable_poles() > 0 || process.integrators() > 1 || process.zeros_at_origin() > 0 ||
        std::any_of(pairs.begin(), pairs.end(), on_axis) || std::any_of(lead_pairs.begin(), lead_pairs.end(), on_axis))
        throw Error(error_code::unsupported_form,
                    "process is " + process.text() +
                        "; a default response takes stable processes with at most one integrator and a gain at rest: give a "
                        "transfer_function");
    const double tau_c = *desired.time_constant;
    const Factors& g = process.factors();
    Factors t;
    t.dead_time = g.dead_time;
    for (double T : g.leads)
        if (T < 0.0) t.leads.push_back(T);
    for (const auto& f : g.lead_pairs)
        if (f.damping < 0.0) t.lead_pairs.push_back(f);
    const int m = g.integrators;
    if (m == 1) {
        // N = 1 + n s with n such that T has no first-order term: 1 - T then vanishes twice at 0.
        const double n = (desired.order + m) * tau_c - first_moment(t);
        if (n != 0.0) t.leads.insert(t.leads.begin(), n);
    }
    t.lags.assign(static_cast<std::size_t>(desired.order + m), tau_c);
    return TransferFunction::from_factors(std::move(t));
}

TransferFunction struck_out(const TransferFunction& a, const TransferFunction& b) {
    Factors f = (a.with_dead_time(0.0) * b.with_dead_time(0.0).inverse()).factors();
    const int common = std::min(f.integrators, f.zeros_at_origin);
    f.integrators -= common;
    f.zeros_at_origin -= common;
    cancel_equal(f.leads, f.lags, [](double) { return false; });
    cancel_equal(f.lead_pairs, f.lag_pairs, [](const QuadraticFactor&) { return false; });
    return TransferFunction::from_factors(std::move(f));
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
