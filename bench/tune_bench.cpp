// The whole street from arrays to sheet.
#include <benchmark/benchmark.h>

#include <cstdint>
#include <string>
#include <vector>

#include "bench_record.hpp"
#include "tauwright/tune/audit.hpp"
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

// Margins and a 600-scan trend of both sides of every loop, proposals made on the way; loops of four kinds.
static std::vector<AuditLoop> loops_in_service(std::size_t n) {
    std::vector<AuditLoop> loops(n);
    for (std::size_t i = 0; i < n; ++i) {
        const double x = static_cast<double>(i % 997) / 997.0;
        Factors f{.gain = 0.5 + x, .dead_time = 2.0 + 8.0 * x};
        if (i % 4 == 0) f = {.gain = 0.01 + 0.02 * x, .integrators = 1, .dead_time = 2.0 + 4.0 * x};
        if (i % 4 > 0) f.lags.push_back(10.0 + 40.0 * x);
        if (i % 4 == 3) f.lags.push_back(4.0 + 6.0 * x);
        AuditLoop& loop = loops[i];
        loop.name = "loop " + std::to_string(i);
        loop.process = TransferFunction::from_factors(f);
        loop.form = ControllerForm{.gain_as = GainAs::proportional_band, .integral_as = IntegralAs::repeats,
                                   .integral_unit = TimeUnit::minutes, .gain_resolution = 1.0, .integral_resolution = 0.01};
        loop.entered = Entered{.proportional_band = i % 4 == 0 ? 50.0 : 120.0, .repeats = i % 4 == 0 ? 0.5 : 2.0};
        loop.duty = {.setpoint_step = 4.0, .load_step = 4.0, .load_time = 150.0, .scan_time = 0.5};
        loop.horizon = 300.0;
    }
    return loops;
}

static void audit_of_loops(benchmark::State& state) {
    const std::vector<AuditLoop> loops = loops_in_service(10000);
    const AuditOptions options{.threads = static_cast<unsigned>(state.range(0))};
    for (auto _ : state) {
        std::size_t given = 0;
        const AuditSummary summary = audit(
            [&](AuditLoop& loop) {
                if (given == loops.size()) return false;
                loop = loops[given++];
                return true;
            },
            [](const AuditRow& row) { benchmark::DoNotOptimize(row.reason.data()); }, options);
        if (summary.failed > 0 || summary.rows != loops.size()) state.SkipWithError("a loop failed");
    }
    state.SetItemsProcessed(state.iterations() * static_cast<std::int64_t>(loops.size()));
}
BENCHMARK(audit_of_loops)->Arg(1)->Arg(2)->UseRealTime()->Unit(benchmark::kMillisecond);

BENCHMARK_MAIN();
