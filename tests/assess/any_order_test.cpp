// Closed loops with processes beyond the process block, against SciPy.
#include <algorithm>
#include <optional>
#include <vector>

#include "assess/any_order_data.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::absolute_error;

namespace {

struct Loop {
    TransferFunction process;
    PidSettings settings;
    Duty duty;
    int scans;
};

// The loops of make_any_order_data.py.
std::vector<Loop> loops() {
    std::vector<Loop> all;
    const auto add = [&](Factors process, PidSettings settings, int scans, double h, auto change) {
        Duty duty{.setpoint_step = 5.0, .load_step = -8.0, .load_time = 60.0, .scan_time = h};
        change(duty);
        all.push_back({TransferFunction::from_factors(std::move(process)), settings, duty, scans});
    };
    add({.gain = 1.3, .leads = {1.5}, .lags = {6.0, 4.0, 3.0, 2.0, 1.0}, .dead_time = 2.3}, {.gain = 0.6, .integral_time = 9.0}, 320, 0.5, [](Duty&) {});
    add({.gain = 0.9, .leads = {-2.0}, .lags = {5.0, 3.0}, .dead_time = 1.0},
        {.gain = 0.8, .integral_time = 7.0, .derivative_time = 1.5, .filter_time = 0.3, .setpoint_weight = 0.6}, 640, 0.25,
        [](Duty& d) { d.output_rate_limit = 0.4; });
    add({.gain = 0.04, .integrators = 1, .lag_pairs = {{.time_constant = 1.5, .damping = 0.4}}}, {.gain = 1.1, .integral_time = 60.0}, 400, 0.5, [](Duty& d) {
        d.transmitter.lag = 2.0;
        d.setpoint_ramp_time = 20.0;
        d.load_ramp_time = 30.0;
        d.load_step = 3.0;
    });
    add({.gain = 0.7, .leads = {3.0}, .lags = {8.0}, .dead_time = 0.7}, {.gain = 0.5, .integral_time = 8.0}, 320, 0.5, [](Duty& d) { d.load_ramp_time = 12.0; });
    add({.gain = 2.0, .lags = {10.0}, .dead_time = 3.1}, {.gain = 0.5, .integral_time = 10.0}, 320, 0.5, [](Duty& d) {
        d.transmitter.lag = 3.0;
        d.setpoint_ramp_time = 4.0;
        d.load_ramp_time = 7.5;
    });
    return all;
}

}  // namespace

TEST_CASE("loops of any order, with lag, ramps and rate limit, agree with SciPy", "[independent computation]") {
    std::vector<Trend> trends;
    for (const Loop& loop : loops()) trends.push_back(simulate(loop.process, loop.settings, loop.duty, (loop.scans - 1) * *loop.duty.scan_time));
    std::size_t seen = 0;
    for (const auto& sample : any_order::samples) {
        const Trend& trend = trends.at(static_cast<std::size_t>(sample.loop));
        const auto k = static_cast<std::size_t>(sample.scan);
        REQUIRE(k < trend.size());
        INFO("loop " << sample.loop << " scan " << sample.scan);
        CHECK(absolute_error(trend.process_value[k], sample.process_value) <= 1e-11);
        CHECK(absolute_error(trend.measured[k], sample.measured) <= 1e-11);
        CHECK(absolute_error(trend.output[k], sample.output) <= 1e-11);
        ++seen;
    }
    CHECK(seen > 200);
    CHECK(trends.size() == 5);
}

TEST_CASE("a form the block takes runs alike through the recursion of any order", "[invariant]") {
    // A lead and a lag that cancel change nothing but the way the process is run.
    for (double h : {0.1, 0.7, 3.0}) {
        const Duty duty{.setpoint_step = 5.0, .load_step = 3.0, .load_time = 30.0 * h, .noise = 0.1, .seed = 3, .scan_time = h};
        const PidSettings settings{.gain = 0.5, .integral_time = 12.0};
        const Trend block = simulate(second_order_plus_dead_time(1.2, 10.0, 4.0, 2.35), settings, duty, 100.0 * h);
        const auto same = TransferFunction::from_factors({.gain = 1.2, .leads = {5.0}, .lags = {10.0, 4.0, 5.0}, .dead_time = 2.35});
        const Trend any = simulate(same, settings, duty, 100.0 * h);
        double worst = 0.0;
        for (std::size_t k = 0; k < block.size(); ++k)
            worst = std::max({worst, std::abs(block.process_value[k] - any.process_value[k]), std::abs(block.output[k] - any.output[k])});
        CHECK(absolute_error(worst, 0.0) <= 1e-11);
    }
}

TEST_CASE("gain alone, and order 20, run", "[closed form]") {
    // A process that is a gain K under integral action alone: y[k+1] = K u[k], error shrinks by 1 - K ki h a scan.
    const Duty duty{.setpoint_step = 10.0, .scan_time = 1.0};
    const Trend t = simulate(TransferFunction::from_factors({.gain = 0.8}), {.integral_gain = 0.25}, duty, 50.0);
    for (std::size_t k = 0; k < t.size(); ++k)
        CHECK(absolute_error(t.setpoint[k] - t.process_value[k], 10.0 * std::pow(1.0 - 0.8 * 0.25, static_cast<double>(k))) <= 1e-12);
    // Twenty lags of 0.5 s answer a load ramp of slope 1 with t - 10 after a long time (open loop: a gain of nearly 0).
    const Duty ramp{.load_step = 400.0, .scan_time = 0.5, .load_ramp_time = 400.0};
    const Trend r = simulate(TransferFunction::from_factors({.lags = std::vector<double>(19, 0.5)}), {.gain = 1e-14}, ramp, 100.0);
    CHECK(absolute_error(r.process_value.back() - 50.0, 100.0 - 9.5) <= 1e-8);
}
