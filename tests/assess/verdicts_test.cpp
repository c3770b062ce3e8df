// Loops whose stability is known by hand.
#include <limits>

#include "assess/loops.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/assess/robustness.hpp"

using namespace tauwright;
using oracle::relative_error;

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

TransferFunction loop(Factors f) { return TransferFunction::from_factors(std::move(f)); }

void check_verdict(const char* what, const TransferFunction& L, Verdict expected, int unstable_poles) {
    INFO(what << ": L = " << L.text());
    const Robustness r = robustness(L);
    CHECK(std::string(name_of(r.verdict)) == name_of(expected));
    if (expected == Verdict::stable) CHECK(r.stable == std::optional<bool>(true));
    else {
        CHECK(r.stable != std::optional<bool>(true));
        CHECK_FALSE(r.gain_margin.has_value());
        CHECK_FALSE(r.gain_reduction_margin.has_value());
        CHECK_FALSE(r.phase_margin_deg.has_value());
        CHECK_FALSE(r.delay_margin.has_value());
        CHECK_FALSE(r.max_sensitivity.has_value());
        CHECK_FALSE(r.max_complementary_sensitivity.has_value());
    }
    if (unstable_poles >= 0) CHECK(r.unstable_poles == std::optional<int>(unstable_poles));
}

void stable(const char* what, Factors f) { check_verdict(what, loop(std::move(f)), Verdict::stable, 0); }
void unstable(const char* what, Factors f, int poles) { check_verdict(what, loop(std::move(f)), Verdict::unstable, poles); }
void marginal(const char* what, Factors f) { check_verdict(what, loop(std::move(f)), Verdict::marginal, -1); }

}  // namespace

TEST_CASE("stability by Routh's criterion", "[closed form]") {
    // k/(s+1)^3: s^3 + 3 s^2 + 3 s + 1 + k, stable for -1 < k < 8.
    stable("three lags", {.gain = 7.99, .lags = {1.0, 1.0, 1.0}});
    unstable("three lags", {.gain = 8.01, .lags = {1.0, 1.0, 1.0}}, 2);
    stable("three lags, negative gain", {.gain = -0.999, .lags = {1.0, 1.0, 1.0}});
    unstable("three lags, negative gain", {.gain = -1.001, .lags = {1.0, 1.0, 1.0}}, 1);
    // k/(s (s+1)(0.5 s+1)): 0.5 s^3 + 1.5 s^2 + s + k, stable for 0 < k < 3.
    stable("integrator and two lags", {.gain = 2.999, .integrators = 1, .lags = {1.0, 0.5}});
    unstable("integrator and two lags", {.gain = 3.001, .integrators = 1, .lags = {1.0, 0.5}}, 2);
    unstable("integrator and two lags", {.gain = -0.1, .integrators = 1, .lags = {1.0, 0.5}}, 1);
    // k (s+1)^2/s^3: s^3 + k s^2 + 2 k s + k, stable for k > 1/2.
    stable("three integrators, two leads", {.gain = 0.501, .integrators = 3, .leads = {1.0, 1.0}});
    unstable("three integrators, two leads", {.gain = 0.499, .integrators = 3, .leads = {1.0, 1.0}}, 2);
    // k/(s^2 + 0.2 s + 1): stable for k > -1.
    stable("an oscillatory pair", {.gain = 50.0, .lag_pairs = {{1.0, 0.1}}});
    unstable("an oscillatory pair", {.gain = -1.5, .lag_pairs = {{1.0, 0.1}}}, 1);
    // k (1-s)/(1+s): 1 + k + s (1-k), stable for |k| < 1.
    stable("all-pass", {.gain = 0.99, .leads = {-1.0}, .lags = {1.0}});
    unstable("all-pass", {.gain = 1.01, .leads = {-1.0}, .lags = {1.0}}, 1);
    // k (1-s)/(s+1)^2: s^2 + (2-k) s + 1 + k, stable for -1 < k < 2.
    stable("inverse response", {.gain = 1.999, .leads = {-1.0}, .lags = {1.0, 1.0}});
    unstable("inverse response", {.gain = 2.001, .leads = {-1.0}, .lags = {1.0, 1.0}}, 2);
}

