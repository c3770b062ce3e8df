#include <limits>
#include <vector>

#include "core/oracle_tools.hpp"
#include "tauwright/discretize/discretize.hpp"
#include "tauwright/model/forms.hpp"
#include "tauwright/run/run.hpp"

using namespace tauwright;
using oracle::absolute_error;

TEST_CASE("a process rests at its operating point", "[invariant]") {
    for (const auto& G : {first_order_plus_dead_time(2.0, 10.0, 3.4), integrating_plus_dead_time(0.05, 2.5, 4.0),
                          oscillatory_plus_dead_time(1.0, 5.0, 0.1, 0.0)}) {
        run::ProcessBlock block(discretize(G, 1.0), 37.5, 61.25);
        std::vector<double> line(run::delay_line_length(block.coefficients()));
        REQUIRE(block.start(line.data(), line.size()) == error_code::ok);
        CHECK(block.process_value() == 61.25);
        for (int k = 0; k < 100; ++k) CHECK(block.step(37.5, line.data()) == 61.25);
    }
}

TEST_CASE("D08: first order with whole scans of dead time", "[published]") {
    // y_{k+1} = a y_k + b u_{k-d}: a = 0.9048..., b = 0.1903..., d = 3 (recalled, recomputed).
    constexpr std::uint64_t seed = 21;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    run::ProcessBlock block(discretize(first_order_plus_dead_time(2.0, 10.0, 3.0), 1.0), 0.0, 0.0);
    std::vector<double> line(run::delay_line_length(block.coefficients())), u;
    block.start(line.data(), line.size());
    double y = 0.0;
    for (std::size_t k = 0; k < 200; ++k) {
        u.push_back(random.uniform(-1.0, 1.0));
        y = 0.9048374180359595 * y + 0.19032516392808096 * (k >= 3 ? u[k - 3] : 0.0);
        CHECK(absolute_error(block.step(u.back(), line.data()), y) <= 1e-13);
    }
}

TEST_CASE("D09: first order with a fraction of a scan of dead time", "[published]") {
    // y_{k+1} = a y_k + b0 u_{k-d} + b1 u_{k-d-1}, theta = 3.4 (recalled, recomputed).
    constexpr std::uint64_t seed = 22;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    run::ProcessBlock block(discretize(first_order_plus_dead_time(2.0, 10.0, 3.4), 1.0), 0.0, 0.0);
    std::vector<double> line(run::delay_line_length(block.coefficients())), u;
    block.start(line.data(), line.size());
    double y = 0.0;
    for (std::size_t k = 0; k < 200; ++k) {
        u.push_back(random.uniform(-1.0, 1.0));
        y = 0.9048374180359595 * y + 0.11647093283150256 * (k >= 3 ? u[k - 3] : 0.0) + 0.0738542310965784 * (k >= 4 ? u[k - 4] : 0.0);
        CHECK(absolute_error(block.step(u.back(), line.data()), y) <= 1e-13);
    }
}

TEST_CASE("the published second-order recursion at scan time 1", "[published]") {
    // Seborg et al., digital control chapters (from memory): exp(-s)/((5 s + 1)(3 s + 1)), b2 = 0.0234, exactly
    // 0.02341407269253144; y_k = -a1 y_{k-1} - a2 y_{k-2} + b1 u_{k-2} + b2 u_{k-3}, a1 = -(e^-1/5 + e^-1/3).
    run::ProcessBlock block(discretize(second_order_plus_dead_time(1.0, 5.0, 3.0, 1.0), 1.0), 0.0, 0.0);
    std::vector<double> line(run::delay_line_length(block.coefficients()));
    block.start(line.data(), line.size());
    double y[6] = {};
    for (int k = 1; k < 6; ++k) y[k] = block.step(k == 1 ? 1.0 : 0.0, line.data());  // y[k] at time k, pulse over 0..1
    const double p = std::exp(-1.0 / 5.0), q = std::exp(-1.0 / 3.0);
    CHECK(absolute_error(y[3] - (p + q) * y[2], 0.02341407269253144) <= 1e-14);
    CHECK(absolute_error(y[4] - (p + q) * y[3] + p * q * y[2], 0.0) <= 1e-14);
    CHECK(y[1] == 0.0);
}

TEST_CASE("superposition about an operating point", "[invariant]") {
    constexpr std::uint64_t seed = 23;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    const auto c = discretize(oscillatory_plus_dead_time(3.0, 4.0, 0.3, 2.7), 0.9);
    run::ProcessBlock shifted(c, 40.0, 55.0), plain(c, 0.0, 0.0), doubled(c, 0.0, 0.0);
    std::vector<double> a(run::delay_line_length(c)), b = a, d = a;
    shifted.start(a.data(), a.size());
    plain.start(b.data(), b.size());
    doubled.start(d.data(), d.size());
    for (int k = 0; k < 300; ++k) {
        const double u = random.uniform(-10.0, 10.0), y = plain.step(u, b.data());
        CHECK(absolute_error(shifted.step(40.0 + u, a.data()) - 55.0, y) <= 1e-12);
        CHECK(absolute_error(doubled.step(2.0 * u, d.data()), 2.0 * y) <= 1e-12);
    }
}

TEST_CASE("an output that is not finite counts as the one before", "[closed form]") {
    run::ProcessBlock block(discretize(first_order_plus_dead_time(2.0, 10.0, 3.4), 1.0), 50.0, 20.0), same = block;
    std::vector<double> line(run::delay_line_length(block.coefficients())), other = line;
    block.start(line.data(), line.size());
    same.start(other.data(), other.size());
    double held = 50.0;
    for (int k = 0; k < 60; ++k) {
        const bool bad = k % 7 == 3 || k == 0;
        if (!bad) held = 50.0 + k % 5;
        const double y = block.step(bad ? (k % 2 == 0 ? std::nan("") : std::numeric_limits<double>::infinity()) : held, line.data());
        CHECK(y == same.step(held, other.data()));
    }
}

TEST_CASE("the delay line's memory is checked", "[regression]") {
    run::ProcessBlock block(discretize(first_order_plus_dead_time(2.0, 10.0, 3.4), 1.0), 0.0, 0.0);
    const std::size_t needed = run::delay_line_length(block.coefficients());
    CHECK(needed >= 5);
    std::vector<double> line(needed);
    CHECK(block.start(nullptr, needed) == error_code::null_pointer);
    CHECK(block.start(line.data(), needed - 1) == error_code::buffer_too_small);
    CHECK(block.start(line.data(), needed) == error_code::ok);
    // A longer line than needed must not change the answer.
    std::vector<double> roomy(needed + 7);
    run::ProcessBlock other = block;
    CHECK(other.start(roomy.data(), roomy.size()) == error_code::ok);
    for (int k = 0; k < 40; ++k) CHECK(block.step(k % 3, line.data()) == other.step(k % 3, roomy.data()));
}

TEST_CASE("a process at rest again holds no subnormal numbers", "[invariant]") {
    run::ProcessBlock block(discretize(second_order_plus_dead_time(1.0, 2.0, 1.0, 0.5), 1.0), 0.0, 0.0);
    std::vector<double> line(run::delay_line_length(block.coefficients()));
    block.start(line.data(), line.size());
    block.step(1.0, line.data());
    double y = 1.0;
    for (int k = 0; k < 3000; ++k) {
        y = block.step(0.0, line.data());
        if (y != 0.0 && std::abs(y) < 2.3e-308) FAIL_CHECK("subnormal " << text_of(y) << " at " << k);
    }
    CHECK(y == 0.0);
}
