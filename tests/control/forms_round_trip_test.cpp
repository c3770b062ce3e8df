// Every combination of what a form can be, both ways, and each against the equation the controller
// at hand computes, written out here on its own.
#include <vector>

#include "core/oracle_tools.hpp"
#include "tauwright/control/control.hpp"

using namespace tauwright;
using oracle::relative_error;

namespace {

using Complex = std::complex<double>;

std::vector<ControllerForm> all_forms() {
    std::vector<ControllerForm> forms;
    const Range celsius{20.0, 170.0, "degC"}, flow{0.0, 40.0, "m3/h"};
    for (int e = 0; e < 3; ++e)
        for (int g = 0; g < 3; ++g)
            for (int i = 0; i < 3; ++i)
                for (int bits = 0; bits < 16; ++bits) {
                    ControllerForm f;
                    f.equation = static_cast<Equation>(e);
                    f.gain_as = g == 1 ? GainAs::proportional_band : GainAs::gain;
                    f.gain_unit = g == 2 ? GainUnit::engineering : GainUnit::percent;
                    f.integral_as = static_cast<IntegralAs>(i);
                    f.integral_unit = bits & 1 ? TimeUnit::minutes : TimeUnit::seconds;
                    f.derivative_unit = bits & 2 ? TimeUnit::minutes : TimeUnit::seconds;
                    f.filter_as = bits & 4 ? FilterAs::ratio : FilterAs::time;
                    f.action_as = bits & 8 ? ActionAs::sign : ActionAs::action_switch;
                    if (g == 2) f.process_value_range = celsius, f.output_range = flow;
                    forms.push_back(f);
                }
    return forms;
}

PidSettings random_settings(oracle::Seeded& random, bool negative, int kind) {
    PidSettings s{.gain = (negative ? -1.0 : 1.0) * random.scaled(0.01, 100.0)};
    if (kind & 1) s.integral_time = random.scaled(1.0, 1000.0);
    if (kind & 2) {
        // Well inside where a series form exists: (Ti - Tf)^2 > 4 Ti Td.
        const double Ti = s.integral_time.value_or(100.0);
        s.derivative_time = Ti * random.uniform(0.01, 0.15);
        s.filter_time = s.derivative_time * random.uniform(0.02, 0.3);
    }
    s.measurement_filter_time = random.chance(0.5) ? random.scaled(0.1, 10.0) : 0.0;
    s.setpoint_weight = random.uniform(0.0, 1.0);
    return s;
}

// The controller's own equation with the numbers keyed in, in percent per percent and seconds.
Complex keyed_response(const Entered& e, const ControllerForm& f, Complex s) {
    const double iu = f.integral_unit == TimeUnit::minutes ? 60.0 : 1.0, du = f.derivative_unit == TimeUnit::minutes ? 60.0 : 1.0;
    const double spans = f.gain_unit == GainUnit::engineering ? 150.0 / 40.0 : 1.0;  // celsius over flow
    const double direction = f.action_as == ActionAs::action_switch && e.action == Action::direct ? -1.0 : 1.0;
    const double gain = direction * (e.proportional_band ? 100.0 / *e.proportional_band : *e.gain * spans);
    Complex integral = 0.0;  // the integral part, in units of the gain
    if (e.integral_time && *e.integral_time != 0.0) integral = 1.0 / (*e.integral_time * iu * s);
    if (e.repeats && *e.repeats != 0.0) integral = *e.repeats / (iu * s);
    if (e.integral_gain && *e.integral_gain != 0.0) integral = direction * *e.integral_gain * spans / iu / s / gain;
    double derivative = 0.0;
    if (e.derivative_time) derivative = *e.derivative_time * du;
    if (e.derivative_gain) derivative = direction * *e.derivative_gain * du * spans / gain;
    const double filter = e.filter_ratio ? derivative / *e.filter_ratio : e.filter_time.value_or(0.0) * du;
    const Complex C = f.equation == Equation::series
                          ? gain * (1.0 + integral) * (derivative * s + 1.0) / (filter * s + 1.0)
                          : gain * (1.0 + integral + derivative * s / (filter * s + 1.0));
    return C / (e.measurement_filter_time * s + 1.0);
}

}  // namespace

