#include "assess/factored_curve.hpp"

#include <algorithm>
#include <cmath>
#include <functional>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

}  // namespace

FactoredCurve::FactoredCurve(const TransferFunction& open_loop) : loop_(open_loop.cancelled()) {
    roots_.reserve(static_cast<std::size_t>(loop_.order() + loop_.zero_count()));
    take(loop_.zeros(), 1.0);
    take(loop_.poles(), -1.0);
    net_integrators_ = loop_.integrators() - loop_.zeros_at_origin();
    leading_ = loop_.leading_coefficient();
    low_gain_ = loop_.gain();
    low_phase_slope_ = -loop_.dead_time();
    const Factors& f = loop_.factors();
    for (double T : f.leads) low_phase_slope_ += T;
    for (double T : f.lags) low_phase_slope_ -= T;
    for (const auto& p : f.lead_pairs) low_phase_slope_ += 2.0 * p.damping * p.time_constant;
    for (const auto& p : f.lag_pairs) low_phase_slope_ -= 2.0 * p.damping * p.time_constant;
    unstable_poles_ = loop_.unstable_poles();
    fastest_turn_ = lasting_turn_ = loop_.dead_time();
    const int degree = loop_.relative_degree();
    at_infinity_ = degree > 0 ? 0.0 : degree < 0 ? infinity : std::abs(leading_);
    limit_ = degree == 0 && loop_.dead_time() == 0.0 ? leading_ : 0.0;
    if (limit_ != 0.0) nearest_at_infinity_ = std::abs(1.0 + limit_), inverse_nearest_at_infinity_ = std::abs(1.0 + 1.0 / limit_);
    else if (at_infinity_ > 0.0) nearest_at_infinity_ = 1.0 - at_infinity_, inverse_nearest_at_infinity_ = 1.0 / at_infinity_ - 1.0;
    constant_phase_ = roots_.empty() && loop_.dead_time() == 0.0;
    find_axis_roots();
    pair_for_tail();
}

void FactoredCurve::take(const std::vector<std::complex<double>>& list, double sign) {
    for (const auto& root : list) {
        if (root == 0.0) continue;
        roots_.push_back({root.real(), root.imag(), sign});
        const double size = std::hypot(root.real(), root.imag());
        smallest_root_ = std::min(smallest_root_, size);
        largest_root_ = std::max(largest_root_, size);
        sum_of_roots_ += size;
    }
}

void FactoredCurve::find_axis_roots() {
    const auto on_axis = [&](double im, double sign) {
        return std::find_if(roots_.begin(), roots_.end(), [&](const Root& r) { return r.re == 0.0 && r.im == im && r.sign == sign; });
    };
    // A pole and a zero at the same place leave L alone.
    for (std::size_t i = 0; i < roots_.size();) {
        const double im = roots_[i].im, sign = roots_[i].sign;
        if (roots_[i].re == 0.0 && on_axis(im, -sign) != roots_.end()) {
            hides_axis_mode_ = true;
            roots_.erase(on_axis(im, -sign));
            roots_.erase(on_axis(im, sign));
            i = 0;
        } else {
            ++i;
        }
    }
    for (const Root& root : roots_) {
        if (root.re != 0.0 || root.im <= 0.0) continue;
        const auto known = std::find_if(axis_roots_.begin(), axis_roots_.end(), [&](const AxisRoot& a) { return a.w == root.im; });
        const int count = root.sign < 0.0 ? 1 : -1;
        if (known == axis_roots_.end()) axis_roots_.push_back({root.im, count});
        else known->poles += count;
    }
    std::sort(axis_roots_.begin(), axis_roots_.end(), [](const AxisRoot& a, const AxisRoot& b) { return a.w < b.w; });
}

CurvePoint FactoredCurve::at(double w) const noexcept {
    // Real arithmetic with one division a root; the library's complex type guards against infinities
    // that cannot occur here and takes several times as long.
    double re = leading_, im = 0.0;
    double slope_re = 0.0, slope_im = -fastest_turn_, bend_re = 0.0, bend_im = 0.0;
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
    const double inverse = net_integrators_ > 0 ? 1.0 / w : w;
    for (int i = std::abs(net_integrators_); i > 0; --i) {  // times 1/(jw) = -j/w, or times jw
        const double turned = net_integrators_ > 0 ? im * inverse : -im * inverse;
        im = net_integrators_ > 0 ? -re * inverse : re * inverse;
        re = turned;
    }
    if (fastest_turn_ > 0.0) {
        const double c = std::cos(fastest_turn_ * w), s = -std::sin(fastest_turn_ * w);
        const double turned = re * c - im * s;
        im = re * s + im * c;
        re = turned;
    }
    return {w, {re, im}, {slope_re, slope_im}, {bend_re, bend_im}};
}

