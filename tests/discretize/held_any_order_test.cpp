#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>
#include <vector>

#include "../../src/discretize/held_runner.hpp"
#include "core/oracle_tools.hpp"
#include "discretize/held_any_order_data.hpp"
#include "discretize/held_data.hpp"
#include "tauwright/core/exponential.hpp"
#include "tauwright/discretize/discretize.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::check_refused;
using oracle::HeldForm;
using oracle::relative_error;
using Complex = std::complex<double>;

namespace {

Complex offset_at(double rad_s, double scan_time) { return exponential_minus_one({0.0, rad_s * scan_time}); }

// The factored form as the documentation gives it, straight from the lists.
Complex factored(const DiscreteTransferFunction& H, double rad_s) {
    const Complex w = offset_at(rad_s, H.scan_time());
    const auto &zeros = H.zero_offsets(), &poles = H.pole_offsets();
    Complex value = H.leading() * std::polar(1.0, -rad_s * H.scan_time() * static_cast<double>(H.delay_scans()));
    for (std::size_t i = 0; i < std::max(zeros.size(), poles.size()); ++i) {
        if (i < zeros.size()) value *= w - zeros[i];
        if (i < poles.size()) value /= w - poles[i];
    }
    return value;
}

// What cancels in outputs . x + direct: the response of the states cannot be better than its last digit.
double largest_term(const DiscreteTransferFunction& H) {
    double size = std::abs(H.direct_before()) + std::abs(H.direct_now());
    for (double c : H.outputs()) size += std::abs(c);
    return size;
}

double distance_to_nearest(Complex z, const std::vector<Complex>& list) {
    double nearest = std::numeric_limits<double>::infinity();
    for (const Complex& other : list) nearest = std::min(nearest, std::abs(other - z));
    return nearest;
}

TransferFunction process_of(HeldForm form, const double (&p)[2], double dead_time) {
    switch (form) {
        case HeldForm::first_order: return first_order_plus_dead_time(1.0, p[0], dead_time);
        case HeldForm::second_order: return second_order_plus_dead_time(1.0, p[0], p[1], dead_time);
        case HeldForm::oscillatory: return oscillatory_plus_dead_time(1.0, p[0], p[1], dead_time);
        case HeldForm::integrating: break;
    }
    return integrating_plus_dead_time(1.0, dead_time, p[0]);
}

}  // namespace

TEST_CASE("the sampled response of any order from 0 to 20", "[independent computation]") {
    // mpmath, 160 digits, see make_held_any_order_data.py.
    for (const auto& c : oracle::held_cases()) {
        const auto G = TransferFunction::from_factors(c.factors);
        const auto H = held(G, c.scan_time, c.between);
        INFO(c.name << ", scan " << text_of(c.scan_time) << ": " << G.text());
        CHECK(H.order() == static_cast<std::size_t>(G.order()));
        CHECK(H.factored_error() <= 5e-15);
        for (const auto& point : c.points) {
            INFO("at " << text_of(point.rad_s) << " rad/s");
            CHECK(absolute_error(H.at_frequency(point.rad_s), point.value) <= 2e-15 * point.size);
            CHECK(absolute_error(factored(H, point.rad_s), point.value) <= 2e-15 * point.size);
            const auto by_states = H.at_offset_by_states(offset_at(point.rad_s, c.scan_time));
            CHECK(absolute_error(by_states, point.value) <= 2e-14 * point.size);
        }
    }
}

