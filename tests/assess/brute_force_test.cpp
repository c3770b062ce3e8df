// Seeded random loops, the library against brute force.
#include <algorithm>
#include <limits>

#include "assess/brute_force.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/assess/robustness.hpp"

using namespace tauwright;
using oracle::BruteForce;
using oracle::relative_error;

namespace {

constexpr std::uint64_t seed = 20240715;
constexpr double infinity = std::numeric_limits<double>::infinity();

Factors random_loop(oracle::Seeded& random) {
    Factors f;
    f.integrators = random.below(3);
    const int order = 1 + random.below(6);
    int left = std::max(order - f.integrators, f.integrators > 0 ? 0 : 1);
    while (left >= 2 && random.chance(0.25)) {
        const double z = random.chance(0.1) ? random.uniform(-0.5, -0.02) : random.uniform(0.03, 1.2);
        f.lag_pairs.push_back({random.scaled(0.1, 10.0), z});
        left -= 2;
    }
    for (; left > 0; --left) f.lags.push_back((random.chance(0.08) ? -1.0 : 1.0) * random.scaled(0.1, 10.0));
    const int poles = f.integrators + static_cast<int>(f.lags.size() + 2 * f.lag_pairs.size());
    for (int i = f.integrators == 2 ? 1 : random.below(3); i > 0 && static_cast<int>(f.leads.size()) < poles - 1; --i)
        f.leads.push_back((random.chance(0.15) ? -1.0 : 1.0) * random.scaled(0.1, 10.0));
    f.gain = (random.chance(0.1) ? -1.0 : 1.0) * (f.integrators == 0 ? random.scaled(0.1, 30.0) : random.scaled(0.003, 3.0));
    if (!f.lags.empty() && std::any_of(f.lags.begin(), f.lags.end(), [](double T) { return T < 0.0; }) && random.chance(0.7)) f.gain = -std::abs(f.gain);
    f.dead_time = random.chance(0.2) ? 0.0 : random.uniform(0.0, 5.0);
    return f;
}

bool has(const std::vector<double>& list, double w) {
    return std::any_of(list.begin(), list.end(), [&](double x) { return std::abs(x - w) <= 1e-6 * w; });
}

// Margins from what brute force crossed.
struct Margins {
    double above = infinity, below = 0.0, phase = infinity, delay = infinity;
};

Margins margins_of(const BruteForce& brute, const Factors& f) {
    Margins m;
    const auto take = [&](double factor) {
        if (factor > 1.0) m.above = std::min(m.above, factor);
        else m.below = std::max(m.below, factor);
    };
    for (double w : brute.phase_crossings()) take(1.0 / std::abs(brute.value(w)));
    if (f.integrators == 0 && f.gain < 0.0) take(-1.0 / f.gain);
    const double pi = std::acos(-1.0);
    for (double w : brute.gain_crossings()) {
        const double angle = std::arg(brute.value(w));  // from the positive axis; -1 is at +-pi
        m.phase = std::min(m.phase, (pi - std::abs(angle)) * 180.0 / pi);
        m.delay = std::min(m.delay, (angle + pi) / w);
    }
    return m;
}

}  // namespace

