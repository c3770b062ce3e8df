// A loop looked at by brute force: a dense walk along the imaginary axis, and the closed loop's right-half-plane
// poles from the turn of its characteristic function (Mikhailov's criterion, not the one the library uses).
#pragma once

#include <cmath>
#include <complex>
#include <vector>

#include "tauwright/model/transfer_function.hpp"

namespace oracle {

class BruteForce {
public:
    using Complex = std::complex<double>;

    explicit BruteForce(const tauwright::Factors& factors) : f_(factors) { walk(); }

    int unstable_poles() const { return static_cast<int>(std::lround(unstable_poles_)); }
    /// How far the count is from a whole number: near 1/2 where the walk lost its way.
    double doubt() const { return std::abs(unstable_poles_ - std::round(unstable_poles_)); }
    const std::vector<double>& gain_crossings() const { return gain_crossings_; }
    const std::vector<double>& phase_crossings() const { return phase_crossings_; }  ///< those with |L| > 0.05
    double closest() const { return closest_; }                  ///< smallest |1 + L| on the grid
    double closest_inverse() const { return closest_inverse_; }  ///< smallest |1 + 1/L| on the grid

    Complex value(double w) const { return numerator(w) / denominator(w); }

private:
    Complex numerator(double w) const {
        const Complex s{0.0, w};
        Complex n = f_.gain * std::exp(-f_.dead_time * s);
        for (double T : f_.leads) n *= 1.0 + T * s;
        for (const auto& p : f_.lead_pairs) n *= 1.0 + 2.0 * p.damping * p.time_constant * s + p.time_constant * p.time_constant * s * s;
        return n;
    }
    Complex denominator(double w) const {
        const Complex s{0.0, w};
        Complex d = 1.0;
        for (int i = 0; i < f_.integrators; ++i) d *= s;
        for (double T : f_.lags) d *= 1.0 + T * s;
        for (const auto& p : f_.lag_pairs) d *= 1.0 + 2.0 * p.damping * p.time_constant * s + p.time_constant * p.time_constant * s * s;
        return d;
    }
    Complex characteristic(double w) const { return denominator(w) + numerator(w); }

    double turn(double a, double b, int depth = 0) const {
        const double step = std::arg(characteristic(b) / characteristic(a));
        if (std::abs(step) < 0.5 || depth > 40) return step;
        const double m = 0.5 * (a + b);
        return turn(a, m, depth + 1) + turn(m, b, depth + 1);
    }

    template <class Function>
    static double bisect(Function f, double a, double b) {
        const bool at_a = f(a) > 0.0;
        for (int i = 0; i < 200 && b - a > 1e-15 * b; ++i) {
            const double m = 0.5 * (a + b);
            ((f(m) > 0.0) == at_a ? a : b) = m;
        }
        return 0.5 * (a + b);
    }

    void walk() {
        double smallest = 1.0, largest = 1.0;
        for (double T : f_.lags) smallest = std::min(smallest, 1.0 / std::abs(T)), largest = std::max(largest, 1.0 / std::abs(T));
        for (double T : f_.leads) smallest = std::min(smallest, 1.0 / std::abs(T)), largest = std::max(largest, 1.0 / std::abs(T));
        for (const auto& p : f_.lag_pairs) smallest = std::min(smallest, 1.0 / p.time_constant), largest = std::max(largest, 1.0 / p.time_constant);
        const double reach = f_.dead_time > 0.0 ? 0.03 / f_.dead_time : 1e300;
        double w = 1e-5 * smallest, turned = turn(0.0, w);
        Complex L = value(w);
        // Beyond the last root |L| only falls: stop where nothing of interest is left.
        while (w < 20.0 * largest || std::abs(L) > 0.01) {
            const double next = w + std::min(2e-3 * w, reach);
            const Complex M = value(next);
            turned += turn(w, next);
            closest_ = std::min(closest_, std::abs(1.0 + M));
            closest_inverse_ = std::min(closest_inverse_, std::abs(1.0 + 1.0 / M));
            if ((std::abs(L) > 1.0) != (std::abs(M) > 1.0))
                gain_crossings_.push_back(bisect([&](double x) { return std::abs(value(x)) - 1.0; }, w, next));
            if (L.real() < 0.0 && M.real() < 0.0 && (L.imag() > 0.0) != (M.imag() > 0.0) && std::abs(L) > 0.05)
                phase_crossings_.push_back(bisect([&](double x) { return value(x).imag(); }, w, next));
            w = next;
            L = M;
        }
        // The rest of the turn: the denominator's factors to their ends, and 1 + L back to 1.
        const double half = std::acos(0.0);
        double poles = f_.integrators;
        for (double T : f_.lags) turned += std::copysign(half, T) - std::atan(T * w), poles += 1.0;
        for (const auto& p : f_.lag_pairs) {
            const double x = p.time_constant * w;
            turned += std::copysign(2.0 * half, p.damping) - std::atan2(2.0 * p.damping * x, 1.0 - x * x);
            poles += 2.0;
        }
        turned -= std::arg(1.0 + L);
        unstable_poles_ = 0.5 * (poles - turned / half);
    }

    tauwright::Factors f_;
    double unstable_poles_ = 0.0, closest_ = 1e300, closest_inverse_ = 1e300;
    std::vector<double> gain_crossings_, phase_crossings_;
};

}  // namespace oracle
