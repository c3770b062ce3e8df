#include <bit>
#include <cmath>
#include <cstdint>
#include <limits>
#include <string>

#include "core/oracle_tools.hpp"
#include "tauwright/assess/simulate_many.hpp"
#include "tauwright/discretize/process.hpp"
#include "tauwright/run/pid_block.hpp"
#include "tauwright/run/process_block.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::Seeded;

namespace {

double dead_time(Seeded& d, double h) {
    const double times[] = {0.0, h * d.below(40), d.uniform(0.0, h), d.uniform(0.0, 60.0 * h), h * 1e5};
    return times[d.below(16) == 0 ? 4 : d.below(4)];
}

TransferFunction process(Seeded& d, double h, bool one_state) {
    const double K = (d.below(4) == 0 ? -1.0 : 1.0) * d.scaled(0.1, 10.0), T = d.scaled(0.5, 100.0), theta = dead_time(d, h);
    const auto from = [&](Factors f) { f.gain = K; f.dead_time = theta; return TransferFunction::from_factors(std::move(f)); };
    if (one_state) return d.below(3) == 0 ? from({.integrators = 1}) : from({.lags = {T}});
    switch (d.below(8)) {
        case 0: return from({.lags = {T, d.scaled(0.5, 100.0)}});
        case 1: return from({.lag_pairs = {{T, d.uniform(0.02, 1.5)}}});
        case 2: return from({.integrators = 1, .lags = {T}});
        case 3: return from({.lags = {-T}});                                      // unstable
        case 4: return from({.lag_pairs = {{T, -0.3}}});                          // oscillates away
        case 5: return from({});                                                  // a mere gain
        case 6: return from({.leads = {0.5 * T}, .lags = {T, 0.1 * T, 3.0}});     // fits no lane
        default: return from({.lags = {-h / 200.0}});                             // beyond all numbers in a few scans
    }
}

PidSettings settings(Seeded& d, double gain_of_process) {
    const double K = d.scaled(0.05, 3.0) / gain_of_process, Ti = d.scaled(0.5, 100.0);
    PidSettings s{.gain = K, .integral_time = Ti, .setpoint_weight = d.uniform(0.0, 1.2)};
    switch (d.below(6)) {
        case 0: s.integral_time.reset(); break;                                   // P
        case 1: s = {.integral_gain = K / Ti}; break;                             // I
        case 2: s.measurement_filter_time = d.scaled(0.1, 20.0); break;
        case 3: s.derivative_time = 0.2 * Ti; s.filter_time = 0.02 * Ti; break;   // PID
        case 4: s.derivative_time = 0.1 * Ti; s.filter_time = 0.02 * Ti; s.measurement_filter_time = 0.3; break;
        default: break;                                                           // PI
    }
    if (d.below(60) == 0) s = {.gain = 1e149};                                    // where the controller holds
    return s;
}

std::vector<LoopToSimulate> random_loops(Seeded& d, double h, std::size_t count, bool one_state) {
    std::vector<LoopToSimulate> loops;
    while (loops.size() < count) {
        const TransferFunction G = process(d, h, one_state);
        loops.push_back({G, settings(d, G.gain())});
    }
    return loops;
}

struct Many {
    std::size_t scans;
    std::vector<double> process_value, output;
};

Many run_all(const std::vector<LoopToSimulate>& loops, const Duty& duty, double horizon) {
    Many m{.scans = scans_of(duty, horizon), .process_value = {}, .output = {}};
    m.process_value.assign(m.scans * loops.size(), -1e300);
    m.output = m.process_value;
    simulate_many(loops, duty, horizon, m.process_value, m.output);
    return m;
}

bool same_bits(double a, double b) { return std::bit_cast<std::uint64_t>(a) == std::bit_cast<std::uint64_t>(b); }

// Values that differ from those of each loop run alone; what happened in the trends is counted.
struct Comparison {
    std::size_t different = 0, limited = 0, ran_away = 0;
    std::string first_difference = {};
};

void compare(Comparison& c, const std::vector<LoopToSimulate>& loops, const Duty& duty, double horizon) {
    const Many many = run_all(loops, duty, horizon);
    for (std::size_t i = 0; i < loops.size(); ++i) {
        const Trend alone = simulate(loops[i].process, loops[i].settings, duty, horizon);
        c.limited += alone.limited;
        c.ran_away += alone.ran_away;
        for (std::size_t k = 0; k < many.scans; ++k) {
            const std::size_t from = std::min(k, alone.size() - 1), at = k * loops.size() + i;
            if (same_bits(many.process_value[at], alone.process_value[from]) && same_bits(many.output[at], alone.output[from])) continue;
            if (c.different++ == 0)
                c.first_difference = "loop " + std::to_string(i) + ", scan " + std::to_string(k) + ": " + loops[i].process.text() + ": process value " +
                                     text_of(many.process_value[at]) + " for " + text_of(alone.process_value[from]) + ", output " +
                                     text_of(many.output[at]) + " for " + text_of(alone.output[from]);
        }
    }
}

struct BlockComparison {
    std::size_t different = 0;
    bool limited = false;
};

// `simulate` against the public blocks, scan by scan.
BlockComparison compare_with_blocks(const TransferFunction& G, const PidSettings& s, const Duty& duty, double horizon) {
    const double h = duty.scan_time.value();
    const Trend trend = simulate(G, s, duty, horizon);
    run::PidBlock controller(discretize(s, h), duty.output_low, duty.output_high, duty.resting_output());
    run::ProcessBlock block(discretize(G, h), duty.resting_output(), duty.resting_process_value());
    std::vector<double> line(run::delay_line_length(block.coefficients()));
    block.start(line.data(), line.size());
    double value = duty.resting_process_value();
    controller.step(value, value);
    BlockComparison c;
    for (std::size_t k = 0; k < trend.size(); ++k) {
        const double output = controller.step(trend.setpoint[k], value);
        c.limited = c.limited || (controller.flags() & (run::flag_limited_low | run::flag_limited_high)) != 0;
        c.different += !same_bits(trend.process_value[k], value) || !same_bits(trend.output[k], output) ||
                       !same_bits(trend.measured[k], value) || !same_bits(trend.valve_position[k], output);
        value = block.step(output + trend.load[k], line.data());
    }
    c.different += trend.limited != c.limited || trend.size() != scans_of(duty, horizon);
    return c;
}

}  // namespace

