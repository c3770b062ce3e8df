// The valve block against closed forms and a second model written from other formulations.
#include <algorithm>
#include <limits>
#include <type_traits>

#include "core/oracle_tools.hpp"
#include "tauwright/run/valve.hpp"

using namespace tauwright;
using oracle::absolute_error;

static_assert(std::is_trivially_copyable_v<run::Valve>);

namespace {

// A second model. Play: the operator y = max(u - r, min(u + r, y)). Sticking: the force accumulated since the
// last slip, as in the two-parameter model of He, Wang, Pottmann and Qin (Ind. Eng. Chem. Res. 46, 2007; from memory)
// with static friction `stick` and no kinetic friction. Resolution: a stem that counts. Travel: two states.
struct SecondModel {
    run::ValveCoefficients c;
    double played, force = 0.0, goal, origin, stem;
    long count = 0;
    bool moving = false;

    SecondModel(const run::ValveCoefficients& coefficients, double start)
        : c(coefficients), played(start), goal(start), origin(start), stem(start) {}

    double step(double demand) {
        const double u = std::clamp(demand, c.position_low, c.position_high), before = played;
        played = std::max(u - c.dead_band / 2.0, std::min(u + c.dead_band / 2.0, played));
        force += played - before;
        if (moving || std::abs(force) > c.stick) {
            if (c.resolution > 0.0) {
                count += std::lround(std::trunc(force / c.resolution + std::copysign(1e-9, force)));
                goal = origin + static_cast<double>(count) * c.resolution;
            } else {
                goal = played;
            }
            force = played - goal;
            moving = true;
        }
        if (moving) stem += std::clamp(goal - stem, -c.travel_per_scan, c.travel_per_scan);
        if (std::abs(stem - goal) < 1e-12) stem = goal, moving = false;
        return stem;
    }
};

}  // namespace

TEST_CASE("a perfect valve is its demand, within its travel", "[closed form]") {
    run::Valve valve(run::ValveCoefficients{}, 40.0);
    CHECK(valve.position() == 40.0);
    for (double demand : {40.1, 0.3, 99.999, 1e-17, 100.0}) CHECK(valve.step(demand) == demand);
    CHECK(valve.step(130.0) == 100.0);
    CHECK(valve.step(-7.0) == 0.0);
}

TEST_CASE("B13: a reversal loses the dead band", "[published]") {
    // Trade fact B13 (derived): an engaged move of +5 moves the stem 5, the reversal of -5 moves it 5 - DB, DB = 1.
    run::Valve valve({.dead_band = 1.0}, 40.0);
    valve.step(45.0);  // takes up the play
    const double engaged = valve.position();
    const double up = valve.step(50.0) - engaged, down = valve.position() - valve.step(45.0);
    CHECK(absolute_error(up, 5.0) <= 1e-12);
    CHECK(absolute_error(down / up, 0.8) <= 1e-12);
    // A slow sine of amplitude A leaves the stem an amplitude of A - DB/2.
    double high = 0.0, low = 100.0;
    for (int k = 0; k <= 40000; ++k) {
        const double position = valve.step(50.0 + 3.0 * std::sin(k * 3.14159265358979323846 / 5000.0));
        if (k > 10000) high = std::max(high, position), low = std::min(low, position);
    }
    CHECK(absolute_error(0.5 * (high - low), 2.5) <= 1e-6);
}

TEST_CASE("a sticking valve holds, then jumps to the demand", "[closed form]") {
    run::Valve valve({.stick = 1.0}, 50.0);
    CHECK(valve.step(50.9) == 50.0);
    CHECK(valve.step(51.0) == 50.0);  // as far as the stick is not farther
    CHECK(valve.step(51.5) == 51.5);
    CHECK(valve.step(50.6) == 51.5);
    CHECK(valve.step(50.4) == 50.4);
}

