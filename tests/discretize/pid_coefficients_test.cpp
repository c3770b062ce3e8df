// Trade facts D01-D05, D07: backward differences, the rule this library uses (recalled from memory,
// recomputed). Velocity-form numbers are read off the block's answer to a pulse.
#include <limits>
#include <vector>

#include "core/oracle_tools.hpp"
#include "tauwright/discretize/discretize.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::check_refused;
using oracle::relative_error;

namespace {

// Output changes after an error pulse of 1 in scan 1, made by the process value: q0, q1, q2, ...
std::vector<double> velocity_weights(const PidSettings& s, double h, int count) {
    run::PidBlock block(discretize(s, h), -1e6, 1e6, 0.0);
    double before = block.step(0.0, 0.0);
    std::vector<double> q;
    for (int k = 0; k < count; ++k) {
        const double u = block.step(0.0, k == 0 ? -1.0 : 0.0);
        q.push_back(u - before);
        before = u;
    }
    return q;
}

}  // namespace

TEST_CASE("D01: backward PI in velocity form", "[published]") {
    const auto q = velocity_weights({.gain = 2.0, .integral_time = 10.0}, 1.0, 4);
    CHECK(relative_error(q[0], 2.2) <= 1e-12);
    CHECK(relative_error(q[1], -2.0) <= 1e-12);
    CHECK(absolute_error(q[2], 0.0) <= 1e-12);
}

TEST_CASE("D02: backward PID without a filter in velocity form", "[published]") {
    const auto q = velocity_weights({.gain = 2.0, .integral_time = 10.0, .derivative_time = 2.5}, 0.5, 5);
    CHECK(relative_error(q[0], 12.1) <= 1e-12);
    CHECK(relative_error(q[1], -22.0) <= 1e-12);
    CHECK(relative_error(q[2], 10.0) <= 1e-12);
    CHECK(absolute_error(q[3], 0.0) <= 1e-12);
}

TEST_CASE("D03: backward filtered derivative", "[published]") {
    // D_k = a D_{k-1} + b (x_k - x_{k-1}), Kc = 2, Td = 2.5, N = 10.
    const struct { double h, a, b; } rows[] = {{0.5, 0.3333333333333333, 6.666666666666667}, {1.0, 0.2, 4.0}};
    for (const auto& row : rows) {
        run::PidBlock block(discretize(PidSettings{.gain = 2.0, .derivative_time = 2.5, .filter_time = 0.25}, row.h), -1e6, 1e6, 0.0);
        block.step(0.0, 0.0);
        double D = 0.0, x = 0.0;
        const double inputs[] = {-1.0, -1.0, 0.5, 2.0, -3.0, 0.0, 0.0, 0.0};
        for (double y : inputs) {
            D = row.a * D + row.b * (-y - x);
            x = -y;
            CHECK(absolute_error(block.step(0.0, y), 2.0 * x + D) <= 1e-12);
        }
    }
}

TEST_CASE("D04: the backward derivative's pole lies in [0, 1) at every scan time", "[published]") {
    for (double h = 1e-6; h < 1e6; h *= 1.7) {
        const auto c = discretize(PidSettings{.gain = 1.0, .derivative_time = 2.5, .filter_time = 0.25}, h);
        INFO("scan " << h);
        CHECK(1.0 - c.derivative_smoothing >= 0.0);
        CHECK(1.0 - c.derivative_smoothing < 1.0);
    }
}

TEST_CASE("D05: backward measurement filter", "[published]") {
    CHECK(relative_error(discretize(PidSettings{.gain = 1.0, .measurement_filter_time = 2.0}, 0.5).measurement_smoothing, 0.2) <= 1e-12);
    CHECK(discretize(PidSettings{.gain = 1.0}, 0.5).measurement_smoothing == 1.0);
}

TEST_CASE("D07: PD with a filter is a backward lead-lag", "[published]") {
    // (5 s + 1)/(2 s + 1) at h = 0.5: a = 0.8, b0 = 2.2, b1 = -2; as PD it has Td = 3, Tf = 2.
    run::PidBlock block(discretize(PidSettings{.gain = 1.0, .derivative_time = 3.0, .filter_time = 2.0}, 0.5), -1e6, 1e6, 0.0);
    block.step(0.0, 0.0);
    double y = 0.0, x_before = 0.0;
    const double inputs[] = {1.0, 1.0, 2.0, -1.0, 0.0, 0.25};
    for (double x : inputs) {
        y = 0.8 * y + 2.2 * x - 2.0 * x_before;
        x_before = x;
        CHECK(absolute_error(block.step(0.0, -x), y) <= 1e-12);
    }
}

