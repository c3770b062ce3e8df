// What the settings in service really do beside what is proposed, for one loop or thousands. Compiled.
#pragma once

#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/control/entered.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// One loop to look at: its process, what is in service, and what it must face.
struct AuditLoop {
    std::string name = {};
    std::optional<TransferFunction> process = {};  ///< needed
    /// Unit of the process gain. `engineering` is process-value units per output unit and needs both
    /// ranges of `form`.
    GainUnit process_gain_unit = GainUnit::percent;
    std::optional<PidSettings> settings = {};      ///< in service, in percent of span and seconds; or else:
    std::optional<Entered> entered = {};           ///< in service, the numbers as they stand in `form`
    std::optional<ControllerForm> form = {};       ///< the controller; every side is then shown in its numbers
    std::optional<PidSettings> proposal = {};      ///< empty: one is made, see `audit`
    Duty duty = {};                                ///< scan time for margins and trends; steps for the figures
    std::optional<double> horizon = {};            ///< of both trends in s; empty: eight closed-loop time constants plus dead times

    friend bool operator==(const AuditLoop&, const AuditLoop&);
};

/// One side of a row.
struct AuditSide {
    PidSettings settings = {};            ///< what the controller computes, after exact conversion
    std::optional<Entered> entered = {};  ///< in the loop's form; empty without one, or where it cannot hold them
    Robustness margins = {};              ///< with scan time and every filter
    std::optional<Figures> figures = {};  ///< of the trend; empty without scan time or step, or where the loop is not stable

    friend bool operator==(const AuditSide&, const AuditSide&);
};

/// What a row comes to.
enum class AuditOutcome : std::int32_t {
    failed = 0,               ///< `error` says what could not be done
    unstable_in_service = 1,  ///< on this model, or marginal
    weak_in_service = 2,      ///< Ms above 2, gain margin below 1.7, or phase margin below 30 degrees
    proposal_better = 3,      ///< a figure is better by more than 10 % (Ms counts from 1.7 on), none worse
    no_case = 4,              ///< no figure differs by more than 10 %
    trade_off = 5,            ///< some figures are better, some worse
    proposal_worse = 6,
    no_proposal = 7,          ///< none was given and none could be made; `reason` says why
    undetermined = 8,         ///< the stability of a side could not be decided
};

constexpr const char* name_of(AuditOutcome outcome) noexcept {
    switch (outcome) {
        case AuditOutcome::failed: return "failed";
        case AuditOutcome::unstable_in_service: return "unstable_in_service";
        case AuditOutcome::weak_in_service: return "weak_in_service";
        case AuditOutcome::proposal_better: return "proposal_better";
        case AuditOutcome::no_case: return "no_case";
        case AuditOutcome::trade_off: return "trade_off";
        case AuditOutcome::proposal_worse: return "proposal_worse";
        case AuditOutcome::no_proposal: return "no_proposal";
        case AuditOutcome::undetermined: return "undetermined";
    }
    return "unknown";
}

/// The audit of one loop. Both sides face the same process, scan, steps, noise and horizon.
struct AuditRow {
    std::string name = {};
    std::optional<ControllerForm> form = {};
    std::optional<AuditSide> in_service = {}, proposal = {};
    bool proposal_made = false;            ///< here, because none was given
    double horizon = 0.0;                  ///< of the trends in s; 0 without figures
    AuditOutcome outcome = AuditOutcome::failed;
    bool change_worthwhile = false;        ///< the proposal mends what is unstable or weak in service, or is better
    std::string reason = {};               ///< one line: the main point in words and numbers
    error_code code = error_code::ok;      ///< of the first thing that failed
    std::string error = {};                ///< what failed and the remedy; empty when nothing did

    /// Both sides beside each other: 78 columns, ASCII but for the name. Allocates.
    std::string text() const;

    friend bool operator==(const AuditRow&, const AuditRow&);
};

struct AuditOptions {
    unsigned threads = 1;  ///< 1 to 1024; above 1 starts at most threads - 1, which end before the call returns
    /// Called now and then on the calling thread with the number of loops done; false begins no
    /// further loop.
    std::function<bool(std::size_t done)> progress = {};
};

/// Counts over the rows delivered.
struct AuditSummary {
    std::size_t rows = 0;
    std::size_t failed = 0;               ///< rows with an error, whatever else they hold
    std::size_t unstable_in_service = 0;
    std::size_t weak_in_service = 0;
    std::size_t changes_worthwhile = 0;
    bool cancelled = false;

    friend bool operator==(const AuditSummary&, const AuditSummary&) = default;
};

/// Audits one loop. Never throws for bad input: what is wrong with the loop is in the row's `code`
/// and `error`, and the side that is not concerned is still there.
///
/// Without a proposal one is made as `tune` does at its default speed, with the effective dead time D
/// = dead time + half a scan + measurement filter in service: self-regulating at max(D + lags beyond
/// the two slowest + leads in the right half plane, 0.1 slowest lag, 3 scans), integrating at max(3 D,
/// 3 scans); a PI's integral time at most 4 (time constant + D); a derivative filter as the form fixes
/// it, else a tenth of the derivative time; measurement filter and set-point weight as in service.
/// Where that is weak the time constant is doubled, up to six times. With a form, the proposal is the
/// one rounded to its display.
AuditRow audit(const AuditLoop& loop);

/// Audits many, in order. Rows are equal to the last bit for any number of threads. Cancelled, the
/// answer is shorter than `loops`. Throws `out_of_domain` for the number of threads, and what
/// `progress` throws. Allocates the rows.
std::vector<AuditRow> audit(std::span<const AuditLoop> loops, const AuditOptions& options = {});

/// Audits a stream: `source` fills the loop it is given (handed over as new) and says whether there was
/// one; `sink` takes the rows in the same order. Both, and `progress`, are called on the calling thread
/// only; what they throw passes through after the threads have ended. Holds at most 64 loops and rows a
/// thread. Cancelled, all rows done are delivered first. Throws `missing_argument` for an empty function,
/// `out_of_domain` for the number of threads.
AuditSummary audit(const std::function<bool(AuditLoop&)>& source, const std::function<void(const AuditRow&)>& sink,
                   const AuditOptions& options = {});

/// The counts of rows at hand. Never throws.
AuditSummary summary_of(std::span<const AuditRow> rows) noexcept;

/// A table, one loop a line with its reason below, and the counts at the end: 78 columns, ASCII but
/// for the names. Allocates.
std::string text_of(std::span<const AuditRow> rows);

}  // namespace v0
}  // namespace tauwright
