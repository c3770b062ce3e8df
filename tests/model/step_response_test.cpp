#include <limits>

#include "core/oracle_tools.hpp"
#include "model/steps_data.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::StepForm;

namespace {

TransferFunction process_of(const oracle::StepRow& row, double gain) {
    const auto& p = row.parameters;
    switch (row.form) {
        case StepForm::first_order: return first_order_plus_dead_time(gain, p[0], row.dead_time);
        case StepForm::second_order: return second_order_plus_dead_time(gain, p[0], p[1], row.dead_time);
        case StepForm::oscillatory: return oscillatory_plus_dead_time(gain, p[0], p[1], row.dead_time);
        case StepForm::integrating: break;
    }
    return integrating_plus_dead_time(gain, row.dead_time, p[0]);
}

}  // namespace

TEST_CASE("step responses of the named forms, nearly equal lags and damping near 1 included", "[independent computation]") {
    // mpmath, 60 digits, checked against a numerical inverse Laplace transform: make_model_data.py.
    for (const auto& row : oracle::step_rows) {
        for (double gain : {1.0, -3.5}) {
            const auto process = process_of(row, gain);
            const double time[] = {row.time_s};
            INFO(process.text() << " at " << text_of(row.time_s));
            const double radians = row.time_s / row.parameters[0];  // an oscillation's phase is as exact as its argument
            const double size = row.form == StepForm::integrating ? std::abs(row.value) + row.time_s
                                : row.form == StepForm::oscillatory ? 1.0 + radians : 1.0;
            CHECK(oracle::absolute_error(step_response(process, time)[0], gain * row.value) <= 2e-15 * size * std::abs(gain));
        }
    }
}

TEST_CASE("nothing happens before the dead time has passed", "[closed form]") {
    const double times[] = {-5.0, 0.0, 2.999999999999999, 3.0};
    for (const auto& process : {first_order_plus_dead_time(2.0, 10.0, 3.0), integrating_plus_dead_time(2.0, 3.0, 1.0),
                                oscillatory_plus_dead_time(2.0, 1.0, 0.2, 3.0)})
        for (double y : step_response(process, times)) CHECK(y == 0.0);
}

TEST_CASE("a tiny difference of the lags makes a tiny difference of the response", "[invariant]") {
    std::vector<double> times;
    for (int i = 1; i <= 60; ++i) times.push_back(i);
    const auto equal = step_response(second_order_plus_dead_time(1.0, 10.0, 10.0, 0.0), times);
    for (double change : {1e-3, 1e-6, 1e-9, 1e-12, 1e-15}) {
        const auto other = step_response(second_order_plus_dead_time(1.0, 10.0, 10.0 * (1.0 + change), 0.0), times);
        for (std::size_t i = 0; i < times.size(); ++i) CHECK(std::abs(other[i] - equal[i]) <= change + 2e-15);
    }
}

TEST_CASE("levels of a first-order step response", "[published]") {
    // Trade fact B12 (recalled from memory, recomputed): theta 3, lag 12; 3, 4 and 5 lags after the dead time.
    const double times[] = {39.0, 51.0, 63.0};
    const auto y = step_response(first_order_plus_dead_time(1.0, 12.0, 3.0), times);
    CHECK(oracle::relative_error(y[0], 0.950212931632136) <= 1e-12);
    CHECK(oracle::relative_error(y[1], 0.9816843611112658) <= 1e-12);
    CHECK(oracle::relative_error(y[2], 0.9932620530009145) <= 1e-12);
}

TEST_CASE("step_response says which forms it knows", "[regression]") {
    const double times[] = {1.0}, broken[] = {1.0, std::numeric_limits<double>::quiet_NaN()};
    const auto three = TransferFunction::from_factors({.lags = {1.0, 2.0, 3.0}});
    const auto lead = TransferFunction::from_factors({.leads = {1.0}, .lags = {2.0}});
    const auto twice = TransferFunction::from_factors({.integrators = 2});
    check_refused(error_code::unsupported_form, {"(3 s + 1)", "two lags"}, [&] { step_response(three, times); });
    check_refused(error_code::unsupported_form, {"process"}, [&] { step_response(lead, times); });
    check_refused(error_code::unsupported_form, {"s^2"}, [&] { step_response(twice, times); });
    check_refused(error_code::not_finite, {"time_s[1]", "nan"}, [&] { step_response(first_order_plus_dead_time(1.0, 1.0, 0.0), broken); });
}
