#include "tauwright/assess/continuous_trend.hpp"

#include <algorithm>
#include <limits>

#include "assess/continuous_trend_data.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::check_refused;
using oracle::Difference;

namespace {

Duty duty_of(const oracle::TrendDrive& drive) {
    Duty duty;
    duty.setpoint_step = drive.setpoint;
    duty.setpoint_ramp_time = drive.setpoint_ramp;
    duty.load_step = drive.load;
    duty.load_time = drive.load_time;
    duty.load_ramp_time = drive.load_ramp;
    duty.output_low = -1e6;
    duty.output_high = 1e6;
    duty.rest_output = 0.0;
    duty.rest_process_value = 0.0;
    return duty;
}

const Duty unit_step = duty_of({1.0, 0.0, 0.0, 0.0, 0.0});

// The largest difference of either column, relative to the largest value of that column.
Difference worst_error(const Trend& trend, const std::vector<oracle::TrendPoint>& expected) {
    double value = 0.0, output = 0.0, value_size = 0.0, output_size = 0.0;
    REQUIRE(trend.size() == expected.size());
    for (std::size_t j = 0; j < expected.size(); ++j) {
        value = std::max(value, std::abs(trend.process_value[j] - expected[j].value));
        output = std::max(output, std::abs(trend.output[j] - expected[j].output));
        value_size = std::max(value_size, std::abs(expected[j].value));
        output_size = std::max(output_size, std::abs(expected[j].output));
    }
    return {std::max(value / value_size, output / output_size)};
}

TransferFunction dead_time_integrator(double a) { return TransferFunction::from_factors({.gain = a, .integrators = 1, .dead_time = 1.0}); }

}  // namespace

TEST_CASE("Integrator with dead time: the piecewise polynomial", "[closed form]") {
    // y' = a (1 - y(t - 1)): 1 - y = sum over k of (-a)^k (t - k)^k / k!, as long as t > k (Bellman and Cooke, 1963).
    const auto exact = [](double a, double t) {
        long double rest = 0.0L;
        for (int k = 0; k <= t; ++k) {
            long double term = 1.0L;
            for (int i = 1; i <= k; ++i) term *= -a * (static_cast<long double>(t) - k) / i;
            rest += term;
        }
        return static_cast<double>(1.0L - rest);
    };
    for (double a : {0.1, 0.3678794411714423, 0.5, 1.0, 1.5}) {
        const Trend trend = continuous_trend(dead_time_integrator(a), {.gain = 1.0}, unit_step, 15.0, 1501);
        double worst = 0.0;
        for (std::size_t j = 0; j < trend.size(); ++j) {
            worst = std::max(worst, std::abs(trend.process_value[j] - exact(a, trend.time_s[j])));
            worst = std::max(worst, std::abs(trend.output[j] - (1.0 - exact(a, trend.time_s[j]))));
        }
        INFO("a " << a);
        CHECK(Difference{worst} <= 1e-14);
    }
}

TEST_CASE("First-order process under PI against 120 digits", "[independent computation]") {
    for (const auto& row : oracle::exact_trends) {
        const Trend trend = continuous_trend(first_order_plus_dead_time(row.K, row.tau, row.theta),
                                             {.gain = row.Kc, .integral_time = row.Ti, .setpoint_weight = row.b},
                                             duty_of(row.drive), row.horizon, row.points.size());
        INFO("theta/tau " << row.theta / row.tau << ", Ti " << row.Ti << ", load time " << row.drive.load_time);
        CHECK(worst_error(trend, row.points) <= 1e-13);
    }
}

namespace {

void check_rows(const oracle::StepsTrend& row, double allowed) {
    const auto G = TransferFunction::from_polynomials(row.numerator, row.denominator, row.theta);
    const PidSettings settings{.gain = row.Kc, .integral_time = row.Ti, .derivative_time = row.Td, .filter_time = row.Tf,
                               .measurement_filter_time = row.Tm, .setpoint_weight = row.b};
    const Trend trend = continuous_trend(G, settings, duty_of(row.drive), row.horizon, row.points.size());
    INFO(row.name);
    CHECK(worst_error(trend, row.points) <= allowed);
}

// The share P(n, x) of the gamma distribution for whole n: the step response of n equal lags. In long double, since n log x
// takes digits.
long double gamma_share(int n, long double x) {
    if (x <= 0.0L) return 0.0L;
    long double sum = 0.0L;
    if (x < n) {  // x^n e^-x / n! (1 + x/(n+1) + ...)
        long double term = std::exp(n * std::log(x) - x - std::lgamma(n + 1.0L));
        for (int i = n + 1; term > 1e-22L * sum; ++i) sum += term, term *= x / i;
        return sum;
    }
    long double term = std::exp((n - 1) * std::log(x) - x - std::lgamma(static_cast<long double>(n)));
    for (int i = n - 1; i >= 0 && term > 0.0L; --i) sum += term, term *= i / x;
    return 1.0L - sum;
}

}  // namespace

