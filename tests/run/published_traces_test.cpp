// Trade facts D14, D15, E02-E04 and the closed forms behind them.
#include "core/oracle_tools.hpp"
#include "tauwright/discretize/discretize.hpp"
#include "tauwright/run/run.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::relative_error;

namespace {

constexpr double values[] = {48.0, 48.5, 49.2, 49.8, 50.3, 50.4};
// D14 (derived, recomputed): Kc = 2, Ti = 10, h = 1, set point 50, taken over from 40 % at scan 0.
constexpr double trace[] = {40.0, 39.3, 38.05999999999999, 36.9, 35.839999999999996, 35.559999999999995};

}  // namespace

TEST_CASE("D14: PI trace with a bumpless take-over", "[published]") {
    run::PidBlock block(discretize(PidSettings{.gain = 2.0, .integral_time = 10.0}, 1.0), 0.0, 100.0, 40.0);
    for (std::size_t k = 0; k < std::size(values); ++k) {
        INFO("scan " << k);
        CHECK(absolute_error(block.step(50.0, values[k]), trace[k]) <= 1e-12);
        CHECK(block.flags() == 0u);
    }
}

TEST_CASE("D15: the velocity form gives the same trace where nothing saturates", "[published]") {
    // u_k = u_{k-1} + q0 e_k + q1 e_{k-1} with q0 = Kc (1 + h/Ti), q1 = -Kc (trade fact D01).
    double u = 40.0;
    run::PidBlock block(discretize(PidSettings{.gain = 2.0, .integral_time = 10.0}, 1.0), 0.0, 100.0, 40.0);
    block.step(50.0, values[0]);
    for (std::size_t k = 1; k < std::size(values); ++k) {
        u += 2.2 * (50.0 - values[k]) - 2.0 * (50.0 - values[k - 1]);
        CHECK(absolute_error(u, trace[k]) <= 1e-12);
        CHECK(absolute_error(block.step(50.0, values[k]), u) <= 1e-12);
    }
}

TEST_CASE("E01, E02: one scan of back-calculation", "[published]") {
    // E01 (recalled, recomputed): tracking time sqrt(12.5 * 2) = 5. E02: v = 120, limit 100, h = 0.5 gives -2.
    const auto c = discretize(PidSettings{.gain = 2.5, .integral_time = 12.5, .derivative_time = 2.0}, 0.5);
    CHECK(relative_error(0.5 / c.tracking_per_scan, 5.0) <= 1e-12);
    CHECK(relative_error(c.tracking_per_scan * (100.0 - 120.0), -2.0) <= 1e-12);
    // In the block: the integral after a scan that wanted v is the untracked one plus that correction.
    run::PidBlock block(c, 0.0, 100.0, 90.0);
    block.step(50.0, 50.0);                       // I = 90, P = D = 0
    const double e = 12.0;                        // a set-point step: derivative sees only the process value
    CHECK(block.step(50.0 + e, 50.0) == 100.0);
    const double integral = 90.0 + c.integral_per_scan * e, v = integral + 2.5 * e;
    CHECK(v > 120.0);
    CHECK(relative_error(block.integral(), integral + 0.1 * (100.0 - v)) <= 1e-12);
}

TEST_CASE("E03: with a constant error at the limit the excess settles at e Kc Tt / Ti", "[published]") {
    // Kc = 2.5, Ti = 12.5, Tt = 5, e = 10 gives 10 %, at every scan time (recalled, recomputed).
    for (double h : {0.05, 0.5, 2.0}) {
        for (double e : {10.0, -10.0}) {
            const auto c = discretize(PidSettings{.gain = 2.5, .integral_time = 12.5, .derivative_time = 2.0}, h);
            run::PidBlock block(c, 0.0, 100.0, 50.0);
            block.step(50.0, 50.0);
            double output = 0.0, before = 0.0;
            for (int k = 0; k < 4000; ++k) {
                before = block.integral();
                output = block.step(50.0 + e, 50.0);
            }
            const double wanted = before + c.integral_per_scan * e + 2.5 * e;
            INFO("scan time " << h);
            CHECK(output == (e > 0 ? 100.0 : 0.0));
            CHECK(absolute_error(wanted - output, e) <= 1e-9);
        }
    }
}

TEST_CASE("an output leaves its limit as soon as the tracked integral lets it", "[invariant]") {
    // An hour at the limit must cost no more than a minute at it.
    int scans[2] = {};
    for (int which = 0; which < 2; ++which) {
        run::PidBlock block(discretize(PidSettings{.gain = 2.0, .integral_time = 20.0}, 1.0), 0.0, 100.0, 50.0);
        block.step(50.0, 50.0);
        for (int k = 0; k < (which == 0 ? 200 : 20000); ++k) block.step(80.0, 20.0);
        CHECK((block.flags() & run::flag_limited_high) != 0u);
        while (block.step(50.0, 55.0) >= 100.0 && scans[which] < 100) ++scans[which];
    }
    CHECK(scans[0] == scans[1]);
    CHECK(scans[0] <= 1);
}

TEST_CASE("E04: kicks on a set-point step and on a process-value step", "[published]") {
    // Kc = 2.5, step 4 %: 10 with weight 1, 4 with weight 0.4 (recalled, recomputed). Without integral action.
    const struct { double weight, kick; } rows[] = {{1.0, 10.0}, {0.4, 4.0}, {0.0, 0.0}};
    for (const auto& row : rows) {
        run::PidBlock block(discretize(PidSettings{.gain = 2.5, .derivative_time = 2.0, .filter_time = 0.2, .setpoint_weight = row.weight}, 1e-3),
                            0.0, 100.0, 50.0);
        block.step(50.0, 50.0);
        CHECK(absolute_error(block.step(54.0, 50.0) - 50.0, row.kick) <= 1e-12);
    }
    // Filtered derivative, N = 10: Kc N dy = 100 in the continuous limit; it acts on the process value here.
    run::PidBlock block(discretize(PidSettings{.gain = 2.5, .derivative_time = 2.0, .filter_time = 0.2}, 1e-10), -1000.0, 1000.0, 0.0);
    block.step(0.0, 0.0);
    CHECK(relative_error(block.step(0.0, -4.0), 10.0 + 100.0) <= 1e-8);
}

TEST_CASE("D06: variance of white noise through the measurement filter", "[published]") {
    // alpha / (2 - alpha) for alpha = 0.2: 1/9 (recalled, recomputed), as the sum of the squared impulse response.
    run::PidBlock block(discretize(PidSettings{.gain = 1.0, .measurement_filter_time = 2.0}, 0.5), -100.0, 100.0, 0.0);
    block.step(0.0, 0.0);
    double sum = 0.0;
    for (int k = 0; k < 400; ++k) {
        const double y = block.step(0.0, k == 0 ? -1.0 : 0.0);
        sum += y * y;
    }
    CHECK(relative_error(sum, 0.11111111111111112) <= 1e-12);
}
