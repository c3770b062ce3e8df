// Margins, sensitivity peaks and a stability verdict with exact dead time. Compiled.
#pragma once

#include <cstdint>
#include <optional>
#include <vector>

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

    friend bool operator==(const GainCrossover&, const GainCrossover&) = default;
};

/// A frequency at which the open loop is real and negative.
struct PhaseCrossover {
    double frequency_rad_s = 0.0;
    double gain_factor = 0.0;  ///< factor on the gain that would bring the loop through -1 here

    friend bool operator==(const PhaseCrossover&, const PhaseCrossover&) = default;
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
    std::optional<double> max_sensitivity = {};        ///< Ms = max |1/(1 + L)|, at least 1
    std::optional<double> max_sensitivity_frequency = {};                ///< rad/s; infinite where only a limit
    std::optional<double> max_complementary_sensitivity = {};            ///< Mt = max |L/(1 + L)|
    std::optional<double> max_complementary_sensitivity_frequency = {};  ///< rad/s; 0 where at rest
    std::vector<GainCrossover> gain_crossovers = {};
    std::vector<PhaseCrossover> phase_crossovers = {};  ///< as far as they matter: at most 1000

    friend bool operator==(const Robustness&, const Robustness&);
};

struct RobustnessOptions {
    std::optional<double> scan_time = {};  ///< half of it stands in for sampling and hold as dead time
    double extra_delay = 0.0;              ///< dead time added to the loop
};

/// Of an open loop as it is. Frequencies, gains and peaks to about 1e-10 relative; crossings are
/// found by pieces proved monotone, peaks by enclosures closed to 1e-7 and then polished. Two
/// independent stability tests must agree: the winding of 1 + L around 0, and the poles without
/// dead time followed as it grows (Walton and Marshall, IEE Proc. D 134, 1987). Open-loop poles on
/// the imaginary axis other than at 0 give `undetermined`. Allocates.
Robustness robustness(const TransferFunction& open_loop);

/// Of process and settings, every filter included. A zero of the process at s = 0 against integral
/// action is `marginal`: the loop hides a pole at 0. Throws `not_finite`, `out_of_domain`, and what
/// `require(settings)` says.
Robustness robustness(const TransferFunction& process, const PidSettings& settings, const RobustnessOptions& options = {});

}  // namespace v0
}  // namespace tauwright
