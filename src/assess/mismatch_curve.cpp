#include "assess/mismatch_curve.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "assess/nearness.hpp"
#include "assess/pole_counts.hpp"
#include "assess/sweep.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
using Complex = std::complex<double>;

/// Bounds on a function of a piece and its derivatives, from those of its logarithm.
struct Derivatives {
    double first, second, third;
};

Derivatives derivatives(double size, double slope, const CurveBounds& b) noexcept {
    return {size * slope, size * (slope * slope + b.bend), size * (slope * (slope * slope + 3.0 * b.bend) + b.twist)};
}

// Of log f where f has these derivatives and is at least `size`.
CurveBounds logarithm(const Derivatives& d, double size) noexcept {
    const double first = d.first / size, second = d.second / size;
    const double bend = second + first * first, twist = d.third / size + 3.0 * first * second + 2.0 * first * first * first;
    return {bend, twist, bend, twist};
}

// Whether the dead times are as small whole numbers, whose worst turns need not meet.
bool simple_ratio(double one, double other) noexcept {
    for (int n = 1; n <= 20; ++n) {
        const double x = n * one / other;
        if (std::abs(x - std::round(x)) < 1e-6 * x) return true;
    }
    return false;
}

// T = 1 - E sampled on the axis with the derivatives of log T.
struct ResponsePoint {
    Complex T, slope, bend;
};

ResponsePoint response_at(const FactoredCurve& curve, double w) noexcept {
    const CurvePoint p = curve.at(w);
    const double m = curve.net_integrators();
    return {p.L, p.slope - (m != 0.0 ? m / w : 0.0), p.bend + (m != 0.0 ? m / (w * w) : 0.0)};
}

}  // namespace

MismatchCurve::MismatchCurve(const TransferFunction& process, const InternalModelController& controller)
    : controller_(controller), forward_(process * controller.filter()), response_(controller.response()),
      order_at_rest_(controller.integrators()) {
    net_integrators_ = forward_.net_integrators() + order_at_rest_;
    const Polynomial& series = controller.denominator_series();
    const auto k = static_cast<std::size_t>(order_at_rest_);
    low_gain_ = forward_.low_gain() / series[k];
    double lags = 0.0;
    for (double T : controller.response().factors().lags) lags += T;
    for (const auto& p : controller.response().factors().lag_pairs) lags += 2.0 * p.damping * p.time_constant;
    low_phase_slope_ = forward_.low_phase_slope() - (series[k + 1] / series[k] - lags);
    smallest_root_ = std::min(forward_.smallest_root(), response_.smallest_root());
    largest_root_ = std::max(forward_.largest_root(), response_.largest_root());
    fastest_turn_ = forward_.fastest_turn() + response_.fastest_turn();
    lasting_turn_ = response_.at_infinity() > 0.0 ? fastest_turn_ : forward_.fastest_turn();
    axis_roots_ = forward_.axis_roots();
    find_limits();
    controller_poles_ = count_controller_poles();
    // A right-half-plane zero of Q that 1 - T shares is no pole of the controller.
    int shared = 0;
    for (const Complex& zero : controller.filter().zeros())
        shared += zero.real() > 0.0 && std::abs(controller.one_minus_response(zero)) < 1e-9;
    unstable_poles_ = controller_poles_.value_or(0) - shared + forward_.unstable_poles();
}

void MismatchCurve::find_limits() {
    const double a = response_.at_infinity(), b = forward_.at_infinity();
    at_infinity_ = a < 1.0 ? b / (1.0 - a) : infinity;
    const double ks = controller_.response().leading_coefficient(), kb = forward_.loop().leading_coefficient();
    const bool same_delay = forward_.loop().dead_time() == controller_.response().dead_time();
    if (a == 0.0 && b == 0.0) return;
    const double as = a > 0.0 ? ks : 0.0, bs = b > 0.0 ? kb : 0.0;
    if (!has_dead_time()) {
        limit_ = bs / (1.0 - as);
        nearest_at_infinity_ = std::abs(1.0 + limit_);
        inverse_nearest_at_infinity_ = limit_ != 0.0 ? std::abs(1.0 + 1.0 / limit_) : infinity;
        return;
    }
    // 1 - T + B and 1 - T, with their turning terms at their worst.
    neutral_ = a >= 1.0 || (same_delay ? std::abs(as - bs) : a + b) >= 1.0;
    commensurate_ = !same_delay && simple_ratio(forward_.loop().dead_time(), controller_.response().dead_time());
    if (neutral_) return;
    if (same_delay) {
        nearest_at_infinity_ = std::min(std::abs((1.0 - as + bs) / (1.0 - as)), std::abs((1.0 + as - bs) / (1.0 + as)));
        inverse_nearest_at_infinity_ = b > 0.0 ? (1.0 - std::abs(as - bs)) / b : infinity;
    } else {
        nearest_at_infinity_ = 1.0 - at_infinity_;
        inverse_nearest_at_infinity_ = b > 0.0 ? (1.0 - a - b) / b : infinity;
    }
}