TEST_CASE("sampled zeros are right to their last digits", "[independent computation]") {
    int compared = 0;
    for (const auto& c : oracle::held_cases()) {
        if (c.zero_offsets.empty()) continue;
        const auto G = TransferFunction::from_factors(c.factors);
        const auto H = held(G, c.scan_time, c.between);
        INFO(c.name << ", scan " << text_of(c.scan_time) << ": " << G.text());
        CHECK(H.zero_offsets().size() == c.zero_offsets.size());
        for (std::size_t i = 0; i < c.zero_offsets.size(); ++i) {
            const Complex zero = c.zero_offsets[i];
            auto others = c.zero_offsets;
            others.erase(others.begin() + static_cast<std::ptrdiff_t>(i));
            // Two zeros that nearly fall together amplify the last digit of the two-lag closed form.
            const double crowded = H.order() == 2 ? std::abs(zero) / distance_to_nearest(zero, others) : 0.0;
            INFO("zero at 1 + " << text_of(zero.real()) << " + j " << text_of(zero.imag()));
            CHECK(oracle::Difference{distance_to_nearest(zero, H.zero_offsets())} <= 1e-15 * std::abs(zero) * (1.0 + crowded));
            ++compared;
        }
    }
    CHECK(compared > 200);
}

TEST_CASE("integrators alone sample to the Euler-Frobenius zeros", "[published]") {
    // K. J. Astrom, P. Hagander, J. Sternby, Automatica 20, 1984, table 1: z + 1, z^2 + 4 z + 1,
    // z^3 + 11 z^2 + 11 z + 1 over the factorial. From memory, roots in closed form.
    for (double h : {1e-3, 1.0, 50.0}) {
        const auto zeros_of = [&](int n) {
            auto zeros = held(TransferFunction::from_factors({.integrators = n}), h).zero_offsets();
            std::sort(zeros.begin(), zeros.end(), [](Complex a, Complex b) { return a.real() < b.real(); });
            return zeros;
        };
        CHECK(zeros_of(1).empty());
        CHECK(relative_error(zeros_of(2)[0], Complex(-2.0)) <= 1e-15);
        const auto three = zeros_of(3);
        CHECK(relative_error(three[0], Complex(-3.0 - std::sqrt(3.0))) <= 1e-15);
        CHECK(relative_error(three[1], Complex(-3.0 + std::sqrt(3.0))) <= 1e-15);
        const auto four = zeros_of(4);
        CHECK(relative_error(four[0], Complex(-6.0 - std::sqrt(24.0))) <= 1e-15);
        CHECK(relative_error(four[1], Complex(-2.0)) <= 1e-15);
        CHECK(relative_error(four[2], Complex(-6.0 + std::sqrt(24.0))) <= 1e-15);
        // Those of any order are real, negative and come in reciprocal pairs (z and 1/z).
        const auto twenty = zeros_of(20);
        REQUIRE(twenty.size() == 19);
        for (std::size_t i = 0; i < 19; ++i) {
            CHECK(twenty[i].imag() == 0.0);
            const double z = 1.0 + twenty[i].real(), mirrored = 1.0 + twenty[18 - i].real();
            CHECK(absolute_error(z * mirrored, 1.0) <= 1e-15 * std::max(std::abs(z), std::abs(mirrored)));
        }
        const auto H = held(TransferFunction::from_factors({.integrators = 20}), h);
        // The response to a step after one scan: h^20 / 20!
        CHECK(relative_error(H.leading(), std::pow(h, 20) / 2432902008176640000.0) <= 1e-14);
    }
}

TEST_CASE("poles are where the process has them, to the last digit near z = 1", "[closed form]") {
    for (double h : {1e-9, 1e-3, 1.0, 20.0}) {
        const auto H = held(TransferFunction::from_factors({.integrators = 1, .leads = {3.0}, .lags = {2.0, 5.0}}), h);
        const auto& p = H.pole_offsets();
        REQUIRE(p.size() == 3);
        CHECK(p[0] == 0.0);
        CHECK(relative_error(p[1].real(), std::expm1(-h / 2.0)) <= 3e-16);
        CHECK(relative_error(p[2].real(), std::expm1(-h / 5.0)) <= 3e-16);
        CHECK(H.direct_before() == 0.0);
        const auto pair = held(TransferFunction::from_factors({.lag_pairs = {{2.0, 0.6}}}), h).pole_offsets();
        CHECK(relative_error(pair[0], exponential_minus_one({-0.3 * h, 0.4 * h})) <= 2e-15);
        CHECK(pair[1] == std::conj(pair[0]));
    }
}

