#include "tauwright/discretize/held.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "discretize/held_solve.hpp"
#include "discretize/held_step.hpp"
#include "discretize/held_zeros.hpp"
#include "tauwright/core/exponential.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Fills a DiscreteTransferFunction.
struct HeldParts {
    DiscreteTransferFunction h;

    HeldParts(const TransferFunction& process, double scan_time, Between between, const DelayInScans& delay) {
        h.scan_time_ = scan_time;
        h.between_ = between;
        h.order_ = static_cast<std::size_t>(process.order());
        h.delay_scans_ = delay.whole;
        h.steady_gain_ = process.steady_gain();
        h.coefficients_.resize(h.order_ * (h.order_ + 4));
    }
    double* growth() noexcept { return h.coefficients_.data(); }
    double* column(std::size_t i) noexcept { return growth() + h.order_ * (h.order_ + i); }
    double* now() noexcept { return column(0); }
    double* before() noexcept { return column(1); }
    double* outputs() noexcept { return column(3); }

    void poles_of(const Factors& f);
    void zeros(SampledZeros&& found) noexcept {
        h.leading_ = found.leading;
        h.zero_offsets_ = std::move(found.zeros);
        h.factored_error_ = found.error;
    }
    void times_gain(double gain) noexcept {
        for (std::size_t i = 0; i < h.order_; ++i) outputs()[i] *= gain;
        h.direct_now_ *= gain;
        h.direct_before_ *= gain;
        h.leading_ *= gain;
    }
    void pole_at_zero() { h.pole_offsets_.emplace_back(-1.0); }

    void first_order(const Factors& f, const DelayInScans& delay);
    void two_in_series(const Factors& f, const DelayInScans& delay);
    void any_order(const Factors& f, const DelayInScans& delay);
    void require_moderate_growth() const;
    void require_finite_numbers() const;
};

namespace {

using Complex = std::complex<double>;

// e^(re + j im) - 1 with the exponent in twice the digits: the second parts act to first order.
Complex growth_of(const Twice& re, const Twice& im) noexcept {
    const Complex first = exponential_minus_one({re.high, im.high});
    return first + (first + 1.0) * Complex(re.low, im.low);
}

double growth_of(const Twice& x) noexcept {
    const double first = std::expm1(x.high);
    return first + (first + 1.0) * x.low;
}

void put_pair(const QuadraticFactor& pair, double h, std::vector<Complex>& offsets) {
    const Twice x = Twice(h) / Twice(pair.time_constant), z = pair.damping;
    const Twice gap = (Twice(1.0) - z) * (Twice(1.0) + z);
    if (gap.high > 0.0) {
        const Complex offset = growth_of(-(z * x), square_root(gap) * x);
        offsets.push_back(offset);
        offsets.push_back(std::conj(offset));
        return;
    }
    // Real: the faster one, the other from the product of both.
    const Twice root = square_root(-gap), fast = z.high > 0.0 ? z + root : z - root;
    offsets.emplace_back(growth_of(-(fast * x)));
    offsets.emplace_back(growth_of(-(x / fast)));
}

// exp(root * h) - 1 for every root, those at the origin first.
void put_offsets(int at_origin, const std::vector<double>& real, const std::vector<QuadraticFactor>& pairs, double h,
                 std::vector<Complex>& offsets) {
    for (int i = 0; i < at_origin; ++i) offsets.emplace_back(0.0);
    for (double T : real) offsets.emplace_back(growth_of(-(Twice(h) / Twice(T))));
    for (const auto& pair : pairs) put_pair(pair, h, offsets);
}

/// Two states in series, in scans: x1' = -decay1 x1 + gain1 u, x2' = -decay2 x2 + gain2 x1.
struct SeriesRates {
    double decay1, decay2, gain1, gain2;
};

/// exp - identity of them, and the effect of a held input.
struct SeriesStep {
    double first, below, second, input_first, input_second;
};

// The input through the series of the difference at a short time and doubling, g <- g + (g + growth g), as the
// growth itself; every term of stable lags has one sign but for a small alternating part.
SeriesStep series_step(const SeriesRates& rates, double share) noexcept {
    int doublings = 0;
    double t = share;
    for (double norm = t * std::max({rates.decay1, rates.decay2, rates.gain1, rates.gain2}); norm > 0.125; norm *= 0.5) {
        ++doublings;
        t *= 0.5;
    }
    const double a = -rates.decay1 * t, b = -rates.decay2 * t, c = rates.gain2 * t;
    double u1 = rates.gain1 * t, u2 = 0.0, sum1 = u1, sum2 = 0.0;
    for (int k = 2; k <= 12; ++k) {
        u2 = (b * u2 + c * u1) / k;
        u1 = a * u1 / k;
        sum1 += u1;
        sum2 += u2;
    }
    // (e^b - e^a) / (b - a), from the larger of the two
    SeriesStep s{std::expm1(a), c * std::exp(std::max(a, b)) * phi_1(-std::abs(a - b)), std::expm1(b), sum1, sum2};
    for (int i = 0; i < doublings; ++i) {
        s.input_second = 2.0 * s.input_second + (s.below * s.input_first + s.second * s.input_second);
        s.input_first = 2.0 * s.input_first + s.first * s.input_first;
        s.below = 2.0 * s.below + (s.below * s.first + s.second * s.below);
        s.first = 2.0 * s.first + s.first * s.first;
        s.second = 2.0 * s.second + s.second * s.second;
    }
    return s;
}

bool is_two_in_series(const Factors& f, double scan_time) noexcept {
    // The doublings of longer scans would add up their rounding.
    for (double T : f.lags)
        if (T < 0.01 * scan_time) return false;
    return f.lag_pairs.empty() && f.leads.empty() && f.lead_pairs.empty() && f.zeros_at_origin == 0 &&
           f.lags.size() + static_cast<std::size_t>(f.integrators) == 2;
}

}  // namespace