TEST_CASE("double integrators", "[closed form]") {
    // k (T s + 1)/s^2: s^2 + k T s + k, stable for k, T > 0; without the lead on the axis at +-j sqrt(k).
    stable("with a lead", {.gain = 2.0, .integrators = 2, .leads = {0.5}});
    unstable("with a lead the wrong way", {.gain = 2.0, .integrators = 2, .leads = {-0.5}}, 2);
    marginal("alone", {.gain = 2.0, .integrators = 2});
    // k (T s + 1)/(s^2 (a s + 1)): stable for T > a.
    stable("lead over lag", {.gain = 1.0, .integrators = 2, .leads = {1.0}, .lags = {0.99}});
    unstable("lag over lead", {.gain = 1.0, .integrators = 2, .leads = {1.0}, .lags = {1.01}}, 2);
    unstable("with dead time", {.gain = 1.0, .integrators = 2, .dead_time = 0.01}, 2);
    unstable("negative", {.gain = -1.0, .integrators = 2}, 1);
}

TEST_CASE("unstable first order under proportional control", "[closed form]") {
    // k/(s-1) = -k/(-s+1): s - 1 + k, stable for k > 1.
    stable("without dead time", {.gain = -1.001, .lags = {-1.0}});
    unstable("without dead time", {.gain = -0.999, .lags = {-1.0}}, 1);
    marginal("without dead time, exactly", {.gain = -1.0, .lags = {-1.0}});
    unstable("wrong sign", {.gain = 2.0, .lags = {-1.0}}, 1);
    // With theta >= tau no proportional gain does it (Silva, Datta and Bhattacharyya 2005, from memory).
    for (double k : {0.5, 0.99, 1.01, 1.2, 2.0, 10.0}) {
        const auto r = robustness(loop({.gain = -k, .lags = {-1.0}, .dead_time = 1.05}));
        INFO("k " << k);
        CHECK(std::string(name_of(r.verdict)) == "unstable");
    }
}

TEST_CASE("UFO-Kmax: range of the proportional gain of an unstable first order with dead time", "[published]") {
    // Derived (exact formula; mpmath): K exp(-theta s)/(tau s - 1), lower limit 1.
    const struct { double theta, upper; } rows[] = {{0.1, 15.077431814665739}, {0.2, 7.229654773293682}, {0.4, 3.3154151393592202},
                                                    {0.6, 2.0196093028344752}, {0.8, 1.3787155291594319}};
    for (const auto& row : rows) {
        const auto at = [&](double k) { return loop({.gain = -k, .lags = {-1.0}, .dead_time = row.theta}); };
        check_verdict("just above the lower limit", at(1.001), Verdict::stable, 0);
        check_verdict("just below the lower limit", at(0.999), Verdict::unstable, 1);
        check_verdict("just below the upper limit", at(0.999 * row.upper), Verdict::stable, 0);
        check_verdict("just above the upper limit", at(1.001 * row.upper), Verdict::unstable, 2);
        const double k = std::sqrt(row.upper);
        const auto r = robustness(at(k));
        CHECK(relative_error(r.gain_margin.value(), row.upper / k) <= 1e-10);
        CHECK(relative_error(r.gain_reduction_margin.value(), 1.0 / k) <= 1e-10);
    }
}

TEST_CASE("FO-Ku: ultimate gain of first order with dead time", "[published]") {
    // Derived (exact formula; mpmath).
    const struct { double theta, Ku; } rows[] = {{0.2, 8.5024249884450184}, {0.5, 3.8068828648258725}, {1.0, 2.2618263341146514}, {5.0, 1.1321117282465291}};
    for (const auto& row : rows) {
        stable("below", {.gain = 0.9999 * row.Ku, .lags = {1.0}, .dead_time = row.theta});
        unstable("above", {.gain = 1.0001 * row.Ku, .lags = {1.0}, .dead_time = row.theta}, 2);
    }
    // K exp(-s)/s: pi/2, then a pair more every 2 pi.
    const double pi = std::acos(-1.0);
    stable("integrator", {.gain = 0.9999 * pi / 2.0, .integrators = 1, .dead_time = 1.0});
    unstable("integrator", {.gain = 1.0001 * pi / 2.0, .integrators = 1, .dead_time = 1.0}, 2);
    unstable("integrator", {.gain = 0.9999 * (pi / 2.0 + 2.0 * pi), .integrators = 1, .dead_time = 1.0}, 2);
    unstable("integrator", {.gain = 1.0001 * (pi / 2.0 + 2.0 * pi), .integrators = 1, .dead_time = 1.0}, 4);
    unstable("integrator, far beyond", {.gain = 100.0, .integrators = 1, .dead_time = 1.0}, 2 * static_cast<int>(std::ceil((100.0 - pi / 2.0) / (2.0 * pi))));
}

