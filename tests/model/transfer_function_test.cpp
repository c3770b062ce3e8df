#include <limits>

#include "core/oracle_tools.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

TransferFunction random_process(oracle::Seeded& random) {
    Factors f{.gain = (random.chance(0.5) ? 1.0 : -1.0) * random.scaled(0.01, 100.0)};
    f.integrators = random.below(3);
    f.zeros_at_origin = random.below(2);
    const auto time = [&] { return (random.chance(0.2) ? -1.0 : 1.0) * random.scaled(0.1, 10.0); };
    for (int i = random.below(3); i > 0; --i) f.leads.push_back(time());
    for (int i = random.below(4); i > 0; --i) f.lags.push_back(time());
    if (random.chance(0.3)) f.lag_pairs.push_back({random.scaled(0.1, 10.0), random.uniform(-0.5, 1.5)});
    if (random.chance(0.3)) f.lead_pairs.push_back({random.scaled(0.1, 10.0), random.uniform(-0.5, 1.5)});
    return TransferFunction::from_factors(f);
}

}  // namespace

TEST_CASE("inverse, product and cancelling agree with arithmetic on values", "[invariant]") {
    constexpr std::uint64_t seed = 3;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 400; ++i) {
        const auto A = random_process(random), B = random_process(random).with_dead_time(random.uniform(0.0, 3.0));
        const std::complex<double> s{random.uniform(-0.1, 0.1), random.scaled(0.01, 30.0)};
        INFO("A = " << A.text() << ", B = " << B.text() << ", s = " << s);
        CHECK(relative_error(A.inverse()(s), 1.0 / A(s)) <= 1e-13);
        CHECK(relative_error((A * B)(s), A(s) * B(s)) <= 1e-13);
        CHECK((A * B).dead_time() == B.dead_time());
        CHECK((A * B).relative_degree() == A.relative_degree() + B.relative_degree());
        CHECK(relative_error((A * B * A.inverse()).cancelled()(s), B(s)) <= 1e-12);
        CHECK(A.inverse().inverse().factors().lags == A.factors().lags);
        CHECK(relative_error(A.with_gain(2.0 * A.gain())(s), 2.0 * A(s)) <= 1e-15);
    }
}

TEST_CASE("G times its inverse cancels to 1 when nothing lies in the right half plane", "[closed form]") {
    const auto G = TransferFunction::from_factors({.gain = 4.0, .integrators = 1, .leads = {3.0}, .lags = {10.0, 10.0, 0.1},
                                                   .lead_pairs = {{2.0, 0.3}}, .lag_pairs = {{5.0, 0.7}}});
    CHECK((G * G.inverse()).cancelled() == TransferFunction::from_factors({.gain = 1.0}));
}

TEST_CASE("a pair in the right half plane or on the axis is never cancelled", "[closed form]") {
    const auto zero = TransferFunction::from_factors({.leads = {-2.0, 3.0}, .lags = {3.0}});
    const auto pole = TransferFunction::from_factors({.leads = {7.0}, .lags = {-2.0, 7.0}});
    const auto left = (zero * pole).cancelled();
    CHECK(left.factors().leads == std::vector<double>{-2.0});
    CHECK(left.factors().lags == std::vector<double>{-2.0});
    CHECK(left.unstable_poles() == 1);
    CHECK(left.right_half_plane_zeros() == 1);
    const QuadraticFactor grows{2.0, -0.1}, rings{2.0, 0.0}, decays{2.0, 0.1};
    const auto pairs = TransferFunction::from_factors({.lead_pairs = {grows, rings, decays}, .lag_pairs = {decays, rings, grows}}).cancelled();
    CHECK(pairs.factors().lead_pairs == std::vector<QuadraticFactor>{grows, rings});
    CHECK(pairs.factors().lag_pairs == std::vector<QuadraticFactor>{rings, grows});
    const auto nearly = TransferFunction::from_factors({.leads = {3.0}, .lags = {std::nextafter(3.0, 4.0)}});
    CHECK(nearly.cancelled() == nearly);
}

