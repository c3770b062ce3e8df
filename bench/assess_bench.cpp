// Full margins of typical loops, yardstick: one complex exponential and division.
#include <benchmark/benchmark.h>

#include <complex>

#include "tauwright/assess/assess.hpp"
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

static void trend_of_600_scans(benchmark::State& state) {
    const TransferFunction process = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const PidSettings settings{.gain = 0.8, .integral_time = 10.0};
    for (auto _ : state)
        benchmark::DoNotOptimize(simulate(process, settings, {.setpoint_step = 2.0, .scan_time = 0.5}, 300.0));
}
BENCHMARK(trend_of_600_scans)->Unit(benchmark::kMicrosecond);

BENCHMARK_MAIN();
