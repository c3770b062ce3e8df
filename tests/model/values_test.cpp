#include "core/oracle_tools.hpp"
#include "model/values_data.hpp"
#include "model/polynomials_data.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::relative_error;

TEST_CASE("values at a complex s", "[independent computation]") {
    // mpmath, 60 digits, see make_model_data.py.
    for (const auto& row : oracle::value_rows) {
        const auto G = TransferFunction::from_factors(row.factors);
        INFO(G.text() << " at " << row.s);
        const double allowed = 4e-16 * (2.0 + G.order() + G.zero_count() + std::abs(G.dead_time() * row.s));
        CHECK(relative_error(G(row.s), row.value) <= allowed);
    }
}

TEST_CASE("transfer functions from polynomials have the polynomials' values", "[independent computation]") {
    // mpmath, 60 digits, see make_model_data.py.
    for (const auto& row : oracle::polynomial_rows) {
        const auto G = TransferFunction::from_polynomials(row.numerator, row.denominator, row.dead_time);
        INFO(G.text() << " at " << row.s);
        CHECK(relative_error(G(row.s), row.value) <= 1e-13);
    }
}

TEST_CASE("so do polynomials with multiple roots and wide scales", "[independent computation]") {
    for (const auto& row : oracle::hard_polynomial_rows) {
        const auto G = TransferFunction::from_polynomials(row.numerator, row.denominator, row.dead_time);
        INFO(G.text() << " at " << row.s);
        CHECK(relative_error(G(row.s), row.value) <= 1e-12);
    }
}

TEST_CASE("a conjugate s gives the conjugate value", "[invariant]") {
    for (const auto& row : oracle::value_rows) {
        const auto G = TransferFunction::from_factors(row.factors);
        INFO(G.text() << " at " << row.s);
        CHECK(relative_error(G(std::conj(row.s)), std::conj(row.value)) <= 1e-13);
    }
}

TEST_CASE("from_polynomials finds factors that are known", "[closed form]") {
    // (2 s + 1) / (s (10 s + 1)(s^2 + 1.2 s + 1)) at twice the gain, expanded by hand.
    const double numerator[] = {4.0, 2.0}, denominator[] = {10.0, 13.0, 11.2, 1.0, 0.0};
    const auto G = TransferFunction::from_polynomials(numerator, denominator, 1.5);
    CHECK(relative_error(G.gain(), 2.0) <= 1e-14);
    CHECK(G.integrators() == 1);
    CHECK(G.dead_time() == 1.5);
    REQUIRE(G.factors().leads.size() == 1);
    CHECK(relative_error(G.factors().leads[0], 2.0) <= 1e-14);
    REQUIRE(G.factors().lags.size() == 1);
    CHECK(relative_error(G.factors().lags[0], 10.0) <= 1e-13);
    REQUIRE(G.factors().lag_pairs.size() == 1);
    CHECK(relative_error(G.factors().lag_pairs[0].time_constant, 1.0) <= 1e-13);
    CHECK(relative_error(G.factors().lag_pairs[0].damping, 0.6) <= 1e-13);
}

TEST_CASE("from_polynomials refuses what is no transfer function", "[regression]") {
    using V = std::vector<double>;
    const auto make = [](V n, V d, double theta = 0.0) { return TransferFunction::from_polynomials(n, d, theta); };
    const double infinity = std::numeric_limits<double>::infinity();
    oracle::check_refused(error_code::out_of_domain, {"denominator", "highest power first"}, [&] { make({1.0}, {0.0, 0.0}); });
    oracle::check_refused(error_code::out_of_domain, {"numerator"}, [&] { make({}, {1.0}); });
    oracle::check_refused(error_code::out_of_domain, {"numerator"}, [&] { make({0.0}, {1.0, 1.0}); });
    oracle::check_refused(error_code::not_finite, {"denominator[1]", "inf"}, [&] { make({1.0}, {1.0, infinity}); });
    oracle::check_refused(error_code::not_finite, {"numerator[0]", "nan"}, [&] { make({std::nan("")}, {1.0}); });
    oracle::check_refused(error_code::out_of_domain, {"dead_time", "-1"}, [&] { make({1.0}, {1.0, 1.0}, -1.0); });
}
