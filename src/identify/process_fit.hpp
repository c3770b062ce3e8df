// What the fitters of both forms share.
#pragma once

#include <array>
#include <cstddef>
#include <vector>

#include "identify/fit_data.hpp"
#include "math/damped_least_squares.hpp"
#include "tauwright/identify/identify.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Places in a ParameterArray. `gain` is the slope for an integrating form, which has no lag.
enum ParameterIndex : std::size_t { at_offset, at_drift, at_curvature, at_gain, at_lag, at_dead_time };

struct FitOptions {
    std::array<bool, most_parameters> free = {};
    ParameterArray fixed = {};     ///< values of the parameters that are not free
    double time_center = 0.0;      ///< drift and curvature count from here
};

struct FitResult {
    ParameterArray parameters = {};
    NormalEquations equations = {};
};

/// Basis of one piece at given nonlinear parameters: a function b(t) (the decay, or the time since
/// the piece began), and the sums that per-move gains need.
struct PieceSums {
    double n = 0, b = 0, bb = 0, t = 0, tt = 0, tb = 0, y = 0, yt = 0, yb = 0;
};

FitResult fit_first_order(const FitData& data, const FitOptions& options);
FitResult fit_integrating(const FitData& data, const FitOptions& options);

/// Gain of each group of moves with lag and dead time as fitted: `group_of[edge]` names the group.
struct GroupGains {
    std::vector<double> gains, standard_errors;
};
GroupGains group_gains(const FitData& data, Form form, const FitResult& fit, const FitOptions& options,
                       const std::vector<std::size_t>& group_of, std::size_t groups, double noise);

/// What the residuals say: their correlation from one sample to the next, and the root mean square of
/// the part that wanders slowly, which noise from sample to sample cannot account for.
struct ResidualShape {
    double correlation = 0.0;
    double wandering = 0.0;
};
ResidualShape residual_shape(const FitData& data, Form form, const FitResult& fit, const FitOptions& options);

/// Process value of the fitted model at the ascending times `t`.
std::vector<double> response_at(const std::vector<double>& t, const std::vector<Edge>& edges, Form form,
                                const ParameterArray& parameters, double time_center);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