TEST_CASE("random processes: factored and state equations agree", "[invariant]") {
    constexpr std::uint64_t seed = 20260801;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    double worst[21] = {};
    for (int trial = 0; trial < 600; ++trial) {
        Factors f{.gain = random.scaled(0.1, 10.0)};
        const int order = 1 + random.below(20);
        for (int left = order; left > 0;) {
            const int choice = random.below(10);
            if (choice < 3 && left >= 2) {
                f.lag_pairs.push_back({random.scaled(1.0, 10.0), random.uniform(0.02, 1.5)});
                left -= 2;
                continue;
            }
            --left;
            if (choice == 3) ++f.integrators;
            else if (choice == 4 && !f.lags.empty()) f.lags.push_back(f.lags.back());
            else f.lags.push_back(random.scaled(1.0, 10.0) * (random.chance(0.05) ? -1.0 : 1.0));
        }
        for (int left = random.below(order + 1); left > 0;) {
            const bool pair = left >= 2 && random.chance(0.3);
            if (pair) f.lead_pairs.push_back({random.scaled(1.0, 10.0), random.uniform(-1.0, 1.2)});
            else f.leads.push_back(random.scaled(1.0, 10.0) * (random.chance(0.3) ? -1.0 : 1.0));
            left -= pair ? 2 : 1;
        }
        const double h = random.scaled(1e-4, 10.0);
        f.dead_time = random.chance(0.4) ? 0.0 : random.scaled(0.01, 20.0) * h;
        const auto G = TransferFunction::from_factors(f);
        const auto H = held(G, h, random.chance(0.7) ? Between::constant : Between::linear);
        INFO("scan " << text_of(h) << ", " << G.text());
        CHECK(H.factored_error() <= 1e-14);
        for (int i = 0; i < 5; ++i) {
            const double rad_s = random.scaled(1e-3, 3.1) / h;
            const Complex expected = factored(H, rad_s), by_states = H.at_offset_by_states(offset_at(rad_s, h));
            const double error = std::abs(by_states - expected) / (std::abs(expected) + 1e-2 * largest_term(H));
            worst[order] = std::max(worst[order], error);
        }
    }
    for (int n = 1; n <= 20; ++n) {
        INFO("order " << n);
        CHECK(oracle::Difference{worst[n]} <= (n <= 6 ? 1e-12 : 1e-11));
    }
}

TEST_CASE("first and second order give the coefficients of the process block", "[invariant]") {
    for (double h : {1e-4, 0.03, 1.0, 12.0})
        for (double delay : {0.0, 0.4, 3.0, 7.25}) {
            const auto check = [&](const TransferFunction& G) {
                const auto H = held(G, h);
                const auto c = discretize(G, h);
                INFO(G.text() << ", scan " << text_of(h));
                CHECK(H.delay_scans() == c.delay_scans);
                const std::size_t n = H.order();
                for (std::size_t i = 0; i < n; ++i) {
                    CHECK(relative_error(H.now()[i] * H.outputs()[n - 1], c.now[i] * c.outputs[n - 1]) <= 5e-14);
                    CHECK(absolute_error(H.before()[i], c.before[i] * c.outputs[n - 1] / H.outputs()[n - 1]) <= 5e-14);
                    CHECK(absolute_error(H.growth()[i * n + i], c.growth[i][i]) <= 3e-15);
                }
            };
            check(first_order_plus_dead_time(2.0, 3.0, delay * h));
            check(second_order_plus_dead_time(2.0, 3.0, 0.7, delay * h));
            check(second_order_plus_dead_time(2.0, 3.0, 3.0, delay * h));
            check(integrating_plus_dead_time(2.0, delay * h));
        }
}

