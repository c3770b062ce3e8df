#include <bit>
#include <charconv>
#include <limits>
#include <string>

#include "core/oracle_tools.hpp"
#include "tauwright/core/error.hpp"
#include "tauwright/core/version.hpp"

using namespace tauwright;
using oracle::check_refused;

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double not_a_number = std::numeric_limits<double>::quiet_NaN();

double read_back(const std::string& text) {
    double x = 0.0;
    const auto [end, code] = std::from_chars(text.data(), text.data() + text.size(), x);
    CHECK(code == std::errc());
    CHECK(end == text.data() + text.size());
    return x;
}

}  // namespace

TEST_CASE("text_of reads back as the same bits and has no shorter form", "[invariant]") {
    constexpr std::uint64_t seed = 7;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 20000; ++i) {
        const double x = std::bit_cast<double>(random.bits());
        if (!is_finite(x)) continue;
        const std::string text = text_of(x);
        if (std::bit_cast<std::uint64_t>(read_back(text)) != std::bit_cast<std::uint64_t>(x)) FAIL_CHECK(text);
        if (text.size() > 24 || text.find(',') != std::string::npos) FAIL_CHECK(text);
    }
}

TEST_CASE("text_of of numbers whose shortest text is known", "[closed form]") {
    CHECK(text_of(0.1) == "0.1");
    CHECK(text_of(0.1 + 0.2) == "0.30000000000000004");
    CHECK(text_of(3.0) == "3");
    CHECK(text_of(-2.5) == "-2.5");
    CHECK(text_of(5e-324) == "5e-324");
    CHECK(text_of(-0.0) == "-0");
    CHECK(text_of(infinity) == "inf");
    CHECK(text_of(-infinity) == "-inf");
    CHECK(text_of(not_a_number) == "nan");
    CHECK(text_of(-not_a_number) == "nan");
}

TEST_CASE("argument checks name the argument, the value and the remedy", "[regression]") {
    using namespace tauwright::detail;
    check_refused(error_code::not_finite, {"lag", "nan", "finite"}, [] { require_finite("lag", not_a_number); });
    check_refused(error_code::not_finite, {"lag", "-inf", "finite"}, [] { require_positive("lag", -infinity); });
    check_refused(error_code::out_of_domain, {"lag", "-1.5", "above 0"}, [] { require_positive("lag", -1.5); });
    check_refused(error_code::out_of_domain, {"lag", "0", "above 0"}, [] { require_positive("lag", 0.0); });
    check_refused(error_code::out_of_domain, {"dead_time", "-0.25", "0"}, [] { require_not_negative("dead_time", -0.25); });
    check_refused(error_code::not_finite, {"dead_time", "inf"}, [] { require_not_negative("dead_time", infinity); });
    check_refused(error_code::out_of_domain, {"gain", "0", "other than 0"}, [] { require_not_zero("gain", -0.0); });
    check_refused(error_code::not_finite, {"gain", "nan"}, [] { require_not_zero("gain", not_a_number); });
    CHECK_NOTHROW(require_positive("lag", 5e-324));
    CHECK_NOTHROW(require_not_negative("dead_time", 0.0));
    CHECK_NOTHROW(require_finite("gain", -1.7976931348623157e308));
}

TEST_CASE("an Error is a runtime_error that carries its code", "[regression]") {
    const Error error(error_code::missing_range, "range is missing; give one");
    CHECK(error.code() == error_code::missing_range);
    CHECK(std::string(static_cast<const std::runtime_error&>(error).what()) == "range is missing; give one");
}

TEST_CASE("the version's text is its three numbers", "[invariant]") {
    CHECK(std::string(version) == std::to_string(TAUWRIGHT_VERSION_MAJOR) + "." + std::to_string(TAUWRIGHT_VERSION_MINOR) +
                                      "." + std::to_string(TAUWRIGHT_VERSION_PATCH));
}
