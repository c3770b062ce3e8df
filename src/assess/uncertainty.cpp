#include "tauwright/assess/uncertainty.hpp"

#include <boost/math/special_functions/gamma.hpp>
#include <cmath>
#include <string>

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;
using Policy = boost::math::policies::policy<boost::math::policies::promote_double<false>,
                                             boost::math::policies::overflow_error<boost::math::policies::ignore_error>>;

void check_half_width(const char* name, double value, bool must_stay_below_one) {
    require_not_negative(name, value);
    if (must_stay_below_one && value >= 1.0)
        refuse(error_code::out_of_domain, name, value, "the box would hold 0; give a relative half width below 1");
}

// Quantile of chi-square: twice that of the gamma distribution of half the degrees.
double chi_square_quantile(std::size_t degrees, double confidence) {
    return 2.0 * boost::math::gamma_p_inv(0.5 * static_cast<double>(degrees), confidence, Policy());
}

struct Estimates {
    std::vector<std::string> names;
    std::vector<double> values, covariance;
};

Estimates of_the_model(const FittedModel& fit) {
    const std::size_t all = fit.parameter_names.size();
    if (fit.covariance.size() != all * all)
        refuse(error_code::wrong_length, "length of fit.covariance", static_cast<double>(fit.covariance.size()),
               joined({"give the square of the ", text_of(static_cast<double>(all)), " names in fit.parameter_names"}));
    Estimates e;
    std::vector<std::size_t> at;
    for (std::size_t i = 0; i < all; ++i) {
        const std::string& name = fit.parameter_names[i];
        const bool gain = name == "gain" || name == "slope", lag = name == "lag_1" && !fit.lags.empty();
        if (!gain && !lag && name != "dead_time") continue;
        at.push_back(i);
        e.names.push_back(name);
        e.values.push_back(gain ? fit.gain : lag ? fit.lags[0] : fit.dead_time);
    }
    if (at.empty())
        throw Error(error_code::missing_argument,
                    "fit has gain, lag and dead time all fixed; leave at least one to the record, or give a box");
    for (std::size_t i : at)
        for (std::size_t j : at) {
            const double c = fit.covariance[i * all + j];
            if (!is_finite(c))
                refuse(error_code::not_finite, joined({"covariance of ", fit.parameter_names[i], " and ", fit.parameter_names[j]}),
                       c, "the record cannot tell the parameters apart; test again with larger moves, or fix one of them");
            e.covariance.push_back(c);
        }
    return e;
}

// Cholesky's triangle, by the correlations so that units do not matter; all 0 for a covariance of 0.
std::vector<double> triangle_of(const Estimates& e) {
    const std::size_t n = e.values.size();
    std::vector<double> triangle(n * n, 0.0), deviation(n);
    bool all_zero = true;
    for (double c : e.covariance) all_zero &= c == 0.0;
    if (all_zero) return triangle;
    const auto refuse_it = [](const std::string& name, double value) {
        refuse(error_code::out_of_domain, joined({"variance of ", name, " beside the other parameters"}), value,
               "the covariance is not positive definite, as if a combination of parameters were known exactly; "
               "test again with more moves, or fix a parameter");
    };
    for (std::size_t i = 0; i < n; ++i) {
        const double variance = e.covariance[i * n + i];
        if (!(variance > 0.0)) refuse_it(e.names[i], variance);
        deviation[i] = std::sqrt(variance);
    }
    for (std::size_t i = 0; i < n; ++i)
        for (std::size_t j = 0; j <= i; ++j) {
            double sum = i == j ? 1.0 : 0.5 * (e.covariance[i * n + j] + e.covariance[j * n + i]) / deviation[i] / deviation[j];
            for (std::size_t k = 0; k < j; ++k) sum -= triangle[i * n + k] * triangle[j * n + k];
            if (i == j && !(sum > 1e-12)) refuse_it(e.names[i], sum * deviation[i] * deviation[i]);
            triangle[i * n + j] = i == j ? std::sqrt(sum) : sum / triangle[j * n + j];
        }
    for (std::size_t i = 0; i < n; ++i)
        for (std::size_t j = 0; j <= i; ++j) triangle[i * n + j] *= deviation[i];
    return triangle;
}

}  // namespace

Uncertainty Uncertainty::box(const UncertaintyBox& half_widths) {
    const bool relative = !half_widths.absolute;
    check_half_width("half_widths.gain", half_widths.gain, relative);
    check_half_width("half_widths.lags", half_widths.lags, relative);
    check_half_width("half_widths.leads", half_widths.leads, relative);
    check_half_width("half_widths.damping", half_widths.damping, relative);
    check_half_width("half_widths.dead_time", half_widths.dead_time, false);
    Uncertainty u;
    u.kind_ = UncertaintyKind::box;
    u.box_ = half_widths;
    return u;
}

Uncertainty Uncertainty::from_fit(const FittedModel& fit, double confidence) {
    require_finite("confidence", confidence);
    if (!(confidence > 0.0) || !(confidence < 1.0))
        refuse(error_code::out_of_domain, "confidence", confidence, "give a share between 0 and 1, such as 0.95");
    if (!fit.model)
        throw Error(error_code::missing_argument, "fit holds no model; its findings say why: test again, or give a box");
    Estimates e = of_the_model(fit);
    const std::size_t n = e.values.size();
    Uncertainty u;
    u.kind_ = UncertaintyKind::confidence_region;
    u.confidence_ = confidence;
    u.models_ = {*fit.model};
    u.half_axes_ = triangle_of(e);
    const double radius = std::sqrt(chi_square_quantile(n, confidence));
    for (std::size_t i = 0; i < n; ++i) {
        double square = 0.0;
        for (std::size_t j = 0; j < n; ++j) {
            u.half_axes_[i * n + j] *= radius;
            square += u.half_axes_[i * n + j] * u.half_axes_[i * n + j];
        }
        const double half = std::sqrt(square), value = e.values[i];
        require_finite(joined({"half width of ", e.names[i]}), half);
        if (e.names[i] != "dead_time" && half >= std::abs(value))
            throw Error(error_code::out_of_domain,
                        joined({e.names[i], " lies between ", text_of(value - half, 4), " and ", text_of(value + half, 4),
                                " at confidence ", text_of(confidence), ": the record cannot tell its sign; test again with larger "
                                "or longer moves, or ask for less confidence"}));
    }
    u.names_ = std::move(e.names);
    u.estimates_ = std::move(e.values);
    return u;
}

Uncertainty Uncertainty::of_models(std::vector<TransferFunction> models) {
    if (models.empty()) throw Error(error_code::missing_argument, "models is empty; give at least one");
    Uncertainty u;
    u.kind_ = UncertaintyKind::models;
    u.models_ = std::move(models);
    return u;
}

}  // namespace v0
}  // namespace tauwright
