#include "assess/bandwidth.hpp"

#include "assess/nearness.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

/// |1 + X|^2 - 2: below 0 where |S| (X = L) or |T| (X = 1/L) is above 1/sqrt(2).
class Excess {
public:
    Excess(const LoopCurve& curve, bool inverse) noexcept : curve_(curve), inverse_(inverse) {}

    enum class Piecewise { free, monotone, unclear };
    Piecewise look(double low, double high) const noexcept {
        const Piece piece{low, high, curve_.at(0.5 * (low + high)), curve_.bounds(low, high)};
        const int m = curve_.net_integrators();
        const Quantity x = inverse_ ? inverse_at(piece.middle, m) : open_loop_at(piece.middle, m);
        const double h = piece.half_width(), size = size_of(x.value);
        const double change = piece.rest_change(x.slope.real()) + (m != 0 ? std::abs(m) * h / low : 0.0);
        if (change < 20.0) {  // all of X within sqrt(2) - 1 of 0, or beyond sqrt(2) + 1
            const double grows = growth(change);
            if (size * grows < 0.414 || size > 2.415 * grows) return Piecewise::free;
        }
        const QuantityBounds b = bounds_of(x, piece);
        const SquaredDistance s = squared_distance(x, piece.middle.w);
        const double third = third_derivative(b, std::sqrt(s.q0), h);
        const double reach = std::abs(s.q1) * h + 0.5 * std::abs(s.q2) * h * h + third * h * h * h / 6.0;
        if (std::abs(s.q0 - 2.0) > reach) return Piecewise::free;
        return std::abs(s.q1) > std::abs(s.q2) * h + 0.5 * third * h * h ? Piecewise::monotone : Piecewise::unclear;
    }
    double at(double w) const noexcept {
        const std::complex<double> L = curve_.value(w), f = 1.0 + (inverse_ ? inverse_of(L) : L);
        return f.real() * f.real() + f.imag() * f.imag() - 2.0;
    }
    double root(double low, double high) const noexcept {
        const bool rising = at(high) > 0.0;
        double w = 0.5 * (low + high);
        for (int i = 0; i < 100; ++i) {
            const CurvePoint p = curve_.at(w);
            const int m = curve_.net_integrators();
            const SquaredDistance s = squared_distance(inverse_ ? inverse_at(p, m) : open_loop_at(p, m), w);
            const double value = s.q0 - 2.0;
            ((value > 0.0) == rising ? high : low) = w;
            double next = w - value / s.q1;
            const bool converged = std::abs(next - w) <= 1e-9 * w || high - low <= 4e-16 * high;
            if (!(next > low && next < high) && !converged) next = 0.5 * (low + high);
            w = next;
            if (converged) break;
        }
        return w;
    }

private:
    const LoopCurve& curve_;
    bool inverse_;
};

constexpr int most_pieces = 20'000;

}  // namespace

std::optional<double> sensitivity_bandwidth(const LoopCurve& curve, double from) {
    const Excess excess(curve, false);
    double low = from, factor = 2.0;
    const double first = std::min(0.1 * curve.smallest_root(), curve.fastest_turn() > 0.0 ? 0.1 / curve.fastest_turn() : 1e300);
    for (int i = 0; i < most_pieces && low < curve.end(); ++i) {
        const double w = low > 0.0 ? low : first / 2.0;
        if (curve.tail(w) < 0.4 && low > 0.0) break;  // |1 + L| < sqrt(2) from here on
        const double high = std::min(low > 0.0 ? factor * low : first, curve.end());
        const auto kind = excess.look(low, high);
        if (kind == Excess::Piecewise::unclear && factor > 1.0 + 1e-12) {
            factor = 1.0 + 0.5 * (factor - 1.0);
            if (low == 0.0) low = 1e-9 * first;
            continue;
        }
        if (kind != Excess::Piecewise::free && excess.at(high) <= 0.0 && excess.at(low) > 0.0) return excess.root(low, high);
        low = high;
        factor = std::min(1.0 + 2.0 * (factor - 1.0), 8.0);
    }
    return std::nullopt;
}

std::optional<double> complementary_bandwidth(const LoopCurve& curve, double from) {
    const Excess excess(curve, true);
    double high = is_finite(curve.end()) ? curve.end() : from;
    if (!is_finite(curve.end())) {
        for (int i = 0; i < 400 && !(curve.tail(high) < 0.4); ++i) high *= 1.4;
        if (!(curve.tail(high) < 0.4)) return std::nullopt;  // |T| need not fall at all
    } else if (excess.at(high) <= 0.0) {
        return std::nullopt;
    }
    double factor = 2.0;
    for (int i = 0; i < most_pieces && high > 1e-12 * from; ++i) {
        const double low = high / factor;
        const auto kind = excess.look(low, high);
        if (kind == Excess::Piecewise::unclear && factor > 1.0 + 1e-12) {
            factor = 1.0 + 0.5 * (factor - 1.0);
            continue;
        }
        if (kind != Excess::Piecewise::free && excess.at(low) <= 0.0 && excess.at(high) > 0.0) return excess.root(low, high);
        high = low;
        factor = std::min(1.0 + 2.0 * (factor - 1.0), 8.0);
    }
    return std::nullopt;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
