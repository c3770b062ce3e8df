// Poles on the axis that a loop hides, and margins behind more crossings than are listed.
#include <algorithm>

#include "catch_compat.hpp"
#include "tauwright/tauwright.hpp"

using namespace tauwright;

TEST_CASE("a zero at rest against integral action is not stable", "[closed form]") {
    const TransferFunction process = TransferFunction::from_factors({.zeros_at_origin = 1, .lags = {1.0, 1.0}});
    const Robustness r = robustness(process, PidSettings{.gain = 1.0, .integral_time = 2.0});
    CHECK(r.verdict == Verdict::marginal);
    CHECK_FALSE(r.gain_margin);
    CHECK(robustness(process, PidSettings{.gain = 1.0}).verdict == Verdict::stable);
}

TEST_CASE("poles and zeros on the axis are not cancelled unsaid", "[closed form]") {
    const TransferFunction undamped = oscillatory_plus_dead_time(1.0, 5.0, 0.0, 1.0);
    CHECK_THROWS_AS(synthesize(undamped, {.time_constant = 2.0}), Error);
    const TransferFunction wanted = TransferFunction::from_factors({.lags = {2.0, 2.0}, .dead_time = 1.0});
    CHECK_FALSE(synthesize(undamped, {.transfer_function = wanted}).buildable);
    const TransferFunction washout = TransferFunction::from_factors({.zeros_at_origin = 1, .lags = {1.0, 1.0}});
    const Synthesis s = synthesize(washout, {.transfer_function = TransferFunction::from_factors({.lags = {2.0}})});
    CHECK_FALSE(s.buildable);
    CHECK(s.obstacles.at(0).code == ObstacleCode::right_half_plane_zero_cancelled);
}

// The largest |L| on the negative axis bounds the gain: with dead time this long a crossing lies within
// 0.05 rad/s of any frequency, so the margin is 1/max|L| to a fraction of a percent.
TEST_CASE("the gain margin counts crossings beyond those listed", "[closed form]") {
    const double dead_time = GENERATE(70.0, 100.0);
    TransferFunction L = TransferFunction::from_factors(
        {.gain = 0.1, .lags = {0.005}, .lead_pairs = {{0.01, 0.9}}, .lag_pairs = {{0.01, 0.02}}, .dead_time = dead_time});
    double largest = 0.0;
    for (double w = 50.0; w < 150.0; w += 0.001) largest = std::max(largest, std::abs(L({0.0, w})));
    L = L.with_gain(0.1 * 0.9 / largest);
    const Robustness r = robustness(L);
    REQUIRE(r.verdict == Verdict::stable);
    CHECK(*r.gain_margin == Approx(1.0 / 0.9).epsilon(2e-3));
    CHECK(*r.gain_margin >= *r.max_sensitivity / (*r.max_sensitivity - 1.0) - 1e-9);
    CHECK(r.phase_crossovers.size() <= 1000);
}

TEST_CASE("an improper loop is not judged", "[closed form]") {
    CHECK(robustness(TransferFunction::from_factors({.leads = {1.0}})).verdict == Verdict::undetermined);
}

TEST_CASE("a hidden pole at rest does not hide that the rest is unstable", "[closed form]") {
    // s exp(-s)/(s + 1)^2 under 100 (1 + 1/s): what is left is 100 exp(-s)/(s + 1), far beyond its ultimate gain of 2.3.
    const auto process = TransferFunction::from_factors({.zeros_at_origin = 1, .lags = {1.0, 1.0}, .dead_time = 1.0});
    const PidSettings fierce{.gain = 100.0, .integral_time = 1.0}, mild{.gain = 1.0, .integral_time = 1.0};
    CHECK(robustness(process, fierce).verdict == Verdict::unstable);
    CHECK(robustness(process, mild).verdict == Verdict::marginal);
    CHECK(robustness(process, fierce, {.scan_time = 0.1}).verdict == Verdict::unstable);
    CHECK(robustness(process, mild, {.scan_time = 0.1}).verdict == Verdict::marginal);
}
