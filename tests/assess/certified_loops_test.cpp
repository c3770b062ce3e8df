// Every figure of `robustness` against loops analyzed at 50 digits without the library; make_certified_loops.py says how.
#include <algorithm>
#include <map>
#include <vector>

#include "assess/certified_loops_data.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/assess/robustness.hpp"

using namespace tauwright;
using oracle::CertifiedCrossing;
using oracle::CertifiedLoop;

namespace {

constexpr double pi = 3.14159265358979323846;
/// What factors and a frequency rounded to doubles leave open, relative; the slopes of the curve enlarge it.
constexpr double rounding = 1e-15;

using Errors = std::map<std::string, double>;  ///< worst of each figure, for one family

Factors factors_of(const CertifiedLoop& loop) {
    Factors f{.gain = loop.gain, .integrators = loop.integrators, .zeros_at_origin = loop.zeros_at_origin, .dead_time = loop.dead_time};
    f.leads = loop.leads;
    f.lags = loop.lags;
    for (const auto& p : loop.lead_pairs) f.lead_pairs.push_back({p.time_constant, p.damping});
    for (const auto& p : loop.lag_pairs) f.lag_pairs.push_back({p.time_constant, p.damping});
    return f;
}

double difference(double x, double expected) {
    if (x == expected) return 0.0;
    return expected == 0.0 || !is_finite(expected) ? oracle::infinity : std::abs(x - expected) / std::abs(expected);
}

/// One loop against what the library says of it.
class Comparison {
public:
    Comparison(const CertifiedLoop& loop, Errors& errors)
        : loop_(loop), errors_(errors), result_(robustness(TransferFunction::from_factors(factors_of(loop)))),
          allowed_(loop.closest < 1e-3 ? 1e-10 : 1e-12) {}

    void run() {
        CHECK(std::string(name_of(result_.verdict)) == (loop_.unstable_poles == 0 ? "stable" : "unstable"));
        CHECK(result_.stable == std::optional<bool>(loop_.unstable_poles == 0));
        CHECK(result_.unstable_poles == std::optional<int>(loop_.unstable_poles));
        compare_gain_crossings();
        compare_phase_crossings();
        if (loop_.unstable_poles == 0 && result_.verdict == Verdict::stable) compare_margins();
    }

private:
    void hold(const char* what, double x, double expected, double allowed) { hold(what, difference(x, expected), x, expected, allowed); }
    void hold(const char* what, double error, double x, double expected, double allowed) {
        double& worst = errors_[what];
        worst = std::max(worst, error);
        INFO(what << ": " << text_of(x) << " for " << text_of(expected) << ", error " << text_of(error) << ", allowed " << text_of(allowed));
        CHECK(error <= allowed);
    }

    void compare_gain_crossings() {
        const auto& found = result_.gain_crossovers;
        CHECK(found.size() == loop_.gain_crossings.size());
        if (found.size() != loop_.gain_crossings.size()) return;
        auto it = found.begin();
        for (const CertifiedCrossing& c : loop_.gain_crossings) {
            const double blur = rounding / std::abs(c.gain_slope), turned = (blur + rounding) * std::abs(c.phase_slope);
            const double angle = it->phase_margin_deg * pi / 180.0, turn = c.value > 0.0 ? c.value : c.value + 2.0 * pi;
            hold("gain crossover", it->frequency_rad_s, c.frequency, allowed_ + blur);
            hold("angle from -1", std::abs(angle - std::abs(c.value)), angle, std::abs(c.value), allowed_ + turned);
            hold("delay margin of a crossover", it->delay_margin, turn / c.frequency, allowed_ + blur + turned / turn);
            if (loop_.margins.size() > 0 && difference(turn / c.frequency, loop_.margins.begin()[3]) < 1e-6) delay_blur_ = blur + turned / turn;
            phase_blur_ = std::max(phase_blur_, turned);
            ++it;
        }
    }

