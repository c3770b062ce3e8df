// The PID block's limit on the change of its output per scan.
#include <algorithm>
#include <limits>

#include "core/oracle_tools.hpp"
#include "tauwright/discretize/pid.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::relative_error;

namespace {

run::PidBlock block_of(const PidSettings& settings, double scan_time, double change, double start = 50.0) {
    run::PidCoefficients coefficients;
    REQUIRE(discretize(settings, scan_time, coefficients) == error_code::ok);
    coefficients.output_change_per_scan = change;
    return {coefficients, 0.0, 100.0, start};
}

}  // namespace

TEST_CASE("without a rate limit every bit is as before", "[invariant]") {
    constexpr std::uint64_t seed = 77;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    const PidSettings settings{.gain = 2.0, .integral_time = 5.0, .derivative_time = 1.0, .filter_time = 0.1};
    run::PidBlock free = block_of(settings, 0.5, std::numeric_limits<double>::infinity());
    run::PidBlock wide = block_of(settings, 0.5, 1e9);
    for (int k = 0; k < 2000; ++k) {
        const double sp = random.uniform(30.0, 70.0), pv = random.uniform(30.0, 70.0);
        const double a = free.step(sp, pv), b = wide.step(sp, pv);
        if (a != b) FAIL_CHECK("differs at scan " << k);
    }
}

TEST_CASE("a rate-limited PI equals a recursion written from the equations", "[independent computation]") {
    constexpr std::uint64_t seed = 78;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int limited = 0;
    for (int i = 0; i < 50; ++i) {
        const double Kc = random.scaled(0.3, 5.0), Ti = random.scaled(2.0, 40.0), h = random.scaled(0.1, 2.0), change = random.scaled(0.05, 10.0);
        run::PidBlock block = block_of({.gain = Kc, .integral_time = Ti}, h, change);
        double u = 50.0, pv = 50.0, sp = 50.0, worst = 0.0;
        double I = block.step(sp, pv) - Kc * (sp - pv);
        for (int k = 0; k < 300; ++k) {
            if (random.chance(0.05)) sp = random.uniform(20.0, 80.0);
            pv += random.uniform(-1.0, 1.0);
            I += Kc * h / Ti * (sp - pv);
            const double v = Kc * (sp - pv) + I;
            const double next = std::clamp(v, std::max(0.0, u - change), std::min(100.0, u + change));
            I += h / std::max(Ti, h) * (next - v);
            limited += next != v;
            worst = std::max({worst, std::abs(block.step(sp, pv) - next), std::abs(block.integral() - I)});
            u = next;
        }
        CHECK(absolute_error(worst, 0.0) <= 1e-9);
    }
    CHECK(limited > 1000);
}

TEST_CASE("the integral tracks the rate-limited output", "[closed form]") {
    // Under a constant error the output goes at its rate r and the excess over it settles where the integral
    // moves at r too: excess = Tt (Kc e / Ti - r), E03's formula with r. Tt = Ti for a PI.
    const double Kc = 2.0, Ti = 8.0, h = 0.5, e = 10.0, r = 0.02;
    run::PidBlock block = block_of({.gain = Kc, .integral_time = Ti}, h, r * h, 20.0);
    block.step(50.0, 50.0);
    double before = block.output();
    for (int k = 0; k < 600; ++k) {
        const double output = block.step(50.0 + e, 50.0);
        CHECK(absolute_error(output - before, r * h) <= 1e-12);
        before = output;
    }
    // The integral has given up h/Tt of the excess: what was wanted is P + I + h/Tt excess.
    const double excess = (Kc * e + block.integral() - block.output()) / (1.0 - h / Ti);
    CHECK(relative_error(excess, Ti * (Kc * e / Ti - r)) <= 1e-9);
    // So the output turns within a scan of the error's turn instead of unwinding first.
    int late = 0;
    while (block.step(50.0, 50.0 + e) >= before && late < 100) ++late;
    CHECK(late <= 1);
}

TEST_CASE("limits stand above the rate, and manual is not slowed", "[closed form]") {
    run::PidBlock block = block_of({.gain = 10.0}, 1.0, 4.0, 93.0);
    block.step(50.0, 50.0);
    CHECK(block.step(60.0, 50.0) == 97.0);
    CHECK(block.flags() == 0u);
    CHECK(block.step(60.0, 50.0) == 100.0);
    CHECK((block.flags() & run::flag_limited_high) != 0u);
    CHECK(block.step(40.0, 50.0) == 96.0);
    block.to_manual();
    CHECK(block.set_manual_output(5.0) == error_code::ok);
    CHECK(block.step(40.0, 50.0) == 5.0);
    block.to_automatic();
    CHECK(block.step(40.0, 50.0) == 5.0);  // takes over without a bump
    CHECK(block.step(45.0, 50.0) == 9.0);
    // After a bad input too.
    CHECK(block.step(std::nan(""), 50.0) == 9.0);
    CHECK(block.step(90.0, 50.0) == 9.0);
    CHECK(block.step(95.0, 50.0) == 13.0);
}
