// Figures against closed forms: of trends made by hand, and of whole loops.
#include <algorithm>
#include <numbers>

#include "core/oracle_tools.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::relative_error;

namespace {

// Samples of a process value about 50, every h from 0 on.
template <class Value>
Trend sampled(const Duty& duty, double h, std::size_t n, Value value) {
    Trend t;
    t.duty = duty;
    for (std::size_t k = 0; k < n; ++k) {
        t.time_s.push_back(static_cast<double>(k) * h);
        t.setpoint.push_back(50.0 + duty.setpoint_step);
        t.process_value.push_back(value(t.time_s.back()));
        t.output.push_back(50.0);
    }
    return t;
}

Trend moves(std::vector<double> outputs) {
    Trend t = sampled({}, 1.0, outputs.size(), [](double) { return 50.0; });
    t.output = std::move(outputs);
    return t;
}

}  // namespace

TEST_CASE("figures of a first-order answer to a step", "[closed form]") {
    for (double step : {10.0, -4.0}) {
        const double tau = 5.0, h = 0.01, q = std::exp(-h / tau);
        const Figures f = figures(sampled({.setpoint_step = step}, h, 20001, [&](double t) { return 50.0 + step * -std::expm1(-t / tau); }));
        CHECK(relative_error(f.rise_time.value(), std::log(9.0) * tau) <= 1e-6);
        CHECK(relative_error(f.settling_time.value(), std::log(50.0) * tau) <= h / 15.0);
        CHECK(f.overshoot_percent.value() <= 1e-12);
        CHECK_FALSE(f.decay_ratio.has_value());
        // Sums of powers of q; the rectangle sums go to step tau, step^2 tau / 2 and step tau^2.
        CHECK(relative_error(f.integrated_error, step * h * (1.0 / (1.0 - q) - 0.5)) <= 1e-11);
        CHECK(relative_error(f.integrated_absolute_error, std::abs(step) * h * (1.0 / (1.0 - q) - 0.5)) <= 1e-11);
        CHECK(relative_error(f.integrated_squared_error, step * step * h * (1.0 / (1.0 - q * q) - 0.5)) <= 1e-11);
        CHECK(relative_error(f.integrated_time_absolute_error, std::abs(step) * h * h * q / ((1.0 - q) * (1.0 - q))) <= 1e-11);
    }
}

TEST_CASE("decay ratio of second-order oscillations", "[closed form]") {
    for (double damping : {0.05, 0.2, 0.4, 0.6}) {
        const double root = std::sqrt(1.0 - damping * damping), ratio = std::exp(-2.0 * std::numbers::pi * damping / root);
        const Figures step = figures(sampled({.setpoint_step = -8.0}, 0.002, 12000, [&](double t) {
            return 50.0 - 8.0 * (1.0 - std::exp(-damping * t) * (std::cos(root * t) + damping / root * std::sin(root * t)));
        }));
        INFO("damping " << damping);
        CHECK(relative_error(step.overshoot_percent.value(), 100.0 * std::sqrt(ratio)) <= 1e-5);
        // A second peak below a thousandth of the step does not count.
        if (damping < 0.6) CHECK(relative_error(step.decay_ratio.value(), ratio) <= 1e-4);
        else CHECK_FALSE(step.decay_ratio.has_value());

        const Figures load = figures(sampled({.load_step = 5.0, .load_time = 2.0}, 0.002, 12000, [&](double t) {
            return t > 2.0 ? 50.0 + 7.0 * std::exp(-damping * (t - 2.0)) * std::sin(root * (t - 2.0)) : 50.0;
        }));
        const double peak_time = std::acos(damping) / root;
        CHECK(absolute_error(load.peak_load_error_time.value(), peak_time) <= 0.002);
        CHECK(relative_error(load.peak_load_error.value(), 7.0 * std::exp(-damping * peak_time) * root) <= 1e-5);
        if (damping < 0.6) CHECK(relative_error(load.decay_ratio.value(), ratio) <= 1e-4);
        CHECK_FALSE(load.rise_time.has_value());
    }
    // A growing one has a ratio above 1.
    const Figures growing = figures(sampled({.setpoint_step = 1.0}, 0.01, 1500, [](double t) { return 51.0 - std::exp(0.05 * t) * std::cos(t); }));
    CHECK(relative_error(growing.decay_ratio.value(), std::exp(0.1 * std::numbers::pi)) <= 1e-3);
    // One peak is no ratio, and a peak still climbing at the end is none either.
    const auto wave = [](double t) { return 51.0 - std::exp(-0.05 * t) * std::cos(t); };
    CHECK_FALSE(figures(sampled({.setpoint_step = 1.0}, 0.01, 400, wave)).decay_ratio.has_value());
    CHECK_FALSE(figures(sampled({.setpoint_step = 1.0}, 0.01, 900, wave)).decay_ratio.has_value());
    CHECK(figures(sampled({.setpoint_step = 1.0}, 0.01, 1000, wave)).decay_ratio.has_value());
}

TEST_CASE("ITAE of a load alone counts time from the load", "[closed form]") {
    const double h = 0.01, q = std::exp(-h);
    const Figures f = figures(sampled({.load_step = 1.0, .load_time = 3.0}, h, 4000, [](double t) { return t < 3.0 - 1e-9 ? 50.0 : 50.0 + std::exp(3.0 - t); }));
    CHECK(relative_error(f.integrated_time_absolute_error, h * h * q / ((1.0 - q) * (1.0 - q))) <= 1e-9);
    CHECK(f.integrated_error < 0.0);
}

