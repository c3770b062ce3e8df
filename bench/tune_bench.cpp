// The whole street from arrays to sheet.
#include <benchmark/benchmark.h>

#include "bench_record.hpp"
#include "tauwright/tune/tune.hpp"

using namespace tauwright;

static void arrays_to_sheet(benchmark::State& state) {
    RecordColumns columns = bench_columns(static_cast<std::size_t>(state.range(0)));
    columns.output_range = Range{};
    columns.process_value_range = Range{.low = 0.0, .high = 120.0, .unit = "degC"};
    const TuningRequest request{.form = ControllerForm{.gain_resolution = 0.01, .integral_resolution = 0.1},
                                .duty = Duty{.setpoint_step = 4.0, .scan_time = 0.5},
                                .as_found = Entered{.gain = 1.0, .integral_time = 20.0}};
    for (auto _ : state) {
        const Record record(columns);
        benchmark::DoNotOptimize(tune(record, request).json());
    }
}
BENCHMARK(arrays_to_sheet)->Arg(1000)->Unit(benchmark::kMicrosecond);

BENCHMARK_MAIN();
