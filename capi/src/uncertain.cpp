// What is not known of a process, the worst of it, and the share that violates limits.
#include <vector>

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/assess.h"
#include "tauwright/assess/worst_case.hpp"

namespace shell = tauwright::shell;
using tauwright::Error;
using tauwright::error_code;
using tauwright::Uncertainty;
using tauwright::UncertaintyKind;

TAUW_SAME(TAUW_UNCERTAINTY_BOX, UncertaintyKind::box);
TAUW_SAME(TAUW_UNCERTAINTY_CONFIDENCE_REGION, UncertaintyKind::confidence_region);
TAUW_SAME(TAUW_UNCERTAINTY_MODELS, UncertaintyKind::models);

namespace tauwright::shell {

template <>
tauw_worst_case_options fresh() noexcept {
    const WorstCaseOptions options;
    tauw_worst_case_options c = blank<tauw_worst_case_options>();
    c.extra_delay = options.extra_delay;
    c.tolerance = options.tolerance;
    c.most_boxes = options.most_boxes;
    return c;
}
template <>
tauw_worst_case fresh() noexcept {
    tauw_worst_case c = blank<tauw_worst_case>();
    c.verdict = TAUW_VERDICT_UNDETERMINED;
    return c;
}
template <>
tauw_violation_options fresh() noexcept {
    tauw_violation_options c = blank<tauw_violation_options>();
    c.members = 1000;
    c.seed = 1;
    return c;
}

}  // namespace tauwright::shell

namespace {

const Uncertainty& set_of(const tauw_uncertainty* uncertainty) {
    return shell::live(uncertainty, "uncertainty").value;
}

// A list of models stands in place of the nominal process.
const tauwright::TransferFunction& nominal(const tauw_model* process, const Uncertainty& set) {
    if (process == nullptr && set.kind() == UncertaintyKind::models) return set.models().front();
    return shell::live(process, "process").value;
}

tauwright::Progress progress_of(tauw_progress progress, void* context) {
    if (progress == nullptr) return {};
    return [progress, context](double share_done) {
        return shell::goes_on(progress(share_done, context), "options.progress");
    };
}

}  // namespace

tauw_worst_case tauwright::shell::from(const WorstCase& found) noexcept {
    tauw_worst_case c = shell::blank<tauw_worst_case>();
    c.verdict = static_cast<int32_t>(found.verdict);
    c.certified = found.certified ? 1 : 0;
    c.cancelled = found.cancelled ? 1 : 0;
    shell::set(found.max_sensitivity, c.has_max_sensitivity, c.max_sensitivity);
    shell::set(found.max_sensitivity_bound, c.has_max_sensitivity_bound, c.max_sensitivity_bound);
    shell::set(found.gain_margin, c.has_gain_margin, c.gain_margin);
    shell::set(found.gain_margin_bound, c.has_gain_margin_bound, c.gain_margin_bound);
    shell::set(found.phase_margin_deg, c.has_phase_margin_deg, c.phase_margin_deg);
    shell::set(found.phase_margin_deg_bound, c.has_phase_margin_deg_bound, c.phase_margin_deg_bound);
    shell::set(found.delay_margin, c.has_delay_margin, c.delay_margin);
    shell::set(found.delay_margin_bound, c.has_delay_margin_bound, c.delay_margin_bound);
    c.has_at_model = found.at_model ? 1 : 0;
    c.at_model = found.at_model.value_or(0);
    c.members_tried = found.members_tried;
    c.boxes_used = found.boxes_used;
    return c;
}

int32_t tauw_uncertainty_box_defaults(tauw_uncertainty_box* half_widths, uint32_t size) {
    return shell::fill_defaults(half_widths, size);
}
int32_t tauw_uncertainty_parts_defaults(tauw_uncertainty_parts* parts, uint32_t size) {
    return shell::fill_defaults(parts, size);
}
int32_t tauw_worst_case_options_defaults(tauw_worst_case_options* options, uint32_t size) {
    return shell::fill_defaults(options, size);
}
int32_t tauw_worst_case_defaults(tauw_worst_case* worst, uint32_t size) { return shell::fill_defaults(worst, size); }
int32_t tauw_violation_limits_defaults(tauw_violation_limits* limits, uint32_t size) {
    return shell::fill_defaults(limits, size);
}
int32_t tauw_violation_options_defaults(tauw_violation_options* options, uint32_t size) {
    return shell::fill_defaults(options, size);
}
int32_t tauw_violating_share_defaults(tauw_violating_share* share, uint32_t size) {
    return shell::fill_defaults(share, size);
}

const char* tauw_uncertainty_kind_name(int32_t kind) { return name_of(static_cast<UncertaintyKind>(kind)); }

int32_t tauw_uncertainty_of_box(const tauw_uncertainty_box* half_widths, tauw_uncertainty** uncertainty,
                                tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_uncertainty> made(uncertainty, "uncertainty");
        const tauw_uncertainty_box c = shell::read(half_widths, "half_widths");
        made.give(Uncertainty::box({.gain = c.gain,
                                    .lags = c.lags,
                                    .leads = c.leads,
                                    .damping = c.damping,
                                    .dead_time = c.dead_time,
                                    .absolute = shell::flag(c.absolute, "half_widths.absolute")}));
    });
}