TEST_CASE("gain that is left at infinite frequency, with dead time", "[closed form]") {
    // Neutral equations: |L(j inf)| < 1 is needed, and |L| < 1 everywhere is enough.
    stable("small everywhere", {.gain = 0.4, .leads = {2.0}, .lags = {1.0}, .dead_time = 1.0});
    stable("dead time and gain alone", {.gain = 0.5, .dead_time = 1.0});
    stable("dead time and negative gain alone", {.gain = -0.5, .dead_time = 1.0});
    unstable("dead time and gain alone", {.gain = 2.0, .dead_time = 1.0}, -1);
    unstable("more than 1 left", {.gain = 0.6, .leads = {2.0}, .lags = {1.0}, .dead_time = 1.0}, -1);
    unstable("more than 1 left, however short the dead time", {.gain = 0.6, .leads = {2.0}, .lags = {1.0}, .dead_time = 1e-6}, -1);
    stable("without dead time the same loop stands", {.gain = 0.6, .leads = {2.0}, .lags = {1.0}});
    unstable("improper with dead time", {.gain = 0.1, .leads = {1.0, 1.0}, .lags = {1.0}, .dead_time = 0.1}, -1);
    const auto r = robustness(loop({.gain = 0.5, .dead_time = 1.0}));
    CHECK(relative_error(r.gain_margin.value(), 2.0) <= 1e-12);
    CHECK(relative_error(r.max_sensitivity.value(), 2.0) <= 1e-12);
    CHECK(relative_error(r.max_complementary_sensitivity.value(), 1.0) <= 1e-12);
    CHECK(r.delay_margin.value() == infinity);
    CHECK(r.phase_margin_deg.value() == infinity);
}

TEST_CASE("exactly marginal loops", "[closed form]") {
    marginal("three lags at k = 8", {.gain = 8.0, .lags = {1.0, 1.0, 1.0}});
    marginal("integrator and two lags at k = 3", {.gain = 3.0, .integrators = 1, .lags = {1.0, 0.5}});
    marginal("dead time and integrator at pi/2", {.gain = std::acos(0.0), .integrators = 1, .dead_time = 1.0});
    marginal("a closed-loop pole at rest", {.gain = -1.0, .lags = {5.0, 2.0}});
}

TEST_CASE("conditional stability shows in the gain reduction margin", "[closed form]") {
    const auto r = robustness(loop({.gain = 2.0, .integrators = 3, .leads = {1.0, 1.0}}));
    CHECK(relative_error(r.gain_reduction_margin.value(), 0.25) <= 1e-10);
    CHECK(r.gain_margin.value() == infinity);
    // k/(s+1)^3 at k = 2: GM 4, at w = sqrt(3).
    const auto three = robustness(loop({.gain = 2.0, .lags = {1.0, 1.0, 1.0}}));
    CHECK(relative_error(three.gain_margin.value(), 4.0) <= 1e-10);
    REQUIRE(three.phase_crossovers.size() == 1);
    CHECK(relative_error(three.phase_crossovers[0].frequency_rad_s, std::sqrt(3.0)) <= 1e-10);
    CHECK(three.gain_reduction_margin.value() == 0.0);
    // A negative gain: -0.5/(s+1) is stable up to twice the gain.
    CHECK(relative_error(robustness(loop({.gain = -0.5, .lags = {1.0}})).gain_margin.value(), 2.0) <= 1e-12);
}

TEST_CASE("lag-free figures of simple loops", "[closed form]") {
    // 1/s: Ms = Mt = 1, PM 90 deg at 1 rad/s, DM pi/2.
    const auto r = robustness(loop({.integrators = 1}));
    CHECK(relative_error(r.phase_margin_deg.value(), 90.0) <= 1e-12);
    CHECK(relative_error(r.delay_margin.value(), std::acos(0.0)) <= 1e-12);
    CHECK(relative_error(r.max_sensitivity.value(), 1.0) <= 1e-12);
    CHECK(relative_error(r.max_complementary_sensitivity.value(), 1.0) <= 1e-12);
    CHECK(r.gain_margin.value() == infinity);
    // 1/(s (2 z s... )): T = 1/(s^2 + 2 z s + 1) from L = 1/(s (s + 2 z)): Mt = 1/(2 z sqrt(1 - z^2)).
    for (double z : {0.05, 0.2, 0.5}) {
        const auto pair = robustness(loop({.gain = 0.5 / z, .integrators = 1, .lags = {0.5 / z}}));
        CHECK(relative_error(pair.max_complementary_sensitivity.value(), 1.0 / (2.0 * z * std::sqrt(1.0 - z * z))) <= 1e-10);
        CHECK(relative_error(pair.max_complementary_sensitivity_frequency.value(), std::sqrt(1.0 - 2.0 * z * z)) <= 1e-6);
    }
}

