#include "catch_compat.hpp"
#include "identify/simulated.hpp"
#include "tauwright/tauwright.hpp"

using namespace tauwright;
using simulated::Truth;

namespace {

// A move at time 0 from a sample of bad quality, then the data: how a certified step response becomes a record.
Record certified_record(const std::vector<double>& x, const std::vector<double>& y) {
    RecordColumns c;
    c.time_s = {-1.0, 0.0};
    c.output = {0.0, 1.0};
    c.process_value = {0.0, 0.0};
    c.good = {0, 0};
    for (std::size_t i = 0; i < x.size(); ++i) {
        c.time_s.push_back(x[i]);
        c.output.push_back(1.0);
        c.process_value.push_back(y[i]);
        c.good.push_back(1);
    }
    return Record(c);
}

const IdentifyOptions certified_options{.form = Form::first_order_plus_dead_time,
                                        .fixed = {.dead_time = 0.0, .offset = 0.0}};

}  // namespace

// Source: NIST Statistical Reference Datasets, BoxBOD (higher difficulty), certified values.
TEST_CASE("BoxBOD to the certified digits", "[published]") {
    const FittedModel fit = identify(certified_record({1, 2, 3, 5, 7, 10}, {109, 149, 149, 191, 213, 224}), certified_options);
    CHECK(fit.gain == Approx(2.1380940889e+02).epsilon(1e-10));
    CHECK(1.0 / fit.lags[0] == Approx(5.4723748542e-01).epsilon(1e-10));
    CHECK(fit.sum_of_squares == Approx(1.1680088766e+03).epsilon(1e-10));
    CHECK(fit.standard_error("gain").value() == Approx(1.2354515176e+01).epsilon(1e-9));
    // The certificate gives the error of the rate 1/lag: 1.0455993237E-01.
    CHECK(fit.standard_error("lag_1").value() / (fit.lags[0] * fit.lags[0]) == Approx(1.0455993237e-01).epsilon(1e-9));
}

// Source: NIST Statistical Reference Datasets, Misra1a (lower difficulty), certified values.
TEST_CASE("Misra1a to the certified digits", "[published]") {
    const std::vector<double> x = {77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0};
    const std::vector<double> y = {10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78};
    const FittedModel fit = identify(certified_record(x, y), certified_options);
    CHECK(fit.gain == Approx(2.3894212918e+02).epsilon(1e-9));
    CHECK(1.0 / fit.lags[0] == Approx(5.5015643181e-04).epsilon(1e-9));
    CHECK(fit.sum_of_squares == Approx(1.2455138894e-01).epsilon(1e-9));
    CHECK(fit.standard_error("gain").value() == Approx(2.7070075241e+00).epsilon(1e-8));
}

TEST_CASE("the truth of noise-free records comes back", "[closed form]") {
    Truth truth{.noise = 0.0};
    truth.irregular = GENERATE(false, true);
    const bool integrating = GENERATE(false, true);
    if (integrating) truth.gain = 0.02, truth.lag = 0.0;
    const FittedModel fit = identify(simulated::record(truth, 5));
    CHECK(fit.form == (integrating ? Form::integrating_plus_dead_time : Form::first_order_plus_dead_time));
    CHECK(fit.gain == Approx(truth.gain).epsilon(1e-9));
    CHECK(fit.dead_time == Approx(truth.dead_time).epsilon(1e-6));
    if (!integrating) CHECK(fit.lags.at(0) == Approx(truth.lag).epsilon(1e-7));
    CHECK(fit.offset == Approx(truth.rest_value).epsilon(1e-9));
    CHECK(fit.residual_rms < 1e-6);
}

TEST_CASE("estimates scatter about the truth as their standard errors say", "[invariant]") {
    // 200 seeded records: the mean squared error in units of the reported variance is 1 within its sampling band.
    double sum[3] = {};
    constexpr int count = 200;
    for (unsigned seed = 1; seed <= count; ++seed) {
        const Truth truth{.samples = 400};
        const FittedModel fit = identify(simulated::record(truth, seed), {.form = Form::first_order_plus_dead_time});
        const double z[3] = {(fit.gain - truth.gain) / fit.standard_error("gain").value(),
                             (fit.lags[0] - truth.lag) / fit.standard_error("lag_1").value(),
                             (fit.dead_time - truth.dead_time) / fit.standard_error("dead_time").value()};
        for (int i = 0; i < 3; ++i) {
            INFO("seed " << seed << ", parameter " << i << ", z " << z[i]);
            CHECK(std::abs(z[i]) < 6.0);  // a wrong minimum would be far beyond
            sum[i] += z[i] * z[i];
        }
    }
    for (double s : sum) CHECK(s / count == Approx(1.0).margin(0.35));
}

// Source: trade-facts B08 (Cramer-Rao bound of FOPDT, computed independently): K 1.2, lag 12 s, dead
// time 3 s, 0.5 s samples, 20 s before and 60 s after a move of 5, SNR 10, offset fitted too.
TEST_CASE("standard errors meet the Cramer-Rao bound", "[published]") {
    const double bound[3] = {0.024204606088826276, 0.09343680645671269, 0.19392686555404734};
    double mean[3] = {};
    constexpr int count = 60;
    for (unsigned seed = 1; seed <= count; ++seed) {
        Truth truth{.gain = 1.2, .lag = 12.0, .dead_time = 3.0, .noise = 0.6, .move_times = {20.0}, .move_sizes = {5.0},
                    .duration = 80.5, .samples = 161};
        const FittedModel fit = identify(simulated::record(truth, seed), {.form = Form::first_order_plus_dead_time});
        // Errors scale with the residual noise; take that out to compare with the bound.
        const double scale = truth.noise / fit.noise;
        mean[0] += scale * fit.standard_error("gain").value() / fit.gain / count;
        mean[1] += scale * fit.standard_error("lag_1").value() / fit.lags[0] / count;
        mean[2] += scale * fit.standard_error("dead_time").value() / truth.dead_time / count;
    }
    for (int i = 0; i < 3; ++i) CHECK(mean[i] == Approx(bound[i]).epsilon(0.12));
}

