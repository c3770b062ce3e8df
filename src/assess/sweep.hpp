// One walk along the imaginary axis that finds crossings, closest approaches and the winding.
#pragma once

#include <complex>
#include <vector>

#include "assess/loop_curve.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

struct Closest {
    double distance = 0.0;   ///< smallest |1 + L|, or |1 + 1/L|
    double frequency = 0.0;  ///< rad/s; may be 0 or infinite for limits
};

struct SweepResult {
    std::vector<double> gain_crossings;   ///< rad/s, ascending
    std::vector<double> phase_crossings;  ///< rad/s, ascending, at most a thousand
    double largest_below_one = 0.0;       ///< largest |L| below 1 at a phase crossing, of all of them
    double smallest_above_one = 0.0;      ///< smallest |L| above 1 at a phase crossing; 0 for none
    Closest to_minus_one;                 ///< of L
    Closest inverse_to_minus_one;         ///< of 1/L
    double winding = 0.0;                 ///< change of arg(1 + L) over all frequencies, rad
    bool complete = false;                ///< every piece was settled by proof
};

SweepResult sweep(const LoopCurve& curve);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
