// Seeded records with a known truth, made without any of the library's arithmetic.
#pragma once

#include <cmath>
#include <random>
#include <vector>

#include "tauwright/identify/identify.hpp"

namespace simulated {

struct Truth {
    double gain = 1.2, lag = 12.0, dead_time = 3.3;  // lag 0: integrating, `gain` its slope
    double noise = 0.3, drift = 0.0;
    double rest_output = 50.0, rest_value = 60.0;
    std::vector<double> move_times = {40, 130, 220, 310};
    std::vector<double> move_sizes = {5, -5, -5, 5};
    double duration = 400.0;
    std::size_t samples = 1000;
    bool irregular = false;
};

// Response of the truth to a unit move `since` seconds after its dead time has passed.
inline double unit_response(const Truth& truth, double since) {
    if (since <= 0.0) return 0.0;
    return truth.lag > 0.0 ? 1.0 - std::exp(-since / truth.lag) : since;
}

inline tauwright::RecordColumns columns(const Truth& truth, unsigned seed) {
    std::mt19937_64 generator(seed);
    std::normal_distribution<double> normal(0.0, 1.0);
    std::uniform_real_distribution<double> jitter(-0.4, 0.4);
    tauwright::RecordColumns c;
    const double step = truth.duration / static_cast<double>(truth.samples);
    std::vector<double> when;  // a move is held from the sample that first shows it
    for (std::size_t i = 0; i < truth.samples; ++i) {
        const double t = step * (static_cast<double>(i) + (truth.irregular && i > 0 ? jitter(generator) : 0.0));
        double u = truth.rest_output;
        for (std::size_t k = 0; k < truth.move_times.size(); ++k) {
            if (t < truth.move_times[k]) continue;
            u += truth.move_sizes[k];
            if (when.size() == k) when.push_back(t);
        }
        c.time_s.push_back(t);
        c.output.push_back(u);
    }
    for (double t : c.time_s) {
        double y = truth.rest_value + truth.drift * t;
        for (std::size_t k = 0; k < when.size(); ++k)
            y += truth.gain * truth.move_sizes[k] * unit_response(truth, t - when[k] - truth.dead_time);
        c.process_value.push_back(y + truth.noise * normal(generator));
    }
    return c;
}

inline tauwright::Record record(const Truth& truth, unsigned seed) { return tauwright::Record(columns(truth, seed)); }

}  // namespace simulated
