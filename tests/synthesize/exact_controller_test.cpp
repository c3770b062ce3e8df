#include "core/oracle_tools.hpp"
#include "tauwright/model/forms.hpp"
#include "tauwright/synthesize/synthesize.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

namespace {

TransferFunction from(Factors f) { return TransferFunction::from_factors(std::move(f)); }

TransferFunction random_process(oracle::Seeded& random) {
    Factors f{.gain = (random.chance(0.5) ? 1.0 : -1.0) * random.scaled(0.01, 100.0), .integrators = random.below(2)};
    for (int i = 1 + random.below(3) - f.integrators; i > 0; --i) f.lags.push_back(random.scaled(0.5, 50.0));
    if (random.chance(0.3)) f.lag_pairs.push_back({random.scaled(0.5, 20.0), random.uniform(0.1, 1.5)});
    const int poles = f.integrators + static_cast<int>(f.lags.size() + 2 * f.lag_pairs.size());
    if (poles > 1 && random.chance(0.5)) f.leads.push_back((random.chance(0.5) ? 1.0 : -1.0) * random.scaled(0.5, 20.0));
    f.dead_time = random.chance(0.2) ? 0.0 : random.scaled(0.1, 20.0);
    return from(f);
}

}  // namespace

TEST_CASE("the exact controller gives exactly the default response, and 1 - T vanishes where it must", "[invariant]") {
    constexpr std::uint64_t seed = 20240718;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 300; ++i) {
        const auto G = random_process(random);
        const double tau_c = random.scaled(0.2, 30.0);
        const int order = 1 + random.below(3);
        const Synthesis s = synthesize(G, {.time_constant = tau_c, .order = order});
        INFO(G.text() << ", tau_c " << tau_c << ", order " << order);
        REQUIRE(s.buildable);
        REQUIRE(s.controller.has_value());
        const TransferFunction& T = s.attained;
        for (int k = 0; k < 20; ++k) {
            const std::complex<double> w{0.0, random.scaled(1e-6, 1e2) / tau_c};
            if (std::abs(T(w)) < 1e-250) continue;
            const auto L = G(w) * (*s.controller)(w);
            INFO("s = " << w);
            CHECK(relative_error(L / (1.0 + L), T(w)) <= 1e-11);
        }
        // The definition: dead time and right-half-plane zeros of G kept, (tau_c s + 1)^(order + m), T(0) = 1.
        const int m = G.integrators();
        CHECK(T.dead_time() == G.dead_time());
        CHECK(T.factors().lags == std::vector<double>(static_cast<std::size_t>(order + m), tau_c));
        CHECK(T.gain() == 1.0);
        for (const auto& z : G.zeros())
            if (z.real() > 0.0) CHECK(std::abs(T(z)) <= 1e-12);
        CHECK(s.controller->integrators() == 1 + m);
        // 1 - T of order 1 + m at rest: a tenth of s, a tenth (a hundredth) of 1 - T.
        const double near = 1e-5 / (tau_c + T.dead_time() + 20.0);
        const double ratio = std::abs(s.controller->one_minus_response({0.0, near})) / std::abs(s.controller->one_minus_response({0.0, 10.0 * near}));
        CHECK(relative_error(ratio, std::pow(0.1, 1 + m)) <= 1e-2);
    }
}

TEST_CASE("the default response of one integrator is the one of the definitions", "[closed form]") {
    // ((2 tau_c + theta) s + 1) exp(-theta s)/(tau_c s + 1)^2.
    const auto T = synthesize(integrating_plus_dead_time(0.05, 1.5), {.time_constant = 4.0}).attained;
    CHECK(T == from({.leads = {9.5}, .lags = {4.0, 4.0}, .dead_time = 1.5}));
    CHECK(synthesize(first_order_plus_dead_time(2.0, 10.0, 3.0), {.time_constant = 5.0}).attained == from({.lags = {5.0}, .dead_time = 3.0}));
}

TEST_CASE("settings without loss close the loop to the response, where there is no dead time", "[invariant]") {
    constexpr std::uint64_t seed = 20240719;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int expressible = 0;
    for (int i = 0; i < 300; ++i) {
        const auto G = random_process(random).with_dead_time(0.0);
        const Synthesis s = synthesize(G, {.time_constant = random.scaled(0.2, 30.0)});
        if (!s.pid_expressible) continue;
        ++expressible;
        INFO(G.text() << " to " << s.attained.text());
        REQUIRE(s.settings.has_value());
        for (double w : {1e-3, 0.03, 0.4, 5.0, 60.0}) CHECK(relative_error(s.attained_with_settings({0.0, w}), s.attained({0.0, w})) <= 1e-10);
    }
    CHECK(expressible > 100);
}