int32_t tauw_uncertainty_from_fit(const tauw_fit* fit, double confidence, tauw_uncertainty** uncertainty,
                                  tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_uncertainty> made(uncertainty, "uncertainty");
        made.give(Uncertainty::from_fit(shell::live(fit, "fit").value, confidence));
    });
}

int32_t tauw_uncertainty_of_models(const tauw_model* const* models, size_t model_count,
                                   tauw_uncertainty** uncertainty, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_uncertainty> made(uncertainty, "uncertainty");
        const auto handles = shell::copied(models, model_count, "models");
        std::vector<tauwright::TransferFunction> list;
        list.reserve(handles.size());
        for (size_t i = 0; i < handles.size(); ++i)
            list.push_back(shell::live(handles[i], ("models[" + std::to_string(i) + "]").c_str()).value);
        made.give(Uncertainty::of_models(std::move(list)));
    });
}

int32_t tauw_uncertainty_view(const tauw_uncertainty* uncertainty, tauw_uncertainty_parts* parts, tauw_error* error) {
    return shell::guard(error, [&] {
        const Uncertainty& set = set_of(uncertainty);
        shell::Result<tauw_uncertainty_parts> result(parts, "parts");
        tauw_uncertainty_parts c = shell::blank<tauw_uncertainty_parts>();
        c.kind = static_cast<int32_t>(set.kind());
        c.confidence = set.confidence();
        c.model_count = set.models().size();
        c.parameter_count = set.estimates().size();
        c.estimates = set.estimates().data();
        c.half_axes = set.half_axes().data();
        result.give(c);
    });
}

int32_t tauw_uncertainty_half_widths(const tauw_uncertainty* uncertainty, tauw_uncertainty_box* half_widths,
                                     tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::UncertaintyBox& box = set_of(uncertainty).half_widths();
        shell::Result<tauw_uncertainty_box> result(half_widths, "half_widths");
        tauw_uncertainty_box c = shell::blank<tauw_uncertainty_box>();
        c.absolute = box.absolute ? 1 : 0;
        c.gain = box.gain;
        c.lags = box.lags;
        c.leads = box.leads;
        c.damping = box.damping;
        c.dead_time = box.dead_time;
        result.give(c);
    });
}

int32_t tauw_uncertainty_parameter_name(const tauw_uncertainty* uncertainty, size_t index, char* text,
                                        size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& name = shell::element(set_of(uncertainty).parameter_names(), index);
        shell::give_text(name, text, capacity, needed);
    });
}

int32_t tauw_uncertainty_model(const tauw_uncertainty* uncertainty, size_t index, tauw_model** model,
                               tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_model> made(model, "model");
        made.give(shell::element(set_of(uncertainty).models(), index));
    });
}

int32_t tauw_uncertainty_destroy(tauw_uncertainty** uncertainty) { return shell::destroy(uncertainty); }

int32_t tauw_worst_case_of(const tauw_model* process, const tauw_pid_settings* settings,
                           const tauw_uncertainty* uncertainty, const tauw_worst_case_options* options,
                           tauw_worst_case* worst, tauw_model** at, tauw_error* error) {
    return shell::guard(error, [&] {
        if (at != nullptr) *at = nullptr;
        const Uncertainty& set = set_of(uncertainty);
        const tauwright::TransferFunction& g = nominal(process, set);
        shell::Result<tauw_worst_case> result(worst, "worst");
        const tauw_worst_case_options c =
            options == nullptr ? shell::fresh<tauw_worst_case_options>() : shell::read(options, "options");
        const tauwright::WorstCase found =
            tauwright::worst_case(g, shell::settings(settings), set,
                                  {.extra_delay = c.extra_delay,
                                   .tolerance = c.tolerance,
                                   .most_boxes = c.most_boxes,
                                   .progress = progress_of(c.progress, c.context)});
        if (at != nullptr) shell::Made<tauw_model>(at, "at").give(found.at);
        result.give(shell::from(found));
    });
}

int32_t tauw_violating_share_of(const tauw_model* process, const tauw_pid_settings* settings,
                                const tauw_uncertainty* uncertainty, const tauw_violation_limits* limits,
                                const tauw_violation_options* options, tauw_violating_share* share,
                                tauw_error* error) {
    return shell::guard(error, [&] {
        const Uncertainty& set = set_of(uncertainty);
        const tauwright::TransferFunction& g = nominal(process, set);
        shell::Result<tauw_violating_share> result(share, "share");
        const tauw_violation_limits l = shell::read(limits, "limits");
        const tauwright::ViolationLimits keep{
            .max_sensitivity = shell::optional(l.has_max_sensitivity, l.max_sensitivity, "limits.max_sensitivity"),
            .gain_margin = shell::optional(l.has_gain_margin, l.gain_margin, "limits.gain_margin"),
            .phase_margin_deg = shell::optional(l.has_phase_margin_deg, l.phase_margin_deg, "limits.phase_margin_deg")};
        const tauw_violation_options c =
            options == nullptr ? shell::fresh<tauw_violation_options>() : shell::read(options, "options");
        const tauwright::ViolatingShare found =
            tauwright::violating_share(g, shell::settings(settings), set, keep, c.members, c.seed, c.extra_delay,
                                       progress_of(c.progress, c.context));
        tauw_violating_share out = shell::blank<tauw_violating_share>();
        out.cancelled = found.cancelled ? 1 : 0;
        out.share = found.share;
        out.standard_error = found.standard_error;
        out.members = found.members;
        out.unstable = found.unstable;
        result.give(out);
    });
}
