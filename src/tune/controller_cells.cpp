#include "tune/controller_cells.hpp"

#include <algorithm>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

std::string optional_text(const std::optional<double>& x, const std::string& unit, const char* absent) {
    if (!x) return absent;
    if (!is_finite(*x)) return "no limit";
    return shown(*x) + (is_finite(*x) && !unit.empty() ? " " + unit : "");
}

}  // namespace

std::string unit_of(const std::optional<Range>& range, const char* fallback) {
    return range && !range->unit.empty() ? range->unit : fallback;
}

std::vector<Cell> setting_cells(const PidSettings& p, const std::optional<Entered>& entered, const std::optional<ControllerForm>& form,
                                const std::string& gain_unit) {
    std::vector<Cell> cells;
    const auto add = [&](const char* label, const std::optional<double>& x, const std::string& unit) {
        // As keyed in: every digit.
        if (x) cells.push_back({label, text_of(*x) + (unit.empty() ? "" : " " + unit)});
    };
    if (!entered || !form) {
        cells.push_back({"Gain", shown(p.gain, 6) + " " + gain_unit});
        if (p.gain == 0.0) cells.push_back({"Integral gain", shown(p.integral_gain_per_s(), 6) + " 1/s"});
        else cells.push_back({"Integral time", p.integral_time ? shown(*p.integral_time, 6) + " s" : "none"});
        cells.push_back({"Derivative time", shown(p.derivative_time, 6) + " s"});
        if (p.derivative_time > 0.0) cells.push_back({"Derivative filter time", shown(p.filter_time, 6) + " s"});
    } else {
        const Entered& e = *entered;
        const std::string ti = form->integral_unit == TimeUnit::minutes ? "min" : "s";
        const std::string td = form->derivative_unit == TimeUnit::minutes ? "min" : "s";
        add("Gain", e.gain, form->gain_unit == GainUnit::percent
                                ? "%/%"
                                : unit_of(form->output_range, "output unit") + " per " + unit_of(form->process_value_range, "unit"));
        add("Proportional band", e.proportional_band, "%");
        add("Integral time", e.integral_time, ti);
        add("Repeats", e.repeats, "per " + ti);
        add("Integral gain", e.integral_gain, "per " + ti);
        add("Derivative time", e.derivative_time, td);
        add("Derivative gain", e.derivative_gain, td);
        add("Derivative filter time", e.filter_time, td);
        add("Derivative filter ratio", e.filter_ratio, "");
        cells.push_back({"Action", form->action_as == ActionAs::sign ? "by the sign of the gain" : name_of(e.action)});
    }
    add("Measurement filter", p.measurement_filter_time, "s");
    add("Set-point weight", p.setpoint_weight, "");
    return cells;
}

std::vector<Cell> margin_cells(const Robustness& m, const std::optional<Figures>& figures) {
    std::vector<Cell> cells{{"Verdict", name_of(m.verdict)},
                            {"Gain margin", optional_text(m.gain_margin, "", "-")},
                            {"Gain reduction margin", m.gain_reduction_margin == 0.0 ? "no limit" : optional_text(m.gain_reduction_margin, "", "-")},
                            {"Phase margin", optional_text(m.phase_margin_deg, "deg", "-")},
                            {"Delay margin", optional_text(m.delay_margin, "s", "-")},
                            {"Largest sensitivity Ms", optional_text(m.max_sensitivity, "", "-")},
                            {"Largest |T|, Mt", optional_text(m.max_complementary_sensitivity, "", "-")}};
    if (figures) {
        const Figures& f = *figures;
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

std::vector<Cell> further_cells(const std::optional<Figures>& figures) {
    if (!figures) return {};
    const Figures& f = *figures;
    std::vector<Cell> cells;
    if (f.overshoot_percent) cells.push_back({"Rise time (10 to 90 %)", optional_text(f.rise_time, "s", "not in the trend")});
    cells.push_back({"Decay ratio", optional_text(f.decay_ratio, "", "-")});
    if (f.peak_load_error_time) cells.push_back({"Peak load error after", optional_text(f.peak_load_error_time, "s", "-")});
    cells.push_back({"Integrated error", shown(f.integrated_error) + " % s"});
    cells.push_back({"Integrated squared error", shown(f.integrated_squared_error) + " %^2 s"});
    cells.push_back({"Integr. time-abs. error", shown(f.integrated_time_absolute_error) + " % s^2"});
    cells.push_back({"Valve reversals", std::to_string(f.reversals)});
    cells.push_back({"Time at output limits", shown(f.time_at_limits) + " s"});
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

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
