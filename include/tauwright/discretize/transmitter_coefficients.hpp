// A transmitter in plain values, and the coefficients of one scan of it.
#pragma once

#include <cmath>
#include <cstdint>
#include <string_view>

#include "tauwright/core/error.hpp"
#include "tauwright/run/transmitter.hpp"

namespace tauwright {
inline namespace v0 {

/// What stands between the process value and the controller. All 0 is a perfect transmitter. The noise is no part
/// of it: it belongs to the duty, with its seed.
struct TransmitterSettings {
    double lag = 0.0;         ///< time constant, s
    double resolution = 0.0;  ///< smallest step of the measured value, in its unit; 0.0244 % of span at 12 bits

    bool perfect() const noexcept { return lag == 0.0 && resolution == 0.0; }

    friend bool operator==(const TransmitterSettings&, const TransmitterSettings&) = default;
};

/// Throws `not_finite` or `out_of_domain` for a value below 0; `name` is the argument to blame. Allocates only then.
inline void check(const TransmitterSettings& transmitter, std::string_view name = "transmitter") {
    if (!is_finite(transmitter.lag) || transmitter.lag < 0.0)
        detail::require_not_negative(detail::joined({name, ".lag"}), transmitter.lag);
    if (!is_finite(transmitter.resolution) || transmitter.resolution < 0.0)
        detail::require_not_negative(detail::joined({name, ".resolution"}), transmitter.resolution);
}

/// The coefficients of a transmitter stepped every `scan_time` s, with noise of the standard deviation `noise`.
/// The lag takes its input as held over the scan before: exact where it is, else late by up to half a scan
/// (`simulate` has the lag in the continuous process, exactly). Throws `not_finite` or `out_of_domain`.
inline run::TransmitterCoefficients discretize(const TransmitterSettings& transmitter, double scan_time,
                                               double noise = 0.0, std::uint64_t seed = 1) {
    check(transmitter);
    detail::require_positive("scan_time", scan_time);
    detail::require_not_negative("noise", noise);
    run::TransmitterCoefficients c;
    c.smoothing = transmitter.lag > 0.0 ? -std::expm1(-scan_time / transmitter.lag) : 1.0;
    c.noise = noise;
    c.resolution = transmitter.resolution;
    c.seed = seed;
    return c;
}

}  // namespace v0
}  // namespace tauwright
