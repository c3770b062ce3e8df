// The loop as it runs, process held over each scan and the PID block, against make_sampled_loops.py, which says how.
#include "assess/certified_comparison.hpp"
#include "assess/sampled_loops_data.hpp"

using namespace tauwright;
using oracle::SampledLoop;

namespace {

PidSettings settings_of(const SampledLoop& loop) {
    const double* s = loop.settings.begin();
    PidSettings settings{.gain = s[0], .derivative_time = s[2], .filter_time = s[3], .measurement_filter_time = s[4]};
    if (s[1] > 0.0) settings.integral_time = s[1];
    return settings;
}

}  // namespace

TEST_CASE("sampled loops: no verdict wrong, no crossing missed or invented, every figure to its digits", "[independent computation]") {
    oracle::Families families;
    int place = 0;
    for (const SampledLoop& loop : oracle::sampled_loops) {
        const auto G = oracle::transfer_function_of(loop.process);
        INFO(loop.family << ", row " << place++ << ": " << G.text() << ", scan time " << text_of(loop.scan_time) << ", dead time " << text_of(loop.process.dead_time / loop.scan_time)
                         << " scans, smallest |1 + L| " << text_of(loop.closest));
        const Robustness r = robustness(G, settings_of(loop), {.scan_time = loop.scan_time, .extra_delay = loop.extra_delay});
        oracle::compare(loop, oracle::infinity, r, {.allowed = 1e-10, .delays = false}, families);
    }
    CHECK(place == 255);
    for (const auto& [family, errors] : families) CHECK(errors.count("gain crossover") + errors.count("Ms frequency") == 2);
    INFO(oracle::table_of(families));
    SUCCEED();
}