CurveBounds FactoredCurve::bounds(double low, double high) const noexcept {
    CurveBounds b;
    double nearest = infinity;
    for (const Root& root : roots_) {
        const double beside = std::max({low - root.im, root.im - high, 0.0});
        const double square = root.re * root.re + beside * beside;
        nearest = std::min(nearest, square);
        b.bend += 1.0 / square;
    }
    b.twist = nearest < infinity ? 2.0 * b.bend / std::sqrt(nearest) : 0.0;
    b.phase_bend = b.bend;
    b.phase_twist = b.twist;
    if (low > 2.0 * largest_root_) {
        // Far out L is a power of jw times 1 - c/w each with c = root/j, and the power has no say in the phase:
        // |1/(w - c)^2 - 1/w^2| <= 2 |c| / (w - |c|)^3, and the next derivative in kind.
        const double inverse = 1.0 / low, left = 1.0 / (1.0 - largest_root_ * inverse);
        const double share = sum_of_roots_ * inverse * inverse * inverse * left * left * left;
        b.phase_bend = std::min(b.bend, 2.0 * share);
        b.phase_twist = std::min(b.twist, 6.0 * share * inverse * left);
    }
    return b;
}

void FactoredCurve::pair_for_tail() {
    const Factors& f = loop_.factors();
    std::vector<double> above(static_cast<std::size_t>(f.zeros_at_origin), infinity);
    std::vector<double> below(static_cast<std::size_t>(f.integrators), infinity);
    for (double T : f.leads) above.push_back(std::abs(T));
    for (double T : f.lags) below.push_back(std::abs(T));
    // |T^2 s^2 + 2 z T s + 1| is at most |jTw + 1|^2 for |z| < 1; beyond, the factors are real.
    for (const auto& p : f.lead_pairs) {
        const double r = std::abs(p.damping) > 1.0 ? std::abs(p.damping) + std::sqrt(p.damping * p.damping - 1.0) : 1.0;
        above.insert(above.end(), {p.time_constant * r, p.time_constant / r});
    }
    std::sort(above.begin(), above.end(), std::greater<>());
    std::sort(below.begin(), below.end(), std::greater<>());
    ratios_.resize(std::max(above.size(), below.size()));
    for (std::size_t i = 0; i < ratios_.size(); ++i)
        ratios_[i] = {i < above.size() ? above[i] : 0.0, i < below.size() ? below[i] : 0.0};
}

double FactoredCurve::tail(double w) const noexcept {
    double square = loop_.gain() * loop_.gain();
    const auto factor = [&](double T) { return T < infinity ? 1.0 + T * T * w * w : w * w; };
    for (const Ratio& r : ratios_) {
        const double here = factor(r.above) / factor(r.below);
        if (r.above <= r.below) square *= here;
        else if (r.below > 0.0 && r.above < infinity) square *= std::max(here, (r.above / r.below) * (r.above / r.below));
        else return paired_tail(w);
    }
    for (const auto& p : loop_.factors().lag_pairs) {
        const double x = p.time_constant * w, z = std::abs(p.damping);
        const double here = (1.0 - x * x) * (1.0 - x * x) + 4.0 * z * z * x * x;
        const bool past_peak = x * x >= 1.0 - 2.0 * z * z;
        square /= past_peak ? here : 4.0 * z * z * (1.0 - z * z);
    }
    return std::sqrt(square);
}

double FactoredCurve::left_to_limit(double w) const noexcept {
    double left = 0.0;
    for (const Root& root : roots_) {  // |log(1 - x)| <= |x| / (1 - |x|)
        const double x = std::hypot(root.re, root.im) / w;
        if (!(x < 0.5)) return infinity;
        left += x / (1.0 - x);
    }
    return left;
}

// Where real lags do not suffice for the leads: every root by its distance.
double FactoredCurve::paired_tail(double w) const noexcept {
    if (w <= largest_root_) return infinity;
    double bound = std::abs(leading_) * std::pow(w, -loop_.relative_degree());
    for (const Root& root : roots_) {
        const double size = std::hypot(root.re, root.im) / w;
        if (root.sign > 0.0) bound *= root.im == 0.0 ? std::hypot(1.0, size) : 1.0 + size;
        else if (root.im != 0.0) bound /= 1.0 - size;
    }
    return bound;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
