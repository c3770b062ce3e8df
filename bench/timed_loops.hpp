// The loops that the margins are timed on; compare_margins.py makes the same ones.
#pragma once

#include <cmath>
#include <vector>

#include "tauwright/control/pid_response.hpp"
#include "tauwright/model/forms.hpp"

namespace bench {

struct Loop {
    tauwright::TransferFunction process;
    tauwright::PidSettings settings;
};

/// 200 loops as tuned in plants: first and second order, dead time 0.05 to 5 lags, closed loop 0.5 to 3 dead times,
/// every fourth with a measurement filter.
inline std::vector<Loop> typical_loops() {
    std::vector<Loop> loops;
    for (int i = 0; i < 200; ++i) {
        const double lag = 10.0, dead_time = lag * 0.05 * std::pow(100.0, (i % 20) / 19.0);
        const double time_constant = dead_time * (0.5 + 0.25 * (i / 20)), gain = lag / (2.0 * (time_constant + dead_time));
        tauwright::PidSettings s{.gain = gain, .integral_time = lag};
        if (i % 4 == 3) s.measurement_filter_time = 0.1 * dead_time;
        if (i % 2 == 0) {
            loops.push_back({tauwright::first_order_plus_dead_time(2.0, lag, dead_time), s});
            continue;
        }
        const double second = lag * (0.05 + 0.09 * (i / 20));
        s.derivative_time = second;
        s.filter_time = 0.1 * second;
        loops.push_back({tauwright::second_order_plus_dead_time(2.0, lag, second, dead_time), s});
    }
    return loops;
}

/// Lightly damped, unstable, repeated and nearly cancelled poles, right-half-plane zeros, dead time up to 100 lags.
inline std::vector<tauwright::TransferFunction> nasty_loops() {
    std::vector<tauwright::TransferFunction> loops;
    for (int i = 0; i < 200; ++i) {
        const double x = (i % 25) / 24.0;
        tauwright::Factors f{.gain = 0.3, .integrators = i % 2};
        switch (i / 25) {
            case 0: f.lag_pairs = {{1.0, std::pow(10.0, -1.0 - 3.0 * x)}}; f.gain = 0.02; f.dead_time = 0.3; break;
            case 1: f.lags = {-1.0, 0.1}; f.gain = -2.0 - x; f.dead_time = 0.2 * x; f.integrators = 0; break;
            case 2: f.lags = {1.0, 1.0, 1.0, 1.0, 1.0}; f.gain = 0.2 + x; f.dead_time = x; break;
            case 3: f.lags = {1.0, 2.0}; f.leads = {1.0 + std::pow(10.0, -12.0 * x), -0.5}; f.dead_time = 0.5; break;
            case 4: f.lags = {1.0}; f.dead_time = std::pow(10.0, 2.0 * x); f.gain = 0.5 / (1.0 + f.dead_time); break;
            case 5: f.lag_pairs = {{1.0, 0.02}, {0.4, 0.01}}; f.lead_pairs = {{0.8, 0.02 + 0.1 * x}}; f.gain = 0.05; f.dead_time = 0.1; break;
            case 6: f.lags = {5.0, 1.0, 0.2}; f.leads = {3.0}; f.dead_time = 0.1 + 3.0 * x; f.gain = 0.4; break;
            default: f.lag_pairs = {{1.0, -0.05 * x}}; f.leads = {2.0, 1.0}; f.lags = {0.1, 0.1}; f.gain = 1.5; f.integrators = 0; f.dead_time = 0.02; break;
        }
        loops.push_back(tauwright::TransferFunction::from_factors(f));
    }
    return loops;
}

}  // namespace bench