TEST_CASE("settings keep the exact controller's integral action", "[invariant]") {
    // s C(s) at s = 0: for settings Kc/Ti; for the exact controller the limit of s C(s).
    for (const auto& G : {first_order_plus_dead_time(2.0, 10.0, 3.0), second_order_plus_dead_time(1.5, 20.0, 5.0, 2.0),
                          from({.gain = 1.0, .leads = {-2.0}, .lags = {10.0, 5.0}, .dead_time = 1.5})}) {
        const Synthesis s = synthesize(G, {.time_constant = 3.0});
        const std::complex<double> w{0.0, 1e-9};
        CHECK(relative_error((w * (*s.controller)(w)).real(), s.settings->gain / *s.settings->integral_time) <= 1e-6);
    }
}

TEST_CASE("a response that does not settle at 1, as settings", "[closed form]") {
    // G = 2/(10 s + 1), T = 0.9/(5 s + 1): C = 4.5 (10 s + 1)/(50 s + 1), no integral action.
    const auto G = from({.gain = 2.0, .lags = {10.0}}), T = from({.gain = 0.9, .lags = {5.0}});
    const Synthesis s = synthesize(G, {.transfer_function = T});
    REQUIRE(s.controller.has_value());
    const std::complex<double> w{0.0, 0.3};
    CHECK(relative_error((*s.controller)(w), 4.5 * (10.0 * w + 1.0) / (50.0 * w + 1.0)) <= 1e-13);
    if (s.settings) {
        CHECK_FALSE(s.settings->integral_time.has_value());
        CHECK(relative_error((*s.settings)(w), 4.5 * (10.0 * w + 1.0) / (50.0 * w + 1.0)) <= 1e-12);
    }
    CHECK(s.pid_expressible);
    // An integrating process with T = 1/(5 s + 1): the controller is 1/(K 5), proportional alone.
    const Synthesis p = synthesize(from({.gain = 0.05, .integrators = 1}), {.transfer_function = from({.lags = {5.0}})});
    REQUIRE(p.settings.has_value());
    CHECK(relative_error(p.settings->gain, 4.0) <= 1e-13);
    CHECK_FALSE(p.settings->integral_time.has_value());
    // A gain alone: integral action alone, 1/(K tau_c).
    const Synthesis i = synthesize(from({.gain = 2.0}), {.time_constant = 5.0});
    REQUIRE(i.settings.has_value());
    CHECK(i.settings->gain == 0.0);
    CHECK(relative_error(i.settings->integral_gain.value(), 0.1) <= 1e-13);
}

TEST_CASE("requests that make no sense are refused", "[regression]") {
    const auto G = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const auto T = from({.lags = {5.0}, .dead_time = 3.0});
    const auto with = [&](DesiredResponse d) { return [&G, d] { synthesize(G, d); }; };
    check_refused(error_code::conflicting_arguments, {"transfer_function", "time_constant"}, with({.time_constant = 5.0, .transfer_function = T}));
    check_refused(error_code::conflicting_arguments, {"transfer_function", "order"}, with({.order = 2, .transfer_function = T}));
    check_refused(error_code::missing_argument, {"time_constant", "transfer_function"}, with({}));
    check_refused(error_code::out_of_domain, {"desired.time_constant", "0", "above 0"}, with({.time_constant = 0.0}));
    check_refused(error_code::out_of_domain, {"desired.time_constant", "-1"}, with({.time_constant = -1.0}));
    check_refused(error_code::not_finite, {"desired.time_constant", "nan"}, with({.time_constant = std::nan("")}));
    check_refused(error_code::not_finite, {"desired.time_constant", "inf"}, with({.time_constant = HUGE_VAL}));
    check_refused(error_code::out_of_domain, {"desired.order", "0"}, with({.time_constant = 5.0, .order = 0}));
    check_refused(error_code::out_of_domain, {"desired.order", "-3"}, with({.time_constant = 5.0, .order = -3}));
    check_refused(error_code::out_of_domain, {"desired.order", "21"}, with({.time_constant = 5.0, .order = 21}));
    check_refused(error_code::out_of_domain, {"desired.transfer_function", "not stable"}, with({.transfer_function = from({.lags = {-5.0}})}));
    check_refused(error_code::out_of_domain, {"desired.transfer_function"}, with({.transfer_function = from({.integrators = 1})}));
    check_refused(error_code::out_of_domain, {"desired.transfer_function"}, with({.transfer_function = from({.lag_pairs = {{1.0, -0.1}}})}));
    check_refused(error_code::unsupported_form, {"process", "transfer_function"}, [] { synthesize(from({.lags = {-1.0}}), {.time_constant = 1.0}); });
    check_refused(error_code::unsupported_form, {"process"}, [] { synthesize(from({.integrators = 2}), {.time_constant = 1.0}); });
    const Synthesis impossible = synthesize(G, {.transfer_function = from({})});
    check_refused(error_code::missing_argument, {"settings"}, [&] { impossible.attained_with_settings({0.0, 1.0}); });
}

TEST_CASE("a response on the stability boundary is not stable", "[closed form]") {
    check_refused(error_code::out_of_domain, {"desired.transfer_function"},
                  [] { synthesize(from({.lags = {1.0}}), {.transfer_function = from({.lag_pairs = {{1.0, 0.0}}})}); });
}