TEST_CASE("Many loops give the bits of each loop run alone", "[invariant]") {
    const std::uint64_t seed = 20261201;
    INFO("seed " << seed);
    Seeded d(seed);
    Comparison c;
    const std::size_t counts[] = {1, 31, 32, 33, 70, 513, 5};
    for (int round = 0; round < 14; ++round) {
        const double h = d.scaled(0.1, 2.0);
        Duty duty{.setpoint_step = d.uniform(-20.0, 20.0), .scan_time = h};
        if (d.below(2)) duty.load_step = 10.0, duty.load_time = 37.3 * h;
        if (d.below(2)) duty.noise = 0.3, duty.seed = 77;
        if (d.below(3) == 0) duty.setpoint_ramp_time = 21.0 * h;
        if (d.below(3) == 0) duty.output_rate_limit = 1.0;
        if (d.below(2)) duty.disturbance = {1.0, 2.0, -3.0, 1e-205, 4.0};
        if (d.below(3) == 0) duty.output_low = -20.0, duty.rest_output = 0.0, duty.rest_process_value = d.below(2) ? 0.0 : -0.0;
        const std::vector<LoopToSimulate> loops = random_loops(d, h, counts[round % 7], round % 3 == 0);
        compare(c, loops, duty, h * (2.0 + d.below(2) * 150.0 + d.below(100)));
    }
    INFO(c.first_difference);
    CHECK(c.different == 0);
    CHECK(c.limited > 100);   // the draw reaches what it is meant to reach
    CHECK(c.ran_away > 20);
}

TEST_CASE("Numbers below 1e-200 are flushed alike, side by side and alone", "[invariant]") {
    std::vector<LoopToSimulate> loops;
    for (double gain : {1.0, 1e-30, 1e-60})
        for (double Kc : {1e-50, 1e-5, 1.0, 1e30, 1e70})
            for (double Ti : {0.0, 1e-3, 1e3, 1e50})
                for (int form : {0, 1, 2}) {
                    const TransferFunction G = form == 0   ? integrating_plus_dead_time(gain, 2.0)
                                               : form == 1 ? first_order_plus_dead_time(gain, 0.05, 1.0)
                                                           : first_order_plus_dead_time(gain, 5.0, 0.0);
                    PidSettings s{.gain = Kc, .integral_time = Ti};
                    if (Ti == 0.0) s.integral_time.reset();
                    if (Ti == 1e3) s.measurement_filter_time = 0.5, s.derivative_time = 1.0, s.filter_time = 0.2;
                    loops.push_back({G, s});
                }
    for (double pulse : {1e-60, 1e-150, 1e-190, 1e-199, 3e-200}) {
        const Duty duty{.scan_time = 1.0, .output_low = -100.0, .rest_output = 0.0, .rest_process_value = 0.0, .disturbance = {0.0, pulse}};
        Comparison c;
        compare(c, loops, duty, 60.0);
        INFO("pulse " << text_of(pulse) << ", " << c.first_difference);
        CHECK(c.different == 0);
        std::size_t different = 0;
        for (const LoopToSimulate& loop : loops) different += compare_with_blocks(loop.process, loop.settings, duty, 60.0).different;
        CHECK(different == 0);
    }
}

