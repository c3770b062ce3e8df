#include "tauwright/assess/worst_case.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "assess/member_trials.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;
constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double degrees = 180.0 / std::numbers::pi;

void check_options(const WorstCaseOptions& o) {
    require_not_negative("extra_delay", o.extra_delay);
    require_finite("tolerance", o.tolerance);
    if (!(o.tolerance >= 1e-9) || !(o.tolerance <= 0.5))
        refuse(error_code::out_of_domain, "tolerance", o.tolerance, "give a number from 1e-9 to 0.5");
    if (o.most_boxes == 0) refuse(error_code::out_of_domain, "most_boxes", 0.0, "give at least 1");
}

void take_reached(const MemberTrials& trials, WorstCase& w) {
    w.max_sensitivity = trials.worst(Aim::nearness).max_sensitivity;
    w.gain_margin = trials.worst(Aim::gain_margin).gain_margin;
    w.phase_margin_deg = trials.worst(Aim::phase_margin).phase_margin_deg;
    w.delay_margin = trials.worst(Aim::delay_margin).delay_margin;
    w.members_tried = trials.count();
}

void take_failed(const MemberSet& set, const MemberTrials& trials, WorstCase& w) {
    w.verdict = trials.failed_verdict();
    w.at = set.member(trials.failed()->data());
    w.certified = w.verdict == Verdict::unstable || w.verdict == Verdict::marginal;
    w.members_tried = trials.count();
}

void take_bound(Aim aim, double bound, WorstCase& w) {
    if (aim == Aim::nearness) w.max_sensitivity_bound = std::exp(-bound);
    if (aim == Aim::gain_margin) w.gain_margin_bound = std::exp(bound);
    if (aim == Aim::phase_margin) w.phase_margin_deg_bound = bound * degrees;
    if (aim == Aim::delay_margin) w.delay_margin_bound = bound;
}

// Is the gap between what was reached and what is proved within the tolerance?
bool close_enough(const WorstCase& w, double tolerance) {
    const double share = 1.0 - tolerance * (1.0 + 1e-6) - 1e-9;
    const auto kept = [&](const std::optional<double>& bound, double reached) {
        return bound && (*bound >= reached * share || *bound == reached);
    };
    return w.max_sensitivity_bound && *w.max_sensitivity_bound * share <= *w.max_sensitivity &&
           kept(w.gain_margin_bound, std::min(*w.gain_margin, 1000.0)) && kept(w.phase_margin_deg_bound, *w.phase_margin_deg) &&
           kept(w.delay_margin_bound, *w.delay_margin);
}

WorstCase of_models(const PidSettings& settings, const std::vector<TransferFunction>& models, const WorstCaseOptions& options) {
    WorstCase w;
    std::vector<Robustness> found;
    for (std::size_t i = 0; i < models.size(); ++i) {
        if (options.progress && !options.progress(static_cast<double>(i) / static_cast<double>(models.size()))) {
            w.cancelled = true;
            break;
        }
        found.push_back(robustness(models[i], settings, {.scan_time = {}, .extra_delay = options.extra_delay}));
    }
    w.members_tried = found.size();
    // What is worse comes first: unstable, marginal, undetermined, stable with the largest Ms.
    const auto badness = [&](const Robustness& r) {
        switch (r.verdict) {
            case Verdict::unstable: return infinity;
            case Verdict::marginal: return 1e300;
            case Verdict::undetermined: return 1e299;
            case Verdict::stable: return r.max_sensitivity.value_or(0.0);
        }
        return 0.0;
    };
    if (found.empty()) {
        w.at = models.front();
        return w;
    }
    std::size_t worst = 0;
    for (std::size_t i = 1; i < found.size(); ++i)
        if (badness(found[i]) > badness(found[worst])) worst = i;
    w.at = models[worst];
    w.at_model = worst;
    w.verdict = found[worst].verdict;
    const bool all = found.size() == models.size();
    w.certified = w.verdict == Verdict::stable ? all : w.verdict != Verdict::undetermined;
    if (w.verdict != Verdict::stable) return w;
    if (!all) w.verdict = Verdict::undetermined;
    w.max_sensitivity = found[worst].max_sensitivity;
    w.gain_margin = w.phase_margin_deg = w.delay_margin = infinity;
    for (const Robustness& r : found) {
        w.gain_margin = std::min(*w.gain_margin, r.gain_margin.value_or(infinity));
        w.phase_margin_deg = std::min(*w.phase_margin_deg, r.phase_margin_deg.value_or(infinity));
        w.delay_margin = std::min(*w.delay_margin, r.delay_margin.value_or(infinity));
    }
    if (!all) return w;
    w.max_sensitivity_bound = w.max_sensitivity;
    w.gain_margin_bound = w.gain_margin;
    w.phase_margin_deg_bound = w.phase_margin_deg;
    w.delay_margin_bound = w.delay_margin;
    return w;
}

