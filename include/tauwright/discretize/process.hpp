// Named process forms to the exact held-input recursion, fractional dead time included.
#pragma once

#include <array>
#include <cmath>

#include "tauwright/control/pid_response.hpp"
#include "tauwright/discretize/pid.hpp"
#include "tauwright/model/transfer_function.hpp"
#include "tauwright/run/process_block.hpp"

namespace tauwright {
inline namespace v0 {

/// As the overload that never throws, but throws `Error` naming the argument. Allocates only then.
inline run::PidCoefficients discretize(const PidSettings& settings, double scan_time) {
    detail::require_positive("scan_time", scan_time);
    require(settings);
    run::PidCoefficients coefficients;
    if (const error_code code = discretize(settings, scan_time, coefficients); code != error_code::ok)
        detail::refuse(code, "scan_time", scan_time, "the settings overflow at this scan time; give another one");
    return coefficients;
}

namespace detail {

/// Two states and one held input: x' = A x + b u.
struct TwoStates {
    double A[2][2] = {};
    double b[2] = {};
    double outputs[2] = {};
};

/// exp(M t) - identity of M = [[A, b], [0, 0]], its first two rows.
struct HeldStep {
    double growth[2][2] = {};
    double input[2] = {};
};

// The difference from the identity is what is computed, by Taylor and doubling D(2t) = 2 D + D^2, so
// that nothing cancels for short scans. Source: Van Loan, IEEE TAC 23, 1978 (block exponential).
inline HeldStep held_step(const TwoStates& system, double t) noexcept {
    using Matrix = std::array<std::array<double, 3>, 3>;
    const auto times = [](const Matrix& x, const Matrix& y) {
        Matrix z{};
        for (std::size_t i = 0; i < 3; ++i)
            for (std::size_t j = 0; j < 3; ++j)
                for (std::size_t k = 0; k < 3; ++k) z[i][j] += x[i][k] * y[k][j];
        return z;
    };
    Matrix M{};
    double norm = 0.0;
    for (std::size_t i = 0; i < 2; ++i) {
        for (std::size_t j = 0; j < 2; ++j) {
            M[i][j] = system.A[i][j] * t;
            norm = std::max(norm, std::abs(M[i][j]));
        }
        M[i][2] = system.b[i] * t;
    }
    int doublings = 0;
    for (double scaled = norm; scaled > 0.125; scaled *= 0.5) ++doublings;
    const double scale = std::ldexp(1.0, -doublings);
    for (auto& row : M)
        for (double& x : row) x *= scale;
    Matrix D = M, term = M;
    for (int k = 2; k <= 12; ++k) {
        term = times(term, M);
        for (auto& row : term)
            for (double& x : row) x /= k;
        for (std::size_t i = 0; i < 3; ++i)
            for (std::size_t j = 0; j < 3; ++j) D[i][j] += term[i][j];
    }
    for (int n = 0; n < doublings; ++n) {
        const Matrix square = times(D, D);
        for (std::size_t i = 0; i < 3; ++i)
            for (std::size_t j = 0; j < 3; ++j) D[i][j] = 2.0 * D[i][j] + square[i][j];
    }
    HeldStep step;
    for (std::size_t i = 0; i < 2; ++i) {
        for (std::size_t j = 0; j < 2; ++j) step.growth[i][j] = D[i][j];
        step.input[i] = D[i][2];
    }
    return step;
}

// The named forms as a cascade; throws `unsupported_form` for any other.
inline TwoStates two_states(const TransferFunction& process) {
    const Factors& f = process.factors();
    const bool plain = f.leads.empty() && f.lead_pairs.empty() && f.zeros_at_origin == 0;
    const int states = process.order();
    if (!plain || states > 2 || f.integrators > 1 || (f.lag_pairs.size() == 1 && states != 2))
        throw Error(error_code::unsupported_form,
                    joined({"process is ", process.text(),
                        "; a process block takes up to two lags, one oscillatory pair, or an integrator with at most "
                        "one lag, without leads: reduce the process to one of these"}));
    TwoStates system;
    if (!f.lag_pairs.empty()) {
        const double T = f.lag_pairs[0].time_constant, z = f.lag_pairs[0].damping;
        system.A[0][1] = 1.0 / T;
        system.A[1][0] = -1.0 / T;
        system.A[1][1] = -2.0 * z / T;
        system.b[1] = 1.0 / T;
        system.outputs[0] = f.gain;
        return system;
    }
    std::size_t n = 0;
    for (double T : f.lags) {
        system.A[n][n] = -1.0 / T;
        if (n == 0) system.b[0] = 1.0 / T;
        else system.A[n][n - 1] = 1.0 / T;
        ++n;
    }
    if (f.integrators == 1) {
        if (n == 0) system.b[0] = 1.0;
        else system.A[n][n - 1] = 1.0;
        ++n;
    }
    if (n > 0) system.outputs[n - 1] = f.gain;
    return system;
}

}  // namespace detail

/// Exact recursion of a named form with its input held over each scan; whole and fractional scans
/// of dead time are exact. Relative accuracy about 1e-15. Throws `unsupported_form`, `not_finite`,
/// `out_of_domain`. Source: Astrom and Wittenmark, Computer-Controlled Systems (sampling with delay).
inline run::ProcessCoefficients discretize(const TransferFunction& process, double scan_time) {
    detail::require_positive("scan_time", scan_time);
    const detail::TwoStates system = detail::two_states(process);
    const double scans = process.dead_time() / scan_time;
    if (!(scans < 1e7))
        detail::refuse(error_code::out_of_domain, "dead_time", process.dead_time(),
                       "this is more than ten million scans; give a longer scan time");
    double whole = std::floor(scans), fraction = scans - whole;
    // 0.3 s at 0.1 s is three scans, whatever the last bit of the quotient says.
    if (fraction > 1.0 - 1e-9) whole += 1.0, fraction = 0.0;
    if (fraction < 1e-9) fraction = 0.0;
    const double older = fraction * scan_time;

    run::ProcessCoefficients c;
    c.delay_scans = static_cast<std::int64_t>(whole);
    if (process.order() == 0) {
        c.direct = process.gain();
        return c;
    }
    for (std::size_t i = 0; i < 2; ++i)
        if (!is_finite(system.b[i]) || !is_finite(system.A[i][0]) || !is_finite(system.A[i][1]))
            throw Error(error_code::out_of_domain,
                        detail::joined({"process is ", process.text(), "; a lag is too short for numbers to hold 1/lag: leave it out"}));
    const detail::HeldStep full = detail::held_step(system, scan_time);
    const detail::HeldStep late = detail::held_step(system, scan_time - older);
    const detail::HeldStep early = detail::held_step(system, older);
    for (std::size_t i = 0; i < 2; ++i) {
        for (std::size_t j = 0; j < 2; ++j) c.growth[i][j] = full.growth[i][j];
        c.now[i] = late.input[i];
        c.before[i] = early.input[i] + late.growth[i][0] * early.input[0] + late.growth[i][1] * early.input[1];
        c.outputs[i] = system.outputs[i];
        if (!is_finite(full.growth[i][0]) || !is_finite(full.growth[i][1]) || !is_finite(full.input[i]))
            detail::refuse(error_code::out_of_domain, "scan_time", scan_time,
                           "an unstable process grows beyond all numbers within one scan; give a shorter scan time");
    }
    return c;
}

}  // namespace v0
}  // namespace tauwright
