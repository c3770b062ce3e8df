// The exact controller on a process that is not its model, against make_two_delay_loops.py, which says how.
#include "assess/certified_comparison.hpp"
#include "assess/two_delay_loops_data.hpp"

using namespace tauwright;
using oracle::TwoDelayLoop;

namespace {

void compare_dead_times(const TwoDelayLoop& loop, const Robustness& r, const oracle::Reading& reading) {
    const double limit = 20.0 * loop.process.dead_time;
    std::vector<DelayRange> found;
    for (const DelayRange& range : r.stable_dead_times)
        if (range.low < limit * (1.0 - 1e-9)) found.push_back(range);
    CHECK(found.size() == loop.stable_dead_times.size());
    if (found.size() != loop.stable_dead_times.size()) return;
    auto it = found.begin();
    for (const auto& expected : loop.stable_dead_times) {
        INFO("stable dead times " << text_of(it->low) << " to " << text_of(it->high) << ", expected " << text_of(expected.low) << " to " << text_of(expected.high));
        CHECK(oracle::difference(it->low, expected.low) <= reading.allowed);
        CHECK((expected.high == limit ? it->high >= limit * (1.0 - 1e-12) : oracle::difference(it->high, expected.high) <= reading.allowed));
        ++it;
    }
}

}  // namespace

TEST_CASE("two dead times: no verdict wrong, no crossing missed or invented, every figure to its digits", "[independent computation]") {
    oracle::Families families;
    int place = 0, unstable_controllers = 0, infinitely_many = 0;
    for (const TwoDelayLoop& loop : oracle::two_delay_loops) {
        const InternalModelController controller(oracle::transfer_function_of(loop.filter), oracle::transfer_function_of(loop.response));
        const auto G = oracle::transfer_function_of(loop.process);
        INFO(loop.family << ", row " << place++ << ": " << controller.text() << " on " << G.text() << ", smallest |1 + L| " << text_of(loop.closest)
                         << ", controller's unstable poles " << loop.unstable_controller_poles);
        const Robustness r = robustness(G, controller);
        if (loop.unstable_poles < 0) {
            CHECK(std::string(name_of(r.verdict)) == "unstable");
            CHECK_FALSE(r.unstable_poles.has_value());
            CHECK(r.stable_dead_times.empty());
            ++infinitely_many;
            continue;
        }
        unstable_controllers += loop.unstable_controller_poles > 0;
        const bool fragile = loop.stable_dead_times.size() == 1 && loop.stable_dead_times.begin()->low == loop.stable_dead_times.begin()->high;
        const oracle::Reading reading{.allowed = 1e-10, .listed_factor = 99.0, .gain_crossings = !fragile};
        oracle::compare(loop, loop.complete_to, r, reading, families);
        CHECK(r.fragile == fragile);
        if (!fragile) compare_dead_times(loop, r, reading);
        if (loop.unstable_poles > 0 || r.verdict != Verdict::stable) continue;
        const double down = loop.margins.begin()[4];
        CHECK(oracle::difference(r.delay_reduction_margin.value(), down) <= 1e-9);
    }
    CHECK(place == 200);
    CHECK(unstable_controllers >= 20);
    CHECK(infinitely_many >= 3);
    INFO(oracle::table_of(families));
    SUCCEED();
}
