// Worst members of sets: against closed forms, published values, and random members looked at by other means.
#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "assess/brute_force.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/assess/worst_case.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::BruteForce;
using oracle::check_refused;
using oracle::relative_error;

namespace {

constexpr double pi = std::numbers::pi;
constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr std::uint64_t seed = 20261201;

struct Case {
    Factors process;
    PidSettings settings;
    UncertaintyBox box;
};

// First and second order, integrating and lightly damped plants with dead time, settings from slow to bold.
Case random_case(oracle::Seeded& random, int kind) {
    Case c;
    Factors& f = c.process;
    f.gain = random.scaled(0.2, 5.0);
    f.dead_time = random.scaled(0.1, 10.0);
    double slowest = f.dead_time, damped = 1.0;
    if (kind == 0) f.lags = {random.scaled(1.0, 20.0)};
    if (kind == 1) {
        f.lags = {random.scaled(1.0, 20.0), random.scaled(0.5, 10.0)};
        if (random.chance(0.4)) f.leads = {random.uniform(-3.0, 3.0)};
    }
    if (kind == 2) {
        f.lag_pairs = {{random.scaled(1.0, 10.0), random.scaled(0.02, 0.5)}};
        if (random.chance(0.3)) f.lags = {random.scaled(0.5, 10.0)};
        damped = random.scaled(0.05, 1.0);
    }
    if (kind == 3) {
        f.integrators = 1;
        if (random.chance(0.5)) f.lags = {random.scaled(0.5, 10.0)};
    }
    for (double T : f.lags) slowest += T;
    for (const auto& p : f.lag_pairs) slowest += p.time_constant;
    c.settings.gain = random.scaled(0.05, 1.0) * damped / (f.gain * (kind == 3 ? slowest : 1.0));
    c.settings.integral_time = slowest * random.scaled(0.5, 3.0) * (kind == 3 ? 4.0 : 1.0);
    if (random.chance(0.4)) {
        c.settings.derivative_time = slowest * random.uniform(0.05, 0.3);
        c.settings.filter_time = 0.1 * c.settings.derivative_time;
    }
    c.box = {.gain = random.uniform(0.0, 0.4), .lags = random.uniform(0.0, 0.4), .leads = random.uniform(0.0, 0.4),
             .damping = random.uniform(0.0, 0.4), .dead_time = random.uniform(0.0, 0.4)};
    return c;
}

Factors random_member(oracle::Seeded& random, const Case& c) {
    Factors f = c.process;
    const auto move = [&](double& x, double half) {  // a third of them on an end
        x *= 1.0 + half * (random.chance(1.0 / 3.0) ? (random.chance(0.5) ? 1.0 : -1.0) : random.uniform(-1.0, 1.0));
    };
    move(f.gain, c.box.gain);
    for (double& T : f.lags) move(T, c.box.lags);
    for (double& T : f.leads) move(T, c.box.leads);
    for (auto& p : f.lag_pairs) move(p.time_constant, c.box.lags), move(p.damping, c.box.damping);
    move(f.dead_time, c.box.dead_time);
    return f;
}

// L(jw) in this test's own arithmetic.
std::complex<double> loop_at(const Factors& f, const PidSettings& c, double w) {
    const std::complex<double> s{0.0, w};
    std::complex<double> L = f.gain * std::polar(1.0, -w * f.dead_time);
    for (double T : f.leads) L *= 1.0 + T * s;
    for (double T : f.lags) L /= 1.0 + T * s;
    for (const auto& p : f.lag_pairs) L /= 1.0 + 2.0 * p.damping * p.time_constant * s + p.time_constant * p.time_constant * s * s;
    for (int i = 0; i < f.integrators; ++i) L /= s;
    const double Ti = c.integral_time.value_or(infinity);
    return L * c.gain * (1.0 + 1.0 / (Ti * s) + c.derivative_time * s / (c.filter_time * s + 1.0));
}

std::string text_of(const Case& c) {
    return TransferFunction::from_factors(c.process).text() + ", Kc " + tauwright::text_of(c.settings.gain) + ", Ti " +
           tauwright::text_of(c.settings.integral_time.value_or(0.0)) + ", Td " + tauwright::text_of(c.settings.derivative_time);
}

void check_gaps(const WorstCase& w, double tolerance) {
    CHECK(w.max_sensitivity_bound.value() >= w.max_sensitivity.value());
    CHECK(w.max_sensitivity_bound.value() <= w.max_sensitivity.value() * (1.0 + 1.1 * tolerance));
    CHECK(w.gain_margin_bound.value() <= w.gain_margin.value());
    CHECK(w.gain_margin_bound.value() >= std::min(w.gain_margin.value(), 1000.0) * (1.0 - 1.1 * tolerance));
    CHECK(w.phase_margin_deg_bound.value() <= w.phase_margin_deg.value());
    CHECK((w.phase_margin_deg_bound == w.phase_margin_deg || w.phase_margin_deg_bound.value() >= w.phase_margin_deg.value() * (1.0 - 1.1 * tolerance)));
    CHECK(w.delay_margin_bound.value() <= w.delay_margin.value());
    CHECK((w.delay_margin_bound == w.delay_margin || w.delay_margin_bound.value() >= w.delay_margin.value() * (1.0 - 1.1 * tolerance)));
}

}  // namespace

