// Direct synthesis and the rows of the IMC table that the first-order dead time gives.
// Rows A to O: Chien and Fruehauf, Chem. Eng. Prog. 86(10), 1990, as tabulated in Seborg et al.
// (Table 12.1), formulas published (recalled from memory), instances computed from them with
// K = 2, tau = 10, tau1 = 10, tau2 = 5, tau3 = 2, theta = 1.5, tau_c = 3, zeta = 0.7, beta = 2.
#include "core/oracle_tools.hpp"
#include "tauwright/control/control.hpp"
#include "tauwright/model/forms.hpp"
#include "tauwright/synthesize/synthesize.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::relative_error;

namespace {

TransferFunction from(Factors f) { return TransferFunction::from_factors(std::move(f)); }

void check_settings(const char* row, const TransferFunction& G, double tau_c, double Kc, double Ti, double Td, double tolerance = 1e-12) {
    const Synthesis s = synthesize(G, {.time_constant = tau_c});
    INFO(row << ": " << G.text() << ", tau_c " << tau_c);
    CHECK(s.buildable);
    REQUIRE(s.settings.has_value());
    CHECK(relative_error(s.settings->gain, Kc) <= tolerance);
    REQUIRE(s.settings->integral_time.has_value());
    CHECK(relative_error(*s.settings->integral_time, Ti) <= tolerance);
    CHECK(relative_error(s.settings->derivative_time, Td) <= tolerance);
    CHECK(s.settings->setpoint_weight == 1.0);
}

}  // namespace

TEST_CASE("IMC table, processes without dead time", "[published]") {
    check_settings("IMC-A", from({.gain = 2.0, .lags = {10.0}}), 3.0, 1.6666666666666667, 10.0, 0.0);
    check_settings("IMC-B", from({.gain = 2.0, .lags = {10.0, 5.0}}), 3.0, 2.5, 15.0, 3.3333333333333335);
    check_settings("IMC-C", from({.gain = 2.0, .lag_pairs = {{10.0, 0.7}}}), 3.0, 2.3333333333333335, 14.0, 7.142857142857143);
    check_settings("IMC-D", from({.gain = 2.0, .leads = {-2.0}, .lag_pairs = {{10.0, 0.7}}}), 3.0, 1.4, 14.0, 7.142857142857143);
    check_settings("IMC-E, 2/(K tau_c), 2 tau_c", from({.gain = 2.0, .integrators = 1}), 3.0, 1.0 / 3.0, 6.0, 0.0);
    check_settings("IMC-F", from({.gain = 2.0, .integrators = 1, .lags = {10.0}}), 3.0, 0.8888888888888888, 16.0, 3.75);
}

TEST_CASE("IMC table, dead time to first order", "[published]") {
    check_settings("IMC-G", first_order_plus_dead_time(2.0, 10.0, 1.5), 3.0, 1.1111111111111112, 10.0, 0.0);
    check_settings("IMC-I", from({.gain = 2.0, .leads = {2.0}, .lags = {10.0, 5.0}, .dead_time = 1.5}), 3.0, 1.4444444444444444, 13.0, 1.8461538461538463);
    check_settings("IMC-J", from({.gain = 2.0, .leads = {2.0}, .lag_pairs = {{10.0, 0.7}}, .dead_time = 1.5}), 3.0, 1.3333333333333335, 12.0, 6.333333333333333);
    check_settings("IMC-K", from({.gain = 2.0, .leads = {-2.0}, .lags = {10.0, 5.0}, .dead_time = 1.5}), 3.0, 1.1893491124260356, 15.461538461538462, 3.6953693073096057);
    const double x = 2.0 * 1.5 / (2.0 + 3.0 + 1.5), Ti = 14.0 + x;
    check_settings("IMC-L", from({.gain = 2.0, .leads = {-2.0}, .lag_pairs = {{10.0, 0.7}}, .dead_time = 1.5}), 3.0, Ti / (2.0 * 6.5), Ti, 100.0 / Ti + x);
    check_settings("IMC-M", integrating_plus_dead_time(2.0, 1.5), 3.0, 0.18518518518518517, 7.5, 0.0);
    check_settings("IMC-O", integrating_plus_dead_time(2.0, 1.5, 10.0), 3.0, 17.5 / (2.0 * 20.25), 17.5, 10.0 * 7.5 / 17.5);
}

