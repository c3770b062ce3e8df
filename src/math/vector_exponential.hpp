// exp(-x) for many x >= 0 at once: branch-free, so that compilers vectorize the loop around it.
#pragma once

#include <bit>
#include <cstdint>

// Several copies of a function, the fastest chosen at load time where the platform can do that.
// Contraction is off for the whole library, so every copy gives the same bits.
#if defined(__GNUC__) && !defined(__clang__) && defined(__x86_64__) && defined(__ELF__) && \
    !defined(__SANITIZE_ADDRESS__) && !defined(__SANITIZE_THREAD__)
#define TAUWRIGHT_DETAIL_FOR_EVERY_CPU __attribute__((target_clones("default", "arch=x86-64-v3", "arch=x86-64-v4")))
#else
#define TAUWRIGHT_DETAIL_FOR_EVERY_CPU
#endif

namespace tauwright {
inline namespace v0 {
namespace detail {

/// exp(x) for x <= 0, 0 below -700. Relative error below 3e-16.
/// Range reduction x = k ln 2 + r with a two-part ln 2, then a Taylor polynomial on |r| <= 0.3466.
[[gnu::always_inline]] inline double decaying_exponential(double x) noexcept {
    constexpr double round_by_adding = 6755399441055744.0;  // 1.5 * 2^52
    const double clamped = x < -700.0 ? -700.0 : x;
    const double shifted = clamped * 1.4426950408889634 + round_by_adding;
    const double k = shifted - round_by_adding;
    const double r = (clamped - k * 6.93147180369123816490e-01) - k * 1.90821492927058770002e-10;
    double p = 1.0 / 6227020800.0;
    p = p * r + 1.0 / 479001600.0;
    p = p * r + 1.0 / 39916800.0;
    p = p * r + 1.0 / 3628800.0;
    p = p * r + 1.0 / 362880.0;
    p = p * r + 1.0 / 40320.0;
    p = p * r + 1.0 / 5040.0;
    p = p * r + 1.0 / 720.0;
    p = p * r + 1.0 / 120.0;
    p = p * r + 1.0 / 24.0;
    p = p * r + 1.0 / 6.0;
    p = p * r + 0.5;
    p = p * r + 1.0;
    p = p * r + 1.0;
    const std::uint64_t power = (std::bit_cast<std::uint64_t>(shifted) + 1023u) << 52;
    const double value = p * std::bit_cast<double>(power);
    return x < -700.0 ? 0.0 : value;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
