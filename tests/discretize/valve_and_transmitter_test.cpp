// Plain values of valve and transmitter to the coefficients of one scan.
#include <limits>

#include "core/oracle_tools.hpp"
#include "tauwright/discretize/discretize.hpp"

using namespace tauwright;
using oracle::check_refused;
using oracle::relative_error;

TEST_CASE("valve settings become coefficients of one scan", "[closed form]") {
    const run::ValveCoefficients none = discretize(ValveSettings{}, 0.5);
    CHECK(none == run::ValveCoefficients{});
    CHECK(ValveSettings{}.perfect());
    const ValveSettings valve{.dead_band = 1.0, .stick = 0.5, .resolution = 0.25, .travel_rate_per_s = 5.0};
    CHECK_FALSE(valve.perfect());
    const run::ValveCoefficients c = discretize(valve, 0.5, -10.0, 110.0);
    CHECK(c == run::ValveCoefficients{.dead_band = 1.0, .stick = 0.5, .resolution = 0.25, .travel_per_scan = 2.5,
                                      .position_low = -10.0, .position_high = 110.0});
    // A stroke of 20 s takes 20 s.
    run::Valve stroking(discretize(ValveSettings{.travel_rate_per_s = 5.0}, 0.1), 0.0);
    int scans = 1;
    while (stroking.step(100.0) < 100.0 - 1e-9 && scans < 1000) ++scans;
    CHECK(scans == 200);
}

TEST_CASE("the transmitter's lag keeps its pole and its digits", "[closed form]") {
    CHECK(discretize(TransmitterSettings{}, 0.5) == run::TransmitterCoefficients{});
    const auto c = discretize(TransmitterSettings{.lag = 2.0, .resolution = 0.1}, 0.5, 0.3, 17);
    CHECK(relative_error(c.smoothing, 0.22119921692859513) <= 1e-15);  // 1 - exp(-1/4)
    CHECK(c.noise == 0.3);
    CHECK(c.resolution == 0.1);
    CHECK(c.seed == 17);
    CHECK(relative_error(discretize(TransmitterSettings{.lag = 1e6}, 1e-6).smoothing, 1e-12) <= 1e-11);
    // Under a held input the block is the lag itself.
    run::Transmitter transmitter(discretize(TransmitterSettings{.lag = 2.0}, 0.5), 0.0);
    double measured = 0.0;
    for (int k = 0; k < 8; ++k) measured = transmitter.step(1.0);
    CHECK(relative_error(measured, 1.0 - std::exp(-2.0)) <= 1e-14);
}

TEST_CASE("valves and transmitters that cannot be are refused", "[regression]") {
    const double nan = std::nan("");
    check_refused(error_code::out_of_domain, {"valve.stick", "-0.5", "0 or a number above"}, [&] { discretize(ValveSettings{.stick = -0.5}, 1.0); });
    check_refused(error_code::out_of_domain, {"valve.dead_band", "-1"}, [&] { discretize(ValveSettings{.dead_band = -1.0}, 1.0); });
    check_refused(error_code::not_finite, {"valve.resolution", "nan"}, [&] { discretize(ValveSettings{.resolution = nan}, 1.0); });
    check_refused(error_code::not_finite, {"valve.stick", "inf"}, [&] { discretize(ValveSettings{.stick = std::numeric_limits<double>::infinity()}, 1.0); });
    check_refused(error_code::out_of_domain, {"valve.travel_rate_per_s", "0"}, [&] { discretize(ValveSettings{.travel_rate_per_s = 0.0}, 1.0); });
    check_refused(error_code::not_finite, {"valve.travel_rate_per_s", "nan"}, [&] { discretize(ValveSettings{.travel_rate_per_s = nan}, 1.0); });
    check_refused(error_code::out_of_domain, {"scan_time", "0"}, [&] { discretize(ValveSettings{}, 0.0); });
    check_refused(error_code::out_of_domain, {"position_high", "0", "100"}, [&] { discretize(ValveSettings{}, 1.0, 100.0, 0.0); });
    check_refused(error_code::not_finite, {"position_low", "nan"}, [&] { discretize(ValveSettings{}, 1.0, nan, 0.0); });
    check_refused(error_code::out_of_domain, {"transmitter.lag", "-2"}, [&] { discretize(TransmitterSettings{.lag = -2.0}, 1.0); });
    check_refused(error_code::not_finite, {"transmitter.resolution", "nan"}, [&] { discretize(TransmitterSettings{.resolution = nan}, 1.0); });
    check_refused(error_code::out_of_domain, {"scan_time", "-1"}, [&] { discretize(TransmitterSettings{}, -1.0); });
    check_refused(error_code::out_of_domain, {"noise", "-0.1"}, [&] { discretize(TransmitterSettings{}, 1.0, -0.1); });
}
