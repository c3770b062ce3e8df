#include "assess/low_end.hpp"

#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double slack = 1e-8;  // of |1 + X|^2: where |T| is 1 at rest it stays so but for less than this

// The phase of L at 0 is this many quarter turns from the positive real axis.
int quarter_turns(const LoopCurve& curve) noexcept {
    const int quarters = -curve.net_integrators() + (curve.low_gain() < 0.0 ? 2 : 0);
    return ((quarters % 4) + 4) % 4;
}

bool holds(const LoopCurve& curve, double w, double least_small) noexcept {
    const int m = curve.net_integrators(), power = std::abs(m);
    const double sign = m > 0 ? -1.0 : 1.0;  // X = 1/L or L
    const CurveBounds b = curve.bounds(0.0, w);
    const double b0 = sign * curve.low_phase_slope();  // d arg Y / dw at 0; log|Y| is flat there
    const double steep = std::abs(b0) + b.bend * w;
    if (!(steep * w < 0.7)) return false;
    const double Y0 = m > 0 ? 1.0 / curve.low_gain() : curve.low_gain();
    double scale = std::abs(Y0);
    for (int i = 0; i < power; ++i) scale *= w;
    scale *= growth(0.5 * b.bend * w * w);
    if (!(scale <= 1.0 / 3.0)) return false;
    // Phase: away from the negative real axis, or leaving it to one side.
    if (quarter_turns(curve) == 2 && !curve.constant_phase() && !(std::abs(b0) > b.bend * w)) return false;
    // |1 + X|^2 = 1 + q2 w^2 / 2 + ..., an even function.
    const double y0 = std::abs(Y0) * growth(0.5 * b.bend * w * w), y1 = y0 * steep, y2 = y0 * (steep * steep + b.bend);
    const double y3 = y0 * (steep * (steep * steep + 3.0 * b.bend) + b.twist);
    // w^(p - k) at most, times the coefficient of the k-th derivative of w^p.
    double factor[4], coefficient = 1.0;
    for (int k = 0; k < 4; ++k) {
        factor[k] = coefficient;
        for (int i = k; i < power; ++i) factor[k] *= w;
        coefficient *= power - k;
    }
    const double X0 = factor[0] * y0, X1 = factor[0] * y1 + factor[1] * y0;
    const double X2 = factor[0] * y2 + 2.0 * factor[1] * y1 + factor[2] * y0;
    const double X3 = factor[0] * y3 + 3.0 * factor[1] * y2 + 3.0 * factor[2] * y1 + factor[3] * y0;
    // X'(0) = jY0, X''(0) = 2j Y'(0) = -2 b0 Y0 for one; X''(0) = -2 Y0 for two.
    const double q2 = power == 1 ? 2.0 * (Y0 * Y0 - 2.0 * b0 * Y0) : power == 2 ? -4.0 * Y0 : 0.0;
    const double third = 2.0 * (3.0 * X1 * X2 + (1.0 + X0) * X3);
    // 1 + q2 w^2/2 - third w^3/6 is least at one of the ends of [0, w].
    return 1.0 + w * w * (0.5 * q2 - third * w / 6.0) >= least_small * least_small * (1.0 - slack);
}

}  // namespace

double low_end(const LoopCurve& curve, double least_small) noexcept {
    const int power = std::abs(curve.net_integrators());
    if (power == 0) return 0.0;
    const double Y0 = curve.net_integrators() > 0 ? std::abs(1.0 / curve.low_gain()) : std::abs(curve.low_gain());
    double w = std::min(std::pow(1.0 / (3.3 * Y0), 1.0 / power), curve.smallest_root());
    if (curve.fastest_turn() > 0.0) w = std::min(w, 0.5 / curve.fastest_turn());
    if (is_finite(curve.end())) w = std::min(w, 0.5 * curve.end());
    if (!(w > 0.0)) return 0.0;
    for (int i = 0; i < 48; ++i, w *= 0.4)
        if (holds(curve, w, least_small)) return w;
    return 0.0;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
