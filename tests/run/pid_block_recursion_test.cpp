// PidBlock against a recursion written from the equations alone.
#include "core/oracle_tools.hpp"
#include "tauwright/discretize/discretize.hpp"
#include "tauwright/run/run.hpp"

using namespace tauwright;
using oracle::absolute_error;

namespace {

// Backward differences of Kc (b r - y + 1/Ti integral e + ...) as a textbook would write them: the
// derivative as D_k = a D_{k-1} - b (y_k - y_{k-1}) (trade fact D03), tracking by h / Tt.
struct PlainPid {
    double Kc, Ti, Td, Tf, Tm, weight, h, low, high;
    double y = 0.0, D = 0.0, I = 0.0;

    void preset(double r, double measured, double output) {
        y = measured;
        D = 0.0;
        I = output - Kc * (weight * r - y);
    }
    double scan(double r, double measured) {
        const double y_before = y;
        y = (Tm * y + h * measured) / (Tm + h);
        D = (Tf * D - Kc * Td * (y - y_before)) / (Tf + h);
        if (Ti > 0.0) I += Kc * h / Ti * (r - y);
        const double v = Kc * (weight * r - y) + I + D;
        const double u = std::fmin(std::fmax(v, low), high);
        const double Tt = std::fmax(Td > 0.0 ? std::sqrt(Ti * Td) : Ti, h);
        if (Ti > 0.0) I += h / Tt * (u - v);
        return u;
    }
};

// Not inlined: GCC 12 would think an empty integral time is read.
[[gnu::noinline]] PidSettings random_settings(oracle::Seeded& random) {
    PidSettings s{.gain = (random.chance(0.3) ? -1.0 : 1.0) * random.scaled(0.1, 10.0)};
    if (random.chance(0.8)) s.integral_time = random.scaled(1.0, 100.0);
    if (random.chance(0.5)) {
        s.derivative_time = random.scaled(0.1, 20.0);
        s.filter_time = random.chance(0.7) ? random.scaled(0.01, 5.0) : 0.0;
    }
    if (random.chance(0.5)) s.measurement_filter_time = random.scaled(0.01, 5.0);
    s.setpoint_weight = random.uniform(0.0, 1.2);
    return s;
}

}  // namespace

TEST_CASE("the block equals a plain recursion over random scenarios with limits", "[independent computation]") {
    constexpr std::uint64_t seed = 20240714;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int limited_scans = 0;
    for (int scenario = 0; scenario < 200; ++scenario) {
        const PidSettings s = random_settings(random);
        const double h = random.scaled(0.01, 10.0), low = random.uniform(-10.0, 30.0), high = low + random.uniform(20.0, 80.0);
        const double first = random.uniform(low, high);
        PlainPid plain{s.gain, s.integral_time.value_or(0.0), s.derivative_time, s.derivative_time > 0.0 ? s.filter_time : 0.0,
                       s.measurement_filter_time, s.setpoint_weight, h, low, high};
        run::PidBlock block(discretize(s, h), low, high, first);
        INFO("scenario " << scenario << " Kc " << text_of(s.gain) << " Ti " << text_of(plain.Ti) << " Td " << text_of(plain.Td)
                         << " Tf " << text_of(plain.Tf) << " Tm " << text_of(plain.Tm) << " h " << text_of(h));
        double r = random.uniform(20.0, 80.0), y = r;
        plain.preset(r, y, first);
        CHECK(block.step(r, y) == first);
        double worst = 0.0;
        for (int k = 0; k < 300; ++k) {
            if (random.chance(0.02)) r = random.uniform(20.0, 80.0);
            y += 0.1 * (r - y) + random.uniform(-2.0, 2.0);
            const double expected = plain.scan(r, y), output = block.step(r, y);
            worst = std::fmax(worst, std::abs(output - expected));
            const bool at_low = expected <= low, at_high = expected >= high;
            limited_scans += at_low || at_high;
            if (std::abs(output - expected) == 0.0)
                CHECK(block.flags() == ((at_low ? unsigned{run::flag_limited_low} : 0u) | (at_high ? unsigned{run::flag_limited_high} : 0u)));
        }
        CHECK(absolute_error(worst, 0.0) <= 1e-9 * (1.0 + std::abs(s.gain) * (1.0 + s.derivative_time / h)));
    }
    CHECK(limited_scans > 1000);
}

TEST_CASE("without an initial output the integral starts at the low limit", "[closed form]") {
    // Kc = 2, Ti = 10, h = 1: u = 2 e + low + 0.2 e.
    run::PidBlock block(discretize(PidSettings{.gain = 2.0, .integral_time = 10.0}, 1.0), 10.0, 90.0);
    CHECK(absolute_error(block.step(55.0, 50.0), 10.0 + 2.2 * 5.0) <= 1e-12);
    CHECK(block.output_low() == 10.0);
    CHECK(block.output_high() == 90.0);
    CHECK(block.mode() == run::Mode::automatic);
}

TEST_CASE("integral action alone and PD", "[closed form]") {
    run::PidBlock integral(discretize(PidSettings{.integral_gain = 0.5}, 2.0), -100.0, 100.0, 0.0);
    integral.step(0.0, 0.0);
    for (int k = 1; k <= 5; ++k) CHECK(absolute_error(integral.step(3.0, 0.0), 3.0 * k) <= 1e-12);
    // PD without a filter on a ramp: P + Kc Td slope.
    run::PidBlock pd(discretize(PidSettings{.gain = 2.0, .derivative_time = 4.0}, 0.5), -100.0, 100.0, 0.0);
    pd.step(0.0, 0.0);
    for (int k = 1; k <= 5; ++k) CHECK(absolute_error(pd.step(0.0, 0.1 * k), -(2.0 * 0.1 * k + 2.0 * 4.0 * 0.2)) <= 1e-12);
}
