// Every figure of `robustness` against loops analyzed at 50 digits without the library; make_certified_loops.py says how.
#include "assess/certified_comparison.hpp"
#include "assess/certified_loops_data.hpp"

using namespace tauwright;
using oracle::CertifiedLoop;

TEST_CASE("certified loops: no verdict wrong, no crossing missed or invented, every figure to its digits", "[independent computation]") {
    oracle::Families families;
    int place = 0;
    for (const CertifiedLoop& loop : oracle::certified_loops) {
        const auto L = oracle::transfer_function_of(loop.loop);
        INFO(loop.family << ", row " << place++ << ": " << L.text() << ", smallest |1 + L| " << text_of(loop.closest));
        oracle::compare(loop, loop.complete_to, robustness(L), {}, families);
    }
    CHECK(place >= 520);
    for (const auto& [family, errors] : families) CHECK(errors.count("gain crossover") + errors.count("Ms frequency") == 2);  // every family was compared
    INFO(oracle::table_of(families));
    SUCCEED();
}

TEST_CASE("closed-loop poles on the axis are marginal, with others to the right unstable", "[closed form]") {
    const double quarter = std::acos(0.0);
    // By Routh's criterion or by hand. 64/(s+1)^12 is -1 at s = j, and beyond -1 (-64 cos(pi/12)^12 = -42) at j tan(pi/12).
    const struct { const char* verdict; Factors loop; } rows[] = {
        {"marginal", {.gain = 8.0, .lags = {1.0, 1.0, 1.0}}},
        {"marginal", {.gain = 3.0, .integrators = 1, .lags = {1.0, 0.5}}},
        {"marginal", {.gain = 4.0, .lags = {2.0, 2.0, 2.0, 2.0}}},
        {"marginal", {.gain = 2.0, .integrators = 2}},
        {"marginal", {.gain = 0.5, .integrators = 3, .leads = {1.0, 1.0}}},
        {"marginal", {.gain = -1.0, .lags = {5.0, 2.0}}},
        {"marginal", {.gain = -1.0, .lags = {-1.0}}},
        {"marginal", {.gain = 2.0, .leads = {-1.0}, .lags = {1.0, 1.0}}},
        {"marginal", {.gain = -1.0, .lags = {3.0}, .dead_time = 1.5}},
        {"marginal", {.gain = quarter, .integrators = 1, .dead_time = 1.0}},
        {"unstable", {.gain = 64.0, .lags = std::vector<double>(12, 1.0)}},
        {"unstable", {.gain = 5.0 * quarter, .integrators = 1, .dead_time = 1.0}},
    };
    for (const auto& row : rows) {
        const auto L = TransferFunction::from_factors(row.loop);
        INFO(L.text());
        const Robustness r = robustness(L);
        CHECK(std::string(name_of(r.verdict)) == row.verdict);
        CHECK(r.stable == std::optional<bool>(false));
        CHECK_FALSE(r.gain_margin.has_value());
        CHECK_FALSE(r.max_sensitivity.has_value());
    }
}
