// Ten thousand seeded random loops, the library against brute force; a million with TAUWRIGHT_LONG in the environment.
#include <cstdlib>
#include <limits>

#include "assess/random_loops.hpp"
#include "tauwright/assess/robustness.hpp"

using namespace tauwright;
using oracle::BruteForce;

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

#if defined(__has_feature)
#if __has_feature(address_sanitizer)
#define TAUWRIGHT_TEST_INSTRUMENTED
#endif
#endif

int loops_of_a_family(int in_short) {
#if defined(__SANITIZE_ADDRESS__) || defined(TAUWRIGHT_TEST_INSTRUMENTED) || !defined(__OPTIMIZE__)
    in_short /= 10;  // an instrumented or unoptimized build takes ten times as long
#endif
    return std::getenv("TAUWRIGHT_LONG") != nullptr ? 100 * in_short : in_short;
}

bool near(double x, double expected, double allowed) { return x == expected || std::abs(x - expected) <= allowed * std::abs(expected); }

/// What the library says of one loop against what brute force saw; every difference in words.
class Judged {
public:
    Judged(const BruteForce& brute, const Factors& f, const Robustness& r) : brute_(brute), f_(f), r_(r) {
        compare_verdict();
        if (r.verdict == Verdict::undetermined) return;
        compare_crossings();
        if (r.verdict != Verdict::stable) return;
        compare_peaks();
        compare_margins();
    }
    const std::string& objections() const { return objections_; }

private:
    void insist(bool holds, const char* what, double got, double expected) {
        if (!holds) objections_ += std::string("\n  ") + what + ": " + text_of(got) + ", brute force says " + text_of(expected);
    }

    void compare_verdict() {
        const int poles = brute_.unstable_poles();
        if (r_.verdict == Verdict::undetermined) return insist(poles > 1000, "left open at unstable poles", -1.0, poles);
        insist(r_.verdict == (poles == 0 ? Verdict::stable : Verdict::unstable), name_of(r_.verdict), -1.0, poles);
        insist(r_.unstable_poles == std::optional<int>(poles), "unstable poles", r_.unstable_poles.value_or(-1), poles);
        insist(r_.stable == std::optional<bool>(poles == 0), "stable", r_.stable.value_or(false), poles == 0);
    }

    // The frequency of `list` nearest w, which both sides keep ascending.
    template <class List, class Frequency>
    static double nearest(const List& list, double w, Frequency frequency) {
        auto it = std::lower_bound(list.begin(), list.end(), w, [&](const auto& c, double x) { return frequency(c) < x; });
        double best = it == list.end() ? infinity : frequency(*it);
        if (it != list.begin() && w - frequency(*std::prev(it)) < best - w) best = frequency(*std::prev(it));
        return best;
    }

    void compare_crossings() {
        for (const auto& c : r_.gain_crossovers) insist(near(std::abs(brute_.value(c.frequency_rad_s)), 1.0, 1e-9), "|L| at gain crossover", c.frequency_rad_s, 1.0);
        for (const auto& c : r_.phase_crossovers) {
            const auto L = brute_.value(c.frequency_rad_s);
            insist(L.real() < 0.0 && std::abs(L.imag()) <= 1e-8 * std::abs(L), "phase crossover where L is not real and negative", c.frequency_rad_s, std::arg(L));
            insist(near(c.gain_factor * std::abs(L), 1.0, 1e-9), "gain factor", c.gain_factor, 1.0 / std::abs(L));
        }
        for (double w : brute_.gain_crossings()) {
            const double found = nearest(r_.gain_crossovers, w, [](const GainCrossover& c) { return c.frequency_rad_s; });
            insist(near(found, w, 1e-6), "gain crossover missed, nearest", found, w);
        }
        // A phase crossover matters that is beyond -1, or nearer to it than every other on its side.
        const double needed = r_.verdict == Verdict::stable && *r_.gain_margin < infinity ? 1.0 / *r_.gain_margin : 1.0;
        for (double w : brute_.phase_crossings()) {
            if (std::abs(brute_.value(w)) <= needed * (1.0 + 1e-9)) continue;
            if (r_.phase_crossovers.size() >= 1000 && w > r_.phase_crossovers.back().frequency_rad_s) break;  // no more are listed
            const double found = nearest(r_.phase_crossovers, w, [](const PhaseCrossover& c) { return c.frequency_rad_s; });
            insist(near(found, w, 1e-6), "phase crossover missed, nearest", found, w);
        }
    }

    void compare_peaks() {
        const double Ms = *r_.max_sensitivity, Mt = *r_.max_complementary_sensitivity;
        insist(Ms >= (1.0 - 1e-6) / brute_.closest(), "Ms", Ms, 1.0 / brute_.closest());
        insist(Mt >= (1.0 - 1e-6) / brute_.closest_inverse(), "Mt", Mt, 1.0 / brute_.closest_inverse());
        const double w = *r_.max_sensitivity_frequency, wt = *r_.max_complementary_sensitivity_frequency;
        if (w > 0.0 && is_finite(w)) insist(near(Ms * std::abs(1.0 + brute_.value(w)), 1.0, 1e-9 * Ms), "Ms at its frequency", Ms, 1.0 / std::abs(1.0 + brute_.value(w)));
        if (wt > 0.0 && is_finite(wt)) insist(near(Mt * std::abs(1.0 + 1.0 / brute_.value(wt)), 1.0, 1e-9 * Mt), "Mt at its frequency", Mt, 1.0 / std::abs(1.0 + 1.0 / brute_.value(wt)));
    }