void HeldParts::poles_of(const Factors& f) {
    h.pole_offsets_.reserve(h.order_ + 1);
    put_offsets(f.integrators, f.lags, f.lag_pairs, h.scan_time_, h.pole_offsets_);
}

// A lag (or integrator) with at most one lead: N(w) = step(late) w + steady gain * (-pole), because N at w = 0 and
// the response to a step after the late part of a scan are known without cancellation.
void HeldParts::first_order(const Factors& f, const DelayInScans& delay) {
    const double scan = h.scan_time_, early = rounded(delay.fraction) * scan;
    const double late = rounded((Twice(1.0) - delay.fraction) * Twice(scan));
    const bool lead = !f.leads.empty(), origin = f.zeros_at_origin > 0;
    double step, at_one;  // N = step w + at_one, for a gain of 1
    if (f.integrators == 1) {
        const double L = lead ? f.leads[0] : 0.0;
        now()[0] = late;
        before()[0] = early;
        outputs()[0] = origin ? 0.0 : 1.0;
        h.direct_before_ = origin ? 1.0 : L;
        step = origin ? 1.0 : L + late;
        at_one = origin ? 0.0 : scan;
    } else {
        const double T = f.lags[0], decay = std::exp(-late / T);
        growth()[0] = std::expm1(-scan / T);
        now()[0] = -std::expm1(-late / T);
        before()[0] = -std::expm1(-early / T) * decay;
        outputs()[0] = origin ? -1.0 / T : lead ? (T - f.leads[0]) / T : 1.0;
        h.direct_before_ = origin ? 1.0 / T : lead ? f.leads[0] / T : 0.0;
        step = origin ? decay / T : now()[0] + h.direct_before_ * decay;
        at_one = origin ? 0.0 : -growth()[0];
    }
    h.pole_offsets_.reserve(2);
    h.pole_offsets_.emplace_back(growth()[0]);
    if (delay.has_fraction() || h.direct_before_ != 0.0) {
        pole_at_zero();
        zeros(zeros_of_quadratic(0.0, step, at_one));
    } else {
        zeros(zeros_of_quadratic(0.0, 0.0, step));
    }
    times_gain(f.gain);
}

// Two lags, a lag and an integrator, or two integrators. For stable lags every term of N is positive.
void HeldParts::two_in_series(const Factors& f, const DelayInScans& delay) {
    const double scan = h.scan_time_, fraction = rounded(delay.fraction), share = rounded(Twice(1.0) - delay.fraction);
    const SeriesRates rates{
        f.lags.empty() ? 0.0 : scan / f.lags[0],
        f.lags.size() == 2 ? scan / f.lags[1] : 0.0,
        f.lags.empty() ? 1.0 : scan / f.lags[0],
        f.lags.size() == 2 ? scan / f.lags[1] : 1.0,
    };
    const SeriesStep full = series_step(rates, 1.0), late = delay.has_fraction() ? series_step(rates, share) : full;
    growth()[0] = full.first;
    growth()[2] = full.below;
    growth()[3] = full.second;
    outputs()[1] = (f.integrators > 0 ? scan : 1.0) * (f.integrators > 1 ? scan : 1.0);
    now()[0] = late.input_first;
    now()[1] = late.input_second;
    if (delay.has_fraction()) {
        const SeriesStep early = series_step(rates, fraction);
        before()[0] = early.input_first + late.first * early.input_first;
        before()[1] = early.input_second + (late.below * early.input_first + late.second * early.input_second);
    }
    h.pole_offsets_.reserve(3);
    h.pole_offsets_.emplace_back(full.first);
    h.pole_offsets_.emplace_back(full.second);
    const double at_one = full.below * full.input_first - full.first * full.input_second;
    if (delay.has_fraction()) {
        pole_at_zero();
        zeros(zeros_of_quadratic(now()[1], (full.below * now()[0] - full.first * now()[1]) + full.input_second, at_one));
    } else {
        zeros(zeros_of_quadratic(0.0, now()[1], at_one));
    }
    h.leading_ *= outputs()[1];
    times_gain(f.gain);
}

