#include <algorithm>

#include "catch_compat.hpp"
#include "identify/simulated.hpp"
#include "tauwright/tauwright.hpp"

using namespace tauwright;
using simulated::Truth;

namespace {

const Finding* finding(const FittedModel& fit, FindingCode code) {
    const auto it = std::find_if(fit.findings.begin(), fit.findings.end(), [&](const Finding& f) { return f.code == code; });
    return it == fit.findings.end() ? nullptr : &*it;
}

}  // namespace

TEST_CASE("healthy records are let through", "[invariant]") {
    int flagged = 0;
    for (unsigned seed = 1; seed <= 100; ++seed) {
        const FittedModel fit = identify(simulated::record(Truth{.samples = 300}, seed));
        if (fit.advice() != Advice::tune) ++flagged;
    }
    CHECK(flagged <= 2);
}

TEST_CASE("no move is a finding, not an error", "[closed form]") {
    RecordColumns c = simulated::columns(Truth{.move_times = {}, .move_sizes = {}}, 1);
    const FittedModel fit = identify(Record(c));
    REQUIRE(finding(fit, FindingCode::no_move));
    CHECK(fit.advice() == Advice::test_again);
    CHECK_FALSE(fit.model);
    CHECK(fitted_response(fit, Record(c)).empty());
}

TEST_CASE("a response below the noise is never passed as fit to tune", "[invariant]") {
    for (unsigned seed = 1; seed <= 100; ++seed) {
        const FittedModel fit = identify(simulated::record(Truth{.gain = 0.01, .noise = 1.0, .samples = 400}, seed));
        INFO("seed " << seed);
        CHECK(fit.advice() >= Advice::test_again);
    }
    RecordColumns flat = simulated::columns(Truth{}, 1);
    for (double& y : flat.process_value) y = 60.0;
    const FittedModel fit = identify(Record(flat));
    CHECK(finding(fit, FindingCode::below_noise));
    CHECK(fit.advice() >= Advice::test_again);
}

TEST_CASE("a record that ends before the response does", "[closed form]") {
    const Truth truth{.noise = 0.05, .move_times = {40.0}, .move_sizes = {5.0}, .duration = 40.0 + 3.3 + 18.0, .samples = 300};
    const FittedModel fit = identify(simulated::record(truth, 2), {.form = Form::first_order_plus_dead_time});
    const Finding* f = finding(fit, FindingCode::ends_early);
    REQUIRE(f);
    // Held for dead time + 1.5 lags where dead time + 3 lags are needed.
    CHECK(f->value == Approx((3.3 + 18.0) / (3.3 + 36.0)).epsilon(0.1));
}

TEST_CASE("a start that is not steady", "[closed form]") {
    RecordColumns c = simulated::columns(Truth{.noise = 0.05, .move_times = {100.0}, .move_sizes = {5.0}, .duration = 220.0}, 3);
    // Before the move the process value still settles by 40 % of the response to come.
    for (std::size_t i = 0; i < c.time_s.size(); ++i) c.process_value[i] -= 2.4 * std::exp(-c.time_s[i] / 60.0);
    const FittedModel fit = identify(Record(c), {.form = Form::first_order_plus_dead_time});
    REQUIRE(finding(fit, FindingCode::not_steady_at_start));
    CHECK(fit.advice() == Advice::test_again);
}

TEST_CASE("values on the end of the range are left out and said", "[closed form]") {
    RecordColumns c = simulated::columns(Truth{.noise = 0.05}, 3);
    c.process_value_range = Range{.low = 0.0, .high = 65.0};
    c.output_range = Range{};
    for (double& y : c.process_value) y = std::min(y, 65.0);
    const FittedModel fit = identify(Record(c));
    const Finding* f = finding(fit, FindingCode::output_clipped);
    REQUIRE(f);
    CHECK(fit.samples_used < 1000);
    CHECK(fit.gain == Approx(1.2).epsilon(0.02));
}

TEST_CASE("an output moved by a controller is recognized", "[invariant]") {
    for (unsigned seed = 1; seed <= 20; ++seed) {
        // A PI controller of our own on a sampled lag, in automatic, with a set-point step.
        std::mt19937_64 generator(seed);
        std::normal_distribution<double> normal;
        RecordColumns c;
        double x = 0.0, integral = 50.0;
        std::vector<double> outputs;
        for (int k = 0; k < 400; ++k) {
            const double y = 50.0 + x + 0.1 * normal(generator), e = (k < 100 ? 50.0 : 54.0) - y;
            integral += 0.08 * e;
            const double u = 0.8 * e + integral;
            outputs.push_back(u);
            c.time_s.push_back(k);
            c.output.push_back(u);
            c.process_value.push_back(y);
            x += 0.08 * (1.2 * ((k >= 3 ? outputs[static_cast<std::size_t>(k - 3)] : 50.0) - 50.0) - x);
        }
        const FittedModel fit = identify(Record(c));
        INFO("seed " << seed);
        CHECK(finding(fit, FindingCode::output_moved_by_controller));
        CHECK(fit.advice() >= Advice::test_again);
    }
    RecordColumns c = simulated::columns(Truth{}, 1);
    c.automatic.assign(c.time_s.size(), 1);
    CHECK(finding(identify(Record(c)), FindingCode::output_moved_by_controller));
}

TEST_CASE("a pseudo-random test in manual is not taken for a controller", "[invariant]") {
    std::mt19937_64 generator(5);
    std::vector<double> times, sizes;
    double level = 0.0;
    for (double t = 20.0; t < 380.0; t += 6.0) {
        const double next = (generator() & 1u) != 0 ? 4.0 : -4.0;
        if (next == level) continue;
        times.push_back(t);
        sizes.push_back(next - level);
        level = next;
    }
    const FittedModel fit = identify(simulated::record(Truth{.noise = 0.1, .move_times = times, .move_sizes = sizes}, 6));
    CHECK_FALSE(finding(fit, FindingCode::output_moved_by_controller));
    CHECK(fit.gain == Approx(1.2).epsilon(0.02));
    CHECK(fit.advice() == Advice::tune);
}

TEST_CASE("gains that differ between moves", "[closed form]") {
    RecordColumns c = simulated::columns(Truth{.noise = 0.05}, 8);
    RecordColumns other = simulated::columns(Truth{.gain = 0.7, .noise = 0.0, .move_times = {220, 310}, .move_sizes = {-5, 5}}, 8);
    const bool opposite = GENERATE(false, true);
    for (std::size_t i = 0; i < c.time_s.size(); ++i)
        c.process_value[i] -= (opposite ? 3.0 : 1.0) * (other.process_value[i] - 60.0);
    const FittedModel fit = identify(Record(c), {.form = Form::first_order_plus_dead_time});
    const Finding* f = finding(fit, FindingCode::gain_differs);
    REQUIRE(f);
    CHECK(f->advice == (opposite ? Advice::test_again : Advice::tune_with_care));
    CHECK((f->value < 0.0) == opposite);
}

TEST_CASE("what cannot be fitted is an error that says what to do", "[closed form]") {
    RecordColumns c = simulated::columns(Truth{.samples = 40}, 1);
    c.good.assign(40, 0);
    try {
        identify(Record(c));
        FAIL("no error");
    } catch (const Error& e) {
        CHECK(e.code() == error_code::no_usable_sample);
    }
    c.good[0] = c.good[39] = 1;
    try {
        identify(Record(c));
        FAIL("no error");
    } catch (const Error& e) {
        CHECK(e.code() == error_code::record_too_short);
        CHECK_THAT(e.what(), Catch::Matchers::ContainsSubstring("2 good samples"));
    }
}
