// Four doubles worked on together: two 128-bit vectors, which every ISA we build for has at its baseline.
#pragma once

#include <cstddef>
#include <cstring>

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Four independent doubles; every operation is IEEE double arithmetic lane by lane, so a lane gives the
/// same bits as scalar code. Written with the vector extension of g++ and clang because g++ 12 does not
/// vectorize recurrences that run across lanes.
class Lanes {
public:
    static constexpr std::size_t count = 4;

    Lanes() = default;
    explicit Lanes(double x) noexcept : low_{x, x}, high_{x, x} {}

    static Lanes load(const double* from) noexcept {
        Lanes a;
        std::memcpy(&a.low_, from, sizeof(Two));
        std::memcpy(&a.high_, from + 2, sizeof(Two));
        return a;
    }
    void store(double* to) const noexcept {
        std::memcpy(to, &low_, sizeof(Two));
        std::memcpy(to + 2, &high_, sizeof(Two));
    }

    friend Lanes operator+(Lanes a, Lanes b) noexcept { return {a.low_ + b.low_, a.high_ + b.high_}; }
    friend Lanes operator-(Lanes a, Lanes b) noexcept { return {a.low_ - b.low_, a.high_ - b.high_}; }
    friend Lanes operator*(Lanes a, Lanes b) noexcept { return {a.low_ * b.low_, a.high_ * b.high_}; }
    friend Lanes operator/(Lanes a, Lanes b) noexcept { return {a.low_ / b.low_, a.high_ / b.high_}; }

    /// 1 in the lanes where a <= b, 0 elsewhere.
    friend Lanes at_most(Lanes a, Lanes b) noexcept {
        constexpr Two one{1.0, 1.0};
        constexpr Two zero{0.0, 0.0};
        return {a.low_ <= b.low_ ? one : zero, a.high_ <= b.high_ ? one : zero};
    }
    friend Lanes smaller(Lanes a, Lanes b) noexcept {
        return {a.low_ < b.low_ ? a.low_ : b.low_, a.high_ < b.high_ ? a.high_ : b.high_};
    }
    friend Lanes magnitude(Lanes a) noexcept {
        constexpr long long all_but_sign = 0x7fffffffffffffff;
        constexpr Bits mask{all_but_sign, all_but_sign};
        return {reinterpret_cast<Two>(reinterpret_cast<Bits>(a.low_) & mask),
                reinterpret_cast<Two>(reinterpret_cast<Bits>(a.high_) & mask)};
    }

private:
    using Two = double __attribute__((vector_size(16)));
    using Bits = long long __attribute__((vector_size(16)));

    Lanes(Two low, Two high) noexcept : low_(low), high_(high) {}

    Two low_, high_;
};

/// Four complex numbers.
struct ComplexLanes {
    Lanes re, im;

    static ComplexLanes load(const double* re, const double* im) noexcept { return {Lanes::load(re), Lanes::load(im)}; }
    void store(double* to_re, double* to_im) const noexcept {
        re.store(to_re);
        im.store(to_im);
    }

    friend ComplexLanes operator+(ComplexLanes a, ComplexLanes b) noexcept { return {a.re + b.re, a.im + b.im}; }
    friend ComplexLanes operator-(ComplexLanes a, ComplexLanes b) noexcept { return {a.re - b.re, a.im - b.im}; }
    friend ComplexLanes operator*(ComplexLanes a, ComplexLanes b) noexcept {
        return {a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re};
    }
    /// By the textbook formula: the squares must neither overflow nor vanish.
    friend ComplexLanes operator/(ComplexLanes a, ComplexLanes b) noexcept {
        const Lanes square = squared(b);
        return {(a.re * b.re + a.im * b.im) / square, (a.im * b.re - a.re * b.im) / square};
    }
    friend Lanes squared(ComplexLanes a) noexcept { return a.re * a.re + a.im * a.im; }
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
