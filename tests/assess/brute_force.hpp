// A loop looked at by brute force: a dense walk along the imaginary axis, and the closed loop's right-half-plane
// poles from the turn of its characteristic function (Mikhailov's criterion, not the one the library uses).
#pragma once

#include <algorithm>
#include <cmath>
#include <complex>
#include <vector>

#include "tauwright/model/transfer_function.hpp"

namespace oracle {

class BruteForce {
public:
    using Complex = std::complex<double>;

    explicit BruteForce(const tauwright::Factors& factors) : f_(factors) {
        above_ = expanded(f_.gain, f_.zeros_at_origin, f_.leads, f_.lead_pairs);
        below_ = expanded(1.0, f_.integrators, f_.lags, f_.lag_pairs);
        note_roots(f_.lags, f_.lag_pairs);
        note_roots(f_.leads, f_.lead_pairs);
        walk();
    }

    int unstable_poles() const { return static_cast<int>(std::lround(unstable_poles_)); }
    /// How far the count is from a whole number; 1 where the walk gave up.
    double doubt() const { return lost_ ? 1.0 : std::abs(unstable_poles_ - std::round(unstable_poles_)); }
    const std::vector<double>& gain_crossings() const { return gain_crossings_; }
    const std::vector<double>& phase_crossings() const { return phase_crossings_; }  ///< those with |L| > 0.05
    double closest() const { return std::sqrt(closest_); }                  ///< smallest |1 + L| on the grid
    double closest_inverse() const { return std::sqrt(closest_inverse_); }  ///< smallest |1 + 1/L| on the grid

    /// From the factors as they stand, so that expanding them costs no digits.
    Complex value(double w) const {
        const Complex s{0.0, w};
        Complex L = f_.gain * std::polar(1.0, -f_.dead_time * w);
        for (double T : f_.leads) L *= 1.0 + T * s;
        for (const auto& p : f_.lead_pairs) L *= pair(p, w);
        for (double T : f_.lags) L /= 1.0 + T * s;
        for (const auto& p : f_.lag_pairs) L /= pair(p, w);
        for (int i = 0; i < f_.integrators; ++i) L /= s;
        for (int i = 0; i < f_.zeros_at_origin; ++i) L *= s;
        return L;
    }

private:
    using Polynomial = std::vector<double>;  // lowest power first
    struct Point {
        double w;
        Complex above, below, sum;
        bool large() const { return std::norm(above) > 0.0025 * std::norm(below); }
    };

    static Complex pair(const tauwright::QuadraticFactor& p, double w) {
        const double x = p.time_constant * w;
        return {(1.0 - x) * (1.0 + x), 2.0 * p.damping * x};
    }
    static Polynomial expanded(double gain, int at_origin, const std::vector<double>& real, const std::vector<tauwright::QuadraticFactor>& pairs) {
        Polynomial p(static_cast<std::size_t>(at_origin), 0.0);
        p.push_back(gain);
        const auto times = [&p](double second, double first) {
            p.insert(p.end(), second == 0.0 ? 1 : 2, 0.0);
            for (std::size_t i = p.size(); i-- > 0;) p[i] += (i > 0 ? first * p[i - 1] : 0.0) + (i > 1 ? second * p[i - 2] : 0.0);
        };
        for (double T : real) times(0.0, T);
        for (const auto& f : pairs) times(f.time_constant * f.time_constant, 2.0 * f.damping * f.time_constant);
        return p;
    }
    static Complex on_axis(const Polynomial& p, double w) {
        double even = 0.0, odd = 0.0;
        for (std::size_t i = p.size(); i-- > 0;) (i % 2 == 0 ? even : odd) = p[i] - w * w * (i % 2 == 0 ? even : odd);
        return {even, w * odd};
    }
    void note_roots(const std::vector<double>& real, const std::vector<tauwright::QuadraticFactor>& pairs) {
        const auto note = [this](double w) { smallest_ = std::min(smallest_, w), largest_ = std::max(largest_, w); };
        for (double T : real) note(1.0 / std::abs(T));
        for (const auto& p : pairs) {
            note(1.0 / p.time_constant);
            if (std::abs(p.damping) < 0.1) sharp_.push_back({std::abs(p.damping) / p.time_constant, 1.0 / p.time_constant});
        }
    }

