#include <limits>

#include "core/exponential_data.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/core/exponential.hpp"

using namespace tauwright;
using oracle::relative_error;

TEST_CASE("phi_1 and phi_2 hold their stated accuracy", "[independent computation]") {
    // mpmath, 60 digits, see make_exponential_data.py.
    for (const auto& row : oracle::phi_rows) {
        INFO("x = " << text_of(row.x));
        CHECK(relative_error(phi_1(row.x), row.phi_1) <= 4e-16);
        CHECK(relative_error(phi_2(row.x), row.phi_2) <= 1e-15);
    }
}

TEST_CASE("phi functions have their limits at 0", "[closed form]") {
    CHECK(phi_1(0.0) == 1.0);
    CHECK(phi_1(-0.0) == 1.0);
    CHECK(phi_2(0.0) == 0.5);
}

TEST_CASE("phi_1 and phi_2 satisfy phi_1 = 1 + x phi_2", "[invariant]") {
    constexpr std::uint64_t seed = 41;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 2000; ++i) {
        const double x = (random.chance(0.5) ? 1.0 : -1.0) * random.scaled(1e-12, 20.0);
        INFO("x = " << text_of(x));
        CHECK(std::abs(phi_1(x) - (1.0 + x * phi_2(x))) <= 2e-15 * (1.0 + std::abs(x * phi_2(x))));
    }
}

TEST_CASE("exponential_minus_one holds its stated accuracy", "[independent computation]") {
    // mpmath, 60 digits, see make_exponential_data.py.
    for (const auto& row : oracle::exponential_rows) {
        const std::complex<double> z{row.re, row.im}, expected{row.value_re, row.value_im};
        INFO("z = " << text_of(row.re) << " + " << text_of(row.im) << " j");
        CHECK(relative_error(exponential_minus_one(z), expected) <= 1e-15);
    }
}
