// Closed-loop trends of the continuous controller with exact dead time. Compiled.
#pragma once

#include <cstddef>

#include "tauwright/assess/simulate.hpp"
#include "tauwright/control/pid_settings.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// The response of process and settings to the set-point and load steps or ramps of `duty`, as the differential
/// equations give it: no scan, no limits. What `simulate` approaches as the scan time goes to 0.
///
/// Derivative and measurement filter act on the process value, the set point is weighted. Any proper process of
/// order up to 20, self-regulating, integrating or unstable, any dead time, 0 included. `points` evenly spaced
/// values from 0 to `horizon_s` in seconds; at a jump the value after it.
///
/// Used of the duty: the steps, their times and ramps, the rest values. `duty.scan_time` and `duty.seed` are ignored.
/// The output limits do not act: `Trend::limited` tells whether the output would have left them between 0 and the
/// horizon (looked at between the points too). `measured` is the process value, `valve_position` the output.
///
/// Accuracy: 1e-12 of the largest deviation from rest over the whole curve, jumps and all, for loops whose responses
/// are not the small difference of large states. Method of steps (Bellman and Cooke, Differential-Difference Equations,
/// 1963) with Chebyshev series (the tau method) on pieces that begin at every event plus every multiple of the dead
/// time and are halved until the series end below 4e-15; without dead time an exact matrix exponential.
///
/// Throws what `check(duty)` and `require(settings)` throw; `out_of_domain` for a horizon that is not above 0 or is
/// more than a million dead times, for fewer than 2 or more than ten million points, for an improper process or one of
/// order above 20, for unfiltered derivative action on a process that answers a step at once (relative degree 0), for a
/// loop without dead time whose instant gain is -1, and for a response that grows beyond all numbers;
/// `conflicting_arguments` naming the member of a duty that asks for noise, a rate limit, a valve, a transmitter or a
/// disturbance record. Allocates.
Trend continuous_trend(const TransferFunction& process, const PidSettings& settings, const Duty& duty, double horizon_s,
                       std::size_t points = 601);

}  // namespace v0
}  // namespace tauwright
