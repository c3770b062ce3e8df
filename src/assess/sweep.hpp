// One walk along the path that finds crossings, closest approaches and the winding.
#pragma once

#include <cstddef>
#include <vector>

#include "assess/nearness.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

struct Crossing {
    double w = 0.0;            ///< rad/s
    bool touches = false;      ///< without crossing, as far as rounding tells
    double error_bound = 0.0;  ///< rad/s, of a touch
};

struct SweepResult {
    std::vector<Crossing> gain_crossings;   ///< ascending
    std::vector<Crossing> phase_crossings;  ///< ascending, the first thousand
    bool capped = false;                    ///< there are more phase crossings
    double largest_below_one = 0.0;         ///< largest |L| below 1 at a phase crossing, of all of them
    double smallest_above_one = 0.0;        ///< smallest |L| above 1 at a phase crossing; 0 for none
    int crossed_by_gain = 0;                ///< poles that crossed to the right as the gain rose from 0, less those that came back
    bool crossings_clear = true;            ///< none of these only touched
    Closest to_minus_one;                   ///< of L
    Closest inverse_to_minus_one;           ///< of 1/L
    double winding = 0.0;                   ///< change of arg(1 + L) along the path, rad
    bool complete = false;                  ///< every piece was settled by proof
    double head = 0.0, tail = 0.0;          ///< below and above these frequencies nothing crosses
};

/// Below this |1 + L| the curve goes through -1 for all that doubles can tell.
constexpr double through_minus_one = 1e-9;

SweepResult sweep(const LoopCurve& curve, const LoopCurve* mirrored);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
