// A control valve with its faults, once per scan. Stands alone: no heap, no exceptions, no libm.
#pragma once

#include <cstdint>
#include <limits>

#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace run {

/// Coefficients of one scan, made by `discretize`. In the unit of the demand, percent of travel unless said
/// otherwise. Sizes are 0 or above; 0 is a fault that is not there.
struct ValveCoefficients {
    double dead_band = 0.0;   ///< play between demand and stem, full width: what a reversal loses
    double stick = 0.0;       ///< a valve at rest holds until the demand is farther away than this, then jumps to it
    double resolution = 0.0;  ///< the position moves in whole multiples of this
    double travel_per_scan = std::numeric_limits<double>::infinity();  ///< the farthest it goes in one scan
    double position_low = 0.0, position_high = 100.0;                  ///< ends of the travel

    friend bool operator==(const ValveCoefficients&, const ValveCoefficients&) = default;
};

/// A valve between the controller's output (the demand) and the process. In this order: the demand is limited
/// to the travel; the play of the dead band is taken up; a valve that has come to rest stays until the demand
/// is farther away than `stick`, then goes to it; it goes in whole multiples of `resolution` from where it
/// started, never beyond the demand; and no faster than `travel_per_scan`. While it is on its way it does not
/// stick. The position is meant to be held over the scan. Real-time safe, trivially copyable.
/// Source: Choudhury, Thornhill and Shah, Control Engineering Practice 13, 2005 (play and slip jump as distinct
/// faults); the stick rule with the jump to the demand is the one-parameter model of Stenman, Gustafsson and
/// Forsman, Int. J. Adaptive Control and Signal Processing 17, 2003. Both named from memory.
class Valve {
public:
    Valve() = default;
    /// At rest at `initial_position` (limited to the travel), in the middle of its dead band.
    Valve(const ValveCoefficients& coefficients, double initial_position) noexcept : coefficients_(coefficients) {
        start(initial_position);
    }

    /// Back to rest at a position. One that is not finite is taken as the low end.
    void start(double position) noexcept {
        position_ = target_ = origin_ = driven_ = limited(is_finite(position) ? position : coefficients_.position_low);
        multiples_ = 0.0;
    }

    /// One scan. Returns the position. A demand that is not finite is taken as the one before.
    double step(double demand) noexcept {
        const auto& c = coefficients_;
        if (is_finite(demand)) {
            const double wanted = limited(demand), play = 0.5 * c.dead_band;
            if (wanted - driven_ > play) driven_ = wanted - play;
            else if (driven_ - wanted > play) driven_ = wanted + play;
        }
        const double away = driven_ > target_ ? driven_ - target_ : target_ - driven_;
        if (away > c.stick || position_ != target_) aim();
        const double way = target_ - position_;
        if (way > c.travel_per_scan) position_ += c.travel_per_scan;
        else if (-way > c.travel_per_scan) position_ -= c.travel_per_scan;
        else position_ = target_;
        return position_;
    }

    double position() const noexcept { return position_; }
    const ValveCoefficients& coefficients() const noexcept { return coefficients_; }

private:
    // Where the stem is driven to, in whole multiples of the resolution, rounded toward where it stands.
    void aim() noexcept {
        const double multiples = coefficients_.resolution > 0.0 ? (driven_ - target_) / coefficients_.resolution : 0.0;
        if (!(coefficients_.resolution > 0.0) || !(multiples < 1e15 && multiples > -1e15)) {
            target_ = driven_;
            return;
        }
        // A quotient a rounding error below a whole number is that whole number.
        const double nudged = multiples > 0.0 ? multiples + 1e-9 : multiples - 1e-9;
        multiples_ += static_cast<double>(static_cast<std::int64_t>(nudged));
        target_ = limited(origin_ + multiples_ * coefficients_.resolution);
    }
    double limited(double x) const noexcept {
        const double above = x > coefficients_.position_low ? x : coefficients_.position_low;
        return above < coefficients_.position_high ? above : coefficients_.position_high;
    }

    ValveCoefficients coefficients_ = {};
    double driven_ = 0.0;    // the demand behind the play
    double target_ = 0.0;    // where the stem comes to rest
    double position_ = 0.0;
    double origin_ = 0.0, multiples_ = 0.0;  // of the resolution
};

}  // namespace run
}  // namespace v0
}  // namespace tauwright
