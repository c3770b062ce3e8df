#include "assess/sampled_delay_margin.hpp"

#include <cmath>

#include "assess/pole_counts.hpp"
#include "assess/sampled_curve.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

class Delayed {
public:
    Delayed(const TransferFunction& process, const PidSettings& settings, double scan_time)
        : process_(process), settings_(settings), h_(scan_time) {}

    bool stable(double delay) const {
        const SampledCurve curve = with(delay);
        const SweepResult found = sweep(curve, nullptr);
        const auto wound = poles_by_winding(curve, found);
        return found.complete && wound && *wound == 0 && poles_by_gain(curve, found) == wound;
    }

    /// Newton's method on L = -1 in frequency and delay; negative where it leaves the interval or does not converge.
    double crossing_near(double delay, double w, double low, double high) const {
        for (int i = 0; i < 20; ++i) {
            const SampledCurve here = with(delay);
            const double step = 1e-6 * h_;
            const std::complex<double> f = log_from_minus_one(here, w);
            const std::complex<double> later = (log_from_minus_one(with(delay + step), w) - f) / step;
            const CurvePoint p = here.at(w);
            const std::complex<double> along = p.slope - static_cast<double>(here.net_integrators()) / w;
            const double determinant = along.real() * later.imag() - along.imag() * later.real();
            if (determinant == 0.0) return -1.0;
            const double dw = (f.imag() * later.real() - f.real() * later.imag()) / determinant;
            const double dd = (along.imag() * f.real() - along.real() * f.imag()) / determinant;
            w += dw;
            delay += dd;
            if (!(w > 0.0) || !(w < 4.0 / h_) || !(delay >= low - h_) || !(delay >= 0.0) || !(delay <= high + h_)) return -1.0;
            if (std::abs(dd) <= 1e-10 * delay && std::abs(dw) <= 1e-10 * w) return delay;
        }
        return -1.0;
    }

    /// Between a stable and an unstable delay.
    double between(double low, double high) const {
        while (high - low > 1e-9 * high) {
            const double middle = 0.5 * (low + high);
            (stable(middle) ? low : high) = middle;
        }
        return 0.5 * (low + high);
    }

private:
    SampledCurve with(double delay) const {
        return SampledCurve(process_.with_dead_time(process_.dead_time() + delay), settings_, h_);
    }
    static std::complex<double> log_from_minus_one(const SampledCurve& curve, double w) { return std::log(-curve.at(w).L); }

    const TransferFunction& process_;
    const PidSettings& settings_;
    double h_;
};

}  // namespace

double sampled_delay_margin(const TransferFunction& process, const PidSettings& settings, double scan_time, double estimate,
                            double crossover) {
    if (!is_finite(estimate)) return estimate;
    const Delayed loop(process, settings, scan_time);
    // Whole scans are exact: stable with `whole` of them more, not with one beyond.
    const double whole = std::floor(estimate / scan_time);
    double low = whole * scan_time, high = low + scan_time;
    // Where the scan is a large part of it, between whole scans anything may happen: look four times a scan.
    constexpr double coarse = 4.0;
    if (whole < coarse) {
        low = 0.0;
        const double last = high;
        for (high = 0.25 * scan_time; high < last && loop.stable(high); high += 0.25 * scan_time) low = high;
    }
    const double start = std::min(std::max(estimate, low), high);
    const double found = loop.crossing_near(start, crossover, low, high);
    if (found >= low * (1.0 - 1e-9) && found <= high * (1.0 + 1e-9) && (whole >= coarse || loop.stable(found * (1.0 - 1e-6)))) return found;
    return loop.between(low, high);
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
