// An open loop on the imaginary axis (or the unit circle), with bounds that hold between the points looked at.
#pragma once

#include <complex>
#include <limits>
#include <vector>

namespace tauwright {
inline namespace v0 {
namespace detail {

/// L(jw) and the first two derivatives of log R, where L = R / (jw)^net_integrators.
struct CurvePoint {
    double w = 0.0;
    std::complex<double> L;
    std::complex<double> slope;  ///< d log R / dw
    std::complex<double> bend;   ///< d^2 log R / dw^2
};

/// Bounds over an interval.
struct CurveBounds {
    double bend = 0.0;   ///< on |d^2 log R / dw^2|
    double twist = 0.0;  ///< on |d^3 log R / dw^3|
    double phase_bend = 0.0, phase_twist = 0.0;  ///< the same of arg R alone, which may be far smaller
};

/// A pole or zero of the open loop on the path itself.
struct AxisRoot {
    double w = 0.0;
    int poles = 0;  ///< multiplicity; negative for zeros
};

/// What the sweep needs to know of an open loop. Frequencies in rad/s from 0 to `end`.
class LoopCurve {
public:
    virtual ~LoopCurve() = default;

    virtual CurvePoint at(double w) const noexcept = 0;
    /// L(jw) as exactly as its factors allow.
    virtual std::complex<double> value(double w) const noexcept = 0;
    /// Bounds over [low, high]; infinite where a root lies on the interval.
    virtual CurveBounds bounds(double low, double high) const noexcept = 0;
    /// Bound on |L| from w on; infinite where none is known.
    virtual double tail(double w) const noexcept = 0;

    /// Bound on |log(L / limit())| from w on, where there is a limit.
    virtual double left_to_limit(double) const noexcept { return std::numeric_limits<double>::infinity(); }

    /// By proof no phase crossing lies beyond w; the walk need not go on for one.
    virtual bool phase_settled(double) const noexcept { return false; }
    /// The walk looks for phase crossings down to this |L|.
    virtual double smallest_of_interest() const noexcept { return 1e-12; }

    /// |L| falls at w; a pair of poles that meets the path there goes to the right as the dead time grows.
    bool gain_falls(double w) const noexcept { return at(w).slope.real() - net_integrators_ / w < 0.0; }

    /// Where the path ends: infinite, or half the sampling frequency.
    double end() const noexcept { return end_; }
    /// Poles at 0 less zeros at 0.
    int net_integrators() const noexcept { return net_integrators_; }
    /// L times (jw)^net_integrators at 0, a real number.
    double low_gain() const noexcept { return low_gain_; }
    /// d arg R / dw at 0, s.
    double low_phase_slope() const noexcept { return low_phase_slope_; }
    /// Poles to the right of the path (outside the unit circle).
    int unstable_poles() const noexcept { return unstable_poles_; }
    /// Largest |L| in the limit of infinite frequency; 0 where the path ends before.
    double at_infinity() const noexcept { return at_infinity_; }
    /// L at infinite frequency where it has a limit, which it has without dead time; else 0.
    double limit() const noexcept { return limit_; }
    /// Smallest |1 + L| and |1 + 1/L| in that limit; infinite where the path ends before.
    double nearest_at_infinity() const noexcept { return nearest_at_infinity_; }
    double inverse_nearest_at_infinity() const noexcept { return inverse_nearest_at_infinity_; }
    bool has_dead_time() const noexcept { return fastest_turn_ > 0.0; }
    /// Dead time that turns the curve at high frequency, s.
    double fastest_turn() const noexcept { return fastest_turn_; }
    /// The part of it that every piece feels, however small the rest of L is.
    double lasting_turn() const noexcept { return lasting_turn_; }
    double smallest_root() const noexcept { return smallest_root_; }
    double largest_root() const noexcept { return largest_root_; }
    /// Gain and integrators alone: the phase is the same everywhere.
    bool constant_phase() const noexcept { return constant_phase_; }
    const std::vector<AxisRoot>& axis_roots() const noexcept { return axis_roots_; }

protected:
    double end_ = std::numeric_limits<double>::infinity();
    int net_integrators_ = 0;
    double low_gain_ = 0.0, low_phase_slope_ = 0.0;
    int unstable_poles_ = 0;
    double at_infinity_ = 0.0, limit_ = 0.0;
    double nearest_at_infinity_ = 1.0, inverse_nearest_at_infinity_ = std::numeric_limits<double>::infinity();
    double fastest_turn_ = 0.0, lasting_turn_ = 0.0;
    double smallest_root_ = std::numeric_limits<double>::infinity(), largest_root_ = 0.0;
    bool constant_phase_ = false;
    std::vector<AxisRoot> axis_roots_;  ///< ascending, at w > 0
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