TEST_CASE("counts, limits and roots of a transfer function", "[closed form]") {
    const auto G = TransferFunction::from_factors({.gain = -6.0, .leads = {2.0}, .lags = {4.0, -0.5}, .lag_pairs = {{0.5, 0.6}}, .dead_time = 1.0});
    CHECK(G.order() == 4);
    CHECK(G.zero_count() == 1);
    CHECK(G.relative_degree() == 3);
    CHECK(G.steady_gain() == -6.0);
    CHECK(G.leading_coefficient() == -6.0 * 2.0 / (4.0 * -0.5 * 0.25));
    CHECK(G.unstable_poles() == 1);
    const auto poles = G.poles();
    REQUIRE(poles.size() == 4);
    CHECK(poles[0] == std::complex<double>(-0.25, 0.0));
    CHECK(poles[1] == std::complex<double>(2.0, 0.0));
    CHECK(relative_error(poles[2], std::complex<double>(-1.2, 1.6)) <= 1e-15);
    CHECK(relative_error(poles[3], std::complex<double>(-1.2, -1.6)) <= 1e-15);
    REQUIRE(G.zeros().size() == 1);
    CHECK(G.zeros()[0] == std::complex<double>(-0.5, 0.0));
    const auto overdamped = TransferFunction::from_factors({.lag_pairs = {{2.0, 1.25}}}).poles();  // (4 s + 1)(s + 1)
    CHECK(relative_error(overdamped[0], std::complex<double>(-1.0, 0.0)) <= 1e-15);
    CHECK(relative_error(overdamped[1], std::complex<double>(-0.25, 0.0)) <= 1e-15);
    CHECK(integrating_plus_dead_time(-0.2, 1.0).steady_gain() == -infinity);
    CHECK(TransferFunction::from_factors({.zeros_at_origin = 1, .lags = {1.0}}).steady_gain() == 0.0);
    CHECK(std::isinf(integrating_plus_dead_time(0.2, 1.0)({0.0, 0.0}).real()));
}

TEST_CASE("the named forms hold what they were given", "[closed form]") {
    CHECK(first_order_plus_dead_time(2.0, 10.0, 3.0).factors() == Factors{.gain = 2.0, .lags = {10.0}, .dead_time = 3.0});
    CHECK(second_order_plus_dead_time(2.0, 10.0, 4.0, 3.0).factors() == Factors{.gain = 2.0, .lags = {10.0, 4.0}, .dead_time = 3.0});
    CHECK(integrating_plus_dead_time(0.05, 1.0, 4.0).factors() ==
          Factors{.gain = 0.05, .integrators = 1, .lags = {4.0}, .dead_time = 1.0});
    CHECK(integrating_plus_dead_time(0.05, 1.0).factors() == Factors{.gain = 0.05, .integrators = 1, .dead_time = 1.0});
    CHECK(oscillatory_plus_dead_time(2.0, 5.0, 0.3, 0.0).factors() == Factors{.gain = 2.0, .lag_pairs = {{5.0, 0.3}}});
    CHECK(first_order_plus_dead_time(2.0, 10.0, 3.0).text() == "2 exp(-3 s) / (10 s + 1)");
}

TEST_CASE("a process in percent of span", "[published]") {
    const Range output{};
    const Range wide{.low = 0.0, .high = 200.0, .unit = "degC"}, narrow{.low = 50.0, .high = 150.0, .unit = "degC"};
    // Trade fact A12 (derived, recomputed): 12 degC for 5 % is 2.4 degC/%, 1.2 %/%, and 1.2 mA/mA.
    const auto process = first_order_plus_dead_time(12.0 / 5.0, 10.0, 3.0);
    CHECK(relative_error(process.gain(), 2.4) <= 1e-12);
    CHECK(relative_error(in_percent(process, wide, output).gain(), 1.2) <= 1e-12);
    const Range current{.low = 4.0, .high = 20.0, .unit = "mA"};
    CHECK(relative_error(in_percent(first_order_plus_dead_time(0.96 / 0.80, 10.0, 3.0), current, current).gain(), 1.2) <= 1e-12);
    // Trade fact A14 (derived, recomputed): re-ranging to 50-150 degC doubles the gain.
    CHECK(relative_error(in_percent(process, narrow, output).gain(), 2.4) <= 1e-12);
    // Trade fact A13 (derived, recomputed), as a process: an output of 0-50 m3/h.
    const Range flow{.low = 0.0, .high = 50.0, .unit = "m3/h"};
    CHECK(relative_error(in_percent(first_order_plus_dead_time(2.0, 10.0, 3.0), wide, flow).gain(), 0.5) <= 1e-12);
    CHECK(in_percent(process, wide, output).dead_time() == 3.0);
    CHECK(in_percent(process, wide, output).factors().lags == std::vector<double>{10.0});
    check_refused(error_code::out_of_domain, {"process_value_range.high", "0"},
                  [&] { in_percent(process, Range{.low = 200.0, .high = 0.0}, output); });
    check_refused(error_code::out_of_domain, {"output_range.high", "3"},
                  [&] { in_percent(process, wide, Range{.low = 3.0, .high = 3.0}); });
}

