#include "assess/loop_curve.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

double distance_squared(std::complex<double> root, double low, double high) noexcept {
    const double beside = std::max({low - root.imag(), root.imag() - high, 0.0});
    return root.real() * root.real() + beside * beside;
}

}  // namespace

LoopCurve::LoopCurve(const TransferFunction& open_loop) : loop_(open_loop.cancelled()) {
    for (const auto& z : loop_.zeros())
        if (z != 0.0) zeros_.push_back(z);
    for (const auto& p : loop_.poles())
        if (p != 0.0) poles_.push_back(p);
    net_integrators_ = loop_.integrators() - loop_.zeros_at_origin();
    double smallest = loop_.dead_time() > 0.0 ? 1.0 / loop_.dead_time() : infinity;
    for (const auto* list : {&zeros_, &poles_})
        for (const auto& root : *list) {
            smallest = std::min(smallest, std::abs(root));
            largest_root_ = std::max(largest_root_, std::abs(root));
        }
    for (const auto& p : poles_) pole_on_axis_ |= p.real() == 0.0;
    if (net_integrators_ == 0) return;
    // Far enough down that |L| is beyond 1e8 (or below 1e-8 for zeros at rest).
    const double far = std::pow(1e8, net_integrators_ > 0 ? 1.0 : -1.0);
    const double asymptote = std::pow(std::abs(loop_.gain()) / far, 1.0 / net_integrators_);
    lowest_ = std::min(asymptote, 1e-3 * smallest);
    if (!is_finite(lowest_) || lowest_ <= 0.0) lowest_ = 1e-300;
}

CurvePoint LoopCurve::at(double w) const noexcept {
    const std::complex<double> s{0.0, w};
    std::complex<double> sum = 0.0;
    for (const auto& z : zeros_) sum += 1.0 / (s - z);
    for (const auto& p : poles_) sum -= 1.0 / (s - p);
    std::complex<double> slope = std::complex<double>{0.0, 1.0} * sum - std::complex<double>{0.0, loop_.dead_time()};
    if (net_integrators_ != 0) slope -= net_integrators_ / w;
    return {w, loop_(s), slope};
}

double LoopCurve::bend(double low, double high) const noexcept {
    double sum = net_integrators_ == 0 ? 0.0 : std::abs(net_integrators_) / (low * low);
    for (const auto* list : {&zeros_, &poles_})
        for (const auto& root : *list) sum += 1.0 / distance_squared(root, low, high);
    return sum;
}

double LoopCurve::tail(double w) const noexcept {
    if (w <= largest_root_) return infinity;
    double bound = std::abs(loop_.leading_coefficient()) * std::pow(w, -relative_degree());
    for (const auto& z : zeros_) bound *= z.imag() == 0.0 ? std::hypot(1.0, z.real() / w) : 1.0 + std::abs(z) / w;
    for (const auto& p : poles_) bound /= p.imag() == 0.0 ? 1.0 : 1.0 - std::abs(p) / w;
    return bound;
}

double LoopCurve::at_infinity() const noexcept {
    if (relative_degree() > 0) return 0.0;
    return relative_degree() < 0 ? infinity : std::abs(loop_.leading_coefficient());
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
