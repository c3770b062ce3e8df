#include "tauwright/assess/robustness.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "assess/sweep.hpp"
#include "math/polynomial_roots.hpp"
#include "tauwright/model/polynomial.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;
constexpr double pi = std::numbers::pi;
constexpr double infinity = std::numeric_limits<double>::infinity();

/// Closed-loop poles of the loop without dead time.
struct PoleCount {
    int right = 0;    ///< in the right half plane
    int on_axis = 0;  ///< on the imaginary axis, as far as rounding tells
};

std::optional<PoleCount> poles_without_dead_time(const TransferFunction& loop) {
    const Factors& f = loop.factors();
    Polynomial sum = expanded(f.lags, f.lag_pairs, f.integrators);
    const Polynomial above = expanded(f.leads, f.lead_pairs, f.zeros_at_origin);
    sum.resize(std::max(sum.size(), above.size()), 0.0);
    for (std::size_t i = 0; i < above.size(); ++i) sum[i] += f.gain * above[i];
    while (!sum.empty() && sum.back() == 0.0) sum.pop_back();
    if (sum.size() < 2) return sum.empty() ? std::nullopt : std::optional<PoleCount>(PoleCount{});
    if (sum.front() == 0.0) return std::nullopt;
    std::reverse(sum.begin(), sum.end());
    const PolynomialRoots roots = polynomial_roots(sum);
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

// Poles cross the axis at the gain crossings, one pair each time the dead time turns L(jw) through
// -1: to the right where the gain falls, to the left where it rises.
// Poles on the axis itself are not counted.
std::optional<int> poles_followed(const LoopCurve& curve, const SweepResult& found) {
    const auto start = poles_without_dead_time(curve.loop());
    const double dead_time = curve.loop().dead_time();
    if (!start) return std::nullopt;
    int count = start->right, left_axis = 0;
    if (dead_time == 0.0) return count;
    for (double w : found.gain_crossings) {
        const std::complex<double> L0 = curve.loop().rational_at({0.0, w});
        double angle = std::arg(-L0);
        if (angle < 0.0) angle += 2.0 * pi;
        if (dead_time * w <= angle) continue;
        const double passed = (dead_time * w - angle) / (2.0 * pi), whole = std::round(passed);
        const bool arriving = std::abs(passed - whole) < 1e-10 * std::max(1.0, whole);  // a pair just on the axis
        auto turns = static_cast<int>(arriving ? whole : std::floor(passed) + 1.0);
        const bool to_the_right = curve.at(w).slope.real() < 0.0;
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

// Zeros of 1 + L in the right half plane from the turn of 1 + L along the axis: each open-loop
// integrator adds half a turn less than it takes (see DEVELOPERS.md, "Two stability tests").
std::optional<int> poles_by_winding(const LoopCurve& curve, const SweepResult& found) {
    const double turns = found.winding / pi;
    const double exact = curve.loop().unstable_poles() + 0.5 * std::max(curve.net_integrators(), 0) - turns;
    const double rounded = std::round(exact);
    // Where the loop keeps gain at infinite frequency the turn never ends; it is cut near a whole one.
    if (std::abs(exact - rounded) > (curve.relative_degree() > 0 ? 1e-3 : 0.25)) return std::nullopt;
    return static_cast<int>(rounded);
}

void decide(const LoopCurve& curve, const SweepResult& found, Robustness& r) {
    if (curve.relative_degree() < 0 && curve.loop().dead_time() == 0.0) return;  // nothing that can be built
    if (curve.at_infinity() >= 1.0 && curve.loop().dead_time() > 0.0) {
        // Neutral or advanced type: infinitely many poles to the right.
        r.verdict = Verdict::unstable;
        r.stable = false;
        return;
    }
    if (curve.pole_on_axis()) return;
    if (found.to_minus_one.distance < 1e-9) {
        const auto right = poles_followed(curve, found);
        r.verdict = right && *right > 0 ? Verdict::unstable : Verdict::marginal;
        r.stable = false;
        return;
    }
    if (!found.complete) return;
    const auto followed = poles_followed(curve, found), wound = poles_by_winding(curve, found);
    if (!followed || !wound || *followed != *wound || *followed < 0) return;
    r.unstable_poles = *followed;
    r.stable = *followed == 0;
    r.verdict = *followed == 0 ? Verdict::stable : Verdict::unstable;
}

void collect_crossovers(const LoopCurve& curve, const SweepResult& found, Robustness& r) {
    for (double w : found.gain_crossings) {
        const double angle = std::arg(-curve.value(w));  // from -1, counterclockwise
        double turn = angle;
        if (turn <= 0.0) turn += 2.0 * pi;
        r.gain_crossovers.push_back({w, std::abs(angle) * 180.0 / pi, turn / w});
    }
    for (double w : found.phase_crossings) r.phase_crossovers.push_back({w, 1.0 / std::abs(curve.value(w))});
}

void take_margins(const LoopCurve& curve, const SweepResult& found, Robustness& r) {
    double above = infinity, below = 0.0, phase = infinity, delay = infinity;
    const auto take = [&](double factor) {
        if (factor > 1.0) above = std::min(above, factor);
        if (factor < 1.0) below = std::max(below, factor);
    };
    if (found.largest_below_one > 0.0) take(1.0 / found.largest_below_one);
    if (found.smallest_above_one > 0.0) take(1.0 / found.smallest_above_one);
    // The ends of the curve cross the negative axis too.
    if (curve.net_integrators() == 0 && curve.loop().gain() < 0.0) take(-1.0 / curve.loop().gain());
    if (curve.relative_degree() == 0 && curve.loop().dead_time() > 0.0) take(1.0 / curve.at_infinity());
    if (curve.relative_degree() == 0 && curve.loop().dead_time() == 0.0 && curve.loop().leading_coefficient() < 0.0)
        take(-1.0 / curve.loop().leading_coefficient());
    for (const auto& c : r.gain_crossovers) {
        phase = std::min(phase, c.phase_margin_deg);
        delay = std::min(delay, c.delay_margin);
    }
    // Dead time turns gain that stays above 1 at high frequency into infinitely many unstable poles.
    if (curve.relative_degree() == 0 && curve.loop().dead_time() == 0.0 && curve.at_infinity() >= 1.0) delay = 0.0;
    r.gain_margin = above;
    r.gain_reduction_margin = below;
    r.phase_margin_deg = phase;
    r.delay_margin = delay;
    r.max_sensitivity = 1.0 / found.to_minus_one.distance;
    r.max_sensitivity_frequency = found.to_minus_one.frequency;
    r.max_complementary_sensitivity = 1.0 / found.inverse_to_minus_one.distance;
    r.max_complementary_sensitivity_frequency = found.inverse_to_minus_one.frequency;
}

}  // namespace

bool operator==(const Robustness&, const Robustness&) = default;

Robustness robustness(const TransferFunction& open_loop) {
    const LoopCurve curve(open_loop);
    Robustness r;
    if (curve.relative_degree() < 0 || curve.pole_on_axis()) {
        decide(curve, {}, r);
        return r;
    }
    const SweepResult found = sweep(curve);
    collect_crossovers(curve, found, r);
    decide(curve, found, r);
    if (r.verdict == Verdict::stable) take_margins(curve, found, r);
    return r;
}

Robustness robustness(const TransferFunction& process, const PidSettings& settings, const RobustnessOptions& options) {
    require_not_negative("extra_delay", options.extra_delay);
    if (options.scan_time) require_positive("scan_time", *options.scan_time);
    const TransferFunction loop = process * transfer_function(settings);
    if (loop.integrators() > 0 && loop.zeros_at_origin() > 0) {
        // A zero at rest against an integrator hides a pole at 0: one of the two signals ramps away.
        Robustness hidden;
        hidden.verdict = Verdict::marginal;
        hidden.stable = false;
        return hidden;
    }
    return robustness(loop.with_dead_time(loop.dead_time() + options.extra_delay + 0.5 * options.scan_time.value_or(0.0)));
}

}  // namespace v0
}  // namespace tauwright
