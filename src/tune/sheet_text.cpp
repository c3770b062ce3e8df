// The sheet as plain text for a notice board or a change record.
#include <algorithm>
#include <string>

#include "tauwright/tune/tuning_sheet.hpp"
#include "tune/controller_cells.hpp"
#include "tune/fit_worst_case.hpp"
#include "tune/page.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;

std::string with_error(const FittedModel& fit, double value, const char* key, const std::string& unit) {
    std::string text = shown(value);
    if (const auto error = fit.standard_error(key)) text += " +- " + shown(*error, 2);
    return unit.empty() ? text : text + " " + unit;
}

void write_input(Page& page, const TuningSheet& s) {
    page.title("Tuning sheet" + (s.loop_name.empty() ? std::string() : ": " + s.loop_name));
    page.item("Record", s.source.empty() ? "arrays" : s.source);
    if (!s.first_stamp.empty()) page.item("Begins", s.first_stamp);
    page.item("SHA-256 of the input", "");
    page.line("    " + s.input_sha256);
    const auto range = [](const std::optional<Range>& r) {
        return r ? shown(r->low) + " to " + shown(r->high) + (r->unit.empty() ? "" : " " + r->unit) : std::string("not given");
    };
    page.item("Process value range", range(s.process_value_range));
    page.item("Output range", range(s.output_range));
    page.item("Library", "tauwright " + s.library_version);
}

void write_model(Page& page, const TuningSheet& s) {
    const FittedModel& fit = s.fit;
    page.section("What the record says");
    page.item("Advice", name_of(s.advice()));
    if (s.findings().empty()) page.item("Findings", "none");
    for (const Finding& f : s.findings())
        page.item(name_of(f.code), f.message + " (samples " + std::to_string(f.first + 1) + " to " + std::to_string(f.last + 1) + " of the record)");
    if (!fit.model) return;
    const std::string pv = unit_of(s.process_value_range, "process-value unit"), op = unit_of(s.output_range, "output unit");
    const bool integrating = fit.form == Form::integrating_plus_dead_time;
    page.section("The process (valve, process and transmitter as one), +- one standard error");
    page.item("Form", std::string(name_of(fit.form)) + " (" + fit.form_reason + ")");
    page.item(integrating ? "Slope" : "Gain",
              with_error(fit, fit.gain, integrating ? "slope" : "gain", pv + (integrating ? "/s per " : " per ") + op));
    if (s.gain_unit == "%/%" && s.model)
        page.item("", shown(s.model->gain()) + (integrating ? " %/s per %" : " %/% of span"));
    if (!integrating) page.item("Lag", with_error(fit, fit.lags[0], "lag_1", "s"));
    page.item("Dead time", with_error(fit, fit.dead_time, "dead_time", "s"));
    page.item("Residual", shown(fit.residual_rms, 3) + " " + pv + " rms over " + std::to_string(fit.samples_used) +
                              " samples; R squared " + shown(fit.r_squared) +
                              (fit.residual_correlation > 0.0 ? "; neighbors correlated by " + shown(fit.residual_correlation, 2) +
                                                                    ", standard errors widened for it"
                                                              : ""));
    page.item("Range tested", "output " + shown(fit.tested_output.low) + " to " + shown(fit.tested_output.high) + " " + op +
                                  ", process value " + shown(fit.tested_process_value.low) + " to " +
                                  shown(fit.tested_process_value.high) + " " + pv);
    page.item("Response", shown(fit.response_to_noise, 3) + " times the noise (standard deviation)");
    for (std::size_t i = 0; i < fit.moves.size(); ++i)
        page.item("Move " + std::to_string(i + 1) + " alone", (fit.moves[i].size > 0 ? "+" : "") + shown(fit.moves[i].size) + " " +
                                                                 op + ": " + shown(fit.moves[i].gain) + " +- " +
                                                                 shown(fit.moves[i].standard_error, 2));
}

