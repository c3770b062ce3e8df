// A valve's faults in plain values, and the coefficients of one scan of them.
#pragma once

#include <optional>
#include <string_view>

#include "tauwright/core/error.hpp"
#include "tauwright/run/valve.hpp"

namespace tauwright {
inline namespace v0 {

/// What a control valve does to its demand. Percent of travel unless said otherwise; all 0 is a perfect valve.
/// Common practice, no source: up to 0.5 % of dead band or resolution is a healthy valve with a positioner, 1 to
/// 3 % make cycles one can see, above 5 % repair first. `run::Valve` says how the faults act together.
struct ValveSettings {
    double dead_band = 0.0;   ///< full width: what a reversal loses
    double stick = 0.0;       ///< holds until the demand is farther away than this, then jumps to it
    double resolution = 0.0;  ///< moves in whole multiples of this
    std::optional<double> travel_rate_per_s = {};  ///< fastest travel; empty: at once. 5 for a stroke of 20 s

    /// True for a valve whose position is its demand.
    bool perfect() const noexcept {
        return dead_band == 0.0 && stick == 0.0 && resolution == 0.0 && !travel_rate_per_s;
    }

    friend bool operator==(const ValveSettings&, const ValveSettings&) = default;
};

/// Throws `not_finite` or `out_of_domain` for a size below 0 or a travel rate that is not above 0; `name` is the
/// argument to blame. Allocates only then.
inline void check(const ValveSettings& valve, std::string_view name = "valve") {
    const struct { std::string_view word; double value; } sizes[] = {
        {".dead_band", valve.dead_band}, {".stick", valve.stick}, {".resolution", valve.resolution}};
    for (const auto& size : sizes)
        if (!is_finite(size.value) || size.value < 0.0)
            detail::require_not_negative(detail::joined({name, size.word}), size.value);
    if (valve.travel_rate_per_s && !(is_finite(*valve.travel_rate_per_s) && *valve.travel_rate_per_s > 0.0))
        detail::require_positive(detail::joined({name, ".travel_rate_per_s"}), *valve.travel_rate_per_s);
}

/// The coefficients of a valve stepped every `scan_time` s. The travel must have a low end below its high end.
/// Throws `not_finite` or `out_of_domain`.
inline run::ValveCoefficients discretize(const ValveSettings& valve, double scan_time, double position_low = 0.0,
                                         double position_high = 100.0) {
    check(valve);
    detail::require_positive("scan_time", scan_time);
    detail::require_finite("position_low", position_low);
    detail::require_finite("position_high", position_high);
    if (!(position_low < position_high))
        detail::refuse(error_code::out_of_domain, "position_high", position_high,
                       detail::joined({"give a high end above the low end, ", text_of(position_low)}));
    run::ValveCoefficients c;
    c.dead_band = valve.dead_band;
    c.stick = valve.stick;
    c.resolution = valve.resolution;
    if (valve.travel_rate_per_s) c.travel_per_scan = *valve.travel_rate_per_s * scan_time;
    c.position_low = position_low;
    c.position_high = position_high;
    return c;
}

}  // namespace v0
}  // namespace tauwright
