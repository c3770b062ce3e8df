// A seeded bump test with four moves: first order, lag 12 s, dead time 3.3 s, noise a twentieth of the response.
#pragma once

#include <cmath>
#include <random>

#include "tauwright/identify/record.hpp"

inline tauwright::RecordColumns bench_columns(std::size_t samples) {
    std::mt19937_64 generator(7);
    std::normal_distribution<double> normal;
    const double step = 400.0 / static_cast<double>(samples);
    const double moves[4] = {40, 130, 220, 310}, sizes[4] = {5, -5, -5, 5};
    tauwright::RecordColumns c;
    for (std::size_t i = 0; i < samples; ++i) {
        const double t = step * static_cast<double>(i);
        double u = 50.0, y = 60.0;
        for (int k = 0; k < 4; ++k) {
            const double seen = step * std::ceil(moves[k] / step - 1e-9);
            if (t >= seen - 1e-9) u += sizes[k];
            const double since = t - seen - 3.3;
            if (since > 0.0) y += 1.2 * sizes[k] * (1.0 - std::exp(-since / 12.0));
        }
        c.time_s.push_back(t);
        c.output.push_back(u);
        c.process_value.push_back(y + 0.3 * normal(generator));
    }
    return c;
}
