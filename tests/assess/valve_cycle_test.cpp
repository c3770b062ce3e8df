#include "tauwright/assess/valve_cycle.hpp"

#include <limits>

#include "assess/valve_loop.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;
using oracle::ValveLoop;
using oracle::ValveRun;

namespace {

TransferFunction process_of(const ValveLoop& loop) {
    return TransferFunction::from_factors({.gain = loop.gain, .integrators = loop.integrating ? 1 : 0, .lags = loop.lags, .dead_time = loop.dead_time});
}

PidSettings settings_of(const ValveLoop& loop) {
    PidSettings s{.gain = loop.Kc, .derivative_time = loop.Td, .filter_time = loop.Tf};
    if (loop.Ki != 0.0) s.integral_time = loop.Kc / loop.Ki;
    return s;
}

// Settings by the usual rules for the process, looser or tighter by chance.
ValveLoop random_loop(oracle::Seeded& random, bool integrating, bool integral_action) {
    ValveLoop loop;
    loop.integrating = integrating;
    loop.gain = random.scaled(0.2, 5.0) * (random.chance(0.5) ? 1.0 : -1.0);
    const double tau = random.scaled(1.0, 50.0);
    loop.dead_time = random.scaled(0.1, 1.5) * tau;
    if (!integrating) loop.lags = {tau};
    const double second = random.uniform(0.1, 0.8) * tau;
    const bool pid = random.chance(0.5);
    if (pid) loop.lags.push_back(second);
    const double tau_c = random.uniform(0.8, 4.0) * loop.dead_time, rest = tau_c + loop.dead_time;
    const double Ti = integrating ? 4.0 * rest * random.uniform(1.0, 1.5) : std::min(tau, 4.0 * rest);
    loop.Kc = (integrating ? 1.0 : tau) / (loop.gain * rest);
    if (integral_action) loop.Ki = loop.Kc / Ti;
    if (pid) loop.Td = second * random.uniform(0.3, 1.0), loop.Tf = 0.2 * loop.Td;
    return loop;
}

}  // namespace

TEST_CASE("H02: sticking valve under PI", "[published]") {
    // Trade fact H02 (derived, recomputed, 2 %): simulated with a scan of 0.1 s, which adds its part.
    const auto G = first_order_plus_dead_time(1.0, 10.0, 2.0);
    const PidSettings settings{.gain = 1.25, .integral_time = 10.0};
    const ValveCycle half = valve_cycle(G, settings, {.stick = 0.5}), one = valve_cycle(G, settings, {.stick = 1.0});
    CHECK(half.existence == CycleExistence::persists);
    CHECK(relative_error(2.0 * half.process_value_amplitude.value(), 0.38408356423567913) <= 0.02);
    CHECK(relative_error(half.period.value(), 39.96944444444445) <= 0.02);
    CHECK(relative_error(2.0 * one.process_value_amplitude.value(), 0.7681671284713583) <= 0.02);
    CHECK(one.period == half.period);
    CHECK(*one.process_value_amplitude == 2.0 * *half.process_value_amplitude);
    CHECK(half.reason == "sticking of 0.5 % makes any controller with integral action cycle: period 40 s, process value +-0.19, "
                         "or slower and lopsided where the load needs a position off the middle of two rests; "
                         "retuning changes the period, not the fact; repair the valve");
    CHECK_FALSE(half.retuning_cures);
    const ValveCycle healthy = valve_cycle(G, settings, {});
    CHECK(healthy.existence == CycleExistence::none);
    CHECK_FALSE(healthy.period);
}

TEST_CASE("Sticking where the loop is an integrator with dead time", "[closed form]") {
    // Ti = tau: the output is a triangle of slope Kc S/(2 tau), a dead time late: period 4 (tau/(K Kc) + theta), output
    // S/2 (1 + K Kc theta/tau); the process value a first-order lag of the square wave: S K/2 tanh(period/(4 tau)).
    // Play before the stem is pushed makes the way longer; a resolution alone is sticking of that size.
    for (double K : {-0.7, 1.0, 3.0})
        for (double theta : {0.0, 0.3, 2.0, 9.0, 33.0}) {
            const double tau = 10.0, Kc = 0.6 * tau / (K * (theta + 2.0)), S = 0.8, a = K * Kc / tau;
            const auto G = TransferFunction::from_factors({.gain = K, .lags = {tau}, .dead_time = theta});
            for (double play : {0.0, 0.5}) {
                const double way = 1.0 + play / S, period = 4.0 * (way / a + theta);
                const ValveCycle c = valve_cycle(G, {.gain = Kc, .integral_time = tau}, {.dead_band = play, .stick = S});
                INFO("K " << K << ", dead time " << theta << ", dead band " << play << ": " << c.reason);
                REQUIRE(c.period);
                CHECK(relative_error(*c.period, period) <= 1e-9);
                CHECK(relative_error(*c.output_amplitude, 0.5 * S * (way + a * theta)) <= 1e-9);
                CHECK(relative_error(*c.process_value_amplitude, 0.5 * S * std::abs(K) * std::tanh(0.25 * period / tau)) <= 1e-9);
                ValveCycle same = valve_cycle(G, {.gain = Kc, .integral_time = tau}, {.dead_band = play, .resolution = S});
                same.reason = c.reason;
                CHECK(same == c);
            }
        }
}