    double step_at(double w) const {
        double step = 2e-3 * w;
        // Beyond the last root |L| only falls, and nothing but the dead time turns it.
        if (f_.dead_time > 0.0) step = std::min(step, (w < 20.0 * largest_ ? 0.05 : 0.3) / f_.dead_time);
        for (const Complex& root : sharp_) step = std::min(step, 0.1 * std::hypot(root.real(), w - root.imag()));
        return step;
    }
    Point point(double w, Complex turned) const {
        const Complex n = on_axis(above_, w), d = on_axis(below_, w);
        const Complex a{n.real() * turned.real() - n.imag() * turned.imag(), n.real() * turned.imag() + n.imag() * turned.real()};
        return {w, a, d, a + d};
    }
    Point point(double w) const { return point(w, std::polar(1.0, -f_.dead_time * w)); }

    // Counts passages of the sum over the negative real axis, in steps that turn by less than 0.6.
    void follow(const Point& a, const Point& b, int depth = 0) {
        const double along = dot(a.sum, b.sum), across = a.sum.real() * b.sum.imag() - a.sum.imag() * b.sum.real();
        if (!(along > 0.0 && across * across < 0.4 * along * along)) {
            if (depth > 45) {
                lost_ = true;
                return;
            }
            const Point m = point(0.5 * (a.w + b.w));
            follow(a, m, depth + 1);
            follow(m, b, depth + 1);
            return;
        }
        const bool a_up = a.sum.imag() >= 0.0, b_up = b.sum.imag() >= 0.0;
        if (a_up != b_up && a.sum.real() + b.sum.real() < 0.0) circles_ += a_up ? 1 : -1;
    }
    static double dot(Complex a, Complex b) { return a.real() * b.real() + a.imag() * b.imag(); }

    // The change of sign between, by false position (Illinois) with bisection where it stalls.
    template <class Function>
    static double crossing(Function f, double a, double b) {
        double at_a = f(a), at_b = f(b);
        for (int i = 0; i < 200 && b - a > 1e-15 * b; ++i) {
            double m = i % 3 == 2 ? 0.5 * (a + b) : (a * at_b - b * at_a) / (at_b - at_a);
            if (!(m > a && m < b)) m = 0.5 * (a + b);
            const double at_m = f(m);
            if (at_m == 0.0) return m;
            if ((at_m > 0.0) == (at_a > 0.0)) a = m, at_a = at_m, at_b *= 0.5;
            else b = m, at_b = at_m, at_a *= 0.5;
        }
        return 0.5 * (a + b);
    }

    // Where the steps only come near a change of sign, as a sharp peak does: the place nearest to it, or beyond.
    template <class Function>
    void touching(Function f, const Point& a, const Point& b, std::vector<double>& found) {
        double low = a.w, high = b.w;
        for (int i = 0; i < 80 && high - low > 1e-13 * high; ++i) {
            const double third = (high - low) / 3.0, x = low + third, y = high - third, at_x = f(x), at_y = f(y);
            if (at_x < 0.0 || at_y < 0.0) {
                const double inside = at_x < 0.0 ? x : y;
                found.push_back(crossing(f, a.w, inside));
                found.push_back(crossing(f, inside, b.w));
                return;
            }
            (at_x < at_y ? high : low) = at_x < at_y ? y : x;
        }
    }

