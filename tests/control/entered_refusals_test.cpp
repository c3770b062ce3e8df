#include <limits>

#include "core/oracle_tools.hpp"
#include "tauwright/control/control.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

}  // namespace

TEST_CASE("a series form exists on one side of its boundary and not on the other", "[closed form]") {
    // (Ti - Tf)^2 = 4 Ti Td: for Ti = 9, Tf = 1 the boundary is Td = 64/36.
    for (double sign : {1.0, -1.0}) {
        const double Td = 64.0 / 36.0;
        CHECK_NOTHROW(series_from({.gain = sign, .integral_time = 9.0, .derivative_time = Td * (1.0 - 1e-9), .filter_time = 1.0}));
        check_refused(error_code::no_equivalent, {"integral_time 9 s", "filter_time 1 s"}, [&] {
            series_from({.gain = sign, .integral_time = 9.0, .derivative_time = Td * (1.0 + 1e-9), .filter_time = 1.0});
        });
    }
    // Unfiltered: Ti = 4 Td.
    CHECK_NOTHROW(series_from({.gain = 1.0, .integral_time = 8.0, .derivative_time = 2.0}));
    check_refused(error_code::no_equivalent, {"8 s"}, [] { series_from({.gain = 1.0, .integral_time = 8.0, .derivative_time = 2.0000001}); });
    // The square is large enough, but the filter outlasts the integral time: no series form either.
    check_refused(error_code::no_equivalent, {"integral > filter"},
                  [] { series_from({.gain = 1.0, .integral_time = 1.0, .derivative_time = 0.1, .filter_time = 10.0}); });
}

TEST_CASE("near the boundary the series form still computes the same response", "[invariant]") {
    constexpr std::uint64_t seed = 99;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 300; ++i) {
        const double Ti = random.scaled(1.0, 100.0), Tf = Ti * random.uniform(0.0, 0.5);
        const double Td = (Ti - Tf) * (Ti - Tf) / (4.0 * Ti) * (1.0 - random.scaled(1e-15, 1e-1));
        const PidSettings s{.gain = 2.0, .integral_time = Ti, .derivative_time = Td, .filter_time = Tf};
        const auto own = series_from(s);
        const std::complex<double> w{0.0, random.scaled(0.01, 10.0)};
        const auto value = own.gain * (1.0 + 1.0 / (*own.integral_time * w)) * (own.derivative_time * w + 1.0) / (own.filter_time * w + 1.0);
        INFO("Ti " << text_of(Ti) << " Td " << text_of(Td) << " Tf " << text_of(Tf));
        CHECK(relative_error(value, s(w)) <= 1e-13);
        CHECK(own.derivative_time <= *own.integral_time);
    }
}

TEST_CASE("a series form whose filter outweighs its lead is no PID", "[closed form]") {
    // Ti = Ti' + Td' - Tf and Td = Ti' Td'/Ti - Tf: with Tf = 3, Td' = 2.5, Ti' = 10 Td is 25/9.5 - 3 < 0.
    check_refused(error_code::no_equivalent, {"2.5 s", "3 s", "filter"},
                  [] { ideal_from(SeriesSettings{.gain = 1.0, .integral_time = 10.0, .derivative_time = 2.5, .filter_time = 3.0}); });
    CHECK_NOTHROW(ideal_from(SeriesSettings{.gain = 1.0, .integral_time = 10.0, .derivative_time = 2.5, .filter_time = 2.0}));
    check_refused(error_code::no_equivalent, {"filter"}, [] { ideal_from(SeriesSettings{.gain = 1.0, .derivative_time = 1.0, .filter_time = 2.0}); });
}

TEST_CASE("numbers are rounded as the display rounds", "[closed form]") {
    const ControllerForm form{.gain_resolution = 0.01, .integral_resolution = 1.0, .derivative_resolution = 0.5, .filter_resolution = 0.1};
    const auto e = entered_as({.gain = 1.23456, .integral_time = 12.6, .derivative_time = 2.3, .filter_time = 0.26}, form);
    CHECK(e.gain.value() == 1.23);
    CHECK(e.integral_time.value() == 13.0);
    CHECK(e.derivative_time.value() == 2.5);
    CHECK(e.filter_time.value() == 0.3);
    CHECK(entered_as({.gain = 0.3 + 1e-12}, form).gain.value() == 0.3);
    CHECK(entered_as({.gain = -0.299999}, form).gain.value() == 0.3);
    ControllerForm coarse{.gain_as = GainAs::proportional_band, .gain_resolution = 5.0};
    CHECK(entered_as({.gain = 100.0 / 38.0}, coarse).proportional_band.value() == 40.0);
    ControllerForm minutes{.integral_unit = TimeUnit::minutes, .integral_resolution = 0.1};
    CHECK(entered_as({.gain = 1.0, .integral_time = 100.0}, minutes).integral_time.value() == 1.7);
}