TEST_CASE("Higher orders, filters, neutral loops against DOP853 by steps", "[independent computation]") {
    for (const auto& row : oracle::steps_trends) check_rows(row, 1e-12);
}

TEST_CASE("Loops without dead time against residues at the closed loop's poles", "[independent computation]") {
    for (const auto& row : oracle::instant_trends) check_rows(row, 1e-12);
}

TEST_CASE("Equal lags and a dead time far longer or shorter: the series of the closed loop", "[closed form]") {
    // y = sum over k of (-1)^(k-1) Kc^k P(n k, (t - k theta)/T): as many lags again for every time round the loop.
    const struct { int n; double T, theta, Kc; } rows[] = {{1, 1.0, 50.0, 0.9}, {5, 0.1, 200.0, 0.8}, {20, 0.5, 1.0, 1.2},
                                                           {20, 0.01, 40.0, 0.7}, {3, 1e-4, 10.0, 0.95}, {8, 3.0, 0.7, 1.5}};
    for (const auto& row : rows) {
        const auto G = TransferFunction::from_factors({.lags = std::vector<double>(static_cast<std::size_t>(row.n), row.T), .dead_time = row.theta});
        const double horizon = 6.0 * row.theta + 12.0 * row.n * row.T;
        const Trend trend = continuous_trend(G, {.gain = row.Kc}, unit_step, horizon, 2001);
        double worst = 0.0;
        for (std::size_t j = 0; j < trend.size(); ++j) {
            const long double t = trend.time_s[j], theta = row.theta;
            long double y = 0.0L, factor = row.Kc;
            for (int k = 1; k * theta < t; ++k, factor *= -row.Kc) y += factor * gamma_share(row.n * k, (t - k * theta) / row.T);
            worst = std::max(worst, std::abs(trend.process_value[j] - static_cast<double>(y)));
        }
        INFO(row.n << " lags of " << row.T << " s, dead time " << row.theta);
        CHECK(Difference{worst} <= 1e-12);
    }
}

TEST_CASE("A first-order loop without dead time", "[closed form]") {
    // Ti = tau: L = a/s, y = 1 - exp(-a t) of the set point; K/tau (exp(-a t) - exp(-t/tau))/(1/tau - a) of the load.
    const double K = 2.0, tau = 5.0, Kc = 1.5, a = K * Kc / tau, at = 3.217;
    Duty duty = unit_step;
    duty.load_step = -0.5;
    duty.load_time = at;
    const Trend trend = continuous_trend(TransferFunction::from_factors({.gain = K, .lags = {tau}}),
                                         {.gain = Kc, .integral_time = tau}, duty, 20.0);
    double worst = 0.0;
    for (std::size_t j = 0; j < trend.size(); ++j) {
        const double t = trend.time_s[j], since = t - at;
        const double load = since > 0.0 ? K / tau * (std::exp(-a * since) - std::exp(-since / tau)) / (1.0 / tau - a) : 0.0;
        worst = std::max(worst, std::abs(trend.process_value[j] - (1.0 - std::exp(-a * t) - 0.5 * load)));
    }
    CHECK(trend.size() == 601);
    CHECK(trend.output[0] == Kc);
    CHECK(Difference{worst} <= 1e-14);
}

