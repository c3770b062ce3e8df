// The cycle a dead band makes of a loop: describing function first, then harmonic balance.
#pragma once

#include <optional>

#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// For a dead band of 1.
struct DeadBandCycle {
    bool exists = false;         ///< the describing function's curve meets the loop's
    double closeness = 0.0;      ///< largest |L N| where L N is real and negative; 1 is touching
    double period = 0.0, value_amplitude = 0.0, output_amplitude = 0.0, fastest_travel = 0.0;  ///< last: per s
};

/// `loop` and `process` hold their dead time. Sizes are 0 without a cycle, and where the harmonics do not balance.
DeadBandCycle dead_band_cycle(const TransferFunction& process, const TransferFunction& loop);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
