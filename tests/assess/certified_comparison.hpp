// Every figure of `robustness` against a row of loops analyzed at 50 digits without the library.
#pragma once

#include <algorithm>
#include <map>
#include <vector>

#include "assess/certified_rows.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/assess/robustness.hpp"

namespace oracle {

constexpr double pi = 3.14159265358979323846;
/// What factors and a frequency rounded to doubles leave open, relative; the slopes of the curve enlarge it.
constexpr double rounding = 1e-15;

using Errors = std::map<std::string, double>;  ///< worst of each figure, for one family
using Families = std::map<std::string, Errors>;

inline tauwright::TransferFunction transfer_function_of(const CertifiedFactors& loop) {
    tauwright::Factors f{.gain = loop.gain, .integrators = loop.integrators, .zeros_at_origin = loop.zeros_at_origin, .dead_time = loop.dead_time};
    f.leads = loop.leads;
    f.lags = loop.lags;
    for (const auto& p : loop.lead_pairs) f.lead_pairs.push_back({p.time_constant, p.damping});
    for (const auto& p : loop.lag_pairs) f.lag_pairs.push_back({p.time_constant, p.damping});
    return tauwright::TransferFunction::from_factors(std::move(f));
}

inline double difference(double x, double expected) {
    if (x == expected) return 0.0;
    return expected == 0.0 || !tauwright::is_finite(expected) ? infinity : std::abs(x - expected) / std::abs(expected);
}

/// How a table is to be read.
struct Reading {
    double allowed = 1e-12;        ///< relative, where the curve keeps 1e-3 from -1; else a hundred times that
    double listed_factor = 999.0;  ///< phase crossovers with a gain factor beyond need not be in the table
    bool delays = true;            ///< delay margins are in the table
    bool gain_crossings = true;    ///< and so are all gain crossovers
};

/// One loop of a table against what the library says of it.
template <class Row>
class Comparison {
public:
    Comparison(const Row& row, double complete_to, const tauwright::Robustness& result, const Reading& reading, Errors& errors)
        : row_(row), complete_to_(complete_to), result_(result), reading_(reading), errors_(errors),
          allowed_(row.closest < 1e-3 ? 100.0 * reading.allowed : reading.allowed) {}

    void run() {
        CHECK(std::string(name_of(result_.verdict)) == (row_.unstable_poles == 0 ? "stable" : "unstable"));
        CHECK(result_.stable == std::optional<bool>(row_.unstable_poles == 0));
        CHECK(result_.unstable_poles == std::optional<int>(row_.unstable_poles));
        if (reading_.gain_crossings) compare_gain_crossings();
        compare_phase_crossings();
        if (row_.unstable_poles == 0 && result_.verdict == tauwright::Verdict::stable) compare_margins();
    }

private:
    void hold(const char* what, double x, double expected, double allowed) { hold(what, difference(x, expected), x, expected, allowed); }
    void hold(const char* what, double error, double x, double expected, double allowed) {
        double& worst = errors_[what];
        worst = std::max(worst, error);
        INFO(what << ": " << tauwright::text_of(x) << " for " << tauwright::text_of(expected) << ", error " << tauwright::text_of(error) << ", allowed " << tauwright::text_of(allowed));
        CHECK(error <= allowed);
    }

    void compare_gain_crossings() {
        const auto& found = result_.gain_crossovers;
        CHECK(found.size() == row_.gain_crossings.size());
        if (found.size() != row_.gain_crossings.size()) return;
        auto it = found.begin();
        for (const CertifiedCrossing& c : row_.gain_crossings) {
            const double blur = rounding / std::abs(c.gain_slope), turned = (blur + rounding) * std::abs(c.phase_slope);
            const double angle = it->phase_margin_deg * pi / 180.0, turn = c.value > 0.0 ? c.value : c.value + 2.0 * pi;
            hold("gain crossover", it->frequency_rad_s, c.frequency, allowed_ + blur);
            hold("angle from -1", std::abs(angle - std::abs(c.value)), angle, std::abs(c.value), allowed_ + turned);
            phase_blur_ = std::max(phase_blur_, turned);
            if (reading_.delays) {
                hold("delay margin of a crossover", it->delay_margin, turn / c.frequency, allowed_ + blur + turned / turn);
                if (row_.margins.size() > 0 && difference(turn / c.frequency, row_.margins.begin()[3]) < 1e-6) delay_blur_ = blur + turned / turn;
            }
            ++it;
        }
    }

