#include "math/double_double.hpp"

#include <cmath>
#include <cstdint>
#include <random>

#include "catch_compat.hpp"
#include "math/lanes.hpp"

using namespace tauwright::detail;

namespace {

constexpr std::uint64_t seed = 20240611;

double any_double(std::mt19937_64& random, int lowest_power, int highest_power) {
    const double mantissa = static_cast<double>(static_cast<std::int64_t>(random()) >> 10);
    const int power = std::uniform_int_distribution<int>(lowest_power, highest_power)(random);
    return std::ldexp(mantissa, power - 53);
}

}  // namespace

// The error of a product is one fused multiply-add; that of a sum is exact in 64-bit integers.
TEST_CASE("sums and products lose nothing", "[closed form]") {
    CAPTURE(seed);
    std::mt19937_64 random(seed);
    for (int i = 0; i < 20000; ++i) {
        const double a = any_double(random, -200, 200), b = any_double(random, -200, 200);
        const auto product = two_product(a, b);
        REQUIRE(product.value == a * b);
        REQUIRE(product.error == std::fma(a, b, -product.value));

        const std::int64_t large = static_cast<std::int64_t>(random() >> 11) * 512 * (i % 2 == 0 ? 1 : -1);
        const std::int64_t small = static_cast<std::int64_t>(random() >> 12);
        const auto sum = two_sum(static_cast<double>(small), static_cast<double>(large));
        REQUIRE(sum.value == static_cast<double>(small) + static_cast<double>(large));
        REQUIRE(static_cast<std::int64_t>(sum.value) + static_cast<std::int64_t>(sum.error) == small + large);
    }
}

// (y - 1)^20 near y = 1 from its coefficients: plain Horner has no digit left, and the closed form needs none.
TEST_CASE("the complex multiply-add keeps the promised error", "[closed form]") {
    CAPTURE(seed);
    std::mt19937_64 random(seed);
    std::uniform_real_distribution<double> offset(-0.3, 0.3);
    constexpr int n = 20;
    double coefficients[n + 1] = {1.0};
    for (int k = 1; k <= n; ++k) coefficients[k] = -coefficients[k - 1] * (n + 1 - k) / k;
    double worst = 0.0;
    for (int i = 0; i < 1000; ++i) {
        const double x = 1.0 + offset(random), y = offset(random);
        CompensatedComplex<double> h{1.0, 0.0, 0.0, 0.0, 0.0};
        for (int k = 1; k <= n; ++k) multiply_add(h, halves(x), halves(y), std::hypot(x, y), coefficients[k]);
        double re = 1.0, im = 0.0;
        for (int k = 0; k < n; ++k) {
            const double next = re * (x - 1.0) - im * y;
            im = re * y + im * (x - 1.0);
            re = next;
        }
        const double exact = std::hypot(re, im);
        const double error = std::hypot((h.re - re) + h.re_error, (h.im - im) + h.im_error);
        REQUIRE(error <= 4.0 * (n + 1) * 0x1p-53 * h.error_size + 100.0 * 0x1p-53 * exact);
        REQUIRE(h.error_size <= 4.0 * n * 0x1p-53 * std::pow(1.0 + std::hypot(x, y), n));  // n u sum |a_k| |y|^k
        worst = std::max(worst, std::abs(std::hypot(h.re, h.im) - exact) / exact);
    }
    REQUIRE(worst > 1e-3);  // without the carried error it would have failed
}

TEST_CASE("four lanes give the bits of four scalars", "[invariant]") {
    CAPTURE(seed);
    std::mt19937_64 random(seed);
    double a[4], b[4], c[4], d[4];
    for (int i = 0; i < 1000; ++i) {
        for (int l = 0; l < 4; ++l) {
            a[l] = any_double(random, -20, 20);
            b[l] = i % 3 == 0 ? a[l] : any_double(random, -20, 20);
        }
        const Lanes x = Lanes::load(a), y = Lanes::load(b);
        const auto check = [&](Lanes got, auto expected) {
            got.store(c);
            for (int l = 0; l < 4; ++l) REQUIRE(c[l] == expected(a[l], b[l]));
        };
        check(x + y, [](double p, double q) { return p + q; });
        check(x - y, [](double p, double q) { return p - q; });
        check(x * y, [](double p, double q) { return p * q; });
        check(x / y, [](double p, double q) { return p / q; });
        check(smaller(x, y), [](double p, double q) { return p < q ? p : q; });
        check(at_most(x, y), [](double p, double q) { return p <= q ? 1.0 : 0.0; });
        check(magnitude(x), [](double p, double) { return std::abs(p); });
        check(Lanes(a[0]), [&](double, double) { return a[0]; });
        // (p / q) q = p for complex numbers, within the rounding of the two.
        const ComplexLanes p{x, y}, q{y, x + y};
        ((p / q) * q).store(c, d);
        for (int l = 0; l < 4; ++l) REQUIRE(std::hypot(c[l] - a[l], d[l] - b[l]) <= 2e-15 * std::hypot(a[l], b[l]));
    }
}
