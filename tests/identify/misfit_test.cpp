// Records that a first-order or integrating model does not describe, and noise that is not white.
#include <algorithm>

#include "catch_compat.hpp"
#include "identify/simulated.hpp"
#include "tauwright/tauwright.hpp"

using namespace tauwright;
using simulated::Truth;

namespace {

const Finding* misfit(const FittedModel& fit) {
    const auto it = std::find_if(fit.findings.begin(), fit.findings.end(),
                                 [](const Finding& f) { return f.code == FindingCode::model_does_not_fit; });
    return it == fit.findings.end() ? nullptr : &*it;
}

// Four moves of +-7, gain 0.9, noise 0.05, with a unit response of the caller's.
template <class Response>
RecordColumns four_moves(Response response, unsigned seed = 1) {
    std::mt19937_64 generator(seed);
    std::normal_distribution<double> normal;
    const double times[4] = {100, 500, 900, 1300}, sizes[4] = {7, -7, -7, 7};
    RecordColumns c;
    for (int i = 0; i < 850; ++i) {
        const double t = 2.0 * i;
        double u = 40.0, y = 60.0;
        for (int k = 0; k < 4; ++k) {
            if (t >= times[k]) u += sizes[k];
            if (t > times[k] + 15.0) y += 0.9 * sizes[k] * response(t - times[k] - 15.0);
        }
        c.time_s.push_back(t);
        c.output.push_back(u);
        c.process_value.push_back(y + 0.05 * normal(generator));
    }
    return c;
}

double first_order(double t) { return 1.0 - std::exp(-t / 80.0); }

}  // namespace

TEST_CASE("a process that oscillates is not passed off as first order", "[closed form]") {
    const double damping = GENERATE(0.1, 0.2, 0.3);
    const auto response = [=](double t) {
        const double w = std::sqrt(1.0 - damping * damping) / 15.0;
        return 1.0 - std::exp(-damping * t / 15.0) * (std::cos(w * t) + damping / (15.0 * w) * std::sin(w * t));
    };
    const FittedModel fit = identify(Record(four_moves(response)));
    REQUIRE(misfit(fit));
    CHECK(fit.advice() == Advice::test_again);
}

TEST_CASE("a load or a drift during the test is seen in the residuals", "[closed form]") {
    RecordColumns c = four_moves(first_order);
    const bool drift = GENERATE(false, true);
    for (std::size_t i = 0; i < c.time_s.size(); ++i)
        c.process_value[i] += drift ? 0.004 * c.time_s[i] : (c.time_s[i] > 300.0 ? 2.0 * first_order(c.time_s[i] - 300.0) : 0.0);
    const FittedModel fit = identify(Record(c));
    REQUIRE(misfit(fit));
    CHECK(fit.advice() == Advice::test_again);
    if (!drift) return;
    const FittedModel with = identify(Record(c), {.drift = true});
    CHECK_FALSE(misfit(with));
    CHECK(with.gain == Approx(0.9).epsilon(0.01));
}

TEST_CASE("a valve with dead band is seen in the residuals", "[closed form]") {
    RecordColumns c = four_moves(first_order);
    // The stem loses 1.5 % at the two reversals: move 2 returns 5.5 of 7, move 4 as well.
    for (std::size_t i = 0; i < c.time_s.size(); ++i)
        for (double when : {500.0, 1300.0})
            if (c.time_s[i] > when + 15.0) c.process_value[i] += (when < 900.0 ? 1.0 : -1.0) * 0.9 * 1.5 * first_order(c.time_s[i] - when - 15.0);
    CHECK(identify(Record(c)).advice() >= Advice::tune_with_care);
    CHECK(misfit(identify(Record(c))));
}

TEST_CASE("healthy records follow their model", "[invariant]") {
    for (unsigned seed = 1; seed <= 60; ++seed) {
        INFO("seed " << seed);
        CHECK_FALSE(misfit(identify(Record(four_moves(first_order, seed)))));
    }
}

// Standard errors against the spread over seeded records with AR(1) noise: widened by (1 + phi)/(1 - phi),
// the variance factor of trade-facts B10 (n_eff = n (1 - phi)/(1 + phi)).
TEST_CASE("standard errors allow for correlated noise", "[invariant]") {
    constexpr double phi = 0.8;
    double sum[3] = {};
    constexpr unsigned count = 150;
    for (unsigned seed = 1; seed <= count; ++seed) {
        RecordColumns c = simulated::columns(Truth{.noise = 0.0, .samples = 800}, seed);
        std::mt19937_64 generator(seed);
        std::normal_distribution<double> normal;
        double e = 0.0;
        for (double& y : c.process_value) y += e = phi * e + 0.15 * std::sqrt(1.0 - phi * phi) * normal(generator);
        const FittedModel fit = identify(Record(c), {.form = Form::first_order_plus_dead_time});
        CHECK(fit.residual_correlation == Approx(phi).margin(0.15));
        const double z[3] = {(fit.gain - 1.2) / fit.standard_error("gain").value(),
                             (fit.lags[0] - 12.0) / fit.standard_error("lag_1").value(),
                             (fit.dead_time - 3.3) / fit.standard_error("dead_time").value()};
        for (int i = 0; i < 3; ++i) sum[i] += z[i] * z[i] / count;
    }
    for (double s : sum) CHECK(std::sqrt(s) == Approx(1.0).margin(0.25));
}

// Found by fuzzing: a span to which adding 1 changes nothing once made the thinning loop for ever.
TEST_CASE("absurd spans of time come to an end", "[regression]") {
    for (double span : {1e17, 1e300}) {
        RecordColumns c;
        for (int i = 0; i < 300; ++i) {
            c.time_s.push_back(i < 299 ? i : span);
            c.output.push_back(i < 100 ? 1.0 : 2.0);
            c.process_value.push_back(i < 120 ? 1.0 : 3.0);
        }
        const FittedModel fit = identify(Record(c));
        CHECK(fit.samples_used == 300);
        CHECK(is_finite(fit.sum_of_squares));
    }
}

TEST_CASE("what cannot be told apart has no settings", "[closed form]") {
    // The lag is a thousandth of the sampling: any dead time between two samples fits as well.
    RecordColumns c = simulated::columns(Truth{.lag = 0.01, .noise = 0.1, .samples = 40}, 1);
    c.process_value_range = Range{.low = 0.0, .high = 100.0};
    c.output_range = Range{};
    const FittedModel fit = identify(Record(c));
    CHECK(fit.standard_error("dead_time").value() > 100.0);
    CHECK(fit.advice() == Advice::test_again);
    CHECK_FALSE(tune(Record(c)).proposed);
}
