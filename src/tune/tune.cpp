#include "tauwright/tune/tune.hpp"

#include <algorithm>
#include <cmath>

#include "tauwright/core/version.hpp"
#include "tauwright/model/forms.hpp"
#include "tune/cautions.hpp"
#include "tune/default_speed.hpp"
#include "tune/fit_worst_case.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

// The range that record and form agree on.
std::optional<Range> agreed(const std::optional<Range>& record, const std::optional<Range>& form, const char* name) {
    if (record && form && (record->low != form->low || record->high != form->high))
        throw Error(error_code::conflicting_arguments,
                    std::string("form.") + name + " is " + text_of(form->low) + " to " + text_of(form->high) +
                        ", the record's is " + text_of(record->low) + " to " + text_of(record->high) +
                        "; a re-ranged loop needs a new test, or correct one of them");
    return record ? record : form;
}

// Argument checks, and everything on the sheet that is known before the fit.
TuningSheet opened(const Record& record, const TuningRequest& request) {
    if (request.safety_function)
        throw Error(error_code::safety_function,
                    "request.safety_function is true; settings for safety functions are not given: follow the site's "
                    "functional-safety procedure");
    if (request.time_constant) detail::require_positive("request.time_constant", *request.time_constant);
    if (request.duty) check(*request.duty);
    if (request.as_found && !request.form)
        throw Error(error_code::missing_argument,
                    "request.as_found is given without request.form; the numbers mean nothing without the form they stand in");
    TuningSheet sheet;
    sheet.library_version = version;
    sheet.loop_name = request.loop_name;
    sheet.source = record.source();
    sheet.first_stamp = record.first_stamp();
    sheet.input_sha256 = record.sha256();
    sheet.duty = request.duty.value_or(Duty{});
    sheet.form = request.form;
    sheet.process_value_range = record.process_value_range();
    sheet.output_range = record.output_range();
    if (sheet.form) {
        sheet.process_value_range = agreed(sheet.process_value_range, sheet.form->process_value_range, "process_value_range");
        sheet.output_range = agreed(sheet.output_range, sheet.form->output_range, "output_range");
        if (!sheet.process_value_range || !sheet.output_range)
            throw Error(error_code::missing_range,
                        std::string(sheet.process_value_range ? "output_range" : "process_value_range") +
                            " is not given; settings in a controller's form need both ranges: give them with the record or the form");
        sheet.form->process_value_range = sheet.process_value_range;
        sheet.form->output_range = sheet.output_range;
        check(*sheet.form);
    }
    const bool percent = sheet.process_value_range && sheet.output_range;
    sheet.gain_unit = percent ? "%/%" : "output unit/process-value unit";
    return sheet;
}

void express_model(TuningSheet& sheet) {
    if (!sheet.fit.model) return;
    const bool percent = sheet.process_value_range && sheet.output_range;
    sheet.model = percent ? in_percent(*sheet.fit.model, *sheet.process_value_range, *sheet.output_range) : *sheet.fit.model;
    // The trends start where the test did.
    if (!sheet.duty.rest_output && percent) {
        // Kept inside the limits: a test may start with the output on one of them.
        const double first = sheet.output_range->to_percent(sheet.fit.first_output);
        sheet.duty.rest_output = std::clamp(first, sheet.duty.output_low, sheet.duty.output_high);
    }
    if (!sheet.duty.rest_process_value && percent)
        sheet.duty.rest_process_value = sheet.process_value_range->to_percent(sheet.fit.offset);
}

SpeedChoice choose_speed(const TuningSheet& sheet, const TuningRequest& request) {
    const FittedModel& fit = sheet.fit;
    SpeedChoice speed;
    const double scan = sheet.duty.scan_time.value_or(0.0);
    speed.half_scan = 0.5 * scan;
    speed.measurement_filter_time = request.as_found ? request.as_found->measurement_filter_time : 0.0;
    const double D = speed.effective_dead_time = fit.dead_time + speed.half_scan + speed.measurement_filter_time;
    if (request.time_constant) {
        speed.time_constant = *request.time_constant;
        speed.reason = "asked for";
        return speed;
    }
    const detail::DefaultSpeed chosen =
        detail::default_speed({.integrating = fit.form == Form::integrating_plus_dead_time, .effective_dead_time = D,
                               .lag = fit.lags.empty() ? 0.0 : fit.lags[0], .scan_time = scan,
                               .dead_time_error = fit.standard_error("dead_time")});
    speed.time_constant = chosen.time_constant;
    speed.reason = chosen.reason;
    return speed;
}