TEST_CASE("numbers that make no process are refused", "[regression]") {
    const double nan_ = std::numeric_limits<double>::quiet_NaN();
    check_refused(error_code::out_of_domain, {"gain", "0"}, [] { first_order_plus_dead_time(0.0, 1.0, 0.0); });
    check_refused(error_code::not_finite, {"gain", "nan"}, [&] { first_order_plus_dead_time(nan_, 1.0, 0.0); });
    check_refused(error_code::out_of_domain, {"lag", "0", "above 0"}, [] { first_order_plus_dead_time(1.0, 0.0, 0.0); });
    check_refused(error_code::out_of_domain, {"lag", "-2"}, [] { first_order_plus_dead_time(1.0, -2.0, 0.0); });
    check_refused(error_code::not_finite, {"lag", "inf"}, [] { first_order_plus_dead_time(1.0, infinity, 0.0); });
    check_refused(error_code::out_of_domain, {"dead_time", "-1"}, [] { first_order_plus_dead_time(1.0, 1.0, -1.0); });
    check_refused(error_code::not_finite, {"dead_time", "nan"}, [&] { first_order_plus_dead_time(1.0, 1.0, nan_); });
    check_refused(error_code::out_of_domain, {"lag_2", "0"}, [] { second_order_plus_dead_time(1.0, 1.0, 0.0, 0.0); });
    check_refused(error_code::out_of_domain, {"lag_1", "-1"}, [] { second_order_plus_dead_time(1.0, -1.0, 1.0, 0.0); });
    check_refused(error_code::out_of_domain, {"slope", "0"}, [] { integrating_plus_dead_time(0.0, 1.0); });
    check_refused(error_code::out_of_domain, {"lag", "-3"}, [] { integrating_plus_dead_time(1.0, 1.0, -3.0); });
    check_refused(error_code::out_of_domain, {"dead_time", "-1"}, [] { integrating_plus_dead_time(1.0, -1.0); });
    check_refused(error_code::out_of_domain, {"time_constant", "0"}, [] { oscillatory_plus_dead_time(1.0, 0.0, 0.5, 0.0); });
    check_refused(error_code::out_of_domain, {"damping", "-0.1"}, [] { oscillatory_plus_dead_time(1.0, 1.0, -0.1, 0.0); });
    using T = TransferFunction;
    check_refused(error_code::out_of_domain, {"lags[1]", "0"}, [] { T::from_factors({.lags = {1.0, 0.0}}); });
    check_refused(error_code::not_finite, {"leads[0]", "inf"}, [] { T::from_factors({.leads = {infinity}}); });
    check_refused(error_code::out_of_domain, {"lag_pairs[0].time_constant", "-1"}, [] { T::from_factors({.lag_pairs = {{-1.0, 0.5}}}); });
    check_refused(error_code::not_finite, {"lead_pairs[0].damping", "nan"}, [&] { T::from_factors({.lead_pairs = {{1.0, nan_}}}); });
    check_refused(error_code::out_of_domain, {"integrators", "-1"}, [] { T::from_factors({.integrators = -1}); });
    check_refused(error_code::out_of_domain, {"zeros_at_origin", "-2"}, [] { T::from_factors({.zeros_at_origin = -2}); });
    check_refused(error_code::out_of_domain, {"dead_time", "3", "predict"}, [] { first_order_plus_dead_time(1.0, 1.0, 3.0).inverse(); });
    check_refused(error_code::out_of_domain, {"gain", "0"}, [] { first_order_plus_dead_time(1.0, 1.0, 3.0).with_gain(0.0); });
    check_refused(error_code::out_of_domain, {"dead_time", "-3"}, [] { first_order_plus_dead_time(1.0, 1.0, 3.0).with_dead_time(-3.0); });
}

TEST_CASE("a product that overflows is refused, not made infinite", "[invariant]") {
    const auto large = first_order_plus_dead_time(1e200, 1.0, 0.0), small = first_order_plus_dead_time(1e-200, 1.0, 0.0);
    check_refused(error_code::not_finite, {"gain", "inf"}, [&] { large * large; });
    check_refused(error_code::out_of_domain, {"gain", "0"}, [&] { small * small; });
}