TEST_CASE("the position moves in whole multiples of the resolution, never beyond the demand", "[closed form]") {
    run::Valve valve({.resolution = 0.25}, 50.1);
    CHECK(valve.step(50.3) == 50.1);
    CHECK(absolute_error(valve.step(50.9), 50.85) <= 1e-12);
    CHECK(absolute_error(valve.step(50.7), 50.85) <= 1e-12);
    CHECK(absolute_error(valve.step(50.6), 50.6) <= 1e-12);
    // Ten steps of a tenth arrive, whatever rounding says of 0.1.
    run::Valve tenth({.resolution = 0.1}, 0.0);
    CHECK(absolute_error(tenth.step(1.0), 1.0) <= 1e-12);
    CHECK(absolute_error(tenth.step(0.7), 0.7) <= 1e-12);
    run::Valve three({.resolution = 0.1}, 0.0);
    CHECK(absolute_error(three.step(0.3), 0.3) <= 1e-12);  // 0.3 / 0.1 is a little less than 3
    // A resolution below what a double holds is none.
    run::Valve fine({.resolution = 1e-300}, 0.0);
    CHECK(fine.step(37.5) == 37.5);
}

TEST_CASE("travel takes its time and ends exactly on the demand", "[closed form]") {
    run::Valve valve({.travel_per_scan = 2.0}, 10.0);
    CHECK(valve.step(15.0) == 12.0);
    CHECK(valve.step(15.0) == 14.0);
    CHECK(valve.step(15.0) == 15.0);
    CHECK(valve.step(0.0) == 13.0);
    // On its way it follows the demand: it sticks only at rest.
    run::Valve sticky({.stick = 3.0, .travel_per_scan = 2.0}, 10.0);
    CHECK(sticky.step(15.0) == 12.0);
    CHECK(sticky.step(13.0) == 13.0);
    CHECK(sticky.step(15.5) == 13.0);
}

TEST_CASE("every mix of faults agrees with a second model, step for step", "[independent computation]") {
    constexpr std::uint64_t seed = 20261201;
    INFO("seed " << seed);
    oracle::Seeded random(seed);
    int moved = 0, held = 0;
    for (int i = 0; i < 300; ++i) {
        const run::ValveCoefficients c{.dead_band = random.chance(0.6) ? random.scaled(0.05, 5.0) : 0.0,
                                       .stick = random.chance(0.6) ? random.scaled(0.05, 5.0) : 0.0,
                                       .resolution = random.chance(0.5) ? random.scaled(0.01, 1.0) : 0.0,
                                       .travel_per_scan = random.chance(0.5) ? random.scaled(0.1, 10.0)
                                                                             : std::numeric_limits<double>::infinity(),
                                       .position_low = -5.0, .position_high = 105.0};
        double demand = random.uniform(10.0, 90.0), worst = 0.0;
        run::Valve valve(c, demand);
        SecondModel second(c, demand);
        for (int k = 0; k < 400; ++k) {
            demand += random.chance(0.1) ? random.uniform(-30.0, 30.0) : random.uniform(-0.5, 0.5);
            if (random.chance(0.02)) demand = random.uniform(-20.0, 120.0);
            const double before = valve.position(), now = valve.step(demand);
            (now == before ? held : moved) += 1;
            worst = std::max(worst, std::abs(now - second.step(demand)));
        }
        INFO("valve " << i << ": dead band " << c.dead_band << " stick " << c.stick << " resolution " << c.resolution
                      << " travel " << c.travel_per_scan);
        CHECK(absolute_error(worst, 0.0) <= 1e-9);
    }
    CHECK(moved > 20000);
    CHECK(held > 20000);
}

TEST_CASE("a demand that is no number is the one before", "[invariant]") {
    const double nan = std::nan(""), infinite = std::numeric_limits<double>::infinity();
    run::Valve valve({.dead_band = 1.0, .travel_per_scan = 3.0}, 50.0);
    CHECK(valve.step(60.5) == 53.0);
    CHECK(valve.step(nan) == 56.0);
    CHECK(valve.step(infinite) == 59.0);
    CHECK(valve.step(nan) == 60.0);
    run::Valve nowhere(run::ValveCoefficients{}, nan);
    CHECK(nowhere.position() == 0.0);
    CHECK(nowhere.step(nan) == 0.0);
}