TEST_CASE("the rows' formulas at random numbers", "[published]") {
    constexpr std::uint64_t seed = 20240717;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 200; ++i) {
        const double K = (random.chance(0.5) ? 1.0 : -1.0) * random.scaled(0.01, 100.0), t1 = random.scaled(0.1, 100.0), t2 = random.scaled(0.1, 100.0);
        const double t3 = random.scaled(0.1, 10.0), th = random.scaled(0.05, 20.0), tc = random.scaled(0.1, 50.0), z = random.uniform(0.1, 2.0);
        check_settings("G", first_order_plus_dead_time(K, t1, th), tc, t1 / (K * (tc + th)), t1, 0.0);
        check_settings("second order", second_order_plus_dead_time(K, t1, t2, th), tc, (t1 + t2) / (K * (tc + th)), t1 + t2, t1 * t2 / (t1 + t2));
        check_settings("second order, pair", oscillatory_plus_dead_time(K, t1, z, th), tc, 2.0 * z * t1 / (K * (tc + th)), 2.0 * z * t1, t1 / (2.0 * z));
        check_settings("M", integrating_plus_dead_time(K, th), tc, (2.0 * tc + th) / (K * (tc + th) * (tc + th)), 2.0 * tc + th, 0.0, 1e-11);
        const double Ti = 2.0 * tc + t1 + th;
        check_settings("O", integrating_plus_dead_time(K, th, t1), tc, Ti / (K * (tc + th) * (tc + th)), Ti, (2.0 * tc + th) * t1 / Ti, 1e-11);
        const double x = t3 * th / (tc + t3 + th), TiK = t1 + t2 + x;
        check_settings("K", from({.gain = K, .leads = {-t3}, .lags = {t1, t2}, .dead_time = th}), tc, TiK / (K * (tc + t3 + th)), TiK, x + t1 * t2 / TiK, 1e-11);
    }
}

TEST_CASE("direct synthesis rows", "[published]") {
    // DS-SEB121: Seborg et al., example 12.1 (from memory), tauI = 15, tauD = 3.33.
    check_settings("DS-SEB121 tc 1", second_order_plus_dead_time(2.0, 10.0, 5.0, 1.0), 1.0, 3.75, 15.0, 10.0 / 3.0);
    check_settings("DS-SEB121 tc 3", second_order_plus_dead_time(2.0, 10.0, 5.0, 1.0), 3.0, 1.875, 15.0, 10.0 / 3.0);
    CHECK(absolute_error(synthesize(second_order_plus_dead_time(2.0, 10.0, 5.0, 1.0), {.time_constant = 1.0}).settings->derivative_time, 3.33) <= 0.005);
    // DS-NL: published example 1.2 exp(-0.5 s)/((8 s + 1)(2 s + 1)).
    const auto G = second_order_plus_dead_time(1.2, 8.0, 2.0, 0.5);
    check_settings("DS-NL-Kc-0.5", G, 0.5, 8.333333333333334, 10.0, 1.6);
    check_settings("DS-NL-Kc-1", G, 1.0, 5.555555555555556, 10.0, 1.6);
    check_settings("DS-NL-Kc-3", G, 3.0, 2.380952380952381, 10.0, 1.6);
    // DS-SEB154 (from memory): 1.54 exp(-1.07 s)/(5.93 s + 1).
    const auto third = synthesize(first_order_plus_dead_time(1.54, 5.93, 1.07), {.time_constant = 1.97});
    const auto equal = synthesize(first_order_plus_dead_time(1.54, 5.93, 1.07), {.time_constant = 1.07});
    CHECK(absolute_error(third.settings->gain, 1.27) <= 0.005);
    CHECK(absolute_error(equal.settings->gain, 1.80) <= 0.005);
    CHECK(absolute_error(equal.settings->integral_time.value(), 5.93) <= 0.005);
    // DS-SEB124-b (from memory): exp(-s)/s with tau_c = 2; CS-INT-PI has the same formula.
    const auto slow = synthesize(integrating_plus_dead_time(1.0, 1.0), {.time_constant = 2.0});
    CHECK(absolute_error(slow.settings->gain, 0.556) <= 0.0005);
    CHECK(relative_error(slow.settings->integral_time.value(), 5.0) <= 1e-12);
}

