// Full margins of typical and of nasty loops, yardstick: one complex exponential and division.
#include <benchmark/benchmark.h>

#include <algorithm>
#include <chrono>
#include <complex>

#include "timed_loops.hpp"
#include "tauwright/assess/assess.hpp"
#include "tauwright/assess/worst_case.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;

static void complex_exponential_and_division(benchmark::State& state) {
    std::complex<double> s{0.0, 0.3};
    for (auto _ : state) {
        benchmark::DoNotOptimize(s);
        benchmark::DoNotOptimize(std::exp(-s) / (10.0 * s + 1.0));
    }
}
BENCHMARK(complex_exponential_and_division);

static void margins(benchmark::State& state) {
    const double tau_c = static_cast<double>(state.range(0));  // 3: the common rule with Mt exactly 1
    const TransferFunction process = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const PidSettings settings{.gain = 10.0 / (2.0 * (tau_c + 3.0)), .integral_time = 10.0};
    for (auto _ : state) benchmark::DoNotOptimize(robustness(process, settings));
}
BENCHMARK(margins)->Arg(1)->Arg(3)->Arg(6)->Unit(benchmark::kMicrosecond);

// One loop after another, each timed alone (the best of five): median, 99th percentile and worst in us.
template <class Loops, class Analysis>
static void spread(benchmark::State& state, const Loops& loops, Analysis analyze) {
    std::vector<double> best_us(loops.size(), 1e300);
    for (auto _ : state)
        for (std::size_t i = 0; i < loops.size(); ++i)
            for (int round = 0; round < 5; ++round) {
                const auto began = std::chrono::steady_clock::now();
                benchmark::DoNotOptimize(analyze(loops[i]));
                best_us[i] = std::min(best_us[i], std::chrono::duration<double>(std::chrono::steady_clock::now() - began).count() * 1e6);
            }
    std::sort(best_us.begin(), best_us.end());
    state.counters["median_us"] = best_us[best_us.size() / 2];
    state.counters["p99_us"] = best_us[best_us.size() * 99 / 100];
    state.counters["worst_us"] = best_us.back();
}

static void margins_of_typical_loops(benchmark::State& state) {
    spread(state, bench::typical_loops(), [](const bench::Loop& l) { return robustness(l.process, l.settings); });
}
BENCHMARK(margins_of_typical_loops)->Unit(benchmark::kMicrosecond);

static void margins_of_typical_loops_sampled(benchmark::State& state) {
    spread(state, bench::typical_loops(), [](const bench::Loop& l) { return robustness(l.process, l.settings, {.scan_time = 0.1 * l.process.dead_time()}); });
}
BENCHMARK(margins_of_typical_loops_sampled)->Unit(benchmark::kMicrosecond);

static void margins_of_nasty_loops(benchmark::State& state) {
    spread(state, bench::nasty_loops(), [](const TransferFunction& l) { return robustness(l); });
}
BENCHMARK(margins_of_nasty_loops)->Unit(benchmark::kMicrosecond);

static void trend_of_600_scans(benchmark::State& state) {
    const TransferFunction process = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const PidSettings settings{.gain = 0.8, .integral_time = 10.0};
    for (auto _ : state)
        benchmark::DoNotOptimize(simulate(process, settings, {.setpoint_step = 2.0, .scan_time = 0.5}, 300.0));
}
BENCHMARK(trend_of_600_scans)->Unit(benchmark::kMicrosecond);

// 10,000 first-order loops with their own parameters and dead times, 600 scans, both tables written.
static void trends_of_many_loops(benchmark::State& state) {
    std::vector<LoopToSimulate> loops;
    for (int i = 0; i < 10000; ++i) {
        const double gain = 0.5 + 0.025 * (i % 100), lag = 5.0 + 0.35 * (i / 100), dead_time = 0.2 * (i % 97) + 0.01 * (i % 89);
        loops.push_back({first_order_plus_dead_time(gain, lag, dead_time), {.gain = lag / (2.0 * gain * (dead_time + 1.0)), .integral_time = lag}});
    }
    const Duty duty{.setpoint_step = 30.0, .load_step = 10.0, .load_time = 150.0, .scan_time = 0.5};
    const std::size_t scans = scans_of(duty, 299.5);
    std::vector<double> process_value(scans * loops.size()), output(process_value);
    double best_s = 1e300;
    for (auto _ : state) {
        const auto began = std::chrono::steady_clock::now();
        simulate_many(loops, duty, 299.5, process_value, output);
        best_s = std::min(best_s, std::chrono::duration<double>(std::chrono::steady_clock::now() - began).count());
    }
    state.counters["ns_per_loop_and_scan"] = best_s * 1e9 / static_cast<double>(process_value.size());
}
BENCHMARK(trends_of_many_loops)->Unit(benchmark::kMillisecond);

// Worst cases: a box of +-30 % around first order, five operating points, a lightly damped plant.
static void worst_of_a_box(benchmark::State& state) {
    const TransferFunction process = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const PidSettings settings{.gain = 10.0 / 18.0, .integral_time = 10.0};
    const Uncertainty box = Uncertainty::box({.gain = 0.3, .lags = 0.3, .dead_time = 0.3});
    for (auto _ : state) benchmark::DoNotOptimize(worst_case(process, settings, box, {.tolerance = 1e-3}));
}
BENCHMARK(worst_of_a_box)->Unit(benchmark::kMicrosecond);

static void worst_of_five_models(benchmark::State& state) {
    std::vector<TransferFunction> models;
    for (double k : {0.6, 1.0, 1.4, 1.8, 2.2}) models.push_back(first_order_plus_dead_time(k, 10.0, 3.0));
    const PidSettings settings{.gain = 10.0 / 18.0, .integral_time = 10.0};
    const Uncertainty list = Uncertainty::of_models(models);
    for (auto _ : state) benchmark::DoNotOptimize(worst_case(models[0], settings, list));
}
BENCHMARK(worst_of_five_models)->Unit(benchmark::kMicrosecond);

static void worst_of_a_lightly_damped_box(benchmark::State& state) {
    const TransferFunction process = oscillatory_plus_dead_time(1.0, 5.0, 0.05, 2.0);
    const PidSettings settings{.gain = 0.02, .integral_time = 5.0};
    const Uncertainty box = Uncertainty::box({.gain = 0.3, .lags = 0.3, .damping = 0.3, .dead_time = 0.3});
    for (auto _ : state) benchmark::DoNotOptimize(worst_case(process, settings, box));
}
BENCHMARK(worst_of_a_lightly_damped_box)->Unit(benchmark::kMicrosecond);

BENCHMARK_MAIN();
