// Manual and automatic, bad input, tiny numbers, copying.
#include <bit>
#include <cstring>
#include <limits>
#include <type_traits>

#include "core/oracle_tools.hpp"
#include "tauwright/discretize/discretize.hpp"
#include "tauwright/run/run.hpp"

using namespace tauwright;
using oracle::absolute_error;

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double not_a_number = std::numeric_limits<double>::quiet_NaN();
const PidSettings pid{.gain = 2.0, .integral_time = 10.0, .derivative_time = 2.0, .filter_time = 0.5, .measurement_filter_time = 1.0, .setpoint_weight = 0.7};

run::PidBlock running_block() {
    run::PidBlock block(discretize(pid, 1.0), 0.0, 100.0, 40.0);
    for (double y : {48.0, 48.5, 49.2, 49.8}) block.step(50.0, y);
    return block;
}

}  // namespace

TEST_CASE("to manual and back without a bump", "[invariant]") {
    run::PidBlock block = running_block();
    const double before = block.output();
    block.to_manual();
    CHECK(block.mode() == run::Mode::manual);
    CHECK(block.step(50.0, 50.3) == before);
    CHECK(block.flags() == run::flag_manual);
    CHECK(block.set_manual_output(63.0) == error_code::ok);
    CHECK(block.step(55.0, 47.0) == 63.0);
    CHECK(block.step(45.0, 52.0) == 63.0);
    block.to_automatic();
    CHECK(block.mode() == run::Mode::automatic);
    CHECK(block.step(45.0, 52.5) == 63.0);  // the first automatic scan returns the manual output
    CHECK(block.flags() == 0u);
    // At the set point and with everything settled it stays there.
    run::PidBlock quiet(discretize(pid, 1.0), 0.0, 100.0, 40.0);
    quiet.to_manual();
    for (int k = 0; k < 200; ++k) quiet.step(50.0, 50.0);
    quiet.to_automatic();
    for (int k = 0; k < 20; ++k) CHECK(absolute_error(quiet.step(50.0, 50.0), 40.0) <= 1e-12);
}

TEST_CASE("no bump over random switching", "[invariant]") {
    constexpr std::uint64_t seed = 31;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    run::PidBlock block(discretize(pid, 1.0), 0.0, 100.0, 40.0);
    double last = block.step(50.0, 50.0);
    bool automatic = true;
    for (int k = 0; k < 20000; ++k) {
        bool switched = false;
        if (random.chance(0.1)) {
            automatic ? block.to_manual() : block.to_automatic();
            automatic = !automatic;
            switched = true;
        } else if (!automatic && random.chance(0.2)) {
            last = random.uniform(0.0, 100.0);
            CHECK(block.set_manual_output(last) == error_code::ok);
        }
        const double u = block.step(random.uniform(30.0, 70.0), random.uniform(30.0, 70.0));
        if (switched || !automatic) {
            if (u != last) FAIL_CHECK("bump at " << k << ": " << u << " after " << last);
        }
        last = u;
    }
}

TEST_CASE("a manual output is limited, and one that is not finite is refused", "[closed form]") {
    run::PidBlock block = running_block();
    block.to_manual();
    CHECK(block.set_manual_output(130.0) == error_code::ok);
    CHECK(block.step(50.0, 50.0) == 100.0);
    CHECK(block.flags() == (run::flag_manual | run::flag_limited_high));
    CHECK(block.set_manual_output(-5.0) == error_code::ok);
    CHECK(block.step(50.0, 50.0) == 0.0);
    CHECK(block.flags() == (run::flag_manual | run::flag_limited_low));
    for (double bad : {not_a_number, infinity, -infinity}) {
        CHECK(block.set_manual_output(bad) == error_code::not_finite);
        CHECK(block.step(50.0, 50.0) == 0.0);
    }
    run::PidBlock preset(discretize(pid, 1.0), 0.0, 100.0, 250.0);
    CHECK(preset.step(50.0, 50.0) == 100.0);
}

