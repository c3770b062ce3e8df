// What stands on a tuning sheet.
#include "convert.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/tune.h"

namespace shell = tauwright::shell;
using tauwright::Error;
using tauwright::error_code;
using tauwright::SheetController;
using tauwright::TuningSheet;

namespace {

[[noreturn]] void refuse_absent(const char* controller, const char* part) {
    throw Error(error_code::missing_argument, std::string("sheet has no ") + controller + " " + part +
                                                  "; ask tauw_sheet_summarize first");
}

const char* word_of(int32_t controller) { return controller == TAUW_SHEET_PROPOSED ? "proposed" : "as-found"; }

const SheetController& controller_of(const tauw_sheet* sheet, int32_t controller) {
    const TuningSheet& s = shell::live(sheet, "sheet").value;
    const auto which = shell::choice(controller, TAUW_SHEET_PROPOSED, "controller", "0 (as found), 1 (proposed)");
    const auto& chosen = which == TAUW_SHEET_PROPOSED ? s.proposed : s.as_found;
    if (!chosen) refuse_absent(word_of(controller), "settings");
    return *chosen;
}

// One text out of a list or an element of it.
template <class List, class Text>
int32_t text_at(const tauw_sheet* sheet, const List& list_of, const Text& text_of, size_t index, char* text,
                size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& item = shell::element(list_of(shell::live(sheet, "sheet").value), index);
        shell::give_text(text_of(item), text, capacity, needed);
    });
}

constexpr auto findings = [](const TuningSheet& s) -> const auto& { return s.fit.findings; };
constexpr auto obstacles = [](const TuningSheet& s) -> const auto& { return s.obstacles; };
constexpr auto message = [](const auto& item) -> const std::string& { return item.message; };
constexpr auto itself = [](const std::string& item) -> const std::string& { return item; };

std::string item_of(const TuningSheet& s, enum tauw_sheet_item item) {
    switch (item) {
        case TAUW_SHEET_LIBRARY_VERSION: return s.library_version;
        case TAUW_SHEET_LOOP_NAME: return s.loop_name;
        case TAUW_SHEET_SOURCE: return s.source;
        case TAUW_SHEET_FIRST_STAMP: return s.first_stamp;
        case TAUW_SHEET_INPUT_SHA256: return s.input_sha256;
        case TAUW_SHEET_GAIN_UNIT: return s.gain_unit;
        case TAUW_SHEET_SPEED_REASON: return s.speed ? s.speed->reason : std::string();
        case TAUW_SHEET_WEAK_MARGINS_ACCEPTED_BY: return s.weak_margins_accepted_by;
    }
    return {};
}

}  // namespace

int32_t tauw_sheet_summary_defaults(tauw_sheet_summary* summary, uint32_t size) {
    return shell::fill_defaults(summary, size);
}

int32_t tauw_sheet_summarize(const tauw_sheet* sheet, tauw_sheet_summary* summary, tauw_error* error) {
    return shell::guard(error, [&] {
        const TuningSheet& s = shell::live(sheet, "sheet").value;
        shell::Result<tauw_sheet_summary> result(summary, "summary");
        tauw_sheet_summary c = shell::blank<tauw_sheet_summary>();
        c.advice = static_cast<int32_t>(s.advice());
        c.has_model = s.model ? 1 : 0;
        c.has_speed = s.speed ? 1 : 0;
        c.has_as_found = s.as_found ? 1 : 0;
        c.has_as_found_entered = s.as_found && s.as_found->entered ? 1 : 0;
        c.has_as_found_figures = s.as_found && s.as_found->figures ? 1 : 0;
        c.has_proposed = s.proposed ? 1 : 0;
        c.has_proposed_entered = s.proposed && s.proposed->entered ? 1 : 0;
        c.has_proposed_figures = s.proposed && s.proposed->figures ? 1 : 0;
        if (s.speed) {
            c.time_constant = s.speed->time_constant;
            c.effective_dead_time = s.speed->effective_dead_time;
            c.half_scan = s.speed->half_scan;
            c.measurement_filter_time = s.speed->measurement_filter_time;
        }
        c.finding_count = s.fit.findings.size();
        c.obstacle_count = s.obstacles.size();
        c.withheld_count = s.withheld.size();
        c.caution_count = s.cautions.size();
        result.give(c);
    });
}

int32_t tauw_sheet_settings(const tauw_sheet* sheet, int32_t controller, tauw_pid_settings* settings,
                            tauw_error* error) {
    return shell::guard(error, [&] {
        const SheetController& chosen = controller_of(sheet, controller);
        shell::Result<tauw_pid_settings>(settings, "settings").give(shell::from(chosen.settings));
    });
}

int32_t tauw_sheet_entered(const tauw_sheet* sheet, int32_t controller, tauw_entered* entered, tauw_error* error) {
    return shell::guard(error, [&] {
        const SheetController& chosen = controller_of(sheet, controller);
        if (!chosen.entered) refuse_absent(word_of(controller), "numbers in a controller's form");
        shell::Result<tauw_entered>(entered, "entered").give(shell::from(*chosen.entered));
    });
}