TEST_CASE("a run of the recursion follows the exact response", "[independent computation]") {
    // The rows of make_held_data.py: superposed step responses, mpmath, 50 digits.
    for (const auto& row : oracle::held_rows) {
        const auto G = process_of(row.form, row.parameters, row.dead_time);
        INFO(G.text() << " scan " << text_of(row.scan_time) << " after " << row.scans);
        detail::HeldRunner runner(held(G, row.scan_time));
        for (int k = 0; k < row.scans; ++k) runner.step(((37 * k) % 11 - 5) / 5.0);
        const double reach = row.scan_time * row.scans / 10.0;
        const double size = row.form == HeldForm::integrating ? 10.0 * std::fmin(reach, 1.0) + row.scan_time * row.scans : std::fmin(reach, 1.0);
        CHECK(absolute_error(runner.value(), row.value) <= 3e-14 * size + 1e-13 * std::abs(row.value));
    }
}

TEST_CASE("a sinusoid run through the recursion settles to the sampled response", "[invariant]") {
    const auto G = TransferFunction::from_factors({.gain = 2.0, .leads = {-0.5, 3.0}, .lags = {1.0, 2.0}, .lag_pairs = {{1.5, 0.3}}, .dead_time = 3.3});
    const auto H = held(G, 0.4);
    detail::HeldRunner runner(H);
    const double rad_s = 0.9;
    Complex last;
    for (int k = 0; k < 600; ++k) {
        const double y = runner.step(std::cos(rad_s * 0.4 * k));
        last = {y, rad_s * 0.4 * (k + 1)};
    }
    const Complex expected = H.at_frequency(rad_s) * std::polar(1.0, last.imag());
    CHECK(absolute_error(last.real(), expected.real()) <= 1e-12);
    // Denormals do not survive a long rest.
    for (int k = 0; k < 20000; ++k) runner.step(0.0);
    CHECK(runner.value() == 0.0);
    // What is not finite counts as the input before.
    runner.restart();
    for (int k = 0; k < 40; ++k) runner.step(k == 0 ? 1.0 : std::numeric_limits<double>::quiet_NaN());
    const double held_on = runner.value();
    runner.restart();
    for (int k = 0; k < 40; ++k) runner.step(1.0);
    CHECK(held_on == runner.value());
    check_refused(error_code::unsupported_form, {"process", "Between::constant"},
                  [&] { detail::HeldRunner wrong(held(G, 0.4, Between::linear)); });
}

TEST_CASE("a linear input lets ramps through exactly", "[closed form]") {
    // A ramp through K / (T s + 1): K (t - T) + K T exp(-t / T).
    const double h = 0.3, T = 1.7, K = 2.0;
    const auto H = held(first_order_plus_dead_time(K, T, 0.0), h, Between::linear);
    double x = 0.0;
    for (int k = 0; k < 50; ++k) {
        x += H.growth()[0] * x + H.ahead()[0] * (h * (k + 1)) + H.now()[0] * (h * k);
        const double t = h * (k + 1);
        CHECK(relative_error(H.outputs()[0] * x, K * (t + T * std::expm1(-t / T))) <= 1e-13);
    }
}

