#include "synthesize/reduction.hpp"

#include <algorithm>
#include <cmath>

#include "synthesize/default_response.hpp"
#include "tauwright/model/polynomial.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// Terms that cancel to rounding are 0: relative to the largest that went in.
Polynomial difference(const Polynomial& a, const Polynomial& b) {
    Polynomial d(std::max(a.size(), b.size()), 0.0);
    for (std::size_t i = 0; i < d.size(); ++i) {
        const double x = i < a.size() ? a[i] : 0.0, y = i < b.size() ? b[i] : 0.0;
        d[i] = std::abs(x - y) <= 1e-13 * std::max(std::abs(x), std::abs(y)) ? 0.0 : x - y;
    }
    while (!d.empty() && d.back() == 0.0) d.pop_back();
    return d;
}

int strip_origin(Polynomial& p) {
    int count = 0;
    while (!p.empty() && p.front() == 0.0) {
        p.erase(p.begin());
        ++count;
    }
    return count;
}

// Divides p by (T s + 1) where that leaves no rest.
bool divided_by(Polynomial& p, double T) {
    if (p.size() < 2) return false;
    const double root = -1.0 / T;
    double value = 0.0, size = 0.0;
    for (std::size_t k = p.size(); k-- > 0;) {
        value = value * root + p[k];
        size = size * std::abs(root) + std::abs(p[k]);
    }
    if (std::abs(value) > 1e-12 * size) return false;
    for (std::size_t k = 1; k < p.size(); ++k) p[k] -= T * p[k - 1];
    p.pop_back();
    return true;
}

// Settings of (ki + k1 s + k2 s^2) / (s (filter s + 1)); the filter goes to the derivative, or to the
// process value where the derivative would come out negative.
std::optional<PidSettings> settings_of(double ki, double k1, double k2, double filter, double& negative) {
    PidSettings s;
    double gain = k1 - ki * filter, derivative = k2 - gain * filter;
    const double small = 1e-12 * (std::abs(k2) + std::abs(gain * filter));
    if (std::abs(derivative) <= small) derivative = 0.0;
    if (filter > 0.0 && (gain == 0.0 || derivative / gain < 0.0 || (ki != 0.0 && gain / ki < 0.0) || derivative == 0.0)) {
        gain = k1;
        derivative = k2;
        s.measurement_filter_time = filter;
    } else {
        s.filter_time = filter;
    }
    if (std::abs(gain) <= 1e-14 * std::abs(k1)) gain = 0.0;
    if (gain == 0.0) {
        if (ki == 0.0 || derivative != 0.0) return std::nullopt;
        s.integral_gain = ki;
        return s;
    }
    s.gain = gain;
    if (ki != 0.0) s.integral_time = gain / ki;
    s.derivative_time = derivative == 0.0 ? 0.0 : derivative / gain;
    if (s.integral_time && *s.integral_time < 0.0) negative = *s.integral_time;
    if (s.derivative_time < 0.0) negative = s.derivative_time;
    if (negative < 0.0) return std::nullopt;
    return s;
}

}  // namespace

Reduced taylor_settings(const TransferFunction& process, const TransferFunction& response) {
    const Factors& t = response.factors();
    // C = Q D / (D - N (1 - theta s)) with T = N exp(-theta s) / D; D strikes out against Q's poles.
    const TransferFunction below_of_t =
        TransferFunction::from_factors({.integrators = t.integrators, .lags = t.lags, .lag_pairs = t.lag_pairs});
    const TransferFunction M = struck_out(struck_out(response, process), below_of_t);
    Polynomial N = expanded(t.leads, t.lead_pairs, t.zeros_at_origin);
    for (double& c : N) c *= t.gain;
    Polynomial P = difference(expanded(t.lags, t.lag_pairs, t.integrators), product(N, {1.0, -t.dead_time}));
    Reduced reduced;
    if (P.empty()) return reduced;
    const int integrating = strip_origin(P) + M.integrators() - M.zeros_at_origin();
    if (integrating < 0 || integrating > 1) return reduced;  // differentiates at rest, or integrates twice

    Factors m = M.factors();
    // Where 1 - T vanishes at a pole of the process, as it must at unstable ones, both sides share it.
    std::erase_if(m.leads, [&](double T) { return divided_by(P, T); });
    Polynomial above = expanded(m.leads, m.lead_pairs);
    const double later = response.dead_time() - process.dead_time();
    if (later > 0.0) above = product(above, {1.0, -later});
    for (double& c : above) c *= m.gain;
    const Polynomial below = product(expanded(m.lags, m.lag_pairs), P);
    while (above.size() > 1 && above.back() == 0.0) above.pop_back();

    // Numerators of s C: without integral action they begin with s.
    const std::size_t shift = integrating == 1 ? 0 : 1;
    const double filter = below.size() == 2 ? below[1] / below[0] : 0.0;
    if (above.size() + shift <= 3 && below.size() <= 2 && filter >= 0.0 && later <= 0.0) {
        double k[3] = {};
        for (std::size_t i = 0; i < above.size(); ++i) k[i + shift] = above[i] / below[0];
        reduced.settings = settings_of(k[0], k[1], k[2], filter, reduced.negative_time);
        reduced.exact = reduced.settings.has_value();
        if (reduced.settings || reduced.negative_time < 0.0) return reduced;
    }
    const Polynomial series = series_quotient(above, below, 3 - shift);
    double k[3] = {};
    for (std::size_t i = 0; i < series.size(); ++i) k[i + shift] = series[i];
    reduced.settings = settings_of(k[0], k[1], k[2], 0.0, reduced.negative_time);
    return reduced;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
