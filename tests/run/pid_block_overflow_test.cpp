#include "catch_compat.hpp"
#include "tauwright/discretize/discretize.hpp"

using namespace tauwright;

TEST_CASE("a gain beyond reason holds and flags, and the block comes back", "[closed form]") {
    run::PidBlock block(discretize(PidSettings{.gain = 1e170, .integral_time = 1.0}, 1.0), 0.0, 100.0, 40.0);
    CHECK(block.step(1.0, 1.0) == 40.0);
    CHECK(block.step(1e149, 0.0) == 40.0);
    CHECK((block.flags() & run::flag_bad_input) != 0);
    CHECK(is_finite(block.integral()));
    CHECK(block.step(1.0, 1.0) == 40.0);
    CHECK((block.flags() & run::flag_bad_input) == 0);
    for (double x : {1e150, -1e150, 1e308}) {
        CHECK(block.step(x, 0.0) == 40.0);
        CHECK((block.flags() & run::flag_bad_input) != 0);
    }
}
