// Against mpmath (polynomial_roots_data.hpp and its generator), closed forms, and what must hold of any roots.
#include "math/polynomial_roots.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <limits>
#include <random>
#include <stdexcept>
#include <string>

#include "catch_compat.hpp"
#include "math/polynomial_roots_data.hpp"

using tauwright::detail::polynomial_roots;
using tauwright::detail::PolynomialRoots;
using Complex = std::complex<double>;

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

struct Allowed {
    double relative_error;
    bool simple;
};

// The figures that polynomial_roots.hpp gives.
Allowed allowed(const ReferencePolynomial& p) {
    const std::string family = p.family;
    const std::size_t n = p.coefficients.size() - 1;
    if (family == "double roots") return {n == 20 ? 1e-9 : 1e-13, false};
    if (family == "multiple root") return {n == 6 ? 1e-4 : n == 3 ? 1e-9 : 1e-15, false};
    return {n == 2 ? 6e-16 : 2e-16, true};
}

std::vector<ReferenceRoot> with_conjugates(const std::vector<ReferenceRoot>& listed) {
    std::vector<ReferenceRoot> all;
    for (const ReferenceRoot& r : listed) {
        all.push_back(r);
        if (r.im != 0.0) all.push_back({r.re, r.re_low, -r.im, -r.im_low});
    }
    return all;
}

std::vector<double> times_quadratic(std::vector<double> p, double b, double c) {
    p.resize(p.size() + 2, 0.0);
    for (std::size_t k = p.size(); k-- > 0;) p[k] += (k > 0 ? b * p[k - 1] : 0.0) + (k > 1 ? c * p[k - 2] : 0.0);
    return p;
}

double distance(Complex x, const ReferenceRoot& r) {
    return std::hypot((x.real() - r.re) - r.re_low, (x.imag() - r.im) - r.im_low);
}

void require_symmetric(const PolynomialRoots& roots) {
    for (std::size_t i = 0; i < roots.values.size(); ++i) {
        if (roots.values[i].imag() == 0.0) continue;
        REQUIRE(roots.values[i].imag() > 0.0);
        REQUIRE(i + 1 < roots.values.size());
        REQUIRE(roots.values[i + 1] == std::conj(roots.values[i]));
        REQUIRE(roots.error_radii[i + 1] == roots.error_radii[i]);
        ++i;
    }
}

}  // namespace

TEST_CASE("roots of stored coefficients agree with mpmath", "[independent computation]") {
    for (const ReferencePolynomial& p : reference_polynomials) {
        const std::size_t n = p.coefficients.size() - 1;
        CAPTURE(p.family, n);
        const auto [relative, simple] = allowed(p);
        const PolynomialRoots roots = polynomial_roots(p.coefficients);
        REQUIRE(roots.values.size() == n);
        REQUIRE(roots.error_radii.size() == n);
        require_symmetric(roots);
        std::vector<ReferenceRoot> left = with_conjugates(p.roots);
        REQUIRE(left.size() == n);
        for (std::size_t i = 0; i < n; ++i) {
            const Complex x = roots.values[i];
            const auto nearest = std::min_element(left.begin(), left.end(), [&](const auto& a, const auto& b) {
                return distance(x, a) < distance(x, b);
            });
            const double error = distance(x, *nearest);
            CAPTURE(x, nearest->re, nearest->im, error, roots.error_radii[i]);
            REQUIRE(error <= relative * std::hypot(nearest->re, nearest->im));
            REQUIRE(error <= roots.error_radii[i] * 1.006);  // the low parts are given to half a percent
            if (simple) {
                REQUIRE((x.imag() == 0.0) == (nearest->im == 0.0));
                REQUIRE(roots.error_radii[i] <= 1e-13 * std::abs(x));  // radii are of use, too
            }
            left.erase(nearest);
        }
    }
}

