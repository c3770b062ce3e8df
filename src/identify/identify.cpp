#include "tauwright/identify/identify.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "identify/findings.hpp"
#include "identify/process_fit.hpp"
#include "tauwright/model/forms.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;

void check_fixed(const IdentifyOptions& options) {
    const FixedParameters& f = options.fixed;
    if (f.gain) require_not_zero("fixed.gain", *f.gain);
    if (f.slope) require_not_zero("fixed.slope", *f.slope);
    if (f.lag_1) require_positive("fixed.lag_1", *f.lag_1);
    if (f.dead_time) require_not_negative("fixed.dead_time", *f.dead_time);
    if (f.offset) require_finite("fixed.offset", *f.offset);
    const bool first_order = f.gain || f.lag_1;
    if (first_order && f.slope)
        throw Error(error_code::conflicting_arguments,
                    "fixed.slope belongs to an integrating form, fixed.gain and fixed.lag_1 to a first order one; keep one side");
    if ((first_order && options.form == Form::integrating_plus_dead_time) ||
        (f.slope && options.form == Form::first_order_plus_dead_time))
        throw Error(error_code::conflicting_arguments, std::string("fixed.") + (f.slope ? "slope" : f.gain ? "gain" : "lag_1") +
                                                           " is given, but the form asked for is " + name_of(options.form) +
                                                           "; leave one of them out");
}

FitOptions fit_options(const IdentifyOptions& options, Form form, const FitData& data) {
    const FixedParameters& f = options.fixed;
    const bool integrating = form == Form::integrating_plus_dead_time;
    FitOptions o;
    // Counting drift from the middle keeps it apart from the offset; a fixed offset is at the start.
    o.time_center = f.offset ? 0.0 : 0.5 * data.span;
    const auto set = [&](ParameterIndex at, bool belongs, const std::optional<double>& value) {
        o.free[at] = belongs && !value;
        o.fixed[at] = value.value_or(0.0);
    };
    set(at_offset, true, f.offset);
    if (f.offset) o.fixed[at_offset] -= data.mean;
    set(at_drift, integrating || options.drift, std::nullopt);
    set(at_curvature, integrating && options.drift, std::nullopt);
    set(at_gain, true, integrating ? f.slope : f.gain);
    set(at_lag, !integrating, f.lag_1);
    set(at_dead_time, true, f.dead_time);
    return o;
}

std::size_t free_count(const FitOptions& o) {
    return static_cast<std::size_t>(std::count(o.free.begin(), o.free.end(), true));
}

struct Candidate {
    Form form;
    FitOptions options;
    FitResult result;
    double sum_of_squares() const { return result.equations.sum_of_squares; }
};

Candidate fitted_form(const IdentifyOptions& options, Form form, const FitData& data) {
    Candidate c{form, fit_options(options, form, data), {}};
    if (data.t.size() <= free_count(c.options))
        throw Error(error_code::record_too_short, "record has " + std::to_string(data.t.size()) + " good samples for " +
                                                      std::to_string(free_count(c.options)) +
                                                      " parameters; give more samples, or fix some of the parameters");
    c.result = form == Form::first_order_plus_dead_time ? fit_first_order(data, c.options) : fit_integrating(data, c.options);
    return c;
}

std::string times_larger(double larger, double smaller) {
    return text_of(std::round(10.0 * std::sqrt(larger / std::max(smaller, 1e-300))) / 10.0);
}

// Sum of squares that a fit to all samples leaves on means over neighbors.
double misfit(const FitData& few, const Candidate& c) {
    const auto model = response_at(few.t, few.edges, c.form, c.result.parameters, c.options.time_center);
    double sum = 0.0;
    for (std::size_t i = 0; i < few.t.size(); ++i) sum += (few.y[i] - model[i]) * (few.y[i] - model[i]);
    return sum;
}