TEST_CASE("Sticking against two valve models on thirty loops", "[independent computation]") {
    oracle::Seeded random(4020);
    INFO("seed 4020");
    for (int round = 0; round < 30; ++round) {
        const ValveLoop loop = random_loop(random, round % 3 == 2, round % 6 != 5);
        const double S = random.scaled(0.2, 5.0);
        const ValveCycle c = valve_cycle(process_of(loop), settings_of(loop), {.stick = S});
        INFO("round " << round << ": " << process_of(loop).text() << ", Kc " << loop.Kc << " Ki " << loop.Ki << " Td " << loop.Td
                      << ", stick " << S << ": " << c.reason);
        REQUIRE(c.existence == CycleExistence::persists);
        REQUIRE(c.period);
        for (const auto model : {ValveRun::Model::hysteresis_operator, ValveRun::Model::events}) {
            ValveRun run(loop, S, 0.0, model, *c.period / 3000.0, 0.5 * S, 0.0);
            const auto seen = run.run(24.0 * *c.period);
            INFO(static_cast<int>(model) << " saw period " << seen.period << " and +-" << seen.value_amplitude);
            CHECK(seen.turns >= 10);
            CHECK(relative_error(*c.period, seen.period) <= 0.03);
            CHECK(relative_error(*c.process_value_amplitude, seen.value_amplitude) <= 0.03);
            CHECK(relative_error(*c.output_amplitude, seen.output_amplitude) <= 0.03);
        }
    }
}

TEST_CASE("Tight loops that jump more than once each way", "[independent computation]") {
    const ValveLoop loops[] = {
        {.gain = 0.2161836, .dead_time = 0.3229431, .lags = {4.7077903, 0.2551293}, .Kc = 38.1123, .Ki = 42.7694},
        {.gain = 0.474984, .dead_time = 8.8971939, .lags = {36.348754}, .integrating = true, .Kc = 0.09652, .Ki = 0.00126537},
        {.gain = 0.512478, .dead_time = 20.344084, .lags = {28.038718, 21.137843, 24.272543}, .integrating = true, .Kc = 0.0268145, .Ki = 0.000114907},
        {.gain = 1.4381044, .dead_time = 4.4692281, .lags = {6.857338}, .integrating = true, .Kc = 0.0691801, .Ki = 0.00362459, .Td = 2.20706, .Tf = 0.66}};
    for (const ValveLoop& loop : loops) {
        const ValveCycle c = valve_cycle(process_of(loop), settings_of(loop), {.stick = 0.7});
        INFO(process_of(loop).text() << ": " << c.reason);
        REQUIRE(c.period);
        ValveRun run(loop, 0.7, 0.0, ValveRun::Model::events, *c.period / 2000.0, 0.35, 0.0);
        const auto seen = run.run(60.0 * *c.period);
        INFO("saw period " << seen.period << " and +-" << seen.value_amplitude << ", swing " << seen.position_swing);
        CHECK(seen.position_swing > 1.3);
        CHECK(relative_error(*c.period, seen.period) <= 0.01);
        CHECK(relative_error(*c.process_value_amplitude, seen.value_amplitude) <= 0.01);
        CHECK(relative_error(*c.output_amplitude, seen.output_amplitude) <= 0.01);
    }
}

