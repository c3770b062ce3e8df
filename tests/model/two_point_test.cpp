// The times at which a first-order step passes the levels that hand methods read off a trend.
#include "catch_compat.hpp"
#include "tauwright/model/forms.hpp"

using namespace tauwright;

// Source: trade facts B01 (recalled from memory, recomputed), B02 and B03 (recomputed): lag 12 s, dead time 3 s.
TEST_CASE("two-point and 35/85 levels of a first-order step", "[published]") {
    const double level_1 = 0.28346868942621073, level_2 = 0.6321205588285577;  // 1 - exp(-1/3), 1 - exp(-1)
    const std::vector<double> times = {7.0, 15.0, 6.992153260590198, 14.996068089758474, 8.224907813774838, 26.007872306440806};
    const auto y = step_response(first_order_plus_dead_time(1.0, 12.0, 3.0), times);
    CHECK(y[0] == Approx(level_1).epsilon(1e-14));
    CHECK(y[1] == Approx(level_2).epsilon(1e-14));
    CHECK(y[2] == Approx(0.283).epsilon(1e-12));
    CHECK(y[3] == Approx(0.632).epsilon(1e-12));
    CHECK(y[4] == Approx(0.353).epsilon(1e-12));
    CHECK(y[5] == Approx(0.853).epsilon(1e-12));
}
