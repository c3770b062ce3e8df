// Copies of rows to a table, a little at a time, so that its memory is written while something else is worked out.
#pragma once

#include <algorithm>
#include <cstddef>
#include <cstdint>
#include <cstring>

#if defined(__SSE2__)
#include <emmintrin.h>
#endif

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Copies `count` doubles past the caches where the processor can: for what is too large for them, this saves the reading
/// of every line before it is written. Call `copies_past_caches_done` before another thread may read.
[[gnu::always_inline]] inline void copy_past_caches(double* to, const double* from, std::size_t count) noexcept {
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
    std::memcpy(to, from, count * sizeof(double));
}

inline void copies_past_caches_done() noexcept {
#if defined(__SSE2__)
    _mm_sfence();
#endif
}

/// Rows on their way from a scratch area to a table.
class RowsUnderWay {
public:
    RowsUnderWay() = default;
    RowsUnderWay(const double* from, std::size_t from_stride, double* to, std::size_t to_stride, std::size_t width,
                 std::size_t rows) noexcept
        : from_(from), to_(to), from_stride_(from_stride), to_stride_(to_stride), width_(width), left_(rows > 0 ? width : 0), rows_(rows) {}

    /// The next lines of memory: a sixteenth of a row of 512, or what is left of a row.
    [[gnu::always_inline]] void some() noexcept {
        if (left_ == 0) return;
        const std::size_t to_line = (64 - reinterpret_cast<std::uintptr_t>(to_) % 64) % 64 / sizeof(double);
        const std::size_t count = std::min<std::size_t>(left_, 32 + to_line);
        copy_past_caches(to_, from_, count);
        from_ += count;
        to_ += count;
        left_ -= count;
        if (left_ == 0 && --rows_ > 0) {
            from_ += from_stride_ - width_;
            to_ += to_stride_ - width_;
            left_ = width_;
        }
    }

    void rest() noexcept {
        while (left_ > 0) some();
    }

private:
    const double* from_ = nullptr;
    double* to_ = nullptr;
    std::size_t from_stride_ = 0, to_stride_ = 0, width_ = 0, left_ = 0, rows_ = 0;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