TEST_CASE("Dead band against two valve models on twenty loops with two integrators", "[independent computation]") {
    oracle::Seeded random(4021);
    INFO("seed 4021");
    for (int round = 0; round < 20; ++round) {
        const ValveLoop loop = random_loop(random, true, true);
        const double D = random.scaled(0.2, 5.0);
        const ValveCycle c = valve_cycle(process_of(loop), settings_of(loop), {.dead_band = D});
        INFO("round " << round << ": " << process_of(loop).text() << ", Kc " << loop.Kc << " Ki " << loop.Ki << " Td " << loop.Td
                      << ", dead band " << D << ": " << c.reason);
        REQUIRE(c.existence == CycleExistence::persists);
        REQUIRE(c.period);
        CHECK(c.retuning_cures);
        for (const auto model : {ValveRun::Model::hysteresis_operator, ValveRun::Model::events}) {
            ValveRun run(loop, 0.0, D, model, *c.period / 1000.0, 0.0, *c.process_value_amplitude);
            const auto seen = run.run(40.0 * *c.period);
            INFO(static_cast<int>(model) << " saw period " << seen.period << " and +-" << seen.value_amplitude);
            CHECK(seen.turns >= 10);
            CHECK(relative_error(*c.period, seen.period) <= 0.03);
            CHECK(relative_error(*c.process_value_amplitude, seen.value_amplitude) <= 0.03);
            CHECK(relative_error(*c.output_amplitude, seen.output_amplitude) <= 0.03);
        }
    }
}

TEST_CASE("No cycle: dead band with one integrator, sticking without", "[independent computation]") {
    oracle::Seeded random(4022);
    INFO("seed 4022");
    int none = 0;
    for (int round = 0; round < 20; ++round) {
        const bool dead_band = round < 14, integrating = dead_band && round % 2 == 1;
        ValveLoop loop = random_loop(random, integrating, dead_band && !integrating);
        if (!dead_band) loop.Kc = random.uniform(0.1, 0.99) / loop.gain;  // a loop gain above 1 is another story
        const ValveSettings valve{.dead_band = dead_band ? 1.0 : 0.0, .stick = dead_band ? 0.0 : 1.0};
        const ValveCycle c = valve_cycle(process_of(loop), settings_of(loop), valve);
        INFO("round " << round << ": " << process_of(loop).text() << ", Kc " << loop.Kc << " Ki " << loop.Ki << " Td " << loop.Td << ": " << c.reason);
        CHECK(c.existence == CycleExistence::none);
        CHECK_FALSE(c.period);
        none += c.existence == CycleExistence::none;
        const double slow = 4.0 * loop.dead_time + (loop.lags.empty() ? 0.0 : loop.lags[0]);
        for (const auto model : {ValveRun::Model::hysteresis_operator, ValveRun::Model::events}) {
            ValveRun run(loop, valve.stick, valve.dead_band, model, slow / 500.0, 0.0, 5.0 * std::abs(loop.gain));
            const auto seen = run.run(150.0 * slow);
            INFO(static_cast<int>(model) << " saw " << seen.turns << " turns, swing " << seen.position_swing);
            CHECK(seen.position_swing <= 0.02);
        }
    }
    CHECK(none >= 18);
}

TEST_CASE("Sticking without an integrator and a loop gain above 1: rest or cycle, as the load falls", "[independent computation]") {
    const ValveLoop loop{.gain = 2.0, .dead_time = 1.7, .lags = {13.0}, .Kc = 1.4};
    const ValveCycle c = valve_cycle(process_of(loop), settings_of(loop), {.stick = 1.0});
    INFO(c.reason);
    CHECK(c.existence == CycleExistence::undetermined);
    CHECK(c.retuning_cures);
    for (double position : {0.0, 0.5}) {  // on what the load needs, and half a jump off it
        ValveRun run(loop, 1.0, 0.0, ValveRun::Model::events, 0.01, position, 0.0);
        CHECK((run.run(600.0).position_swing > 0.5) == (position == 0.5));
    }
}

TEST_CASE("An unstable process finds no rest but on one edge of a dead band", "[independent computation]") {
    for (double Ki : {0.0, 0.1})
        for (bool stick : {true, false}) {
            const ValveLoop loop{.gain = -1.0, .dead_time = 1.0, .lags = {-10.0}, .Kc = 4.0, .Ki = Ki};
            const ValveCycle c = valve_cycle(process_of(loop), settings_of(loop), {.dead_band = stick ? 0.0 : 1.0, .stick = stick ? 1.0 : 0.0});
            INFO(c.reason);
            CHECK_FALSE(c.retuning_cures);
            if (!stick && Ki == 0.0) {
                CHECK(c.existence == CycleExistence::undetermined);
                CHECK(ValveRun(loop, 0.0, 1.0, ValveRun::Model::events, 0.05, 0.0, 0.3).run(3000.0).position_swing < 1e-6);
                continue;
            }
            CHECK(c.existence == CycleExistence::persists);
            REQUIRE(c.period);
            ValveRun run(loop, stick ? 1.0 : 0.0, stick ? 0.0 : 1.0, ValveRun::Model::events, *c.period / 1000.0, stick ? 0.5 : 0.0,
                         stick ? 0.0 : 0.8 * *c.process_value_amplitude);
            const auto seen = run.run(60.0 * *c.period);
            INFO("saw period " << seen.period << " and +-" << seen.value_amplitude);
            CHECK(relative_error(*c.period, seen.period) <= 0.03);
            CHECK(relative_error(*c.process_value_amplitude, seen.value_amplitude) <= 0.03);
        }
}

