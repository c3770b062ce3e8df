// Trade facts A01-A10, A13, A17; each "recalled from memory; recomputed" unless said otherwise.
#include "core/oracle_tools.hpp"
#include "tauwright/control/control.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

namespace {

const ControllerForm ideal_form{}, series_form{.equation = Equation::series}, parallel_form{.equation = Equation::parallel, .integral_as = IntegralAs::gain};

}  // namespace

TEST_CASE("A01: series to ideal", "[published]") {
    const auto s = ideal_from(SeriesSettings{.gain = 2.0, .integral_time = 10.0, .derivative_time = 2.5});
    CHECK(relative_error(s.gain, 2.5) <= 1e-12);
    CHECK(relative_error(s.integral_time.value(), 12.5) <= 1e-12);
    CHECK(relative_error(s.derivative_time, 2.0) <= 1e-12);
    CHECK(settings_from({.gain = 2.0, .integral_time = 10.0, .derivative_time = 2.5}, series_form) == s);
}

TEST_CASE("A02: ideal to series", "[published]") {
    const auto e = entered_as({.gain = 2.5, .integral_time = 12.5, .derivative_time = 2.0}, series_form);
    CHECK(relative_error(e.gain.value(), 2.0) <= 1e-12);
    CHECK(relative_error(e.integral_time.value(), 10.0) <= 1e-12);
    CHECK(relative_error(e.derivative_time.value(), 2.5) <= 1e-12);
}

TEST_CASE("A03: the boundary, integral time four times the derivative time", "[published]") {
    const auto e = entered_as({.gain = 3.0, .integral_time = 8.0, .derivative_time = 2.0}, series_form);
    CHECK(std::abs(e.gain.value() - 1.5) <= 1e-9);
    CHECK(std::abs(e.integral_time.value() - 4.0) <= 1e-9);
    CHECK(std::abs(e.derivative_time.value() - 4.0) <= 1e-9);
}

TEST_CASE("A04: no real series equivalent is refused with the reason", "[published]") {
    // 1 - 4 Td / Ti = -1/3 for Ti = 6, Td = 2.
    check_refused(error_code::no_equivalent, {"6 s", "2 s", "ideal or parallel"},
                  [] { entered_as({.gain = 1.0, .integral_time = 6.0, .derivative_time = 2.0}, series_form); });
}

TEST_CASE("A05: series with a filtered derivative to ideal", "[published]") {
    // Derived, recomputed.
    const auto s = ideal_from(SeriesSettings{.gain = 2.0, .integral_time = 10.0, .derivative_time = 2.5, .filter_time = 0.25});
    CHECK(relative_error(s.gain, 2.45) <= 1e-12);
    CHECK(relative_error(s.integral_time.value(), 12.25) <= 1e-12);
    CHECK(relative_error(s.derivative_time, 1.7908163265306123) <= 1e-12);
    CHECK(s.filter_time == 0.25);
    CHECK(relative_error(s.derivative_time / s.filter_time, 7.163265306122449) <= 1e-12);
    const auto back = series_from(s);
    CHECK(relative_error(back.gain, 2.0) <= 1e-12);
    CHECK(relative_error(back.integral_time.value(), 10.0) <= 1e-12);
    CHECK(relative_error(back.derivative_time, 2.5) <= 1e-12);
}

TEST_CASE("A06, A09: ideal to parallel, in seconds and in minutes", "[published]") {
    const auto e = entered_as({.gain = 2.5, .integral_time = 12.5, .derivative_time = 2.0}, parallel_form);
    CHECK(relative_error(e.gain.value(), 2.5) <= 1e-12);
    CHECK(relative_error(e.integral_gain.value(), 0.2) <= 1e-12);
    CHECK(relative_error(e.derivative_gain.value(), 5.0) <= 1e-12);

    const PidSettings slow{.gain = 2.5, .integral_time = 150.0, .derivative_time = 24.0};
    ControllerForm minutes = parallel_form;
    minutes.integral_unit = minutes.derivative_unit = TimeUnit::minutes;
    const auto in_minutes = entered_as(slow, minutes), in_seconds = entered_as(slow, parallel_form);
    CHECK(relative_error(in_minutes.integral_gain.value(), 1.0) <= 1e-12);
    CHECK(relative_error(in_minutes.derivative_gain.value(), 1.0) <= 1e-12);
    CHECK(relative_error(in_seconds.integral_gain.value(), 0.016666666666666666) <= 1e-12);
    CHECK(relative_error(in_seconds.derivative_gain.value(), 60.0) <= 1e-12);
    const auto back = settings_from({.gain = 2.5, .integral_gain = 1.0, .derivative_gain = 1.0}, minutes);
    CHECK(relative_error(back.integral_time.value(), 150.0) <= 1e-12);
    CHECK(relative_error(back.derivative_time, 24.0) <= 1e-12);
}