TEST_CASE("rounding moves a number by at most half a step", "[invariant]") {
    constexpr std::uint64_t seed = 17;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 1000; ++i) {
        const double step = random.chance(0.5) ? std::pow(10.0, -random.below(5)) : random.scaled(1e-4, 5.0);
        const double gain = step * random.scaled(0.6, 1e5);
        INFO("gain " << text_of(gain) << " step " << text_of(step));
        const double entered = entered_as({.gain = gain}, {.gain_resolution = step}).gain.value();
        CHECK(std::abs(entered - gain) <= 0.5 * step * (1.0 + 1e-9));
        CHECK(std::abs(std::remainder(entered, step)) <= 1e-9 * step);
    }
}

TEST_CASE("rounding that would lose an action is refused", "[closed form]") {
    check_refused(error_code::action_would_be_lost, {"gain", "0.004", "0.01"}, [] { entered_as({.gain = 0.004}, {.gain_resolution = 0.01}); });
    check_refused(error_code::action_would_be_lost, {"derivative", "0.04", "0.1"}, [] {
        entered_as({.gain = 1.0, .derivative_time = 0.04}, {.derivative_resolution = 0.1});
    });
    check_refused(error_code::action_would_be_lost, {"integral", "0.02"}, [] {
        entered_as({.gain = 1.0, .integral_time = 3000.0}, {.integral_as = IntegralAs::repeats, .integral_unit = TimeUnit::minutes, .integral_resolution = 0.1});
    });
    CHECK(entered_as({.gain = 0.006}, {.gain_resolution = 0.01}).gain.value() == 0.01);
    // A number that means "off" in this controller.
    check_refused(error_code::action_would_be_lost, {"integral", "9999", "switches integral action off"},
                  [] { entered_as({.gain = 1.0, .integral_time = 9999.0}, {.integral_off = 9999.0}); });
    check_refused(error_code::action_would_be_lost, {"integral"},
                  [] { entered_as({.gain = 1.0, .integral_time = 9998.7}, {.integral_off = 9999.0, .integral_resolution = 1.0}); });
}

TEST_CASE("field limits are kept", "[closed form]") {
    ControllerForm form{.gain_limits = {.low = 0.1, .high = 50.0}, .integral_limits = {.high = 60.0}, .derivative_limits = {.low = 1.0}};
    CHECK_NOTHROW(entered_as({.gain = 50.0, .integral_time = 60.0, .derivative_time = 1.0}, form));
    check_refused(error_code::outside_field_limits, {"gain", "50.1", "0.1 to 50"}, [&] { entered_as({.gain = 50.1}, form); });
    check_refused(error_code::outside_field_limits, {"gain", "0.09"}, [&] { entered_as({.gain = -0.09}, form); });
    check_refused(error_code::outside_field_limits, {"integral", "61", "60"}, [&] { entered_as({.gain = 1.0, .integral_time = 61.0}, form); });
    check_refused(error_code::outside_field_limits, {"derivative", "0.5"},
                  [&] { entered_as({.gain = 1.0, .integral_time = 10.0, .derivative_time = 0.5}, form); });
    CHECK_NOTHROW(entered_as({.gain = 1.0}, form));  // derivative off is 0, below the limit on purpose
    form.gain_resolution = 1.0;  // it is the rounded number that has to fit
    CHECK(entered_as({.gain = 50.4}, form).gain.value() == 50.0);
}

TEST_CASE("integral off is written the way the controller wants it", "[closed form]") {
    for (auto as : {IntegralAs::time, IntegralAs::repeats, IntegralAs::gain}) {
        ControllerForm form{.equation = Equation::parallel, .integral_as = as, .integral_off = as == IntegralAs::time ? 9999.0 : 0.0};
        const auto e = entered_as({.gain = 2.0, .derivative_time = 1.0}, form);
        const double number = as == IntegralAs::time ? e.integral_time.value() : as == IntegralAs::repeats ? e.repeats.value() : e.integral_gain.value();
        CHECK(number == form.integral_off);
        const auto back = settings_from(e, form);
        CHECK_FALSE(back.integral_time.has_value());
        CHECK(back.derivative_time == 1.0);
    }
}

