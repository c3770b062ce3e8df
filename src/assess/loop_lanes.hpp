// Loops run side by side: one lane a loop, all lanes through the same operations as `run::PidBlock` and
// `run::ProcessBlock` in the same order, so that each gives the bits of a loop run alone.
#pragma once

#include <cstddef>

#include "assess/row_copy.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Lanes of a block: enough independent recursions to hide the latency of one.
inline constexpr std::size_t lanes_of_block = 32;

/// One number of every lane.
struct alignas(64) LaneRow {
    double lane[lanes_of_block];

    double& operator[](std::size_t j) noexcept { return lane[j]; }
    double operator[](std::size_t j) const noexcept { return lane[j]; }
};

/// Coefficients and states of the loops of a block, a lane each. Named as in the blocks.
struct LoopLanes {
    LaneRow gain, setpoint_weight, integral_per_scan, minus_derivative_per_scan, derivative_smoothing, measurement_smoothing,
        tracking_per_scan;
    LaneRow growth00, growth01, growth10, growth11, now0, now1, before0, before1, outputs0, outputs1, direct;
    LaneRow measured, lagged, integral, output, state0, state1, process_value;
    LaneRow ran_away;  ///< not 0: left its rest by more than `simulate` goes on with
    std::size_t delay_scans[lanes_of_block];
    std::size_t ahead[lanes_of_block];  ///< where lane j of the delay's row lies, in doubles
};

/// What all loops share. The arrays have a value a scan.
struct SharedDuty {
    const double* setpoint = nullptr;  ///< flushed, as PidBlock does
    const double* load = nullptr;
    const double* noise = nullptr;
    double output_low = 0.0, output_high = 0.0, output_change_per_scan = 0.0, rest_output = 0.0, rest_process_value = 0.0, run_away = 0.0;
};

/// Scans `first` to `first + count` of a block.
struct LaneRun {
    const SharedDuty& duty;
    std::size_t first, count;
    bool one_delay;                   ///< all lanes have the delay of lane 0
    LaneRow* line;                    ///< row t: the inputs that act in scan first + t; from -1 to count + longest delay
    LaneRow *process_value, *output;  ///< results, every `stride`th row; of the process value also that after the last scan
    std::size_t stride;
    RowsUnderWay *rows_1, *rows_2;    ///< written on with every scan
};

/// One state, no derivative; one state; two states or a direct gain, a rate limit, watched for running away.
/// The first two are for loops that can neither run away nor overflow.
void run_first_order_pi(LoopLanes& lanes, const LaneRun& run) noexcept;
void run_first_order_pid(LoopLanes& lanes, const LaneRun& run) noexcept;
void run_any_lanes(LoopLanes& lanes, const LaneRun& run) noexcept;

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
