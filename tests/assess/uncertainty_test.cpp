// Boxes, confidence regions and lists: what they hold, and what they refuse.
#include <cmath>
#include <limits>
#include <random>

#include "core/oracle_tools.hpp"
#include "identify/simulated.hpp"
#include "tauwright/assess/uncertainty.hpp"
#include "tauwright/assess/worst_case.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

namespace {

const double infinity = std::numeric_limits<double>::infinity();

FittedModel fit_of(double gain, double lag, double dead_time, std::vector<double> covariance) {
    FittedModel fit;
    fit.form = Form::first_order_plus_dead_time;
    fit.model = first_order_plus_dead_time(gain, lag, dead_time);
    fit.gain = gain;
    fit.lags = {lag};
    fit.dead_time = dead_time;
    fit.parameter_names = {"gain", "lag_1", "dead_time"};
    fit.covariance = std::move(covariance);
    return fit;
}

// (p - estimate)' covariance^-1 (p - estimate), by Cramer's rule.
double quadratic_form(const std::vector<double>& c, const double (&d)[3]) {
    const auto minor = [&](int i, int j) {
        const int a = (i + 1) % 3, b = (i + 2) % 3, e = (j + 1) % 3, f = (j + 2) % 3;
        const auto at = [&](int r, int k) { return c[static_cast<std::size_t>(3 * r + k)]; };
        return at(a, e) * at(b, f) - at(a, f) * at(b, e);
    };
    const double determinant = c[0] * minor(0, 0) + c[1] * minor(0, 1) + c[2] * minor(0, 2);
    double sum = 0.0;
    for (int i = 0; i < 3; ++i)
        for (int j = 0; j < 3; ++j) sum += d[i] * minor(j, i) * d[j] / determinant;
    return sum;
}

}  // namespace

TEST_CASE("boxes refuse what makes no sense", "[closed form]") {
    using enum error_code;
    check_refused(out_of_domain, {"half_widths.gain", "-0.1", "0 or"}, [] { Uncertainty::box({.gain = -0.1}); });
    check_refused(out_of_domain, {"half_widths.lags", "1", "below 1"}, [] { Uncertainty::box({.lags = 1.0}); });
    check_refused(out_of_domain, {"half_widths.damping", "2", "below 1"}, [] { Uncertainty::box({.damping = 2.0}); });
    check_refused(not_finite, {"half_widths.dead_time", "nan"}, [] { Uncertainty::box({.dead_time = std::nan("")}); });
    check_refused(not_finite, {"half_widths.leads", "inf"}, [] { Uncertainty::box({.leads = infinity}); });
    CHECK(Uncertainty::box({.dead_time = 1.5}).half_widths().dead_time == 1.5);  // a dead time stops at 0
    // Absolute ones meet the process first in worst_case.
    const auto G = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const PidSettings settings{.gain = 0.8, .integral_time = 10.0};
    const auto refused = [&](const UncertaintyBox& box, std::initializer_list<const char*> words) {
        check_refused(out_of_domain, words, [&] { worst_case(G, settings, Uncertainty::box(box)); });
        check_refused(out_of_domain, words, [&] { violating_share(G, settings, Uncertainty::box(box), {}); });
    };
    refused({.gain = 2.0, .absolute = true}, {"half width of gain", "2", "hold 0"});
    refused({.lags = 11.0, .absolute = true}, {"half width of lags[0]", "11", "10", "hold 0"});
    CHECK(worst_case(G, settings, Uncertainty::box({.dead_time = 5.0, .absolute = true})).verdict != Verdict::undetermined);
}

