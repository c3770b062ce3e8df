// The limit cycle a faulty valve makes of a loop. Compiled.
#pragma once

#include <cstdint>
#include <optional>
#include <string>

#include "tauwright/control/pid_settings.hpp"
#include "tauwright/discretize/valve_coefficients.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

enum class CycleExistence : std::int32_t { none = 0, persists = 1, undetermined = 2 };

constexpr const char* name_of(CycleExistence existence) noexcept {
    switch (existence) {
        case CycleExistence::none: return "none";
        case CycleExistence::persists: return "persists";
        case CycleExistence::undetermined: return "undetermined";
    }
    return "unknown";
}

/// What the valve does to the loop. Amplitudes are half of peak to peak, in the units of process and settings; empty
/// where there is no cycle or its size is not known.
struct ValveCycle {
    CycleExistence existence = CycleExistence::undetermined;
    std::optional<double> period = {};                   ///< s
    std::optional<double> process_value_amplitude = {};
    std::optional<double> output_amplitude = {};
    std::string reason = {};                             ///< one plain line
    bool retuning_cures = false;                         ///< other settings end the cycle; false where there is none

    friend bool operator==(const ValveCycle&, const ValveCycle&) = default;
};

/// Predicts whether the loop, left alone under a constant load, cycles because of its valve, and how.
///
/// Sticking (the position holds until the output is more than `stick` away from it, then jumps to the output) makes every
/// loop with an integrator cycle. The cycle is the exact periodic solution: a square wave of half the jump each way
/// around the position the load needs, found in state space with exact dead time. Period to 1e-9 and amplitudes to 1e-6
/// of the continuous loop (1e-4 for tight loops that jump more than once each way; those are followed from jump to jump); a
/// scan adds up to two scans to the period. Where the load needs a position off the middle of
/// two rests, the cycle is lopsided and slower. A `resolution` (the position moves by whole multiples of it, toward the
/// output but never beyond) is sticking of that size, and a dead band in front is taken up first: both are exact too.
/// Without an integrator the valve rests, off the set point, at every load where the loop gain is at most 1 (`none`), and
/// at some loads only above that (`undetermined`).
///
/// A dead band alone (a reversal is followed only after `dead_band`) cycles for good only where the loop has two
/// integrators, or is tuned close to its limit. Existence and a first guess from the describing function, the cycle itself
/// from the balance of ten odd harmonics; period and amplitudes within about 1 %. `undetermined` where, with fewer than two
/// integrators, the curves pass within 15 % of touching.
///
/// Dead times count as they are; limits, noise and scan do not act. A travel rate is taken as endless while a jump takes
/// less than 2 % of the period; beyond that no size is given. A loop that is not stable with a perfect valve is
/// `undetermined`. `retuning_cures` tells whether other settings of the same process end the cycle.
///
/// Throws what `require(settings)` and `check(valve)` throw, `out_of_domain` for an improper process, one of order above
/// 20, or unfiltered derivative action on a process of relative degree 0. Allocates.
///
/// Sources: Ya. Z. Tsypkin, Relay Control Systems, 1984 (periodic solutions of relay loops); A. Gelb and W. E. Vander
/// Velde, Multiple-Input Describing Functions and Nonlinear System Design, 1968 (describing function of backlash).
ValveCycle valve_cycle(const TransferFunction& process, const PidSettings& settings, const ValveSettings& valve);

}  // namespace v0
}  // namespace tauwright
