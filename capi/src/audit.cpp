// Audits: loops from the caller's structs, streams through the caller's functions, rows handed out.
#include "tauwright/tune/audit.hpp"

#include <cstddef>
#include <cstdint>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/tune.h"

namespace shell = tauwright::shell;
using tauwright::AuditLoop;
using tauwright::AuditOutcome;
using tauwright::AuditRow;
using tauwright::AuditSide;
using tauwright::Error;
using tauwright::error_code;

TAUW_SAME(TAUW_AUDIT_FAILED, AuditOutcome::failed);
TAUW_SAME(TAUW_AUDIT_UNSTABLE_IN_SERVICE, AuditOutcome::unstable_in_service);
TAUW_SAME(TAUW_AUDIT_WEAK_IN_SERVICE, AuditOutcome::weak_in_service);
TAUW_SAME(TAUW_AUDIT_PROPOSAL_BETTER, AuditOutcome::proposal_better);
TAUW_SAME(TAUW_AUDIT_NO_CASE, AuditOutcome::no_case);
TAUW_SAME(TAUW_AUDIT_TRADE_OFF, AuditOutcome::trade_off);
TAUW_SAME(TAUW_AUDIT_PROPOSAL_WORSE, AuditOutcome::proposal_worse);
TAUW_SAME(TAUW_AUDIT_NO_PROPOSAL, AuditOutcome::no_proposal);
TAUW_SAME(TAUW_AUDIT_UNDETERMINED, AuditOutcome::undetermined);

namespace tauwright::shell {

template <>
tauw_audit_options fresh() noexcept {
    tauw_audit_options options = blank<tauw_audit_options>();
    options.threads = 1;
    return options;
}

}  // namespace tauwright::shell

namespace {

/// The caller's options with the call from the library into them.
struct Options {
    tauw_audit_options c;
    tauwright::AuditOptions own;
};

Options options_of(const tauw_audit_options* source) {
    Options options{.c = source == nullptr ? shell::fresh<tauw_audit_options>() : shell::read(source, "options"), .own = {}};
    options.own.threads = options.c.threads;
    if (options.c.progress != nullptr)
        options.own.progress = [progress = options.c.progress, context = options.c.context](std::size_t done) {
            return shell::goes_on(progress(done, context), "options.progress");
        };
    return options;
}

AuditLoop loop_of(const tauw_audit_loop& source, const std::string& name) {
    const tauw_audit_loop c = shell::read(&source, name.c_str());
    const std::string at = name + ".";
    AuditLoop loop;
    loop.name = shell::text_or_empty(c.name);
    loop.process_gain_unit = shell::choice(c.process_gain_unit, tauwright::GainUnit::engineering, at + "process_gain_unit",
                                           "0 (percent), 1 (engineering)");
    if (c.process != nullptr) loop.process = shell::live(c.process, (at + "process").c_str()).value;
    if (c.settings != nullptr) loop.settings = shell::settings(c.settings, (at + "settings").c_str());
    if (c.entered != nullptr) loop.entered = shell::entered(c.entered, (at + "entered").c_str());
    if (c.form != nullptr) loop.form = shell::controller_form(c.form, (at + "form").c_str());
    if (c.proposal != nullptr) loop.proposal = shell::settings(c.proposal, (at + "proposal").c_str());
    if (c.duty != nullptr) loop.duty = shell::duty(c.duty, (at + "duty").c_str());
    loop.horizon = shell::optional(c.has_horizon, c.horizon, at + "horizon");
    return loop;
}

// An array of the caller's structs: as far apart as the caller's struct is long.
std::vector<AuditLoop> loops_of(const tauw_audit_loop* loops, std::size_t count) {
    shell::array(loops, count, "loops");
    std::vector<AuditLoop> list;
    if (count == 0) return list;
    shell::require_known_size(*loops, "loops[0]");
    if (count > PTRDIFF_MAX / loops->struct_size) throw std::length_error("loops");
    list.reserve(count);
    const auto* bytes = reinterpret_cast<const unsigned char*>(loops);
    for (std::size_t i = 0; i < count; ++i) {
        const auto* loop = reinterpret_cast<const tauw_audit_loop*>(bytes + i * loops->struct_size);
        list.push_back(loop_of(*loop, "loops[" + std::to_string(i) + "]"));
    }
    return list;
}

tauw_audit_summary from(const tauwright::AuditSummary& summary) noexcept {
    tauw_audit_summary c = shell::blank<tauw_audit_summary>();
    c.cancelled = summary.cancelled ? 1 : 0;
    c.rows = summary.rows;
    c.failed = summary.failed;
    c.unstable_in_service = summary.unstable_in_service;
    c.weak_in_service = summary.weak_in_service;
    c.changes_worthwhile = summary.changes_worthwhile;
    return c;
}

void add(const tauwright::AuditSummary& one, tauwright::AuditSummary& sum) noexcept {
    sum.rows += one.rows;
    sum.failed += one.failed;
    sum.unstable_in_service += one.unstable_in_service;
    sum.weak_in_service += one.weak_in_service;
    sum.changes_worthwhile += one.changes_worthwhile;
}

const AuditRow& row_of(const tauw_audit* audit, std::size_t index) {
    return shell::element(shell::live(audit, "audit").value, index);
}

[[noreturn]] void refuse_absent(int32_t side, const char* part) {
    throw Error(error_code::missing_argument, std::string("this row has no ") +
                                                  (side == TAUW_AUDIT_PROPOSAL ? "proposal" : "side in service") + part +
                                                  "; ask tauw_audit_row_at first");
}

const AuditSide& side_of(const tauw_audit* audit, std::size_t index, int32_t side) {
    const AuditRow& row = row_of(audit, index);
    if (side != TAUW_AUDIT_IN_SERVICE && side != TAUW_AUDIT_PROPOSAL)
        tauwright::detail::refuse(error_code::unknown_name, "side", side, "give one of 0 (in service), 1 (proposal)");
    const auto& found = side == TAUW_AUDIT_PROPOSAL ? row.proposal : row.in_service;
    if (!found) refuse_absent(side, "");
    return *found;
}

/// Thrown through the library where the caller's sink wants no more.
struct SinkCancelled {};

}  // namespace

