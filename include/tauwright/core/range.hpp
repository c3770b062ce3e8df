// An instrument range: what 0 % and 100 % mean.
#pragma once

#include <string>

#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {

/// Low and high end of an instrument, in `unit`. A plain value; `check` says whether it can be used.
struct Range {
    double low = 0.0;
    double high = 100.0;
    std::string unit = "%";

    /// high - low, in the range's unit.
    double span() const noexcept { return high - low; }
    /// Percent of span of a value in the range's unit.
    double to_percent(double value) const noexcept { return (value - low) / span() * 100.0; }
    /// Value in the range's unit at a percent of span.
    double from_percent(double percent) const noexcept { return low + percent / 100.0 * span(); }

    friend bool operator==(const Range&, const Range&) = default;
};

/// Throws `not_finite` or `out_of_domain` unless low < high; `name` is the argument to blame.
inline void check(const Range& range, std::string_view name) {
    detail::require_finite(detail::joined({name, ".low"}), range.low);
    detail::require_finite(detail::joined({name, ".high"}), range.high);
    detail::require_finite(detail::joined({name, " span"}), range.span());
    if (!(range.low < range.high))
        detail::refuse(error_code::out_of_domain, detail::joined({name, ".high"}), range.high,
                       detail::joined({"give a high end above the low end ", text_of(range.low)}));
}

}  // namespace v0
}  // namespace tauwright
