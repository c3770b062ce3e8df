// Closed-loop trends of many loops under one duty, several loops a vector instruction. Compiled.
#pragma once

#include <cstddef>
#include <span>

#include "tauwright/assess/simulate.hpp"

namespace tauwright {
inline namespace v0 {

struct LoopToSimulate {
    TransferFunction process;
    PidSettings settings;
};

/// How many values a trend of `simulate` with this duty and horizon (s) has, one a scan: the rows that `simulate_many`
/// writes. Throws as `simulate` does for duty and horizon. Does not allocate.
std::size_t scans_of(const Duty& duty, double horizon_s);

/// The process values and outputs that `simulate` gives for each loop, bit for bit, all under the same duty (noise with
/// its seed included). Both arrays are the caller's, of `scans_of(duty, horizon_s)` rows times `loops.size()`, row by
/// row: all loops of scan 0 first, in the order given. No loops, nothing written.
///
/// Processes that `run::ProcessBlock` takes (up to two lags, an oscillatory pair, an integrator with at most one lag)
/// with a dead time up to 10,000 scans run side by side: about 2.5 ns a loop and scan for first-order processes with
/// AVX-512, 3 ns with AVX2, 4.5 ns with SSE2, up to twice that for the others. Any other process, and every loop where
/// the duty has a valve, a transmitter or a ramp of the load, runs alone at the speed of `simulate`. Where the trend of
/// an unstable process ends early (`Trend::ran_away`), its last values are repeated to the end.
///
/// Throws what `simulate` throws, with the loop's place in front (`loops[7]: ...`), the arrays then hold nothing of
/// use; `buffer_too_small` or `out_of_domain` for an array that is too short or too long, before anything is written.
/// The arrays must not overlap. Allocates about 1 MB and the delay lines of 512 loops, whatever the number of loops; a
/// loop that runs alone allocates its trend.
void simulate_many(std::span<const LoopToSimulate> loops, const Duty& duty, double horizon_s,
                   std::span<double> process_value, std::span<double> output);

}  // namespace v0
}  // namespace tauwright
