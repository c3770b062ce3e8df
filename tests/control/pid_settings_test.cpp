#include <limits>

#include "core/oracle_tools.hpp"
#include "tauwright/control/control.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

namespace {

using Precise = std::complex<long double>;
constexpr double infinity = std::numeric_limits<double>::infinity();

// The definition, in extended precision.
std::complex<double> defined(const PidSettings& p, std::complex<double> at) {
    const Precise s{at.real(), at.imag()};
    Precise C = p.gain;
    if (p.integral_time) C += static_cast<long double>(p.gain) / (static_cast<long double>(*p.integral_time) * s);
    if (!p.integral_time && p.integral_gain) C += static_cast<long double>(*p.integral_gain) / s;
    C += static_cast<long double>(p.gain) * p.derivative_time * s / (static_cast<long double>(p.filter_time) * s + 1.0L);
    C /= static_cast<long double>(p.measurement_filter_time) * s + 1.0L;
    return {static_cast<double>(C.real()), static_cast<double>(C.imag())};
}

}  // namespace

TEST_CASE("settings and their transfer function have the response of the definition", "[closed form]") {
    constexpr std::uint64_t seed = 5;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 2000; ++i) {
        PidSettings p{.gain = (random.chance(0.5) ? 1.0 : -1.0) * random.scaled(0.01, 100.0)};
        if (random.chance(0.7)) p.integral_time = random.scaled(0.1, 1000.0);
        if (random.chance(0.6)) p.derivative_time = random.scaled(0.01, 1000.0);
        if (random.chance(0.6)) p.filter_time = random.scaled(0.001, 100.0);
        if (random.chance(0.5)) p.measurement_filter_time = random.scaled(0.001, 100.0);
        if (i % 17 == 0) p = {.measurement_filter_time = p.measurement_filter_time, .integral_gain = random.scaled(0.001, 10.0)};
        const double w = random.scaled(1e-4, 1e3);
        const std::complex<double> s{random.uniform(0.0, 0.3) * w, w};
        INFO("Kc " << text_of(p.gain) << " Ti " << text_of(p.integral_time.value_or(0.0)) << " Td " << text_of(p.derivative_time)
                   << " Tf " << text_of(p.filter_time) << " Tm " << text_of(p.measurement_filter_time) << " s " << s);
        // Between 1 + 1/(Ti s) and Td s the sum may cancel: the parts' size is what rounding is relative to.
        const auto expected = defined(p, s);
        const double parts = (std::abs(p.gain) * (1.0 + p.derivative_time * w / std::abs(1.0 + p.filter_time * s)) + std::abs(p.integral_gain_per_s()) / w) /
                             std::abs(1.0 + p.measurement_filter_time * s);
        CHECK(oracle::absolute_error(p(s), expected) <= 2e-15 * parts);
        CHECK(oracle::absolute_error(transfer_function(p)(s), expected) <= 1e-14 * parts);
    }
}

TEST_CASE("the transfer function's integrators and leads are those of the action", "[closed form]") {
    CHECK(transfer_function({.gain = 2.0}).factors() == Factors{.gain = 2.0});
    CHECK(transfer_function({.gain = 2.0, .integral_time = 8.0}).factors() == Factors{.gain = 0.25, .integrators = 1, .leads = {8.0}});
    CHECK(transfer_function({.integral_gain = 0.25}).factors() == Factors{.gain = 0.25, .integrators = 1});
    CHECK(transfer_function({.gain = 2.0, .derivative_time = 3.0, .filter_time = 1.0}).factors() == Factors{.gain = 2.0, .leads = {4.0}, .lags = {1.0}});
    // A filter without derivative action is no filter.
    CHECK(transfer_function({.gain = 2.0, .filter_time = 1.0}).factors() == Factors{.gain = 2.0});
    CHECK(transfer_function({.gain = 2.0, .measurement_filter_time = 1.5}).factors() == Factors{.gain = 2.0, .lags = {1.5}});
}

TEST_CASE("integral gain can always be read", "[closed form]") {
    CHECK(PidSettings{.gain = 2.0, .integral_time = 8.0}.integral_gain_per_s() == 0.25);
    CHECK(PidSettings{.gain = -2.0, .integral_time = 8.0}.integral_gain_per_s() == -0.25);
    CHECK(PidSettings{.gain = 2.0}.integral_gain_per_s() == 0.0);
    CHECK(PidSettings{.integral_gain = 0.25}.integral_gain_per_s() == 0.25);
}

TEST_CASE("settings that make no controller are refused by member, value and remedy", "[regression]") {
    const auto refused = [](error_code code, std::initializer_list<const char*> words, const PidSettings& s) {
        check_refused(code, words, [&] { require(s); });
        CHECK(check(s).code == code);
        check_refused(code, words, [&] { transfer_function(s); });
    };
    refused(error_code::out_of_domain, {"settings.gain", "0", "integral_gain"}, {});
    refused(error_code::not_finite, {"settings.gain", "nan"}, {.gain = std::nan("")});
    refused(error_code::not_finite, {"settings.integral_time", "inf"}, {.gain = 1.0, .integral_time = infinity});
    refused(error_code::out_of_domain, {"settings.integral_time", "0", "above 0"}, {.gain = 1.0, .integral_time = 0.0});
    refused(error_code::out_of_domain, {"settings.integral_time", "-1"}, {.gain = 1.0, .integral_time = -1.0});
    refused(error_code::out_of_domain, {"settings.derivative_time", "-1"}, {.gain = 1.0, .derivative_time = -1.0});
    refused(error_code::out_of_domain, {"settings.filter_time", "-1"}, {.gain = 1.0, .filter_time = -1.0});
    refused(error_code::out_of_domain, {"settings.measurement_filter_time", "-1"}, {.gain = 1.0, .measurement_filter_time = -1.0});
    refused(error_code::out_of_domain, {"settings.setpoint_weight", "-0.5"}, {.gain = 1.0, .setpoint_weight = -0.5});
    refused(error_code::conflicting_arguments, {"settings.integral_gain", "0.3"}, {.gain = 1.0, .integral_time = 10.0, .integral_gain = 0.3});
    refused(error_code::conflicting_arguments, {"settings.integral_gain", "0.3"}, {.gain = 1.0, .integral_gain = 0.3});
    refused(error_code::out_of_domain, {"settings.derivative_time", "1"}, {.derivative_time = 1.0, .integral_gain = 0.1});
    CHECK(check(PidSettings{.gain = 1.0, .integral_time = 10.0, .integral_gain = 0.1}).code == error_code::ok);
    CHECK(check(PidSettings{.gain = -1.0}).code == error_code::ok);
}

TEST_CASE("a set-point weight and filters are checked without throwing", "[invariant]") {
    STATIC_REQUIRE(noexcept(check(PidSettings{})));
}
