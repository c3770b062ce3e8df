// The worst member of a set of processes against one controller, with a proof, and the share that violates limits. Compiled.
#pragma once

#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>

#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/uncertainty.hpp"

namespace tauwright {
inline namespace v0 {

/// Called on the caller's thread with the share done, 0 to 1; returning false cancels.
using Progress = std::function<bool(double share_done)>;

struct WorstCaseOptions {
    double extra_delay = 0.0;          ///< dead time added to every member's loop, s
    double tolerance = 1e-6;           ///< the proof closes the gap to this, relative; 1e-9 to 0.5
    std::size_t most_boxes = 120'000;  ///< of the proof; where they run out, `certified` is false
    Progress progress = {};
};

/// Of each figure two numbers: the worst one reached by a member that was analyzed, and a bound that no
/// member exceeds. Figures are empty unless every member is proved stable, or none was found that is not and the
/// proof was cut short (verdict `undetermined`: what was reached so far; a bound is empty where none is known).
struct WorstCase {
    /// `stable`: proved of all. `unstable` or `marginal`: `at` is. `undetermined`: the proof did not close.
    Verdict verdict = Verdict::undetermined;
    std::optional<double> max_sensitivity = {}, max_sensitivity_bound = {};    ///< Ms, reached and proved upper bound
    std::optional<double> gain_margin = {}, gain_margin_bound = {};            ///< factor above 1; infinite for none
    std::optional<double> phase_margin_deg = {}, phase_margin_deg_bound = {};  ///< infinite for none
    std::optional<double> delay_margin = {}, delay_margin_bound = {};          ///< s; infinite for none
    /// The member with the largest Ms found, or one that is not stable.
    TransferFunction at = TransferFunction::from_factors({});
    std::optional<std::size_t> at_model = {};  ///< its index in a list of models
    /// The verdict is proved, and each bound lies within `tolerance` of what was reached (a gain
    /// margin above 1000: it is proved to be above 1000).
    bool certified = false;
    bool cancelled = false;         ///< by `progress`
    std::size_t members_tried = 0;  ///< analyzed with `robustness`
    std::size_t boxes_used = 0;     ///< of the proof
};

/// Worst case of the loop of `settings` around every member of the set about `process`. For a box,
/// `process` is its center. For a confidence region, `process` must be the fit's model (its gain
/// in any unit, `conflicting_arguments` otherwise). For a list of models, `process` is not used.
///
/// Members are tried where the slopes point, from the nominal one on; branch and bound over frequency and
/// parameters then proves that none is worse: each box of it encloses L by its logarithm to second order, is
/// discarded where the slopes say that the worst member is elsewhere, and left where it keeps its distance from -1. Stability of all
/// follows from that of the nominal member and |1 + L| > 0 for all (zero exclusion: Barmish, New Tools for
/// Robustness of Linear Systems, 1994). About 150 boxes for a box around first order; tens of milliseconds where plants
/// are lightly damped or regions wide. Deterministic; allocates.
/// Throws `not_finite`, `out_of_domain`, and what `require(settings)` says; for a box that holds a gain, lag, lead
/// or damping of 0 `out_of_domain`.
WorstCase worst_case(const TransferFunction& process, const PidSettings& settings, const Uncertainty& uncertainty,
                     const WorstCaseOptions& options = {});

/// What a loop should keep. Empty ones are not asked for; a member must be stable in any case.
struct ViolationLimits {
    std::optional<double> max_sensitivity = {};   ///< at most this, 1 or more
    std::optional<double> gain_margin = {};       ///< at least this, 1 or more
    std::optional<double> phase_margin_deg = {};  ///< at least this, 0 to 180
};

struct ViolatingShare {
    double share = 0.0;           ///< of the members drawn that violate a limit or are not stable
    double standard_error = 0.0;  ///< of the share, sqrt(share (1 - share) / members); 0 for a list of models
    std::size_t members = 0;      ///< drawn; of a list, its length
    std::size_t unstable = 0;     ///< of them not stable, or not decided
    bool cancelled = false;       ///< by `progress`; the rest counts those drawn before
};

/// Draws members evenly over the box or the region (a list of models is taken whole, each once) and
/// analyzes each. Equal seeds give equal members everywhere. Throws as `worst_case`, and
/// `out_of_domain` for limits outside their domain and for 0 members. Allocates.
ViolatingShare violating_share(const TransferFunction& process, const PidSettings& settings, const Uncertainty& uncertainty,
                               const ViolationLimits& limits, std::size_t members = 1000, std::uint64_t seed = 1,
                               double extra_delay = 0.0, const Progress& progress = {});

}  // namespace v0
}  // namespace tauwright