TEST_CASE("gain and dead time of an integrating loop: the worst corner's published margins", "[published]") {
    // L = K exp(-theta s)/s is at its worst with the largest K and theta. Ms of K theta = 1/(1 + x), x = tau_c/theta:
    // recomputed values of the lambda-tuned loop exp(-theta s)/((tau_c + theta) s); GM = (pi/2)/(K theta),
    // PM = 90 deg - 57.296 K theta and delay margin (pi/2)/K - theta in closed form.
    struct Row {
        double x, Ms;
    };
    for (const Row& row : {Row{0.5, 1.91716290499261}, Row{1.0, 1.590490233189583}}) {
        const double theta = 2.0, K = 1.0 / ((1.0 + row.x) * theta);  // of the worst corner
        const auto G = integrating_plus_dead_time(K / 1.25, theta / 1.4);
        const WorstCase w = worst_case(G, {.gain = 1.0}, Uncertainty::box({.gain = 0.25, .dead_time = 0.4}));
        CHECK(w.verdict == Verdict::stable);
        CHECK(w.certified);
        CHECK(relative_error(w.max_sensitivity.value(), row.Ms) <= 1e-8);
        CHECK(relative_error(w.gain_margin.value(), 0.5 * pi * (1.0 + row.x)) <= 1e-10);
        CHECK(relative_error(w.phase_margin_deg.value(), 90.0 - 180.0 / pi / (1.0 + row.x)) <= 1e-10);
        CHECK(relative_error(w.delay_margin.value(), 0.5 * pi / K - theta) <= 1e-10);
        CHECK(relative_error(w.at.gain(), K) <= 1e-12);
        CHECK(relative_error(w.at.dead_time(), theta) <= 1e-12);
        check_gaps(w, 1e-6);
        // The same by absolute half widths.
        const WorstCase a = worst_case(G, {.gain = 1.0}, Uncertainty::box({.gain = 0.25 * G.gain(), .absolute = true}));
        CHECK(relative_error(a.gain_margin.value(), 0.5 * pi * (1.0 + row.x) * 1.4) <= 1e-10);
    }
}

TEST_CASE("a box around first order, +-30 %: certified, and the corner that theory points to", "[closed form]") {
    // With Ti = tau at the nominal lag and a phase beyond -90 degrees, less lag means more gain at the crossover.
    const auto G = first_order_plus_dead_time(2.0, 10.0, 3.0);
    for (double tau_c : {1.5, 3.0, 6.0, 9.0}) {
        const PidSettings settings{.gain = 10.0 / (2.0 * (tau_c + 3.0)), .integral_time = 10.0};
        const WorstCase w = worst_case(G, settings, Uncertainty::box({.gain = 0.3, .lags = 0.3, .dead_time = 0.3}));
        CHECK(w.certified);
        CHECK(w.boxes_used < 400);
        check_gaps(w, 1e-6);
        double worst = 0.0;
        for (double a : {0.7, 1.3})
            for (double b : {0.7, 1.3})
                for (double c : {0.7, 1.3})
                    worst = std::max(worst, robustness(first_order_plus_dead_time(2.0 * a, 10.0 * b, 3.0 * c), settings).max_sensitivity.value());
        CHECK(relative_error(w.max_sensitivity.value(), worst) <= 1e-12);
        CHECK(w.at == first_order_plus_dead_time(2.6, 7.0, 3.9));
        const WorstCase coarse = worst_case(G, settings, Uncertainty::box({.gain = 0.3, .lags = 0.3, .dead_time = 0.3}), {.tolerance = 1e-3});
        CHECK(coarse.certified);
        CHECK(coarse.boxes_used <= w.boxes_used);
        check_gaps(coarse, 1e-3);
    }
}

