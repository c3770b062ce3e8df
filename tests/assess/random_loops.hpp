// Random open loops for the comparisons with brute force.
#pragma once

#include <algorithm>
#include <string>

#include "assess/brute_force.hpp"
#include "core/oracle_tools.hpp"

namespace oracle {

using tauwright::Factors;

/// As C++ would write them, so that a loop that fails can be run again to the last bit.
inline std::string printed(const Factors& f) {
    using tauwright::detail::joined;
    const auto number = [](double x) { return tauwright::text_of(x); };
    const auto pair = [&](const tauwright::QuadraticFactor& p) { return joined({"{", number(p.time_constant), ", ", number(p.damping), "}"}); };
    const auto list = [](const char* name, const auto& items, auto text) {
        std::string out;
        for (const auto& x : items) out += joined({out.empty() ? joined({", .", name, " = {"}) : ", ", text(x)});
        return out.empty() ? out : out.append("}");
    };
    return joined({"{.gain = ", number(f.gain), ", .integrators = ", number(f.integrators), ", .zeros_at_origin = ", number(f.zeros_at_origin),
                   list("leads", f.leads, number), list("lags", f.lags, number), list("lead_pairs", f.lead_pairs, pair),
                   list("lag_pairs", f.lag_pairs, pair), ", .dead_time = ", number(f.dead_time), "}"});
}

inline Factors ordinary_loop(Seeded& random) {
    Factors f;
    f.integrators = random.below(3);
    const int order = 1 + random.below(6);
    int left = std::max(order - f.integrators, f.integrators > 0 ? 0 : 1);
    while (left >= 2 && random.chance(0.25)) {
        const double z = random.chance(0.1) ? random.uniform(-0.5, -0.02) : random.uniform(0.03, 1.2);
        f.lag_pairs.push_back({random.scaled(0.1, 10.0), z});
        left -= 2;
    }
    for (; left > 0; --left) f.lags.push_back((random.chance(0.08) ? -1.0 : 1.0) * random.scaled(0.1, 10.0));
    const int poles = f.integrators + static_cast<int>(f.lags.size() + 2 * f.lag_pairs.size());
    for (int i = f.integrators == 2 ? 1 : random.below(3); i > 0 && static_cast<int>(f.leads.size()) < poles - 1; --i)
        f.leads.push_back((random.chance(0.15) ? -1.0 : 1.0) * random.scaled(0.1, 10.0));
    f.gain = (random.chance(0.1) ? -1.0 : 1.0) * (f.integrators == 0 ? random.scaled(0.1, 30.0) : random.scaled(0.003, 3.0));
    if (!f.lags.empty() && std::any_of(f.lags.begin(), f.lags.end(), [](double T) { return T < 0.0; }) && random.chance(0.7)) f.gain = -std::abs(f.gain);
    f.dead_time = random.chance(0.2) ? 0.0 : random.uniform(0.0, 5.0);
    return f;
}

/// Lightly damped poles and zeros, down to a thousandth.
inline Factors resonant_loop(Seeded& random) {
    Factors f{.gain = random.scaled(1e-3, 2.0), .integrators = random.below(2)};
    const auto pair = [&random] { return tauwright::QuadraticFactor{random.scaled(0.05, 5.0), (random.chance(0.1) ? -1.0 : 1.0) * random.scaled(1e-3, 0.3)}; };
    for (int i = 1 + random.below(3); i > 0; --i) f.lag_pairs.push_back(pair());
    for (int i = random.below(static_cast<int>(f.lag_pairs.size())); i > 0; --i) f.lead_pairs.push_back(pair());
    for (int i = random.below(3); i > 0; --i) f.lags.push_back(random.scaled(0.1, 10.0));
    f.dead_time = random.chance(0.3) ? 0.0 : random.scaled(1e-3, 5.0);
    return f;
}

inline Factors high_order_loop(Seeded& random) {
    Factors f{.gain = random.scaled(0.1, 5.0)};
    const double base = random.scaled(0.1, 10.0), width = random.uniform(1.0, 10.0);
    for (int i = 5 + random.below(9); i > 0; --i) f.lags.push_back(base * random.scaled(1.0 / width, width));
    for (int i = random.below(4); i > 0; --i) f.leads.push_back((random.chance(0.2) ? -1.0 : 1.0) * base * random.scaled(0.1, 10.0));
    if (random.chance(0.4)) f.gain /= 10.0 * base, f.integrators = 1;
    f.dead_time = random.chance(0.4) ? 0.0 : base * random.scaled(0.01, 10.0);
    return f;
}

/// Part of the gain stays at infinite frequency: neutral loops where there is dead time.
inline Factors lasting_gain_loop(Seeded& random) {
    Factors f;
    f.gain = (random.chance(0.3) ? -1.0 : 1.0) * random.uniform(0.02, 0.97);
    for (int i = 1 + random.below(4); i > 0; --i) {
        const double T = random.scaled(0.1, 10.0), lead = (random.chance(0.2) ? -1.0 : 1.0) * random.scaled(0.1, 10.0);
        f.lags.push_back(T);
        f.leads.push_back(lead);
        f.gain *= T / lead;
    }
    f.dead_time = random.chance(0.2) ? 0.0 : random.scaled(0.01, 10.0);
    return f;
}

/// PI or PID on a lag or an integrator with dead time, the settings off by any factor.
inline Factors tuned_loop(Seeded& random) {
    const double tau = random.scaled(0.1, 100.0), theta = tau * random.scaled(1e-3, 100.0), ti = std::min(tau, 8.0 * theta) * random.scaled(0.2, 5.0);
    Factors f{.gain = random.scaled(0.1, 3.0) / (2.0 * theta), .integrators = 1, .leads = {ti}, .lags = {tau}, .dead_time = theta};
    f.gain *= tau / ti;
    if (random.chance(0.3)) f.integrators = 2, f.lags.clear(), f.gain /= tau;
    if (random.chance(0.5)) {
        f.leads.push_back(theta * random.scaled(0.05, 0.6));
        f.lags.push_back(f.leads.back() * random.scaled(0.02, 0.5));
    }
    return f;
}

/// Its closest passage on the axis moved to a hundred-thousandth to a hundredth beside -1.
inline Factors near_minus_one_loop(Seeded& random) {
    for (;;) {
        Factors f = random.chance(0.5) ? ordinary_loop(random) : tuned_loop(random);
        const BruteForce brute(f);
        if (brute.phase_crossings().empty()) continue;
        const auto n = static_cast<int>(std::min<std::size_t>(brute.phase_crossings().size(), 3));
        f.gain /= std::abs(brute.value(brute.phase_crossings()[static_cast<std::size_t>(random.below(n))]));
        f.gain *= 1.0 + (random.chance(0.5) ? -1.0 : 1.0) * random.scaled(1e-5, 1e-2);
        return f;
    }
}

}  // namespace oracle
