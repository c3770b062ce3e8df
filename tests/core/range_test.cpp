#include <limits>

#include "core/oracle_tools.hpp"
#include "tauwright/core/range.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

TEST_CASE("percent of span of a 4-20 mA transmitter", "[published]") {
    // Trade fact A11 (recalled from memory, recomputed): 0-200 degC at 16 mA is 75 % and 150 degC.
    const Range current{.low = 4.0, .high = 20.0, .unit = "mA"};
    const Range temperature{.low = 0.0, .high = 200.0, .unit = "degC"};
    CHECK(relative_error(current.to_percent(16.0), 75.0) <= 1e-12);
    CHECK(relative_error(temperature.from_percent(current.to_percent(16.0)), 150.0) <= 1e-12);
    // Trade fact H05 (common practice, no source): the usable range 3.8-20.5 mA in percent.
    CHECK(relative_error(current.to_percent(3.8), -1.25) <= 1e-12);
    CHECK(relative_error(current.to_percent(20.5), 103.125) <= 1e-12);
}

TEST_CASE("a range converts both ways", "[invariant]") {
    constexpr std::uint64_t seed = 11;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 1000; ++i) {
        const double low = random.uniform(-1000.0, 1000.0);
        const Range range{.low = low, .high = low + random.scaled(1e-3, 1e4), .unit = "x"};
        const double percent = random.uniform(-10.0, 110.0);
        INFO(range.low << " to " << range.high << " at " << percent);
        CHECK(std::abs(range.to_percent(range.from_percent(percent)) - percent) <= 1e-13 * (1e3 / range.span() + 1.0) * 1e2);
    }
}

TEST_CASE("a range that cannot be used is refused by name, value and remedy", "[regression]") {
    check_refused(error_code::out_of_domain, {"output_range.high", "0", "above the low end 100"},
                  [] { check(Range{.low = 100.0, .high = 0.0}, "output_range"); });
    check_refused(error_code::out_of_domain, {"pv.high", "5", "above the low end 5"},
                  [] { check(Range{.low = 5.0, .high = 5.0}, "pv"); });
    check_refused(error_code::not_finite, {"pv.low", "nan", "finite"},
                  [] { check(Range{.low = std::numeric_limits<double>::quiet_NaN(), .high = 5.0}, "pv"); });
    check_refused(error_code::not_finite, {"pv.high", "inf", "finite"},
                  [] { check(Range{.low = 0.0, .high = std::numeric_limits<double>::infinity()}, "pv"); });
    CHECK_NOTHROW(check(Range{}, "pv"));
    CHECK_NOTHROW(check(Range{.low = -50.0, .high = -10.0, .unit = "degC"}, "pv"));
}