void HeldParts::any_order(const Factors& f, const DelayInScans& delay) {
    poles_of(f);
    require_moderate_growth();
    const SampledCascade s = sampled(cascade_of(f, h.scan_time_), delay.fraction, h.between_);
    const auto put = [](const std::vector<Twice>& from, double* to) {
        for (const Twice& x : from) *to++ = rounded(x);
    };
    put(s.growth, growth());
    put(s.now, now());
    put(s.before, before());
    put(s.ahead, column(2));
    put(s.outputs, outputs());
    h.direct_now_ = rounded(s.direct_now);
    h.direct_before_ = rounded(s.direct_before);
    require_finite_numbers();
    std::vector<Complex> starts;
    put_offsets(0, f.leads, f.lead_pairs, h.scan_time_, starts);
    // A held input reproduces steps and a linear one ramps: so many zeros at the origin stay at z = 1. The others
    // move away from it by a small part of the way to the slowest pole.
    const int kept = std::min(f.zeros_at_origin, f.integrators + (h.between_ == Between::linear ? 2 : 1));
    double slowest = 1.0;
    for (const Complex& p : h.pole_offsets_)
        if (p != 0.0) slowest = std::min(slowest, std::abs(p));
    starts.insert(starts.end(), static_cast<std::size_t>(f.zeros_at_origin - kept), Complex(0.1 * slowest));
    zeros(zeros_of(s, h.pole_offsets_, starts, kept));
    if (s.pole_at_zero) pole_at_zero();
    times_gain(f.gain);
}

// Beside such a pole the digits of everything slower are lost; no loop is sampled like this.
void HeldParts::require_moderate_growth() const {
    double growth = 0.0;
    for (const Complex& p : h.pole_offsets_) growth = larger(growth, std::abs(p));
    if (!(growth <= 1e6))
        refuse(error_code::out_of_domain, "scan_time", h.scan_time_,
               "an unstable process grows more than a millionfold within one scan; give a shorter scan time");
}

void HeldParts::require_finite_numbers() const {
    double worst = std::max({std::abs(h.direct_now_), std::abs(h.direct_before_), std::abs(h.leading_)});
    for (double x : h.coefficients_) worst = larger(worst, std::abs(x));
    for (const Complex& p : h.pole_offsets_) worst = larger(worst, std::abs(p));
    for (const Complex& z : h.zero_offsets_) worst = larger(worst, std::abs(z));
    if (!is_finite(worst))
        refuse(error_code::out_of_domain, "scan_time", h.scan_time_,
               "a coefficient leaves the range of numbers; scale the gain, or give another scan time");
}