    void look_between(const Point& before, const Point& a, const Point& b) {
        follow(a, b);
        const double below = std::norm(b.below), sum = std::norm(b.sum);
        if (sum < closest_ * below) closest_ = sum / below;
        if (sum < closest_inverse_ * std::norm(b.above)) closest_inverse_ = sum / std::norm(b.above);
        look_for_gain(before, a, b);
        if (a.large() || b.large()) look_for_phase(before, a, b);
    }
    void look_for_gain(const Point& before, const Point& a, const Point& b) {
        const auto excess = [](const Point& p) { return std::norm(p.above) - std::norm(p.below); };
        const double at_a = excess(a), at_b = excess(b);
        if ((at_a > 0.0) != (at_b > 0.0)) gain_crossings_.push_back(crossing([this](double w) { return std::norm(value(w)) - 1.0; }, a.w, b.w));
        if (std::abs(at_a) > 0.05 * std::norm(a.below) || (at_a > 0.0) != (at_b > 0.0) || (at_a > 0.0) != (excess(before) > 0.0)) return;
        const double side = at_a > 0.0 ? 1.0 : -1.0, size = side * at_a / std::norm(a.below);
        if (size < side * at_b / std::norm(b.below) && size < side * excess(before) / std::norm(before.below))
            touching([this, side](double w) { return side * (std::norm(value(w)) - 1.0); }, before, b, gain_crossings_);
    }
    void look_for_phase(const Point& before, const Point& a, const Point& b) {
        const auto slant = [](const Point& p) {  // Im L / Re L, where L is on the left
            const double along = dot(p.above, p.below), across = p.above.imag() * p.below.real() - p.above.real() * p.below.imag();
            return along < 0.0 ? across / along : 1e300;
        };
        const double at_a = slant(a), at_b = slant(b);
        if (at_a == 1e300 || at_b == 1e300) return;
        if ((at_a > 0.0) != (at_b > 0.0)) phase_crossings_.push_back(crossing([this](double w) { return value(w).imag(); }, a.w, b.w));
        const double at_before = slant(before), side = at_a > 0.0 ? 1.0 : -1.0;
        if (std::abs(at_a) > 0.02 || at_before == 1e300 || (at_before > 0.0) != (at_a > 0.0) || (at_b > 0.0) != (at_a > 0.0)) return;
        if (side * at_a < side * at_b && side * at_a < side * at_before)
            touching([this, side](double w) { return side * value(w).imag() / value(w).real(); }, before, b, phase_crossings_);
    }

    void walk() {
        const double end = (above_.size() == below_.size() ? 200.0 : 20.0) * largest_;
        const Point start = point(0.0);
        Point a = point(1e-5 * smallest_), before = a;
        follow(start, a);
        Complex turned, turn;
        double last_step = 0.0;
        for (int steps = 0; a.w < end || (above_.size() != below_.size() && a.large()); ++steps) {
            if (lost_ || steps > 1'000'000) {
                lost_ = true;
                return;
            }
            const double step = step_at(a.w), w = a.w + step;
            if (step != last_step) turn = std::polar(1.0, -f_.dead_time * step);
            // Equal steps turn by equal angles; a fresh start now and then keeps rounding from adding up.
            turned = step == last_step && steps % 16 != 0 ? turned * turn : std::polar(1.0, -f_.dead_time * w);
            last_step = step;
            const Point b = point(w, turned);
            look_between(before, a, b);
            before = a;
            a = b;
        }
        const double half = std::acos(0.0);
        const auto angle = [](Complex z) { return std::atan2(z.imag() + 0.0, z.real()); };
        count(angle(a.sum) - angle(start.sum) + 4.0 * half * circles_, a.w, std::arg(1.0 + a.above / a.below));
    }

    // The rest of the turn: the denominator's factors to their ends, and 1 + L back to 1.
    void count(double turned, double w, double rest) {
        const double half = std::acos(0.0);
        double poles = f_.integrators;
        for (double T : f_.lags) turned += std::copysign(half, T) - std::atan(T * w), poles += 1.0;
        for (const auto& p : f_.lag_pairs) {
            turned += std::copysign(2.0 * half, p.damping) - std::arg(pair(p, w));
            poles += 2.0;
        }
        unstable_poles_ = 0.5 * (poles - (turned - rest) / half);
    }

    tauwright::Factors f_;
    Polynomial above_, below_;
    std::vector<Complex> sharp_;
    double smallest_ = 1.0, largest_ = 1.0, unstable_poles_ = 0.0, closest_ = 1e300, closest_inverse_ = 1e300;
    int circles_ = 0;
    bool lost_ = false;
    std::vector<double> gain_crossings_, phase_crossings_;
};

}  // namespace oracle
