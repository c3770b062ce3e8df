// Worst cases that are not stable, cut short, or of a list; the share of members that violates a limit; refusals.
#include <cmath>
#include <limits>
#include <numbers>

#include "assess/brute_force.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/assess/worst_case.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

namespace {

const TransferFunction nominal = first_order_plus_dead_time(2.0, 10.0, 3.0);
const PidSettings settings{.gain = 10.0 / 12.0, .integral_time = 10.0};

int unstable_poles(const TransferFunction& process, const PidSettings& c) {
    return oracle::BruteForce((process * transfer_function(c)).factors()).unstable_poles();
}

}  // namespace

TEST_CASE("an unstable member decides the verdict and is named", "[independent computation]") {
    const PidSettings bold{.gain = 10.0 / (2.0 * 4.0), .integral_time = 10.0};
    REQUIRE(robustness(nominal, bold).verdict == Verdict::stable);
    const WorstCase w = worst_case(nominal, bold, Uncertainty::box({.gain = 0.5, .dead_time = 0.5}));
    CHECK(w.verdict == Verdict::unstable);
    CHECK(w.certified);
    CHECK(unstable_poles(w.at, bold) > 0);
    CHECK(!w.max_sensitivity);
    CHECK(!w.max_sensitivity_bound);
    CHECK(!w.gain_margin);
    CHECK(!w.delay_margin_bound);
    // A nominal loop that is unstable is its own witness.
    const PidSettings wild{.gain = 10.0, .integral_time = 10.0};
    const WorstCase n = worst_case(nominal, wild, Uncertainty::box({.gain = 0.1}));
    CHECK(n.verdict == Verdict::unstable);
    CHECK(n.at == nominal);
}

TEST_CASE("a lightly damped plant whose corners are all stable has unstable members inside", "[independent computation]") {
    // The resonance moves through the frequency where the dead time turns it against the loop.
    struct Row {
        double damping, dead_time, Kc, Ti;
    };
    for (const Row& row : {Row{0.014, 5.2, 0.029, 6.9}, Row{0.031, 8.0, 0.062, 6.7}, Row{0.011, 11.9, 0.019, 1.2}}) {
        const PidSettings c{.gain = row.Kc, .integral_time = row.Ti};
        INFO("damping " << row.damping);
        for (double T : {0.7, 1.3})
            for (double theta : {0.9, 1.1})
                CHECK(unstable_poles(oscillatory_plus_dead_time(1.0, T, row.damping, theta * row.dead_time), c) == 0);
        const WorstCase w = worst_case(oscillatory_plus_dead_time(1.0, 1.0, row.damping, row.dead_time), c,
                                       Uncertainty::box({.lags = 0.3, .dead_time = 0.1}));
        CHECK(w.verdict == Verdict::unstable);
        CHECK(unstable_poles(w.at, c) > 0);
        const QuadraticFactor pair = w.at.factors().lag_pairs.at(0);
        CHECK(pair.time_constant >= 0.7);
        CHECK(pair.time_constant <= 1.3);
        CHECK(pair.damping == row.damping);
    }
}

TEST_CASE("a worst member inside the box: a ridge along the resonance is proved and its top found", "[independent computation]") {
    const auto G = oscillatory_plus_dead_time(1.0, 1.0, 0.011, 12.0);
    const PidSettings c{.gain = 0.017, .integral_time = 8.6};
    const WorstCase w = worst_case(G, c, Uncertainty::box({.lags = 0.3, .dead_time = 0.1}));
    CHECK(w.verdict == Verdict::stable);
    CHECK(w.certified);
    CHECK(w.at.factors().lag_pairs.at(0).time_constant > 0.71);
    CHECK(w.at.factors().lag_pairs.at(0).time_constant < 1.29);
    // Every member with the worst dead time, the peak by a walk along the resonance.
    double closest = 1e9;
    for (int i = 0; i <= 6000; ++i) {
        const double T = 0.7 + 1e-4 * i;
        for (int k = -40; k <= 40; ++k) {
            const std::complex<double> s{0.0, (1.0 + 0.0005 * k) / T};
            const auto L = 0.017 * (1.0 + 1.0 / (8.6 * s)) * std::exp(-13.2 * s) / (T * T * s * s + 0.022 * T * s + 1.0);
            closest = std::min(closest, std::abs(1.0 + L));
        }
    }
    CHECK(1.0 / closest <= w.max_sensitivity_bound.value());
    CHECK(relative_error(1.0 / closest, w.max_sensitivity.value()) <= 1e-3);
}