TEST_CASE("the region of a fit is the ellipsoid of its covariance at the chi-square quantile", "[independent computation]") {
    // Quantiles of chi-square at 0.95 from tables of the distribution: 3.841459, 5.991465 = -2 log 0.05, 7.814728.
    const std::vector<double> c = {0.04, 0.10, -0.01, 0.10, 1.0, -0.05, -0.01, -0.05, 0.09};
    const auto region = Uncertainty::from_fit(fit_of(2.0, 12.0, 3.0, c));
    CHECK(region.kind() == UncertaintyKind::confidence_region);
    CHECK(region.confidence() == 0.95);
    REQUIRE(region.half_axes().size() == 9);
    oracle::Seeded random(3);
    for (int k = 0; k < 50; ++k) {
        double z[3], d[3] = {0, 0, 0}, square = 0.0;
        for (double& x : z) x = random.uniform(-1.0, 1.0), square += x * x;
        for (std::size_t i = 0; i < 3; ++i)
            for (std::size_t j = 0; j < 3; ++j) d[i] += region.half_axes()[3 * i + j] * z[j] / std::sqrt(square);
        CHECK(relative_error(quadratic_form(c, d), 7.814727903251179) <= 1e-10);
    }
    // One parameter alone: 1.959964 standard errors, the two-sided normal quantile.
    FittedModel one = fit_of(2.0, 12.0, 3.0, {0.04});
    one.parameter_names = {"gain"};
    CHECK(relative_error(Uncertainty::from_fit(one).half_axes()[0], 0.2 * 1.959963984540054) <= 1e-12);
    // Two of them beside an offset, which has no part in the loop.
    FittedModel two = fit_of(2.0, 12.0, 3.0, {0.04, 0.0, 7.0, 0.0, 0.09, 0.0, 7.0, 0.0, 9e4});
    two.parameter_names = {"gain", "dead_time", "offset"};
    const auto flat = Uncertainty::from_fit(two, 0.9);
    CHECK(flat.parameter_names() == std::vector<std::string>{"gain", "dead_time"});
    CHECK(relative_error(flat.half_axes()[0], 0.2 * std::sqrt(-2.0 * std::log(0.1))) <= 1e-12);
    CHECK(relative_error(flat.half_axes()[3], 0.3 * std::sqrt(-2.0 * std::log(0.1))) <= 1e-12);
}

TEST_CASE("regions refuse what a record cannot tell, and say so", "[closed form]") {
    using enum error_code;
    const std::vector<double> c = {0.04, 0.0, 0.0, 0.0, 1.0, 0.0, 0.0, 0.0, 0.09};
    const auto refused = [&](error_code code, std::vector<double> covariance, std::initializer_list<const char*> words) {
        check_refused(code, words, [&] { Uncertainty::from_fit(fit_of(2.0, 12.0, 3.0, std::move(covariance))); });
    };
    check_refused(out_of_domain, {"confidence", "1", "0.95"}, [&] { Uncertainty::from_fit(fit_of(2, 12, 3, c), 1.0); });
    check_refused(out_of_domain, {"confidence", "0"}, [&] { Uncertainty::from_fit(fit_of(2, 12, 3, c), 0.0); });
    check_refused(not_finite, {"confidence", "nan"}, [&] { Uncertainty::from_fit(fit_of(2, 12, 3, c), std::nan("")); });
    check_refused(missing_argument, {"no model", "findings"}, [] { Uncertainty::from_fit(FittedModel{}); });
    FittedModel fixed = fit_of(2.0, 12.0, 3.0, {1.0});
    fixed.parameter_names = {"offset"};
    check_refused(missing_argument, {"fixed"}, [&] { Uncertainty::from_fit(fixed); });
    refused(out_of_domain, {1.44, 0, 0, 0, 1, 0, 0, 0, 0.09}, {"gain lies between -1.35", "cannot tell its sign"});
    refused(out_of_domain, {0.04, 0, 0, 0, 49, 0, 0, 0, 0.09}, {"lag_1 lies between -7.5", "cannot tell its sign"});
    refused(not_finite, {0.04, 0, 0, 0, infinity, 0, 0, 0, 0.09}, {"lag_1", "inf", "apart"});
    refused(not_finite, {0.04, std::nan(""), 0, std::nan(""), 1, 0, 0, 0, 0.09}, {"gain and lag_1", "nan"});
    refused(out_of_domain, {0.04, 0.2, 0, 0.2, 1, 0, 0, 0, 0.09}, {"lag_1", "not positive definite"});  // correlation 1
    refused(out_of_domain, {0.04, 0, 0, 0, 0, 0, 0, 0, 0.09}, {"lag_1", "not positive definite"});
    refused(out_of_domain, {0.04, 0, 0, 0, 1, 0, 0, 0, -0.09}, {"dead_time", "not positive definite"});
    refused(wrong_length, {0.04, 0, 0, 0}, {"fit.covariance", "4"});
    check_refused(missing_argument, {"models", "empty"}, [] { Uncertainty::of_models({}); });
    // The process must be the fit's, its gain in any unit.
    const auto region = Uncertainty::from_fit(fit_of(2.0, 12.0, 3.0, c));
    const PidSettings settings{.gain = 0.8, .integral_time = 10.0};
    check_refused(conflicting_arguments, {"lag", "11", "12"},
                  [&] { worst_case(first_order_plus_dead_time(2.0, 11.0, 3.0), settings, region); });
    check_refused(conflicting_arguments, {"dead time", "4", "3"},
                  [&] { worst_case(first_order_plus_dead_time(2.0, 12.0, 4.0), settings, region); });
    check_refused(conflicting_arguments, {"process is", "fit's model"},
                  [&] { worst_case(integrating_plus_dead_time(2.0, 3.0), settings, region); });
}

