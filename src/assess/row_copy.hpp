// Copies of rows of a table.
#pragma once

#include <cstddef>
#include <cstdint>
#include <cstring>

#if defined(__SSE2__)
#include <emmintrin.h>
#endif

namespace tauwright {
inline namespace v0 {
namespace detail {

inline void copy_row(double* to, const double* from, std::size_t count) noexcept { std::memcpy(to, from, count * sizeof(double)); }

/// The same, written past the caches where the processor can: for what is too large for them, this saves the reading of
/// every line before it is written. Call `copies_past_caches_done` before another thread may read.
inline void copy_past_caches(double* to, const double* from, std::size_t count) noexcept {
#if defined(__SSE2__)
    for (; count > 0 && reinterpret_cast<std::uintptr_t>(to) % 64 != 0; --count) *to++ = *from++;
    for (; count >= 8; count -= 8, to += 8, from += 8) {
        const __m128d a = _mm_loadu_pd(from), b = _mm_loadu_pd(from + 2), c = _mm_loadu_pd(from + 4), d = _mm_loadu_pd(from + 6);
        _mm_stream_pd(to, a);
        _mm_stream_pd(to + 2, b);
        _mm_stream_pd(to + 4, c);
        _mm_stream_pd(to + 6, d);
    }
#endif
    copy_row(to, from, count);
}

inline void copies_past_caches_done() noexcept {
#if defined(__SSE2__)
    _mm_sfence();
#endif
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
