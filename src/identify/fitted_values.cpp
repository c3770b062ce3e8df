// What a fit says of every sample, and what it leaves.
#include <algorithm>
#include <cmath>

#include "identify/decay_sums.hpp"
#include "identify/process_fit.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

std::vector<double> residuals_of(const FitData& data, Form form, const FitResult& fit, const FitOptions& options) {
    const ParameterArray& p = fit.parameters;
    std::vector<double> r(data.t.size());
    if (form == Form::integrating_plus_dead_time) {
        r = response_at(data.t, data.edges, form, p, options.time_center);
        for (std::size_t i = 0; i < r.size(); ++i) r[i] = data.y[i] - r[i];
        return r;
    }
    const auto list = pieces(data, p[at_dead_time]);
    double U = 0.0, A = 0.0;
    for (std::size_t k = 0; k < list.size(); ++k) {
        if (k > 0) {
            const double held = k > 1 ? data.edges[k - 1].time - data.edges[k - 2].time : 0.0;
            A = U + A * std::exp(-held / p[at_lag]) - data.edges[k - 1].level;
            U = data.edges[k - 1].level;
        }
        decay_residuals(data.t.data() + list[k].first, data.y.data() + list[k].first, list[k].last - list[k].first,
                        {list[k].start, 1.0 / p[at_lag], options.time_center, p[at_offset] + p[at_gain] * U, p[at_drift],
                         p[at_gain] * A},
                        r.data() + list[k].first);
    }
    return r;
}

}  // namespace

ResidualShape residual_shape(const FitData& data, Form form, const FitResult& fit, const FitOptions& options) {
    const std::vector<double> r = residuals_of(data, form, fit, options);
    const std::size_t n = r.size();
    if (n < 3) return {};
    constexpr std::size_t lanes = 8;  // independent sums: an addition need not wait for the one before
    double squares_in[lanes] = {}, products_in[lanes] = {};
    for (std::size_t i = 1; i < n; ++i) {
        squares_in[i % lanes] += r[i] * r[i];
        products_in[i % lanes] += r[i] * r[i - 1];
    }
    double squares = r[0] * r[0], products = 0.0;
    for (std::size_t l = 0; l < lanes; ++l) squares += squares_in[l], products += products_in[l];
    if (!(squares > 0.0)) return {};
    const auto count = static_cast<double>(n);
    // Independent residuals differ from their neighbors by twice their variance.
    const double differences = 2.0 * (squares - products) - r.front() * r.front() - r.back() * r.back();
    const double slow = squares / count - 0.5 * differences / (count - 1.0);
    return {products / squares, slow > 0.0 ? std::sqrt(slow) : 0.0};
}

std::vector<double> response_at(const std::vector<double>& t, const std::vector<Edge>& edges, Form form,
                                const ParameterArray& p, double time_center) {
    std::vector<double> y(t.size());
    double U = 0.0, A = 0.0, start = 0.0;  // first order: U + A exp(-(t - start)/lag); ramp: A + U (t - start)
    std::size_t next = 0;
    const bool ramp = form == Form::integrating_plus_dead_time;
    for (std::size_t i = 0; i < t.size(); ++i) {
        while (next < edges.size() && t[i] >= edges[next].time + p[at_dead_time]) {
            const double edge = edges[next].time + p[at_dead_time];
            if (ramp) A += U * (edge - start);
            else A = U + A * std::exp(-(edge - start) / p[at_lag]) - edges[next].level;
            U = edges[next].level;
            start = edge;
            ++next;
        }
        const double c = t[i] - time_center;
        const double x = ramp ? A + U * (t[i] - start) : U + A * std::exp(-(t[i] - start) / p[at_lag]);
        y[i] = p[at_offset] + c * (p[at_drift] + c * p[at_curvature]) + p[at_gain] * x;
    }
    return y;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
