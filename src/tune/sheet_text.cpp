// The sheet as plain text for a notice board or a change record.
#include <algorithm>
#include <string>

#include "tauwright/tune/tuning_sheet.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

constexpr std::size_t width = 78, label_width = 26;

std::string shown(double x, int digits = 5) { return is_finite(x) ? text_of(x, digits) : "unknown"; }

class Page {
public:
    void title(const std::string& text) { out_ += text + "\n" + std::string(width, '=') + "\n"; }
    void section(const std::string& text) { out_ += "\n" + text + "\n" + std::string(width, '-') + "\n"; }
    void item(std::string label, const std::string& text) {
        label.resize(std::max(label_width, label.size() + 1), ' ');
        wrapped(label, text, label_width);
    }
    void bullet(const std::string& mark, const std::string& text) { wrapped(mark + " ", text, mark.size() + 1); }
    // Three columns: what, as found, proposed.
    void row(std::string label, std::string left, const std::string& right) {
        label.resize(std::max(label_width, label.size() + 1), ' ');
        left.resize(std::max<std::size_t>(24, left.size() + 1), ' ');
        line(label + left + right);
    }
    void line(std::string text) {
        while (!text.empty() && text.back() == ' ') text.pop_back();
        out_ += text + "\n";
    }
    std::string take() { return std::move(out_); }

private:
    void wrapped(const std::string& first, const std::string& text, std::size_t indent) {
        std::string current = first;
        std::size_t begin = 0;
        bool empty = true;
        while (begin < text.size()) {
            const std::size_t end = std::min(text.find(' ', begin), text.size());
            const std::string word = text.substr(begin, end - begin);
            if (!empty && current.size() + 1 + word.size() > width) {
                line(current);
                current.assign(indent, ' ');
                empty = true;
            }
            if (!empty) current += ' ';
            current += word;
            empty = false;
            begin = end + 1;
        }
        line(current);
    }
    std::string out_;
};

std::string with_error(const FittedModel& fit, double value, const char* key, const std::string& unit) {
    std::string text = shown(value);
    if (const auto error = fit.standard_error(key)) text += " +- " + shown(*error, 2);
    return unit.empty() ? text : text + " " + unit;
}

std::string unit_of(const std::optional<Range>& range, const char* fallback) {
    return range && !range->unit.empty() ? range->unit : fallback;
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

struct Cell {
    std::string label, text;
};

std::string optional_text(const std::optional<double>& x, const std::string& unit, const char* absent) {
    if (!x) return absent;
    if (!is_finite(*x)) return "no limit";
    return shown(*x) + (is_finite(*x) && !unit.empty() ? " " + unit : "");
}

// The fields as the controller shows them; without a form, the settings themselves.
std::vector<Cell> fields_of(const TuningSheet& s, const SheetController& c) {
    std::vector<Cell> cells;
    const auto add = [&](const char* label, const std::optional<double>& x, const std::string& unit) {
        // As keyed in: every digit.
        if (x) cells.push_back({label, text_of(*x) + (unit.empty() ? "" : " " + unit)});
    };
    const PidSettings& p = c.settings;
    if (!c.entered || !s.form) {
        cells.push_back({"Gain", shown(p.gain, 6) + " " + s.gain_unit});
        if (p.gain == 0.0) cells.push_back({"Integral gain", shown(p.integral_gain_per_s(), 6) + " 1/s"});
        else cells.push_back({"Integral time", p.integral_time ? shown(*p.integral_time, 6) + " s" : "none"});
        cells.push_back({"Derivative time", shown(p.derivative_time, 6) + " s"});
        if (p.derivative_time > 0.0) cells.push_back({"Derivative filter time", shown(p.filter_time, 6) + " s"});
    } else {
        const Entered& e = *c.entered;
        const std::string ti = s.form->integral_unit == TimeUnit::minutes ? "min" : "s";
        const std::string td = s.form->derivative_unit == TimeUnit::minutes ? "min" : "s";
        add("Gain", e.gain, s.form->gain_unit == GainUnit::percent
                                ? "%/%"
                                : unit_of(s.output_range, "output unit") + " per " + unit_of(s.process_value_range, "unit"));
        add("Proportional band", e.proportional_band, "%");
        add("Integral time", e.integral_time, ti);
        add("Repeats", e.repeats, "per " + ti);
        add("Integral gain", e.integral_gain, "per " + ti);
        add("Derivative time", e.derivative_time, td);
        add("Derivative gain", e.derivative_gain, td);
        add("Derivative filter time", e.filter_time, td);
        add("Derivative filter ratio", e.filter_ratio, "");
        cells.push_back({"Action", s.form->action_as == ActionAs::sign ? "by the sign of the gain" : name_of(e.action)});
    }
    add("Measurement filter", p.measurement_filter_time, "s");
    add("Set-point weight", p.setpoint_weight, "");
    return cells;
}

std::vector<Cell> margins_of(const SheetController& c) {
    const Robustness& m = c.margins;
    std::vector<Cell> cells{{"Verdict", name_of(m.verdict)},
                            {"Gain margin", optional_text(m.gain_margin, "", "-")},
                            {"Gain reduction margin", m.gain_reduction_margin == 0.0 ? "no limit" : optional_text(m.gain_reduction_margin, "", "-")},
                            {"Phase margin", optional_text(m.phase_margin_deg, "deg", "-")},
                            {"Delay margin", optional_text(m.delay_margin, "s", "-")},
                            {"Largest sensitivity Ms", optional_text(m.max_sensitivity, "", "-")},
                            {"Largest |T|, Mt", optional_text(m.max_complementary_sensitivity, "", "-")}};
    if (c.figures) {
        const Figures& f = *c.figures;
        if (f.overshoot_percent) {
            cells.push_back({"Overshoot", optional_text(f.overshoot_percent, "%", "-")});
            cells.push_back({"Settling time (2 %)", optional_text(f.settling_time, "s", "not in the trend")});
        }
        if (f.peak_load_error) cells.push_back({"Peak load error", optional_text(f.peak_load_error, "% of span", "-")});
        cells.push_back({"Integrated abs. error", shown(f.integrated_absolute_error) + " % s"});
        cells.push_back({"Valve travel", shown(f.valve_travel) + " %"});
    }
    return cells;
}

void write_side_by_side(Page& page, const std::vector<Cell>& found, const std::vector<Cell>& proposed) {
    std::vector<std::string> labels;
    for (const auto* list : {&proposed, &found})
        for (const Cell& c : *list)
            if (std::find(labels.begin(), labels.end(), c.label) == labels.end()) labels.push_back(c.label);
    const auto text = [](const std::vector<Cell>& list, const std::string& label) {
        const auto it = std::find_if(list.begin(), list.end(), [&](const Cell& c) { return c.label == label; });
        return it == list.end() ? std::string("-") : it->text;
    };
    for (const std::string& label : labels) page.row(label, text(found, label), text(proposed, label));
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
    const auto fields = [&](const std::optional<SheetController>& c) { return c ? fields_of(s, *c) : std::vector<Cell>{}; };
    const auto margins = [&](const std::optional<SheetController>& c) { return c ? margins_of(*c) : std::vector<Cell>{}; };
    page.row("", "as found (roll back to)", s.proposed ? "proposed: ENTER THESE" : "proposed");
    write_side_by_side(page, fields(s.as_found), fields(s.proposed));
    page.section("Margins of these numbers, with scan and every filter, and trend figures");
    page.row("", "as found", "proposed");
    write_side_by_side(page, margins(s.as_found), margins(s.proposed));
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
