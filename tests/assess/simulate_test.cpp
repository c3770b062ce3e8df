#include <algorithm>
#include <deque>
#include <limits>
#include <numeric>

#include "core/oracle_tools.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::check_refused;
using oracle::relative_error;

namespace {

// The loop L = exp(-s)/((tau_c + 1) s) made of a process and the PI of direct synthesis, theta = 1.
Trend direct_synthesis_trend(double tau_c, double scan_time, double horizon) {
    const double K = 1.0, tau = 4.0;
    const Duty duty{.setpoint_step = 1.0, .scan_time = scan_time, .output_low = -1000.0, .output_high = 1000.0, .rest_output = 0.0, .rest_process_value = 0.0};
    return simulate(first_order_plus_dead_time(K, tau, 1.0), {.gain = tau / (K * (tau_c + 1.0)), .integral_time = tau}, duty, horizon);
}

double time_of_first(const Trend& t, double level) {
    const auto it = std::find_if(t.process_value.begin(), t.process_value.end(), [&](double y) { return y >= level; });
    return t.time_s[static_cast<std::size_t>(it - t.process_value.begin())];
}

double last_outside(const Trend& t, double band) {
    double last = 0.0;
    for (std::size_t k = 0; k < t.size(); ++k)
        if (std::abs(t.process_value[k] - 1.0) > band) last = t.time_s[k];
    return last;
}

}  // namespace

TEST_CASE("C09: set-point step of the direct-synthesis loop", "[published]") {
    // Trade fact C09 (derived, recomputed, 2e-3): theta = 1; overshoot in percent, times in theta.
    const struct { double tc, overshoot, ts2, ts5, t63; } rows[] = {{1.0, 4.051959958333318, 6.057, 3.362, 2.285},
                                                                    {2.0, 0.0, 7.878, 6.3950000000000005, 3.097},
                                                                    {3.0, 0.0, 12.184000000000001, 9.620000000000001, 4.035}};
    for (const auto& row : rows) {
        const Trend trend = direct_synthesis_trend(row.tc, 2e-5, 16.0);
        const Figures f = figures(trend);
        INFO("tau_c / theta " << row.tc);
        CHECK(absolute_error(f.overshoot_percent.value(), row.overshoot) <= 2e-3);
        CHECK(absolute_error(f.settling_time.value(), row.ts2) <= 2e-3);
        CHECK(absolute_error(last_outside(trend, 0.05), row.ts5) <= 2e-3);
        CHECK(absolute_error(time_of_first(trend, 1.0 - std::exp(-1.0)), row.t63) <= 2e-3);
    }
}

TEST_CASE("C15: monotone exactly where (tau_c + theta)/theta is at least e", "[published]") {
    // Trade fact C15 (recalled, recomputed): threshold tau_c/theta = 1.718281828459045.
    for (double tc : {1.2, 1.4, 1.6}) CHECK(figures(direct_synthesis_trend(tc, 1e-3, 40.0)).overshoot_percent.value() > 1e-4);
    for (double tc : {1.75, 1.9, 2.5}) CHECK(figures(direct_synthesis_trend(tc, 1e-3, 40.0)).overshoot_percent.value() <= 1e-9);
}

TEST_CASE("STEP rows: exact step responses of dead time and integrator in a loop", "[published]") {
    // Derived (exact formula; mpmath): L = a exp(-s)/s, y(t); peak 1.0405..., IAE 2.16869... for a = 0.5.
    const struct { double a, t, y; } rows[] = {{0.5, 1.5, 0.25}, {0.5, 3.0, 0.875}, {0.5, 4.0, 1.0208333333333333}, {0.5, 7.5, 1.0015838744148375},
                                               {1.0, 2.0, 1.0}, {1.0, 3.5, 1.3958333333333333}, {1.0, 4.0, 1.1666666666666667},
                                               {1.0, 7.5, 1.107879154265873}, {1.0, 10.0, 0.94702656525573192}};
    constexpr double h = 1e-4;
    for (double a : {0.5, 1.0}) {
        const Trend trend = direct_synthesis_trend(1.0 / a - 1.0, h, 12.0);
        for (const auto& row : rows)
            if (row.a == a) CHECK(absolute_error(trend.process_value[static_cast<std::size_t>(std::lround(row.t / h))], row.y) <= 1e-3);
    }
    const Figures f = figures(direct_synthesis_trend(1.0, h, 60.0));
    CHECK(absolute_error(f.overshoot_percent.value(), 4.05195997379407) <= 2e-2);
    CHECK(relative_error(f.integrated_absolute_error, 2.1686906189385646) <= 1e-3);
}

