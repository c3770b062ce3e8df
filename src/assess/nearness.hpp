// How near a piece of the curve comes to -1, for L and for 1/L.
#pragma once

#include <algorithm>
#include <cmath>
#include <complex>

#include "assess/loop_curve.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

struct Closest {
    double distance = 0.0;   ///< smallest |1 + X| known
    double frequency = 0.0;  ///< rad/s; 0 or infinite for limits
    bool inside = false;     ///< where |1 + X| is stationary, as exactly as doubles tell
};

/// A piece of the path with its midpoint looked at.
class Piece {
public:
    Piece(double low_end, double high_end, const CurvePoint& looked_at, const CurveBounds& bound) noexcept
        : low(low_end), high(high_end), middle(looked_at), bounds(bound) {}

    double low = 0.0, high = 0.0;
    CurvePoint middle;
    CurveBounds bounds;

    double half_width() const noexcept { return 0.5 * (high - low); }
    /// Bound on the change of log|R|, and of arg R, from the middle to any point.
    double rest_change(double slope) const noexcept { return change(slope, bounds.bend); }
    double phase_change(double slope) const noexcept { return change(slope, bounds.phase_bend); }

private:
    double change(double slope, double bend) const noexcept {
        const double h = half_width();
        return std::abs(slope) * h + 0.5 * bend * h * h;
    }
};

/// e^x <= growth(x) for x >= 0, cheap for small x.
inline double growth(double x) noexcept { return x < 1.0 ? 1.0 + x + x * x : std::exp(x); }

/// |z| and 1/z without the library's care for infinities, which costs several times as much.
inline double size_of(std::complex<double> z) noexcept {
    const double square = z.real() * z.real() + z.imag() * z.imag();
    return square > 1e-290 && square < 1e290 ? std::sqrt(square) : std::abs(z);
}
inline std::complex<double> inverse_of(std::complex<double> z) noexcept {
    const double square = z.real() * z.real() + z.imag() * z.imag();
    if (!(square > 1e-290 && square < 1e290)) return 1.0 / z;
    return {z.real() / square, -z.imag() / square};
}
/// arg(a / b).
inline double turn_between(std::complex<double> b, std::complex<double> a) noexcept {
    const double re = a.real() * b.real() + a.imag() * b.imag(), im = a.imag() * b.real() - a.real() * b.imag();
    return std::atan2(im, re);
}

/// X = (jw)^power Y with what is known of Y around one point: X = L or X = 1/L.
struct Quantity {
    std::complex<double> value, slope, bend;  ///< X, and the derivatives of log Y
    int power = 0;
};

inline Quantity open_loop_at(const CurvePoint& p, int net_integrators) noexcept {
    return {p.L, p.slope, p.bend, -net_integrators};
}
inline Quantity inverse_at(const CurvePoint& p, int net_integrators) noexcept {
    return {inverse_of(p.L), -p.slope, -p.bend, net_integrators};
}

/// Bounds on |X| and its derivatives over a piece.
struct QuantityBounds {
    double X0 = 0.0, X1 = 0.0, X2 = 0.0, X3 = 0.0;
};

QuantityBounds bounds_of(const Quantity& x, const Piece& piece) noexcept;

/// q = |1 + X|^2 and its first two derivatives at the middle.
struct SquaredDistance {
    double q0 = 0.0, q1 = 0.0, q2 = 0.0;
};

SquaredDistance squared_distance(const Quantity& x, double w) noexcept;

/// Bound on the third derivative of q over the piece.
inline double third_derivative(const QuantityBounds& b, double distance, double h) noexcept {
    const double F0 = std::min(1.0 + b.X0, distance + b.X1 * h);
    return 2.0 * (3.0 * b.X1 * b.X2 + F0 * b.X3);
}

/// Smallest q over the piece, from below.
inline double least(const SquaredDistance& s, double third, double h) noexcept {
    double low = s.q0 - std::abs(s.q1) * h + 0.5 * s.q2 * h * h;
    if (s.q2 > 0.0 && std::abs(s.q1) < s.q2 * h) low = s.q0 - 0.5 * s.q1 * s.q1 / s.q2;
    return low - third * h * h * h / 6.0;
}

/// Where |1 + X| is stationary between `low` and `high`, by Newton's method from `start`, or the nearer end (not
/// `inside` then); X = 1/L if `inverse`.
Closest nearest_between(const LoopCurve& curve, bool inverse, double low, double high, double start) noexcept;

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
