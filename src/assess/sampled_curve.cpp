#include "assess/sampled_curve.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "tauwright/discretize/pid.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double pi = std::numbers::pi;
using Complex = std::complex<double>;

// Roots of a x^2 + b x + c with a != 0, without cancellation.
void append_roots(double a, double b, double c, std::vector<Complex>& roots) {
    const double discriminant = b * b - 4.0 * a * c;
    if (discriminant < 0.0) {
        const Complex root{-b / (2.0 * a), std::sqrt(-discriminant) / (2.0 * a)};
        roots.insert(roots.end(), {root, std::conj(root)});
        return;
    }
    const double q = -0.5 * (b + std::copysign(std::sqrt(discriminant), b));
    roots.insert(roots.end(), {Complex(q / a), Complex(q != 0.0 ? c / q : 0.0)});
}

// e^{jwh} - 1.
Complex offset_at(double w, double h) noexcept {
    const double s = std::sin(0.5 * w * h), c = std::cos(0.5 * w * h);
    return {-2.0 * s * s, 2.0 * s * c};
}

bool undamped(const TransferFunction& process) {
    const auto& pairs = process.factors().lag_pairs;
    return std::any_of(pairs.begin(), pairs.end(), [](const QuadraticFactor& p) { return p.damping == 0.0; });
}

}  // namespace

SampledController::SampledController(const PidSettings& settings, double scan_time) {
    run::PidCoefficients c;
    static_cast<void>(discretize(settings, scan_time, c));  // checked by the caller
    const double kp = c.gain, ki = c.integral_per_scan, kd = c.derivative_per_scan, a = c.derivative_smoothing;
    if (kd != 0.0) {
        if (ki != 0.0) {
            append_roots(kp + ki + kd, kp * a + ki * (1.0 + a), ki * a, zero_offsets);
            pole_offsets = {0.0, -a};
        } else {
            zero_offsets = {-kp * a / (kp + kd)};
            pole_offsets = {-a};
        }
        leading = kp + ki + kd;
    } else {
        leading = kp + ki;
        if (ki != 0.0) {
            zero_offsets = {-ki / (kp + ki)};
            pole_offsets = {0.0};
        }
    }
    if (c.measurement_smoothing != 1.0) {
        leading *= c.measurement_smoothing;
        zero_offsets.push_back(-1.0);
        pole_offsets.push_back(-c.measurement_smoothing);
    }
}

Complex SampledController::at_offset(Complex z_minus_one) const noexcept {
    Complex value = leading;
    for (const Complex& zero : zero_offsets) value *= z_minus_one - zero;
    for (const Complex& pole : pole_offsets) value /= z_minus_one - pole;
    return value;
}

SampledCurve::SampledCurve(const TransferFunction& process, const PidSettings& settings, double scan_time)
    : controller_(settings, scan_time), process_(held(process, scan_time)), h_(scan_time) {
    delay_ = static_cast<double>(process_.delay_scans());
    leading_ = controller_.leading * process_.leading();
    const bool on_circle = undamped(process);
    roots_.reserve(16);
    take(process_.zero_offsets(), 1.0, on_circle);
    take(controller_.zero_offsets, 1.0, false);
    take(process_.pole_offsets(), -1.0, on_circle);
    take(controller_.pole_offsets, -1.0, false);
    // A zero at z = -1, where the path ends: stop just before.
    const bool zero_at_end = std::any_of(roots_.begin(), roots_.end(), [](const Root& r) { return r.sign > 0.0 && std::hypot(r.re + 2.0, r.im) < 1e-9; });
    end_ = zero_at_end ? pi / h_ * (1.0 - 1e-7) : pi / h_;
    fastest_turn_ = lasting_turn_ = (delay_ + 1.0) * h_;
    finish_limits();
    pair_for_tail();
}

void SampledCurve::take(const std::vector<Complex>& offsets, double sign, bool undamped) {
    for (const Complex& g : offsets) take_root(g, sign, undamped);
}