TEST_CASE("IMC-U-os: overshoot on an unstable process", "[published]") {
    // Bequette 2003 example 9.4 (from memory), overshoot derived: G = 1/(-s + 1), kc and tauI = gamma, PI, no dead time.
    const struct { double lambda, kc, gamma, overshoot; } rows[] = {{0.5, -5.0, 1.25, 0.28331340425634276}, {1.0, -3.0, 3.0, 0.44626032029685966}, {2.0, -2.0, 8.0, 0.79079141434718031}};
    const auto G = TransferFunction::from_factors({.lags = {-1.0}});
    for (const auto& row : rows) {
        const Duty duty{.setpoint_step = 1.0, .scan_time = 1e-4, .output_low = -1e3, .output_high = 1e3, .rest_output = 0.0, .rest_process_value = 0.0};
        const Figures f = figures(simulate(G, {.gain = row.kc, .integral_time = row.gamma}, duty, 30.0));
        INFO("lambda " << row.lambda);
        CHECK(absolute_error(f.overshoot_percent.value(), 100.0 * row.overshoot) <= 0.05);
    }
}

TEST_CASE("C11: integrated error after a load step", "[published]") {
    // Trade fact C11 (recalled, recomputed): d Ti / Kc = 80 %s for Kc = 0.625, Ti = 10, d = 5 %; C01's process.
    // The sampled integral makes it exact at every scan time.
    for (double h : {0.1, 1.0, 2.0}) {
        const Duty duty{.load_step = 5.0, .scan_time = h};
        const Trend t = simulate(first_order_plus_dead_time(2.0, 10.0, 3.0), {.gain = 0.625, .integral_time = 10.0}, duty, 1000.0);
        double sum = 0.0;
        for (std::size_t k = 0; k < t.size(); ++k) sum += (t.setpoint[k] - t.process_value[k]) * h;
        INFO("scan " << h);
        CHECK(relative_error(sum, -80.0) <= 1e-9);
        CHECK(figures(t).integrated_absolute_error >= 80.0 * (1.0 - 1e-9));
        CHECK_FALSE(t.limited);
        CHECK_FALSE(figures(t).overshoot_percent.has_value());
        CHECK_FALSE(figures(t).settling_time.has_value());
        CHECK(absolute_error(t.output.back(), 45.0) <= 1e-9);
    }
}

TEST_CASE("the trend equals a recursion written from the equations", "[independent computation]") {
    constexpr std::uint64_t seed = 20240716;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int limited = 0;
    for (int i = 0; i < 60; ++i) {
        const double K = random.scaled(0.3, 3.0), tau = random.scaled(2.0, 50.0), h = random.scaled(0.05, 2.0);
        const int d = random.below(8);
        const double Kc = random.scaled(0.2, 1.5) / K, Ti = tau * random.uniform(0.5, 1.5), Td = random.chance(0.5) ? 0.1 * tau : 0.0, Tf = 0.3 * Td, Tm = random.chance(0.5) ? 0.2 : 0.0;
        const double weight = random.uniform(0.0, 1.0), step = random.uniform(-20.0, 20.0), load = random.uniform(-10.0, 10.0), rest = random.uniform(20.0, 80.0), pv = random.uniform(20.0, 80.0);
        const int load_scan = 40;
        const Duty duty{.setpoint_step = step, .load_step = load, .load_time = load_scan * h, .scan_time = h, .rest_output = rest, .rest_process_value = pv};
        const PidSettings s{.gain = Kc, .integral_time = Ti, .derivative_time = Td, .filter_time = Tf, .measurement_filter_time = Tm, .setpoint_weight = weight};
        const Trend t = simulate(first_order_plus_dead_time(K, tau, d * h), s, duty, 120.0 * h);
        REQUIRE(t.size() == 121);

        std::deque<double> line(static_cast<std::size_t>(d), 0.0);
        const double a = std::exp(-h / tau), r = pv + step, Tt = std::max(Td > 0.0 ? std::sqrt(Ti * Td) : Ti, h);
        double x = 0.0, y = pv, D = 0.0, I = rest - Kc * (weight * pv - pv), worst = 0.0;
        bool touched = false;
        for (std::size_t k = 0; k < t.size(); ++k) {
            const double measured = pv + x, before = y;
            worst = std::max({worst, std::abs(t.process_value[k] - measured), std::abs(t.time_s[k] - static_cast<double>(k) * h), std::abs(t.setpoint[k] - r)});
            y += h / (Tm + h) * (measured - y);
            D = (Tf * D - Kc * Td * (y - before)) / (Tf + h);
            I += Kc * h / Ti * (r - y);
            const double v = Kc * (weight * r - y) + I + D, u = std::clamp(v, 0.0, 100.0);
            touched |= u != v;
            I += h / Tt * (u - v);
            worst = std::max(worst, std::abs(t.output[k] - u));
            line.push_back(u - rest + (static_cast<int>(k) >= load_scan ? load : 0.0));
            x = a * x + K * (1.0 - a) * line.front();
            line.pop_front();
        }
        INFO("loop " << i << " K " << K << " tau " << tau << " h " << h << " d " << d);
        CHECK(absolute_error(worst, 0.0) <= 1e-9);
        CHECK(t.limited == touched);
        limited += touched;
    }
    CHECK(limited > 3);
}

