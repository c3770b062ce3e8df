// The exact synthesized controller, dead time inside: C = Q / (1 - T) with Q = T / G.
#pragma once

#include <algorithm>
#include <complex>
#include <string>

#include "tauwright/core/exponential.hpp"
#include "tauwright/model/polynomial.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

/// C(s) = Q(s) / (1 - T(s)): what is left when a closed loop T is asked of a process G and the
/// loop equation is solved, with Q = T / G. A value; evaluating does not allocate.
class InternalModelController {
public:
    /// `filter` is Q, `response` is T. Throws `out_of_domain` where T is identically 1.
    InternalModelController(TransferFunction filter, TransferFunction response)
        : filter_(std::move(filter)), response_(std::move(response)) {
        const Factors& f = response_.factors();
        const detail::Polynomial below = detail::expanded(f.lags, f.lag_pairs, f.integrators);
        detail::Polynomial above = detail::expanded(f.leads, f.lead_pairs, f.zeros_at_origin);
        for (double& c : above) c *= f.gain;
        scale_ = detail::expanded(f.lags, f.lag_pairs);
        const std::size_t count = std::max({below.size(), above.size(), std::size_t{1}}) + series_terms;
        series_ = detail::product(above, detail::dead_time_series(f.dead_time, count));
        series_.resize(count, 0.0);
        double largest = 0.0;
        for (std::size_t k = 0; k < count; ++k) {
            const double b = k < below.size() ? below[k] : 0.0;
            // What cancels to rounding cancels exactly: these are the zeros of 1 - T at s = 0.
            const double difference = b - series_[k];
            const double size = std::max(std::abs(b), std::abs(series_[k]));
            if (largest == 0.0 && std::abs(difference) <= 1e-14 * size) series_[k] = 0.0;
            else series_[k] = difference;
            largest = std::max(largest, std::abs(series_[k]));
        }
        below_ = below;
        above_ = above;
        if (largest == 0.0)
            throw Error(error_code::out_of_domain,
                        detail::joined({"response is ", response_.text(), "; 1 - T is 0 everywhere, so the controller is infinite"}));
        order_at_origin_ = 0;
        while (series_[static_cast<std::size_t>(order_at_origin_)] == 0.0) ++order_at_origin_;
    }

    /// Q, from set-point error to output were there no mismatch.
    const TransferFunction& filter() const noexcept { return filter_; }
    /// T, the closed loop asked for.
    const TransferFunction& response() const noexcept { return response_; }
    /// Integrating actions: the order to which 1 - T vanishes at s = 0.
    int integrators() const noexcept { return order_at_origin_; }

    /// Coefficients in s, lowest power first, of (1 - T) times T's denominator; the first `integrators()` are 0.
    const detail::Polynomial& denominator_series() const noexcept { return series_; }

    /// Value at a complex s in rad/s. Relative error about 1e-14 away from poles, also near s = 0.
    std::complex<double> operator()(std::complex<double> s) const noexcept {
        if (s == 0.0 && order_at_origin_ > 0)
            return {filter_.gain() > 0 ? std::numeric_limits<double>::infinity() : -std::numeric_limits<double>::infinity(), 0.0};
        return filter_(s) / one_minus_response(s);
    }

    /// 1 - T(s) without the cancellation near s = 0.
    std::complex<double> one_minus_response(std::complex<double> s) const noexcept {
        const double dead_time = response_.dead_time();
        const std::complex<double> denominator = detail::value_at(below_, s);
        if (std::abs(s) * dead_time < 1.0 && is_small(s)) return detail::value_at(series_, s) / denominator;
        const std::complex<double> above = detail::value_at(above_, s);
        const std::complex<double> rational = denominator - above;
        return (rational - above * exponential_minus_one(-dead_time * s)) / denominator;
    }

    friend bool operator==(const InternalModelController& a, const InternalModelController& b) {
        return a.filter_ == b.filter_ && a.response_ == b.response_;
    }

    std::string text() const { return detail::joined({"Q / (1 - T), Q = ", filter_.text(), ", T = ", response_.text()}); }

private:
    // Beyond this many terms past the polynomials' degree the series of exp(-x), |x| < 1, is exact.
    static constexpr std::size_t series_terms = 20;

    // Where the leading terms of the denominator do not yet dwarf the constant one.
    bool is_small(std::complex<double> s) const noexcept {
        double largest = 0.0, power = 1.0;
        for (double c : scale_) {
            largest = std::max(largest, std::abs(c) * power);
            power *= std::abs(s);
        }
        return largest <= 4.0;
    }

    TransferFunction filter_, response_;
    detail::Polynomial above_, below_, scale_, series_;
    int order_at_origin_ = 0;
};

}  // namespace v0
}  // namespace tauwright