TEST_CASE("Dead band in tightly tuned loops with one integrator, disturbed enough", "[independent computation]") {
    const ValveLoop loop{.gain = 0.22302943, .dead_time = 0.40553584, .lags = {5.9660598, 0.76206791}, .Kc = 11.5697, .Ki = 5.40324};
    const ValveCycle c = valve_cycle(process_of(loop), settings_of(loop), {.dead_band = 1.0});
    INFO(c.reason);
    CHECK(c.existence == CycleExistence::persists);
    CHECK(c.retuning_cures);
    ValveRun run(loop, 0.0, 1.0, ValveRun::Model::events, c.period.value() / 1000.0, 0.0, 5.0 * *c.process_value_amplitude);
    const auto seen = run.run(60.0 * *c.period);
    CHECK(relative_error(*c.period, seen.period) <= 0.03);
    CHECK(relative_error(*c.process_value_amplitude, seen.value_amplitude) <= 0.03);
}

TEST_CASE("What the valve's answer says beside the cycle", "[invariant]") {
    using enum CycleExistence;
    const auto G = first_order_plus_dead_time(1.0, 10.0, 2.0), level = integrating_plus_dead_time(0.05, 4.0);
    const PidSettings pi{.gain = 1.25, .integral_time = 10.0}, level_pi{.gain = 2.5, .integral_time = 40.0}, p{.gain = 2.5};
    const ValveCycle two = valve_cycle(level, level_pi, {.dead_band = 1.0});
    CHECK(two.existence == persists);
    CHECK(two.retuning_cures);
    CHECK(two.reason.find("integral action") != std::string::npos);
    CHECK(valve_cycle(level, p, {.dead_band = 1.0}).existence == none);
    CHECK(valve_cycle(level, p, {.stick = 1.0}).existence == persists);
    CHECK(valve_cycle(level.with_gain(0.1), level_pi, {.dead_band = 1.0}).existence == persists);
    // A travel rate that makes a jump long beside the period: the fact stands, the size does not.
    const ValveCycle slow = valve_cycle(G, pi, {.stick = 0.5, .travel_rate_per_s = 0.1});
    CHECK(slow.existence == persists);
    CHECK_FALSE(slow.period);
    CHECK(valve_cycle(G, pi, {.stick = 0.5, .travel_rate_per_s = 5.0}).period.value() == valve_cycle(G, pi, {.stick = 0.5}).period.value());
    // A loop that is unstable on its own, and one whose dead band is too close to call.
    CHECK(valve_cycle(G, {.gain = 50.0, .integral_time = 1.0}, {.stick = 0.5}).existence == undetermined);
    CHECK(valve_cycle(G, {.gain = 8.2, .integral_time = 10.0}, {.dead_band = 0.5}).existence == undetermined);
    // Sticking with a resolution: jumps of whole multiples.
    const ValveCycle coarse = valve_cycle(G, pi, {.stick = 0.5, .resolution = 0.2});
    CHECK(relative_error(coarse.period.value(), 4.0 * ((0.5 / 0.4 * 2.0 - 1.0) * 8.0 + 2.0)) <= 1e-9);
}

TEST_CASE("Bad valves and loops are refused by name", "[invariant]") {
    using enum error_code;
    const auto G = first_order_plus_dead_time(1.0, 10.0, 2.0);
    const PidSettings pi{.gain = 1.25, .integral_time = 10.0};
    const double nan = std::numeric_limits<double>::quiet_NaN();
    check_refused(out_of_domain, {"valve.stick is -1"}, [&] { (void)valve_cycle(G, pi, {.stick = -1.0}); });
    check_refused(not_finite, {"valve.dead_band is nan"}, [&] { (void)valve_cycle(G, pi, {.dead_band = nan}); });
    check_refused(out_of_domain, {"valve.travel_rate_per_s is 0"}, [&] { (void)valve_cycle(G, pi, {.travel_rate_per_s = 0.0}); });
    check_refused(out_of_domain, {"settings.gain"}, [&] { (void)valve_cycle(G, {}, {.stick = 1.0}); });
    check_refused(out_of_domain, {"relative degree"}, [&] {
        (void)valve_cycle(TransferFunction::from_factors({.leads = {1.0, 2.0}, .lags = {1.0}}), pi, {.stick = 1.0});
    });
}
