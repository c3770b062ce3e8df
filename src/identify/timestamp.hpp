// RFC 3339 stamps to nanoseconds since 1970, UTC.
#pragma once

#include <cstdint>
#include <optional>
#include <string_view>

namespace tauwright {
inline namespace v0 {
namespace detail {

struct Stamp {
    std::int64_t nanoseconds = 0;
    bool has_offset = false;
};

/// Empty where the text is no RFC 3339 date and time. A stamp without an offset is recognized, so
/// that the caller can refuse it by name.
std::optional<Stamp> parse_timestamp(std::string_view text) noexcept;

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
