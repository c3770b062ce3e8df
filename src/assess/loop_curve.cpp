#include "assess/loop_curve.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

}  // namespace

LoopCurve::LoopCurve(const TransferFunction& open_loop) : loop_(open_loop.cancelled()) {
    const auto take = [&](const std::vector<std::complex<double>>& list, double sign) {
        for (const auto& root : list)
            if (root != 0.0) roots_.push_back({root.real(), root.imag(), sign});
    };
    take(loop_.zeros(), 1.0);
    take(loop_.poles(), -1.0);
    net_integrators_ = loop_.integrators() - loop_.zeros_at_origin();
    leading_ = loop_.leading_coefficient();
    double smallest = loop_.dead_time() > 0.0 ? 1.0 / loop_.dead_time() : infinity;
    for (const Root& root : roots_) {
        const double size = std::hypot(root.re, root.im);
        smallest = std::min(smallest, size);
        largest_root_ = std::max(largest_root_, size);
        pole_on_axis_ |= root.sign < 0.0 && root.re == 0.0;
    }
    if (net_integrators_ == 0) return;
    // Far enough down that |L| is beyond 1e8 (or below 1e-8 for zeros at rest).
    const double far = net_integrators_ > 0 ? 1e8 : 1e-8;
    const double asymptote = std::pow(std::abs(loop_.gain()) / far, 1.0 / net_integrators_);
    lowest_ = std::min(asymptote, 1e-3 * smallest);
    if (!is_finite(lowest_) || lowest_ <= 0.0) lowest_ = 1e-300;
}

CurvePoint LoopCurve::at(double w) const noexcept {
    // Real arithmetic with one division a root; the library's complex type guards against infinities
    // that cannot occur here and takes several times as long.
    double re = leading_, im = 0.0;
    double slope_re = 0.0, slope_im = -loop_.dead_time(), bend_re = 0.0, bend_im = 0.0;
    for (const Root& root : roots_) {
        const double x = -root.re, y = w - root.im;  // jw - root
        const double d = 1.0 / (x * x + y * y);
        const double inverse_re = x * d, inverse_im = -y * d;
        const double factor_re = root.sign > 0.0 ? x : inverse_re, factor_im = root.sign > 0.0 ? y : inverse_im;
        const double product = re * factor_re - im * factor_im;
        im = re * factor_im + im * factor_re;
        re = product;
        slope_re -= root.sign * inverse_im;
        slope_im += root.sign * inverse_re;
        bend_re += root.sign * (inverse_re * inverse_re - inverse_im * inverse_im);
        bend_im += root.sign * (2.0 * inverse_re * inverse_im);
    }
    if (net_integrators_ != 0) {
        const double inverse = 1.0 / w;
        for (int i = 0; i < net_integrators_; ++i) {  // times 1/(jw) = -j/w
            const double turned = im * inverse;
            im = -re * inverse;
            re = turned;
        }
        for (int i = 0; i > net_integrators_; --i) {
            const double turned = -im * w;
            im = re * w;
            re = turned;
        }
        slope_re -= net_integrators_ * inverse;
        bend_re += net_integrators_ * inverse * inverse;
    }
    if (loop_.dead_time() > 0.0) {
        const double c = std::cos(loop_.dead_time() * w), s = -std::sin(loop_.dead_time() * w);
        const double turned = re * c - im * s;
        im = re * s + im * c;
        re = turned;
    }
    return {w, {re, im}, {slope_re, slope_im}, {bend_re, bend_im}};
}

CurveBounds LoopCurve::bounds(double low, double high) const noexcept {
    CurveBounds b;
    if (net_integrators_ != 0) {
        const double inverse = 1.0 / low, m = std::abs(net_integrators_);
        b.bend = m * inverse * inverse;
        b.twist = 2.0 * b.bend * inverse;
    }
    for (const Root& root : roots_) {
        const double beside = std::max({low - root.im, root.im - high, 0.0});
        const double square = 1.0 / (root.re * root.re + beside * beside);
        b.bend += square;
        b.twist += 2.0 * square * std::sqrt(square);
    }
    return b;
}

double LoopCurve::tail(double w) const noexcept {
    if (w <= largest_root_) return infinity;
    double bound = std::abs(leading_) * std::pow(w, -relative_degree());
    for (const Root& root : roots_) {
        const double size = std::hypot(root.re, root.im) / w;
        if (root.sign > 0.0) bound *= root.im == 0.0 ? std::hypot(1.0, size) : 1.0 + size;
        else if (root.im != 0.0) bound /= 1.0 - size;
    }
    return bound;
}

double LoopCurve::at_infinity() const noexcept {
    if (relative_degree() > 0) return 0.0;
    return relative_degree() < 0 ? infinity : std::abs(leading_);
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
