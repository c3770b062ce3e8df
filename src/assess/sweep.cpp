#include "assess/sweep.hpp"

#include <algorithm>
#include <boost/math/tools/toms748_solve.hpp>
#include <cmath>
#include <limits>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double closed_to = 1e-7;             // enclosures of peaks close to this, relative
constexpr std::size_t most_points = 400'000;   // looked at before the sweep gives up
constexpr std::size_t most_crossings = 1000;

using Policy = boost::math::policies::policy<boost::math::policies::promote_double<false>,
                                             boost::math::policies::evaluation_error<boost::math::policies::ignore_error>>;

template <class Function>
double root_between(Function f, double low, double high) {
    const double at_low = f(low), at_high = f(high);
    if (at_low == 0.0) return low;
    if (at_high == 0.0) return high;
    std::uintmax_t passes = 200;
    const auto ends = boost::math::tools::toms748_solve(f, low, high, at_low, at_high,
                                                        boost::math::tools::eps_tolerance<double>(52), passes, Policy());
    return 0.5 * (ends.first + ends.second);
}

// Angle from the negative real axis, -pi to pi.
double angle_from_negative(std::complex<double> L) noexcept { return std::atan2(-L.imag(), -L.real()); }

struct Todo {
    bool gain = true, phase = true, near_L = true, near_inverse = true;
    bool any() const noexcept { return gain || phase || near_L || near_inverse; }
};

class Walk {
public:
    explicit Walk(const LoopCurve& curve) : curve_(curve) {}

    SweepResult run() {
        start();
        double low = curve_.lowest();
        const double dead_time = curve_.loop().dead_time();
        const double first = low > 0.0 ? 0.0 : first_step();
        for (;;) {
            const double growth = std::max(low, first);
            const double high = low + (dead_time > 0.0 ? std::min(growth, 1.0 / dead_time) : growth);
            Todo todo;
            todo.phase = !curve_.constant_phase();
            visit(low, high, todo, 0);
            low = high;
            if (!result_.complete || finished(low)) break;
        }
        finish();
        return std::move(result_);
    }

private:
    double first_step() const noexcept {
        const double dead_time = curve_.loop().dead_time();
        double step = dead_time > 0.0 ? 0.1 / dead_time : infinity;
        for (const auto& p : curve_.loop().poles()) step = std::min(step, 0.1 * std::abs(p));
        for (const auto& z : curve_.loop().zeros()) step = std::min(step, 0.1 * std::abs(z));
        return is_finite(step) ? step : 1.0;
    }

    void start() {
        result_.complete = true;
        // Limits at both ends count among the closest approaches.
        const double infinite_gain = curve_.at_infinity();
        result_.to_minus_one = {infinite_gain < 1.0 ? 1.0 - (curve_.loop().dead_time() > 0.0 ? infinite_gain : 0.0) : infinity,
                                infinity};
        if (curve_.relative_degree() == 0 && curve_.loop().dead_time() == 0.0)
            result_.to_minus_one.distance = std::abs(1.0 + curve_.loop().leading_coefficient());
        result_.inverse_to_minus_one = {infinity, infinity};
        if (infinite_gain > 0.0 && curve_.relative_degree() == 0) {
            const double k = curve_.loop().leading_coefficient();
            result_.inverse_to_minus_one.distance =
                curve_.loop().dead_time() > 0.0 ? std::abs(1.0 - 1.0 / std::abs(k)) : std::abs(1.0 + 1.0 / k);
        }
        if (curve_.net_integrators() > 0) note(1.0, 0.0, result_.inverse_to_minus_one);
        if (curve_.net_integrators() == 0) {
            const double K = curve_.loop().gain();
            note(std::abs(1.0 + K), 0.0, result_.to_minus_one);
            note(std::abs(1.0 + 1.0 / K), 0.0, result_.inverse_to_minus_one);
        }
        last_ = 1.0 + curve_.value(curve_.lowest());
        if (curve_.net_integrators() > 0) {
            // What 1 + L turns below the lowest frequency: there it is K / (jw)^m and turns no more.
            std::complex<double> asymptote = curve_.loop().gain();
            for (int i = 0; i < curve_.net_integrators(); ++i) asymptote /= std::complex<double>{0.0, 1.0};
            result_.winding = std::arg(last_ / asymptote);
        }
        // A few looks in advance spare much proving later on.
        double w = curve_.lowest() > 0.0 ? curve_.lowest() : 0.01 * first_step();
        const double stop = std::max({10.0 * curve_.largest_root(), 1e3 * w,
                                      curve_.loop().dead_time() > 0.0 ? 10.0 / curve_.loop().dead_time() : 0.0});
        for (; w < stop; w *= 1.5) look(curve_.value(w), w);
    }