TEST_CASE("3,000 random members of each of 200 plants never beat the worst case", "[independent computation]") {
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int plants = 0, unstable = 0, lightly_damped = 0;
    for (int kind = 0; plants < 200; kind = (kind + 1) % 4) {
        const Case c = random_case(random, kind);
        const auto G = TransferFunction::from_factors(c.process);
        if (robustness(G, c.settings).verdict != Verdict::stable) continue;
        const WorstCase w = worst_case(G, c.settings, Uncertainty::box(c.box));
        INFO(text_of(c));
        REQUIRE(w.certified);
        if (w.verdict != Verdict::stable) {
            CHECK(BruteForce((w.at * transfer_function(c.settings)).factors()).unstable_poles() > 0);
            ++unstable;
            continue;
        }
        ++plants;
        lightly_damped += kind == 2;
        check_gaps(w, 1e-6);
        // Frequencies near the peak of the worst member, and all over.
        const double peak = robustness(w.at, c.settings).max_sensitivity_frequency.value();
        const double around = peak > 0.0 && is_finite(peak) ? peak : 1.0;
        double frequencies[16], closest = infinity;
        for (int i = 0; i < 16; ++i) frequencies[i] = around * (i < 10 ? std::pow(1.05, i - 4.5) : random.scaled(0.1, 10.0));
        double nearest_phase = infinity;
        for (int k = 0; k < 3000; ++k) {
            const Factors member = random_member(random, c);
            for (double x : frequencies) {
                const double size = std::abs(1.0 + loop_at(member, c.settings, x));
                closest = std::min(closest, size);
            }
            if (k % 100 != 0) continue;
            // Some of them along the whole axis, crossings by bisection.
            const BruteForce brute((TransferFunction::from_factors(member) * transfer_function(c.settings)).factors());
            CHECK(brute.unstable_poles() == 0);
            CHECK(1.0 / brute.closest() <= w.max_sensitivity_bound.value() * (1.0 + 1e-9));
            for (double x : brute.phase_crossings()) {
                const double size = std::abs(loop_at(member, c.settings, x));
                if (size < 1.0) CHECK(1.0 / size >= w.gain_margin_bound.value() * (1.0 - 1e-6));
            }
            for (double x : brute.gain_crossings()) {
                const double angle = std::arg(-loop_at(member, c.settings, x));
                nearest_phase = std::min(nearest_phase, std::abs(angle));
                CHECK(std::abs(angle) * 180.0 / pi >= w.phase_margin_deg_bound.value() * (1.0 - 1e-6));
                CHECK((angle > 0.0 ? angle : angle + 2.0 * pi) / x >= w.delay_margin_bound.value() * (1.0 - 1e-6));
            }
        }
        CHECK(1.0 / closest <= w.max_sensitivity.value() * (1.0 + 2e-6));
        CHECK(1.0 / closest <= w.max_sensitivity_bound.value() * (1.0 + 1e-12));
    }
    CHECK(lightly_damped >= 30);
    CHECK(unstable >= 3);
}