TEST_CASE("small scans approach the continuous controller", "[invariant]") {
    // The pulse response summed to a step response: P + I t + D exp decays with the filter time.
    const PidSettings s{.gain = 2.0, .integral_time = 10.0, .derivative_time = 2.0, .filter_time = 0.5};
    for (double h : {1e-2, 1e-3, 1e-4}) {
        run::PidBlock block(discretize(s, h), -1e6, 1e6, 0.0);
        block.step(0.0, 0.0);
        double worst = 0.0;
        for (int k = 1; k * h <= 3.0; ++k) {
            const double t = k * h, u = block.step(0.0, -1.0);
            worst = std::fmax(worst, std::abs(u - (2.0 * (1.0 + t / 10.0) + 2.0 * 2.0 / 0.5 * std::exp(-t / 0.5))));
        }
        INFO("scan " << h);
        CHECK(absolute_error(worst, 0.0) <= 18.0 * h);  // first order in h: (Kc Td/Tf) h/Tf at the start
    }
}

TEST_CASE("tracking time", "[published]") {
    // Trade fact E01: PI Tt = Ti, PID sqrt(Ti Td), never below one scan.
    CHECK(relative_error(discretize(PidSettings{.gain = 1.0, .integral_time = 8.0}, 0.5).tracking_per_scan, 0.0625) <= 1e-15);
    CHECK(relative_error(discretize(PidSettings{.gain = 1.0, .integral_time = 12.5, .derivative_time = 2.0}, 0.5).tracking_per_scan, 0.1) <= 1e-15);
    CHECK(discretize(PidSettings{.gain = 1.0, .integral_time = 8.0}, 20.0).tracking_per_scan == 1.0);
    CHECK(discretize(PidSettings{.gain = 1.0}, 0.5).tracking_per_scan == 0.0);
    constexpr std::uint64_t seed = 2;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 500; ++i) {
        const double Ti = random.scaled(1e-3, 1e6), Td = random.scaled(1e-3, 1e6);
        const auto c = discretize(PidSettings{.gain = 1.0, .integral_time = Ti, .derivative_time = Td}, 1e-4);
        CHECK(relative_error(c.tracking_per_scan, 1e-4 / std::sqrt(Ti * Td)) <= 1e-15);
    }
}

TEST_CASE("the overload that never throws gives the same codes and leaves the result alone", "[invariant]") {
    const run::PidCoefficients untouched{.gain = 123.0};
    const double infinity = std::numeric_limits<double>::infinity();
    const struct { PidSettings settings; double scan_time; error_code code; const char* word; } rows[] = {
        {{.gain = 1.0}, 0.0, error_code::out_of_domain, "scan_time"},
        {{.gain = 1.0}, -1.0, error_code::out_of_domain, "scan_time"},
        {{.gain = 1.0}, std::nan(""), error_code::not_finite, "scan_time"},
        {{.gain = 1.0}, infinity, error_code::not_finite, "scan_time"},
        {{}, 1.0, error_code::out_of_domain, "gain"},
        {{.gain = 1.0, .integral_time = -2.0}, 1.0, error_code::out_of_domain, "integral_time"},
        {{.gain = 1.0, .derivative_time = infinity}, 1.0, error_code::not_finite, "derivative_time"},
        {{.gain = 1e300, .integral_time = 1e-10}, 1.0, error_code::out_of_domain, "scan_time"},
    };
    for (const auto& row : rows) {
        run::PidCoefficients c = untouched;
        CHECK(std::string(name_of(discretize(row.settings, row.scan_time, c))) == name_of(row.code));
        CHECK(c == untouched);
        check_refused(row.code, {row.word}, [&] { discretize(row.settings, row.scan_time); });
    }
    run::PidCoefficients c;
    CHECK(discretize(PidSettings{.gain = 2.0, .integral_time = 10.0}, 1.0, c) == error_code::ok);
    CHECK(c == discretize(PidSettings{.gain = 2.0, .integral_time = 10.0}, 1.0));
    STATIC_REQUIRE(noexcept(discretize(PidSettings{}, 1.0, c)));
}