// Settings from the model with the effective dead time in place of its own.
std::optional<PidSettings> designed(TuningSheet& sheet) {
    const SpeedChoice& speed = *sheet.speed;
    const double D = speed.effective_dead_time;
    const Synthesis synthesis =
        synthesize(sheet.model->with_dead_time(D), {.time_constant = speed.time_constant});
    sheet.obstacles = synthesis.obstacles;
    if (!synthesis.settings) return std::nullopt;
    PidSettings settings = *synthesis.settings;
    settings.measurement_filter_time = speed.measurement_filter_time;
    if (sheet.fit.form == Form::first_order_plus_dead_time && detail::limit_integral_time(settings, speed.time_constant, D)) {
        sheet.speed->integral_time_limited = true;
        // The lag is no longer cancelled, so the load response does not drag.
        std::erase_if(sheet.obstacles, [](const Obstacle& o) { return o.code == ObstacleCode::slow_pole_cancelled; });
    }
    return settings;
}

std::optional<Figures> figures_of(const TuningSheet& sheet, const PidSettings& settings) {
    const Duty& duty = sheet.duty;
    const bool percent = sheet.process_value_range && sheet.output_range;
    if (!duty.scan_time || !percent || (duty.setpoint_step == 0.0 && duty.load_step == 0.0 && duty.disturbance.empty())) return std::nullopt;
    const double horizon = trend_horizon(sheet);
    if (horizon > 1e6 * *duty.scan_time) return std::nullopt;  // more scans than a trend is worth
    return figures(simulate(*sheet.model, settings, duty, horizon));
}

SheetController assessed(const TuningSheet& sheet, const PidSettings& settings, const std::optional<Entered>& entered) {
    SheetController c{.settings = settings, .entered = entered};
    c.margins = robustness(*sheet.model, settings, {.scan_time = sheet.duty.scan_time});
    if (c.margins.verdict == Verdict::stable) {
        c.figures = figures_of(sheet, settings);
        c.worst_case = detail::worst_over_fit(sheet, settings);
    }
    const ValveSettings& valve = sheet.duty.valve;
    if (valve.dead_band > 0.0 || valve.stick > 0.0 || valve.resolution > 0.0) c.valve_cycle = valve_cycle(*sheet.model, settings, valve);
    return c;
}

void propose(TuningSheet& sheet, const TuningRequest& request) {
    std::optional<PidSettings> settings = designed(sheet);
    if (!settings) {
        sheet.withheld.push_back("no P, PI or PID gives the response asked for; see the obstacles");
        return;
    }
    std::optional<Entered> entered;
    if (sheet.form) {
        try {
            entered = entered_as(*settings, *sheet.form);
            settings = settings_from(*entered, *sheet.form);
        } catch (const Error& e) {
            using enum error_code;
            if (e.code() != no_equivalent && e.code() != action_would_be_lost && e.code() != outside_field_limits) throw;
            // That this form cannot hold the settings is an outcome of the work, not bad input.
            sheet.withheld.push_back(std::string("the controller cannot hold the settings: ") + e.what());
            return;
        }
    }
    const SheetController proposal = assessed(sheet, *settings, entered);
    std::string weakness = detail::weakness_of(proposal.margins);
    if (weakness.empty()) weakness = detail::weakness_of(proposal.worst_case);
    if (!weakness.empty()) {
        if (proposal.margins.verdict != Verdict::stable || request.accept_weak_margins_by.empty()) {
            sheet.withheld.push_back(weakness + (proposal.margins.verdict == Verdict::stable
                                                     ? "; ask for a slower time constant, or name who accepts weak margins"
                                                     : "; ask for a slower time constant"));
            return;
        }
        sheet.weak_margins_accepted_by = request.accept_weak_margins_by;
    }
    sheet.proposed = proposal;
}

}  // namespace

double trend_horizon(const TuningSheet& sheet) {
    if (!sheet.speed) return 0.0;
    return detail::horizon_for(sheet.duty, sheet.speed->time_constant, sheet.speed->effective_dead_time);
}

TuningSheet tune(const Record& record, const TuningRequest& request) {
    TuningSheet sheet = opened(record, request);
    std::optional<PidSettings> as_found;
    if (request.as_found) as_found = settings_from(*request.as_found, *sheet.form);
    sheet.fit = identify(record, request.identify);
    express_model(sheet);
    for (const Finding& f : sheet.findings())
        if (f.advice > Advice::tune_with_care) sheet.withheld.push_back(f.message);
    if (sheet.model) {
        sheet.speed = choose_speed(sheet, request);
        if (const double tau_c = sheet.speed->time_constant; !is_finite(tau_c) || !(tau_c > 0.0))
            sheet.withheld.push_back("no closed-loop time constant follows from this model (it would be " + text_of(tau_c) +
                                     " s); ask for one, or give a scan time");
        if (as_found) sheet.as_found = assessed(sheet, *as_found, request.as_found);
        if (sheet.withheld.empty()) propose(sheet, request);
    } else if (sheet.withheld.empty()) {
        sheet.withheld.push_back("no model could be fitted");
    }
    sheet.cautions = detail::cautions_for(sheet);
    return sheet;
}

}  // namespace v0
}  // namespace tauwright