TEST_CASE("a proof cut short says so, and keeps what was found", "[invariant]") {
    const auto box = Uncertainty::box({.gain = 0.3, .lags = 0.3, .dead_time = 0.3});
    const WorstCase whole = worst_case(nominal, settings, box);
    REQUIRE(whole.certified);
    for (std::size_t boxes : {1u, 10u, 40u, 80u, 120u}) {
        const WorstCase w = worst_case(nominal, settings, box, {.most_boxes = boxes});
        INFO(boxes << " boxes");
        CHECK(!w.certified);
        CHECK(!w.cancelled);
        CHECK(w.verdict == (w.max_sensitivity_bound ? Verdict::stable : Verdict::undetermined));
        CHECK(w.max_sensitivity.value() <= whole.max_sensitivity_bound.value());
        if (w.max_sensitivity_bound) CHECK(w.max_sensitivity_bound.value() >= whole.max_sensitivity.value());
        if (w.gain_margin_bound) CHECK(w.gain_margin_bound.value() <= whole.gain_margin.value());
        if (w.phase_margin_deg_bound) CHECK(w.phase_margin_deg_bound.value() <= whole.phase_margin_deg.value());
        if (w.delay_margin_bound) CHECK(w.delay_margin_bound.value() <= whole.delay_margin.value());
    }
    // A lightly damped one takes boxes enough to be asked in between.
    const auto G = oscillatory_plus_dead_time(1.0, 5.0, 0.03, 2.0);
    const PidSettings c{.gain = 0.02, .integral_time = 5.0};
    const auto wide = Uncertainty::box({.gain = 0.3, .lags = 0.3, .damping = 0.3, .dead_time = 0.3});
    int asked = 0;
    double last = -1.0;
    bool rising = true;
    const WorstCase all = worst_case(G, c, wide, {.progress = [&](double share) {
                                                      rising &= share >= last && share >= 0.0 && share <= 1.0;
                                                      last = share;
                                                      ++asked;
                                                      return true;
                                                  }});
    CHECK(rising);
    CHECK(!all.cancelled);
    CHECK(asked >= 4);
    const WorstCase cut = worst_case(G, c, wide, {.progress = [](double) { return false; }});
    CHECK(cut.cancelled);
    CHECK(!cut.certified);
    CHECK(cut.max_sensitivity.has_value());
    CHECK(cut.boxes_used < all.boxes_used);
    const WorstCase half = worst_case(G, c, wide, {.progress = [](double share) { return share < 0.3; }});
    CHECK(half.cancelled);
    CHECK(!half.certified);
    CHECK(half.verdict == Verdict::stable);  // |1 + L| > 0 was proved before
    CHECK(half.max_sensitivity_bound.has_value());
}

TEST_CASE("a list of models: the worst of them, each analyzed as it stands", "[invariant]") {
    std::vector<TransferFunction> models;
    for (double k : {1.0, 1.4, 2.2, 0.6, 1.8}) models.push_back(first_order_plus_dead_time(k, 10.0, 3.0 / k));
    const WorstCase w = worst_case(nominal, settings, Uncertainty::of_models(models));
    CHECK(w.verdict == Verdict::stable);
    CHECK(w.certified);
    CHECK(w.members_tried == 5);
    double Ms = 0.0, gm = 1e9, pm = 1e9, dm = 1e9;
    std::size_t at = 0;
    for (std::size_t i = 0; i < models.size(); ++i) {
        const Robustness r = robustness(models[i], settings);
        if (r.max_sensitivity.value() > Ms) Ms = r.max_sensitivity.value(), at = i;
        gm = std::min(gm, r.gain_margin.value());
        pm = std::min(pm, r.phase_margin_deg.value());
        dm = std::min(dm, r.delay_margin.value());
    }
    CHECK(w.max_sensitivity == Ms);
    CHECK(w.max_sensitivity_bound == Ms);
    CHECK(w.gain_margin == gm);
    CHECK(w.phase_margin_deg == pm);
    CHECK(w.delay_margin_bound == dm);
    CHECK(w.at_model == at);
    CHECK(w.at == models[at]);
    models.push_back(first_order_plus_dead_time(30.0, 10.0, 3.0));
    const WorstCase bad = worst_case(nominal, settings, Uncertainty::of_models(models));
    CHECK(bad.verdict == Verdict::unstable);
    CHECK(bad.at_model == std::optional<std::size_t>(5));
    CHECK(!bad.max_sensitivity);
    const WorstCase cut = worst_case(nominal, settings, Uncertainty::of_models(models), {.progress = [](double share) { return share < 0.4; }});
    CHECK(cut.cancelled);
    CHECK(!cut.certified);
    CHECK(cut.verdict == Verdict::undetermined);
    CHECK(cut.members_tried == 3);
}