void SampledCurve::take_root(Complex g, double sign, bool undamped) {
    if (g == -1.0) {  // z = 0: a scan of delay, or of prediction
        delay_ -= sign;
        return;
    }
    const Complex z = 1.0 + g;
    // A zero of the process at rest stays one, but for rounding.
    if (g == 0.0 || (sign > 0.0 && std::abs(g) < 1e-13)) {
        net_integrators_ -= sign > 0.0 ? 1 : -1;
        return;
    }
    const double size = std::abs(z), over = (2.0 * g.real() + std::norm(g)) / (size + 1.0);
    const bool on_circle = undamped && std::abs(over) < 1e-14 && g.imag() != 0.0;
    roots_.push_back({g.real(), g.imag(), sign, size, on_circle ? 0.0 : over, std::arg(z)});
    if (on_circle && g.imag() > 0.0) axis_roots_.push_back({std::arg(z) / h_, sign > 0.0 ? -1 : 1});
    unstable_poles_ += sign < 0.0 && !on_circle && over > 0.0;
    smallest_root_ = std::min(smallest_root_, std::min(std::abs(g), 1.0) / h_);
    largest_root_ = pi / h_;
}

void SampledCurve::finish_limits() {
    Complex low = leading_;
    low_phase_slope_ = -h_ * delay_ - 0.5 * h_ * net_integrators_;
    for (const Root& root : roots_) {
        const Complex g{root.re, root.im};
        low = root.sign > 0.0 ? low * -g : low / -g;
        low_phase_slope_ -= root.sign * h_ * (1.0 / g).real();
    }
    low_gain_ = low.real() * std::pow(h_, -net_integrators_);
    std::sort(axis_roots_.begin(), axis_roots_.end(), [](const AxisRoot& a, const AxisRoot& b) { return a.w < b.w; });
    nearest_at_infinity_ = inverse_nearest_at_infinity_ = std::numeric_limits<double>::infinity();
}

std::complex<double> SampledCurve::value(double w) const noexcept {
    if (w >= pi / h_) return controller_.at_offset(-2.0) * process_.at_offset(-2.0);
    return controller_.at_offset(offset_at(w, h_)) * process_.at_frequency(w);
}

CurvePoint SampledCurve::at(double w) const noexcept {
    const Complex g = w >= pi / h_ ? Complex(-2.0) : offset_at(w, h_);
    const double ur = 1.0 + g.real(), ui = g.imag();
    double re = leading_, im = 0.0;
    double slope_re = 0.0, slope_im = 0.0, bend_re = 0.0, bend_im = 0.0;  // in units of h and h^2
    for (const Root& root : roots_) {
        const double x = g.real() - root.re, y = g.imag() - root.im;  // u - z
        const double d = 1.0 / (x * x + y * y);
        const double inverse_re = x * d, inverse_im = -y * d;
        const double factor_re = root.sign > 0.0 ? x : inverse_re, factor_im = root.sign > 0.0 ? y : inverse_im;
        const double product = re * factor_re - im * factor_im;
        im = re * factor_im + im * factor_re;
        re = product;
        const double q_re = ur * inverse_re - ui * inverse_im, q_im = ur * inverse_im + ui * inverse_re;  // u / (u - z)
        slope_re -= root.sign * q_im;
        slope_im += root.sign * q_re;
        bend_re += root.sign * (q_re * (q_re - 1.0) - q_im * q_im);
        bend_im += root.sign * (q_im * (2.0 * q_re - 1.0));
    }
    Complex L{re, im};
    if (net_integrators_ != 0) {
        // R holds (jw / (u - 1))^m: 1/x - cot x and its slope at x = wh/2, by series where they cancel.
        const double x = 0.5 * w * h_, xx = x * x, m = net_integrators_;
        const double s = std::sin(x), first = x < 0.2 ? x * (1.0 / 3.0 + xx * (1.0 / 45.0 + xx * (2.0 / 945.0 + xx / 4725.0))) : 1.0 / x - std::cos(x) / s;
        const double second = x < 0.2 ? 1.0 / 3.0 + xx * (1.0 / 15.0 + xx * (2.0 / 189.0 + xx / 675.0)) : 1.0 / (s * s) - 1.0 / xx;
        slope_re += 0.5 * m * first;
        slope_im -= 0.5 * m;
        bend_re += 0.25 * m * second;
        for (int i = std::abs(net_integrators_); i > 0; --i) L = net_integrators_ > 0 ? L / g : L * g;
    }
    if (delay_ != 0.0) {
        const double angle = delay_ * h_ * w;
        L *= Complex(std::cos(angle), -std::sin(angle));
        slope_im -= delay_;
    }
    return {w, L, {h_ * slope_re, h_ * slope_im}, {h_ * h_ * bend_re, h_ * h_ * bend_im}};
}