TEST_CASE("degrees 0, 1 and 2 by hand", "[closed form]") {
    CHECK(polynomial_roots(std::vector{5.0}).values.empty());
    CHECK(polynomial_roots(std::vector{4.0, -2.0}).values == std::vector<Complex>{0.5});
    CHECK(polynomial_roots(std::vector{1.0, -2.0, 1.0}).values == std::vector<Complex>{1.0, 1.0});
    CHECK(polynomial_roots(std::vector{2.0, 0.0, -8.0}).error_radii.size() == 2);
    CHECK(polynomial_roots(std::vector{1.0, 2.0, 5.0}).values == std::vector<Complex>{{-1.0, 2.0}, {-1.0, -2.0}});
    // W. Kahan's kind of case: b^2 and 4 a c agree in their first 53 bits. (94906267 x - 94906266)(x - 1) has the
    // exact roots 94906266/94906267 and 1.
    const auto close = polynomial_roots(std::vector{94906267.0, -189812533.0, 94906266.0}).values;
    CHECK(close[0].real() == Approx(94906266.0 / 94906267.0).epsilon(3e-16));
    CHECK(close[1].real() == Approx(1.0).epsilon(3e-16));
    // A small root next to a large one: x^2 + 1e9 x + 1 has -1e-9 (1 + 1e-18) and -1e9 (1 - 1e-18).
    const auto apart = polynomial_roots(std::vector{1.0, 1e9, 1.0}).values;
    CHECK(apart[0].real() == Approx(-1e-9).epsilon(3e-16));
    CHECK(apart[1].real() == Approx(-1e9).epsilon(3e-16));
}

TEST_CASE("roots at 0 are exact and come first", "[closed form]") {
    const auto roots = polynomial_roots(std::vector{1.0, 6.0, 11.0, 6.0, 0.0, 0.0, 0.0});
    CHECK(roots.values == std::vector<Complex>{0.0, 0.0, 0.0, -1.0, -2.0, -3.0});
    for (std::size_t i = 0; i < 3; ++i) CHECK(roots.error_radii[i] == 0.0);
    CHECK(polynomial_roots(std::vector{3.0, 0.0}).values == std::vector<Complex>{0.0});
}

TEST_CASE("roots of unity, to degree 100", "[closed form]") {
    for (const std::size_t n : {3u, 4u, 5u, 7u, 20u, 50u, 100u}) {
        CAPTURE(n);
        std::vector<double> p(n + 1, 0.0);
        p.front() = 1.0;
        p.back() = -1.0;
        std::vector<bool> seen(n, false);
        for (const Complex x : polynomial_roots(p).values) {
            const double step = 2.0 * std::acos(-1.0) / static_cast<double>(n);
            const double k = std::round(std::arg(x) / step);
            REQUIRE(std::abs(x - std::polar(1.0, k * step)) < 1e-15);
            seen[static_cast<std::size_t>(k < 0.0 ? k + static_cast<double>(n) : k)] = true;
        }
        CHECK(std::count(seen.begin(), seen.end(), true) == static_cast<std::ptrdiff_t>(n));
    }
}

