// The PID controller block that runs once per scan. Stands alone: no heap, no exceptions, no libm.
#pragma once

#include <cstdint>
#include <limits>

#include "tauwright/core/error_code.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace run {

/// Coefficients of one scan, made by `discretize`. Plain data: equal bits give equal outputs.
///   error          e = setpoint - filtered process value
///   proportional   P = gain (setpoint_weight setpoint - filtered process value)
///   integral       I += integral_per_scan e           (backward difference)
///   derivative     D = -derivative_per_scan (y - lagged y), lagged y += derivative_smoothing (y - lagged y)
struct PidCoefficients {
    double gain = 0.0;
    double setpoint_weight = 1.0;
    double integral_per_scan = 0.0;
    double derivative_per_scan = 0.0;
    double derivative_smoothing = 1.0;
    double measurement_smoothing = 1.0;
    double tracking_per_scan = 0.0;  ///< share of the excess over a limit that the integral gives up per scan
    /// Farthest the output goes from the one before in automatic, 0 or above. The integral tracks it like a limit.
    double output_change_per_scan = std::numeric_limits<double>::infinity();

    friend bool operator==(const PidCoefficients&, const PidCoefficients&) = default;
};

enum class Mode : std::int32_t { manual = 0, automatic = 1 };

/// What the last step had to say; bits of `PidBlock::flags`.
enum PidFlag : std::uint32_t {
    flag_bad_input = 1u,      ///< set point or process value was no usable number; the output was held
    flag_limited_low = 2u,    ///< the output is at its low limit
    flag_limited_high = 4u,   ///< the output is at its high limit
    flag_manual = 8u,         ///< the output is the manual one
};

/// A PID controller: two degrees of freedom, filtered derivative on the process value, measurement
/// filter, output limits and rate limit with tracking anti-windup, manual and automatic without a bump, bad input
/// held and flagged. Every member function is real-time safe: bounded time, no allocation.
/// Source: Astrom and Hagglund, Advanced PID Control, 2006, chapters 3 and 13 (back-calculation).
class PidBlock {
public:
    PidBlock() = default;

    /// Limits must be finite with low < high. The integral starts at `output_low`.
    PidBlock(const PidCoefficients& coefficients, double output_low, double output_high) noexcept
        : coefficients_(coefficients), output_low_(output_low), output_high_(output_high), integral_(output_low),
          output_(output_low), manual_output_(output_low) {}

    /// As above; the first step presets the integral so that it returns `initial_output`.
    PidBlock(const PidCoefficients& coefficients, double output_low, double output_high, double initial_output) noexcept
        : PidBlock(coefficients, output_low, output_high) {
        output_ = manual_output_ = limited(initial_output);
        take_over_ = true;
    }

    /// One scan. Never fails: a set point or process value that is not finite, or beyond 1e150 so
    /// that sums could overflow, holds the output, sets `flag_bad_input`, and the next good scan takes over from the held output without a bump.
    double step(double setpoint, double process_value) noexcept {
        if (!usable(setpoint) || !usable(process_value)) return held();
        const double sp = flushed(setpoint), raw = flushed(process_value);
        if (!has_history_ || (take_over_ && (flags_ & flag_bad_input))) {
            measured_ = lagged_ = raw;
            has_history_ = true;
        }
        measured_ = smoothed(measured_, raw, coefficients_.measurement_smoothing);
        const double D = -coefficients_.derivative_per_scan * (measured_ - lagged_);
        lagged_ = smoothed(lagged_, measured_, coefficients_.derivative_smoothing);
        const double P = coefficients_.gain * (coefficients_.setpoint_weight * sp - measured_);
        if (mode_ == Mode::manual || take_over_) {
            // Where the output is given, the integral is what makes P + I + D equal to it.
            if (mode_ == Mode::manual) output_ = manual_output_;
            const double integral = output_ - (P + D);
            if (!usable(integral)) return held();
            integral_ = flushed(integral);
            take_over_ = false;
            flags_ = limit_flags(output_) | (mode_ == Mode::manual ? std::uint32_t{flag_manual} : 0u);
            return output_;
        }
        const double integral = integral_ + coefficients_.integral_per_scan * (sp - measured_);
        const double wanted = P + integral + D;
        if (!usable(wanted) || !usable(integral)) return held();  // a gain beyond reason
        output_ = flushed(within_reach(wanted));
        integral_ = flushed(integral + coefficients_.tracking_per_scan * (output_ - wanted));
        flags_ = limit_flags(output_);
        return output_;
    }

