// What is not known of a process: a box about it, the confidence region of a fit, or a list of models. Compiled.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "tauwright/identify/identify.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

enum class UncertaintyKind : std::int32_t {
    box = 0,                ///< every parameter within its own limits, independent of the others
    confidence_region = 1,  ///< the joint region of a fit's parameters
    models = 2,             ///< operating points, one model each
};

constexpr const char* name_of(UncertaintyKind kind) noexcept {
    switch (kind) {
        case UncertaintyKind::box: return "box";
        case UncertaintyKind::confidence_region: return "confidence_region";
        case UncertaintyKind::models: return "models";
    }
    return "unknown";
}

/// Half widths about the nominal process, 0 and more. Relative to each parameter (0.3 means from
/// 0.7 to 1.3 of it), or `absolute` in the parameter's own unit. Members with equal names move
/// independently: a half width for `lags` lets every lag have its own error.
struct UncertaintyBox {
    double gain = 0.0;       ///< of the gain, or slope of an integrating process
    double lags = 0.0;       ///< of every lag and of the time constant of every lag pair; absolute: s
    double leads = 0.0;      ///< of every lead and of the time constant of every lead pair; absolute: s
    double damping = 0.0;    ///< of every pair
    double dead_time = 0.0;  ///< absolute: s; a dead time never falls below 0
    bool absolute = false;

    friend bool operator==(const UncertaintyBox&, const UncertaintyBox&) = default;
};

/// A set of processes. Immutable.
class Uncertainty {
public:
    /// Throws `not_finite`, or `out_of_domain` for a negative half width and for a relative one of 1
    /// or more on anything but the dead time: the box would hold a gain, lag, lead or damping of 0.
    static Uncertainty box(const UncertaintyBox& half_widths);

    /// The joint region of gain (or slope), lag and dead time that holds the truth with this
    /// confidence, other parameters of the fit being whatever they are:
    ///   (p - estimate)' covariance^-1 (p - estimate) <= chi-square quantile,
    /// with as many degrees of freedom as there are parameters fitted among those; the part with a
    /// dead time below 0 is left out. A covariance of 0 is a region of one point.
    /// Throws `missing_argument` for a fit without a model or with all of them fixed,
    /// `out_of_domain` for a confidence outside (0, 1), for a region that reaches a gain or lag of 0
    /// (the record cannot tell its sign at this confidence), for a covariance that is not positive
    /// definite, and `not_finite` where the record cannot tell the parameters apart. Allocates.
    static Uncertainty from_fit(const FittedModel& fit, double confidence = 0.95);

    /// Throws `missing_argument` for an empty list. The list stands in place of the nominal process.
    static Uncertainty of_models(std::vector<TransferFunction> models);

    UncertaintyKind kind() const noexcept { return kind_; }
    const UncertaintyBox& half_widths() const noexcept { return box_; }                  ///< of a box; else 0
    double confidence() const noexcept { return confidence_; }                           ///< of a region; else 0
    const std::vector<TransferFunction>& models() const noexcept { return models_; }     ///< of a list; of a region, its center
    /// A region as it is used: parameters of gain (or slope), lag_1, dead_time that were fitted ...
    const std::vector<std::string>& parameter_names() const noexcept { return names_; }
    const std::vector<double>& estimates() const noexcept { return estimates_; }
    /// ... and the lower triangle, row by row with zeros above, whose columns are the half axes of
    /// the region in some order: region = estimates + triangle * ball of radius 1.
    const std::vector<double>& half_axes() const noexcept { return half_axes_; }

private:
    Uncertainty() = default;
    UncertaintyKind kind_ = UncertaintyKind::box;
    UncertaintyBox box_ = {};
    double confidence_ = 0.0;
    std::vector<TransferFunction> models_ = {};
    std::vector<std::string> names_ = {};
    std::vector<double> estimates_ = {}, half_axes_ = {};
};

}  // namespace v0
}  // namespace tauwright