int32_t tauw_sheet_margins(const tauw_sheet* sheet, int32_t controller, tauw_robustness* margins, tauw_error* error) {
    return shell::guard(error, [&] {
        const SheetController& chosen = controller_of(sheet, controller);
        shell::Result<tauw_robustness>(margins, "margins").give(shell::from(chosen.margins));
    });
}

int32_t tauw_sheet_figures(const tauw_sheet* sheet, int32_t controller, tauw_figures* figures, tauw_error* error) {
    return shell::guard(error, [&] {
        const SheetController& chosen = controller_of(sheet, controller);
        if (!chosen.figures) refuse_absent(word_of(controller), "figures of a trend");
        shell::Result<tauw_figures>(figures, "figures").give(shell::from(*chosen.figures));
    });
}

int32_t tauw_sheet_worst_case(const tauw_sheet* sheet, int32_t controller, tauw_worst_case* worst, tauw_error* error) {
    return shell::guard(error, [&] {
        const SheetController& chosen = controller_of(sheet, controller);
        if (!chosen.worst_case) refuse_absent(word_of(controller), "a worst case over the fit");
        shell::Result<tauw_worst_case>(worst, "worst").give(shell::from(*chosen.worst_case));
    });
}

int32_t tauw_sheet_valve_cycle(const tauw_sheet* sheet, int32_t controller, tauw_valve_cycle* cycle, tauw_error* error) {
    return shell::guard(error, [&] {
        const SheetController& chosen = controller_of(sheet, controller);
        if (!chosen.valve_cycle) refuse_absent(word_of(controller), "a valve with a fault in its duty");
        shell::Result<tauw_valve_cycle>(cycle, "cycle").give(shell::from(*chosen.valve_cycle));
    });
}

int32_t tauw_sheet_fit(const tauw_sheet* sheet, tauw_fit** fit, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_fit> made(fit, "fit");
        made.give(shell::live(sheet, "sheet").value.fit);
    });
}

int32_t tauw_sheet_model(const tauw_sheet* sheet, tauw_model** model, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_model> made(model, "model");
        const TuningSheet& s = shell::live(sheet, "sheet").value;
        if (s.model) made.give(*s.model);
    });
}

int32_t tauw_sheet_finding(const tauw_sheet* sheet, size_t index, tauw_finding* finding, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& f = shell::element(shell::live(sheet, "sheet").value.fit.findings, index);
        shell::Result<tauw_finding>(finding, "finding").give(shell::from(f));
    });
}

int32_t tauw_sheet_finding_message(const tauw_sheet* sheet, size_t index, char* text, size_t capacity, size_t* needed,
                                   tauw_error* error) {
    return text_at(sheet, findings, message, index, text, capacity, needed, error);
}

int32_t tauw_sheet_obstacle(const tauw_sheet* sheet, size_t index, tauw_obstacle* obstacle, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& o = shell::element(shell::live(sheet, "sheet").value.obstacles, index);
        shell::Result<tauw_obstacle>(obstacle, "obstacle").give(shell::from(o));
    });
}

int32_t tauw_sheet_obstacle_message(const tauw_sheet* sheet, size_t index, char* text, size_t capacity, size_t* needed,
                                    tauw_error* error) {
    return text_at(sheet, obstacles, message, index, text, capacity, needed, error);
}

int32_t tauw_sheet_obstacle_repair(const tauw_sheet* sheet, size_t index, char* text, size_t capacity, size_t* needed,
                                   tauw_error* error) {
    const auto repair = [](const tauwright::Obstacle& o) -> const std::string& { return o.repair; };
    return text_at(sheet, obstacles, repair, index, text, capacity, needed, error);
}

int32_t tauw_sheet_withheld(const tauw_sheet* sheet, size_t index, char* text, size_t capacity, size_t* needed,
                            tauw_error* error) {
    const auto withheld = [](const TuningSheet& s) -> const auto& { return s.withheld; };
    return text_at(sheet, withheld, itself, index, text, capacity, needed, error);
}

int32_t tauw_sheet_caution(const tauw_sheet* sheet, size_t index, char* text, size_t capacity, size_t* needed,
                           tauw_error* error) {
    const auto cautions = [](const TuningSheet& s) -> const auto& { return s.cautions; };
    return text_at(sheet, cautions, itself, index, text, capacity, needed, error);
}

int32_t tauw_sheet_item(const tauw_sheet* sheet, int32_t item, char* text, size_t capacity, size_t* needed,
                        tauw_error* error) {
    return shell::guard(error, [&] {
        const TuningSheet& s = shell::live(sheet, "sheet").value;
        const auto which = shell::choice(item, TAUW_SHEET_WEAK_MARGINS_ACCEPTED_BY, "item",
                                         "0 to 7, the constants of enum tauw_sheet_item");
        shell::give_text(item_of(s, which), text, capacity, needed);
    });
}
