// Finite checks by bits: right even where a host is compiled with -ffast-math.
#pragma once

#include <bit>
#include <cstdint>

namespace tauwright {
inline namespace v0 {

/// True for every number that is neither NaN nor infinite. Real-time safe.
constexpr bool is_finite(double x) noexcept {
    constexpr std::uint64_t exponent = 0x7ff0000000000000u;
    return (std::bit_cast<std::uint64_t>(x) & exponent) != exponent;
}

/// True for NaN only. Real-time safe.
constexpr bool is_nan(double x) noexcept {
    constexpr std::uint64_t magnitude = 0x7fffffffffffffffu;
    return (std::bit_cast<std::uint64_t>(x) & magnitude) > 0x7ff0000000000000u;
}

}  // namespace v0
}  // namespace tauwright