TEST_CASE("the whole range of a double neither overflows nor vanishes", "[closed form]") {
    // Roots of (x + 1e-150)(x + 1)(x + 1e150), each right to a part in 1e150.
    const auto wide = polynomial_roots(std::vector{1e-100, 1e50, 1e50, 1e-100}).values;
    CHECK(wide[0].real() == Approx(-1e-150).epsilon(4e-16));
    CHECK(wide[1].real() == Approx(-1.0).epsilon(4e-16));
    CHECK(wide[2].real() == Approx(-1e150).epsilon(4e-16));
    const auto far_pair = polynomial_roots(std::vector{1e-300, 1e-300, 1e300}).values;
    CHECK(far_pair[0].real() == Approx(-0.5).epsilon(1e-15));
    CHECK(far_pair[0].imag() == Approx(1e300).epsilon(1e-15));
    CHECK(polynomial_roots(std::vector{1e-200, 1e200}).values == std::vector<Complex>{-infinity});
    CHECK(polynomial_roots(std::vector{1e200, 1e-200}).error_radii[0] > 0.0);
    CHECK(polynomial_roots(std::vector{1e-310, 1e-310, 1e308}).values == std::vector<Complex>{-infinity, -infinity});
    CHECK(polynomial_roots(std::vector{1e308, -1.0, 1e-322}).values.size() == 2);
    CHECK(polynomial_roots(std::vector{1e308, 0.0, 0x1p-1074, 0x1p-1074}).values.size() == 3);
    CHECK(polynomial_roots(std::vector{1e-310, 0.0, 0.0, 1e308, 1e308}).values.size() == 4);
    // -1e-100 must not suffer from its neighbor -1e400.
    CHECK(polynomial_roots(std::vector{1e-200, 1e200, 1e100}).values[0].real() == Approx(-1e-100).epsilon(4e-16));
    // -1e400 and -1e-400 beside -1.
    const auto beyond = polynomial_roots(std::vector{1e-200, 1e200, 1e200, 1e-200});
    CHECK(beyond.values == std::vector<Complex>{0.0, -1.0, -infinity});
    CHECK(beyond.error_radii[0] > 0.0);
    CHECK(beyond.error_radii[2] == infinity);
}

// Coefficients are exact integers, roots known in closed form: iterates fall on the very same double here.
TEST_CASE("multiple roots stay within their radii", "[closed form]") {
    constexpr std::uint64_t seed = 20240612;
    CAPTURE(seed);
    std::mt19937_64 random(seed);
    for (int trial = 0; trial < 5000; ++trial) {
        std::vector<double> p = {1.0};
        std::vector<Complex> left;
        while (p.size() <= 8) {
            const double b = static_cast<double>(random() % 4) - 1.0, c = 1.0 + static_cast<double>(random() % 3);
            const bool pair = random() % 2 == 0 && b * b < 4.0 * c;
            for (std::uint64_t times = 1 + random() % 3; times > 0; --times) {
                p = pair ? times_quadratic(p, b, c) : times_quadratic(p, b - c, -b * c);  // (s + b)(s - c)
                const double im = 0.5 * std::sqrt(4.0 * c - b * b);
                left.push_back(pair ? Complex(-0.5 * b, im) : Complex(-b));
                left.push_back(pair ? Complex(-0.5 * b, -im) : Complex(c));
            }
        }
        CAPTURE(trial, p);
        const PolynomialRoots roots = polynomial_roots(p);
        REQUIRE(roots.values.size() == left.size());
        require_symmetric(roots);
        for (std::size_t i = 0; i < roots.values.size(); ++i) {
            const Complex x = roots.values[i];
            const auto nearest = std::min_element(left.begin(), left.end(), [&](Complex a, Complex b) {
                return std::abs(x - a) < std::abs(x - b);
            });
            REQUIRE(std::isless(roots.error_radii[i], 0.5));
            REQUIRE(std::abs(x - *nearest) <= roots.error_radii[i] + 4e-16 * std::abs(x));
            left.erase(nearest);
        }
    }
}

TEST_CASE("what is no polynomial is refused", "[closed form]") {
    CHECK_THROWS_AS(polynomial_roots(std::vector<double>{}), std::invalid_argument);
    CHECK_THROWS_AS(polynomial_roots(std::vector{0.0, 1.0}), std::invalid_argument);
    CHECK_THROWS_AS(polynomial_roots(std::vector{1.0, infinity, 1.0}), std::invalid_argument);
    CHECK_THROWS_AS(polynomial_roots(std::vector{1.0, std::nan(""), 1.0}), std::invalid_argument);
}

