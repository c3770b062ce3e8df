// The symmetric cycle of a loop whose valve jumps between two positions, found exactly.
#pragma once

#include <optional>

#include "assess/loop_states.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The valve's position is a square wave between -1/2 and 1/2. It goes up when the output passes `threshold` from below, and
/// would go up once more at `threshold` + 1; down is the mirror image. 1/2: sticking of 1; 0: a resolution of 1.
struct RelayCycle {
    double period = 0.0, value_amplitude = 0.0, output_amplitude = 0.0;
};

/// The cycle a loop settles in: among all half periods for which the output meets the threshold, the one that does not
/// meet it earlier and comes back after a small disturbance. Where there is none (tight loops jump more than once each
/// way), what `staircase_cycle` comes to. Empty where that does not repeat either.
std::optional<RelayCycle> relay_cycle(const LoopStates& loop, double threshold);

/// The loop followed from jump to jump, from one half off the middle of two positions, until its periods agree to 1e-4.
/// `period` sets the step (a 1500th) and the longest run (150). Amplitudes to about 1e-4.
std::optional<RelayCycle> staircase_cycle(const LoopStates& loop, double threshold, double period);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
