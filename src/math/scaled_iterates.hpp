// Approximate roots of one polynomial, each in a scale of its own so that nothing overflows.
#pragma once

#include <cmath>
#include <cstddef>
#include <span>
#include <vector>

#include "math/lanes.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

inline double length(double re, double im) noexcept { return std::sqrt(re * re + im * im); }

/// Root i is x_i = y_i 2^scale[i] with |y_i| near 1, and sees the polynomial with its coefficients times a power
/// of two that makes the largest term about 1 at |y| = 1. So it does not matter how far the roots lie apart,
/// and the terms that underflow do not count. Kept by lanes: those beyond the degree repeat root 0.
class ScaledIterates {
public:
    /// The start, from coefficients lowest first; neither end is 0.
    explicit ScaledIterates(std::span<const double> coefficients);

    std::size_t degree() const noexcept { return degree_; }
    std::size_t lanes() const noexcept { return lanes_; }
    double re(std::size_t i) const noexcept { return re_[i]; }
    double im(std::size_t i) const noexcept { return im_[i]; }
    double modulus(std::size_t i) const noexcept { return length(re_[i], im_[i]); }
    int scale(std::size_t i) const noexcept { return scale_[i]; }

    /// y_i -= step, shortened where it would go far beyond the others and turned aside where it is not finite.
    void move(std::size_t i, double step_re, double step_im) noexcept;

    /// A root that has wandered so far that powers of y might overflow gets a new scale. True if one did;
    /// whatever was computed in the old scales is then void.
    bool keep_in_scale();

    // Four at a time, from root c on.
    ComplexLanes at(std::size_t c) const noexcept { return ComplexLanes::load(&re_[c], &im_[c]); }
    Lanes moduli(std::size_t c) const noexcept {
        const double r[Lanes::count] = {modulus(c), modulus(c + 1), modulus(c + 2), modulus(c + 3)};
        return Lanes::load(r);
    }
    /// The coefficients of y^k.
    Lanes coefficients(std::size_t k, std::size_t c) const noexcept {
        return Lanes::load(&coefficient_[k * lanes_ + c]);
    }
    /// The leading coefficients, times 2^(scale[j] - scale[i]) for every j where that is more than 1.
    Lanes lead(std::size_t c) const noexcept { return Lanes::load(&lead_[c]); }
    /// own y_i - other y_j, the difference x_i - x_j in the larger of the two scales.
    ComplexLanes differences(std::size_t c, std::size_t j) const noexcept {
        const ComplexLanes y = at(c);
        const Lanes own = own_lanes(c, j), other = other_lanes(c, j);
        return {own * y.re - other * Lanes(re_[j]), own * y.im - other * Lanes(im_[j])};
    }
    Lanes own_lanes(std::size_t c, std::size_t j) const noexcept { return Lanes::load(&own_[j * lanes_ + c]); }
    Lanes other_lanes(std::size_t c, std::size_t j) const noexcept { return Lanes::load(&other_[j * lanes_ + c]); }

    /// The same for one: min(1, 2^(scale[i] - scale[j])), min(1, 2^(scale[j] - scale[i])), and |x_i - x_j|.
    double own(std::size_t i, std::size_t j) const noexcept { return own_[j * lanes_ + i]; }
    double other(std::size_t i, std::size_t j) const noexcept { return other_[j * lanes_ + i]; }
    double distance(std::size_t i, std::size_t j) const noexcept {
        return length(own(i, j) * re_[i] - other(i, j) * re_[j], own(i, j) * im_[i] - other(i, j) * im_[j]);
    }

private:
    void start();
    void rescale();
    void scale_polynomial(std::size_t i);

    std::size_t degree_, lanes_;
    std::vector<double> mantissa_;
    std::vector<int> exponent_, scale_;
    std::vector<double> re_, im_, lead_;
    std::vector<double> coefficient_;  // [k * lanes_ + i]
    std::vector<double> own_, other_;  // [j * lanes_ + i]
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
