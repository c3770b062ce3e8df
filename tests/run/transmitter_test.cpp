#include <limits>
#include <type_traits>
#include <vector>

#include "core/oracle_tools.hpp"
#include "tauwright/run/transmitter.hpp"

using namespace tauwright;
using oracle::absolute_error;
using oracle::relative_error;

static_assert(std::is_trivially_copyable_v<run::Transmitter>);

TEST_CASE("a perfect transmitter hands on what it gets", "[closed form]") {
    run::Transmitter transmitter(run::TransmitterCoefficients{}, 40.0);
    CHECK(transmitter.measured() == 40.0);
    for (double value : {40.1, -0.3, 1e-17, 1e60, 0.1 + 0.2}) CHECK(transmitter.step(value) == value);
}

TEST_CASE("the lag is a first-order recursion at its start value", "[closed form]") {
    run::Transmitter transmitter({.smoothing = 0.2}, 50.0);
    double share = 1.0;
    for (int k = 0; k < 30; ++k) {
        share *= 0.8;
        CHECK(relative_error(transmitter.step(60.0), 60.0 - 10.0 * share) <= 1e-14);
    }
}

TEST_CASE("quantization rounds to the nearest multiple", "[independent computation]") {
    constexpr std::uint64_t seed = 41;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    for (int i = 0; i < 2000; ++i) {
        const double resolution = random.scaled(1e-4, 10.0), value = random.uniform(-150.0, 150.0);
        run::Transmitter transmitter({.resolution = resolution}, 0.0);
        const double measured = transmitter.step(value), multiples = measured / resolution;
        CHECK(absolute_error(multiples, std::nearbyint(multiples)) <= 1e-9);
        CHECK(absolute_error(measured, value) <= 0.5 * resolution * (1.0 + 1e-9));
    }
    // Twelve bits of 0 to 100 %: every count comes back as itself.
    run::Transmitter converter({.resolution = 100.0 / 4095.0}, 0.0);
    for (int count = 0; count <= 4095; count += 7)
        CHECK(converter.step(100.0 / 4095.0 * (count + 0.4)) == count * (100.0 / 4095.0));
    CHECK(run::Transmitter({.resolution = 0.5}, 0.0).step(0.25) == 0.5);
    CHECK(run::Transmitter({.resolution = 0.5}, 0.0).step(-0.25) == -0.5);
    CHECK(run::Transmitter({.resolution = 1e-300}, 0.0).step(37.5) == 37.5);
}

TEST_CASE("the generator is the published one", "[published]") {
    // splitmix64 from state 1234567 (first outputs as commonly published with the algorithm; from memory).
    const std::uint64_t bits[] = {6457827717110365317u, 3203168211198807973u, 9817491932198370423u, 4593380528125082431u,
                                  16408922859458223821u};
    oracle::Seeded published(1234567);
    for (std::uint64_t b : bits) CHECK(published.bits() == b);
    // Twelve uniform numbers a draw: the block against the oracle's own generator.
    run::Noise noise(1234567);
    oracle::Seeded uniform(1234567);
    for (int i = 0; i < 100; ++i) {
        double sum = -6.0;
        for (int j = 0; j < 12; ++j) sum += uniform.uniform(0.0, 1.0);
        CHECK(noise.next() == sum);
    }
}

TEST_CASE("noise has the mean, size and whiteness asked for", "[closed form]") {
    run::Transmitter transmitter({.noise = 0.3, .seed = 9}, 50.0);
    constexpr int n = 200000;
    double sum = 0.0, squares = 0.0, neighbors = 0.0, fourth = 0.0, before = 0.0;
    for (int k = 0; k < n; ++k) {
        const double x = (transmitter.step(50.0) - 50.0) / 0.3;
        sum += x;
        squares += x * x;
        fourth += x * x * x * x;
        neighbors += x * before;
        before = x;
    }
    CHECK(absolute_error(sum / n, 0.0) <= 0.01);                       // 4.5 standard errors
    CHECK(absolute_error(squares / n, 1.0) <= 0.015);
    CHECK(absolute_error(neighbors / n, 0.0) <= 0.01);
    CHECK(absolute_error(fourth / n, 3.0 - 6.0 / 5.0 / 12.0) <= 0.1);  // twelve uniform numbers: excess -6/5/12
}

TEST_CASE("a value that is no number is handed on and forgotten", "[invariant]") {
    run::Transmitter transmitter({.smoothing = 0.5}, 50.0);
    CHECK(transmitter.step(60.0) == 55.0);
    CHECK(is_nan(transmitter.step(std::nan(""))));
    CHECK(transmitter.step(std::numeric_limits<double>::infinity()) == std::numeric_limits<double>::infinity());
    CHECK(transmitter.step(60.0) == 57.5);
}
