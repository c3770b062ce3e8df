// Margins, sensitivity peaks and a stability verdict with exact dead time. Compiled.
#pragma once

#include <cstdint>
#include <optional>
#include <vector>

#include "tauwright/control/internal_model_controller.hpp"
#include "tauwright/control/pid_response.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

enum class Verdict : std::int32_t { stable = 0, unstable = 1, marginal = 2, undetermined = 3 };

constexpr const char* name_of(Verdict verdict) noexcept {
    switch (verdict) {
        case Verdict::stable: return "stable";
        case Verdict::unstable: return "unstable";
        case Verdict::marginal: return "marginal";
        case Verdict::undetermined: return "undetermined";
    }
    return "unknown";
}

/// A frequency at which the open loop has gain 1.
struct GainCrossover {
    double frequency_rad_s = 0.0;
    double phase_margin_deg = 0.0;  ///< angle from -1, 0 to 180, whichever direction
    double delay_margin = 0.0;    ///< dead time that would bring the loop through -1 here
    bool touches = false;         ///< the gain reaches 1 without passing it, as far as rounding tells
    double error_bound = 0.0;     ///< rad/s, of a touch: between two crossings and none lies this much

    friend bool operator==(const GainCrossover&, const GainCrossover&) = default;
};

/// A frequency at which the open loop is real and negative.
struct PhaseCrossover {
    double frequency_rad_s = 0.0;
    double gain_factor = 0.0;  ///< factor on the gain that would bring the loop through -1 here
    bool touches = false;      ///< the loop reaches the negative real axis without passing it
    double error_bound = 0.0;  ///< rad/s, of a touch

    friend bool operator==(const PhaseCrossover&, const PhaseCrossover&) = default;
};

/// An interval of dead times, s.
struct DelayRange {
    double low = 0.0, high = 0.0;  ///< `high` may be infinite

    friend bool operator==(const DelayRange&, const DelayRange&) = default;
};

/// What the open loop L says of the closed loop. Of a loop that is not stable, margins and peaks are
/// empty; the verdict and the count of unstable poles stand.
struct Robustness {
    Verdict verdict = Verdict::undetermined;
    std::optional<bool> stable = {};               ///< empty where undetermined
    std::optional<int> unstable_poles = {};        ///< of the closed loop; empty where undetermined, marginal or infinitely many
    std::optional<double> gain_margin = {};            ///< smallest factor above 1 that destabilizes; infinite for none
    std::optional<double> gain_reduction_margin = {};  ///< largest factor below 1 that destabilizes; 0 for none
    std::optional<double> phase_margin_deg = {};       ///< smallest angle from -1 over all gain crossovers; infinite for none
    std::optional<double> delay_margin = {};         ///< smallest dead time that destabilizes; infinite for none
    std::optional<double> max_sensitivity = {};        ///< Ms = max |1/(1 + L)|; at least 1 but for loops that keep gain at high frequency
    std::optional<double> max_sensitivity_frequency = {};                ///< rad/s; infinite where only a limit
    std::optional<double> max_complementary_sensitivity = {};            ///< Mt = max |L/(1 + L)|
    std::optional<double> max_complementary_sensitivity_frequency = {};  ///< rad/s; 0 where at rest
    std::vector<GainCrossover> gain_crossovers = {};
    /// As far as they matter: up to where no smaller margin can follow, at most 1000.
    std::vector<PhaseCrossover> phase_crossovers = {};
    bool phase_crossovers_capped = false;  ///< more than 1000, or infinitely many at the loop's gain at high frequency
    /// Lowest frequency at which |S| rises through 1/sqrt(2), and highest at which |T| falls through it,
    /// rad/s; empty for none. Source: Skogestad and Postlethwaite, Multivariable Feedback Control, 2005, 2.4.
    std::optional<double> sensitivity_bandwidth = {}, complementary_bandwidth = {};
    std::optional<double> delay_reduction_margin = {};  ///< smallest reduction of the dead time that destabilizes; infinite for none
    /// All dead times of the process with which this controller is stable (of the open loop, where that is all
    /// there is); ascending, from at most 20,000 changes. Empty for sampled loops.
    std::vector<DelayRange> stable_dead_times = {};
    bool fragile = false;  ///< an arbitrarily small error of the dead time can destabilize

    friend bool operator==(const Robustness&, const Robustness&);
};

struct RobustnessOptions {
    /// The loop as it runs at this scan time: the block's own differences, the output held over each scan.
    std::optional<double> scan_time = {};
    double extra_delay = 0.0;  ///< dead time added to the loop; one scan for a controller that answers a scan late
};

/// Of an open loop as it is, exact dead time included. Every piece of the imaginary axis is proved free
/// of a crossing, or monotone or convex with what it can hold; peaks are enclosed and closed by proofs of
/// convexity. Frequencies, gains and peaks to about 1e-12 relative (1e-10 where the curve passes within
/// 1e-3 of -1). Two counts of the closed loop's poles that know nothing of each other must agree:
/// the winding of 1 + L, and the poles without dead time followed as it grows (Walton and Marshall,
/// IEE Proc. D 134, 1987); else `undetermined`, as for improper loops and for more than 400,000 pieces. Within 1e-9 of
/// -1 the curve goes through it for all that doubles tell: `marginal`, or `unstable` where other poles are
/// to the right. A mode on the axis that cancels is `marginal` where all else is stable. With dead time,
/// crossovers below |L| = 1e-12 (1e-4 with two dead times: found there, not proved the first) do not count; gain margins
/// beyond a factor of 1e7 may be given as none. Allocates.
Robustness robustness(const TransferFunction& open_loop);

/// Of process and settings, every filter included. With a scan time the figures are those of the
/// sampled loop, on frequencies up to half the sampling frequency; `unstable_poles` are then those outside the unit
/// circle; the delay margin counts fractions of a scan, each crossover's own is from its angle. A zero of the process at s = 0 against integral
/// action is `marginal`: the loop hides a pole at 0. Throws `not_finite`, `out_of_domain`, and what
/// `require(settings)` says. Allocates.
Robustness robustness(const TransferFunction& process, const PidSettings& settings, const RobustnessOptions& options = {});

/// Of a process and the exact synthesized controller, which holds its model's dead time: where the
/// process differs from the model there are two dead times. Its own right-half-plane poles (roots of 1 - T) are
/// counted first. `options.scan_time` must be empty (`out_of_domain`). Allocates.
Robustness robustness(const TransferFunction& process, const InternalModelController& controller,
                      const RobustnessOptions& options = {});

}  // namespace v0
}  // namespace tauwright
