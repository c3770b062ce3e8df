// Many audits: in order, in bounded memory, by as many threads as asked for.
#include <algorithm>
#include <utility>

#include "tauwright/tune/audit.hpp"
#include "tune/audit_workers.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

constexpr std::size_t loops_a_thread = 64;
constexpr unsigned most_threads = 1024;

void check_options(const AuditOptions& options) {
    if (options.threads < 1 || options.threads > most_threads)
        detail::refuse(error_code::out_of_domain, "options.threads", options.threads, "give from 1 to 1024 threads");
}

void count(const AuditRow& row, AuditSummary& summary) noexcept {
    ++summary.rows;
    summary.failed += row.code != error_code::ok;
    if (row.in_service) {
        const Verdict verdict = row.in_service->margins.verdict;
        summary.unstable_in_service += verdict == Verdict::unstable || verdict == Verdict::marginal;
    }
    summary.weak_in_service += row.outcome == AuditOutcome::weak_in_service;
    summary.changes_worthwhile += row.change_worthwhile;
}

}  // namespace

std::vector<AuditRow> audit(std::span<const AuditLoop> loops, const AuditOptions& options) {
    check_options(options);
    std::vector<AuditRow> rows(loops.size());
    detail::AuditWorkers workers(options.threads, [&](std::size_t i) { rows[i] = audit(loops[i]); });
    rows.resize(workers.run(loops.size(), [&](std::size_t done) { return !options.progress || options.progress(done); }));
    return rows;
}

AuditSummary audit(const std::function<bool(AuditLoop&)>& source, const std::function<void(const AuditRow&)>& sink,
                   const AuditOptions& options) {
    check_options(options);
    if (!source) throw Error(error_code::missing_argument, "source is empty; give a function that hands over the loops");
    if (!sink) throw Error(error_code::missing_argument, "sink is empty; give a function that takes the rows");
    const std::size_t capacity = loops_a_thread * options.threads;
    AuditSummary summary;
    std::vector<AuditLoop> loops;
    std::vector<AuditRow> rows;
    detail::AuditWorkers workers(options.threads, [&](std::size_t i) { rows[i] = audit(loops[i]); });
    const auto go_on = [&](std::size_t done) {
        summary.cancelled |= options.progress && !options.progress(summary.rows + done);
        return !summary.cancelled;
    };
    for (bool more = true; more && !summary.cancelled;) {
        loops.clear();
        while (more && loops.size() < capacity) {
            loops.emplace_back();
            more = source(loops.back());
            if (!more) loops.pop_back();
        }
        rows.resize(std::max(rows.size(), loops.size()));
        const std::size_t done = workers.run(loops.size(), go_on);
        for (std::size_t i = 0; i < done; ++i) {
            count(rows[i], summary);
            sink(rows[i]);
        }
    }
    return summary;
}

AuditSummary summary_of(std::span<const AuditRow> rows) noexcept {
    AuditSummary summary;
    for (const AuditRow& row : rows) count(row, summary);
    return summary;
}

}  // namespace v0
}  // namespace tauwright