// Least |u - root|^2 over the arc, from below.
double SampledCurve::squared_distance_from(const Root& root, double from, double to) noexcept {
    const auto around = [](double x) { return std::abs(x) <= pi ? std::abs(x) : 2.0 * pi - std::abs(x); };
    const double beside = root.angle >= from && root.angle <= to ? 0.0 : std::min(around(root.angle - from), around(root.angle - to));
    const double half = 0.5 * beside, sine = half * (1.0 - half * half / 6.0);  // at most sin(half)
    return root.over * root.over + 4.0 * root.size * sine * sine;
}

CurveBounds SampledCurve::bounds(double low, double high) const noexcept {
    const double m = std::abs(net_integrators_);
    // 1/x - cot x has slope up to 1 - 4/pi^2 and bend up to 16/pi^3 on (0, pi/2].
    CurveBounds b{0.25 * m * 0.6, 0.125 * m * 0.52, 0.0, 0.0};
    const double from = low * h_, to = high * h_;
    for (const Root& root : roots_) {
        const double square = squared_distance_from(root, from, to);
        const double bend = root.size / square;
        b.bend += bend;
        b.twist += bend * (1.0 + root.size) / std::sqrt(square);
    }
    const double bend = h_ * h_ * b.bend, twist = h_ * h_ * h_ * b.twist;
    return {bend, twist, bend, twist};
}

void SampledCurve::pair_for_tail() {
    std::vector<double> zeros, poles(static_cast<std::size_t>(std::max(net_integrators_, 0)), 0.0);
    for (const Root& root : roots_) {
        const bool real = root.im == 0.0 && root.re > -1.0;
        if (!real) alone_.push_back(root);
        else (root.sign > 0.0 ? zeros : poles).push_back(root.re);
    }
    for (int i = net_integrators_; i < 0; ++i) zeros.push_back(0.0);
    // The slowest zero beside the slowest pole.
    const auto slowest = [](double a, double b) { return std::abs(a) < std::abs(b); };
    std::sort(zeros.begin(), zeros.end(), slowest);
    std::sort(poles.begin(), poles.end(), slowest);
    const std::size_t pairs = std::min(zeros.size(), poles.size());
    for (std::size_t i = 0; i < pairs; ++i) ratios_.push_back({zeros[i], poles[i]});
    const auto leave = [&](const std::vector<double>& offsets, double sign) {
        for (std::size_t i = pairs; i < offsets.size(); ++i)
            alone_.push_back({offsets[i], 0.0, sign, 1.0 + offsets[i], offsets[i], 0.0});
    };
    leave(zeros, 1.0);
    leave(poles, -1.0);
}

double SampledCurve::tail(double w) const noexcept {
    const Complex u = offset_at(std::min(w, pi / h_), h_);
    const double from = w * h_;
    double square = leading_ * leading_;
    for (const Ratio& r : ratios_)
        square *= std::max(std::norm(u - r.zero) / std::norm(u - r.pole), std::norm(2.0 + r.zero) / std::norm(2.0 + r.pole));
    for (const Root& root : alone_) {
        if (root.sign > 0.0) {
            const bool falls = root.im == 0.0 && root.re < -1.0;
            square *= falls ? std::norm(u - root.re) : (1.0 + root.size) * (1.0 + root.size);
        } else if (root.im == 0.0) {
            square /= root.re > -1.0 ? std::norm(u - root.re) : std::norm(2.0 + root.re);
        } else {
            square /= squared_distance_from(root, from, pi);
        }
    }
    return square < std::numeric_limits<double>::infinity() ? std::sqrt(square) : std::numeric_limits<double>::infinity();
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
