// The whole street in one call. Compiled.
#pragma once

#include <optional>
#include <string>

#include "tauwright/tune/audit.hpp"
#include "tauwright/tune/tuning_sheet.hpp"

namespace tauwright {
inline namespace v0 {

/// What to tune for. Everything is optional.
struct TuningRequest {
    std::optional<double> time_constant = {};     ///< closed-loop time constant in s; empty: chosen from the model
    std::optional<ControllerForm> form = {};      ///< the controller at hand
    std::optional<Duty> duty = {};                ///< scan time, steps for the trends; limits in percent
    std::optional<Entered> as_found = {};         ///< settings in service, in `form`
    bool safety_function = false;                 ///< refused where true
    std::string accept_weak_margins_by = {};      ///< who accepts settings with weak margins
    std::string loop_name = {};
    IdentifyOptions identify = {};
};

/// Record in, sheet out.
///
/// Without a time constant asked, and with the effective dead time D = dead time + half a scan +
/// measurement filter: self-regulating max(D, 0.1 lag, 3 scans, two standard errors of the dead
/// time), integral time at most 4 (time constant + D); integrating max(3 D, 3 scans, two standard
/// errors). Settings come from the model with D for its dead time; margins are those of the rounded
/// numbers on the model itself, with scan and filters.
///
/// Settings are withheld (a value, with the reasons) where the findings advise anything but tuning,
/// where the form cannot hold them, where the loop would not be stable, and where margins are weak
/// (Ms above 2, gain margin below 1.7, phase margin below 30 degrees) and nobody accepts that.
/// Throws `safety_function`, `missing_range` (a form in percent or engineering units without both
/// ranges), `conflicting_arguments` (form and record disagree on a range), `missing_argument`
/// (as-found numbers without a form), and what `identify` and `check` throw.
TuningSheet tune(const Record& record, const TuningRequest& request = {});

}  // namespace v0
}  // namespace tauwright
