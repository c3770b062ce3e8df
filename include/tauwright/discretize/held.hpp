// Any proper process as a computer with one scan time sees it: input held, exact dead time (compiled).
#pragma once

#include <complex>
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// What the input does between two samples.
enum class Between : std::int32_t {
    constant = 0,  ///< holds each value until the next one: a controller's output
    linear = 1,    ///< goes straight from each value to the next one: a signal read from a record
};

namespace detail {
struct HeldParts;
}

/// H(z): the exact pulse response of a held process from one sample to the next, made by `held`. With
/// d = delay_scans(), samples u and y, and the state x kept as a difference so that short scans lose no digits:
///
///   x[k+1] = x[k] + growth x[k] + ahead u[k+1-d] + now u[k-d] + before u[k-1-d]
///   y[k]   = outputs . x[k] + direct_now u[k-d] + direct_before u[k-1-d]
///
/// A sample is read before the input changes: of a constant input's jump at a sample, the sample sees nothing
/// yet. So `ahead` and `direct_now` are 0 for constant input, H always has at least one scan of delay, and a
/// process without lags of gain K and no dead time is K / z. Immutable.
class DiscreteTransferFunction {
public:
    /// Scan time in s.
    double scan_time() const noexcept { return scan_time_; }
    Between between() const noexcept { return between_; }
    /// Number of states: the order of the process.
    std::size_t order() const noexcept { return order_; }
    /// Whole scans of dead time.
    std::int64_t delay_scans() const noexcept { return delay_scans_; }

    /// H at a complex z. Where z is near 1, `at_offset` keeps more digits. Does not allocate.
    std::complex<double> operator()(std::complex<double> z) const noexcept { return at_offset(z - 1.0); }
    /// H at z = 1 + z_minus_one, through the factored form. Relative error a few 1e-16 for every pole, zero and
    /// scan of delay, times the change of H by a relative 1 of z_minus_one (near a resonance or a notch).
    /// Does not allocate.
    std::complex<double> at_offset(std::complex<double> z_minus_one) const noexcept;
    /// H at z = exp(j rad_s scan_time), with z - 1 formed without cancellation. Infinite at the rad_s = 0 of
    /// an integrator. Does not allocate.
    std::complex<double> at_frequency(double rad_s) const noexcept;
    /// The same as `at_offset` (but not at a pole) by solving the state equations, which is what a run of the recursion does. Absolute
    /// error a few 1e-16 of the largest term. Does not allocate for orders up to 20.
    std::complex<double> at_offset_by_states(std::complex<double> z_minus_one) const noexcept;

    /// H(1): the process's own steady gain; infinite with the gain's sign for an integrating process.
    double steady_gain() const noexcept { return steady_gain_; }

    /// H(z) = leading * z^-delay_scans * product(z - 1 - zero_offsets) / product(z - 1 - pole_offsets).
    /// Poles are exp(pole of the process * scan_time), and one at z = 0 (offset -1) where a fraction of a scan of
    /// dead time or direct feedthrough needs it. Zeros farther than 1e18 are left out, their share is in `leading`.
    /// Real ones have an imaginary part of exactly 0, conjugates stand side by side and are exact mirror images.
    double leading() const noexcept { return leading_; }
    const std::vector<std::complex<double>>& pole_offsets() const noexcept { return pole_offsets_; }
    const std::vector<std::complex<double>>& zero_offsets() const noexcept { return zero_offsets_; }
    /// Relative error of the factored form away from its roots, as found against the states in twice the digits when
    /// the zeros were computed: a few 1e-16, more only where many zeros fall nearly together or two zeros at the
    /// origin are held constant. Above 1e-13 `at_offset` uses the states.
    double factored_error() const noexcept { return factored_error_; }

    /// Coefficients for running it; matrices by rows, order() by order(). growth = exp(A scan_time) - identity.
    /// growth[i][j] is 0 for j > i + 1.
    std::span<const double> growth() const noexcept { return {coefficients_.data(), order_ * order_}; }
    std::span<const double> now() const noexcept { return column(0); }
    std::span<const double> before() const noexcept { return column(1); }
    std::span<const double> ahead() const noexcept { return column(2); }
    std::span<const double> outputs() const noexcept { return column(3); }
    double direct_now() const noexcept { return direct_now_; }
    double direct_before() const noexcept { return direct_before_; }

private:
    DiscreteTransferFunction() = default;
    std::span<const double> column(std::size_t i) const noexcept {
        return {coefficients_.data() + order_ * (order_ + i), order_};
    }
    friend struct detail::HeldParts;

    double scan_time_ = 0.0;
    Between between_ = Between::constant;
    std::size_t order_ = 0;
    std::int64_t delay_scans_ = 0;
    double steady_gain_ = 0.0, leading_ = 0.0, factored_error_ = 0.0;
    double direct_now_ = 0.0, direct_before_ = 0.0;
    std::vector<double> coefficients_;  // growth, now, before, ahead, outputs
    std::vector<std::complex<double>> pole_offsets_, zero_offsets_;
};

/// The process with its input held between samples `scan_time` (s) apart. Any proper process of order 0 to 20;
/// whole and fractional scans of dead time are exact, a dead time within 1e-9 of a whole scan is taken as whole. The
/// factors are never expanded. Closed forms for orders 1 and 2; above, the exponential and the zeros are computed in
/// twice the digits of a double, so that every coefficient, pole and simple zero is right to its last digits.
/// Throws `not_finite`, `unknown_name` (between) and `out_of_domain`: scan time not above 0 or not within 1e-12 to
/// 1e12 of every lag, improper process, order above 20, more than ten million scans of dead time, an unstable process
/// that grows more than a millionfold within one scan. Allocates. Source: C. F. Van Loan, IEEE TAC 23, 1978 (block
/// exponential); K. J. Astrom and B. Wittenmark, Computer-Controlled Systems (sampling with delay); R. H. Middleton
/// and G. C. Goodwin, IEEE TAC 31, 1986 (delta form); O. Aberth, Math. Comp. 27, 1973 (zeros).
DiscreteTransferFunction held(const TransferFunction& process, double scan_time, Between between = Between::constant);

}  // namespace v0
}  // namespace tauwright
