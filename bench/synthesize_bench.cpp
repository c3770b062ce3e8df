#include <benchmark/benchmark.h>

#include "tauwright/model/forms.hpp"
#include "tauwright/synthesize/synthesize.hpp"

using namespace tauwright;

static void default_response_first_order(benchmark::State& state) {
    const TransferFunction process = first_order_plus_dead_time(2.0, 10.0, 3.0);
    for (auto _ : state) benchmark::DoNotOptimize(synthesize(process, {.time_constant = 5.0}));
}
BENCHMARK(default_response_first_order)->Unit(benchmark::kMicrosecond);

BENCHMARK_MAIN();