    /// To manual: the output stays where it is until `set_manual_output`.
    void to_manual() noexcept {
        if (mode_ != Mode::manual) manual_output_ = output_;
        mode_ = Mode::manual;
    }
    /// To automatic: the next step returns the manual output, then control goes on from there.
    void to_automatic() noexcept {
        if (mode_ == Mode::manual) take_over_ = true;
        mode_ = Mode::automatic;
    }
    /// Limited to the output range; `not_finite` leaves everything as it was.
    error_code set_manual_output(double output) noexcept {
        if (!is_finite(output)) return error_code::not_finite;
        manual_output_ = limited(output);
        return error_code::ok;
    }

    Mode mode() const noexcept { return mode_; }
    std::uint32_t flags() const noexcept { return flags_; }
    double output() const noexcept { return output_; }
    double integral() const noexcept { return integral_; }
    double output_low() const noexcept { return output_low_; }
    double output_high() const noexcept { return output_high_; }
    const PidCoefficients& coefficients() const noexcept { return coefficients_; }

private:
    // Keeps the output; the next scan that can be worked out takes over from it.
    double held() noexcept {
        if (mode_ == Mode::manual) output_ = manual_output_;
        flags_ |= flag_bad_input;
        take_over_ = true;
        return output_;
    }
    static bool usable(double x) noexcept { return is_finite(x) && x < 1e150 && x > -1e150; }
    // Numbers this small only cost time: arithmetic on denormals is many times slower.
    static double flushed(double x) noexcept { return (x < 1e-200 && x > -1e-200) ? 0.0 : x; }
    static double smoothed(double state, double input, double share) noexcept {
        const double difference = input - state;
        return (difference < 1e-200 && difference > -1e-200) ? input : state + share * difference;
    }
    double limited(double x) const noexcept {
        const double above = x > output_low_ ? x : output_low_;
        return above < output_high_ ? above : output_high_;
    }
    // Within the limits and within one scan's change of the output before.
    double within_reach(double x) const noexcept {
        const double change = coefficients_.output_change_per_scan;
        if (change < std::numeric_limits<double>::infinity()) {
            const double low = output_ - change, high = output_ + change;
            x = x > low ? x : low;
            x = x < high ? x : high;
        }
        return limited(x);
    }
    std::uint32_t limit_flags(double output) const noexcept {
        return (output <= output_low_ ? std::uint32_t{flag_limited_low} : 0u) |
               (output >= output_high_ ? std::uint32_t{flag_limited_high} : 0u);
    }

    PidCoefficients coefficients_ = {};
    double output_low_ = 0.0, output_high_ = 100.0;
    double measured_ = 0.0, lagged_ = 0.0, integral_ = 0.0, output_ = 0.0, manual_output_ = 0.0;
    Mode mode_ = Mode::automatic;
    std::uint32_t flags_ = 0;
    bool has_history_ = false, take_over_ = false;
};

/// True where this translation unit is compiled so that `step` gives the same bits everywhere: no
/// value-changing floating-point options. Contraction cannot be seen from inside; the CMake target
/// `tauwright::run` turns it off.
static constexpr bool gives_same_bits() noexcept {
#if defined(__FAST_MATH__) || (defined(__FINITE_MATH_ONLY__) && __FINITE_MATH_ONLY__ != 0)
    return false;
#else
    return true;
#endif
}

}  // namespace run
}  // namespace v0
}  // namespace tauwright
