#include "tune/audit_reason.hpp"

#include <cmath>
#include <vector>

#include "tune/default_speed.hpp"
#include "tune/page.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// What is called a difference: a tenth, and of overshoot ten percent of the step.
constexpr double tenth = 1.1, overshoot_points = 10.0;
// Up to here less sensitivity is no gain (common practice, no source).
constexpr double ample_max_sensitivity = 1.7;
// From here on a response is called an oscillation: the quarter decay of the trade.
constexpr double much_ringing = 0.25;
// From here on more valve travel is said.
constexpr double much_travel = 1.5;

std::string brief(double x) { return shown(x, 3); }

enum class Change { none, better, worse };

struct Compared {
    Change change = Change::none;
    std::string text = {};  ///< of the proposal, against what is in service
};

// Smaller is better.
Change change_of(double before, double after) {
    if (after * tenth < before) return Change::better;
    return before * tenth < after ? Change::worse : Change::none;
}

std::string instead(const char* what, double after, double before, const char* unit) {
    return joined({what, " ", brief(after), unit, " instead of ", brief(before), unit});
}

Compared settling(const Figures& before, const Figures& after, double window) {
    const auto &b = before.settling_time, &a = after.settling_time;
    if (a && b) return {change_of(*b, *a), instead("settles in", *a, *b, " s")};
    const std::string within = joined({"within ", brief(window), " s"});
    if (a) return {Change::better, joined({"settles in ", brief(*a), " s (in service not ", within, ")"})};
    if (b) return {Change::worse, joined({"does not settle ", within, " (in service in ", brief(*b), " s)"})};
    return {};
}

// Integral action in one of them alone.
Compared offset(const PidSettings& before, const PidSettings& after) {
    const bool b = before.integral_gain_per_s() != 0.0, a = after.integral_gain_per_s() != 0.0;
    if (b == a) return {};
    if (a) return {Change::better, "takes away the offset that every load leaves in service"};
    return {Change::worse, "has no integral action and leaves an offset after every load"};
}

// Integral of the error after a load step, per unit of load, in s: 1/Ki.
Compared integrated_load_error(const PidSettings& before, const PidSettings& after) {
    const double b = std::abs(before.integral_gain_per_s()), a = std::abs(after.integral_gain_per_s());
    if (b == 0.0 || a == 0.0) return {};
    return {change_of(1.0 / b, 1.0 / a), instead("leaves an integrated error per unit of load of", 1.0 / a, 1.0 / b, " s")};
}

// In the order in which they are told.
std::vector<Compared> compared(const AuditRow& row, double window) {
    const AuditSide &before = *row.in_service, &after = *row.proposal;
    std::vector<Compared> list;
    const auto add = [&](Compared c) {
        if (!c.text.empty()) list.push_back(std::move(c));
    };
    add(offset(before.settings, after.settings));
    if (before.figures && after.figures) {
        const Figures &b = *before.figures, &a = *after.figures;
        add(settling(b, a, window));
        if (b.peak_load_error && a.peak_load_error)
            add({change_of(*b.peak_load_error, *a.peak_load_error),
                 instead("lets a load move the process value by", *a.peak_load_error, *b.peak_load_error, " %")});
        if (b.overshoot_percent && a.overshoot_percent) {
            const double rise = *a.overshoot_percent - *b.overshoot_percent;
            add({rise < -overshoot_points  ? Change::better
                 : rise > overshoot_points ? Change::worse
                                           : Change::none,
                 instead("overshoots", *a.overshoot_percent, *b.overshoot_percent, " %")});
        }
        add({change_of(b.integrated_absolute_error, a.integrated_absolute_error),
             instead("has an integrated absolute error of", a.integrated_absolute_error, b.integrated_absolute_error, " % s")});
    } else {
        add(integrated_load_error(before.settings, after.settings));
    }
    // Sensitivity between ample and weak is a price, not a fault.
    const double b = *before.margins.max_sensitivity, a = *after.margins.max_sensitivity;
    add({b > ample_max_sensitivity && change_of(b, a) == Change::better ? Change::better : Change::none, instead("has Ms", a, b, "")});
    return list;
}

std::string travel_note(const AuditRow& row) {
    if (!row.in_service || !row.in_service->figures || !row.proposal->figures) return {};
    const double b = row.in_service->figures->valve_travel, a = row.proposal->figures->valve_travel;
    return b > 0.0 && a > much_travel * b ? joined({"; ", brief(a / b), " times the valve travel"}) : std::string();
}

// One side alone: "Ms 1.6, settles in 38 s".
std::string described(const AuditSide& side) {
    if (side.margins.verdict != Verdict::stable) return name_of(side.margins.verdict);
    std::string text = joined({"Ms ", brief(*side.margins.max_sensitivity)});
    if (side.figures && side.figures->settling_time) text += joined({", settles in ", brief(*side.figures->settling_time), " s"});
    return text;
}

// "; proposal Ms 1.6, settles in 38 s instead of 92 s", or why there is none.
std::string beside(const AuditRow& row, const AuditContext& context) {
    if (!row.proposal) return context.withheld.empty() ? "; no proposal" : joined({"; no proposal: ", context.withheld});
    std::string text = joined({"; proposal ", described(*row.proposal)});
    if (row.in_service->figures && row.proposal->figures) {
        const auto &b = row.in_service->figures->settling_time, &a = row.proposal->figures->settling_time;
        if (a && b) text += joined({" instead of ", brief(*b), " s"});
    }
    const std::string weakness = weakness_of(row.proposal->margins);
    if (row.proposal->margins.verdict == Verdict::stable && !weakness.empty()) text += joined({" (weak too: ", weakness, ")"});
    return text;
}