TEST_CASE("gains and dead times at their ends", "[closed form]") {
    const auto lag = held(first_order_plus_dead_time(2.0, 3.0, 0.3), 0.1);
    CHECK(lag.delay_scans() == 3);
    CHECK(lag.before()[0] == 0.0);
    CHECK(lag.zero_offsets().empty());
    CHECK(lag.steady_gain() == 2.0);
    CHECK(lag.at_frequency(0.0) == Complex(2.0));
    CHECK(lag(Complex(1.0)) == Complex(2.0));
    CHECK(absolute_error(lag.at_frequency(1e-9), Complex(2.0)) <= 1e-7);
    const double infinity = std::numeric_limits<double>::infinity();
    CHECK(held(integrating_plus_dead_time(-2.0, 5.0), 1.0).at_frequency(0.0).real() == -infinity);
    CHECK(held(TransferFunction::from_factors({.lags = {2.0}, .dead_time = 1.0}), 1.0).delay_scans() == 1);
    // Gain alone: what the sample sees is the input held until then.
    const auto gain = held(TransferFunction::from_factors({.gain = 3.0, .dead_time = 2.0}), 1.0);
    CHECK(gain.order() == 0);
    CHECK(absolute_error(gain(Complex(2.0)), Complex(3.0 / 8.0)) <= 1e-15);
    CHECK(gain.pole_offsets().size() == 1);
    const auto half = held(TransferFunction::from_factors({.gain = 3.0, .dead_time = 2.5}), 1.0, Between::linear);
    CHECK(absolute_error(half(Complex(2.0)), Complex(1.5 / 4.0 + 1.5 / 8.0)) <= 1e-15);
    // Almost a whole scan late: one zero has all but left, and its share is in the leading coefficient.
    const auto far = held(TransferFunction::from_factors({.lags = {1.0, 2.0, 3.0}, .dead_time = 1.0 - 2e-9}), 1.0);
    CHECK(far.delay_scans() == 0);
    CHECK(far.zero_offsets().size() == 2);
    CHECK(far.factored_error() <= 1e-14);
    const auto extreme = held(TransferFunction::from_factors({.gain = 1e300, .lags = {1e-11, 1.0, 1e11}, .dead_time = 1e5}), 1.0);
    CHECK(extreme.factored_error() <= 1e-14);
    CHECK(is_finite(extreme.leading()));
    CHECK(held(first_order_plus_dead_time(1e305, 2.0, 0.5), 1.0).zero_offsets() ==
          held(first_order_plus_dead_time(1.0, 2.0, 0.5), 1.0).zero_offsets());
    // At z = 0 a delay is infinite, never not a number.
    CHECK(held(first_order_plus_dead_time(1.0, 2.0, 3.0), 1.0)(Complex(0.0)).real() == infinity);
}

TEST_CASE("what cannot be sampled is refused", "[regression]") {
    const auto G = first_order_plus_dead_time(1.0, 1.0, 1.0);
    check_refused(error_code::out_of_domain, {"scan_time", "is 0", "above 0"}, [&] { held(G, 0.0); });
    check_refused(error_code::not_finite, {"scan_time", "nan"}, [&] { held(G, std::nan("")); });
    check_refused(error_code::not_finite, {"scan_time", "inf"}, [&] { held(G, std::numeric_limits<double>::infinity()); });
    check_refused(error_code::unknown_name, {"between", "7"}, [&] { held(G, 1.0, static_cast<Between>(7)); });
    check_refused(error_code::out_of_domain, {"dead_time", "ten million"}, [&] { held(G, 1e-8); });
    check_refused(error_code::out_of_domain, {"process", "more zeros than poles"},
                  [] { held(TransferFunction::from_factors({.leads = {1.0, 2.0}, .lags = {2.0}}), 1.0); });
    check_refused(error_code::out_of_domain, {"process order", "21", "at most 20"},
                  [] { held(TransferFunction::from_factors({.lags = std::vector<double>(21, 1.0)}), 1.0); });
    check_refused(error_code::out_of_domain, {"scan_time", "lags[1]", "1e-15"},
                  [] { held(TransferFunction::from_factors({.lags = {1.0, 1e-15}}), 1.0); });
    for (double T : {-1.0, -0.001})
        check_refused(error_code::out_of_domain, {"scan_time", "unstable", "shorter"},
                      [&] { held(TransferFunction::from_factors({.lags = {T, 1.0, 2.0}}), 1000.0); });
    check_refused(error_code::out_of_domain, {"scan_time", "unstable"},
                  [] { held(TransferFunction::from_factors({.lag_pairs = {{1.0, -0.5}}}), 100.0); });
    check_refused(error_code::out_of_domain, {"scan_time", "gain"},
                  [] { held(TransferFunction::from_factors({.gain = 1e308, .leads = {1e6}, .lags = {1.0, 1e-3}}), 1.0); });
}