TEST_CASE("a loop at rest stays there, about its own operating point", "[invariant]") {
    const Duty duty{.scan_time = 0.5, .rest_output = 37.0, .rest_process_value = 81.0};
    const Trend t = simulate(integrating_plus_dead_time(0.1, 2.0), {.gain = 1.0, .integral_time = 30.0}, duty, 100.0);
    for (std::size_t k = 0; k < t.size(); ++k) {
        CHECK(t.process_value[k] == 81.0);
        CHECK(t.output[k] == 37.0);
    }
    CHECK(figures(t).valve_travel == 0.0);
    CHECK(figures(t).integrated_absolute_error == 0.0);
}

TEST_CASE("E06: noise reaches the output with the controller's gain", "[published]") {
    // Trade fact E06 (recalled, recomputed): sd of the output about Kc sigma = 0.5 for Kc = 2.5, sigma = 0.2 %.
    const auto nothing = first_order_plus_dead_time(1e-9, 1.0, 0.0);
    const Duty duty{.noise = 0.2, .seed = 5, .scan_time = 1.0};
    const Trend t = simulate(nothing, {.gain = 2.5}, duty, 200000.0);
    double sum = 0.0, squares = 0.0, lag_one = 0.0;
    for (std::size_t k = 0; k < t.size(); ++k) {
        const double v = t.output[k] - 50.0;
        sum += v;
        squares += v * v;
        if (k > 0) lag_one += v * (t.output[k - 1] - 50.0);
    }
    const double n = static_cast<double>(t.size());
    CHECK(absolute_error(sum / n, 0.0) <= 0.005);          // 4.5 standard errors
    CHECK(relative_error(std::sqrt(squares / n), 0.5) <= 0.01);
    CHECK(absolute_error(lag_one / squares, 0.0) <= 0.01);  // white
    for (std::size_t k = 0; k < t.size(); ++k) if (std::abs(t.process_value[k] - 50.0) > 1e-6) FAIL_CHECK("noise in the process's own value");
    const Trend same = simulate(nothing, {.gain = 2.5}, duty, 50.0);
    CHECK(std::equal(same.output.begin(), same.output.end(), t.output.begin()));
    Duty other = duty;
    other.seed = 6;
    CHECK(simulate(nothing, {.gain = 2.5}, other, 50.0).output != same.output);
}