TEST_CASE("One loop gives the bits of the blocks it stands for", "[invariant]") {
    // First-order loops run by a recursion of their own in `simulate`; here the public blocks, scan by scan.
    const std::uint64_t seed = 77001;
    INFO("seed " << seed);
    Seeded d(seed);
    std::size_t different = 0, limited = 0;
    for (int i = 0; i < 400; ++i) {
        const double h = d.scaled(0.1, 2.0);
        const TransferFunction G = process(d, h, true);
        const PidSettings s = settings(d, G.gain());
        Duty duty{.setpoint_step = d.uniform(-20.0, 20.0), .load_step = 10.0, .load_time = 31.0 * h, .scan_time = h};
        if (d.chance(0.5)) duty.output_low = 0.0, duty.rest_output = d.chance(0.5) ? 0.0 : 100.0, duty.rest_process_value = d.chance(0.5) ? 0.0 : -0.0;
        const BlockComparison c = compare_with_blocks(G, s, duty, 200.0 * h);
        different += c.different;
        limited += c.limited;
    }
    CHECK(different == 0);
    CHECK((limited > 50 && limited < 350));
}

TEST_CASE("What only one loop at a time can do is done so", "[invariant]") {
    Seeded d(3);
    const double h = 0.5;
    Duty valve{.setpoint_step = 5.0, .scan_time = h}, transmitter = valve, ramp = valve;
    valve.valve.stick = 0.5;
    transmitter.transmitter = {.lag = 1.0, .resolution = 0.1};
    ramp.load_step = 5.0;
    ramp.load_ramp_time = 10.0;
    for (const Duty& duty : {valve, transmitter, ramp}) {
        Comparison c;
        compare(c, random_loops(d, h, 20, true), duty, 60.0);
        INFO(c.first_difference);
        CHECK(c.different == 0);
    }
}

TEST_CASE("A step of the output reaches first-order processes after their dead times", "[closed form]") {
    // Proportional action alone on a set point it sees in full, measurement filtered away: the output makes one step.
    const Duty duty{.setpoint_step = 10.0, .scan_time = 0.5, .rest_output = 20.0};
    std::vector<LoopToSimulate> loops;
    for (double theta : {0.0, 0.2, 3.0, 7.7})
        loops.push_back({first_order_plus_dead_time(2.0, 8.0, theta), {.gain = 0.5, .measurement_filter_time = 1e12}});
    const Many m = run_all(loops, duty, 60.0);
    REQUIRE(m.scans == 121);
    for (std::size_t k = 0; k < m.scans; ++k)
        for (std::size_t i = 0; i < loops.size(); ++i) {
            const double t = 0.5 * static_cast<double>(k) - loops[i].process.dead_time();
            const double expected = t > 0.0 ? 50.0 - 2.0 * 5.0 * std::expm1(-t / 8.0) : 50.0;
            CHECK(std::abs(m.process_value[k * loops.size() + i] - expected) <= 1e-8);
            CHECK(std::abs(m.output[k * loops.size() + i] - 25.0) <= 1e-8);
        }
}

TEST_CASE("Bad input to many loops", "[invariant]") {
    const Duty duty{.setpoint_step = 1.0, .scan_time = 1.0};
    const LoopToSimulate good{first_order_plus_dead_time(1.0, 5.0, 1.0), {.gain = 1.0, .integral_time = 5.0}};
    CHECK(scans_of(duty, 10.0) == 11);
    CHECK(scans_of(duty, 10.0) == simulate(good.process, good.settings, duty, 10.0).size());
    check_refused(error_code::missing_argument, {"duty.scan_time"}, [&] { scans_of({}, 10.0); });
    check_refused(error_code::out_of_domain, {"horizon"}, [&] { scans_of(duty, 1.0); });
    check_refused(error_code::not_finite, {"horizon"}, [&] { scans_of(duty, std::numeric_limits<double>::quiet_NaN()); });

    std::vector<LoopToSimulate> loops(3, good);
    std::vector<double> a(33), b(33), short_by_one(32), long_by_one(34);
    simulate_many(loops, duty, 10.0, a, b);
    check_refused(error_code::buffer_too_small, {"process_value has room for 32 values; give 33"}, [&] { simulate_many(loops, duty, 10.0, short_by_one, b); });
    check_refused(error_code::out_of_domain, {"output has room for 34 values; give 33"}, [&] { simulate_many(loops, duty, 10.0, a, long_by_one); });
    check_refused(error_code::buffer_too_small, {"output"}, [&] { simulate_many(loops, duty, 10.0, a, {}); });
    simulate_many({}, duty, 10.0, {}, {});

    loops[1].settings.gain = std::numeric_limits<double>::infinity();
    check_refused(error_code::not_finite, {"loops[1]: "}, [&] { simulate_many(loops, duty, 10.0, a, b); });
    loops[1] = {TransferFunction::from_factors({.leads = {1.0}}), good.settings};
    check_refused(error_code::out_of_domain, {"loops[1]: process relative degree"}, [&] { simulate_many(loops, duty, 10.0, a, b); });
    loops[1] = {first_order_plus_dead_time(1.0, 5.0, 1e8), good.settings};
    check_refused(error_code::out_of_domain, {"loops[1]: dead_time"}, [&] { simulate_many(loops, duty, 10.0, a, b); });
}
