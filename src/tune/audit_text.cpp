// Audits as plain text.
#include <algorithm>
#include <string>

#include "tauwright/tune/audit.hpp"
#include "tune/controller_cells.hpp"
#include "tune/page.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;

constexpr std::size_t name_width = 24, outcome_width = 20, margin_width = 8, time_width = 9;

std::string padded(std::string text, std::size_t width) {
    text.resize(std::max(width, text.size() + 1), ' ');
    return text;
}

std::string to_the_right(const std::string& text, std::size_t width) {
    return std::string(text.size() < width ? width - text.size() : 1, ' ') + text;
}

std::string sensitivity_text(const std::optional<AuditSide>& side) {
    return side && side->margins.max_sensitivity ? shown(*side->margins.max_sensitivity, 3) : "-";
}

std::string settling_text(const std::optional<AuditSide>& side) {
    return side && side->figures && side->figures->settling_time ? shown(*side->figures->settling_time, 3) + " s" : "-";
}

void write_line(Page& page, const AuditRow& row) {
    std::string line = padded(row.name.empty() ? "(no name)" : row.name, name_width);
    if (line.size() > name_width) {  // a long name has a line of its own
        page.line(line);
        line.assign(name_width, ' ');
    }
    line += padded(name_of(row.outcome), outcome_width);
    line += to_the_right(sensitivity_text(row.in_service), margin_width) + to_the_right(sensitivity_text(row.proposal), margin_width);
    line += to_the_right(settling_text(row.in_service), time_width) + to_the_right(settling_text(row.proposal), time_width);
    page.line(line);
    page.bullet("   ", row.reason);
    if (!row.error.empty()) page.bullet("   ", joined({"error (", name_of(row.code), "): ", row.error}));
}

std::string counted(std::size_t n, const char* one, const char* many) {
    return std::to_string(n) + " " + (n == 1 ? one : many);
}

}  // namespace

std::string AuditRow::text() const {
    Page page;
    page.title(name.empty() ? std::string("Audit") : "Audit: " + name);
    page.item("Outcome", name_of(outcome));
    page.item("Reason", reason);
    if (!error.empty()) page.item("Error", joined({name_of(code), ": ", error}));
    if (!in_service && !proposal) return page.take();
    const auto settings = [&](const std::optional<AuditSide>& side) {
        return side ? setting_cells(side->settings, side->entered, form, "%/%") : std::vector<Cell>{};
    };
    const auto margins = [&](const std::optional<AuditSide>& side) {
        return side ? margin_cells(side->margins, side->figures) : std::vector<Cell>{};
    };
    const auto further = [&](const std::optional<AuditSide>& side) { return side ? further_cells(side->figures) : std::vector<Cell>{}; };
    page.section(form ? joined({"Settings as they stand in the ", name_of(form->equation), " form"})
                      : std::string("Settings, ideal form: Kc (e + 1/Ti integral e + Td de/dt)"));
    page.row("", "in service", proposal_made ? "proposed (made here)" : "proposed");
    write_side_by_side(page, settings(in_service), settings(proposal));
    page.section(horizon > 0.0 ? joined({"Margins with scan and every filter; figures of a trend of ", shown(horizon), " s"})
                               : std::string("Margins with scan and every filter"));
    page.row("", "in service", "proposed");
    write_side_by_side(page, margins(in_service), margins(proposal));
    write_side_by_side(page, further(in_service), further(proposal));
    return page.take();
}

std::string text_of(std::span<const AuditRow> rows) {
    Page page;
    page.title("Audit of " + counted(rows.size(), "loop", "loops"));
    page.line(std::string(name_width + outcome_width, ' ') + to_the_right("largest Ms", 2 * margin_width) +
              to_the_right("settling time", 2 * time_width));
    page.line(padded("Loop", name_width) + padded("Outcome", outcome_width) + to_the_right("now", margin_width) +
              to_the_right("prop.", margin_width) + to_the_right("now", time_width) + to_the_right("prop.", time_width));
    page.line(std::string(page_width, '-'));
    for (const AuditRow& row : rows) write_line(page, row);
    const AuditSummary s = summary_of(rows);
    page.line(std::string(page_width, '-'));
    page.line(joined({counted(s.changes_worthwhile, "change", "changes"), " worthwhile, ", std::to_string(s.unstable_in_service),
                      " unstable and ", std::to_string(s.weak_in_service), " weak in service, ", std::to_string(s.failed), " failed"}));
    return page.take();
}

}  // namespace v0
}  // namespace tauwright
