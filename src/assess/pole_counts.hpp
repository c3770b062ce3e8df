// Two ways to count the closed loop's poles to the right, that know nothing of each other.
#pragma once

#include <optional>

#include "assess/sweep.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// From the turn of 1 + L along the path. See DEVELOPERS.md, "Two stability tests".
std::optional<int> poles_by_winding(const LoopCurve& curve, const SweepResult& found);

/// Without dead time counted by Routh's scheme or from the roots, then followed as the dead time grows
/// (Walton and Marshall, IEE Proc. D 134, 1987). For one dead time on the imaginary axis.
std::optional<int> poles_followed(const TransferFunction& loop, const LoopCurve& curve, const SweepResult& found);

/// Open-loop poles followed as the gain rises from 0 (Vidyasagar, Bertschmann and Sallaberger,
/// IEEE TAC 33, 1988, count the same crossings).
std::optional<int> poles_by_gain(const LoopCurve& curve, const SweepResult& found);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