TEST_CASE("rise time goes straight between scans", "[closed form]") {
    const double values[] = {50.0, 50.0, 50.5, 52.5, 57.5, 60.5, 60.0};  // 10 % at 2.25, 90 % at 4.5
    const Figures f = figures(sampled({.setpoint_step = 10.0}, 1.0, 7, [&](double t) { return values[static_cast<int>(t)]; }));
    CHECK(relative_error(f.rise_time.value(), 4.5 - 2.25) <= 1e-12);
    CHECK_FALSE(figures(sampled({.setpoint_step = 10.0}, 1.0, 5, [&](double t) { return values[static_cast<int>(t)]; })).rise_time.has_value());
    // The load comes before 90 % is reached.
    CHECK_FALSE(figures(sampled({.setpoint_step = 10.0, .load_step = 1.0, .load_time = 4.0}, 1.0, 7, [&](double t) { return values[static_cast<int>(t)]; })).rise_time.has_value());
}

TEST_CASE("reversals and time at limits", "[closed form]") {
    CHECK(figures(moves({50.0, 52.0, 55.0, 55.0, 60.0})).reversals == 0);
    CHECK(figures(moves({50.0, 52.0, 51.0, 51.0, 53.0, 53.0, 40.0, 41.0})).reversals == 4);
    // Less than a millionth of the range is rounding, in one move or in many.
    CHECK(figures(moves({50.0, 50.00005, 49.99998, 50.00003})).reversals == 0);
    CHECK(figures(moves({50.0, 55.0, 54.99995, 54.9999, 54.99985, 54.9998})).reversals == 1);
    CHECK(figures(moves({50.0, 100.0, 100.0, 99.0, 0.0, 0.0, 0.0, 10.0})).time_at_limits == 5.0);
    // With a valve its position counts.
    Trend t = moves({50.0, 52.0, 51.0, 53.0});
    t.valve_position = {50.0, 50.0, 50.0, 50.0};
    CHECK(figures(t).reversals == 0);
    CHECK(figures(t).valve_travel == 0.0);
}

TEST_CASE("figures of trends of no length", "[regression]") {
    CHECK(figures(Trend{}) == Figures{});
    CHECK(figures(sampled({.setpoint_step = 10.0}, 1.0, 1, [](double) { return 50.0; })) == Figures{});
    Trend torn = moves({50.0, 51.0, 52.0});
    torn.output.clear();
    torn.valve_position.clear();
    CHECK(figures(torn) == Figures{});
}

TEST_CASE("G03: peak of an averaging level loop", "[published]") {
    // Trade fact G03 (derived): K' = 0.05 /min, d = 50/3 %, Kc and Ti critically damped: 30 % at 97.858 min. Minutes as s.
    const double Kc = 0.40875493463493584, Ti = 195.7162916490513, load = 16.666666666666664;
    const Duty duty{.load_step = load, .scan_time = 0.02, .output_low = -100.0, .output_high = 200.0};
    const Figures f = figures(simulate(integrating_plus_dead_time(0.05, 0.0), {.gain = Kc, .integral_time = Ti}, duty, 1000.0));
    CHECK(relative_error(f.peak_load_error.value(), 30.0) <= 1e-3);
    CHECK(absolute_error(f.peak_load_error_time.value(), 97.85814582452565) <= 0.1);
    CHECK_FALSE(f.decay_ratio.has_value());
    // C11 on it: IE = -d Ti / Kc. What is left after 1000 min is exp(-10) of it.
    CHECK(relative_error(f.integrated_error, -load * Ti / Kc) <= 1e-3);
}

TEST_CASE("C12: damping of PI on an integrator, read from the decay of its load response", "[published]") {
    // Trade fact C12 (recalled): zeta = sqrt(Kc K' Ti) / 2.
    const double Kc = 4.0, slope = 0.05;
    for (double zeta : {0.1, 0.2, 0.4}) {
        const double Ti = 4.0 * zeta * zeta / (Kc * slope);
        const Duty duty{.load_step = 5.0, .scan_time = 5e-4 * Ti, .output_low = -100.0, .output_high = 200.0};
        const Figures f = figures(simulate(integrating_plus_dead_time(slope, 0.0), {.gain = Kc, .integral_time = Ti}, duty, 40.0 * Ti / zeta));
        INFO("zeta " << zeta);
        CHECK(relative_error(f.decay_ratio.value(), std::exp(-2.0 * std::numbers::pi * zeta / std::sqrt(1.0 - zeta * zeta))) <= 0.02);
    }
}

TEST_CASE("C10, C11: a dead time in front of a lag only delays what a lag does", "[closed form]") {
    // Integral control of a gain: 1 / (tau_c s) sampled leaves q = 1 - h / tau_c a scan, so every sum is a power series.
    const double h = 0.05, tau_c = 4.0, q = 1.0 - h / tau_c, step = 10.0;
    const Figures f = figures(simulate(TransferFunction::from_factors({.gain = 2.0}), {.integral_gain = 1.0 / (2.0 * tau_c)},
                                       {.setpoint_step = step, .scan_time = h}, 200.0));
    CHECK(relative_error(f.integrated_absolute_error, step * h * (1.0 / (1.0 - q) - 0.5)) <= 1e-10);
    CHECK(relative_error(f.integrated_squared_error, step * step * h * (1.0 / (1.0 - q * q) - 0.5)) <= 1e-10);
    CHECK(relative_error(f.rise_time.value(), h * std::log(9.0) / -std::log(q)) <= 1e-4);
    CHECK(absolute_error(f.settling_time.value(), h * std::ceil(std::log(0.02) / std::log(q))) <= 1e-9);
    CHECK(f.reversals == 0);
    CHECK(f.time_at_limits == 0.0);
}