TEST_CASE("bad input holds the output and says so; good input takes over from there", "[invariant]") {
    for (double bad : {not_a_number, -not_a_number, infinity, -infinity}) {
        for (bool in_setpoint : {false, true}) {
            run::PidBlock block = running_block();
            const double before = block.output();
            for (int k = 0; k < 1000; ++k) {
                CHECK(block.step(in_setpoint ? bad : 50.0, in_setpoint ? 50.0 : bad) == before);
                CHECK((block.flags() & run::flag_bad_input) != 0u);
            }
            CHECK(block.step(50.0, 20.0) == before);  // far away, and still no bump
            CHECK((block.flags() & run::flag_bad_input) == 0u);
            // From here on it is a block that was preset to that output at these values.
            run::PidBlock fresh(discretize(pid, 1.0), 0.0, 100.0, before);
            fresh.step(50.0, 20.0);
            for (double y : {21.0, 25.0, 33.0, 48.0}) CHECK(absolute_error(block.step(50.0, y), fresh.step(50.0, y)) <= 1e-12);
        }
    }
    run::PidBlock never_good(discretize(pid, 1.0), 5.0, 100.0);
    CHECK(never_good.step(not_a_number, not_a_number) == 5.0);
    CHECK(never_good.step(50.0, 48.0) == 5.0);
    CHECK(never_good.flags() == run::flag_limited_low);
    run::PidBlock preset(discretize(pid, 1.0), 0.0, 100.0, 33.0);
    CHECK(preset.step(50.0, infinity) == 33.0);
    CHECK(preset.step(50.0, 48.0) == 33.0);
}

TEST_CASE("bad input in manual still follows the manual output", "[closed form]") {
    run::PidBlock block = running_block();
    block.to_manual();
    CHECK(block.set_manual_output(12.0) == error_code::ok);
    CHECK(block.step(50.0, not_a_number) == 12.0);
    CHECK((block.flags() & run::flag_bad_input) != 0u);
    block.to_automatic();
    CHECK(block.step(50.0, not_a_number) == 12.0);
    CHECK(block.step(50.0, 47.0) == 12.0);
    CHECK(block.flags() == 0u);
}

TEST_CASE("whatever the input, outputs are finite, within limits, and never subnormal", "[invariant]") {
    constexpr std::uint64_t seed = 77;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int scenario = 0; scenario < 50; ++scenario) {
        run::PidBlock block(discretize(pid, random.scaled(1e-3, 1e3)), 0.0, 100.0, 40.0);
        for (int k = 0; k < 500; ++k) {
            const double u = block.step(std::bit_cast<double>(random.bits()), std::bit_cast<double>(random.bits()));
            if (!is_finite(u) || u < 0.0 || u > 100.0) FAIL_CHECK("output " << u << " in scenario " << scenario);
            if (u != 0.0 && std::abs(u) < 2.3e-308) FAIL_CHECK("subnormal output " << text_of(u));
        }
    }
}

TEST_CASE("after enormous numbers the block finds back to plain ones", "[invariant]") {
    for (double huge : {1.7e308, -1.7e308, 1e200, 1e30}) {
        run::PidBlock block = running_block();
        for (int k = 0; k < 5; ++k) block.step(50.0, huge);
        double u = 0.0;
        for (int k = 0; k < 3000; ++k) u = block.step(50.0, 49.0 + 0.01 * (k % 3));
        INFO("after " << huge);
        CHECK(is_finite(block.integral()));
        CHECK(u == 100.0);  // below the set point for long: at the high limit
    }
}

TEST_CASE("inputs that decay to nothing leave no subnormal state", "[invariant]") {
    run::PidBlock block(discretize(pid, 1.0), -100.0, 100.0, 0.0);
    double y = 1.0;
    for (int k = 0; k < 6000; ++k) {
        const double u = block.step(0.0, y);
        y *= 0.8;
        for (double x : {u, block.integral()})
            if (x != 0.0 && std::abs(x) < 2.3e-308) FAIL_CHECK("subnormal " << text_of(x) << " at " << k);
    }
    for (double tiny : {5e-324, 1e-310, -1e-310}) CHECK(std::abs(block.step(tiny, -tiny)) < 1.0);
}

TEST_CASE("a copied block goes on with the same bits", "[invariant]") {
    STATIC_REQUIRE(std::is_trivially_copyable_v<run::PidBlock>);
    STATIC_REQUIRE(std::is_trivially_copyable_v<run::ProcessBlock>);
    STATIC_REQUIRE(noexcept(std::declval<run::PidBlock&>().step(0.0, 0.0)));
    constexpr std::uint64_t seed = 8;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    run::PidBlock block = running_block();
    for (int k = 0; k < 50; ++k) block.step(50.0, random.uniform(40.0, 60.0));
    unsigned char memory[sizeof(run::PidBlock)];
    std::memcpy(memory, &block, sizeof block);
    run::PidBlock copy;
    std::memcpy(static_cast<void*>(&copy), memory, sizeof copy);
    for (int k = 0; k < 200; ++k) {
        const double r = random.uniform(40.0, 60.0), y = random.chance(0.05) ? not_a_number : random.uniform(40.0, 60.0);
        CHECK(std::bit_cast<std::uint64_t>(block.step(r, y)) == std::bit_cast<std::uint64_t>(copy.step(r, y)));
        CHECK(block.flags() == copy.flags());
    }
}
