#include "assess/crossing.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// Values this small are 0 but for the rounding of log|L| or arg L.
constexpr double rounding = 2e-15;

/// The function whose zero is wanted: log|L|, or the angle of L from the negative real axis.
class Level {
public:
    Level(const LoopCurve& curve, CrossingOf of) noexcept : curve_(curve), of_(of), m_(curve.net_integrators()) {}

    double of(std::complex<double> L) const noexcept {
        if (of_ == CrossingOf::phase) return std::atan2(-L.imag(), -L.real());
        return 0.5 * std::log(L.real() * L.real() + L.imag() * L.imag());
    }
    double slope(const CurvePoint& p) const noexcept {
        return of_ == CrossingOf::phase ? p.slope.imag() : p.slope.real() - (m_ != 0 ? m_ / p.w : 0.0);
    }
    double bend(const CurvePoint& p) const noexcept {
        return of_ == CrossingOf::phase ? p.bend.imag() : p.bend.real() + (m_ != 0 ? m_ / (p.w * p.w) : 0.0);
    }

    struct Range {
        double low, high;
        bool one_sign() const noexcept { return low > 0.0 || high < 0.0; }
    };
    Range slopes(const Piece& piece) const noexcept {
        const double middle = of_ == CrossingOf::phase ? piece.middle.slope.imag() : piece.middle.slope.real();
        const double bend = of_ == CrossingOf::phase ? piece.bounds.phase_bend : piece.bounds.bend;
        return widened(middle, bend * piece.half_width(), -m_ / piece.low, -m_ / piece.high);
    }
    Range bends(const Piece& piece) const noexcept {
        const double middle = of_ == CrossingOf::phase ? piece.middle.bend.imag() : piece.middle.bend.real();
        const double twist = of_ == CrossingOf::phase ? piece.bounds.phase_twist : piece.bounds.twist;
        return widened(middle, twist * piece.half_width(), m_ / (piece.low * piece.low), m_ / (piece.high * piece.high));
    }

    /// The one zero of a monotone piece with a change of sign.
    double zero_between(double low, double high, double at_low, double at_high) const noexcept {
        return solve(low, high, at_low, at_high, [&](const CurvePoint& p) { return std::pair(of(p.L), slope(p)); },
                     [&](double w) { return of(curve_.value(w)); });
    }
    /// The one stationary point of a convex or concave piece with a change of sign of the slope.
    double stationary_between(double low, double high, double at_low, double at_high) const noexcept {
        return solve(low, high, at_low, at_high, [&](const CurvePoint& p) { return std::pair(slope(p), bend(p)); },
                     [&](double w) { return slope(curve_.at(w)); });
    }

private:
    Range widened(double middle, double spread, double a, double b) const noexcept {
        if (of_ == CrossingOf::phase || m_ == 0) return {middle - spread, middle + spread};
        return {middle - spread + std::min(a, b), middle + spread + std::max(a, b)};
    }

    // Newton's method kept within the bracket; the last steps take the exact value.
    template <class Function, class Exact>
    double solve(double low, double high, double at_low, double at_high, Function f, Exact exact) const noexcept {
        double w = low + (high - low) * std::clamp(at_low / (at_low - at_high), 0.05, 0.95);
        for (int i = 0; i < 100; ++i) {
            const auto [value, slope] = f(curve_.at(w));
            if (value == 0.0) break;
            ((value > 0.0) == (at_low > 0.0) ? low : high) = w;
            double next = slope != 0.0 ? w - value / slope : low;
            const bool converged = std::abs(next - w) <= 1e-8 * w || high - low <= 4e-16 * high;
            if (!(next > low && next < high) && !converged) next = 0.5 * (low + high);
            w = next;
            if (!converged) continue;
            for (int k = 0; k < 2; ++k) {
                const double step = slope != 0.0 ? exact(w) / slope : 0.0;
                if (std::abs(step) <= 1e-8 * w) w -= step;
            }
            return w;
        }
        return w;
    }

    const LoopCurve& curve_;
    CrossingOf of_;
    int m_;
};

// Cheap tests that the piece has nothing to do with |L| = 1 or with the negative real axis.
bool excluded(const LoopCurve& curve, const Piece& piece, CrossingOf of) noexcept {
    const std::complex<double> L = piece.middle.L;
    const double h = piece.half_width();
    if (of == CrossingOf::gain) {
        double change = piece.rest_change(piece.middle.slope.real());
        if (const int m = curve.net_integrators(); m != 0) change += piece.low > 0.0 ? std::abs(m) * h / piece.low : 1e9;
        if (!(change < 300.0)) return false;
        const double size = L.real() * L.real() + L.imag() * L.imag(), grows = growth(2.0 * change);
        return size > grows || size * grows < 1.0;
    }
    const double change = piece.phase_change(piece.middle.slope.imag());
    if (L.real() >= 0.0 && change < 1.5) return true;
    if (!(change < 3.2)) return false;
    // The sine of an angle is below it.
    if (L.imag() * L.imag() > change * change * (L.real() * L.real() + L.imag() * L.imag())) return true;
    return std::abs(std::atan2(-L.imag(), -L.real())) > change;
}

}  // namespace

CrossingSearch crossings(const LoopCurve& curve, const Piece& piece, CrossingOf of) noexcept {
    CrossingSearch found;
    found.settled = excluded(curve, piece, of);
    if (found.settled) return found;
    const Level level(curve, of);
    if (of == CrossingOf::phase) {
        // The angle must not wrap on the piece.
        const double change = piece.phase_change(piece.middle.slope.imag());
        if (!(std::abs(level.of(piece.middle.L)) + change < 3.1)) return found;
    }
    // At both ends of the path L is real, and there 1 or -1 but for rounding is 1 or -1.
    const auto end = [&](double w) {
        const double x = level.of(w > 0.0 ? curve.value(w) : curve.low_gain());
        const double small = w == 0.0 ? rounding : w == curve.end() ? 1e-9 : 0.0;
        return std::abs(x) <= small && (of == CrossingOf::phase || w == 0.0) ? 0.0 : x;
    };
    const auto cross = [&](double low, double high, double at_low, double at_high) {
        if (at_low == 0.0 && low > 0.0) found.crossing[found.count++] = {low, false, 0.0};
        else if (at_low != 0.0 && (at_low > 0.0) != (at_high > 0.0) && at_high != 0.0)
            found.crossing[found.count++] = {level.zero_between(low, high, at_low, at_high), false, 0.0};
    };
    if (level.slopes(piece).one_sign()) {
        found.settled = true;
        cross(piece.low, piece.high, end(piece.low), end(piece.high));
        return found;
    }
    if (!level.bends(piece).one_sign()) return found;
    found.settled = true;
    const auto slope = [&](double w) { return w > 0.0 ? level.slope(curve.at(w)) : 0.0; };
    const double at_low = end(piece.low), at_high = end(piece.high);
    const double slope_low = slope(piece.low), slope_high = slope(piece.high);
    if (slope_low * slope_high >= 0.0) {  // monotone after all
        cross(piece.low, piece.high, at_low, at_high);
        return found;
    }
    const double turn = level.stationary_between(piece.low, piece.high, slope_low, slope_high);
    const double extreme = level.of(curve.value(turn));
    if (std::abs(extreme) <= rounding && (at_low > 0.0) == (at_high > 0.0)) {
        const double bend = std::abs(level.bend(curve.at(turn)));
        found.crossing[found.count++] = {turn, true, std::sqrt(2.0 * rounding / bend)};
        return found;
    }
    cross(piece.low, turn, at_low, extreme);
    cross(turn, piece.high, extreme, at_high);
    return found;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
