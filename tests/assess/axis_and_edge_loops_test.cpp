// Loops at the edges of what the theory speaks of: roots on the imaginary axis, gain that stays at infinite frequency, curves
// that end in -1 or touch without crossing; and the bandwidths. make_axis_loops.py says how the tables were made.
#include "assess/axis_loops_data.hpp"
#include "assess/certified_comparison.hpp"

using namespace tauwright;
using oracle::pi;

namespace {

Robustness of(Factors f) { return robustness(TransferFunction::from_factors(std::move(f))); }

}  // namespace

TEST_CASE("loops with roots on the imaginary axis: verdict, crossings and figures", "[independent computation]") {
    oracle::Families families;
    int place = 0;
    for (const auto& loop : oracle::axis_loops) {
        const auto L = oracle::transfer_function_of(loop.loop);
        INFO(loop.family << ", row " << place++ << ": " << L.text() << ", smallest |1 + L| " << text_of(loop.closest));
        oracle::compare(loop, loop.complete_to, robustness(L), {}, families);
    }
    CHECK(place == 75);
    INFO(oracle::table_of(families));
    SUCCEED();
}

TEST_CASE("bandwidths of the sensitivity and of the complementary sensitivity", "[independent computation]") {
    const auto agree = [](std::optional<double> found, double expected) {
        return !is_finite(expected) ? !found.has_value() : found.has_value() && oracle::difference(*found, expected) <= 1e-10;
    };
    int place = 0;
    for (const auto& row : oracle::bandwidths) {
        const auto L = oracle::transfer_function_of(row.loop);
        const Robustness r = robustness(L);
        INFO(row.family << ", row " << place++ << ": " << L.text() << ", of S " << text_of(r.sensitivity_bandwidth.value_or(oracle::infinity)) << " for "
                        << text_of(row.sensitivity) << ", of T " << text_of(r.complementary_bandwidth.value_or(oracle::infinity)) << " for " << text_of(row.complementary));
        CHECK(agree(r.sensitivity_bandwidth, row.sensitivity));
        CHECK(agree(r.complementary_bandwidth, row.complementary));
    }
    CHECK(place == 100);
}

TEST_CASE("bandwidths by hand", "[closed form]") {
    // L = 2/s: S = s/(s + 2), T = 2/(s + 2), both pass 1/sqrt(2) at 2. L = 1/(s (s + 2)): T = 1/(s + 1)^2, S = s (s + 2)/(s + 1)^2,
    // |T|^2 = 1/(1 + x)^2 and |S|^2 = x (x + 4)/(1 + x)^2 with x the square of the frequency.
    const Robustness a = of({.gain = 2.0, .integrators = 1}), b = of({.gain = 0.5, .integrators = 1, .lags = {0.5}});
    CHECK(a.sensitivity_bandwidth.value() == Approx(2.0).epsilon(1e-12));
    CHECK(a.complementary_bandwidth.value() == Approx(2.0).epsilon(1e-12));
    CHECK(b.sensitivity_bandwidth.value() == Approx(std::sqrt(std::sqrt(10.0) - 3.0)).epsilon(1e-12));
    CHECK(b.complementary_bandwidth.value() == Approx(std::sqrt(std::sqrt(2.0) - 1.0)).epsilon(1e-12));
    // 0.3/(s + 1): |S| starts at 1/1.3, above 1/sqrt(2), and |T| at 0.3/1.3, below.
    const Robustness c = of({.gain = 0.3, .lags = {1.0}});
    CHECK_FALSE(c.sensitivity_bandwidth.has_value());
    CHECK_FALSE(c.complementary_bandwidth.has_value());
}

TEST_CASE("exactly marginal loops with dead time", "[closed form]") {
    // |L| = 1 at sqrt(K^2 - 1)/T of K exp(-theta s)/(T s + 1); the dead time that takes the phase there to -pi.
    for (double K : {1.25, 2.0, 10.0}) {
        const double T = 3.0, w = std::sqrt(K * K - 1.0) / T, theta = (pi - std::atan(w * T)) / w;
        INFO("K = " << K);
        CHECK(std::string(name_of(of({.gain = K, .lags = {T}, .dead_time = theta}).verdict)) == "marginal");
        CHECK(std::string(name_of(of({.gain = K, .lags = {T}, .dead_time = theta * (1.0 - 1e-6)}).verdict)) == "stable");
        CHECK(std::string(name_of(of({.gain = K, .lags = {T}, .dead_time = theta * (1.0 + 1e-6)}).verdict)) == "unstable");
    }
}

TEST_CASE("gain that stays at infinite frequency", "[closed form]") {
    for (double k : {1.0, 1.5, 20.0}) {  // 1 + k exp(-theta s) at high frequency: infinitely many poles on or to the right of the axis
        INFO("gain " << k);
        const Robustness r = of({.gain = k, .leads = {2.0}, .lags = {2.5, 1.0, 3.0}, .lead_pairs = {{std::sqrt(3.75), 0.7}}, .dead_time = 0.4});
        CHECK(r.stable == std::optional<bool>(false));
        CHECK_FALSE(r.unstable_poles.has_value());
        CHECK_FALSE(r.gain_margin.has_value());
    }
    // 0.5 exp(-s): the closed loop's poles have exp(-s) = -2, all at real part -log 2.
    const Robustness half = of({.gain = 0.5, .dead_time = 1.0});
    REQUIRE(half.verdict == Verdict::stable);
    CHECK(half.gain_margin.value() == Approx(2.0).epsilon(1e-12));
    CHECK(half.max_sensitivity.value() == Approx(2.0).epsilon(1e-12));
    CHECK(half.max_complementary_sensitivity.value() == Approx(1.0).epsilon(1e-12));
    CHECK(half.delay_margin.value() == oracle::infinity);
    // (2 s + 1)/(s + 1) without dead time is stable; the least dead time makes infinitely many poles.
    const Robustness fragile = of({.gain = 1.0, .leads = {2.0}, .lags = {1.0}});
    CHECK(fragile.verdict == Verdict::stable);
    CHECK(fragile.fragile);
    CHECK(fragile.delay_margin.value() == 0.0);
    CHECK_FALSE(of({.gain = 1.0, .leads = {0.5}, .lags = {1.0}}).fragile);
}