    void compare_margins() {
        const double pi = std::acos(-1.0);
        double above = infinity, below = 0.0, phase = infinity, delay = infinity;
        const auto take = [&](double factor) { factor > 1.0 ? above = std::min(above, factor) : below = std::max(below, factor); };
        for (double w : brute_.phase_crossings()) take(1.0 / std::abs(brute_.value(w)));
        // Where gain lasts at high frequency brute force stops before the curve has turned: crossovers beyond its last look
        // count where its own arithmetic calls them real (see compare_crossings).
        const double last = brute_.phase_crossings().empty() ? 0.0 : brute_.phase_crossings().back();
        if (lasting_gain() != 0.0)
            for (const auto& c : r_.phase_crossovers)
                if (c.frequency_rad_s > last) take(1.0 / std::abs(brute_.value(c.frequency_rad_s)));
        if (f_.integrators == f_.zeros_at_origin && f_.gain < 0.0) take(-1.0 / f_.gain);
        const double at_infinity = lasting_gain();
        if (at_infinity != 0.0 && (f_.dead_time > 0.0 || at_infinity < 0.0)) take(1.0 / std::abs(at_infinity));
        for (double w : brute_.gain_crossings()) {
            const double angle = std::arg(brute_.value(w));  // from the positive axis; -1 is at +-pi
            phase = std::min(phase, (pi - std::abs(angle)) * 180.0 / pi);
            delay = std::min(delay, (angle + pi) / w);
        }
        // Near and below a twentieth brute force may list no phase crossover.
        const double gain_margin = *r_.gain_margin;
        insist(above < 15.0 ? near(gain_margin, above, 1e-6) : gain_margin >= 15.0, "gain margin", gain_margin, above);
        insist(std::abs(*r_.gain_reduction_margin - below) <= 1e-6, "gain reduction margin", *r_.gain_reduction_margin, below);
        insist(phase == *r_.phase_margin_deg || std::abs(phase - *r_.phase_margin_deg) <= 1e-4, "phase margin", *r_.phase_margin_deg, phase);
        insist(delay == *r_.delay_margin || std::abs(delay - *r_.delay_margin) <= 1e-6 * delay + 1e-9, "delay margin", *r_.delay_margin, delay);
    }
public:
    // The middles of the first ranges of stable dead times are stable, those of the gaps between are not.
    void compare_dead_times() {
        double last = 0.0;
        const auto agrees = [this](double dead_time, bool stable) {
            Factors other = f_;
            other.dead_time = dead_time;
            const BruteForce brute(other);
            return brute.doubt() > 0.05 || (brute.unstable_poles() == 0) == stable;
        };
        for (std::size_t i = 0; i < std::min<std::size_t>(r_.stable_dead_times.size(), 3); ++i) {
            const DelayRange range = r_.stable_dead_times[i];
            const double inside = is_finite(range.high) ? 0.5 * (range.low + range.high) : range.low + 1.0;
            insist(range.high - range.low < 1e-6 || agrees(inside, true), "unstable at a stable dead time", inside, 0.0);
            insist(range.low - last < 1e-6 || agrees(0.5 * (last + range.low), false), "stable at an unstable dead time", 0.5 * (last + range.low), 0.0);
            last = range.high;
        }
        if (is_finite(last)) insist(r_.stable_dead_times.size() > 3 || agrees(last * 1.001 + 1e-6, false), "stable beyond the last stable dead time", last, 0.0);
    }

private:
    double lasting_gain() const {
        const TransferFunction L = TransferFunction::from_factors(f_);
        return L.relative_degree() == 0 ? L.leading_coefficient() : 0.0;
    }

    const BruteForce& brute_;
    const Factors& f_;
    const Robustness& r_;
    std::string objections_;
};

void judge(const char* family, std::uint64_t seed, int wanted, Factors (*draw)(oracle::Seeded&)) {
    oracle::Seeded random(seed);
    const int loops = loops_of_a_family(wanted);
    int stable = 0, unstable = 0, given_up = 0, wrong = 0;
    for (int i = 0; i < loops && wrong < 10; ++i) {
        const Factors f = draw(random);
        const BruteForce brute(f);
        if (brute.doubt() > 0.05) {
            ++given_up;
            continue;
        }
        const Robustness r = robustness(TransferFunction::from_factors(f));
        Judged judged(brute, f, r);
        if (i % 8 == 0 && r.verdict == Verdict::stable) judged.compare_dead_times();
        brute.unstable_poles() == 0 ? ++stable : ++unstable;
        if (judged.objections().empty()) continue;
        ++wrong;
        FAIL_CHECK(family << ", seed " << seed << ", loop " << i << " of closest " << text_of(brute.closest()) << ": " << oracle::printed(f) << judged.objections());
    }
    INFO(family << ": stable " << stable << ", unstable " << unstable << ", given up " << given_up);
    CHECK(stable > loops / 12);
    CHECK(unstable > loops / 12);
    CHECK(given_up <= loops / 50);
}

}  // namespace

TEST_CASE("ten thousand random loops: no verdict wrong, no crossing and no peak missed, no margin off", "[independent computation]") {
    judge("ordinary", 20240715, 4000, oracle::ordinary_loop);
    judge("resonant", 20260601, 2000, oracle::resonant_loop);
    judge("high order", 20260602, 1000, oracle::high_order_loop);
    judge("lasting gain", 20260603, 1000, oracle::lasting_gain_loop);
    judge("tuned", 20260604, 1000, oracle::tuned_loop);
    judge("near -1", 20260605, 1000, oracle::near_minus_one_loop);
}
