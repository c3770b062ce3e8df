// A process under the exact controller of a model: two dead times, the process's and the model's.
#pragma once

#include <optional>

#include "assess/factored_curve.hpp"
#include "tauwright/control/internal_model_controller.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// L = B / (1 - T) with B = Q G.
class MismatchCurve final : public LoopCurve {
public:
    MismatchCurve(const TransferFunction& process, const InternalModelController& controller);

    CurvePoint at(double w) const noexcept override;
    std::complex<double> value(double w) const noexcept override;
    CurveBounds bounds(double low, double high) const noexcept override;
    double tail(double w) const noexcept override;
    bool phase_settled(double w) const noexcept override;
    double left_to_limit(double w) const noexcept override;
    double smallest_of_interest() const noexcept override { return 1e-4; }

    /// Right-half-plane roots of 1 - T, that is of the controller's own denominator; empty where two counts differ.
    std::optional<int> controller_poles() const noexcept { return controller_poles_; }
    /// The controller keeps gain around its own loop that any error of the dead time makes unstable.
    bool fragile() const noexcept { return response_.at_infinity() >= 0.5; }
    /// Infinitely many poles to the right, unless the dead times are as small whole numbers (`commensurate`).
    bool neutral() const noexcept { return neutral_; }
    bool commensurate() const noexcept { return commensurate_; }

private:
    CurveBounds bounds_from_rest(double high) const noexcept;
    void find_limits();
    std::optional<int> count_controller_poles() const;

    const InternalModelController& controller_;
    FactoredCurve forward_, response_;  // B and T
    int order_at_rest_;                 // 1 - T = e0 s^order + e1 s^(order + 1) + ..., over T's denominator
    std::optional<int> controller_poles_;
    bool neutral_ = false, commensurate_ = false;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
