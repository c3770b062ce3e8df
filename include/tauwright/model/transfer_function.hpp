// A linear process with exact dead time, held as factors in time-constant form.
#pragma once

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>
#include <span>
#include <string>
#include <vector>

#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {

/// The factor T^2 s^2 + 2 z T s + 1: `time_constant` T > 0 in seconds, `damping` z dimensionless.
/// z < 0 puts the pair into the right half plane, z = 0 onto the imaginary axis.
struct QuadraticFactor {
    double time_constant = 1.0;
    double damping = 1.0;

    friend bool operator==(const QuadraticFactor&, const QuadraticFactor&) = default;
};

/// Everything a TransferFunction holds. Times in seconds.
///
///   gain * s^zeros_at_origin / s^integrators
///        * product (T s + 1 for T in leads) * product (lead_pairs)
///        / product (T s + 1 for T in lags)  / product (lag_pairs) * exp(-dead_time s)
///
/// A lead below 0 is a zero in the right half plane, a lag below 0 an unstable pole.
struct Factors {
    double gain = 1.0;
    int integrators = 0;
    int zeros_at_origin = 0;
    std::vector<double> leads = {};
    std::vector<double> lags = {};
    std::vector<QuadraticFactor> lead_pairs = {};
    std::vector<QuadraticFactor> lag_pairs = {};
    double dead_time = 0.0;

    friend bool operator==(const Factors&, const Factors&) = default;
};

/// A transfer function as a product of factors with exact dead time. Immutable; the factors are
/// never expanded, so inverting, multiplying and cancelling are list operations without rounding.
class TransferFunction {
public:
    /// Throws `not_finite`, or `out_of_domain` for gain 0, a lead or lag of 0, a pair with
    /// time_constant <= 0, negative counts or negative dead time. Allocates.
    static TransferFunction from_factors(Factors factors);

    /// From polynomial coefficients in s, highest power first (compiled). Roots are found to
    /// about 1e-15 relative where they are simple. Throws `not_finite`, `out_of_domain` for a
    /// zero or empty polynomial. Allocates.
    static TransferFunction from_polynomials(std::span<const double> numerator, std::span<const double> denominator,
                                             double dead_time = 0.0);

    const Factors& factors() const noexcept { return factors_; }
    double gain() const noexcept { return factors_.gain; }
    double dead_time() const noexcept { return factors_.dead_time; }
    int integrators() const noexcept { return factors_.integrators; }
    int zeros_at_origin() const noexcept { return factors_.zeros_at_origin; }

    /// Number of poles, integrators included.
    int order() const noexcept {
        return factors_.integrators + static_cast<int>(factors_.lags.size() + 2 * factors_.lag_pairs.size());
    }
    /// Number of zeros, those at the origin included.
    int zero_count() const noexcept {
        return factors_.zeros_at_origin + static_cast<int>(factors_.leads.size() + 2 * factors_.lead_pairs.size());
    }
    /// Poles minus zeros; negative means improper.
    int relative_degree() const noexcept { return order() - zero_count(); }

    /// Value at a complex s in rad/s, exact dead time. Relative error about 2e-16 per factor away
    /// from roots. At an integrator's s = 0 the result is infinite. Does not allocate.
    std::complex<double> operator()(std::complex<double> s) const noexcept;
    /// The rational part at s, without the dead time.
    std::complex<double> rational_at(std::complex<double> s) const noexcept;

    /// Limit at s = 0: the steady gain; infinite with the gain's sign for integrators, 0 for
    /// zeros at the origin.
    double steady_gain() const noexcept;
    /// Limit of s^-relative_degree at high frequency, the factor in front: K prod(leads)/prod(lags).
    double leading_coefficient() const noexcept;

    /// All zeros and poles as complex numbers in rad/s, those at the origin first. Allocate.
    std::vector<std::complex<double>> zeros() const;
    std::vector<std::complex<double>> poles() const;
    /// Poles with a real part above 0.
    int unstable_poles() const noexcept;
    /// Zeros with a real part above 0.
    int right_half_plane_zeros() const noexcept;

    /// 1/G of the rational part. Throws `out_of_domain` where dead time would become prediction. Allocates.
    TransferFunction inverse() const;
    /// The same with another dead time (s, >= 0) or gain (not 0); throw as `from_factors`. Allocate.
    TransferFunction with_dead_time(double dead_time_s) const;
    TransferFunction with_gain(double gain) const;
    /// Removes factors that are equal to the last bit in numerator and denominator, integrators
    /// against zeros at the origin included. Right-half-plane pairs stay: they are not cancelled.
    TransferFunction cancelled() const;

    friend TransferFunction operator*(const TransferFunction& a, const TransferFunction& b);
    friend bool operator==(const TransferFunction&, const TransferFunction&) = default;

    /// One line (allocates), for example "2 exp(-3 s) / (10 s + 1)", times in seconds.
    std::string text() const;

private:
    explicit TransferFunction(Factors factors) : factors_(std::move(factors)) {}
    Factors factors_;
};