TEST_CASE("A07: proportional band", "[published]") {
    const ControllerForm band{.gain_as = GainAs::proportional_band};
    const struct { double gain, band; } rows[] = {{2.5, 40.0}, {0.8, 125.0}, {100.0, 1.0}};
    for (const auto& row : rows) {
        CHECK(relative_error(entered_as({.gain = row.gain}, band).proportional_band.value(), row.band) <= 1e-12);
        CHECK(relative_error(settings_from({.proportional_band = row.band, .integral_time = 0.0}, band).gain, row.gain) <= 1e-12);
    }
}

TEST_CASE("A08: repeats per minute", "[published]") {
    const PidSettings s{.gain = 1.0, .integral_time = 150.0};
    ControllerForm form{.integral_unit = TimeUnit::minutes};
    CHECK(relative_error(entered_as(s, form).integral_time.value(), 2.5) <= 1e-12);
    form.integral_as = IntegralAs::repeats;
    CHECK(relative_error(entered_as(s, form).repeats.value(), 0.4) <= 1e-12);
    CHECK(relative_error(settings_from({.gain = 1.0, .repeats = 0.4}, form).integral_time.value(), 150.0) <= 1e-12);
    form.integral_unit = TimeUnit::seconds;
    CHECK(relative_error(entered_as(s, form).repeats.value(), 0.006666666666666667) <= 1e-12);
}

TEST_CASE("A10: a minutes field read as seconds is a factor of 60", "[published]") {
    // Common practice, no source.
    const ControllerForm minutes{.integral_unit = TimeUnit::minutes}, seconds{};
    const Entered keyed{.gain = 1.0, .integral_time = 2.0};
    CHECK(settings_from(keyed, minutes).integral_time.value() / settings_from(keyed, seconds).integral_time.value() == 60.0);
}

TEST_CASE("A13, A14: controller gain in engineering units, and after re-ranging", "[published]") {
    // Derived, recomputed.
    ControllerForm form{.gain_unit = GainUnit::engineering, .process_value_range = Range{0.0, 200.0, "degC"}, .output_range = Range{}};
    CHECK(relative_error(entered_as({.gain = 2.0}, form).gain.value(), 1.0) <= 1e-12);
    CHECK(relative_error(settings_from({.gain = 1.0, .integral_time = 0.0}, form).gain, 2.0) <= 1e-12);
    form.output_range = Range{0.0, 50.0, "m3/h"};
    CHECK(relative_error(entered_as({.gain = 2.0}, form).gain.value(), 0.5) <= 1e-12);
    // 50-150 degC: the same gain in degC is half of it in percent, and gain times process gain stays 2.4.
    form.output_range = Range{};
    const double in_units = entered_as({.gain = 2.0}, form).gain.value();
    form.process_value_range = Range{50.0, 150.0, "degC"};
    const double after = settings_from({.gain = in_units, .integral_time = 0.0}, form).gain;
    CHECK(relative_error(after, 1.0) <= 1e-12);
    CHECK(relative_error(after * 2.4, 2.4) <= 1e-12);
}

TEST_CASE("A17: reverse action pairs with a positive process gain", "[published]") {
    // Common practice, no source. Positive controller gain pairs with positive process gain.
    CHECK(entered_as({.gain = 2.0, .integral_time = 5.0}, ideal_form).action == Action::reverse);
    const auto direct = entered_as({.gain = -2.0, .integral_time = 5.0}, ideal_form);
    CHECK(direct.action == Action::direct);
    CHECK(direct.gain.value() == 2.0);
    CHECK(settings_from(direct, ideal_form).gain == -2.0);
    const ControllerForm sign{.action_as = ActionAs::sign};
    CHECK(entered_as({.gain = -2.0, .integral_time = 5.0}, sign).gain.value() == -2.0);
    CHECK(settings_from({.gain = -2.0, .integral_time = 5.0}, sign).gain == -2.0);
}
