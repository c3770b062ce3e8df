// Error-free sums and products, and the complex multiply-add that carries its own rounding error.
// T. J. Dekker, Numer. Math. 18, 1971; D. E. Knuth, The Art of Computer Programming 2, 4.2.2;
// S. Graillat, Ph. Langlois & N. Louvet, compensated Horner scheme, 2005.
// Everything here relies on plain IEEE rounding: compile with -ffp-contract=off and without -ffast-math.
#pragma once

#include <cmath>

#ifdef __FAST_MATH__
#error "the error terms below vanish under -ffast-math"
#endif

namespace tauwright {
inline namespace v0 {
namespace detail {

/// value + error is exact, and value is the rounded result.
template <class T>
struct WithError {
    T value, error;
};

/// a + b exactly, whichever is larger.
template <class T>
WithError<T> two_sum(T a, T b) noexcept {
    const T sum = a + b;
    const T part = sum - a;
    return {sum, (a - (sum - part)) + (b - part)};
}

/// A number as the sum of two with at most 26 bits each, so that products of the halves are exact.
template <class T>
struct Halves {
    T whole, high, low;
};

/// Needs |a| < 2^996.
template <class T>
Halves<T> halves(T a) noexcept {
    const T shifted = T(134217729.0) * a;  // 2^27 + 1
    const T high = shifted - (shifted - a);
    return {a, high, a - high};
}

/// a * b exactly, as long as the product lies between 2^-969 and 2^1023. By splitting: a fused
/// multiply-add is a library call on the baseline ISA.
template <class T>
WithError<T> two_product(const Halves<T>& a, const Halves<T>& b) noexcept {
    const T product = a.whole * b.whole;
    return {product, ((a.high * b.high - product) + a.high * b.low + a.low * b.high) + a.low * b.low};
}

inline WithError<double> two_product(double a, double b) noexcept {
    return two_product(halves(a), halves(b));
}

inline double magnitude(double a) noexcept { return std::abs(a); }

/// A complex number re + j im, with the rounding error made so far and the sum of the magnitudes that the error
/// was added up from.
template <class T>
struct CompensatedComplex {
    T re, im;
    T re_error, im_error, error_size;
};

/// h <- h y + a with a real. With u = 2^-53, n steps of this from h = a_n leave h + error within
/// 4 (n + 1) u error_size of the exact polynomial: each step takes in its own error to 3 u and multiplies what it
/// has to (1 + sqrt 5) u.
template <class T>
void multiply_add(CompensatedComplex<T>& h, const Halves<T>& y_re, const Halves<T>& y_im, T y_modulus, T a) noexcept {
    const Halves<T> re = halves(h.re);
    const Halves<T> im = halves(h.im);
    const auto rr = two_product(re, y_re);
    const auto ii = two_product(im, y_im);
    const auto ri = two_product(re, y_im);
    const auto ir = two_product(im, y_re);
    const auto difference = two_sum(rr.value, T(0.0) - ii.value);
    const auto sum = two_sum(ri.value, ir.value);
    const auto total = two_sum(difference.value, a);
    const T re_error = ((rr.error - ii.error) + (difference.error + total.error)) +
                       (h.re_error * y_re.whole - h.im_error * y_im.whole);
    const T im_error = ((ri.error + ir.error) + sum.error) +
                       (h.re_error * y_im.whole + h.im_error * y_re.whole);
    const T size = (magnitude(rr.error) + magnitude(ii.error)) + (magnitude(ri.error) + magnitude(ir.error)) +
                   (magnitude(difference.error) + magnitude(total.error)) + magnitude(sum.error);
    h = {total.value, sum.value, re_error, im_error, h.error_size * y_modulus + size};
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
