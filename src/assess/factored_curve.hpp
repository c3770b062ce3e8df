// A product of factors and one dead time on the imaginary axis.
#pragma once

#include "assess/loop_curve.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

class FactoredCurve final : public LoopCurve {
public:
    explicit FactoredCurve(const TransferFunction& open_loop);

    CurvePoint at(double w) const noexcept override;
    std::complex<double> value(double w) const noexcept override { return loop_({0.0, w}); }
    CurveBounds bounds(double low, double high) const noexcept override;
    double tail(double w) const noexcept override;
    double left_to_limit(double w) const noexcept override;

    const TransferFunction& loop() const noexcept { return loop_; }
    /// A pole and a zero on the axis at the same place: a mode the loop cannot damp.
    bool hides_axis_mode() const noexcept { return hides_axis_mode_; }

private:
    void take(const std::vector<std::complex<double>>& list, double sign);
    void find_axis_roots();
    void pair_for_tail();
    double paired_tail(double w) const noexcept;

    TransferFunction loop_;
    // Zeros (sign 1) and poles (sign -1) without those at the origin.
    struct Root {
        double re, im, sign;
    };
    std::vector<Root> roots_;
    // Each zero beside a pole at least as slow where there is one: |jTw + 1| / |jT'w + 1| is monotone.
    struct Ratio {
        double above, below;  ///< time constants, 0 for none; an infinite one below is an integrator
    };
    std::vector<Ratio> ratios_;
    double leading_ = 0.0;  // R = leading * product (jw - zeros) / product (jw - poles) * exp(-jw dead time)
    double sum_of_roots_ = 0.0;
    bool hides_axis_mode_ = false;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
