#include "assess/nearness.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

double integer_power(double x, int n) noexcept {
    double p = 1.0;
    for (int i = std::abs(n); i > 0; --i) p *= x;
    return n < 0 ? 1.0 / p : p;
}

}  // namespace

QuantityBounds bounds_of(const Quantity& x, const Piece& piece) noexcept {
    const double h = piece.half_width(), B = piece.bounds.bend, w = piece.middle.w;
    const double steep = size_of(x.slope) + B * h;
    const double y0 = size_of(x.value) * growth(piece.rest_change(x.slope.real()));
    const double y1 = y0 * steep, y2 = y0 * (steep * steep + B);
    const double y3 = y0 * (steep * (steep * steep + 3.0 * B) + piece.bounds.twist);
    if (x.power == 0) return {y0, y1, y2, y3};
    // sup over the piece of w^(power - k) / middle^power, with the coefficient of the k-th derivative.
    double factor[4], coefficient = 1.0;
    for (int k = 0; k < 4; ++k) {
        const int n = x.power - k;
        factor[k] = coefficient == 0.0 ? 0.0
                                       : std::abs(coefficient) * integer_power((n >= 0 ? piece.high : piece.low) / w, n) * integer_power(w, -k);
        coefficient *= n;
    }
    return {factor[0] * y0, factor[0] * y1 + factor[1] * y0, factor[0] * y2 + 2.0 * factor[1] * y1 + factor[2] * y0,
            factor[0] * y3 + 3.0 * factor[1] * y2 + 3.0 * factor[2] * y1 + factor[3] * y0};
}

SquaredDistance squared_distance(const Quantity& x, double w) noexcept {
    const double p = x.power, re = x.slope.real() + p / w, im = x.slope.imag();
    const double bend_re = x.bend.real() - p / (w * w), bend_im = x.bend.imag();
    const double X = x.value.real(), Y = x.value.imag();
    const double dX = X * re - Y * im, dY = X * im + Y * re;
    const double c_re = re * re - im * im + bend_re, c_im = 2.0 * re * im + bend_im;
    const double ddX = X * c_re - Y * c_im, ddY = X * c_im + Y * c_re;
    const double f = 1.0 + X;
    return {f * f + Y * Y, 2.0 * (f * dX + Y * dY), 2.0 * (dX * dX + dY * dY + f * ddX + Y * ddY)};
}

Closest nearest_between(const LoopCurve& curve, bool inverse, double low, double high, double start) noexcept {
    const int m = curve.net_integrators();
    double w = start;
    bool low_seen = false, high_seen = false, inside = true;
    for (int i = 0; i < 60; ++i) {
        const CurvePoint p = curve.at(w);
        const SquaredDistance s = squared_distance(inverse ? inverse_at(p, m) : open_loop_at(p, m), w);
        if ((s.q1 > 0.0 && w <= low) || (s.q1 <= 0.0 && w >= high)) {
            inside = false;
            break;
        }
        (s.q1 > 0.0 ? high : low) = w;
        (s.q1 > 0.0 ? high_seen : low_seen) = true;
        double next = s.q2 > 0.0 ? w - s.q1 / s.q2 : s.q1 > 0.0 ? low : high;
        const bool converged = std::abs(next - w) <= 1e-9 * w || high - low <= 4e-16 * high;
        if (!converged && !(next > low && next < high)) {
            if (next >= high && !high_seen) next = high;
            else if (next <= low && !low_seen) next = low;
            else next = 0.5 * (low + high);
        }
        w = next;
        if (converged) break;
    }
    const std::complex<double> L = curve.value(w);
    return {std::abs(1.0 + (inverse ? 1.0 / L : L)), w, inside};
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