    static void note(double distance, double w, Closest& closest) noexcept {
        if (distance < closest.distance) closest = {distance, w};
    }
    void look(std::complex<double> L, double w) noexcept {
        note(std::abs(1.0 + L), w, result_.to_minus_one);
        if (L != 0.0) note(std::abs(1.0 + 1.0 / L), w, result_.inverse_to_minus_one);
    }

    // Beyond w nothing can cross or come closer.
    bool finished(double w) const {
        const double bound = curve_.tail(w), rest = curve_.at_infinity();
        if (!(bound < 1.0)) return rest >= 1.0 && w > 1e4 * std::max(curve_.largest_root(), first_step());
        const double near = 1.0 - bound, inverse_near = 1.0 / bound - 1.0;
        if (near < result_.to_minus_one.distance * (1.0 - closed_to) ||
            inverse_near < result_.inverse_to_minus_one.distance * (1.0 - closed_to))
            return bound < rest * (1.0 + 1e-6) || bound < 1e-7;
        if (curve_.loop().dead_time() == 0.0)  // the phase has settled toward its last value
            return w > 1e3 * curve_.largest_root() || curve_.largest_root() == 0.0;
        return bound < std::max(result_.largest_below_one, 1e-12) || bound < rest * (1.0 + 1e-3);
    }

    void visit(double low, double high, Todo todo, int depth) {
        if (++points_ > most_points) {
            result_.complete = false;
            return;
        }
        const double middle = 0.5 * (low + high), h = 0.5 * (high - low);
        const CurvePoint point = curve_.at(middle);
        const CurveBounds bounds = curve_.bounds(low, high);
        const double bend = bounds.bend;
        const double gain_change = std::abs(point.slope.real()) * h + 0.5 * bend * h * h;
        const double phase_change = std::abs(point.slope.imag()) * h + 0.5 * bend * h * h;
        look(point.L, middle);
        if (todo.gain) todo.gain = !settle_gain(low, high, point, bend * h, gain_change);
        if (todo.phase) todo.phase = !settle_phase(low, high, point, bend * h, phase_change);
        const Piece piece{h, bounds, gain_change};
        if (todo.near_L && settle_near({point.L, point.slope, point.bend}, piece, result_.to_minus_one)) {
            // Over this piece 1 + L turns by less than half a circle.
            const std::complex<double> next = 1.0 + curve_.value(high);
            result_.winding += std::arg(next / last_);
            last_ = next;
            todo.near_L = false;
        }
        if (todo.near_inverse)
            todo.near_inverse = !settle_near({1.0 / point.L, -point.slope, -point.bend}, piece, result_.inverse_to_minus_one);
        if (!todo.any()) return;
        if (depth > 60 || middle <= low || middle >= high) {
            // A root on the axis or a curve through -1: what is here has been looked at.
            if (todo.near_L) last_ = 1.0 + curve_.value(high);
            if (todo.near_L || todo.gain) result_.complete &= result_.to_minus_one.distance < 1e-8;
            return;
        }
        visit(low, middle, todo, depth + 1);
        visit(middle, high, todo, depth + 1);
    }

    bool settle_gain(double low, double high, const CurvePoint& point, double slope_change, double change) {
        const double level = std::log(std::abs(point.L));
        if (std::abs(level) > change) return true;
        // A gain of exactly 1 at rest touches without crossing.
        if (low == 0.0 && high < 1e-4 * first_step() && std::abs(std::abs(curve_.loop().gain()) - 1.0) < 4e-16) return true;
        if (!(std::abs(point.slope.real()) > slope_change)) return false;
        const auto f = [&](double w) { return std::log(std::abs(curve_.value(w))); };
        const double at_low = f(low), at_high = f(high);
        if ((at_low > 0.0) != (at_high > 0.0)) result_.gain_crossings.push_back(root_between(f, low, high));
        return true;
    }

    bool settle_phase(double low, double high, const CurvePoint& point, double slope_change, double change) {
        const double angle = angle_from_negative(point.L);
        if (std::abs(angle) > change) return true;
        if (!(std::abs(point.slope.imag()) > slope_change) || !(std::abs(angle) + change < 3.0)) return false;
        const auto f = [&](double w) { return angle_from_negative(curve_.value(w)); };
        const double at_low = f(low), at_high = f(high);
        if ((at_low > 0.0) != (at_high > 0.0) && (low > 0.0 || std::abs(at_low) > 1e-12)) {
            const double w = root_between(f, low, high), gain = std::abs(curve_.value(w));
            if (result_.phase_crossings.size() < most_crossings) result_.phase_crossings.push_back(w);
            if (gain < 1.0) result_.largest_below_one = std::max(result_.largest_below_one, gain);
            if (gain > 1.0 && (result_.smallest_above_one == 0.0 || gain < result_.smallest_above_one))
                result_.smallest_above_one = gain;
        }
        return true;
    }