TEST_CASE("C01, C04, C05: settings of the trade", "[published]") {
    // Recalled from memory, recomputed, 1e-12.
    check_settings("C01", first_order_plus_dead_time(2.0, 10.0, 3.0), 5.0, 0.625, 10.0, 0.0);
    const auto G = second_order_plus_dead_time(1.5, 20.0, 5.0, 2.0);
    check_settings("C04", G, 4.0, 2.7777777777777777, 25.0, 4.0);
    const auto e = entered_as(*synthesize(G, {.time_constant = 4.0}).settings, {.equation = Equation::series});
    CHECK(relative_error(e.gain.value(), 2.2222222222222223) <= 1e-12);
    CHECK(relative_error(e.integral_time.value(), 20.0) <= 1e-12);
    CHECK(relative_error(e.derivative_time.value(), 5.0) <= 1e-12);
    // C05 (ii), in minutes: K' = 0.05, theta = 1, tau_c = 4; the same in seconds.
    check_settings("C05", integrating_plus_dead_time(0.05, 1.0), 4.0, 7.2, 9.0, 0.0);
    check_settings("C05 in seconds", integrating_plus_dead_time(0.05 / 60.0, 60.0), 240.0, 7.2, 540.0, 0.0);
}

TEST_CASE("C10: the attained first-order response", "[published]") {
    // Recalled from memory, recomputed, 1e-9: 63.2 % at theta + tau_c, 95 % after 2.9957, 98 % after 3.9120 time constants.
    const auto T = synthesize(second_order_plus_dead_time(1.5, 20.0, 5.0, 2.0), {.time_constant = 4.0}).attained;
    const double times[] = {2.0 + 4.0, 2.0 + 4.0 * 2.995732273553991, 2.0 + 4.0 * 3.912023005428146};
    const auto y = step_response(T, times);
    CHECK(relative_error(y[0], 1.0 - std::exp(-1.0)) <= 1e-9);
    CHECK(relative_error(y[1], 0.95) <= 1e-9);
    CHECK(relative_error(y[2], 0.98) <= 1e-9);
}

TEST_CASE("IMC-U: a response taken literally on an unstable process", "[published]") {
    // Bequette 2003, example 9.4 and table 9-3: G = 1/(-s+1), gamma = lambda (lambda + 2), kc = -(lambda + 2)/lambda.
    const struct { double lambda, gamma, kc; } rows[] = {{0.5, 1.25, -5.0}, {1.0, 3.0, -3.0}, {2.0, 8.0, -2.0}};
    for (const auto& row : rows) {
        const auto T = from({.leads = {row.gamma}, .lags = {row.lambda, row.lambda}});
        const Synthesis s = synthesize(from({.lags = {-1.0}}), {.transfer_function = T});
        INFO("lambda " << row.lambda);
        CHECK(s.buildable);
        REQUIRE(s.settings.has_value());
        CHECK(relative_error(s.settings->gain, row.kc) <= 1e-12);
        CHECK(relative_error(s.settings->integral_time.value(), row.gamma) <= 1e-12);
        CHECK(s.pid_expressible);
    }
}