    // A crossing matters that is beyond -1, or as near to it as any other on its side.
    bool matters(const CertifiedCrossing& c) const {
        if (loop_.margins.size() > 0) return c.value < 1.0 || c.value <= loop_.margins.begin()[0];
        const auto nearer = [&](const CertifiedCrossing& other) { return other.value > 1.0 && other.value < c.value * (1.0 - 1e-9); };
        return c.value < 1.0 || std::none_of(loop_.phase_crossings.begin(), loop_.phase_crossings.end(), nearer);
    }

    void compare_phase_crossings() {
        const auto& found = result_.phase_crossovers;
        std::vector<bool> known(found.size(), false);
        for (const CertifiedCrossing& c : loop_.phase_crossings) {
            std::size_t nearest = 0;
            for (std::size_t i = 1; i < found.size(); ++i)
                if (std::abs(found[i].frequency_rad_s - c.frequency) < std::abs(found[nearest].frequency_rad_s - c.frequency)) nearest = i;
            if (found.empty() || difference(found[nearest].frequency_rad_s, c.frequency) > 1e-6 || known[nearest]) {
                INFO("phase crossover at " << text_of(c.frequency) << ", gain factor " << text_of(c.value));
                CHECK_FALSE(matters(c));
                continue;
            }
            known[nearest] = true;
            const double blur = rounding / std::abs(c.phase_slope);
            hold("phase crossover", found[nearest].frequency_rad_s, c.frequency, allowed_ + blur);
            hold("gain factor", found[nearest].gain_factor, c.value, allowed_ + (blur + rounding) * std::abs(c.gain_slope));
        }
        for (std::size_t i = 0; i < found.size(); ++i) {
            INFO("invented: phase crossover at " << text_of(found[i].frequency_rad_s) << ", gain factor " << text_of(found[i].gain_factor));
            CHECK((known[i] || found[i].gain_factor > 999.0 || found[i].frequency_rad_s > 0.99 * loop_.complete_to));
        }
    }

    void compare_margins() {
        const double *margins = loop_.margins.begin(), *peaks = loop_.peaks.begin(), blur = rounding / loop_.closest;
        const double angle = result_.phase_margin_deg.value();
        hold("gain margin", result_.gain_margin.value(), margins[0], allowed_);
        hold("gain reduction margin", result_.gain_reduction_margin.value(), margins[1], allowed_);
        hold("phase margin", angle == margins[2] ? 0.0 : std::abs(angle - margins[2]) * pi / 180.0, angle, margins[2], allowed_ + phase_blur_);
        hold("smallest delay margin", result_.delay_margin.value(), margins[3], allowed_ + delay_blur_);
        hold("Ms", result_.max_sensitivity.value(), peaks[0], allowed_ + blur);
        hold("Ms frequency", result_.max_sensitivity_frequency.value(), peaks[1], allowed_);
        hold("Mt", result_.max_complementary_sensitivity.value(), peaks[2], allowed_ + blur);
        hold("Mt frequency", result_.max_complementary_sensitivity_frequency.value(), peaks[3], allowed_);
    }

    const CertifiedLoop& loop_;
    Errors& errors_;
    Robustness result_;
    double allowed_, delay_blur_ = 0.0, phase_blur_ = 0.0;
};

}  // namespace

TEST_CASE("certified loops: no verdict wrong, no crossing missed or invented, every figure to its digits", "[independent computation]") {
    std::map<std::string, Errors> families;
    int place = 0;
    for (const CertifiedLoop& loop : oracle::certified_loops) {
        INFO(loop.family << ", row " << place++ << ": " << TransferFunction::from_factors(factors_of(loop)).text() << ", smallest |1 + L| " << text_of(loop.closest));
        Comparison(loop, families[loop.family]).run();
    }
    CHECK(place >= 520);
    std::string table = "worst errors\n";
    for (const auto& [family, errors] : families) {
        CHECK(errors.count("gain crossover") + errors.count("Ms frequency") == 2);  // every family was compared
        table += family + ":";
        for (const auto& [what, worst] : errors) table += " " + what + " " + text_of(worst) + ";";
        table += "\n";
    }
    INFO(table);
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