void write_speed(Page& page, const TuningSheet& s) {
    if (!s.speed) return;
    const SpeedChoice& v = *s.speed;
    page.section("The response asked for");
    page.item("Closed-loop time constant", shown(v.time_constant) + " s (" + v.reason + ")");
    page.item("Effective dead time", shown(v.effective_dead_time) + " s = dead time " + shown(s.fit.dead_time) + " + half a scan " +
                                         shown(v.half_scan) + " + filter " + shown(v.measurement_filter_time));
    page.item("Settings", "follow from the model with the effective dead time in place of its own; the margins below are those of "
                          "the model itself");
    if (v.integral_time_limited)
        page.item("Integral time", "limited to 4 (time constant + effective dead time) = " +
                                       shown(4.0 * (v.time_constant + v.effective_dead_time)) +
                                       " s, so that the response to a load does not drag");
    const Duty& d = s.duty;
    page.item("Scan time", d.scan_time ? shown(*d.scan_time) + " s" : "not given");
    page.item("Output limits", shown(d.output_low) + " to " + shown(d.output_high) + " %");
    if (d.scan_time && (d.setpoint_step != 0.0 || d.load_step != 0.0))
        page.item("Trends", "set-point step " + shown(d.setpoint_step) + " % of span at 0 s; load step " + shown(d.load_step) +
                                " % of output at " + shown(d.load_time) + " s; measurement noise " + shown(d.noise) +
                                " % (standard deviation); from output " + shown(d.resting_output()) + " % and process value " +
                                shown(d.resting_process_value()) + " % of span");
    for (const Obstacle& o : s.obstacles)
        page.item(name_of(o.code), std::string(name_of(o.severity)) + ": " + o.message + ". Instead: " + o.repair);
}

void write_controllers(Page& page, const TuningSheet& s) {
    page.section("Settings");
    if (!s.form) page.item("Controller", "ideal form, Kc (e + 1/Ti integral e + Td de/dt), since no form was given");
    if (s.form)
        page.item("Controller", std::string(name_of(s.form->equation)) + " form; proportional on " + name_of(s.form->proportional_on) +
                                    ", derivative on " + name_of(s.form->derivative_on));
    if (!s.withheld.empty()) {
        page.line("NO SETTINGS ARE GIVEN:");
        for (const std::string& reason : s.withheld) page.bullet("  *", reason);
    }
    if (!s.as_found && !s.proposed) return;
    const auto fields = [&](const std::optional<SheetController>& c) {
        return c ? setting_cells(c->settings, c->entered, s.form, s.gain_unit) : std::vector<Cell>{};
    };
    const auto margins = [&](const std::optional<SheetController>& c) {
        return c ? margin_cells(c->margins, c->figures) : std::vector<Cell>{};
    };
    page.row("", "as found (roll back to)", s.proposed ? "proposed: ENTER THESE" : "proposed");
    write_side_by_side(page, fields(s.as_found), fields(s.proposed));
    page.section("Margins of these numbers, with scan and every filter, and trend figures");
    page.row("", "as found", "proposed");
    write_side_by_side(page, margins(s.as_found), margins(s.proposed));
    const auto worst = [](const std::optional<SheetController>& c) { return c ? worst_case_cells(c->worst_case) : std::vector<Cell>{}; };
    if (worst(s.as_found).empty() && worst(s.proposed).empty()) return;
    page.section("Worst case over the fit's 95 % confidence region, half a scan for the sampling");
    page.row("", "as found", "proposed");
    write_side_by_side(page, worst(s.as_found), worst(s.proposed));
}

}  // namespace

std::string TuningSheet::text() const {
    Page page;
    write_input(page, *this);
    write_model(page, *this);
    write_speed(page, *this);
    write_controllers(page, *this);
    page.section("Cautions");
    for (std::size_t i = 0; i < cautions.size(); ++i) page.bullet(std::to_string(i + 1) + ".", cautions[i]);
    page.section("Change record");
    for (const char* line : {"As-left values entered", "Reason for the change", "Approved by, date, time, zone", "Review on"})
        page.line(std::string(line) + std::string(34 - std::string(line).size(), ' ') + std::string(44, '_'));
    return page.take();
}

}  // namespace v0
}  // namespace tauwright