int32_t tauw_audit_loop_defaults(tauw_audit_loop* loop, uint32_t size) { return shell::fill_defaults(loop, size); }
int32_t tauw_audit_options_defaults(tauw_audit_options* options, uint32_t size) {
    return shell::fill_defaults(options, size);
}
int32_t tauw_audit_row_defaults(tauw_audit_row* row, uint32_t size) { return shell::fill_defaults(row, size); }
int32_t tauw_audit_summary_defaults(tauw_audit_summary* summary, uint32_t size) {
    return shell::fill_defaults(summary, size);
}

const char* tauw_audit_outcome_name(int32_t outcome) { return name_of(static_cast<AuditOutcome>(outcome)); }

int32_t tauw_audit_loops(const tauw_audit_loop* loops, size_t count, const tauw_audit_options* options, tauw_audit** audit,
                         tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_audit> made(audit, "audit");
        const Options with = options_of(options);
        const std::vector<AuditLoop> list = loops_of(loops, count);
        std::vector<AuditRow> rows = tauwright::audit(list, with.own);
        const bool cancelled = rows.size() < list.size();
        made.give(std::move(rows), cancelled);
    });
}

int32_t tauw_audit_stream(tauw_audit_source source, tauw_audit_sink sink, const tauw_audit_options* options,
                          tauw_audit_summary* summary, tauw_error* error) {
    return shell::guard(error, [&] {
        if (source == nullptr) shell::refuse_null("source", "give a function that hands over the loops");
        if (sink == nullptr) shell::refuse_null("sink", "give a function that takes the rows");
        if (summary != nullptr) shell::require_known_size(*summary, "summary");
        const Options with = options_of(options);
        void* const context = with.c.context;
        tauwright::AuditSummary sum;
        const auto next = [&](AuditLoop& loop) {
            tauw_audit_loop c = shell::fresh<tauw_audit_loop>();
            if (!shell::goes_on(source(&c, context), "source")) return false;
            loop = loop_of(c, "loop");
            return true;
        };
        tauw_audit handed({}, false);
        const auto take = [&](const AuditRow& row) {
            handed.value.assign(1, row);
            add(tauwright::summary_of(handed.value), sum);
            if (!shell::goes_on(sink(&handed, context), "sink")) throw SinkCancelled();
        };
        try {
            sum.cancelled = tauwright::audit(next, take, with.own).cancelled;
        } catch (const SinkCancelled&) {
            sum.cancelled = true;
        }
        if (summary != nullptr) shell::Result<tauw_audit_summary>(summary, "summary").give(from(sum));
    });
}

