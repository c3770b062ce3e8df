// What the margins promise, tried: on their near side the loop is stable, on their far side it is not.
#include "assess/random_loops.hpp"
#include "tauwright/assess/robustness.hpp"

using namespace tauwright;
using oracle::BruteForce;

namespace {

constexpr std::uint64_t seed = 20240716;

}  // namespace

TEST_CASE("random loops: a thousandth less than a margin keeps a loop stable, a thousandth more does not", "[invariant]") {
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int flips = 0;
    for (int i = 0; i < 250; ++i) {
        const Factors f = oracle::ordinary_loop(random);
        const auto L = TransferFunction::from_factors(f);
        const Robustness r = robustness(L);
        if (r.verdict != Verdict::stable) continue;
        INFO("loop " << i << ": " << L.text());
        const auto check_flip = [&](const char* what, const TransferFunction& inside, const TransferFunction& outside) {
            INFO(what << ": " << inside.text() << " | " << outside.text());
            CHECK(std::string(name_of(robustness(inside).verdict)) == "stable");
            CHECK(std::string(name_of(robustness(outside).verdict)) == "unstable");
            if (flips % 4 == 0) {  // brute force agrees with both
                CHECK(BruteForce(inside.factors()).unstable_poles() == 0);
                CHECK(BruteForce(outside.factors()).unstable_poles() > 0);
            }
            ++flips;
        };
        const double GM = r.gain_margin.value(), GRM = r.gain_reduction_margin.value(), DM = r.delay_margin.value();
        if (GM < 1000.0) check_flip("gain margin", L.with_gain(f.gain * (1.0 + 0.999 * (GM - 1.0))), L.with_gain(f.gain * (1.0 + 1.001 * (GM - 1.0))));
        if (GRM > 1e-3) check_flip("gain reduction margin", L.with_gain(f.gain * (1.0 - 0.999 * (1.0 - GRM))), L.with_gain(f.gain * (1.0 - 1.001 * (1.0 - GRM))));
        if (DM < 1e4) check_flip("delay margin", L.with_dead_time(f.dead_time + 0.999 * DM), L.with_dead_time(f.dead_time + 1.001 * DM));
    }
    INFO(flips << " flips");
    CHECK(flips >= 100);
}
