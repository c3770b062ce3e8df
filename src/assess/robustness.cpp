#include "tauwright/assess/robustness.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "assess/bandwidth.hpp"
#include "assess/delay_ranges.hpp"
#include "assess/factored_curve.hpp"
#include "assess/mismatch_curve.hpp"
#include "assess/pole_counts.hpp"
#include "assess/sampled_curve.hpp"
#include "assess/sampled_delay_margin.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;
constexpr double pi = std::numbers::pi;
constexpr double infinity = std::numeric_limits<double>::infinity();

void judge(Robustness& r, Verdict verdict, std::optional<int> unstable_poles = {}) {
    r.verdict = verdict;
    r.stable = verdict == Verdict::undetermined ? std::optional<bool>() : verdict == Verdict::stable;
    r.unstable_poles = unstable_poles;
}

// The verdict of two counts that must agree.
void judge(Robustness& r, const SweepResult& found, std::optional<int> one, std::optional<int> other) {
    if (found.to_minus_one.distance < through_minus_one)
        judge(r, other && *other > 0 ? Verdict::unstable : Verdict::marginal);
    else if (found.complete && one && other && *one == *other && *one >= 0)
        judge(r, *one == 0 ? Verdict::stable : Verdict::unstable, one);
}

void collect_crossovers(const LoopCurve& curve, const SweepResult& found, Robustness& r) {
    for (const Crossing& c : found.gain_crossings) {
        const double angle = std::arg(-curve.value(c.w));  // from -1, counterclockwise
        const double turn = angle > 0.0 ? angle : angle + 2.0 * pi;
        r.gain_crossovers.push_back({c.w, std::abs(angle) * 180.0 / pi, turn / c.w, c.touches, c.error_bound});
    }
    for (const Crossing& c : found.phase_crossings)
        r.phase_crossovers.push_back({c.w, 1.0 / std::abs(curve.value(c.w)), c.touches, c.error_bound});
    r.phase_crossovers_capped = found.capped || (curve.at_infinity() > 0.0 && curve.has_dead_time());
}

void take_gain_margins(const LoopCurve& curve, const SweepResult& found, Robustness& r) {
    double above = infinity, below = 0.0;
    const auto take = [&](double factor) {
        if (factor > 1.0) above = std::min(above, factor);
        if (factor < 1.0) below = std::max(below, factor);
    };
    if (found.largest_below_one > 0.0) take(1.0 / found.largest_below_one);
    if (found.smallest_above_one > 0.0) take(1.0 / found.smallest_above_one);
    // The ends of the curve cross the negative axis too.
    if (curve.net_integrators() == 0 && curve.low_gain() < 0.0) take(-1.0 / curve.low_gain());
    if (curve.at_infinity() > 0.0 && curve.has_dead_time()) take(1.0 / curve.at_infinity());
    if (curve.limit() < 0.0) take(-1.0 / curve.limit());
    r.gain_margin = above;
    r.gain_reduction_margin = below;
}

void take_margins(const LoopCurve& curve, const SweepResult& found, Robustness& r) {
    take_gain_margins(curve, found, r);
    double phase = infinity, delay = infinity;
    for (const auto& c : r.gain_crossovers) {
        phase = std::min(phase, c.phase_margin_deg);
        delay = std::min(delay, c.delay_margin);
    }
    // Dead time turns gain that stays above 1 at high frequency into infinitely many unstable poles.
    if (std::abs(curve.limit()) >= 1.0) delay = 0.0;
    r.phase_margin_deg = phase;
    r.delay_margin = delay;
    r.fragile = delay == 0.0;
    r.max_sensitivity = 1.0 / found.to_minus_one.distance;
    r.max_sensitivity_frequency = found.to_minus_one.frequency;
    r.max_complementary_sensitivity = 1.0 / found.inverse_to_minus_one.distance;
    r.max_complementary_sensitivity_frequency = found.inverse_to_minus_one.frequency;
    const double low = found.gain_crossings.empty() ? curve.smallest_root() : found.gain_crossings.back().w;
    r.sensitivity_bandwidth = sensitivity_bandwidth(curve, found.head);
    r.complementary_bandwidth = complementary_bandwidth(curve, is_finite(low) && low > 0.0 ? low : 1.0);
}

// What varies is the dead time of the process.
void take_delay_ranges(const LoopCurve& curve, const SweepResult& found, double dead_time, Robustness& r) {
    if (!r.unstable_poles || std::abs(curve.limit()) >= 1.0) return;
    r.stable_dead_times = stable_dead_times(curve, found, dead_time, *r.unstable_poles);
    if (r.verdict != Verdict::stable) return;
    for (const DelayRange& range : r.stable_dead_times)
        if (range.low <= dead_time && dead_time <= range.high) r.delay_reduction_margin = range.low > 0.0 ? dead_time - range.low : infinity;
}

// s -> 1/s: its low end is the high end of a loop without dead time.
TransferFunction mirrored(const TransferFunction& loop) {
    Factors f, g = loop.factors();
    f.gain = loop.leading_coefficient();
    f.integrators = loop.zero_count();
    f.zeros_at_origin = loop.order();
    const auto flip = [](std::vector<double>& lags) { for (double& T : lags) T = 1.0 / T; };
    const auto flip_pairs = [](std::vector<QuadraticFactor>& pairs) { for (auto& p : pairs) p.time_constant = 1.0 / p.time_constant; };
    flip(g.leads);
    flip(g.lags);
    flip_pairs(g.lead_pairs);
    flip_pairs(g.lag_pairs);
    f.leads = std::move(g.leads);
    f.lags = std::move(g.lags);
    f.lead_pairs = std::move(g.lead_pairs);
    f.lag_pairs = std::move(g.lag_pairs);
    return TransferFunction::from_factors(std::move(f));
}

