// A loop made ready for a lane, and whether it fits one.
#pragma once

#include "assess/loop_lanes.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/control/pid_settings.hpp"
#include "tauwright/model/transfer_function.hpp"
#include "tauwright/run/pid_block.hpp"
#include "tauwright/run/process_block.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// What a lane needs, in ascending order of cost; `alone` fits no lane.
enum class LaneKind { first_order_pi, first_order_pid, any, alone };

/// Sizes that the values of a duty never exceed, and its length, for the proof that nothing overflows.
struct DutySizes {
    double setpoint = 0.0, load = 0.0, noise = 0.0, scans = 0.0;
};

/// What the loops of a duty with a scan time share, but for its arrays.
SharedDuty shared_duty(const Duty& duty) noexcept;

/// Sizes that the arrays of a duty never exceed.
DutySizes sizes_of(const Duty& duty, std::size_t scans) noexcept;

/// True for one state without a rate limit, where it is proved from the integral at rest that no value ever comes near
/// to where a trend ends or a controller holds.
bool is_plain_first_order(const run::PidCoefficients& pid, const run::ProcessCoefficients& process, double integral,
                          const SharedDuty& duty, const DutySizes& sizes) noexcept;

/// `discretize(process, scan_time)`, bit for bit, by its one state where it has one: ten times as fast.
run::ProcessCoefficients lane_coefficients(const TransferFunction& process, double scan_time);

/// Writes the loop at rest to lane j and says what it needs. Of a loop that must run alone the lane is idle.
/// `process` must fit `run::ProcessBlock`. Throws what `discretize` throws. Does not allocate.
LaneKind set_lane(LoopLanes& lanes, std::size_t j, const TransferFunction& process, const PidSettings& settings,
                  double scan_time, const SharedDuty& duty, const DutySizes& sizes);

/// A lane without loop.
void set_idle_lane(LoopLanes& lanes, std::size_t j, const SharedDuty& duty) noexcept;

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