TEST_CASE("open-loop poles on the axis away from rest are followed", "[closed form]") {
    // 0.5 exp(-0.1 s)/(s^2 + 1): 1 + L turns its pair to the right for every small dead time, to the left if the gain is negative.
    CHECK(robustness(loop({.gain = 0.5, .lag_pairs = {{1.0, 0.0}}, .dead_time = 0.1})).unstable_poles == std::optional<int>(2));
    CHECK(robustness(loop({.gain = -0.5, .lag_pairs = {{1.0, 0.0}}, .dead_time = 0.1})).verdict == Verdict::stable);
    // (2 s + 0.5)/(s^2 + 1): s^2 + 2 s + 1.5.
    CHECK(robustness(loop({.gain = 0.5, .leads = {4.0}, .lag_pairs = {{1.0, 0.0}}})).verdict == Verdict::stable);
    // A zero on top of the pole hides an undamped mode.
    CHECK(robustness(loop({.gain = 0.5, .lags = {1.0}, .lead_pairs = {{1.0, 0.0}}, .lag_pairs = {{1.0, 0.0}}})).verdict == Verdict::marginal);
}

TEST_CASE("crossovers far out are found as well", "[closed form]") {
    // 1e-8/(s + 1)^3 meets the axis at sqrt(3) with 1/8 of its gain.
    CHECK(relative_error(robustness(loop({.gain = 1e-8, .lags = {1.0, 1.0, 1.0}})).gain_margin.value(), 8e8) <= 1e-9);
    // g exp(-s)/(s + 1): tan w = -w, at w = 2.0287578381104342 (tables of x + tan x = 0), gain 1/sqrt(1 + w^2).
    const double w = 2.0287578381104342;
    CHECK(relative_error(robustness(loop({.gain = 1e-9, .lags = {1.0}, .dead_time = 1.0})).gain_margin.value(), 1e9 * std::sqrt(1.0 + w * w)) <= 1e-9);
    // (s + 1)^2/(s^2 (a s + 1)), a = 2 + e: the axis is met where s^2 (a s + 1) + k (s + 1)^2 has a pair on it: k = a - 2 over ...
    // Routh: (1 + k) 2 k = a k, so k = a/2 - 1 = e/2.
    const double e = 1e-9;
    CHECK(relative_error(robustness(loop({.integrators = 2, .leads = {1.0, 1.0}, .lags = {2.0 + e}})).gain_reduction_margin.value(), 0.5 * ((2.0 + e) - 2.0)) <= 1e-6);
}

TEST_CASE("what right-half-plane poles and zeros cost every controller", "[published]") {
    // Skogestad and Postlethwaite, Multivariable Feedback Control, 2005, sections 5.3 and 5.4 (from memory): of a stable loop with an
    // unstable pole p and a zero z in the right half plane, Ms >= |z + p|/|z - p|, and Mt >= that times exp(p dead time).
    int stable = 0;
    for (double p : {0.05, 0.1, 0.3})
        for (double z : {4.0, 10.0, 50.0})
            for (double dead_time : {0.0, 0.05, 0.2})
                for (double gain : {1.2, 1.5, 2.0, 3.0, 5.0})
                    for (double Ti : {20.0, 60.0, 200.0}) {
                        const auto G = loop({.gain = -1.0, .leads = {-1.0 / z}, .lags = {-1.0 / p}, .dead_time = dead_time});
                        const auto r = robustness(G, PidSettings{.gain = gain, .integral_time = Ti});
                        if (r.verdict != Verdict::stable) continue;
                        ++stable;
                        const double bound = (z + p) / (z - p);
                        INFO("p " << p << ", z " << z << ", dead time " << dead_time << ", gain " << gain << ", Ti " << Ti);
                        CHECK(*r.max_sensitivity >= bound * (1.0 - 1e-9));
                        CHECK(*r.max_complementary_sensitivity >= bound * std::exp(p * dead_time) * (1.0 - 1e-9));
                    }
    CHECK(stable > 100);
}
