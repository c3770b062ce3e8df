// A process model from a plant record, with standard errors and findings. Compiled.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "tauwright/identify/finding.hpp"
#include "tauwright/identify/record.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

enum class Form : std::int32_t {
    automatic = 0,  ///< the record decides; only in options
    first_order_plus_dead_time = 1,
    integrating_plus_dead_time = 2,
};

constexpr const char* name_of(Form form) noexcept {
    switch (form) {
        case Form::automatic: return "auto";
        case Form::first_order_plus_dead_time: return "first_order_plus_dead_time";
        case Form::integrating_plus_dead_time: return "integrating_plus_dead_time";
    }
    return "unknown";
}

/// Parameters held at a given value; empty ones are fitted. Units of the record, times in seconds.
/// `gain` belongs to a first order form, `slope` to an integrating one.
struct FixedParameters {
    std::optional<double> gain = {};
    std::optional<double> slope = {};
    std::optional<double> lag_1 = {};
    std::optional<double> dead_time = {};
    std::optional<double> offset = {};  ///< the process value at rest, at the first output
};

struct IdentifyOptions {
    Form form = Form::automatic;
    /// A straight drift of the process value beside the response; for an integrating form, whose
    /// slope at rest is always free, a curved one.
    bool drift = false;
    FixedParameters fixed = {};
};

/// The response to one output move, fitted with the model's lag and dead time.
struct Move {
    std::size_t sample = 0;        ///< first sample of the new output
    double size = 0.0;             ///< in output units
    double gain = 0.0;             ///< gain or slope from this move alone
    double standard_error = 0.0;
};

/// From the lowest to the highest of something.
struct Span {
    double low = 0.0;
    double high = 0.0;
};

/// A fit: process value = offset + drift + G(s) acting on (output - first output).
struct FittedModel {
    Form form = Form::automatic;                   ///< the form chosen; `automatic` where nothing could be fitted
    std::optional<TransferFunction> model = {};    ///< empty where nothing could be fitted
    double gain = 0.0;                             ///< gain, or slope per second, in process-value units per output unit
    std::vector<double> lags = {};                 ///< s
    double dead_time = 0.0;                        ///< s
    double first_output = 0.0;                     ///< the record's first output, where the fit starts at rest ...
    double offset = 0.0;                           ///< ... and the process value at rest there
    double drift_per_s = 0.0;                      ///< for an integrating form: its slope at the first output
    double drift_per_s2 = 0.0;
    /// The parameters fitted, of: gain or slope, lag_1, dead_time, offset, drift, curvature.
    std::vector<std::string> parameter_names = {};
    /// Of the parameters in that order, row by row; widened by (1 + r)/(1 - r) where neighboring
    /// residuals are correlated by r > 0, since n such samples say less than n independent ones.
    std::vector<double> covariance = {};
    double sum_of_squares = 0.0;                   ///< of the residuals at the samples used
    double residual_rms = 0.0;                     ///< root of sum_of_squares / samples_used
    double noise = 0.0;                            ///< root of sum_of_squares / degrees of freedom
    double r_squared = 0.0;
    double residual_correlation = 0.0;             ///< of neighboring residuals; 0 where they are independent
    double response_to_noise = 0.0;                ///< largest excursion of the response in units of `noise`; infinite without noise
    std::size_t samples_used = 0;
    Span tested_output = {};                       ///< lowest and highest output of the record
    Span tested_process_value = {};                ///< lowest and highest process value among the samples used
    std::vector<Move> moves = {};
    std::vector<Finding> findings = {};
    std::string form_reason = {};                  ///< why this form, in words
    Advice advice() const noexcept { return advice_of(findings); }
    /// One standard deviation of a parameter fitted, by name; infinite where the record cannot tell
    /// parameters apart, empty where it was not fitted.
    std::optional<double> standard_error(std::string_view parameter) const noexcept;
};

/// Separable least squares on the samples that are good: offset and gain (and drift) are linear, lag
/// and dead time are searched globally, then polished. Irregular stamps and dead time between
/// samples are exact; the record starts at rest with its first output. Deterministic.
/// Throws `no_usable_sample`, `record_too_short`, `conflicting_arguments`, and for fixed values
/// `not_finite` and `out_of_domain`. Weak or unusable records are findings, not errors.
/// Source: Golub and Pereyra, SIAM J. Numer. Anal. 10, 1973 (variable projection).
FittedModel identify(const Record& record, const IdentifyOptions& options = {});

/// The fit's process value at every sample of `record`, bad ones included; empty where nothing was
/// fitted. The record may be another than the fit's: it starts at rest with its own first output.
/// Never throws but for memory. Allocates.
std::vector<double> fitted_response(const FittedModel& fit, const Record& record);

}  // namespace v0
}  // namespace tauwright