TEST_CASE("extra delay belongs to every member", "[invariant]") {
    const auto box = Uncertainty::box({.gain = 0.2, .lags = 0.2});
    const WorstCase a = worst_case(nominal, settings, box, {.extra_delay = 1.0});
    const WorstCase b = worst_case(first_order_plus_dead_time(2.0, 10.0, 4.0), settings, box);
    CHECK(relative_error(a.max_sensitivity.value(), b.max_sensitivity.value()) <= 1e-12);
    CHECK(relative_error(a.delay_margin.value(), b.delay_margin.value()) <= 1e-12);
    CHECK(a.at == b.at.with_dead_time(3.0));
}

TEST_CASE("loops without dead time, gain kept at infinity, no uncertainty, and margins that are infinite", "[closed form]") {
    // K/(tau s + 1) with gain Kc: L stays in the right half plane, Ms is 1 and no margin is finite but the phase's.
    const auto G = TransferFunction::from_factors({.gain = 2.0, .lags = {10.0}});
    const WorstCase w = worst_case(G, {.gain = 1.0}, Uncertainty::box({.gain = 0.3, .lags = 0.3}));
    CHECK(w.certified);
    CHECK(w.max_sensitivity == 1.0);
    CHECK(w.gain_margin.value() > 1e300);
    // cos(PM) = -1/K at |L| = 1: the largest gain.
    CHECK(relative_error(w.phase_margin_deg.value(), 180.0 - std::acos(1.0 / 2.6) * 180.0 / std::numbers::pi) <= 1e-9);
    // Gain 0.5 through a dead time: |L| = 0.65 at worst for all frequencies, Ms = 1/(1 - 0.65), GM = 1/0.65.
    const auto pure = TransferFunction::from_factors({.gain = 0.5, .dead_time = 2.0});
    const WorstCase p = worst_case(pure, {.gain = 1.0}, Uncertainty::box({.gain = 0.3, .dead_time = 0.3}));
    CHECK(p.verdict == Verdict::stable);
    CHECK(relative_error(p.max_sensitivity_bound.value(), 1.0 / 0.35) <= 1e-5);
    CHECK(relative_error(p.gain_margin_bound.value(), 1.0 / 0.65) <= 1e-5);
    CHECK(p.phase_margin_deg.value() > 1e300);
    // Above 1 it cannot be stable.
    CHECK(worst_case(pure, {.gain = 1.8}, Uncertainty::box({.gain = 0.3})).verdict == Verdict::unstable);
    // Nothing uncertain: the nominal loop itself.
    const WorstCase n = worst_case(nominal, settings, Uncertainty::box({}));
    const Robustness r = robustness(nominal, settings);
    CHECK(n.certified);
    CHECK(n.max_sensitivity == r.max_sensitivity);
    CHECK(n.gain_margin == r.gain_margin);
    CHECK(n.at == nominal);
}

TEST_CASE("the violating share of a uniform gain has a closed form", "[closed form]") {
    // L = K exp(-theta s)/s, GM = pi/(2 K theta) below the limit where K is above pi/(2 theta limit).
    const double theta = 2.0, K = 0.25, limit = 2.8;
    const double exact = (1.3 * K - std::numbers::pi / (2.0 * theta * limit)) / (0.6 * K);
    const auto G = integrating_plus_dead_time(K, theta);
    const auto box = Uncertainty::box({.gain = 0.3});
    const ViolatingShare a = violating_share(G, {.gain = 1.0}, box, {.gain_margin = limit}, 4000, 7);
    INFO(a.share << " of " << exact);
    CHECK(a.members == 4000);
    CHECK(a.unstable == 0);
    CHECK(std::abs(a.share - exact) <= 4.0 * a.standard_error);
    CHECK(relative_error(a.standard_error, std::sqrt(a.share * (1.0 - a.share) / 4000.0)) <= 1e-12);
    CHECK(a.share == violating_share(G, {.gain = 1.0}, box, {.gain_margin = limit}, 4000, 7).share);
    CHECK(a.share != violating_share(G, {.gain = 1.0}, box, {.gain_margin = limit}, 4000, 8).share);
    // Unstable ones count: above K theta = pi/2.
    const ViolatingShare u = violating_share(integrating_plus_dead_time(0.75, theta), {.gain = 1.0}, box, {}, 2000, 7);
    CHECK(u.unstable == static_cast<std::size_t>(std::lround(u.share * 2000.0)));
    CHECK(std::abs(u.share - (1.3 * 0.75 - std::numbers::pi / 4.0) / (0.6 * 0.75)) <= 4.0 * u.standard_error);
    // None violates what the worst case keeps.
    const WorstCase w = worst_case(G, {.gain = 1.0}, box);
    CHECK(violating_share(G, {.gain = 1.0}, box, {.max_sensitivity = w.max_sensitivity_bound}, 500).share == 0.0);
    // A list is taken whole.
    const auto list = Uncertainty::of_models({G, integrating_plus_dead_time(0.3, theta), integrating_plus_dead_time(0.1, theta)});
    const ViolatingShare l = violating_share(G, {.gain = 1.0}, list, {.gain_margin = 3.0}, 10);
    CHECK(l.members == 3);
    CHECK(relative_error(l.share, 1.0 / 3.0) <= 1e-15);
    CHECK(l.standard_error == 0.0);
    const ViolatingShare cut = violating_share(G, {.gain = 1.0}, box, {}, 1000, 1, 0.0, [](double share) { return share < 0.1; });
    CHECK(cut.cancelled);
    CHECK(cut.members == 112);
}

