// The parts that every table of loops analyzed at 50 digits has.
#pragma once

#include <initializer_list>
#include <limits>

namespace oracle {

struct CertifiedPair { double time_constant, damping; };

/// `value`: of a gain crossover the angle from -1, rad, counterclockwise; of a phase crossover 1/|L|. The slopes are
/// d log|L| / d log w and d arg L / d log w, to two digits.
struct CertifiedCrossing { double frequency, value, gain_slope, phase_slope; };

/// Gain, integrators, zeros at the origin, real leads and lags, pairs of either, dead time.
struct CertifiedFactors {
    double gain;
    int integrators, zeros_at_origin;
    std::initializer_list<double> leads, lags;
    std::initializer_list<CertifiedPair> lead_pairs, lag_pairs;
    double dead_time;
};

/// An open loop and what is said of the loop closed.
struct CertifiedLoop {
    const char* family;
    CertifiedFactors loop;
    int unstable_poles;  ///< of the closed loop
    double closest;      ///< smallest |1 + L|
    std::initializer_list<double> margins;  ///< stable loops: gain, gain reduction, phase in degrees, delay
    std::initializer_list<double> peaks;    ///< stable loops: Ms, its frequency, Mt, its frequency
    double complete_to;  ///< below this frequency every phase crossover with |L| >= 1e-3 is listed
    std::initializer_list<CertifiedCrossing> gain_crossings, phase_crossings;
};

constexpr double infinity = std::numeric_limits<double>::infinity();

}  // namespace oracle