TEST_CASE("The sampled loop comes to the continuous trend as the scan time goes to 0", "[invariant]") {
    // Another program altogether: the block against the sampled process. Its error is of first order in the scan time.
    const auto G = second_order_plus_dead_time(1.3, 9.0, 4.0, 2.0);
    const PidSettings settings{.gain = 1.6, .integral_time = 10.0, .derivative_time = 2.0, .filter_time = 0.5,
                               .measurement_filter_time = 0.8, .setpoint_weight = 0.4};
    Duty duty{.setpoint_step = 4.0, .load_step = -3.0, .load_time = 40.0};
    double before = 0.0;
    for (double scan : {0.02, 0.01, 0.005}) {
        duty.scan_time = scan;
        const Trend sampled = simulate(G, settings, duty, 80.0);
        const Trend exact = continuous_trend(G, settings, duty, 80.0, sampled.size());
        double worst = 0.0;
        for (std::size_t j = 0; j < exact.size(); ++j) worst = std::max(worst, std::abs(exact.process_value[j] - sampled.process_value[j]));
        INFO("scan " << scan << ", difference " << worst);
        CHECK(worst < 0.4 * scan);
        if (before > 0.0) CHECK(std::abs(worst / before - 0.5) < 0.05);
        before = worst;
        CHECK(exact.setpoint == sampled.setpoint);
        CHECK(exact.duty == sampled.duty);
        CHECK(exact.measured == exact.process_value);
        CHECK(exact.valve_position == exact.output);
    }
}

TEST_CASE("Limits do not act but are looked at, between the points too", "[invariant]") {
    const auto G = first_order_plus_dead_time(1.0, 10.0, 2.0);
    const PidSettings settings{.gain = 3.0, .integral_time = 10.0};
    Duty duty{.setpoint_step = 10.0, .rest_output = 50.0};
    const auto highest = [&](const Trend& t) { return *std::max_element(t.output.begin(), t.output.end()); };
    const Trend fine = continuous_trend(G, settings, duty, 60.0, 60001);
    const double peak = highest(fine);
    for (double theta : {2.0, 0.0}) {
        const auto loop = G.with_dead_time(theta);
        const Trend all = continuous_trend(loop, settings, duty, 60.0, 60001);
        for (double above : {1e-3, -1e-3}) {
            duty.output_high = highest(all) + above;
            const Trend coarse = continuous_trend(loop, settings, duty, 60.0, 4);
            INFO("dead time " << theta << ", limit above the peak by " << above);
            CHECK(coarse.limited == (above < 0.0));
            CHECK(absolute_error(coarse.output.back(), all.output.back()) <= 1e-11);
        }
        duty.output_high = 100.0;
    }
    CHECK(peak > 80.0);  // the kick of 30 and what integral action adds within the dead time
    // At rest on a limit, nothing to do.
    CHECK_FALSE(continuous_trend(G, settings, {.load_step = 0.0, .rest_output = 0.0}, 60.0).limited);
}

TEST_CASE("What the continuous trend does not have is refused by name", "[invariant]") {
    using enum error_code;
    const auto G = first_order_plus_dead_time(1.0, 10.0, 2.0);
    const PidSettings settings{.gain = 3.0, .integral_time = 10.0};
    const double nan = std::numeric_limits<double>::quiet_NaN(), inf = std::numeric_limits<double>::infinity();
    const auto refused = [&](error_code code, std::initializer_list<const char*> words, const Duty& duty) {
        check_refused(code, words, [&] { (void)continuous_trend(G, settings, duty, 60.0); });
    };
    Duty duty = unit_step;
    duty.noise = 0.1, refused(conflicting_arguments, {"duty.noise", "leave it out"}, duty), duty = unit_step;
    duty.output_rate_limit = 1.0, refused(conflicting_arguments, {"duty.output_rate_limit"}, duty), duty = unit_step;
    duty.valve.stick = 0.5, refused(conflicting_arguments, {"duty.valve"}, duty), duty = unit_step;
    duty.transmitter.lag = 0.5, refused(conflicting_arguments, {"duty.transmitter"}, duty), duty = unit_step;
    duty.disturbance = {1.0}, refused(conflicting_arguments, {"duty.disturbance"}, duty), duty = unit_step;
    duty.setpoint_step = nan, refused(not_finite, {"duty.setpoint_step", "nan"}, duty);
    const auto extent = [&](double horizon, std::size_t points, std::initializer_list<const char*> words, error_code code = out_of_domain) {
        check_refused(code, words, [&] { (void)continuous_trend(G, settings, unit_step, horizon, points); });
    };
    extent(0.0, 601, {"horizon is 0", "above 0"});
    extent(-1.0, 601, {"horizon is -1"});
    extent(nan, 601, {"horizon is nan"}, not_finite);
    extent(inf, 601, {"horizon is inf"}, not_finite);
    extent(3e6, 601, {"horizon is 3e+06", "million dead times of 2 s"});
    extent(60.0, 1, {"points is 1", "from 2"});
    extent(60.0, 0, {"points is 0"});
    const auto of = [&](const Factors& f, const PidSettings& s, double horizon, std::initializer_list<const char*> words) {
        check_refused(out_of_domain, words, [&] { (void)continuous_trend(TransferFunction::from_factors(f), s, unit_step, horizon); });
    };
    of({.leads = {1.0, 1.0}, .lags = {2.0}}, settings, 10.0, {"relative degree", "-1"});
    of({.lags = std::vector<double>(21, 1.0)}, settings, 10.0, {"order is 21", "20"});
    of({.leads = {1.0}, .lags = {2.0}, .dead_time = 1.0}, {.gain = 1.0, .derivative_time = 1.0}, 10.0, {"settings.filter_time", "filter"});
    of({.gain = -1.0}, {.gain = 1.0}, 10.0, {"instant gain", "-1"});
    of({.gain = -1.0, .lags = {-1.0}, .dead_time = 0.1}, {.gain = 0.5}, 1e4, {"grows beyond all numbers"});
    of({.gain = -1.0, .lags = {-1.0}}, {.gain = 0.5}, 1e4, {"grows beyond all numbers"});
    check_refused(out_of_domain, {"settings.gain"}, [&] { (void)continuous_trend(G, {}, unit_step, 60.0); });
}