namespace {

HeldColumns<double> columns_of(const DiscreteTransferFunction& h) noexcept {
    return {h.order(),        h.growth().data(), h.now().data(),  h.before().data(),
            h.ahead().data(), h.outputs().data(), h.direct_now(), h.direct_before()};
}

// z^-n for z = 1 + w
Complex delay_factor(Complex z, std::int64_t n) noexcept {
    Complex factor = 1.0, base = 1.0 / z;
    for (; n > 0; n /= 2) {
        if (n % 2 == 1) factor *= base;
        base *= base;
    }
    return factor;
}

Complex rational_by_states(const DiscreteTransferFunction& h, Complex w) noexcept {
    const auto c = columns_of(h);
    const Point<double> one{1.0, 0.0}, at{w.real(), w.imag()}, z = one + at;
    bool older = h.direct_before() != 0.0;
    for (double x : h.before()) older = older || x != 0.0;
    const Point<double> before = older ? one / z : Point<double>{};
    StatesAt<double> x;
    combine_inputs(c, z, one, before, x);
    solve_states(c, at, x);
    return rounded(outputs_of(c, x) + c.direct_before * before) + c.direct_now;
}

Complex rational_by_factors(const DiscreteTransferFunction& h, Complex w) noexcept {
    const auto& zeros = h.zero_offsets();
    const auto& poles = h.pole_offsets();
    // Above and below alternate, so that a long chain neither overflows nor underflows on the way.
    Complex value = h.leading();
    for (std::size_t i = 0; i < std::max(zeros.size(), poles.size()); ++i) {
        if (i < zeros.size()) value *= w - zeros[i];
        if (i < poles.size()) value /= w - poles[i];
    }
    return value;
}

// Without the whole scans of delay; infinite, and never not a number, at a pole.
Complex rational_at(const DiscreteTransferFunction& h, Complex w) noexcept {
    if (w == 0.0) return h.steady_gain();
    for (const Complex& pole : h.pole_offsets())
        if (w == pole) return std::numeric_limits<double>::infinity();
    return h.factored_error() > 1e-13 ? rational_by_states(h, w) : rational_by_factors(h, w);
}

bool finite(const Complex& x) noexcept { return is_finite(x.real()) && is_finite(x.imag()); }

Complex delayed(Complex value, Complex factor) noexcept {
    if (!finite(value)) return value;
    return finite(factor) ? value * factor : Complex(std::numeric_limits<double>::infinity());
}

void check_ratio(std::string_view list, std::size_t i, double time_constant, double scan_time) {
    const double ratio = scan_time / std::abs(time_constant);
    if (!(ratio >= 1e-12 && ratio <= 1e12))
        refuse(error_code::out_of_domain, "scan_time", scan_time,
               joined({item_name(list, i), " is ", text_of(time_constant),
                       "; give a scan time between 1e-12 and 1e12 times every lag, or leave this lag out"}));
}

void check(const TransferFunction& process, double scan_time, Between between) {
    require_positive("scan_time", scan_time);
    if (between != Between::constant && between != Between::linear)
        refuse(error_code::unknown_name, "between", static_cast<double>(static_cast<std::int32_t>(between)),
               "give Between::constant or Between::linear");
    if (process.relative_degree() < 0)
        throw Error(error_code::out_of_domain,
                    joined({"process is ", process.text(),
                            "; it has more zeros than poles, which no sampled process can follow: add lags"}));
    if (process.order() > static_cast<int>(most_states))
        refuse(error_code::out_of_domain, "process order", process.order(),
               "give at most 20 poles, or reduce the process");
    if (!(process.dead_time() / scan_time < 1e7))
        refuse(error_code::out_of_domain, "dead_time", process.dead_time(),
               "this is more than ten million scans; give a longer scan time");
    const Factors& f = process.factors();
    for (std::size_t i = 0; i < f.lags.size(); ++i) check_ratio("lags", i, f.lags[i], scan_time);
    for (std::size_t i = 0; i < f.lag_pairs.size(); ++i)
        check_ratio("lag_pairs", i, f.lag_pairs[i].time_constant, scan_time);
}

}  // namespace
}  // namespace detail

std::complex<double> DiscreteTransferFunction::at_offset(std::complex<double> z_minus_one) const noexcept {
    return detail::delayed(detail::rational_at(*this, z_minus_one), detail::delay_factor(1.0 + z_minus_one, delay_scans_));
}

std::complex<double> DiscreteTransferFunction::at_offset_by_states(std::complex<double> z_minus_one) const noexcept {
    return detail::delayed(detail::rational_by_states(*this, z_minus_one),
                           detail::delay_factor(1.0 + z_minus_one, delay_scans_));
}

std::complex<double> DiscreteTransferFunction::at_frequency(double rad_s) const noexcept {
    const double angle = rad_s * scan_time_;
    return detail::delayed(detail::rational_at(*this, exponential_minus_one({0.0, angle})),
                           std::polar(1.0, -angle * static_cast<double>(delay_scans_)));
}

DiscreteTransferFunction held(const TransferFunction& process, double scan_time, Between between) {
    detail::check(process, scan_time, between);
    const auto delay = detail::delay_in_scans(process.dead_time(), scan_time);
    detail::HeldParts parts(process, scan_time, between, delay);
    const Factors& f = process.factors();
    if (between == Between::constant && process.order() == 1) parts.first_order(f, delay);
    else if (between == Between::constant && detail::is_two_in_series(f, scan_time)) parts.two_in_series(f, delay);
    else parts.any_order(f, delay);
    parts.require_moderate_growth();
    parts.require_finite_numbers();
    if (parts.h.leading() == 0.0)
        detail::refuse(error_code::out_of_domain, "scan_time", scan_time,
                       "the response within one scan is smaller than all numbers; give a longer scan time");
    return std::move(parts.h);
}

}  // namespace v0
}  // namespace tauwright