TEST_CASE("gain 1 at rest", "[closed form]") {
    const Robustness lag = of({.gain = 1.0, .lags = {2.0}}), late = of({.gain = 1.0, .lags = {2.0}, .dead_time = 7.0});
    for (const Robustness& r : {lag, late}) {  // |L| < 1 at every frequency above 0
        CHECK(r.verdict == Verdict::stable);
        CHECK(r.gain_crossovers.empty());
        CHECK(r.phase_margin_deg.value() == oracle::infinity);
        CHECK(r.delay_margin.value() == oracle::infinity);
    }
    CHECK(std::string(name_of(of({.gain = -1.0, .lags = {2.0}}).verdict)) == "marginal");
    CHECK(std::string(name_of(of({.gain = -1.0, .lags = {2.0}, .dead_time = 7.0}).verdict)) == "marginal");
}

TEST_CASE("peaks of exactly 1", "[closed form]") {
    // |1 + 1/(T s + 1)| > 1 down to its limit; |1 + k/s|^2 = 1 + (k/w)^2; T = 1/(s + 1)^2 falls from 1 at rest.
    for (const Factors& f : {Factors{.gain = 1.0, .lags = {2.0}}, Factors{.gain = 3.0, .integrators = 1}}) {
        const Robustness r = of(f);
        CHECK(r.max_sensitivity.value() == 1.0);
        CHECK(r.max_sensitivity_frequency.value() == oracle::infinity);
    }
    for (const Factors& f : {Factors{.gain = 3.0, .integrators = 1}, Factors{.gain = 0.5, .integrators = 1, .lags = {0.5}}}) {
        const Robustness r = of(f);
        CHECK(r.max_complementary_sensitivity.value() == 1.0);
        CHECK(r.max_complementary_sensitivity_frequency.value() == 0.0);
    }
}

TEST_CASE("a gain that touches 1", "[closed form]") {
    // |2 s/(s + 1)^2| = 2 w/(1 + w^2): 1 at w = 1 to the last bit, below elsewhere, angle there -theta.
    for (double theta : {0.0, 1.0, 3.0}) {
        INFO("dead time " << theta);
        const Robustness r = of({.gain = 2.0, .zeros_at_origin = 1, .lags = {1.0, 1.0}, .dead_time = theta});
        CHECK(r.verdict == Verdict::stable);
        REQUIRE(r.gain_crossovers.size() == 1);
        const GainCrossover& c = r.gain_crossovers.front();
        CHECK(c.touches);
        CHECK(std::abs(c.frequency_rad_s - 1.0) <= c.error_bound + 1e-12);
        CHECK(c.error_bound <= 1e-6);
        CHECK(std::abs(r.phase_margin_deg.value() - (180.0 - theta * 180.0 / pi)) <= 1e-4);
    }
    // K/(T^2 s^2 + 2 z T s + 1) peaks at K/(2 z sqrt(1 - z^2)), which z = 0.6 and K = 0.96 make 1 but for rounding; a
    // millionth more crosses twice, a millionth less not at all.
    const double peak = std::sqrt(0.28) / 2.0;
    const auto pair = [](double K) { return of({.gain = K, .lag_pairs = {{2.0, 0.6}}, .dead_time = 0.3}); };
    const Robustness touch = pair(0.96);
    REQUIRE(touch.verdict == Verdict::stable);
    CHECK_FALSE(touch.gain_crossovers.empty());
    for (const GainCrossover& c : touch.gain_crossovers) CHECK(std::abs(c.frequency_rad_s - peak) <= 1e-6);
    CHECK(pair(0.96 * (1.0 + 1e-6)).gain_crossovers.size() == 2);
    CHECK(pair(0.96 * (1.0 - 1e-6)).gain_crossovers.empty());
}

TEST_CASE("a phase that touches -180 degrees", "[closed form]") {
    // K (s + 1)^2/(s^3 (a s + 1)^2): 2 atan(w) - 2 atan(a w) is highest at w = 1/sqrt(a), 2 atan((1 - a)/(2 sqrt(a))), which
    // brings the phase from -270 to just -180 degrees where sqrt(a) = sqrt(2) - 1.
    const double a = 3.0 - 2.0 * std::sqrt(2.0), w = 1.0 + std::sqrt(2.0);
    const auto near = [&](double lag) {
        const Robustness r = of({.gain = 1e-3, .integrators = 3, .leads = {1.0, 1.0}, .lags = {lag, lag}});
        std::vector<PhaseCrossover> found;
        for (const auto& c : r.phase_crossovers)
            if (std::abs(c.frequency_rad_s - w) < 1e-2 * w) found.push_back(c);
        return found;
    };
    CHECK(near(a * (1.0 - 1e-6)).size() == 2);
    CHECK(near(a * (1.0 + 1e-6)).empty());
    const auto touching = near(a);  // to within rounding: one touch, or two crossings so near that no double tells them apart
    for (const auto& c : touching) {
        CHECK((c.touches || touching.size() == 2));
        CHECK(std::abs(c.frequency_rad_s - w) <= 1e-6 * w + c.error_bound);
    }
}
