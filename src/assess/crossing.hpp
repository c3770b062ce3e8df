// Where |L| passes 1, or L the negative real axis, within a piece: by proof all or none.
#pragma once

#include "assess/nearness.hpp"
#include "assess/sweep.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

enum class CrossingOf { gain, phase };

/// At most two, where the piece is settled.
struct CrossingSearch {
    bool settled = false;
    int count = 0;
    Crossing crossing[2];
};

CrossingSearch crossings(const LoopCurve& curve, const Piece& piece, CrossingOf of) noexcept;

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
