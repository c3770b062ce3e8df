// The loop as it runs: the block's own differences and the process held over each scan, on the unit circle.
#pragma once

#include "assess/loop_curve.hpp"
#include "tauwright/control/pid_settings.hpp"
#include "tauwright/discretize/held.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The block's transfer function of the error, C(z), by its roots less 1:
///   C = F [Kc + Ki h / (1 - 1/z) + Kd (1 - 1/z) / (1 - (1 - a)/z)], F = c / (1 - (1 - c)/z).
struct SampledController {
    double leading = 0.0;
    std::vector<std::complex<double>> zero_offsets, pole_offsets;

    SampledController(const PidSettings& settings, double scan_time);
    std::complex<double> at_offset(std::complex<double> z_minus_one) const noexcept;
};

/// L(e^{jw h}) for w up to pi/h.
class SampledCurve final : public LoopCurve {
public:
    SampledCurve(const TransferFunction& process, const PidSettings& settings, double scan_time);

    CurvePoint at(double w) const noexcept override;
    std::complex<double> value(double w) const noexcept override;
    CurveBounds bounds(double low, double high) const noexcept override;
    double tail(double w) const noexcept override;
    /// Nearly coincident zeros of the held process cannot always be told apart; then nothing is proved.
    bool roots_are_known() const noexcept { return process_.factored_error() < 1e-8; }

private:
    void take(const std::vector<std::complex<double>>& offsets, double sign, bool undamped);
    void take_root(std::complex<double> offset, double sign, bool undamped);
    void finish_limits();
    void pair_for_tail();

    SampledController controller_;
    DiscreteTransferFunction process_;
    double h_;
    struct Root {
        double re, im, sign;  ///< root less 1; zeros 1, poles -1
        double size, over, angle;  ///< |z|, |z| - 1 and arg z of the root
    };
    static double squared_distance_from(const Root& root, double from, double to) noexcept;
    std::vector<Root> roots_;
    // Real positive zeros beside such poles: |u - zero| / |u - pole| is monotone along the circle.
    struct Ratio {
        double zero, pole;  ///< less 1
    };
    std::vector<Ratio> ratios_;
    std::vector<Root> alone_;
    double leading_ = 0.0;
    double delay_ = 0.0;  ///< whole scans, poles at z = 0 included
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
