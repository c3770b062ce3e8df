#include "math/scaled_iterates.hpp"

#include <algorithm>
#include <bit>
#include <cstdint>
#include <limits>

#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// 2^power, but 0 below 2^-900 and 2^900 above: far enough from the ends of the range for what follows.
double power_of_two(int power) {
    if (power < -900) return 0.0;
    return std::bit_cast<double>(static_cast<std::uint64_t>(std::min(power, 900) + 1023) << 52);
}

constexpr int exponent_of_zero = -(1 << 28);

}  // namespace

ScaledIterates::ScaledIterates(std::span<const double> coefficients)
    : degree_(coefficients.size() - 1),
      lanes_((degree_ + Lanes::count - 1) / Lanes::count * Lanes::count),
      mantissa_(degree_ + 1),
      exponent_(degree_ + 1),
      scale_(lanes_),
      re_(lanes_),
      im_(lanes_),
      lead_(lanes_),
      coefficient_((degree_ + 1) * lanes_),
      own_(degree_ * lanes_),
      other_(degree_ * lanes_) {
    for (std::size_t k = 0; k <= degree_; ++k) {
        mantissa_[k] = std::frexp(coefficients[k], &exponent_[k]);
        if (coefficients[k] == 0.0) exponent_[k] = exponent_of_zero;
    }
    start();
    rescale();
}

// The upper convex hull of the points (k, log2 |a_k|): an edge from k to l stands for l - k roots of modulus
// |a_k / a_l|^(1/(l-k)), which start at the roots of a_k + a_l x^(l-k), turned off their symmetry.
void ScaledIterates::start() {
    std::vector<double> height(degree_ + 1);
    std::vector<std::size_t> hull;
    hull.reserve(degree_ + 1);
    const auto slope = [&](std::size_t k, std::size_t l) {
        return (height[l] - height[k]) / static_cast<double>(l - k);
    };
    for (std::size_t k = 0; k <= degree_; ++k) {
        if (mantissa_[k] == 0.0) continue;
        height[k] = exponent_[k] + 2.0 * std::abs(mantissa_[k]);  // log2 |a_k| + 2, within 0.09
        while (hull.size() > 1 && slope(hull[hull.size() - 2], hull.back()) <= slope(hull.back(), k)) hull.pop_back();
        hull.push_back(k);
    }
    constexpr double pi = 3.14159265358979323846;
    constexpr double turn = 0.15;
    std::size_t i = 0;
    for (std::size_t edge = 0; edge + 1 < hull.size(); ++edge) {
        const std::size_t k = hull[edge], l = hull[edge + 1];
        const double log_modulus = -slope(k, l);
        const double whole = std::floor(log_modulus + 0.5);
        const double modulus = std::exp2(log_modulus - whole);
        const double first = (mantissa_[k] > 0.0) == (mantissa_[l] > 0.0) ? pi : 0.0;
        for (std::size_t m = 0; m < l - k; ++m, ++i) {
            const double angle = (first + 2.0 * pi * static_cast<double>(m)) / static_cast<double>(l - k) + turn;
            scale_[i] = static_cast<int>(whole);
            re_[i] = modulus * std::cos(angle);
            im_[i] = modulus * std::sin(angle);
        }
    }
}

void ScaledIterates::scale_polynomial(std::size_t i) {
    const int e = scale_[i];
    int top = std::numeric_limits<int>::min();
    for (std::size_t k = 0; k <= degree_; ++k) top = std::max(top, exponent_[k] + static_cast<int>(k) * e);
    for (std::size_t k = 0; k <= degree_; ++k)
        coefficient_[k * lanes_ + i] = mantissa_[k] * power_of_two(exponent_[k] + static_cast<int>(k) * e - top);
    int lead = exponent_[degree_] + static_cast<int>(degree_) * e - top;
    for (std::size_t j = 0; j < degree_; ++j) lead += std::max(0, scale_[j] - e);
    lead_[i] = mantissa_[degree_] * power_of_two(lead);
}

void ScaledIterates::rescale() {
    for (std::size_t i = degree_; i < lanes_; ++i) {
        scale_[i] = scale_[0];
        re_[i] = re_[0];
        im_[i] = im_[0];
    }
    for (std::size_t i = 0; i < lanes_; ++i) scale_polynomial(i);
    constexpr int far = -300;  // farther apart than a double can tell
    for (std::size_t j = 0; j < degree_; ++j)
        for (std::size_t i = 0; i < lanes_; ++i) {
            const int apart = scale_[i] - scale_[j];
            own_[j * lanes_ + i] = power_of_two(std::clamp(apart, far, 0));
            other_[j * lanes_ + i] = power_of_two(std::clamp(-apart, far, 0));
        }
}

bool ScaledIterates::keep_in_scale() {
    const double limit = power_of_two(static_cast<int>(std::max<std::size_t>(200 / degree_, 3)));
    bool changed = false;
    for (std::size_t i = 0; i < degree_; ++i) {
        const double size = std::max(std::abs(re_[i]), std::abs(im_[i]));
        if (size < limit && size > 1.0 / limit) continue;
        if (size == 0.0) re_[i] = 1.0 / limit;  // 0 is not a root: the lowest coefficient is not 0
        const int shift = std::ilogb(size == 0.0 ? re_[i] : size);
        re_[i] = std::ldexp(re_[i], -shift);
        im_[i] = std::ldexp(im_[i], -shift);
        scale_[i] += shift;
        changed = true;
    }
    if (changed) rescale();
    return changed;
}

void ScaledIterates::move(std::size_t i, double step_re, double step_im) noexcept {
    const double square = step_re * step_re + step_im * step_im;
    const double most = 16.0 * (re_[i] * re_[i] + im_[i] * im_[i] + 1.0);
    if (!is_finite(square)) {  // the denominator vanished
        step_re = 0.4 * re_[i] + 0.8 * im_[i];
        step_im = 0.4 * im_[i] - 0.8 * re_[i];
    } else if (square > most) {
        const double shortened = std::sqrt(most / square);
        step_re *= shortened;
        step_im *= shortened;
    }
    re_[i] -= step_re;
    im_[i] -= step_im;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
