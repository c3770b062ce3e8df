// Figures of trends made by hand.
#include "core/oracle_tools.hpp"
#include "tauwright/assess/simulate.hpp"

using namespace tauwright;
using oracle::relative_error;

namespace {

// One sample a second about 50 %; the set point steps by `step` at time 0.
Trend trend_of(double step, std::vector<double> values, std::vector<double> outputs = {}) {
    Trend t;
    t.duty = {.setpoint_step = step, .scan_time = 1.0};
    outputs.resize(values.size(), outputs.empty() ? 50.0 : outputs.back());
    for (std::size_t k = 0; k < values.size(); ++k) {
        t.time_s.push_back(static_cast<double>(k));
        t.setpoint.push_back(50.0 + step);
    }
    t.process_value = std::move(values);
    t.output = std::move(outputs);
    return t;
}

}  // namespace

TEST_CASE("overshoot, settling and error of an upward step", "[closed form]") {
    // Step 10 to 60: band 59.8 to 60.2. Highest 61.5, so 15 %. Inside from t = 5 on.
    const Figures f = figures(trend_of(10.0, {50.0, 54.0, 58.0, 61.5, 60.3, 60.1, 59.9, 60.0, 60.0}));
    CHECK(relative_error(f.overshoot_percent.value(), 15.0) <= 1e-12);
    CHECK(f.settling_time.value() == 5.0);
    CHECK(relative_error(f.integrated_absolute_error, 5.0 + 6.0 + 2.0 + 1.5 + 0.3 + 0.1 + 0.1) <= 1e-12);
    CHECK_FALSE(f.peak_load_error.has_value());
    CHECK(f.valve_travel == 0.0);
}

TEST_CASE("a downward step overshoots downward", "[closed form]") {
    const Figures f = figures(trend_of(-10.0, {50.0, 45.0, 39.0, 39.9, 40.0}));
    CHECK(relative_error(f.overshoot_percent.value(), 10.0) <= 1e-12);
    CHECK(f.settling_time.value() == 3.0);
    // Going the wrong way first is no overshoot.
    const Figures wrong_way = figures(trend_of(-10.0, {50.0, 53.0, 45.0, 40.0, 40.0}));
    CHECK(wrong_way.overshoot_percent.value() == 0.0);
    CHECK(wrong_way.settling_time.value() == 3.0);
}

TEST_CASE("what does not settle has no settling time", "[closed form]") {
    CHECK_FALSE(figures(trend_of(10.0, {50.0, 60.0, 60.0, 60.0, 60.5})).settling_time.has_value());
    CHECK_FALSE(figures(trend_of(10.0, {50.0, 51.0, 52.0, 53.0})).settling_time.has_value());
    CHECK(figures(trend_of(10.0, {50.0, 51.0, 52.0, 53.0})).overshoot_percent.value() == 0.0);
}

TEST_CASE("the edge of the band belongs to it", "[closed form]") {
    // 2 % of a step of 50 is exactly 1.
    CHECK(figures(trend_of(50.0, {50.0, 98.0, 101.0, 99.0, 100.0})).settling_time.value() == 2.0);
}

TEST_CASE("valve travel counts from the rest output", "[closed form]") {
    const Figures f = figures(trend_of(10.0, {50.0, 52.0, 55.0, 60.0}, {62.0, 58.0, 59.0, 55.0}));
    CHECK(relative_error(f.valve_travel, 12.0 + 4.0 + 1.0 + 4.0) <= 1e-12);
}

TEST_CASE("a later load step is told apart from the set-point step", "[closed form]") {
    Trend t = trend_of(10.0, {50.0, 58.0, 60.5, 60.0, 60.0, 66.0, 63.0, 60.0});
    t.duty.load_step = 5.0;
    t.duty.load_time = 4.0;
    const Figures f = figures(t);
    CHECK(relative_error(f.overshoot_percent.value(), 5.0) <= 1e-12);
    CHECK(f.settling_time.value() == 3.0);
    CHECK(relative_error(f.peak_load_error.value(), 6.0) <= 1e-12);
    CHECK(relative_error(f.integrated_absolute_error, 5.0 + 2.0 + 0.5 + 6.0 + 3.0) <= 1e-12);
}

TEST_CASE("a load step alone has a peak and neither overshoot nor settling", "[closed form]") {
    Trend t = trend_of(0.0, {50.0, 51.0, 53.0, 52.0, 49.5, 50.0});
    t.duty.load_step = -5.0;
    const Figures f = figures(t);
    CHECK(relative_error(f.peak_load_error.value(), 3.0) <= 1e-12);
    CHECK_FALSE(f.overshoot_percent.has_value());
    CHECK_FALSE(f.settling_time.has_value());
}