TEST_CASE("random loops: no verdict wrong, no crossing and no peak missed", "[independent computation]") {
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int stable = 0, unstable = 0;
    for (int i = 0; i < 300; ++i) {
        const Factors f = random_loop(random);
        const auto L = TransferFunction::from_factors(f);
        const BruteForce brute(f);
        const Robustness r = robustness(L);
        INFO("loop " << i << ": " << L.text() << ", brute force counts " << brute.unstable_poles() << ", closest " << brute.closest());
        REQUIRE(brute.doubt() < 0.05);
        if (r.verdict == Verdict::undetermined) {
            CHECK(brute.unstable_poles() > 1000);  // only a count beyond all use may stay open
            continue;
        }
        CHECK(std::string(name_of(r.verdict)) == (brute.unstable_poles() == 0 ? "stable" : "unstable"));
        CHECK(r.unstable_poles == std::optional<int>(brute.unstable_poles()));
        brute.unstable_poles() == 0 ? ++stable : ++unstable;

        std::vector<double> gains, phases;
        for (const auto& c : r.gain_crossovers) {
            gains.push_back(c.frequency_rad_s);
            CHECK(relative_error(std::abs(brute.value(c.frequency_rad_s)), 1.0) <= 1e-9);
        }
        for (const auto& c : r.phase_crossovers) {
            const auto value = brute.value(c.frequency_rad_s);
            phases.push_back(c.frequency_rad_s);
            CHECK(value.real() < 0.0);
            CHECK(std::abs(value.imag()) <= 1e-8 * std::abs(value));
            CHECK(relative_error(c.gain_factor * std::abs(value), 1.0) <= 1e-9);
        }
        for (double w : brute.gain_crossings()) if (!has(gains, w)) FAIL_CHECK("gain crossover missed at " << text_of(w));
        if (r.verdict != Verdict::stable) continue;
        // A crossing matters that is beyond -1, or nearer to it than every other on its side.
        const double nearest = 1.0 / r.gain_margin.value();
        for (double w : brute.phase_crossings()) {
            const double size = std::abs(brute.value(w));
            if ((size > 1.0 || size > nearest * (1.0 + 1e-9)) && !has(phases, w)) FAIL_CHECK("phase crossover missed at " << text_of(w));
        }

        CHECK(r.max_sensitivity.value() >= (1.0 - 1e-6) / brute.closest());
        CHECK(r.max_complementary_sensitivity.value() >= (1.0 - 1e-6) / brute.closest_inverse());
        const double peak = r.max_sensitivity_frequency.value();
        if (peak > 0.0 && is_finite(peak)) CHECK(relative_error(r.max_sensitivity.value(), 1.0 / std::abs(1.0 + brute.value(peak))) <= 1e-9);
        const double t_peak = r.max_complementary_sensitivity_frequency.value();
        if (t_peak > 0.0 && is_finite(t_peak))
            CHECK(relative_error(r.max_complementary_sensitivity.value(), 1.0 / std::abs(1.0 + 1.0 / brute.value(t_peak))) <= 1e-9);

        const Margins m = margins_of(brute, f);
        if (m.above < 20.0) CHECK(relative_error(r.gain_margin.value(), m.above) <= 1e-6);
        else CHECK(r.gain_margin.value() >= 20.0);
        CHECK(oracle::absolute_error(r.gain_reduction_margin.value(), m.below) <= 1e-6);
        CHECK((r.phase_margin_deg.value() == m.phase || std::abs(r.phase_margin_deg.value() - m.phase) <= 1e-6 * 180.0));
        CHECK((r.delay_margin.value() == m.delay || std::abs(r.delay_margin.value() - m.delay) <= 1e-6 * m.delay));
    }
    CHECK(stable >= 60);
    CHECK(unstable >= 60);
}

TEST_CASE("random loops: a thousandth less than a margin keeps a loop stable, a thousandth more does not", "[invariant]") {
    INFO("seed " << seed + 1);
    oracle::Seeded random(seed + 1);
    int flips = 0;
    for (int i = 0; i < 250; ++i) {
        const Factors f = random_loop(random);
        const auto L = TransferFunction::from_factors(f);
        const Robustness r = robustness(L);
        if (r.verdict != Verdict::stable) continue;
        INFO("loop " << i << ": " << L.text());
        const auto check_flip = [&](const char* what, const TransferFunction& inside, const TransferFunction& outside) {
            INFO(what << ": " << inside.text() << " | " << outside.text());
            CHECK(std::string(name_of(robustness(inside).verdict)) == "stable");
            CHECK(std::string(name_of(robustness(outside).verdict)) == "unstable");
            if (flips % 4 == 0) {  // brute force agrees with both
                CHECK(BruteForce(inside.factors()).unstable_poles() == 0);
                CHECK(BruteForce(outside.factors()).unstable_poles() > 0);
            }
            ++flips;
        };
        const double GM = r.gain_margin.value(), GRM = r.gain_reduction_margin.value(), DM = r.delay_margin.value();
        if (GM < 1000.0) check_flip("gain margin", L.with_gain(f.gain * (1.0 + 0.999 * (GM - 1.0))), L.with_gain(f.gain * (1.0 + 1.001 * (GM - 1.0))));
        if (GRM > 1e-3) check_flip("gain reduction margin", L.with_gain(f.gain * (1.0 - 0.999 * (1.0 - GRM))), L.with_gain(f.gain * (1.0 - 1.001 * (1.0 - GRM))));
        if (DM < 1e4) check_flip("delay margin", L.with_dead_time(f.dead_time + 0.999 * DM), L.with_dead_time(f.dead_time + 1.001 * DM));
    }
    INFO(flips << " flips");
    CHECK(flips >= 100);
}
