#include <limits>
#include <vector>

#include "core/oracle_tools.hpp"
#include "discretize/held_data.hpp"
#include "tauwright/discretize/discretize.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::check_refused;
using oracle::HeldForm;
using oracle::relative_error;

namespace {

TransferFunction process_of(HeldForm form, const double (&p)[2], double dead_time) {
    switch (form) {
        case HeldForm::first_order: return first_order_plus_dead_time(1.0, p[0], dead_time);
        case HeldForm::second_order: return second_order_plus_dead_time(1.0, p[0], p[1], dead_time);
        case HeldForm::oscillatory: return oscillatory_plus_dead_time(1.0, p[0], p[1], dead_time);
        case HeldForm::integrating: break;
    }
    return integrating_plus_dead_time(1.0, dead_time, p[0]);
}

double run_held(const TransferFunction& process, double scan_time, int scans) {
    run::ProcessBlock block(discretize(process, scan_time), 0.0, 0.0);
    std::vector<double> line(run::delay_line_length(block.coefficients()));
    block.start(line.data(), line.size());
    double y = 0.0;
    for (int k = 0; k < scans; ++k) y = block.step(((37 * k) % 11 - 5) / 5.0, line.data());
    return y;
}

// One impulse over the first scan: from what follows, the weights of the recursion can be read.
std::vector<double> pulse(const TransferFunction& process, double scan_time, int scans) {
    run::ProcessBlock block(discretize(process, scan_time), 0.0, 0.0);
    std::vector<double> line(run::delay_line_length(block.coefficients())), y{0.0};
    block.start(line.data(), line.size());
    for (int k = 0; k < scans; ++k) y.push_back(block.step(k == 0 ? 1.0 : 0.0, line.data()));
    return y;
}

}  // namespace

TEST_CASE("every named form at fractional dead times, scans from 1e-4 to 10 lags", "[independent computation]") {
    // mpmath, 50 digits, see make_held_data.py.
    for (const auto& row : oracle::held_rows) {
        const auto G = process_of(row.form, row.parameters, row.dead_time);
        INFO(G.text() << " scan " << text_of(row.scan_time) << " after " << row.scans);
        // Values are small where the scan is: relative to the largest the output's swing could have made of it.
        const double reach = row.scan_time * row.scans / 10.0;
        const double size = row.form == HeldForm::integrating ? 10.0 * std::fmin(reach, 1.0) + row.scan_time * row.scans : std::fmin(reach, 1.0);
        CHECK(absolute_error(run_held(G, row.scan_time, row.scans), row.value) <= 3e-14 * size + 1e-13 * std::abs(row.value));
    }
}

TEST_CASE("D08, D09: coefficients of the held first-order recursion", "[published]") {
    // Recalled, recomputed. K = 2, tau = 10, h = 1, theta = 3 and 3.4.
    const auto whole = pulse(first_order_plus_dead_time(2.0, 10.0, 3.0), 1.0, 8);
    CHECK(whole[3] == 0.0);
    CHECK(relative_error(whole[4], 0.19032516392808096) <= 1e-12);
    CHECK(relative_error(whole[5] / whole[4], 0.9048374180359595) <= 1e-12);
    CHECK(discretize(first_order_plus_dead_time(2.0, 10.0, 3.0), 1.0).delay_scans == 3);
    const auto late = pulse(first_order_plus_dead_time(2.0, 10.0, 3.4), 1.0, 8);
    CHECK(late[3] == 0.0);
    CHECK(relative_error(late[4], 0.11647093283150256) <= 1e-12);
    CHECK(relative_error(late[5] - 0.9048374180359595 * late[4], 0.0738542310965784) <= 1e-12);
    CHECK(relative_error(late[6] / late[5], 0.9048374180359595) <= 1e-12);
    CHECK(discretize(first_order_plus_dead_time(2.0, 10.0, 3.4), 1.0).delay_scans == 3);
}

TEST_CASE("dead time that is a whole number of scans but for rounding is one", "[closed form]") {
    CHECK(discretize(first_order_plus_dead_time(1.0, 1.0, 0.3), 0.1).delay_scans == 3);
    CHECK(discretize(first_order_plus_dead_time(1.0, 1.0, 0.7), 0.1).delay_scans == 7);
    const auto c = discretize(first_order_plus_dead_time(1.0, 1.0, 0.3), 0.1);
    CHECK(c.before[0] == 0.0);
    CHECK(relative_error(c.now[0] * c.outputs[0], -std::expm1(-0.1)) <= 1e-15);
}

TEST_CASE("short scans lose no digits", "[closed form]") {
    for (double h : {1e-3, 1e-6, 1e-9, 1e-12}) {
        const auto c = discretize(first_order_plus_dead_time(1.0, 1.0, 0.0), h);
        INFO("scan " << h);
        CHECK(relative_error(c.growth[0][0], std::expm1(-h)) <= 1e-15);
        CHECK(relative_error(c.now[0] * c.outputs[0], -std::expm1(-h)) <= 1e-15);
    }
}

TEST_CASE("a gain alone passes through, delayed", "[closed form]") {
    const auto G = TransferFunction::from_factors({.gain = 3.0, .dead_time = 2.0});
    const auto y = pulse(G, 1.0, 6);
    // A pulse over 0..1 arrives over 2..3; the value at the end of a scan is the one held during it.
    CHECK(y[2] == 0.0);
    CHECK(y[3] == 3.0);
    CHECK(y[4] == 0.0);
    CHECK(discretize(TransferFunction::from_factors({.gain = 3.0}), 1.0).direct == 3.0);
}

TEST_CASE("processes and scan times that do not fit are refused", "[regression]") {
    const auto G = first_order_plus_dead_time(1.0, 1.0, 1.0);
    check_refused(error_code::out_of_domain, {"scan_time", "0", "above 0"}, [&] { discretize(G, 0.0); });
    check_refused(error_code::out_of_domain, {"scan_time", "-1"}, [&] { discretize(G, -1.0); });
    check_refused(error_code::not_finite, {"scan_time", "nan"}, [&] { discretize(G, std::nan("")); });
    check_refused(error_code::out_of_domain, {"dead_time", "ten million"}, [&] { discretize(G, 1e-8); });
    check_refused(error_code::unsupported_form, {"process", "two lags"},
                  [] { discretize(TransferFunction::from_factors({.lags = {1.0, 2.0, 3.0}}), 1.0); });
    check_refused(error_code::unsupported_form, {"leads"}, [] { discretize(TransferFunction::from_factors({.leads = {1.0}, .lags = {2.0}}), 1.0); });
    check_refused(error_code::unsupported_form, {"process"}, [] { discretize(TransferFunction::from_factors({.integrators = 2}), 1.0); });
    check_refused(error_code::out_of_domain, {"scan_time", "unstable"},
                  [] { discretize(TransferFunction::from_factors({.lags = {-1.0}}), 1000.0); });
}
