// Fits; the rival, scipy.optimize.curve_fit, runs beside them in compare_with_scipy.py.
#include <benchmark/benchmark.h>

#include "bench_record.hpp"
#include "tauwright/identify/identify.hpp"

using namespace tauwright;

static void first_order(benchmark::State& state) {
    const Record record(bench_columns(static_cast<std::size_t>(state.range(0))));
    for (auto _ : state) benchmark::DoNotOptimize(identify(record, {.form = Form::first_order_plus_dead_time}));
}
BENCHMARK(first_order)->Arg(1000)->Arg(100000)->Unit(benchmark::kMicrosecond);

static void form_chosen_by_the_record(benchmark::State& state) {
    const Record record(bench_columns(static_cast<std::size_t>(state.range(0))));
    for (auto _ : state) benchmark::DoNotOptimize(identify(record));
}
BENCHMARK(form_chosen_by_the_record)->Arg(1000)->Arg(100000)->Unit(benchmark::kMicrosecond);

BENCHMARK_MAIN();
