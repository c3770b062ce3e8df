#include "assess/pole_counts.hpp"

#include <numbers>

#include "math/polynomial_roots.hpp"
#include "tauwright/core/finite.hpp"
#include "tauwright/model/polynomial.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double pi = std::numbers::pi;

/// Closed-loop poles of the loop without dead time.
struct PoleCount {
    int right = 0;    ///< in the right half plane
    int on_axis = 0;  ///< on the imaginary axis, as far as rounding tells
};

// Routh's scheme (Gantmacher, The Theory of Matrices II, chapter XV); empty where an entry of the first
// column is too close to 0 for its sign to be trusted. `rising`: coefficients, lowest power first.
std::optional<int> right_by_routh(const Polynomial& rising) {
    const std::size_t n = rising.size();
    constexpr std::size_t most = 24;
    if (n > most) return std::nullopt;
    double above[most] = {}, row[most] = {};
    const std::size_t columns = (n + 1) / 2;
    for (std::size_t i = 0; i < n; ++i) (i % 2 == 0 ? above : row)[i / 2] = rising[n - 1 - i];
    int changes = 0;
    double last = above[0];
    for (std::size_t k = 1; k < n; ++k) {
        double largest = 0.0;
        for (std::size_t i = 0; i < columns; ++i) largest = std::max(largest, std::abs(row[i]));
        if (!(std::abs(row[0]) > 1e-9 * largest) || !is_finite(row[0])) return std::nullopt;
        changes += (row[0] > 0.0) != (last > 0.0);
        last = row[0];
        const double share = above[0] / row[0];
        double next[most] = {};
        for (std::size_t i = 0; i + 1 < columns; ++i) {
            next[i] = above[i + 1] - share * row[i + 1];
            // What is left of a cancellation has lost its digits.
            if (i == 0 && k + 1 < n && !(std::abs(next[i]) > 1e-6 * std::abs(above[i + 1]))) return std::nullopt;
        }
        for (std::size_t i = 0; i < columns; ++i) {
            above[i] = row[i];
            row[i] = next[i];
        }
    }
    return changes;
}

std::optional<PoleCount> count_roots(const Polynomial& rising) {
    const PolynomialRoots roots = polynomial_roots(Polynomial(rising.rbegin(), rising.rend()));
    PoleCount count;
    for (std::size_t i = 0; i < roots.values.size(); ++i) {
        const double re = roots.values[i].real();
        // The coefficients were rounded on the way here: that close to the axis is on it.
        const bool on_axis = std::abs(re) <= std::max(roots.error_radii[i], 1e-13 * std::abs(roots.values[i]));
        count.on_axis += on_axis;
        count.right += !on_axis && re > 0.0;
    }
    return count;
}

std::optional<PoleCount> poles_without_dead_time(const TransferFunction& loop) {
    const Factors& f = loop.factors();
    Polynomial sum = expanded(f.lags, f.lag_pairs, f.integrators);
    const Polynomial above = expanded(f.leads, f.lead_pairs, f.zeros_at_origin);
    sum.resize(std::max(sum.size(), above.size()), 0.0);
    for (std::size_t i = 0; i < above.size(); ++i) sum[i] += f.gain * above[i];
    while (!sum.empty() && sum.back() == 0.0) sum.pop_back();
    if (sum.size() < 2) return sum.empty() ? std::nullopt : std::optional<PoleCount>(PoleCount{});
    if (sum.front() == 0.0) return std::nullopt;
    for (double c : sum)
        if (!is_finite(c)) return std::nullopt;  // products of times beyond all numbers
    if (const auto right = right_by_routh(sum)) return PoleCount{*right, 0};
    return count_roots(sum);
}