// Both forms have as many parameters, so the smaller sum of squares is the better form; where noise
// alone could account for the difference, a lag longer than the record means integrating.
Candidate chosen_form(const IdentifyOptions& options, const FitData& data, std::string& reason) {
    const bool first_order_only = options.fixed.gain || options.fixed.lag_1;
    if (options.form != Form::automatic || first_order_only || options.fixed.slope) {
        const Form form = options.form != Form::automatic ? options.form
                          : first_order_only              ? Form::first_order_plus_dead_time
                                                          : Form::integrating_plus_dead_time;
        reason = options.form != Form::automatic ? "asked for" : "the fixed parameters belong to it";
        return fitted_form(options, form, data);
    }
    Candidate first = fitted_form(options, Form::first_order_plus_dead_time, data);
    // Means over neighbors settle clear cases at little cost.
    constexpr std::size_t some = 200;
    if (data.t.size() > 2 * some) {
        const FitData few = thinned(data, some);
        const double ss1 = misfit(few, first);
        const double ss2 = fitted_form(options, Form::integrating_plus_dead_time, few).sum_of_squares();
        if (ss2 > 2.0 * ss1) {
            reason = "an integrating form leaves residuals " + times_larger(ss2, ss1) + " times as large";
            return first;
        }
    }
    Candidate integrating = fitted_form(options, Form::integrating_plus_dead_time, data);
    const double ss1 = first.sum_of_squares(), ss2 = integrating.sum_of_squares();
    const double variance = std::min(ss1, ss2) / std::max(1.0, static_cast<double>(data.t.size()) - 4.0);
    const bool alike = std::abs(ss1 - ss2) <= 6.0 * variance;
    const bool slow = first.result.parameters[at_lag] > data.span;
    if (alike ? slow : ss2 < ss1) {
        reason = alike ? "both forms fit alike and the lag would be longer than the record"
                       : "a first order form leaves residuals " + times_larger(ss1, ss2) + " times as large";
        return integrating;
    }
    reason = alike ? "both forms fit alike and the response bends over within the record"
                   : "an integrating form leaves residuals " + times_larger(ss2, ss1) + " times as large";
    return first;
}

// Moves drift and curvature, and their covariance, from the center of the record to its start.
struct AtStart {
    ParameterArray parameters;
    std::array<std::array<double, most_parameters>, most_parameters> covariance;
};

AtStart at_start(const Candidate& c, double noise) {
    const double m = c.options.time_center;
    const auto& p = c.result.parameters;
    AtStart out{p, {}};
    out.parameters[at_offset] = p[at_offset] - p[at_drift] * m + p[at_curvature] * m * m;
    out.parameters[at_drift] = p[at_drift] - 2.0 * p[at_curvature] * m;
    std::array<std::array<double, most_parameters>, most_parameters> T{};
    for (std::size_t i = 0; i < most_parameters; ++i) T[i][i] = 1.0;
    T[at_offset][at_drift] = -m;
    T[at_offset][at_curvature] = m * m;
    T[at_drift][at_curvature] = -2.0 * m;
    const auto inverse = inverse_of_free(c.result.equations, c.options.free);
    if (!inverse) {  // parameters that the record cannot tell apart may be anything
        for (std::size_t i = 0; i < most_parameters; ++i) out.covariance[i][i] = std::numeric_limits<double>::infinity();
        return out;
    }
    for (std::size_t i = 0; i < most_parameters; ++i)
        for (std::size_t j = 0; j < most_parameters; ++j)
            for (std::size_t k = 0; k < most_parameters; ++k)
                for (std::size_t l = 0; l < most_parameters; ++l)
                    out.covariance[i][j] += T[i][k] * (*inverse)[k][l] * T[j][l] * noise * noise;
    return out;
}