TEST_CASE("a gain in other units, or of other sign, leaves the worst case as it is", "[invariant]") {
    const auto region = Uncertainty::from_fit(fit_of(2.0, 12.0, 3.0, {0.04, 0.1, -0.01, 0.1, 1.0, -0.05, -0.01, -0.05, 0.09}));
    const WorstCase a = worst_case(first_order_plus_dead_time(2.0, 12.0, 3.0), {.gain = 0.8, .integral_time = 12.0}, region);
    const WorstCase b = worst_case(first_order_plus_dead_time(-0.5, 12.0, 3.0), {.gain = -3.2, .integral_time = 12.0}, region);
    CHECK(a.certified);
    CHECK(b.certified);
    CHECK(relative_error(a.max_sensitivity.value(), b.max_sensitivity.value()) <= 1e-6);
    CHECK(relative_error(a.delay_margin.value(), b.delay_margin.value()) <= 1e-6);
    CHECK(b.at.gain() < 0.0);
}

TEST_CASE("regions of seeded records hold the truth about as often as they say", "[independent computation]") {
    simulated::Truth truth;
    truth.samples = 400;
    int held = 0, all = 0;
    for (unsigned seed = 1; seed <= 200; ++seed) {
        const FittedModel fit = identify(simulated::record(truth, seed), {.form = Form::first_order_plus_dead_time});
        const auto region = Uncertainty::from_fit(fit, 0.9);
        const auto& L = region.half_axes();
        // Forward substitution: region = estimates + L z.
        const double d[3] = {truth.gain - fit.gain, truth.lag - fit.lags[0], truth.dead_time - fit.dead_time};
        const double z0 = d[0] / L[0], z1 = (d[1] - L[3] * z0) / L[4], z2 = (d[2] - L[6] * z0 - L[7] * z1) / L[8];
        held += z0 * z0 + z1 * z1 + z2 * z2 <= 1.0;
        ++all;
    }
    INFO(held << " of " << all);
    // Binomial with share 0.9 and 200 draws: standard deviation 4.2; four of them.
    CHECK(held >= 180 - 17);
    CHECK(held <= 180 + 17);
}

TEST_CASE("a record without noise makes a region of one point", "[closed form]") {
    const auto G = first_order_plus_dead_time(2.0, 12.0, 3.0);
    const PidSettings settings{.gain = 0.8, .integral_time = 12.0};
    const WorstCase w = worst_case(G, settings, Uncertainty::from_fit(fit_of(2.0, 12.0, 3.0, std::vector<double>(9, 0.0))));
    const Robustness r = robustness(G, settings);
    CHECK(w.certified);
    CHECK(w.max_sensitivity == r.max_sensitivity);
    CHECK(w.max_sensitivity_bound.value() >= r.max_sensitivity.value());
    CHECK(w.gain_margin == r.gain_margin);
    CHECK(w.at == G);
}