TEST_CASE("a built-in filter has to be the one of the settings", "[closed form]") {
    const ControllerForm eighth{.filter_as = FilterAs::ratio, .fixed_filter = 8.0};
    const auto e = entered_as({.gain = 1.0, .integral_time = 20.0, .derivative_time = 4.0, .filter_time = 0.5}, eighth);
    CHECK_FALSE(e.filter_ratio.has_value());
    CHECK(settings_from(e, eighth).filter_time == 0.5);
    check_refused(error_code::no_equivalent, {"filter", "4", "fixed at 8"}, [&] {
        entered_as({.gain = 1.0, .integral_time = 20.0, .derivative_time = 4.0, .filter_time = 1.0}, eighth);
    });
    check_refused(error_code::no_equivalent, {"filter_time is 0"}, [&] {
        entered_as({.gain = 1.0, .integral_time = 20.0, .derivative_time = 4.0}, {.filter_as = FilterAs::ratio});
    });
    CHECK_NOTHROW(entered_as({.gain = 1.0, .integral_time = 20.0}, eighth));
}

TEST_CASE("forms that contradict themselves and numbers that do not belong are refused", "[regression]") {
    const PidSettings s{.gain = 1.0, .integral_time = 10.0};
    check_refused(error_code::missing_range, {"engineering", "process_value_range"}, [&] { entered_as(s, {.gain_unit = GainUnit::engineering}); });
    check_refused(error_code::conflicting_arguments, {"proportional_band"}, [&] {
        entered_as(s, {.gain_as = GainAs::proportional_band, .gain_unit = GainUnit::engineering, .process_value_range = Range{}, .output_range = Range{}});
    });
    check_refused(error_code::out_of_domain, {"form.process_value_range.high"}, [&] { entered_as(s, {.process_value_range = Range{5.0, 1.0, ""}}); });
    check_refused(error_code::out_of_domain, {"form.gain_resolution", "-1"}, [&] { entered_as(s, {.gain_resolution = -1.0}); });
    check_refused(error_code::out_of_domain, {"form.integral_limits.high", "1"}, [&] { entered_as(s, {.integral_limits = {.low = 2.0, .high = 1.0}}); });
    check_refused(error_code::out_of_domain, {"form.integral_off", "-1"}, [&] { entered_as(s, {.integral_off = -1.0}); });
    check_refused(error_code::no_equivalent, {"gain", "-1", "sign"}, [&] {
        entered_as({.gain = -1.0}, {.gain_as = GainAs::proportional_band, .action_as = ActionAs::sign});
    });
    check_refused(error_code::missing_argument, {"entered.gain"}, [] { settings_from({.integral_time = 10.0}, {}); });
    check_refused(error_code::missing_argument, {"entered.integral_time"}, [] { settings_from({.gain = 1.0}, {}); });
    check_refused(error_code::conflicting_arguments, {"entered.repeats"}, [] { settings_from({.gain = 1.0, .integral_time = 1.0, .repeats = 1.0}, {}); });
    check_refused(error_code::conflicting_arguments, {"entered.proportional_band"},
                  [] { settings_from({.gain = 1.0, .proportional_band = 50.0, .integral_time = 1.0}, {}); });
    check_refused(error_code::out_of_domain, {"entered.integral_time", "-5"}, [] { settings_from({.gain = 1.0, .integral_time = -5.0}, {}); });
    check_refused(error_code::out_of_domain, {"entered.gain", "-1"}, [] { settings_from({.gain = -1.0, .integral_time = 5.0}, {}); });
    check_refused(error_code::not_finite, {"entered.gain", "nan"}, [] { settings_from({.gain = std::nan(""), .integral_time = 5.0}, {}); });
    check_refused(error_code::not_finite, {"entered.integral_time", "inf"}, [] { settings_from({.gain = 1.0, .integral_time = infinity}, {}); });
    check_refused(error_code::out_of_domain, {"proportional_band", "0"},
                  [] { settings_from({.proportional_band = 0.0, .integral_time = 5.0}, {.gain_as = GainAs::proportional_band}); });
    check_refused(error_code::out_of_domain, {"derivative", "-1"}, [] { settings_from({.gain = 1.0, .integral_time = 5.0, .derivative_time = -1.0}, {}); });
    check_refused(error_code::out_of_domain, {"gain"}, [] { settings_from({.gain = 0.0, .integral_time = 5.0}, {}); });
}
