#include <bit>
#include <cstdint>

#include "core/fast_math_host.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/core/finite.hpp"
#include "tauwright/run/pid_block.hpp"

using namespace tauwright;

namespace {

struct Pattern {
    std::uint64_t bits;
    bool finite, nan;
};

// IEEE 754-2019, 3.4: exponent all ones is infinity with a zero fraction, NaN otherwise.
constexpr Pattern patterns[] = {
    {0x0000000000000000u, true, false},   // +0
    {0x8000000000000000u, true, false},   // -0
    {0x0000000000000001u, true, false},   // smallest subnormal
    {0x800fffffffffffffu, true, false},   // largest subnormal, negative
    {0x0010000000000000u, true, false},   // smallest normal
    {0x7fefffffffffffffu, true, false},   // largest
    {0xffefffffffffffffu, true, false},   // lowest
    {0x7ff0000000000000u, false, false},  // +infinity
    {0xfff0000000000000u, false, false},  // -infinity
    {0x7ff0000000000001u, false, true},   // signaling NaN, smallest payload
    {0x7ff8000000000000u, false, true},   // quiet NaN
    {0xfff8000000000000u, false, true},   // quiet NaN, negative
    {0x7fffffffffffffffu, false, true},   // all ones
    {0xffffffffffffffffu, false, true},
};

}  // namespace

TEST_CASE("is_finite and is_nan read the bits", "[published]") {
    for (const auto& p : patterns) {
        INFO("bits " << std::hex << p.bits);
        const double x = std::bit_cast<double>(p.bits);
        CHECK(is_finite(x) == p.finite);
        CHECK(is_nan(x) == p.nan);
    }
    STATIC_REQUIRE(is_finite(1.0));
    STATIC_REQUIRE(is_nan(std::bit_cast<double>(std::uint64_t{0x7ff8000000000000u})));
}

TEST_CASE("the finite checks are right in a host compiled with -ffast-math", "[published]") {
    REQUIRE(oracle::fast_math_host_is_fast());
    for (const auto& p : patterns) {
        INFO("bits " << std::hex << p.bits);
        const double x = std::bit_cast<double>(p.bits);
        CHECK(oracle::fast_math_host_finite(x) == p.finite);
        CHECK(oracle::fast_math_host_nan(x) == p.nan);
    }
}

TEST_CASE("gives_same_bits tells a -ffast-math host from this one", "[regression]") {
    CHECK(run::gives_same_bits());
    CHECK_FALSE(oracle::fast_math_host_same_bits());
}
