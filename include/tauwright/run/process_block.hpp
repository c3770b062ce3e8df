// A process of up to two states with exact, fractional dead time, stepped once per scan.
#pragma once

#include <cstddef>
#include <cstdint>

#include "tauwright/core/error_code.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace run {

/// Coefficients of one scan, made by `discretize`. The state x is held as a difference so that
/// short scans lose no digits:  x += growth x + now u[k-d] + before u[k-d-1],  y = outputs . x.
struct ProcessCoefficients {
    double growth[2][2] = {};      ///< exp(A h) - identity
    double now[2] = {};            ///< effect of the input delayed by `delay_scans`
    double before[2] = {};         ///< effect of the input one scan older: the fraction of the dead time
    double outputs[2] = {};
    double direct = 0.0;           ///< gain of a process without lag, from the delayed input
    std::int64_t delay_scans = 0;  ///< whole scans of dead time

    friend bool operator==(const ProcessCoefficients&, const ProcessCoefficients&) = default;
};

/// How many doubles `ProcessBlock` needs from the caller for its delay line.
constexpr std::size_t delay_line_length(const ProcessCoefficients& coefficients) noexcept {
    return static_cast<std::size_t>(coefficients.delay_scans > 0 ? coefficients.delay_scans : 0) + 2;
}

/// A process about its operating point: an output held at `rest_output` keeps the process value at
/// `rest_process_value` (for an integrating process: balances it). The delay line is the caller's
/// memory, the same one at every call. Real-time safe.
class ProcessBlock {
public:
    ProcessBlock() = default;
    ProcessBlock(const ProcessCoefficients& coefficients, double rest_output, double rest_process_value) noexcept
        : coefficients_(coefficients), rest_output_(rest_output), rest_process_value_(rest_process_value) {}

    /// Fills the delay line with the rest output. `buffer_too_small` leaves everything as it was.
    error_code start(double* delay_line, std::size_t length) noexcept {
        if (delay_line == nullptr) return error_code::null_pointer;
        if (length < delay_line_length(coefficients_)) return error_code::buffer_too_small;
        for (std::size_t i = 0; i < length; ++i) delay_line[i] = 0.0;
        state_[0] = state_[1] = delayed_ = 0.0;
        newest_ = 0;
        return error_code::ok;
    }

    /// Holds `output` for one scan and returns the process value at its end. An output that is not
    /// finite is taken as the one before.
    double step(double output, double* delay_line) noexcept {
        const std::size_t length = delay_line_length(coefficients_);
        const double input = is_finite(output) ? output - rest_output_ : delay_line[newest_];
        newest_ = newest_ + 1 < length ? newest_ + 1 : 0;
        delay_line[newest_] = input;
        const std::size_t d = static_cast<std::size_t>(coefficients_.delay_scans);
        const double u0 = delay_line[newest_ >= d ? newest_ - d : newest_ + length - d];
        const double u1 = delay_line[newest_ >= d + 1 ? newest_ - d - 1 : newest_ + length - d - 1];
        const auto& c = coefficients_;
        const double x0 = state_[0], x1 = state_[1];
        state_[0] = flushed(x0 + (c.growth[0][0] * x0 + c.growth[0][1] * x1 + c.now[0] * u0 + c.before[0] * u1));
        state_[1] = flushed(x1 + (c.growth[1][0] * x0 + c.growth[1][1] * x1 + c.now[1] * u0 + c.before[1] * u1));
        delayed_ = u0;
        return process_value();
    }

    /// The process value now.
    double process_value() const noexcept {
        const auto& c = coefficients_;
        return rest_process_value_ + (c.outputs[0] * state_[0] + c.outputs[1] * state_[1] + c.direct * delayed_);
    }

    const ProcessCoefficients& coefficients() const noexcept { return coefficients_; }

private:
    static double flushed(double x) noexcept { return (x < 1e-200 && x > -1e-200) ? 0.0 : x; }

    ProcessCoefficients coefficients_ = {};
    double rest_output_ = 0.0, rest_process_value_ = 0.0;
    double state_[2] = {}, delayed_ = 0.0;
    std::size_t newest_ = 0;
};

}  // namespace run
}  // namespace v0
}  // namespace tauwright