Complex MismatchCurve::value(double w) const noexcept { return forward_.value(w) / controller_.one_minus_response({0.0, w}); }

CurvePoint MismatchCurve::at(double w) const noexcept {
    const CurvePoint b = forward_.at(w);
    const ResponsePoint t = response_at(response_, w);
    const Complex E = controller_.one_minus_response({0.0, w}), inverse = 1.0 / E;
    const double m = order_at_rest_;
    // E' = -T', E'' = -T''; of 1/E times (jw)^m.
    const Complex dE = -t.T * t.slope * inverse, ddE = -t.T * (t.slope * t.slope + t.bend) * inverse;
    return {w, b.L * inverse, b.slope - dE + m / w, b.bend - ddE + dE * dE - m / (w * w)};
}

CurveBounds MismatchCurve::bounds(double low, double high) const noexcept {
    const CurveBounds b = forward_.bounds(low, high);
    if (low <= 0.0) {
        const CurveBounds rest = bounds_from_rest(high);
        return {b.bend + rest.bend, b.twist + rest.twist, b.phase_bend + rest.bend, b.phase_twist + rest.twist};
    }
    const double middle = 0.5 * (low + high), h = 0.5 * (high - low);
    const CurveBounds t = response_.bounds(low, high);
    const ResponsePoint p = response_at(response_, middle);
    const double change = std::abs(p.slope.real()) * h + 0.5 * t.bend * h * h;
    const Derivatives T = derivatives(std::abs(p.T) * std::exp(std::min(change, 300.0)), std::abs(p.slope) + t.bend * h, t);
    const double least = std::abs(controller_.one_minus_response({0.0, middle})) - T.first * h;
    if (!(least > 0.0)) return {infinity, infinity, infinity, infinity};
    const CurveBounds E = logarithm(T, least);
    const double m = order_at_rest_;
    return {b.bend + E.bend + m / (low * low), b.twist + E.twist + 2.0 * m / (low * low * low), b.phase_bend + E.bend, b.phase_twist + E.twist};
}

// Near 0 from the power series: 1 - T = s^m (n0 + n1 s + ...) / D(s).
CurveBounds MismatchCurve::bounds_from_rest(double high) const noexcept {
    const Polynomial& series = controller_.denominator_series();
    Derivatives N{0.0, 0.0, 0.0};
    double others = 0.0, power[4] = {1.0, 0.0, 0.0, 0.0};  // w^k and its derivatives
    for (std::size_t k = static_cast<std::size_t>(order_at_rest_) + 1; k < series.size(); ++k) {
        const double n = static_cast<double>(k) - order_at_rest_, c = std::abs(series[k]);
        const double next[4] = {power[0] * high, n * power[0], n * (n - 1.0) * (n > 1.0 ? power[0] / high : 0.0),
                                n * (n - 1.0) * (n - 2.0) * (n > 2.0 ? power[0] / (high * high) : 0.0)};
        std::copy(next, next + 4, power);
        others += c * power[0];
        N.first += c * power[1];
        N.second += c * power[2];
        N.third += c * power[3];
    }
    const double least = std::abs(series[static_cast<std::size_t>(order_at_rest_)]) - others;
    if (!(least > 0.0)) return {infinity, infinity, infinity, infinity};
    const CurveBounds numerator = logarithm(N, least);
    const CurveBounds t = response_.bounds(0.0, high);
    const double bend = numerator.bend + t.bend, twist = numerator.twist + t.twist;
    return {bend, twist, bend, twist};
}

double MismatchCurve::tail(double w) const noexcept {
    const double t = response_.tail(w);
    return t < 1.0 ? forward_.tail(w) / (1.0 - t) : infinity;
}