TEST_CASE("members of a region are drawn evenly and inside it", "[closed form]") {
    // Of gain and dead time alone, a disc: gain above half its axis holds a share of 1/3 - sqrt(3)/(4 pi) = 0.1955.
    FittedModel fit;
    fit.form = Form::integrating_plus_dead_time;
    fit.gain = 0.25;
    fit.dead_time = 2.0;
    fit.model = integrating_plus_dead_time(0.25, 2.0);
    fit.parameter_names = {"slope", "dead_time"};
    fit.covariance = {4e-4, 0.0, 0.0, 1e-18};
    const auto region = Uncertainty::from_fit(fit);
    const double K = 0.25 + 0.5 * region.half_axes()[0], limit = std::numbers::pi / (2.0 * K * 2.0);
    const ViolatingShare s = violating_share(*fit.model, {.gain = 1.0}, region, {.gain_margin = limit}, 4000, 5);
    CHECK(std::abs(s.share - 0.19550110947788532) <= 4.0 * s.standard_error);
}

TEST_CASE("worst case and share refuse what makes no sense", "[closed form]") {
    using enum error_code;
    const auto box = Uncertainty::box({.gain = 0.3});
    const auto refused = [&](error_code code, const WorstCaseOptions& options, std::initializer_list<const char*> words) {
        check_refused(code, words, [&] { worst_case(nominal, settings, box, options); });
    };
    refused(out_of_domain, {.extra_delay = -1.0}, {"extra_delay", "-1"});
    refused(not_finite, {.extra_delay = std::nan("")}, {"extra_delay", "nan"});
    refused(out_of_domain, {.tolerance = 0.0}, {"tolerance", "0", "1e-9"});
    refused(out_of_domain, {.tolerance = 1.0}, {"tolerance", "1"});
    refused(out_of_domain, {.most_boxes = 0}, {"most_boxes", "0"});
    check_refused(out_of_domain, {"settings.gain", "0"}, [&] { worst_case(nominal, {}, box); });
    const auto share = [&](error_code code, const ViolationLimits& limits, std::size_t members, std::initializer_list<const char*> words) {
        check_refused(code, words, [&] { violating_share(nominal, settings, box, limits, members); });
    };
    share(out_of_domain, {.max_sensitivity = 0.9}, 10, {"limits.max_sensitivity", "0.9"});
    share(out_of_domain, {.gain_margin = 0.5}, 10, {"limits.gain_margin", "0.5"});
    share(out_of_domain, {.phase_margin_deg = 200.0}, 10, {"limits.phase_margin_deg", "200"});
    share(not_finite, {.phase_margin_deg = std::nan("")}, 10, {"limits.phase_margin_deg", "nan"});
    share(out_of_domain, {}, 0, {"members", "0"});
    // A pair on the axis whose damping may change sign.
    const auto undamped = TransferFunction::from_factors({.lag_pairs = {{2.0, 0.0}}});
    check_refused(out_of_domain, {"lag_pairs[0].damping"},
                  [&] { worst_case(undamped, settings, Uncertainty::box({.damping = 0.1, .absolute = true})); });
    // A zero at rest against integral action hides a pole.
    const auto washed = TransferFunction::from_factors({.zeros_at_origin = 1, .lags = {1.0, 2.0}});
    CHECK(worst_case(washed, settings, box).verdict == Verdict::marginal);
}