// A frequency to start from where a figure is read at none.
double usable_frequency(const TransferFunction& process, double w) {
    if (w > 0.0 && is_finite(w)) return w;
    const Factors& f = process.factors();
    double slowest = f.dead_time;
    for (double T : f.lags) slowest += std::abs(T);
    for (double T : f.leads) slowest += std::abs(T);
    for (const auto& p : f.lag_pairs) slowest += p.time_constant;
    for (const auto& p : f.lead_pairs) slowest += p.time_constant;
    return slowest > 0.0 ? 1.0 / slowest : 1.0;
}

// Proves one figure; what it finds on the way is analyzed.
bool prove(Aim aim, LoopFamily& family, MemberTrials& trials, const WorstCaseOptions& options, WorstCase& w) {
    SearchLimits limits;
    limits.tolerance = options.tolerance;
    limits.most_boxes = options.most_boxes > w.boxes_used ? options.most_boxes - w.boxes_used : 0;
    const double done = 0.25 * static_cast<double>(aim);
    if (options.progress) limits.go_on = [&options, done](double share) { return options.progress(done + 0.25 * share); };
    if (aim == Aim::nearness) limits.closer = [&trials](FamilyPoint& p) { return trials.follow(p); };
    FamilyPoint best;
    best.figure = figure_of(aim, trials.worst(aim));
    best.z = trials.worst_z(aim);
    best.log_frequency = std::log(usable_frequency(family.set().process(), frequency_of(aim, trials.worst(aim))));
    FamilySearch search(family, aim, limits);
    search.run(best);
    w.boxes_used += search.boxes();
    w.cancelled |= search.cancelled();
    if (trials.failed() || !trials.analyze(best.z) || !trials.refine(aim)) return false;
    if (aim != Aim::nearness || search.bound() > -infinity)
        take_bound(aim, std::min(search.bound(), figure_of(aim, trials.worst(aim))), w);
    return search.complete();
}

}  // namespace

WorstCase worst_case(const TransferFunction& process, const PidSettings& settings, const Uncertainty& uncertainty,
                     const WorstCaseOptions& options) {
    check_options(options);
    require(settings);
    if (uncertainty.kind() == UncertaintyKind::models) return of_models(settings, uncertainty.models(), options);
    MemberSet set(process, uncertainty);
    LoopFamily family(set, transfer_function(settings), options.extra_delay);
    MemberTrials trials(family, settings, options.extra_delay);
    WorstCase w;
    bool stable = trials.analyze(set.nominal());
    for (std::size_t i = 0; i < every_aim.size() && stable; ++i) stable = trials.climb(every_aim[i]);
    if (stable) trials.align(set);
    bool proved = stable;
    for (std::size_t i = 0; i < every_aim.size() && stable && !w.cancelled; ++i) {
        if (options.progress && !options.progress(0.25 * static_cast<double>(i))) {
            w.cancelled = true;
            break;
        }
        proved &= prove(every_aim[i], family, trials, options, w);
        stable = !trials.failed();
        if (!w.max_sensitivity_bound) break;  // margins rest on |1 + L| > 0
    }
    if (!stable) {
        const WorstCase so_far = w;
        w = {};
        w.boxes_used = so_far.boxes_used;
        w.cancelled = so_far.cancelled;
        take_failed(set, trials, w);
        return w;
    }
    take_reached(trials, w);
    w.at = set.member(trials.worst_z(Aim::nearness).data());
    w.verdict = w.max_sensitivity_bound ? Verdict::stable : Verdict::undetermined;
    w.certified = proved && !w.cancelled && w.verdict == Verdict::stable && close_enough(w, options.tolerance);
    return w;
}

}  // namespace v0
}  // namespace tauwright
