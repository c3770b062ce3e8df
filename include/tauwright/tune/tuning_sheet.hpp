// The record of a tuning: what was seen, what was decided, what to key in, how to go back.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/assess/valve_cycle.hpp"
#include "tauwright/assess/worst_case.hpp"
#include "tauwright/control/entered.hpp"
#include "tauwright/identify/identify.hpp"
#include "tauwright/synthesize/synthesize.hpp"

namespace tauwright {
inline namespace v0 {

/// One controller on the sheet: as found, or proposed.
struct SheetController {
    PidSettings settings = {};                ///< gain in the sheet's gain unit, times in seconds
    std::optional<Entered> entered = {};      ///< in the controller's form
    Robustness margins = {};                  ///< with scan time and every filter
    std::optional<Figures> figures = {};      ///< of the trend under the duty; empty without a scan time
    /// Over the fit's joint 95 % confidence region, half a scan standing in for the sampling; empty where the
    /// loop is not stable or the record cannot tell a region.
    std::optional<WorstCase> worst_case = {};
    std::optional<ValveCycle> valve_cycle = {};  ///< what the duty's valve makes of the loop; empty for a perfect one
};

/// How fast the loop was asked to be, and why.
struct SpeedChoice {
    double time_constant = 0.0;
    std::string reason = {};
    double effective_dead_time = 0.0;  ///< dead time + half a scan + measurement filter
    double half_scan = 0.0;
    double measurement_filter_time = 0.0;
    bool integral_time_limited = false;  ///< to 4 (time constant + effective dead time), so that loads do not drag
};

/// The sheet. A value; texts and JSON are made from it alone.
struct TuningSheet {
    std::string library_version = {};
    std::string loop_name = {};
    std::string source = {};        ///< file, or empty for arrays
    std::string first_stamp = {};   ///< of the record, as written
    std::string input_sha256 = {};
    std::optional<Range> process_value_range = {}, output_range = {};
    std::string gain_unit = {};     ///< of gains in settings: "%/%", or the record's own units

    FittedModel fit = {};           ///< in the record's units
    std::optional<TransferFunction> model = {};  ///< the process in the sheet's gain unit
    std::optional<SpeedChoice> speed = {};
    std::vector<Obstacle> obstacles = {};
    Duty duty = {};
    std::optional<ControllerForm> form = {};

    std::optional<SheetController> as_found = {};
    std::optional<SheetController> proposed = {};   ///< empty when withheld
    std::vector<std::string> withheld = {};         ///< why no settings are given
    std::string weak_margins_accepted_by = {};
    std::vector<std::string> cautions = {};

    Advice advice() const noexcept { return fit.advice(); }
    const std::vector<Finding>& findings() const noexcept { return fit.findings; }

    /// Plain text, 78 columns, ASCII but for names and units given by the caller.
    std::string text() const;
    /// JSON (RFC 8259), schema "tauwright-tuning-sheet" version 2, stable key order; the schema file
    /// is src/tune/tuning_sheet.schema.json. Infinite margins are the word "infinite".
    std::string json() const;
    /// Reads what `json` wrote, of version 1 as well. Throws `file_malformed` (not JSON, a member missing, of the wrong kind, or
    /// at odds with another) or `schema_unsupported`, with the place. Allocates.
    static TuningSheet from_json(std::string_view json);
};

/// How long the trends behind the sheet's figures run, in s: eight times closed-loop time constant
/// plus effective dead time, from the later of the two steps; 0 where no speed was chosen.
double trend_horizon(const TuningSheet& sheet);

/// One difference between two sheets: a JSON pointer and both values as JSON text ("" for absent).
struct SheetDifference {
    std::string path = {};
    std::string earlier = {};
    std::string later = {};
};

/// Everything that differs, in the order of the document. Never throws but for memory. Allocates.
std::vector<SheetDifference> differences(const TuningSheet& earlier, const TuningSheet& later);

}  // namespace v0
}  // namespace tauwright