void report(const Candidate& c, const FitData& data, const ResidualShape& shape, FittedModel& fit) {
    const std::size_t n = data.t.size(), p = free_count(c.options);
    fit.form = c.form;
    fit.samples_used = n;
    fit.sum_of_squares = c.sum_of_squares();
    fit.residual_rms = std::sqrt(fit.sum_of_squares / static_cast<double>(n));
    fit.noise = std::sqrt(fit.sum_of_squares / static_cast<double>(n - p));
    double total = 0.0;
    for (double y : data.y) total += y * y;
    fit.r_squared = total > 0.0 ? 1.0 - fit.sum_of_squares / total : 0.0;
    // Small correlations are chance; 3 / sqrt(n) is three standard errors of none at all.
    if (shape.correlation > 3.0 / std::sqrt(static_cast<double>(n))) fit.residual_correlation = std::min(shape.correlation, 0.999);
    const double widening = std::sqrt((1.0 + fit.residual_correlation) / (1.0 - fit.residual_correlation));
    const AtStart start = at_start(c, fit.noise * widening);
    const auto& v = start.parameters;
    const bool integrating = c.form == Form::integrating_plus_dead_time;
    fit.gain = v[at_gain];
    fit.dead_time = v[at_dead_time];
    fit.offset = v[at_offset] + data.mean;
    fit.drift_per_s = v[at_drift];
    fit.drift_per_s2 = v[at_curvature];
    if (!integrating) fit.lags = {v[at_lag]};
    if (fit.gain != 0.0 && is_finite(fit.gain))
        fit.model = integrating ? integrating_plus_dead_time(fit.gain, fit.dead_time)
                                : first_order_plus_dead_time(fit.gain, fit.lags[0], fit.dead_time);
    const std::pair<const char*, ParameterIndex> names[] = {{integrating ? "slope" : "gain", at_gain},
                                                            {"lag_1", at_lag},
                                                            {"dead_time", at_dead_time},
                                                            {"offset", at_offset},
                                                            {"drift", at_drift},
                                                            {"curvature", at_curvature}};
    std::vector<ParameterIndex> order;
    for (const auto& [name, at] : names) {
        if (!c.options.free[at]) continue;
        fit.parameter_names.emplace_back(name);
        order.push_back(at);
    }
    for (ParameterIndex i : order)
        for (ParameterIndex j : order) fit.covariance.push_back(start.covariance[i][j]);
}

bool moves_seen(const FitData& data) {
    return !data.edges.empty() && !data.t.empty() && data.edges.front().time < data.t.back();
}

}  // namespace

FittedModel identify(const Record& record, const IdentifyOptions& options) {
    check_fixed(options);
    if (record.good_count() == 0)
        throw Error(error_code::no_usable_sample, "good is 0 for all " + std::to_string(record.size()) +
                                                      " samples; give a record with a healthy measurement");
    FittedModel fit;
    fit.first_output = record.output()[0];
    const auto [lowest, highest] = std::minmax_element(record.output().begin(), record.output().end());
    fit.tested_output = {*lowest, *highest};
    const std::optional<Record> unclipped = without_clipped(record, fit.findings);
    const FitData data = fit_data(unclipped ? *unclipped : record);
    if (!data.y.empty()) {
        const auto [low, high] = std::minmax_element(data.y.begin(), data.y.end());
        fit.tested_process_value = {*low + data.mean, *high + data.mean};
    }
    if (!moves_seen(data)) {
        fit.findings.push_back({FindingCode::no_move, Advice::test_again,
                                "the output does not move while the process value is seen; test again with output moves", 0.0,
                                0, record.size() - 1});
        fit.samples_used = data.t.size();
        fit.form_reason = "nothing to fit";
        return fit;
    }
    look_at_record(record, data, fit.findings);
    const Candidate best = chosen_form(options, data, fit.form_reason);
    const ResidualShape shape = residual_shape(data, best.form, best.result, best.options);
    report(best, data, shape, fit);
    look_at_fit(record, data, best.result, best.options, shape, fit);
    return fit;
}

std::optional<double> FittedModel::standard_error(std::string_view parameter) const noexcept {
    const std::size_t n = parameter_names.size();
    for (std::size_t i = 0; i < n && covariance.size() == n * n; ++i)
        if (parameter_names[i] == parameter) return std::sqrt(std::max(covariance[i * n + i], 0.0));
    return std::nullopt;
}

std::vector<double> fitted_response(const FittedModel& fit, const Record& record) {
    if (fit.form == Form::automatic) return {};
    const FitData data = fit_data(record);
    std::vector<double> t(record.time_s().begin(), record.time_s().end());
    for (double& time : t) time -= record.time_s()[0];
    return response_at(t, data.edges, fit.form,
                       {fit.offset, fit.drift_per_s, fit.drift_per_s2, fit.gain, fit.lags.empty() ? 1.0 : fit.lags[0],
                        fit.dead_time},
                       0.0);
}

}  // namespace v0
}  // namespace tauwright