namespace {

std::vector<double> random_polynomial(std::mt19937_64& random, std::size_t highest_degree) {
    const std::size_t n = 1 + random() % highest_degree;
    std::uniform_real_distribution<double> unit(-1.0, 1.0);
    std::vector<double> p(n + 1);
    switch (random() % 4) {
        case 0:  // dense
            for (double& a : p) a = unit(random);
            break;
        case 1:  // coefficients over twenty decades
            for (double& a : p) a = unit(random) * std::pow(10.0, 10.0 * unit(random));
            break;
        case 2:  // small integers, many of them 0
            for (double& a : p) a = static_cast<double>(random() % 7) - 3.0;
            break;
        default:  // product of real factors
            p.assign(1, 1.0);
            for (std::size_t i = 0; i < n; ++i) {
                const double root = std::pow(10.0, 2.0 * unit(random));
                p.push_back(0.0);
                for (std::size_t k = p.size() - 1; k > 0; --k) p[k] += root * p[k - 1];
            }
    }
    if (p.front() == 0.0) p.front() = 1.0;
    return p;
}

// |p(x)| and a bound on its rounding error.
std::pair<long double, long double> residual(const std::vector<double>& p, Complex at) {
    const std::complex<long double> x(at);
    std::complex<long double> value = 0.0L;
    long double size = 0.0L;
    for (double a : p) {
        value = value * x + static_cast<long double>(a);
        size = size * std::abs(x) + std::abs(static_cast<long double>(a));
    }
    const long double steps = 4.0L * static_cast<long double>(p.size());
    return {std::abs(value), steps * std::numeric_limits<long double>::epsilon() * size};
}

// p(x_i) = p_0 prod (x_i - root_j), with every root within its radius.
void require_small_residuals(const std::vector<double>& p, const PolynomialRoots& roots) {
    for (std::size_t i = 0; i < roots.values.size(); ++i) {
        long double bound = std::abs(p.front()) * static_cast<long double>(roots.error_radii[i]);
        for (std::size_t j = 0; j < roots.values.size(); ++j)
            if (j != i) bound *= std::abs(roots.values[i] - roots.values[j]) + roots.error_radii[j];
        const auto [value, rounding] = residual(p, roots.values[i]);
        REQUIRE(value <= bound * (1.0L + 1e-12L) + rounding);
    }
}

}  // namespace

TEST_CASE("invariants of random polynomials", "[invariant]") {
    constexpr std::uint64_t seed = 20240613;
    CAPTURE(seed);
    std::mt19937_64 random(seed);
    constexpr double u = 0x1p-53;
    for (int trial = 0; trial < 2000; ++trial) {
        const std::vector<double> p = random_polynomial(random, trial % 20 == 0 ? 100 : 20);
        CAPTURE(trial, p);
        const std::size_t n = p.size() - 1;
        const PolynomialRoots roots = polynomial_roots(p);
        REQUIRE(roots.values.size() == n);
        require_symmetric(roots);

        // Sum and product of the roots; the product in logarithms so that it fits.
        const double steps = 4.0 * static_cast<double>(n + 1) * u;
        Complex sum = 0.0;
        double log_product = 0.0, sum_slack = 0.0, log_slack = 0.0;
        for (std::size_t i = 0; i < n; ++i) {
            const double size = std::abs(roots.values[i]);
            sum += roots.values[i];
            sum_slack += roots.error_radii[i] + steps * size;
            log_product += std::log(size);
            log_slack += roots.error_radii[i] / size + steps * (1.0 + std::abs(std::log(size)));
        }
        REQUIRE(std::abs(sum + p[1] / p[0]) <= sum_slack + u * std::abs(p[1] / p[0]));
        if (p.back() != 0.0) {
            const double log_expected = std::log(std::abs(p.back() / p.front()));
            REQUIRE(std::abs(log_product - log_expected) <= 2.0 * log_slack + steps * (1.0 + std::abs(log_expected)));
        }

        require_small_residuals(p, roots);
    }
}