    // X = L or 1/L in the middle of a piece, with the derivatives of its logarithm.
    struct Middle {
        std::complex<double> X, slope, bend;
    };
    struct Piece {
        double h;  // half its width
        CurveBounds bounds;
        double gain_change;
    };

    // Is |1 + X| nowhere on the piece noticeably below the smallest found, and does it turn by less than
    // half a circle? From the Taylor series of q = |1 + X|^2 with a bound on its third derivative.
    static bool settle_near(const Middle& m, const Piece& p, const Closest& closest) noexcept {
        if (!(p.gain_change < 50.0) || !(closest.distance > 0.0)) return false;
        const double h = p.h, size = std::abs(m.X), growth = std::exp(p.gain_change);
        const double enough = closest.distance * (1.0 - closed_to);
        if (size / growth - 1.0 > enough && size > growth) {  // stays outside the circle around 0 of that radius ...
            if (turn_below_half(size * growth, size / growth - 1.0, m, p)) return true;
        } else if (1.0 - size * growth > enough) {            // ... or inside the one that keeps away from -1
            return true;
        }
        const double steep = std::abs(m.slope) + p.bounds.bend * h;
        const double X0 = size * growth, X1 = X0 * steep, X2 = X0 * (steep * steep + p.bounds.bend);
        const double X3 = X0 * (steep * (steep * steep + 3.0 * p.bounds.bend) + p.bounds.twist);
        const double F0 = std::min(1.0 + X0, std::abs(1.0 + m.X) + X1 * h);
        const double third = 2.0 * (3.0 * X1 * X2 + F0 * X3);
        const std::complex<double> dX = m.X * m.slope, ddX = m.X * (m.slope * m.slope + m.bend);
        const double f_re = 1.0 + m.X.real(), f_im = m.X.imag();
        const double q0 = f_re * f_re + f_im * f_im;
        const double q1 = 2.0 * (f_re * dX.real() + f_im * dX.imag());
        const double q2 = 2.0 * (std::norm(dX) + f_re * ddX.real() + f_im * ddX.imag());
        double least = q0 - std::abs(q1) * h + 0.5 * q2 * h * h;
        if (q2 > 0.0 && std::abs(q1) < q2 * h) least = q0 - 0.5 * q1 * q1 / q2;
        least -= third * h * h * h / 6.0;
        return least > enough * enough && turn_below_half(X0, std::sqrt(least), m, p);
    }

    // |d arg(1 + X)| <= |X'| / |1 + X| all along the piece.
    static bool turn_below_half(double largest, double nearest, const Middle& m, const Piece& p) noexcept {
        return 2.0 * p.h * largest * (std::abs(m.slope) + p.bounds.bend * p.h) < 3.0 * nearest;
    }

    void finish() {
        std::sort(result_.gain_crossings.begin(), result_.gain_crossings.end());
        std::sort(result_.phase_crossings.begin(), result_.phase_crossings.end());
        polish(result_.to_minus_one, false);
        polish(result_.inverse_to_minus_one, true);
        // From the last point to the value at infinity, within a disc around 1 or close to the limit.
        if (curve_.relative_degree() > 0) result_.winding += std::arg(1.0 / last_);
        else if (curve_.loop().dead_time() == 0.0) result_.winding += std::arg((1.0 + curve_.loop().leading_coefficient()) / last_);
        else result_.winding += std::arg(1.0 / last_);
    }

    // The distance is stationary at its minimum: find where its slope changes sign.
    void polish(Closest& closest, bool inverse) const {
        const double w = closest.frequency;
        if (!(w > 0.0) || !is_finite(w) || !(closest.distance > 1e-9)) return;
        const auto slope = [&](double x) {
            const CurvePoint p = curve_.at(x);
            const std::complex<double> X = inverse ? 1.0 / p.L : p.L;
            const std::complex<double> dX = inverse ? -X * p.slope : X * p.slope;
            return ((1.0 + X.real()) * dX.real() + X.imag() * dX.imag());
        };
        for (double reach = 1e-4; reach < 0.6; reach *= 2.0) {
            const double low = w * (1.0 - reach), high = w * (1.0 + reach);
            if (!(slope(low) < 0.0) || !(slope(high) > 0.0)) continue;
            const double best = root_between(slope, low, high);
            const std::complex<double> L = curve_.value(best);
            const double distance = std::abs(1.0 + (inverse ? 1.0 / L : L));
            if (distance <= closest.distance) closest = {distance, best};
            return;
        }
    }

    const LoopCurve& curve_;
    SweepResult result_;
    std::complex<double> last_ = 1.0;
    std::size_t points_ = 0;
};

}  // namespace

SweepResult sweep(const LoopCurve& curve) { return Walk(curve).run(); }

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
