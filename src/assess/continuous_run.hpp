// What the two ways of running a continuous loop share: what drives it and where its points go.
#pragma once

#include <cstddef>
#include <limits>
#include <vector>

#include "assess/loop_states.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// A step of `size` at `start`, or a ramp that takes `duration`.
struct Drive {
    double size = 0.0, start = 0.0, duration = 0.0;

    struct Line {
        double value = 0.0, slope = 0.0;
    };
    /// Value and slope at t; on a corner those after it.
    Line at(double t) const noexcept {
        if (size == 0.0 || t < start) return {};
        if (t - start >= duration) return {size, 0.0};
        return {size * ((t - start) / duration), size / duration};
    }
};

/// The points asked for, from rest, and the room the output has.
struct ContinuousRun {
    double horizon = 0.0;
    std::size_t points = 0;
    Drive setpoint = {}, load = {};
    double room_below = 0.0, room_above = 0.0;
    std::vector<double> time = {}, value = {}, output = {};  ///< all of `points`; the first `done` are worked out
    std::size_t done = 0;
    bool limited = false;

    bool complete() const noexcept { return done == points; }
    void look_at(double u) noexcept { limited |= u < -room_below || u > room_above; }
};

/// Times that only rounding tells apart are one.
inline double time_rounding(double t) noexcept { return 16.0 * std::numeric_limits<double>::epsilon() * t; }

void run_by_steps(const LoopStates& loop, ContinuousRun& run);    ///< needs dead time
void run_instantly(const LoopStates& loop, ContinuousRun& run);   ///< without dead time

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