TEST_CASE("members of a confidence region never beat its worst case; the box around it is worse", "[independent computation]") {
    INFO("seed " << seed + 1);
    oracle::Seeded random(seed + 1);
    int certified = 0;
    for (int i = 0; i < 40; ++i) {
        FittedModel fit;
        fit.form = Form::first_order_plus_dead_time;
        fit.gain = random.scaled(0.2, 5.0);
        fit.lags = {random.scaled(2.0, 30.0)};
        fit.dead_time = random.scaled(0.3, 10.0);
        fit.model = first_order_plus_dead_time(fit.gain, fit.lags[0], fit.dead_time);
        fit.parameter_names = {"gain", "lag_1", "dead_time"};
        const double deviation[3] = {fit.gain * random.scaled(0.005, 0.15), fit.lags[0] * random.scaled(0.01, 0.15),
                                     fit.dead_time * random.scaled(0.02, 0.5)};
        double rows[3][4];
        for (int k = 0; k < 3; ++k) {
            double square = 0.0;
            for (double& x : rows[k]) x = random.uniform(-1.0, 1.0), square += x * x;
            for (double& x : rows[k]) x *= deviation[k] / std::sqrt(square);
        }
        for (auto& a : rows)
            for (auto& b : rows) fit.covariance.push_back(a[0] * b[0] + a[1] * b[1] + a[2] * b[2] + a[3] * b[3]);
        const double tau_c = fit.dead_time * random.scaled(0.7, 4.0);
        const PidSettings settings{.gain = fit.lags[0] / (fit.gain * (tau_c + fit.dead_time)), .integral_time = std::min(fit.lags[0], 8.0 * fit.dead_time)};
        const auto region = Uncertainty::from_fit(fit);
        const WorstCase w = worst_case(*fit.model, settings, region);
        INFO(i << ": " << fit.model->text() << " at " << w.at.text());
        if (w.verdict == Verdict::unstable) {
            CHECK(BruteForce((w.at * transfer_function(settings)).factors()).unstable_poles() > 0);
            continue;
        }
        REQUIRE(w.verdict == Verdict::stable);
        certified += w.certified;
        if (w.certified) check_gaps(w, 1e-6);
        double closest = infinity, half[3];
        const double peak = robustness(w.at, settings).max_sensitivity_frequency.value();
        for (int k = 0; k < 2000; ++k) {
            double z[3], square = 0.0, p[3] = {fit.gain, fit.lags[0], fit.dead_time};
            for (double& x : z) x = random.uniform(-1.0, 1.0), square += x * x;
            for (double& x : z) x *= (random.chance(0.7) ? 1.0 : random.uniform(0.0, 1.0)) / std::sqrt(square);
            for (std::size_t a = 0; a < 3; ++a)
                for (std::size_t b = 0; b < 3; ++b) p[a] += region.half_axes()[3 * a + b] * z[b];
            if (p[2] < 0.0) continue;
            const Factors member{.gain = p[0], .lags = {p[1]}, .dead_time = p[2]};
            for (int f = 0; f < 12; ++f)
                closest = std::min(closest, std::abs(1.0 + loop_at(member, settings, peak * std::pow(1.06, f - 5.5))));
        }
        CHECK(1.0 / closest <= w.max_sensitivity_bound.value() * (1.0 + 1e-9));
        CHECK(1.0 / closest >= 1.0 + 0.3 * (w.max_sensitivity.value() - 1.0));  // the walk went where it matters
        // The box around the region holds more, and the part of it below a dead time of 0 counts in neither.
        for (std::size_t a = 0; a < 3; ++a) {
            double square = 0.0;
            for (std::size_t b = 0; b < 3; ++b) square += region.half_axes()[3 * a + b] * region.half_axes()[3 * a + b];
            half[a] = std::sqrt(square);
        }
        double corner = 0.0;
        bool stable = true;
        for (double a : {-1.0, 1.0})
            for (double b : {-1.0, 1.0})
                for (double c : {-1.0, 1.0}) {
                    const Robustness r = robustness(first_order_plus_dead_time(fit.gain + a * half[0], fit.lags[0] + b * half[1],
                                                                               std::max(fit.dead_time + c * half[2], 0.0)), settings);
                    stable &= r.verdict == Verdict::stable;
                    corner = std::max(corner, r.max_sensitivity.value_or(infinity));
                }
        CHECK(w.max_sensitivity.value() <= corner * (1.0 + 1e-9));
    }
    CHECK(certified > 20);
}