TEST_CASE("what cannot be simulated is refused", "[regression]") {
    const auto G = first_order_plus_dead_time(1.0, 1.0, 1.0);
    const PidSettings s{.gain = 1.0, .integral_time = 1.0};
    const auto with = [](auto change) {
        Duty d{.setpoint_step = 1.0, .scan_time = 0.1};
        change(d);
        return d;
    };
    check_refused(error_code::missing_argument, {"scan_time"}, [&] { simulate(G, s, Duty{}, 10.0); });
    check_refused(error_code::out_of_domain, {"duty.scan_time", "0"}, [&] { simulate(G, s, with([](Duty& d) { d.scan_time = 0.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.scan_time", "-1"}, [&] { simulate(G, s, with([](Duty& d) { d.scan_time = -1.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.output_high", "0"}, [&] { simulate(G, s, with([](Duty& d) { d.output_high = 0.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.rest_output", "101"}, [&] { simulate(G, s, with([](Duty& d) { d.rest_output = 101.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.noise", "-1"}, [&] { simulate(G, s, with([](Duty& d) { d.noise = -1.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.load_time", "-1"}, [&] { simulate(G, s, with([](Duty& d) { d.load_time = -1.0; }), 10.0); });
    check_refused(error_code::not_finite, {"duty.setpoint_step", "nan"}, [&] { simulate(G, s, with([](Duty& d) { d.setpoint_step = std::nan(""); }), 10.0); });
    check_refused(error_code::out_of_domain, {"horizon", "0.1"}, [&] { simulate(G, s, with([](Duty&) {}), 0.1); });
    check_refused(error_code::out_of_domain, {"horizon"}, [&] { simulate(G, s, with([](Duty&) {}), 1e9); });
    check_refused(error_code::not_finite, {"horizon", "inf"}, [&] { simulate(G, s, with([](Duty&) {}), std::numeric_limits<double>::infinity()); });
    check_refused(error_code::out_of_domain, {"settings.gain"}, [&] { simulate(G, {}, with([](Duty&) {}), 10.0); });
    check_refused(error_code::out_of_domain, {"horizon", "5", "duty.scan_time", "8"}, [&] { simulate(G, s, with([](Duty& d) { d.scan_time = 8.0; }), 5.0); });
    check_refused(error_code::out_of_domain, {"horizon", "5", "3"}, [&] { simulate(G, s, with([](Duty& d) { d.scan_time = 3.0; }), 5.0); });
    check_refused(error_code::out_of_domain, {"duty.valve.stick", "-0.5"}, [&] { simulate(G, s, with([](Duty& d) { d.valve.stick = -0.5; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.valve.dead_band", "-1"}, [&] { simulate(G, s, with([](Duty& d) { d.valve.dead_band = -1.0; }), 10.0); });
    check_refused(error_code::not_finite, {"duty.valve.resolution", "nan"}, [&] { simulate(G, s, with([](Duty& d) { d.valve.resolution = std::nan(""); }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.valve.travel_rate_per_s", "0"}, [&] { simulate(G, s, with([](Duty& d) { d.valve.travel_rate_per_s = 0.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.transmitter.lag", "-2"}, [&] { simulate(G, s, with([](Duty& d) { d.transmitter.lag = -2.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.transmitter.resolution", "-2"}, [&] { simulate(G, s, with([](Duty& d) { d.transmitter.resolution = -2.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.setpoint_ramp_time", "-3"}, [&] { simulate(G, s, with([](Duty& d) { d.setpoint_ramp_time = -3.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.load_ramp_time", "-3"}, [&] { simulate(G, s, with([](Duty& d) { d.load_ramp_time = -3.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.output_rate_limit", "0"}, [&] { simulate(G, s, with([](Duty& d) { d.output_rate_limit = 0.0; }), 10.0); });
    check_refused(error_code::not_finite, {"duty.disturbance[2]", "nan"}, [&] { simulate(G, s, with([](Duty& d) { d.disturbance = {0.0, 1.0, std::nan("")}; }), 10.0); });
    check_refused(error_code::out_of_domain, {"duty.load_step", "1e+200"}, [&] { simulate(G, s, with([](Duty& d) { d.load_step = 1e200; }), 10.0); });
    check_refused(error_code::out_of_domain, {"process order", "21"}, [&] { simulate(TransferFunction::from_factors({.lags = std::vector<double>(21, 1.0)}), s, with([](Duty&) {}), 10.0); });
    const auto high = TransferFunction::from_factors({.lags = std::vector<double>(20, 0.2)});
    CHECK(simulate(high, s, with([](Duty&) {}), 10.0).size() == 101);
    check_refused(error_code::out_of_domain, {"process order", "20", "up to 19", "transmitter lag"}, [&] { simulate(high, s, with([](Duty& d) { d.transmitter.lag = 1.0; }), 10.0); });
    check_refused(error_code::out_of_domain, {"relative degree", "-1"}, [&] { simulate(TransferFunction::from_factors({.leads = {1.0}}), s, with([](Duty&) {}), 10.0); });
}
