// A transmitter once per scan: lag, noise, quantization. Stands alone: no heap, no exceptions, no libm.
#pragma once

#include <cstdint>

#include "tauwright/core/finite.hpp"
#include "tauwright/run/noise.hpp"

namespace tauwright {
inline namespace v0 {
namespace run {

/// Coefficients of one scan, made by `discretize`. In the unit of the process value.
struct TransmitterCoefficients {
    double smoothing = 1.0;   ///< share of the change taken over per scan; 1 is no lag
    double noise = 0.0;       ///< standard deviation, 0 or above
    double resolution = 0.0;  ///< the measured value is a whole multiple of this; 0 is none
    std::uint64_t seed = 1;   ///< of the noise; equal seeds give equal values

    friend bool operator==(const TransmitterCoefficients&, const TransmitterCoefficients&) = default;
};

/// What the controller sees of a process value: behind a first-order lag, with noise, then rounded to the nearest
/// multiple of the resolution (from 0 up, as a converter counts from the low end of its range).
/// Real-time safe, trivially copyable.
class Transmitter {
public:
    Transmitter() = default;
    /// At rest at `initial_value`; at 0 where that is not finite.
    Transmitter(const TransmitterCoefficients& coefficients, double initial_value) noexcept
        : coefficients_(coefficients), noise_(coefficients.seed), lagged_(is_finite(initial_value) ? initial_value : 0.0),
          measured_(lagged_) {}

    /// One scan. Returns the measured value; one that is not finite is handed on as it is and not remembered.
    double step(double process_value) noexcept {
        if (!is_finite(process_value)) return process_value;
        const auto& c = coefficients_;
        const double difference = process_value - lagged_;
        lagged_ = (difference < 1e-200 && difference > -1e-200) || c.smoothing == 1.0
                      ? process_value : lagged_ + c.smoothing * difference;
        measured_ = c.noise > 0.0 ? lagged_ + c.noise * noise_.next() : lagged_;
        if (c.resolution > 0.0) measured_ = rounded(measured_ / c.resolution, measured_);
        return measured_;
    }

    /// What the last step returned.
    double measured() const noexcept { return measured_; }
    const TransmitterCoefficients& coefficients() const noexcept { return coefficients_; }

private:
    // The nearest whole multiple, halves away from 0; beyond 1e15 multiples a double has no finer steps to round.
    double rounded(double multiples, double unrounded) const noexcept {
        if (!(multiples < 1e15 && multiples > -1e15)) return unrounded;
        const auto whole = static_cast<std::int64_t>(multiples < 0.0 ? multiples - 0.5 : multiples + 0.5);
        return static_cast<double>(whole) * coefficients_.resolution;
    }

    TransmitterCoefficients coefficients_ = {};
    Noise noise_;
    double lagged_ = 0.0, measured_ = 0.0;
};

}  // namespace run
}  // namespace v0
}  // namespace tauwright