int32_t tauw_audit_summarize(const tauw_audit* audit, tauw_audit_summary* summary, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauw_audit& a = shell::live(audit, "audit");
        shell::Result<tauw_audit_summary> result(summary, "summary");
        tauwright::AuditSummary sum = tauwright::summary_of(a.value);
        sum.cancelled = a.cancelled;
        result.give(from(sum));
    });
}

int32_t tauw_audit_row_at(const tauw_audit* audit, size_t index, tauw_audit_row* row, tauw_error* error) {
    return shell::guard(error, [&] {
        const AuditRow& r = row_of(audit, index);
        shell::Result<tauw_audit_row> result(row, "row");
        tauw_audit_row c = shell::blank<tauw_audit_row>();
        c.outcome = static_cast<int32_t>(r.outcome);
        c.code = static_cast<int32_t>(r.code);
        c.change_worthwhile = r.change_worthwhile ? 1 : 0;
        c.proposal_made = r.proposal_made ? 1 : 0;
        c.has_in_service = r.in_service ? 1 : 0;
        c.has_in_service_entered = r.in_service && r.in_service->entered ? 1 : 0;
        c.has_in_service_figures = r.in_service && r.in_service->figures ? 1 : 0;
        c.has_proposal = r.proposal ? 1 : 0;
        c.has_proposal_entered = r.proposal && r.proposal->entered ? 1 : 0;
        c.has_proposal_figures = r.proposal && r.proposal->figures ? 1 : 0;
        c.horizon = r.horizon;
        result.give(c);
    });
}

int32_t tauw_audit_settings(const tauw_audit* audit, size_t index, int32_t side, tauw_pid_settings* settings,
                            tauw_error* error) {
    return shell::guard(error, [&] {
        const AuditSide& s = side_of(audit, index, side);
        shell::Result<tauw_pid_settings>(settings, "settings").give(shell::from(s.settings));
    });
}

int32_t tauw_audit_entered(const tauw_audit* audit, size_t index, int32_t side, tauw_entered* entered, tauw_error* error) {
    return shell::guard(error, [&] {
        const AuditSide& s = side_of(audit, index, side);
        if (!s.entered) refuse_absent(side, " as entered");
        shell::Result<tauw_entered>(entered, "entered").give(shell::from(*s.entered));
    });
}

int32_t tauw_audit_margins(const tauw_audit* audit, size_t index, int32_t side, tauw_robustness* margins,
                           tauw_error* error) {
    return shell::guard(error, [&] {
        const AuditSide& s = side_of(audit, index, side);
        shell::Result<tauw_robustness>(margins, "margins").give(shell::from(s.margins));
    });
}

int32_t tauw_audit_figures(const tauw_audit* audit, size_t index, int32_t side, tauw_figures* figures, tauw_error* error) {
    return shell::guard(error, [&] {
        const AuditSide& s = side_of(audit, index, side);
        if (!s.figures) refuse_absent(side, " with figures");
        shell::Result<tauw_figures>(figures, "figures").give(shell::from(*s.figures));
    });
}

int32_t tauw_audit_item(const tauw_audit* audit, size_t index, int32_t item, char* text, size_t capacity, size_t* needed,
                        tauw_error* error) {
    return shell::guard(error, [&] {
        const AuditRow& row = row_of(audit, index);
        const auto wanted = shell::choice(item, TAUW_AUDIT_TEXT, "item", "0 (name), 1 (reason), 2 (error), 3 (text)");
        switch (wanted) {
            case TAUW_AUDIT_NAME: return shell::give_text(row.name, text, capacity, needed);
            case TAUW_AUDIT_REASON: return shell::give_text(row.reason, text, capacity, needed);
            case TAUW_AUDIT_ERROR: return shell::give_text(row.error, text, capacity, needed);
            case TAUW_AUDIT_TEXT: break;
        }
        shell::give_text(row.text(), text, capacity, needed);
    });
}

int32_t tauw_audit_text(const tauw_audit* audit, char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::give_text(tauwright::text_of(shell::live(audit, "audit").value), text, capacity, needed);
    });
}

int32_t tauw_audit_destroy(tauw_audit** audit) { return shell::destroy(audit); }