TEST_CASE("fixed parameters stay and the others adapt", "[closed form]") {
    const Truth truth{.noise = 0.0};
    const Record record = simulated::record(truth, 1);
    const FittedModel fit = identify(record, {.fixed = {.dead_time = truth.dead_time, .offset = truth.rest_value}});
    CHECK(fit.dead_time == truth.dead_time);
    CHECK(fit.offset == Approx(truth.rest_value).epsilon(1e-14));
    CHECK_FALSE(fit.standard_error("dead_time"));
    CHECK(fit.lags.at(0) == Approx(truth.lag).epsilon(1e-9));
    const FittedModel slope = identify(record, {.fixed = {.slope = 0.05}});
    CHECK(slope.form == Form::integrating_plus_dead_time);
    CHECK(slope.gain == 0.05);
    CHECK_THROWS_AS(identify(record, {.fixed = {.gain = 1.0, .slope = 1.0}}), Error);
}

TEST_CASE("a drift asked for is told apart from the response", "[closed form]") {
    const Truth truth{.noise = 0.0, .drift = 0.004};
    const FittedModel fit = identify(simulated::record(truth, 1), {.form = Form::first_order_plus_dead_time, .drift = true});
    CHECK(fit.gain == Approx(truth.gain).epsilon(1e-8));
    CHECK(fit.drift_per_s == Approx(truth.drift).epsilon(1e-7));
    CHECK(fit.offset == Approx(truth.rest_value).epsilon(1e-9));
}

TEST_CASE("an integrating process off balance is still told", "[closed form]") {
    Truth truth{.gain = 0.02, .lag = 0.0, .noise = 0.05, .drift = 0.03};
    const FittedModel fit = identify(simulated::record(truth, 3));
    CHECK(fit.form == Form::integrating_plus_dead_time);
    CHECK(std::abs(fit.gain - truth.gain) < 5.0 * fit.standard_error("slope").value());
    CHECK(std::abs(fit.drift_per_s - truth.drift) < 5.0 * fit.standard_error("drift").value());
    CHECK(fit.advice() == Advice::tune);
}

TEST_CASE("bad samples are dropped and their output is held", "[invariant]") {
    const Truth truth{};
    RecordColumns all = simulated::columns(truth, 9);
    RecordColumns marked = all;
    marked.good.assign(all.time_s.size(), 1);
    for (std::size_t i = 300; i < 340; ++i) {
        marked.good[i] = 0;
        marked.process_value[i] = std::numeric_limits<double>::quiet_NaN();
    }
    const FittedModel fit = identify(Record(marked));
    CHECK(fit.samples_used == 960);
    CHECK(fit.gain == Approx(truth.gain).epsilon(0.02));
    CHECK(fit.findings.at(0).code == FindingCode::bad_samples_left_out);
    CHECK(fit.findings[0].first == 300);
    CHECK(fit.findings[0].last == 339);
}

TEST_CASE("the fit does not depend on units or origin", "[invariant]") {
    const Truth truth{};
    RecordColumns c = simulated::columns(truth, 21);
    const FittedModel plain = identify(Record(c));
    for (double& t : c.time_s) t = 1.7e6 + t;
    for (double& u : c.output) u = 4.0 + 0.16 * u;
    for (double& y : c.process_value) y = 1e5 + 300.0 * y;
    const FittedModel scaled = identify(Record(c));
    CHECK(scaled.gain * 0.16 / 300.0 == Approx(plain.gain).epsilon(1e-7));
    CHECK(scaled.lags[0] == Approx(plain.lags[0]).epsilon(1e-6));
    CHECK(scaled.dead_time == Approx(plain.dead_time).epsilon(1e-6));
}

TEST_CASE("many samples and few give the same truth", "[invariant]") {
    for (std::size_t n : {60u, 300u, 5000u, 40000u}) {
        const Truth truth{.samples = n};
        const FittedModel fit = identify(simulated::record(truth, 17), {.form = Form::first_order_plus_dead_time});
        INFO("samples " << n);
        CHECK(std::abs(fit.gain - truth.gain) < 5.0 * fit.standard_error("gain").value());
        CHECK(std::abs(fit.lags[0] - truth.lag) < 5.0 * fit.standard_error("lag_1").value());
        CHECK(std::abs(fit.dead_time - truth.dead_time) < 5.0 * fit.standard_error("dead_time").value());
    }
}

TEST_CASE("fitted_response leaves the residuals that the fit reports", "[invariant]") {
    const Record record = simulated::record(Truth{.drift = 0.002}, 4);
    for (Form form : {Form::first_order_plus_dead_time, Form::integrating_plus_dead_time}) {
        const FittedModel fit = identify(record, {.form = form, .drift = true});
        const auto model = fitted_response(fit, record);
        double sum = 0.0;
        for (std::size_t i = 0; i < model.size(); ++i) sum += std::pow(record.process_value()[i] - model[i], 2);
        CHECK(sum == Approx(fit.sum_of_squares).epsilon(1e-9));
    }
}
