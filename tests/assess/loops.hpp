// The loops of the published margins, by the names margins_data.hpp uses. Ultimate gains belong to
// loops built with a proportional gain of 0.1.
#pragma once

#include <cmath>
#include <stdexcept>
#include <string>

#include "tauwright/control/control.hpp"
#include "tauwright/model/forms.hpp"

namespace oracle {

using tauwright::Factors;
using tauwright::PidSettings;
using tauwright::TransferFunction;

inline TransferFunction dead_time_integrator(double a) {
    return TransferFunction::from_factors({.gain = a, .integrators = 1, .dead_time = 1.0});
}

/// Series settings Kc (Ti s + 1)(Td s + 1)/(Ti s) after G, the leads as they stand.
inline TransferFunction series_loop(const TransferFunction& G, double Kc, double Ti, double Td = 0.0) {
    Factors c{.gain = Kc / Ti, .integrators = 1, .leads = {Ti}};
    if (Td > 0.0) c.leads.push_back(Td);
    return G * TransferFunction::from_factors(c);
}

/// The same through settings of the ideal form.
inline TransferFunction settings_loop(const TransferFunction& G, double Kc, double Ti, double Td = 0.0) {
    return G * tauwright::transfer_function(tauwright::ideal_from({.gain = Kc, .integral_time = Ti, .derivative_time = Td}));
}

/// Skogestad 2003, example processes and settings; `printed` as in print, otherwise from the rule.
inline TransferFunction example_loop(const std::string& name, bool through_settings) {
    const bool printed = name.find("printed") != std::string::npos;
    const auto from = [](Factors f) { return TransferFunction::from_factors(std::move(f)); };
    const auto loop = [&](const TransferFunction& G, double Kc, double Ti, double Td = 0.0) {
        return through_settings ? settings_loop(G, Kc, Ti, Td) : series_loop(G, Kc, Ti, Td);
    };
    const bool pid = name.find("PID") != std::string::npos;
    const std::string example = name.substr(0, name.find(' '));
    if (example == "E1") return loop(from({.lags = {1.0, 0.2}}), 5.5, 0.8);
    if (example == "E4") {
        const auto G = from({.lags = {1.0, 1.0, 1.0, 1.0}});
        return pid ? loop(G, 0.5, 1.5, 1.0) : loop(G, 0.3, 1.5);
    }
    if (example == "E6") {
        const auto G = from({.integrators = 1, .leads = {0.17, 0.17}, .lags = {1.0, 1.0, 0.028}});
        if (pid) return printed ? loop(G, 1.40, 2.86, 1.33) : loop(G, 0.5 / 0.358, 2.864, 1.33);
        return printed ? loop(G, 0.296, 13.5) : loop(G, 0.5 / 1.69, 13.52);
    }
    if (example == "E7") {
        const auto G = from({.leads = {-2.0}, .lags = {1.0, 1.0, 1.0}});
        return pid ? loop(G, 0.3, 1.5, 1.0) : loop(G, 1.5 / 7.0, 1.5);
    }
    if (example == "E9") {
        const auto G = from({.lags = {1.0, 1.0}, .dead_time = 1.0});
        return pid ? loop(G, 0.5, 1.0, 1.0) : loop(G, 0.5, 1.5);
    }
    if (example == "E10") {
        const auto G = from({.lags = {20.0, 2.0}, .dead_time = 1.0});
        return pid ? loop(G, 10.0, 8.0, 2.0) : loop(G, 5.25, 16.0);
    }
    if (example == "E13") return loop(from({.leads = {2.0}, .lags = {10.0, 0.5}, .dead_time = 1.0}), 2.88, 4.5);
    if (example == "E14") return loop(from({.integrators = 1, .leads = {-1.0}}), 0.5, 8.0);
    if (example == "E15") return loop(from({.leads = {-1.0}, .lags = {1.0}}), 0.5, 1.0);
    throw std::invalid_argument(name);
}

/// Lee, Lee and Park 2000: exp(-0.4 s)/(s - 1), lambda = 0.5, settings from their formulas.
inline TransferFunction unstable_lee_loop() {
    const double theta = 0.4, lambda = 0.5, alpha = 2.25 * std::exp(theta) - 1.0, D = 2.0 * lambda + theta - alpha;
    const double c = (lambda * lambda + alpha * theta - theta * theta / 2.0) / D, Ti = -1.0 + alpha - c;
    const double Td = (-alpha - (theta * theta * theta / 6.0 - alpha * theta * theta / 2.0) / D) / Ti - c;
    const auto G = TransferFunction::from_factors({.gain = -1.0, .lags = {-1.0}, .dead_time = theta});
    return G * tauwright::transfer_function({.gain = -Ti / D, .integral_time = Ti, .derivative_time = Td});
}

inline TransferFunction loop_named(const std::string& name, bool through_settings = false) {
    const auto number = [&](std::size_t from) { return std::stod(name.substr(from)); };
    const auto pi = [](const TransferFunction& G, double Kc, double Ti) { return G * tauwright::transfer_function({.gain = Kc, .integral_time = Ti}); };
    if (name.rfind("a ", 0) == 0) return dead_time_integrator(number(2));
    if (name.rfind("tauc ", 0) == 0) return dead_time_integrator(1.0 / (number(5) + 1.0));
    if (name.rfind("FO ", 0) == 0) return tauwright::first_order_plus_dead_time(0.1, 1.0, number(3));
    if (name.rfind("SEB121 tc", 0) == 0) {
        const double tc = number(9), K = name.find("K0.9") != std::string::npos ? 0.9 : 2.0;
        return tauwright::second_order_plus_dead_time(2.0, 10.0, 5.0, 1.0) *
               tauwright::transfer_function({.gain = 15.0 / (K * (tc + 1.0)), .integral_time = 15.0, .derivative_time = 10.0 / 3.0});
    }
    const auto slow = tauwright::first_order_plus_dead_time(100.0, 100.0, 1.0);
    if (name == "SEB124 b") return pi(slow, 5.0 / 9.0, 5.0);
    if (name == "SEB124 c") return pi(slow, 0.5, 8.0);
    if (name == "SEB124 d") return pi(slow, 496.0 / 900.0, 496.0 / 101.0);
    if (name == "SIMC INT") return TransferFunction::from_factors({.gain = 0.0625, .integrators = 2, .leads = {8.0}, .dead_time = 1.0});
    if (name == "iSIMC delay") return TransferFunction::from_factors({.gain = 0.5, .integrators = 1, .leads = {1.0 / 3.0}, .dead_time = 1.0});
    if (name == "iSIMC 2018") return TransferFunction::from_factors({.gain = 2.0 / 3.0, .integrators = 1, .leads = {1.0 / 3.0}, .dead_time = 1.0});
    if (name == "iSIMC FO1") return pi(tauwright::first_order_plus_dead_time(1.0, 1.0, 1.0), 2.0 / 3.0, 4.0 / 3.0);
    if (name == "iSIMC FO8") return pi(tauwright::first_order_plus_dead_time(1.0, 8.0, 1.0), 25.0 / 6.0, 8.0);
    if (name == "INT") return tauwright::integrating_plus_dead_time(0.2, 3.0);
    if (name == "3LAG") return TransferFunction::from_factors({.gain = 0.08, .lags = {4.0, 2.0, 0.2}});
    if (name == "3EQ") return TransferFunction::from_factors({.gain = 0.1, .lags = {1.0, 1.0, 1.0, 1.0, 1.0}});
    if (name == "LEE FODUP") return unstable_lee_loop();
    return example_loop(name, through_settings);
}

}  // namespace oracle