namespace detail {

// T^2 s^2 + 2 z T s + 1 with (1 - b)(1 + b) for 1 - b^2, which keeps the digits near resonance.
inline std::complex<double> value_of(const QuadraticFactor& f, std::complex<double> s) noexcept {
    const std::complex<double> x = f.time_constant * s;
    const double a = x.real(), b = x.imag();
    return {(1.0 - b) * (1.0 + b) + a * (a + 2.0 * f.damping), 2.0 * b * (a + f.damping)};
}

inline std::complex<double> power_of(std::complex<double> s, int n) noexcept {
    std::complex<double> p = 1.0;
    for (int i = 0; i < n; ++i) p *= s;
    return p;
}

inline void put_roots(const QuadraticFactor& f, std::complex<double>* roots) {
    const double T = f.time_constant, z = f.damping;
    if (std::abs(z) < 1.0) {
        const double imaginary = std::sqrt((1.0 - z) * (1.0 + z)) / T;
        roots[0] = {-z / T, imaginary};
        roots[1] = {-z / T, -imaginary};
        return;
    }
    // Real pair: the larger root first, the other from the product 1/T^2.
    const double large = -(z + std::copysign(std::sqrt((z - 1.0) * (z + 1.0)), z)) / T;
    roots[0] = large;
    roots[1] = 1.0 / (T * T * large);
}

inline std::vector<std::complex<double>> roots_of(int at_origin, const std::vector<double>& real,
                                                  const std::vector<QuadraticFactor>& pairs) {
    std::size_t next = static_cast<std::size_t>(at_origin);
    std::vector<std::complex<double>> roots(next + real.size() + 2 * pairs.size());
    for (double T : real) roots[next++] = -1.0 / T;
    for (const auto& f : pairs) {
        put_roots(f, &roots[next]);
        next += 2;
    }
    return roots;
}

inline int right_half_plane_count(const std::vector<double>& real, const std::vector<QuadraticFactor>& pairs) noexcept {
    int count = 0;
    for (double T : real) count += T < 0;
    for (const auto& f : pairs) count += f.damping < 0 ? 2 : 0;
    return count;
}

template <class Factor>
inline void check_factors(const char* name, const std::vector<Factor>& list) {
    for (std::size_t i = 0; i < list.size(); ++i) {
        const std::string item = item_name(name, i);
        if constexpr (std::is_same_v<Factor, double>) {
            require_not_zero(item, list[i]);
        } else {
            require_positive(joined({item, ".time_constant"}), list[i].time_constant);
            require_finite(joined({item, ".damping"}), list[i].damping);
        }
    }
}

// Takes from both lists what stands in both, to the last bit, as long as `keep` allows it.
template <class Factor, class Keep>
void cancel_equal(std::vector<Factor>& above, std::vector<Factor>& below, Keep keep) {
    for (auto it = above.begin(); it != above.end();) {
        const auto twin = std::find(below.begin(), below.end(), *it);
        if (twin == below.end() || keep(*it)) {
            ++it;
            continue;
        }
        below.erase(twin);
        it = above.erase(it);
    }
}

}  // namespace detail

inline TransferFunction TransferFunction::from_factors(Factors f) {
    detail::require_not_zero("gain", f.gain);
    detail::require_not_negative("dead_time", f.dead_time);
    detail::require_not_negative("integrators", f.integrators);
    detail::require_not_negative("zeros_at_origin", f.zeros_at_origin);
    detail::check_factors("leads", f.leads);
    detail::check_factors("lags", f.lags);
    detail::check_factors("lead_pairs", f.lead_pairs);
    detail::check_factors("lag_pairs", f.lag_pairs);
    return TransferFunction(std::move(f));
}

inline std::complex<double> TransferFunction::rational_at(std::complex<double> s) const noexcept {
    std::complex<double> value = factors_.gain;
    // Above and below alternate, so that a long chain neither overflows nor underflows on the way.
    const auto& f = factors_;
    const std::size_t steps = std::max(f.leads.size(), f.lags.size());
    for (std::size_t i = 0; i < steps; ++i) {
        if (i < f.leads.size()) value *= f.leads[i] * s + 1.0;
        if (i < f.lags.size()) value /= f.lags[i] * s + 1.0;
    }
    const std::size_t pair_steps = std::max(f.lead_pairs.size(), f.lag_pairs.size());
    for (std::size_t i = 0; i < pair_steps; ++i) {
        if (i < f.lead_pairs.size()) value *= detail::value_of(f.lead_pairs[i], s);
        if (i < f.lag_pairs.size()) value /= detail::value_of(f.lag_pairs[i], s);
    }
    if (f.zeros_at_origin > 0) value *= detail::power_of(s, f.zeros_at_origin);
    if (f.integrators > 0) {
        if (s == 0.0) return std::copysign(std::numeric_limits<double>::infinity(), f.gain);
        value /= detail::power_of(s, f.integrators);
    }
    return value;
}

inline std::complex<double> TransferFunction::operator()(std::complex<double> s) const noexcept {
    const std::complex<double> value = rational_at(s);
    return factors_.dead_time == 0.0 ? value : value * std::exp(-factors_.dead_time * s);
}