// Poles at 0 leave it along the roots of s^m = -k low_gain as the gain k rises: how many to the right.
std::optional<int> right_from_origin(const LoopCurve& curve) {
    const int m = curve.net_integrators();
    int right = 0;
    for (int i = 0; i < m; ++i) {
        // In quarter turns times m: (pi (low gain > 0) + 2 pi i) / m against pi/2.
        int angle = ((curve.low_gain() > 0.0 ? 2 : 0) + 4 * i) % (4 * m);
        if (angle > 2 * m) angle -= 4 * m;
        if (std::abs(angle) < m) ++right;
        if (std::abs(angle) != m) continue;
        if (curve.low_phase_slope() == 0.0) return std::nullopt;
        right += curve.low_phase_slope() < 0.0;
    }
    return right;
}

// An open-loop pole on the axis leaves it against its residue.
std::optional<int> right_from_axis(const LoopCurve& curve) {
    int right = 0;
    for (const AxisRoot& root : curve.axis_roots()) {
        if (root.poles <= 0) continue;
        if (root.poles > 1) return std::nullopt;
        const std::complex<double> L = curve.at(root.w * (1.0 + 1e-9)).L;
        if (!(std::abs(L.imag()) > 1e-6 * std::abs(L))) return std::nullopt;
        right += L.imag() > 0.0 ? 2 : 0;
    }
    return right;
}

}  // namespace

std::optional<int> poles_by_winding(const LoopCurve& curve, const SweepResult& found) {
    const double turns = found.winding / pi;
    const double exact = curve.unstable_poles() + 0.5 * std::max(curve.net_integrators(), 0) - turns;
    const double rounded = std::round(exact);
    // Where the loop keeps gain at infinite frequency the turn never ends; it is cut near a whole one.
    const bool ends = curve.at_infinity() == 0.0;
    if (!(std::abs(exact - rounded) <= (ends ? 1e-3 : 0.25))) return std::nullopt;
    return static_cast<int>(rounded);
}

std::optional<int> poles_followed(const TransferFunction& loop, const LoopCurve& curve, const SweepResult& found) {
    const auto start = poles_without_dead_time(loop);
    const double dead_time = loop.dead_time();
    if (!start) return std::nullopt;
    int count = start->right, left_axis = 0;
    if (dead_time == 0.0) return count;
    for (const Crossing& crossing : found.gain_crossings) {
        const double w = crossing.w;
        const std::complex<double> L0 = loop.rational_at({0.0, w});
        double angle = std::arg(-L0);
        if (angle < 0.0) angle += 2.0 * pi;
        if (dead_time * w <= angle) continue;
        if (crossing.touches) return std::nullopt;
        const double passed = (dead_time * w - angle) / (2.0 * pi), whole = std::round(passed);
        const bool arriving = std::abs(passed - whole) < 1e-10 * std::max(1.0, whole);  // a pair just on the axis
        auto turns = static_cast<int>(arriving ? whole : std::floor(passed) + 1.0);
        const bool to_the_right = curve.gain_falls(w);
        if (start->on_axis > 0 && std::abs(std::arg(-L0)) < 1e-9) {  // a pair that starts on the axis
            left_axis += 2;
            // It comes from neither side: going left takes nothing off the count.
            if (!to_the_right) --turns;
        }
        count += (to_the_right ? 2 : -2) * turns;
    }
    if (left_axis != start->on_axis) return std::nullopt;
    return count;
}

std::optional<int> poles_by_gain(const LoopCurve& curve, const SweepResult& found) {
    if (!found.crossings_clear) return std::nullopt;
    const auto origin = right_from_origin(curve), axis = right_from_axis(curve);
    if (!origin || !axis) return std::nullopt;
    int count = curve.unstable_poles() + *origin + *axis + found.crossed_by_gain;
    if (curve.net_integrators() == 0 && curve.low_gain() < -1.0) {  // one real pole passes 0
        if (curve.low_phase_slope() == 0.0) return std::nullopt;
        count += curve.low_phase_slope() < 0.0 ? 1 : -1;
    }
    return count;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