double MismatchCurve::left_to_limit(double w) const noexcept {
    if (has_dead_time()) return infinity;
    const double k = response_.limit(), left = k != 0.0 ? response_.left_to_limit(w) : 0.0;
    if (!(left < 0.5)) return infinity;
    const double away = (k != 0.0 ? std::abs(k) * (growth(left) - 1.0) : response_.tail(w)) / std::abs(1.0 - k);
    return away < 0.5 ? forward_.left_to_limit(w) + away / (1.0 - away) : infinity;
}

// Without dead time of its own the process settles toward a phase, and 1 - T toward 1.
bool MismatchCurve::phase_settled(double w) const noexcept {
    const double t = response_.tail(w);
    if (forward_.fastest_turn() > 0.0 || !(t < 0.5) || !(w > 2.0 * largest_root_)) return false;
    const double left = forward_.left_to_limit(w) + 4.0 * t;  // arcsin(t) here and there
    const std::complex<double> L = value(w);
    return std::abs(std::atan2(-L.imag(), -L.real())) > left;
}

namespace {

/// The turn of E = 1 - T from `low` on: pieces over which it turns by less than half a circle.
class TurnOfDenominator {
public:
    TurnOfDenominator(const InternalModelController& controller, const FactoredCurve& response)
        : controller_(controller), response_(response) {}

    std::optional<double> from(double low) {
        Complex last = controller_.one_minus_response({0.0, low});
        double w = low;
        for (int pieces = 0; pieces < 200'000; ++pieces) {
            if (response_.tail(w) < 0.9) return turn_ + std::arg(1.0 / last);  // within a disc around 1 from here on
            if (response_.at_infinity() > 0.0 && w > 1e4 * response_.largest_root()) return turn_ + std::arg(1.0 / last);
            double step = w;
            while (!turns_less_than_half(w, step)) {
                step *= 0.5;
                if (step < 1e-9 * w) return std::nullopt;
            }
            const Complex next = controller_.one_minus_response({0.0, w + step});
            turn_ += std::arg(next / last);
            last = next;
            w += step;
        }
        return std::nullopt;
    }

private:
    bool turns_less_than_half(double low, double step) const noexcept {
        const double middle = low + 0.5 * step, h = 0.5 * step;
        const CurveBounds t = response_.bounds(low, low + step);
        const ResponsePoint p = response_at(response_, middle);
        const double change = std::abs(p.slope.real()) * h + 0.5 * t.bend * h * h;
        if (!(change < 20.0)) return false;
        const double steep = std::abs(p.T) * std::exp(change) * (std::abs(p.slope) + t.bend * h);
        const double least = std::abs(controller_.one_minus_response({0.0, middle})) - steep * h;
        return least > 0.0 && steep * step < 3.0 * least;
    }

    const InternalModelController& controller_;
    const FactoredCurve& response_;
    double turn_ = 0.0;
};

}  // namespace

std::optional<int> MismatchCurve::count_controller_poles() const {
    if (!(response_.at_infinity() < 1.0)) return std::nullopt;
    // From the turn of 1 - T; its zeros at 0 take half a turn each.
    double low = 1e-3 / (1.0 / response_.smallest_root() + response_.fastest_turn() + 1e-300);
    const Complex first = controller_.one_minus_response({0.0, low});
    Complex rest = controller_.denominator_series()[static_cast<std::size_t>(order_at_rest_)];
    for (int i = 0; i < order_at_rest_; ++i) rest *= Complex{0.0, 1.0};
    const auto turn = TurnOfDenominator(controller_, response_).from(low);
    if (!turn) return std::nullopt;
    const double exact = response_.unstable_poles() - 0.5 * order_at_rest_ - (*turn + std::arg(first / rest)) / std::numbers::pi;
    if (!(std::abs(exact - std::round(exact)) <= (response_.at_infinity() > 0.0 ? 0.25 : 1e-3))) return std::nullopt;
    // And from the crossings as a gain on T rises from 0 to 1, the last of them at 0 itself.
    const FactoredCurve negative(response_.loop().with_gain(-response_.loop().gain()));
    const SweepResult found = sweep(negative, nullptr);
    if (!found.complete || found.capped) return std::nullopt;
    const int count = static_cast<int>(std::round(exact));
    int other = response_.unstable_poles();
    for (const Crossing& c : found.phase_crossings) {
        const CurvePoint p = negative.at(c.w);
        // Near 0, where T is 1, the phase is lost in rounding.
        if (c.w > low && size_of(p.L) > 1.0 && !c.touches) other += p.slope.imag() < 0.0 ? 2 : -2;
    }
    return other == count ? std::optional<int>(count) : std::nullopt;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
