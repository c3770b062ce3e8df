// The delay margin of the sampled loop: stable with a little less, unstable with a little more, stable all the way there.
#include <random>

#include "catch_compat.hpp"
#include "tauwright/assess/robustness.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;

TEST_CASE("a sampled loop bears its delay margin and no more, fractions of a scan included", "[invariant]") {
    const unsigned seed = 20261201;
    std::mt19937_64 generator(seed);
    const auto between = [&](double low, double high) { return low + (high - low) * static_cast<double>(generator() >> 11) * 0x1p-53; };
    int looked_at = 0;
    for (int i = 0; i < 120; ++i) {
        const double lag = between(1.0, 50.0), dead_time = lag * std::pow(10.0, between(-1.3, 0.5));
        const double scan = dead_time * std::pow(10.0, between(-1.0, 0.5));
        const TransferFunction process = first_order_plus_dead_time(1.0, lag, dead_time);
        const PidSettings settings{.gain = lag / (dead_time * between(1.2, 4.0)), .integral_time = lag * between(0.5, 2.0)};
        const Robustness r = robustness(process, settings, {.scan_time = scan});
        if (r.verdict != Verdict::stable || !is_finite(*r.delay_margin)) continue;
        ++looked_at;
        INFO("seed " << seed << ", loop " << i << ": lag " << lag << ", dead time " << dead_time << ", scan " << scan << ", margin " << *r.delay_margin);
        const auto verdict = [&](double share) { return robustness(process, settings, {.scan_time = scan, .extra_delay = share * *r.delay_margin}).verdict; };
        CHECK(verdict(1.0 + 1e-6) == Verdict::unstable);
        for (double share : {0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.99, 1.0 - 1e-6}) CHECK(verdict(share) == Verdict::stable);
    }
    CHECK(looked_at > 100);
}