inline double TransferFunction::steady_gain() const noexcept {
    if (factors_.integrators > factors_.zeros_at_origin)
        return std::copysign(std::numeric_limits<double>::infinity(), factors_.gain);
    return factors_.zeros_at_origin > factors_.integrators ? 0.0 : factors_.gain;
}

inline double TransferFunction::leading_coefficient() const noexcept {
    double k = factors_.gain;
    for (double T : factors_.leads) k *= T;
    for (double T : factors_.lags) k /= T;
    for (const auto& f : factors_.lead_pairs) k *= f.time_constant * f.time_constant;
    for (const auto& f : factors_.lag_pairs) k /= f.time_constant * f.time_constant;
    return k;
}

inline std::vector<std::complex<double>> TransferFunction::zeros() const {
    return detail::roots_of(factors_.zeros_at_origin, factors_.leads, factors_.lead_pairs);
}

inline std::vector<std::complex<double>> TransferFunction::poles() const {
    return detail::roots_of(factors_.integrators, factors_.lags, factors_.lag_pairs);
}

inline int TransferFunction::unstable_poles() const noexcept {
    return detail::right_half_plane_count(factors_.lags, factors_.lag_pairs);
}

inline int TransferFunction::right_half_plane_zeros() const noexcept {
    return detail::right_half_plane_count(factors_.leads, factors_.lead_pairs);
}

inline TransferFunction TransferFunction::inverse() const {
    if (factors_.dead_time != 0.0)
        detail::refuse(error_code::out_of_domain, "dead_time", factors_.dead_time,
                       "the inverse of dead time would predict; take with_dead_time(0) first");
    Factors f;
    f.gain = 1.0 / factors_.gain;
    f.integrators = factors_.zeros_at_origin;
    f.zeros_at_origin = factors_.integrators;
    f.leads = factors_.lags;
    f.lags = factors_.leads;
    f.lead_pairs = factors_.lag_pairs;
    f.lag_pairs = factors_.lead_pairs;
    return from_factors(std::move(f));
}

inline TransferFunction TransferFunction::with_dead_time(double dead_time_s) const {
    Factors f = factors_;
    f.dead_time = dead_time_s;
    return from_factors(std::move(f));
}

inline TransferFunction TransferFunction::with_gain(double gain) const {
    Factors f = factors_;
    f.gain = gain;
    return from_factors(std::move(f));
}

inline TransferFunction TransferFunction::cancelled() const {
    Factors f = factors_;
    const int common = std::min(f.integrators, f.zeros_at_origin);
    f.integrators -= common;
    f.zeros_at_origin -= common;
    detail::cancel_equal(f.leads, f.lags, [](double T) { return T < 0; });
    detail::cancel_equal(f.lead_pairs, f.lag_pairs, [](const QuadraticFactor& p) { return p.damping <= 0; });
    return from_factors(std::move(f));
}

/// In series: lists are joined, dead times add. Nothing is cancelled.
inline TransferFunction operator*(const TransferFunction& a, const TransferFunction& b) {
    Factors f = a.factors_;
    const Factors& g = b.factors_;
    f.gain *= g.gain;
    f.integrators += g.integrators;
    f.zeros_at_origin += g.zeros_at_origin;
    for (double T : g.leads) f.leads.push_back(T);
    for (double T : g.lags) f.lags.push_back(T);
    for (const auto& pair : g.lead_pairs) f.lead_pairs.push_back(pair);
    for (const auto& pair : g.lag_pairs) f.lag_pairs.push_back(pair);
    f.dead_time += g.dead_time;
    return TransferFunction::from_factors(std::move(f));
}

namespace detail {

inline void append_side(std::string& out, int at_origin, const std::vector<double>& real,
                        const std::vector<QuadraticFactor>& pairs) {
    const auto factor = [&](std::initializer_list<std::string_view> parts) {
        if (!out.empty()) out.append(" ");
        out.append(joined(parts));
    };
    if (at_origin > 0) factor({"s", at_origin > 1 ? "^" : "", at_origin > 1 ? text_of(at_origin) : ""});
    for (double T : real) factor({"(", text_of(T), " s + 1)"});
    for (const auto& f : pairs)
        factor({"(", text_of(f.time_constant * f.time_constant), " s^2 + ", text_of(2.0 * f.damping * f.time_constant),
                " s + 1)"});
}

}  // namespace detail

inline std::string TransferFunction::text() const {
    std::string out = text_of(factors_.gain);
    detail::append_side(out, factors_.zeros_at_origin, factors_.leads, factors_.lead_pairs);
    if (factors_.dead_time != 0.0) out.append(detail::joined({" exp(-", text_of(factors_.dead_time), " s)"}));
    std::string below;
    detail::append_side(below, factors_.integrators, factors_.lags, factors_.lag_pairs);
    if (below.empty()) return out;
    const std::size_t written = (factors_.integrators > 0 ? 1u : 0u) + factors_.lags.size() + factors_.lag_pairs.size();
    return detail::joined({out, " / ", written > 1 ? "(" : "", below, written > 1 ? ")" : ""});
}

}  // namespace v0
}  // namespace tauwright
