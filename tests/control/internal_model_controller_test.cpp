#include "control/internal_model_data.hpp"
#include "core/oracle_tools.hpp"
#include "tauwright/control/internal_model_controller.hpp"

using namespace tauwright;
using oracle::relative_error;

namespace {

TransferFunction process_of(const oracle::InternalModelCase& c) {
    return TransferFunction::from_factors({.gain = c.gain, .integrators = c.integrators, .leads = c.leads, .lags = c.lags, .dead_time = c.dead_time});
}

TransferFunction response_of(const oracle::InternalModelCase& c) {
    return TransferFunction::from_factors({.leads = c.response_leads, .lags = c.response_lags, .dead_time = c.response_dead_time});
}

InternalModelController controller_of(const oracle::InternalModelCase& c) {
    const auto Q = response_of(c).with_dead_time(c.response_dead_time - c.dead_time) * process_of(c).with_dead_time(0.0).inverse();
    return {Q, response_of(c)};
}

}  // namespace

TEST_CASE("the exact controller's values, near s = 0 and far from it", "[independent computation]") {
    // mpmath, 60 digits, see make_internal_model_data.py.
    for (const auto& row : oracle::internal_model_rows) {
        const auto& c = oracle::internal_model_cases[row.which];
        INFO(c.name << " at " << row.s);
        CHECK(relative_error(controller_of(c)(row.s), row.controller) <= 2e-13);
    }
}

TEST_CASE("closing the loop with the exact controller gives the response asked for", "[invariant]") {
    for (const auto& c : oracle::internal_model_cases) {
        const auto G = process_of(c), T = response_of(c);
        const auto C = controller_of(c);
        for (int i = 0; i <= 160; ++i) {
            const double w = std::pow(10.0, -6.0 + 0.05 * i);  // eight decades
            const std::complex<double> s{0.0, w}, L = G(s) * C(s);
            INFO(c.name << " at " << w << " rad/s");
            CHECK(relative_error(L / (1.0 + L), T(s)) <= 1e-12);
            CHECK(relative_error(1.0 / (1.0 + L), C.one_minus_response(s)) <= 1e-12 * (1.0 + std::abs(L) / std::abs(1.0 + L)));
        }
    }
}

TEST_CASE("how often 1 - T vanishes at s = 0", "[closed form]") {
    for (const auto& c : oracle::internal_model_cases) {
        INFO(c.name);
        CHECK(controller_of(c).integrators() == 1 + c.integrators);
        CHECK(std::isinf(controller_of(c)({0.0, 0.0}).real()));
    }
    // T(0) = 1/2: no integral action, C(0) = Q(0) / (1 - T(0)) = 0.5 / 2 / 0.5.
    const auto half = TransferFunction::from_factors({.gain = 0.5, .lags = {1.0}, .dead_time = 1.0});
    const InternalModelController C(TransferFunction::from_factors({.gain = 0.25, .leads = {3.0}, .lags = {1.0}}), half);
    CHECK(C.integrators() == 0);
    CHECK(relative_error(C({0.0, 0.0}), std::complex<double>(0.5, 0.0)) <= 1e-15);
}

TEST_CASE("a response of 1 everywhere has no controller", "[closed form]") {
    const auto one = TransferFunction::from_factors({});
    oracle::check_refused(error_code::out_of_domain, {"response", "infinite"}, [&] { InternalModelController(one, one); });
    const auto equal = TransferFunction::from_factors({.leads = {2.0}, .lags = {2.0}});
    oracle::check_refused(error_code::out_of_domain, {"response"}, [&] { InternalModelController(equal, equal); });
    CHECK_NOTHROW(InternalModelController(one, one.with_dead_time(1.0)));
}