TEST_CASE("settings survive every form, and the controller's own equation is the one asked for", "[invariant]") {
    constexpr std::uint64_t seed = 20240713;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int tried = 0;
    for (const auto& form : all_forms()) {
        for (int kind = 0; kind < 4; ++kind) {
            for (int repeat = 0; repeat < 3; ++repeat) {
                const bool may_be_negative = !(form.gain_as == GainAs::proportional_band && form.action_as == ActionAs::sign);
                const PidSettings s = random_settings(random, may_be_negative && random.chance(0.5), kind);
                INFO(name_of(form.equation) << ' ' << name_of(form.gain_as) << ' ' << name_of(form.gain_unit) << ' '
                                            << name_of(form.integral_as) << ' ' << name_of(form.integral_unit) << ' '
                                            << name_of(form.derivative_unit) << ' ' << name_of(form.filter_as) << ' '
                                            << name_of(form.action_as) << " kind " << kind);
                INFO("Kc " << text_of(s.gain) << " Ti " << text_of(s.integral_time.value_or(0.0)) << " Td "
                           << text_of(s.derivative_time) << " Tf " << text_of(s.filter_time));
                const Entered e = entered_as(s, form);
                const PidSettings back = settings_from(e, form);
                CHECK(relative_error(back.gain, s.gain) <= 1e-12);
                CHECK(back.integral_time.has_value() == s.integral_time.has_value());
                if (s.integral_time) CHECK(relative_error(back.integral_time.value(), *s.integral_time) <= 1e-12);
                CHECK(relative_error(back.derivative_time, s.derivative_time) <= 1e-12);
                CHECK(relative_error(back.filter_time, s.filter_time) <= 1e-12);
                CHECK(back.measurement_filter_time == s.measurement_filter_time);
                CHECK(back.setpoint_weight == s.setpoint_weight);
                const Complex at{random.uniform(-0.01, 0.01), random.scaled(1e-4, 10.0)};
                CHECK(relative_error(keyed_response(e, form, at), s(at)) <= 1e-11);
                ++tried;
            }
        }
    }
    CHECK(tried == 3 * 3 * 3 * 16 * 4 * 3);
}

TEST_CASE("which fields are keyed in follows from the form", "[closed form]") {
    const PidSettings s{.gain = 2.0, .integral_time = 30.0, .derivative_time = 3.0, .filter_time = 0.3};
    for (const auto& form : all_forms()) {
        const Entered e = entered_as(s, form);
        CHECK(e.gain.has_value() == (form.gain_as == GainAs::gain));
        CHECK(e.proportional_band.has_value() == (form.gain_as == GainAs::proportional_band));
        CHECK(e.integral_time.has_value() == (form.integral_as == IntegralAs::time));
        CHECK(e.repeats.has_value() == (form.integral_as == IntegralAs::repeats));
        CHECK(e.integral_gain.has_value() == (form.integral_as == IntegralAs::gain));
        CHECK(e.derivative_time.has_value() == (form.equation != Equation::parallel));
        CHECK(e.derivative_gain.has_value() == (form.equation == Equation::parallel));
        CHECK(e.filter_time.has_value() == (form.filter_as == FilterAs::time));
        CHECK(e.filter_ratio.has_value() == (form.filter_as == FilterAs::ratio));
    }
}

TEST_CASE("integral action alone goes through a parallel form with gains and nowhere else", "[closed form]") {
    for (double ki : {0.02, -0.02}) {
        const PidSettings s{.integral_gain = ki};
        for (const auto& form : all_forms()) {
            const bool holds = form.equation == Equation::parallel && form.gain_as == GainAs::gain && form.integral_as == IntegralAs::gain;
            if (!holds) {
                oracle::check_refused(error_code::no_equivalent, {"integral action alone"}, [&] { entered_as(s, form); });
                continue;
            }
            const Entered e = entered_as(s, form);
            CHECK(e.gain.value() == 0.0);
            const PidSettings back = settings_from(e, form);
            CHECK(back.gain == 0.0);
            CHECK_FALSE(back.integral_time.has_value());
            CHECK(relative_error(back.integral_gain.value(), ki) <= 1e-12);
        }
    }
}