    // A crossing matters that is beyond -1, or as near to it as any other on its side.
    bool matters(const CertifiedCrossing& c) const {
        if (row_.margins.size() > 0) return c.value < 1.0 || c.value <= row_.margins.begin()[0];
        const auto nearer = [&](const CertifiedCrossing& other) { return other.value > 1.0 && other.value < c.value * (1.0 - 1e-9); };
        return c.value < 1.0 || std::none_of(row_.phase_crossings.begin(), row_.phase_crossings.end(), nearer);
    }

    void compare_phase_crossings() {
        const auto& found = result_.phase_crossovers;
        std::vector<bool> known(found.size(), false);
        for (const CertifiedCrossing& c : row_.phase_crossings) {
            std::size_t nearest = 0;
            for (std::size_t i = 1; i < found.size(); ++i)
                if (std::abs(found[i].frequency_rad_s - c.frequency) < std::abs(found[nearest].frequency_rad_s - c.frequency)) nearest = i;
            if (found.empty() || difference(found[nearest].frequency_rad_s, c.frequency) > 1e-6 || known[nearest]) {
                INFO("phase crossover at " << tauwright::text_of(c.frequency) << ", gain factor " << tauwright::text_of(c.value));
                CHECK_FALSE(matters(c));
                continue;
            }
            known[nearest] = true;
            const double blur = rounding / std::abs(c.phase_slope);
            hold("phase crossover", found[nearest].frequency_rad_s, c.frequency, allowed_ + blur);
            hold("gain factor", found[nearest].gain_factor, c.value, allowed_ + (blur + rounding) * std::abs(c.gain_slope));
        }
        for (std::size_t i = 0; i < found.size(); ++i) {
            INFO("invented: phase crossover at " << tauwright::text_of(found[i].frequency_rad_s) << ", gain factor " << tauwright::text_of(found[i].gain_factor));
            CHECK((known[i] || found[i].gain_factor > reading_.listed_factor || found[i].frequency_rad_s > 0.99 * complete_to_));
        }
    }

    void compare_margins() {
        const double *margins = row_.margins.begin(), *peaks = row_.peaks.begin(), blur = rounding / row_.closest;
        const double angle = result_.phase_margin_deg.value();
        hold("gain margin", result_.gain_margin.value(), margins[0], allowed_);
        hold("gain reduction margin", result_.gain_reduction_margin.value(), margins[1], allowed_);
        if (reading_.gain_crossings) hold("phase margin", angle == margins[2] ? 0.0 : std::abs(angle - margins[2]) * pi / 180.0, angle, margins[2], allowed_ + phase_blur_);
        if (reading_.delays) hold("smallest delay margin", result_.delay_margin.value(), margins[3], allowed_ + delay_blur_);
        hold("Ms", result_.max_sensitivity.value(), peaks[0], allowed_ + blur);
        hold("Ms frequency", result_.max_sensitivity_frequency.value(), peaks[1], allowed_);
        hold("Mt", result_.max_complementary_sensitivity.value(), peaks[2], allowed_ + blur);
        hold("Mt frequency", result_.max_complementary_sensitivity_frequency.value(), peaks[3], allowed_);
    }

    const Row& row_;
    double complete_to_;
    const tauwright::Robustness& result_;
    const Reading& reading_;
    Errors& errors_;
    double allowed_, delay_blur_ = 0.0, phase_blur_ = 0.0;
};

template <class Row>
void compare(const Row& row, double complete_to, const tauwright::Robustness& result, const Reading& reading, Families& families) {
    Comparison<Row>(row, complete_to, result, reading, families[row.family]).run();
}

inline std::string table_of(const Families& families) {
    std::string table = "worst errors\n";
    for (const auto& [family, errors] : families) {
        table += family + ":";
        for (const auto& [what, worst] : errors) table += " " + std::string(what) + " " + tauwright::text_of(worst) + ";";
        table += "\n";
    }
    return table;
}

}  // namespace oracle
