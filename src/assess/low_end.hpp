// The end of the path where |L| or 1/|L| is small: settled by one proof from the limit.
#pragma once

#include "assess/nearness.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The largest frequency found below which, by proof, there is no gain or phase crossing, X = (jw)^|m| Y
/// (1/L with integrators, L with zeros at rest) keeps |X| <= 1/3, and |1 + X| >= `least_small` but for
/// rounding. 0 where there is none.
double low_end(const LoopCurve& curve, double least_small) noexcept;

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