SweepResult swept(const FactoredCurve& curve) {
    if (curve.has_dead_time() || curve.loop().relative_degree() <= 0) return sweep(curve, nullptr);
    const FactoredCurve other(mirrored(curve.loop()));
    return sweep(curve, &other);
}

Robustness analyzed(const TransferFunction& open_loop, double varied_dead_time) {
    const FactoredCurve curve(open_loop);
    Robustness r;
    if (curve.loop().relative_degree() < 0 || (curve.at_infinity() >= 1.0 && curve.has_dead_time())) {
        // With dead time of neutral or advanced type: infinitely many poles to the right. Without: nothing that can be built.
        if (curve.has_dead_time()) judge(r, Verdict::unstable);
        return r;
    }
    const SweepResult found = swept(curve);
    collect_crossovers(curve, found, r);
    judge(r, found, poles_by_winding(curve, found), poles_followed(curve.loop(), curve, found));
    if (curve.hides_axis_mode() && r.verdict == Verdict::stable) judge(r, Verdict::marginal);
    if (r.verdict == Verdict::stable) take_margins(curve, found, r);
    take_delay_ranges(curve, found, varied_dead_time, r);
    return r;
}

// A zero at rest against an integrator hides a pole at 0: one of the two signals ramps away.
bool hides_integrator(const TransferFunction& loop) { return loop.integrators() > 0 && loop.zeros_at_origin() > 0; }

// What is left of a verdict where a mode on the axis is hidden.
Robustness hiding(bool hidden, Robustness r) {
    if (!hidden || r.verdict != Verdict::stable) return r;
    Robustness marginal;
    judge(marginal, Verdict::marginal);
    return marginal;
}

}  // namespace

bool operator==(const Robustness&, const Robustness&) = default;

Robustness robustness(const TransferFunction& open_loop) { return analyzed(open_loop, open_loop.dead_time()); }

Robustness robustness(const TransferFunction& process, const PidSettings& settings, const RobustnessOptions& options) {
    require_not_negative("extra_delay", options.extra_delay);
    if (options.scan_time) require_positive("scan_time", *options.scan_time);
    const TransferFunction loop = process * transfer_function(settings);
    const bool hidden = hides_integrator(loop);
    if (!options.scan_time)
        return hiding(hidden, analyzed(options.extra_delay > 0.0 ? loop.with_dead_time(loop.dead_time() + options.extra_delay) : loop, process.dead_time()));
    const TransferFunction delayed = process.with_dead_time(process.dead_time() + options.extra_delay);
    const SampledCurve curve(delayed, settings, *options.scan_time);
    Robustness r;
    SweepResult found = sweep(curve, nullptr);
    found.complete &= curve.roots_are_known();
    collect_crossovers(curve, found, r);
    judge(r, found, poles_by_winding(curve, found), poles_by_gain(curve, found));
    if (r.verdict != Verdict::stable || hidden) return hiding(hidden, std::move(r));
    take_margins(curve, found, r);
    for (const GainCrossover& c : r.gain_crossovers)
        if (c.delay_margin == r.delay_margin) {
            r.delay_margin = sampled_delay_margin(delayed, settings, *options.scan_time, c.delay_margin, c.frequency_rad_s);
            break;
        }
    return r;
}

Robustness robustness(const TransferFunction& process, const InternalModelController& controller, const RobustnessOptions& options) {
    require_not_negative("extra_delay", options.extra_delay);
    if (options.scan_time)
        refuse(error_code::out_of_domain, "scan_time", *options.scan_time,
               "the exact controller is analyzed as it is, continuous: give no scan time");
    Robustness r;
    const MismatchCurve curve(process.with_dead_time(process.dead_time() + options.extra_delay), controller);
    r.fragile = curve.fragile();
    const bool hidden = hides_integrator(process * controller.filter()) && curve.net_integrators() <= 0;
    if (curve.neutral()) {
        if (!curve.commensurate()) judge(r, Verdict::unstable);
        return r;
    }
    if (curve.has_dead_time() && curve.at_infinity() >= 1.0) {
        // Stable only as long as the process is the model: then the closed loop is T, whatever the open loop looks like.
        const bool exact = (process * controller.filter()).cancelled() == controller.response().cancelled() && options.extra_delay == 0.0;
        if (exact && controller.filter().unstable_poles() == 0) judge(r, Verdict::stable, 0);
        return r;
    }
    if (!curve.controller_poles()) return r;
    const SweepResult found = sweep(curve, nullptr);
    collect_crossovers(curve, found, r);
    judge(r, found, poles_by_winding(curve, found), poles_by_gain(curve, found));
    if (hidden) return hiding(hidden, std::move(r));
    if (r.verdict == Verdict::stable) {
        take_margins(curve, found, r);
        r.fragile |= curve.fragile();
    }
    take_delay_ranges(curve, found, process.dead_time(), r);
    return r;
}

}  // namespace v0
}  // namespace tauwright
