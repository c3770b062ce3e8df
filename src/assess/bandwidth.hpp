// Where |S| or |T| passes 1/sqrt(2).
#pragma once

#include <optional>

#include "assess/loop_curve.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Lowest frequency from `from` on at which |1/(1 + L)| rises through 1/sqrt(2); empty for none.
std::optional<double> sensitivity_bandwidth(const LoopCurve& curve, double from);

/// Highest frequency at which |L/(1 + L)| falls through 1/sqrt(2); empty for none.
std::optional<double> complementary_bandwidth(const LoopCurve& curve, double from);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
