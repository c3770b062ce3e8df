// One scan of the PID block. Rival: a floating-point addition that waits for the one before.
#include <benchmark/benchmark.h>

#include "tauwright/discretize/discretize.hpp"
#include "tauwright/model/forms.hpp"
#include "tauwright/run/run.hpp"

using namespace tauwright;

static const PidSettings settings{.gain = 1.2, .integral_time = 10.0, .derivative_time = 2.0, .filter_time = 0.3,
                                  .measurement_filter_time = 0.5};

static void dependent_addition(benchmark::State& state) {
    double x = 1.0;
    const double y = 1e-9;
    for (auto _ : state) {
        for (int i = 0; i < 1000; ++i) {
            x += y;
            asm volatile("" : "+x"(x));  // keeps the chain as it is
        }
    }
    benchmark::DoNotOptimize(x);
    state.SetItemsProcessed(state.iterations() * 1000);
}
BENCHMARK(dependent_addition);

// The output feeds back into the next process value, so that scans cannot overlap.
static void pid_step_fed_back(benchmark::State& state) {
    run::PidBlock block(discretize(settings, 0.1), 0.0, 100.0, 50.0);
    double value = 50.0;
    for (auto _ : state) {
        for (int i = 0; i < 1000; ++i) value = 45.0 + 0.1 * block.step(50.0, value);
    }
    benchmark::DoNotOptimize(value);
    state.SetItemsProcessed(state.iterations() * 1000);
}
BENCHMARK(pid_step_fed_back);

// The same with every input decayed to nothing: denormal numbers must not slow it down.
static void pid_step_decayed(benchmark::State& state) {
    run::PidBlock block(discretize(settings, 0.1), -100.0, 100.0, 0.0);
    double value = 1e-310;
    for (auto _ : state) {
        for (int i = 0; i < 1000; ++i) value = 1e-310 + 0.1 * block.step(1e-312, value);
    }
    benchmark::DoNotOptimize(value);
    state.SetItemsProcessed(state.iterations() * 1000);
}
BENCHMARK(pid_step_decayed);

static void closed_loop_scan(benchmark::State& state) {
    run::PidBlock block(discretize(settings, 0.1), 0.0, 100.0, 50.0);
    run::ProcessBlock plant(discretize(first_order_plus_dead_time(1.0, 10.0, 2.05), 0.1), 50.0, 50.0);
    double line[64];
    if (plant.start(line, 64) != error_code::ok) state.SkipWithError("delay line too short");
    double value = 50.0;
    for (auto _ : state) {
        for (int i = 0; i < 1000; ++i) value = plant.step(block.step(52.0, value), line);
    }
    benchmark::DoNotOptimize(value);
    state.SetItemsProcessed(state.iterations() * 1000);
}
BENCHMARK(closed_loop_scan);

BENCHMARK_MAIN();
