// The open loop on the imaginary axis, with bounds that hold between the points looked at.
#pragma once

#include <complex>
#include <vector>

#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// L(jw) and the first two derivatives of its logarithm.
struct CurvePoint {
    double w = 0.0;
    std::complex<double> L;
    std::complex<double> slope;  ///< d log L / dw
    std::complex<double> bend;   ///< d^2 log L / dw^2
};

/// Bounds over an interval.
struct CurveBounds {
    double bend = 0.0;   ///< on |d^2 log L / dw^2|
    double twist = 0.0;  ///< on |d^3 log L / dw^3|
};

class LoopCurve {
public:
    explicit LoopCurve(const TransferFunction& open_loop);

    CurvePoint at(double w) const noexcept;
    std::complex<double> value(double w) const noexcept { return loop_({0.0, w}); }
    /// Bounds over [low, high]; infinite where a root lies on the interval.
    CurveBounds bounds(double low, double high) const noexcept;
    /// Bound on |L(jw)| for all frequencies from w on; infinite below the largest root.
    double tail(double w) const noexcept;

    const TransferFunction& loop() const noexcept { return loop_; }
    int net_integrators() const noexcept { return net_integrators_; }
    int relative_degree() const noexcept { return loop_.relative_degree(); }
    /// |L| at infinite frequency.
    double at_infinity() const noexcept;
    /// A frequency below which the loop is its low-frequency asymptote; 0 where it is finite at rest.
    double lowest() const noexcept { return lowest_; }
    double largest_root() const noexcept { return largest_root_; }
    /// The phase is the same at every frequency: gain and integrators alone.
    bool constant_phase() const noexcept { return roots_.empty() && loop_.dead_time() == 0.0; }
    bool pole_on_axis() const noexcept { return pole_on_axis_; }

private:
    TransferFunction loop_;
    // Zeros (sign 1) and poles (sign -1) without those at the origin.
    struct Root {
        double re, im, sign;
    };
    std::vector<Root> roots_;
    int net_integrators_ = 0;
    double leading_ = 0.0;  // L = leading (jw)^-net * product (jw - zeros) / product (jw - poles) * exp(-jw dead time)
    double lowest_ = 0.0, largest_root_ = 0.0;
    bool pole_on_axis_ = false;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
