#include "tauwright/tune/audit.hpp"

#include <algorithm>
#include <cmath>

#include "tauwright/model/forms.hpp"
#include "tauwright/synthesize/synthesize.hpp"
#include "tune/audit_reason.hpp"
#include "tune/default_speed.hpp"

namespace tauwright {
inline namespace v0 {

bool operator==(const AuditLoop&, const AuditLoop&) = default;
bool operator==(const AuditSide&, const AuditSide&) = default;
bool operator==(const AuditRow&, const AuditRow&) = default;

namespace {

constexpr int most_doublings = 6;
constexpr double most_scans = 1e6;  // more than a trend is worth, unless asked for

// That a form cannot hold settings is an outcome of the work, not bad input.
bool is_outcome(error_code code) {
    using enum error_code;
    return code == no_equivalent || code == action_would_be_lost || code == outside_field_limits;
}

void fail(AuditRow& row, std::string_view where, const Error& e) {
    if (row.code == error_code::ok) row.code = e.code();
    row.error += detail::joined({row.error.empty() ? "" : "; ", where, e.what()});
}

TransferFunction process_in_percent(const AuditLoop& loop) {
    if (!loop.process)
        throw Error(error_code::missing_argument, "process is not given; an audit needs the model of the process");
    if (loop.process_gain_unit == GainUnit::percent) return *loop.process;
    if (!loop.form || !loop.form->process_value_range || !loop.form->output_range)
        throw Error(error_code::missing_range,
                    "process_gain_unit is engineering, but form has not both ranges; give form.process_value_range and "
                    "form.output_range, or the gain in percent of span");
    return in_percent(*loop.process, *loop.form->process_value_range, *loop.form->output_range);
}

// What is in service as the controller computes it.
AuditSide side_in_service(const AuditLoop& loop) {
    if (loop.settings && loop.entered)
        throw Error(error_code::conflicting_arguments, "settings and entered are both given; give what is in service once");
    if (!loop.settings && !loop.entered)
        throw Error(error_code::missing_argument, "neither settings nor entered is given; give what is in service");
    AuditSide side;
    if (loop.entered) {
        if (!loop.form)
            throw Error(error_code::missing_argument,
                        "entered is given without form; the numbers mean nothing without the form they stand in");
        side.settings = settings_from(*loop.entered, *loop.form);
        side.entered = loop.entered;
        return side;
    }
    require(*loop.settings);
    side.settings = *loop.settings;
    if (!loop.form) return side;
    try {
        side.entered = entered_as(side.settings, *loop.form);
    } catch (const Error& e) {
        if (!is_outcome(e.code())) throw;
    }
    return side;
}

// The settings rounded to the form's display, where there is one.
AuditSide side_proposed(const PidSettings& settings, const std::optional<ControllerForm>& form) {
    require(settings, "proposal");
    AuditSide side{.settings = settings};
    if (!form) return side;
    side.entered = entered_as(settings, *form);
    side.settings = settings_from(*side.entered, *form);
    return side;
}

// How fast a proposal for the loop would be, and what stands in for its dead time.
struct Speed {
    double time_constant = 0.0;
    double effective_dead_time = 0.0;
};

Speed speed_of(const TransferFunction& process, const Duty& duty, double measurement_filter_time) {
    const Factors& f = process.factors();
    std::vector<double> lags;
    for (double T : f.lags) lags.push_back(std::abs(T));
    for (const QuadraticFactor& pair : f.lag_pairs) lags.insert(lags.end(), 2, pair.time_constant);
    std::sort(lags.begin(), lags.end(), std::greater<>());
    const double scan = duty.scan_time.value_or(0.0);
    Speed speed{.effective_dead_time = process.dead_time() + 0.5 * scan + measurement_filter_time};
    double slow = speed.effective_dead_time;  // what a PID cannot take out of the process acts like dead time
    for (std::size_t i = 2; i < lags.size(); ++i) slow += lags[i];
    for (double T : f.leads) slow += T < 0.0 ? -T : 0.0;
    speed.time_constant = detail::default_speed({.integrating = f.integrators > f.zeros_at_origin, .effective_dead_time = slow,
                                                 .lag = lags.empty() ? 0.0 : lags[0], .scan_time = scan})
                              .time_constant;
    return speed;
}

Synthesis default_synthesis(const TransferFunction& process, double time_constant) {
    try {
        return synthesize(process, {.time_constant = time_constant});
    } catch (const Error& e) {
        if (e.code() != error_code::unsupported_form) throw;
        throw Error(e.code(), detail::joined({"process is ", process.text(), "; one can be made for stable processes with at most "
                                              "one integrator and a gain at rest: give a proposal"}));
    }
}

std::optional<PidSettings> settings_at(const TransferFunction& process, const AuditLoop& loop, const Speed& speed,
                                       const PidSettings& in_service) {
    const double D = speed.effective_dead_time;
    const Synthesis synthesis = default_synthesis(process.with_dead_time(D), speed.time_constant);
    if (!synthesis.settings) return std::nullopt;
    PidSettings s = *synthesis.settings;
    if (process.integrators() == 0 && s.derivative_time == 0.0) detail::limit_integral_time(s, speed.time_constant, D);
    if (s.derivative_time > 0.0 && s.filter_time == 0.0) {
        const auto fixed = loop.form ? loop.form->fixed_filter : std::nullopt;
        s.filter_time = 0.1 * s.derivative_time;
        if (fixed && loop.form->filter_as == FilterAs::ratio) s.filter_time = s.derivative_time / *fixed;
        if (fixed && loop.form->filter_as == FilterAs::time) s.filter_time = *fixed * detail::seconds_in(loop.form->derivative_unit);
    }
    s.measurement_filter_time = std::max(s.measurement_filter_time, in_service.measurement_filter_time);
    s.setpoint_weight = in_service.setpoint_weight;
    return s;
}

struct Proposal {
    std::optional<AuditSide> side = {};
    std::string withheld = {};  ///< why there is none
};

// A proposal at `speed`, slowed down until its margins are not weak.
Proposal proposal_for(const TransferFunction& process, const AuditLoop& loop, const PidSettings& in_service, Speed& speed) {
    if (!is_finite(speed.time_constant) || !(speed.time_constant > 0.0))
        return {.withheld = "no closed-loop time constant follows from this model; give a scan time or a proposal"};
    Proposal proposal;
    Speed tried = speed;
    for (int i = 0; i <= most_doublings; ++i, tried.time_constant *= 2.0) {
        const std::optional<PidSettings> settings = settings_at(process, loop, tried, in_service);
        if (!settings) {
            proposal.withheld = "no P, PI or PID gives a response that this process allows";
            continue;
        }
        try {
            AuditSide side = side_proposed(*settings, loop.form);
            side.margins = robustness(process, side.settings, {.scan_time = loop.duty.scan_time});
            proposal.withheld = detail::weakness_of(side.margins);
            if (!proposal.withheld.empty()) continue;
            proposal.side = std::move(side);
            speed = tried;
            return proposal;
        } catch (const Error& e) {
            if (!is_outcome(e.code())) throw;
            proposal.withheld = detail::joined({"the controller cannot hold it: ", e.what()});
        }
    }
    return proposal;
}

bool all_finite(const Figures& f) {
    for (const auto& x : {f.overshoot_percent, f.settling_time, f.peak_load_error, f.rise_time, f.decay_ratio, f.peak_load_error_time})
        if (!is_finite(x.value_or(0.0))) return false;
    for (double x : {f.integrated_absolute_error, f.valve_travel, f.integrated_squared_error, f.integrated_time_absolute_error,
                     f.integrated_error, f.time_at_limits})
        if (!is_finite(x)) return false;
    return true;
}

void add_figures(AuditRow& row, const TransferFunction& process, const AuditLoop& loop, const Speed& speed) {
    const Duty& duty = loop.duty;
    if (!duty.scan_time || (duty.setpoint_step == 0.0 && duty.load_step == 0.0 && duty.disturbance.empty())) return;
    const double horizon = loop.horizon.value_or(detail::horizon_for(duty, speed.time_constant, speed.effective_dead_time));
    if (!loop.horizon && !(horizon <= most_scans * *duty.scan_time)) return;
    for (auto* side : {&row.in_service, &row.proposal}) {
        if (!*side || (*side)->margins.verdict != Verdict::stable) continue;
        const Trend trend = simulate(process, (*side)->settings, duty, horizon);
        const Figures found = figures(trend);
        if (trend.ran_away || !all_finite(found))
            detail::refuse(error_code::out_of_domain, "horizon", horizon,
                           "the trend runs away within it: give a shorter one, or smaller steps");
        (*side)->figures = found;
        row.horizon = horizon;
    }
}

// Runs one part of the work; what it throws goes to the row.
template <class Part>
bool attempt(AuditRow& row, const char* where, Part part) {
    try {
        part();
        return true;
    } catch (const Error& e) {
        fail(row, where, e);
        return false;
    }
}

}  // namespace

AuditRow audit(const AuditLoop& loop) {
    AuditRow row;
    row.name = loop.name;
    row.form = loop.form;
    std::optional<TransferFunction> process;
    detail::AuditContext context;
    const bool sound = attempt(row, "", [&] {
        process = process_in_percent(loop);
        check(loop.duty);
        if (loop.horizon) detail::require_positive("horizon", *loop.horizon);
        if (loop.form) check(*loop.form);
    });
    if (!sound) {
        detail::conclude(row, context);
        return row;
    }
    attempt(row, "in service: ", [&] {
        AuditSide side = side_in_service(loop);
        side.margins = robustness(*process, side.settings, {.scan_time = loop.duty.scan_time});
        row.in_service = std::move(side);
    });
    const PidSettings in_service = row.in_service ? row.in_service->settings : PidSettings{};
    Speed speed = speed_of(*process, loop.duty, in_service.measurement_filter_time);
    attempt(row, "proposal: ", [&] {
        if (loop.proposal) {
            AuditSide side = side_proposed(*loop.proposal, loop.form);
            side.margins = robustness(*process, side.settings, {.scan_time = loop.duty.scan_time});
            row.proposal = std::move(side);
        } else {
            Proposal made = proposal_for(*process, loop, in_service, speed);
            row.proposal_made = made.side.has_value();
            row.proposal = std::move(made.side);
            context.withheld = std::move(made.withheld);
        }
    });
    attempt(row, "trend: ", [&] { add_figures(row, *process, loop, speed); });
    if (process->unstable_poles() == 0) context.process_gain = process->gain();
    // A load step later on is another story than the set-point step, as in `figures`.
    const bool load_follows = loop.duty.load_step != 0.0 && loop.duty.load_time > 0.0;
    context.settling_window = load_follows ? std::min(loop.duty.load_time, row.horizon) : row.horizon;
    detail::conclude(row, context);
    return row;
}

}  // namespace v0
}  // namespace tauwright
