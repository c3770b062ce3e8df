#include "tune/fit_worst_case.hpp"

#include "tune/default_speed.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double confidence = 0.95;

std::string short_text(double x) { return text_of(x, 4); }

// Backward integration acts half a scan early: as much again of proportional action, the integral gain as it is.
PidSettings as_it_works(PidSettings settings, double scan_time) {
    if (!settings.integral_time) return settings;
    const double share = 1.0 + 0.5 * scan_time / *settings.integral_time;
    settings.gain *= share;
    settings.integral_time = *settings.integral_time * share;
    settings.derivative_time /= share;
    return settings;
}

}  // namespace

std::optional<WorstCase> worst_over_fit(const TuningSheet& sheet, const PidSettings& settings) {
    std::optional<Uncertainty> region;
    try {
        region = Uncertainty::from_fit(sheet.fit, confidence);
    } catch (const Error& e) {
        using enum error_code;
        if (e.code() != out_of_domain && e.code() != not_finite && e.code() != missing_argument) throw;
        return std::nullopt;  // an outcome of the record, not of the settings
    }
    const double scan = sheet.duty.scan_time.value_or(0.0);
    return worst_case(*sheet.model, as_it_works(settings, scan), *region, {.extra_delay = 0.5 * scan, .tolerance = 1e-3, .most_boxes = 20'000});
}

std::string weakness_of(const std::optional<WorstCase>& worst) {
    if (!worst || worst->verdict == Verdict::undetermined) return {};
    Robustness margins;
    margins.verdict = worst->verdict;
    margins.max_sensitivity = worst->max_sensitivity;
    margins.gain_margin = worst->gain_margin;
    margins.phase_margin_deg = worst->phase_margin_deg;
    const std::string weak = weakness_of(margins);
    return weak.empty() ? weak : "within the fit's 95 % confidence region, " + weak;
}

std::vector<Cell> worst_case_cells(const std::optional<WorstCase>& worst) {
    if (!worst) return {};
    const auto text = [](const std::optional<double>& x, const char* unit) {
        return x ? is_finite(*x) ? short_text(*x) + unit : std::string("no limit") : std::string("-");
    };
    return {{"Verdict", std::string(name_of(worst->verdict)) + (worst->certified ? ", proved" : ", not proved")},
            {"Gain margin", text(worst->gain_margin, "")},
            {"Phase margin", text(worst->phase_margin_deg, " deg")},
            {"Delay margin", text(worst->delay_margin, " s")},
            {"Largest sensitivity Ms", text(worst->max_sensitivity, "")}};
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