TEST_CASE("Every legal loop gives finite numbers, or says that it grows beyond them, and keeps superposition", "[invariant]") {
    int kept = 0;
    oracle::Seeded random(20261201);
    INFO("seed 20261201");
    for (int round = 0; round < 200; ++round) {
        Factors f{.gain = random.scaled(0.1, 10.0), .integrators = random.below(2), .dead_time = random.chance(0.2) ? 0.0 : random.scaled(0.01, 30.0)};
        for (int i = random.below(5); i >= 0; --i) f.lags.push_back(random.scaled(0.02, 20.0));
        if (random.chance(0.5)) f.lag_pairs.push_back({random.scaled(0.1, 5.0), random.uniform(0.1, 1.5)});
        if (random.chance(0.5)) f.lead_pairs.push_back({random.scaled(0.1, 5.0), random.uniform(-1.0, 1.5)});
        else if (random.chance(0.5)) f.leads.push_back(random.chance(0.5) ? random.scaled(0.1, 9.0) : -random.scaled(0.1, 9.0));
        const auto G = TransferFunction::from_factors(f);
        if (G.relative_degree() < 0) continue;
        const PidSettings settings{.gain = random.scaled(0.01, 0.5), .integral_time = random.scaled(1.0, 30.0),
                                   .derivative_time = random.chance(0.5) ? random.scaled(0.05, 2.0) : 0.0,
                                   .filter_time = random.scaled(0.01, 1.0), .measurement_filter_time = random.chance(0.3) ? 0.3 : 0.0,
                                   .setpoint_weight = random.uniform(0.0, 1.0)};
        const double horizon = f.dead_time > 0.0 ? random.uniform(3.0, 15.0) * f.dead_time : 20.0;
        const oracle::TrendDrive both{1.0, random.chance(0.5) ? 0.0 : random.uniform(0.0, horizon), -0.6, random.uniform(0.0, horizon),
                                      random.chance(0.5) ? 0.0 : random.uniform(0.0, horizon)};
        oracle::TrendDrive first = both, second = both;
        first.load = second.setpoint = 0.0;
        INFO("round " << round << ": " << G.text() << ", horizon " << horizon);
        Trend sum, a, b;
        try {
            sum = continuous_trend(G, settings, duty_of(both), horizon, 97);
            a = continuous_trend(G, settings, duty_of(first), horizon, 97);
            b = continuous_trend(G, settings, duty_of(second), horizon, 97);
        } catch (const Error& e) {
            CHECK(std::string(e.what()).find("grows beyond all numbers") != std::string::npos);
            continue;
        }
        ++kept;
        double worst = 0.0, size = 0.0;
        for (std::size_t j = 0; j < 97; ++j) {
            worst = std::max({worst, std::abs(a.process_value[j] + b.process_value[j] - sum.process_value[j]),
                              std::abs(a.output[j] + b.output[j] - sum.output[j])});
            size = std::max({size, std::abs(a.process_value[j]), std::abs(b.process_value[j]), std::abs(a.output[j]), std::abs(b.output[j])});
        }
        CHECK(is_finite(size));
        CHECK(Difference{worst / size} <= 1e-12);
    }
    CHECK(kept >= 150);
}