std::string why_unstable(const AuditSide& side, double process_gain) {
    const double gain = side.settings.gain != 0.0 ? side.settings.gain : side.settings.integral_gain_per_s();
    if (gain * process_gain < 0.0)
        return joined({"in service acts the wrong way (gain ", brief(gain), " on a process gain of ", brief(process_gain), ") and is ",
                       name_of(side.margins.verdict), " on this model"});
    const auto& poles = side.margins.unstable_poles;
    return joined({"in service is ", name_of(side.margins.verdict), " on this model",
                   poles ? joined({" (", std::to_string(*poles), *poles == 1 ? " unstable pole)" : " unstable poles)"}) : std::string(),
                   ": check model, form and action first"});
}

void conclude_unstable(AuditRow& row, const AuditContext& context) {
    row.outcome = AuditOutcome::unstable_in_service;
    row.change_worthwhile = row.proposal && weakness_of(row.proposal->margins).empty();
    row.reason = why_unstable(*row.in_service, context.process_gain) + beside(row, context);
}

void conclude_weak(AuditRow& row, const std::string& weakness, const AuditContext& context) {
    row.outcome = AuditOutcome::weak_in_service;
    row.change_worthwhile = row.proposal && weakness_of(row.proposal->margins).empty();
    row.reason = "in service " + weakness;
    const auto& f = row.in_service->figures;
    if (f && f->decay_ratio && *f->decay_ratio > much_ringing)
        row.reason += joined({", it oscillates (decay ratio ", brief(*f->decay_ratio), ")"});
    else if (f && f->overshoot_percent && *f->overshoot_percent > overshoot_points)
        row.reason += joined({", a step overshoots ", brief(*f->overshoot_percent), " %"});
    row.reason += beside(row, context);
}

void conclude_compared(AuditRow& row, double window) {
    const std::vector<Compared> list = compared(row, window);
    std::string better, worse;
    std::size_t told = 0;
    for (const Compared& c : list) {
        if (c.change == Change::better && told < 2) {
            better += (told++ > 0 ? ", " : "") + c.text;
        } else if (c.change == Change::worse && worse.empty()) {
            worse = c.text;
        }
    }
    const std::string Ms = joined({"Ms ", brief(*row.proposal->margins.max_sensitivity), " against ",
                                   brief(*row.in_service->margins.max_sensitivity), " in service"});
    if (!better.empty() && !worse.empty()) {
        row.outcome = AuditOutcome::trade_off;
        row.reason = joined({"no clear case: the proposal ", better, ", but ", worse, travel_note(row)});
    } else if (!better.empty()) {
        row.outcome = AuditOutcome::proposal_better;
        row.change_worthwhile = true;
        const bool told_Ms = better.find("Ms ") != std::string::npos;
        row.reason = joined({"the proposal ", better, told_Ms ? std::string() : "; " + Ms, travel_note(row)});
    } else if (!worse.empty()) {
        row.outcome = AuditOutcome::proposal_worse;
        row.reason = joined({"keep what is in service: the proposal ", worse});
    } else {
        row.outcome = AuditOutcome::no_case;
        row.reason = row.in_service->settings == row.proposal->settings
                         ? "no case for a change: the proposal is what is in service"
                         : joined({"no case for a change: figures within 10 % (", Ms, ")"});
    }
}

void conclude_failed(AuditRow& row, const AuditContext& context) {
    row.outcome = AuditOutcome::failed;
    if (row.in_service) {
        row.reason = "in service " + described(*row.in_service) + beside(row, context);
    } else if (row.proposal) {
        row.reason = "in service could not be judged; proposal " + described(*row.proposal);
    } else {
        row.reason = "nothing could be judged";
    }
}

}  // namespace

void conclude(AuditRow& row, const AuditContext& context) {
    if (row.code != error_code::ok) return conclude_failed(row, context);
    const Robustness& now = row.in_service->margins;
    if (now.verdict == Verdict::undetermined || (row.proposal && row.proposal->margins.verdict == Verdict::undetermined)) {
        row.outcome = AuditOutcome::undetermined;
        row.reason = joined({"whether the loop is stable could not be decided ",
                             now.verdict == Verdict::undetermined ? "in service" : "for the proposal"});
        return;
    }
    if (now.verdict != Verdict::stable) return conclude_unstable(row, context);
    const std::string weakness = weakness_of(now);
    if (!weakness.empty()) return conclude_weak(row, weakness, context);
    if (!row.proposal) {
        row.outcome = AuditOutcome::no_proposal;
        row.reason = "in service " + described(*row.in_service) + beside(row, context);
        return;
    }
    if (const std::string weak = weakness_of(row.proposal->margins); !weak.empty()) {
        row.outcome = AuditOutcome::proposal_worse;
        row.reason = joined({"keep what is in service (", described(*row.in_service), "): with the proposal ", weak});
        return;
    }
    conclude_compared(row, context.settling_window);
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
