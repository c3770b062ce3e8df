#include "assess/loop_family.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double pi = std::numbers::pi;

// At least e^x for 0 <= x <= 1.7, and infinite beyond.
double growth(double x) noexcept { return x <= 1.7 ? 1.0 + x + x * x : infinity; }

}  // namespace

LoopFamily::LoopFamily(const MemberSet& set, const TransferFunction& controller, double extra_delay) : set_(set) {
    take(set.process(), true);
    take(controller, false);
    dead_time_ += extra_delay;
    gain_parameter_ = parameter_at(Place::gain, 0);
    dead_time_parameter_ = parameter_at(Place::dead_time, 0);
    if (gain_parameter_ >= 0) gain_ = controller.gain() * set.parameters()[static_cast<std::size_t>(gain_parameter_)].sign;
    if (dead_time_parameter_ >= 0) dead_time_ = extra_delay + controller.dead_time();
    double least = infinity;
    for (const Pair& f : pairs_) {
        if (f.power > 0 || f.time_parameter < 0 || set.is_ball() || !(std::abs(f.damping) < std::min(least, 1.0))) continue;
        least = std::abs(f.damping);
        resonance_ = f.time_parameter;
    }
    rounding_ = 1e-14 * static_cast<double>(4 + firsts_.size() + 2 * pairs_.size());
    value_.resize(set.size());
    reach_.resize(set.size());
    share_.resize(set.size());
    slope_.resize(set.size());
    slope_radius_.resize(set.size());
}

int LoopFamily::parameter_at(Place place, std::size_t index) const noexcept {
    for (std::size_t j = 0; j < set_.size(); ++j)
        if (set_.parameters()[j].place == place && set_.parameters()[j].index == index) return static_cast<int>(j);
    return -1;
}

void LoopFamily::take(const TransferFunction& G, bool process) {
    const Factors& f = G.factors();
    gain_ *= f.gain;
    dead_time_ += f.dead_time;
    integrators_ += f.integrators - f.zeros_at_origin;
    const auto find = [&](Place place, std::size_t i) { return process ? parameter_at(place, i) : -1; };
    const auto add = [&](double T, int parameter, int power) {
        // A lag and a lead that are equal and known leave nothing.
        const auto twin = std::find_if(firsts_.begin(), firsts_.end(), [&](const First& x) {
            return T > 0.0 && x.time == T && x.parameter < 0 && parameter < 0 && x.power == -power;
        });
        if (twin != firsts_.end()) firsts_.erase(twin);
        else firsts_.push_back({T, parameter, power});
    };
    for (std::size_t i = 0; i < f.leads.size(); ++i) add(f.leads[i], find(Place::lead, i), 1);
    for (std::size_t i = 0; i < f.lags.size(); ++i) add(f.lags[i], find(Place::lag, i), -1);
    for (std::size_t i = 0; i < f.lead_pairs.size(); ++i)
        pairs_.push_back({f.lead_pairs[i].time_constant, f.lead_pairs[i].damping, find(Place::lead_time, i), find(Place::lead_damping, i), 1});
    for (std::size_t i = 0; i < f.lag_pairs.size(); ++i)
        pairs_.push_back({f.lag_pairs[i].time_constant, f.lag_pairs[i].damping, find(Place::lag_time, i), find(Place::lag_damping, i), -1});
}

void LoopFamily::enclose(const FamilyBox& box, Enclosure& e) noexcept {
    const std::size_t n = set_.size();
    const double log_frequency = box.center[0] - (resonance_ < 0 ? 0.0 : box.center[static_cast<std::size_t>(resonance_) + 1]);
    w_ = std::exp(log_frequency);
    first_half_ = box.half[0];
    half_ = log_frequency_half(box);
    resonant_slope_ = 0.0;
    resonant_radius_ = 0.0;
    e.frequency = w_;
    e.slope.assign(n + 1, 0.0);
    e.slope_radius.assign(n + 1, 0.0);
    e.rest = rounding_;
    e.centered = true;
    e.s = e.alpha = 0.0;
    for (std::size_t j = 0; j < n; ++j) {
        value_[j] = set_.value(j, &box.center[1]);
        slope_[j] = slope_radius_[j] = 0.0;
        if (!set_.is_ball()) {
            reach_[j] = box.half[j + 1];
            continue;
        }
        reach_[j] = 0.0;
        for (std::size_t i = 0; i < n; ++i) reach_[j] += std::abs(set_.axis(j, i)) * box.half[i + 1];
        if (set_.parameters()[j].linear()) continue;
        share_[j] = reach_[j] / value_[j];
        reach_[j] = share_[j] < 1.0 && value_[j] > 0.0 ? -std::log1p(-share_[j]) : infinity;
    }
    re_ = gain_;
    im_ = 0.0;
    if (gain_parameter_ >= 0) {
        re_ *= value_[static_cast<std::size_t>(gain_parameter_)];
        slope_[static_cast<std::size_t>(gain_parameter_)] = 1.0;
    }
    e.slope[0] = -static_cast<double>(integrators_);
    for (const First& f : firsts_) enclose_first(f, e);
    for (const Pair& f : pairs_) enclose_pair(f, e);
    e.s += 0.5 * std::log(re_ * re_ + im_ * im_) - static_cast<double>(integrators_) * log_frequency;
    e.alpha += std::atan2(-im_, -re_) - 0.5 * pi * integrators_;
    enclose_dead_time(e);
    e.alpha = std::remainder(e.alpha, 2.0 * pi);
    finish_slopes(e);
}

// log(1 + j x) by v = log x: slope j x / (1 + j x), second derivative of size x / (1 + x^2).
void LoopFamily::enclose_first(const First& f, Enclosure& e) noexcept {
    const bool moves = f.parameter >= 0;
    const auto j = static_cast<std::size_t>(std::max(f.parameter, 0));
    const double x = w_ * (moves ? std::copysign(value_[j], f.time) : f.time), d = 1.0 / (1.0 + x * x);
    const double H = half_ + (moves ? reach_[j] : 0.0);
    const double bend = std::min(0.5, std::abs(x) * d * growth(H));
    double a = 1.0, b = x;
    if (f.power < 0) a = d, b = -x * d;
    const double product = re_ * a - im_ * b;
    im_ = re_ * b + im_ * a;
    re_ = product;
    const std::complex<double> slope = static_cast<double>(f.power) * std::complex<double>{x * x * d, x * d};
    e.slope[0] += slope;
    e.slope_radius[0] += bend * H;
    e.rest += 0.5 * bend * H * H;
    if (moves) {
        slope_[j] += slope;
        slope_radius_[j] += bend * H;
    }
}

// D = 1 - x^2 + 2 j z x by v = log x and q = log z. With Q = 2 j z x, P = -2 x^2 + Q:
// slopes P/D, Q/D; second derivatives (-4 x^2 + Q (1 - x^2))/D^2, Q (1 + x^2)/D^2, Q (1 - x^2)/D^2.
void LoopFamily::enclose_pair(const Pair& f, Enclosure& e) noexcept {
    const bool time_moves = f.time_parameter >= 0, damping_moves = f.damping_parameter >= 0;
    const auto jt = static_cast<std::size_t>(std::max(f.time_parameter, 0));
    const auto jz = static_cast<std::size_t>(std::max(f.damping_parameter, 0));
    const double x = w_ * (time_moves ? value_[jt] : f.time);
    const double z = damping_moves ? std::copysign(value_[jz], f.damping) : f.damping;
    const bool resonant = time_moves && f.time_parameter == resonance_;
    const double Hv = resonant ? first_half_ : half_ + (time_moves ? reach_[jt] : 0.0), Hq = damping_moves ? reach_[jz] : 0.0;
    const double grow = Hv == 0.0 ? 1.0 : std::exp(Hv), grow_z = Hq == 0.0 ? 1.0 : std::exp(Hq);
    const double x1 = x / grow, x2 = x * grow, z1 = std::abs(z) / grow_z, z2 = std::abs(z) * grow_z;
    const double gap1 = (1.0 - x1) * (1.0 + x1), gap2 = (1.0 - x2) * (1.0 + x2);
    const double gap_least = gap1 * gap2 <= 0.0 ? 0.0 : std::min(std::abs(gap1), std::abs(gap2));
    const double gap_most = std::max(std::abs(gap1), std::abs(gap2));
    const double least = gap_least * gap_least + 4.0 * z1 * z1 * x1 * x1, q = 2.0 * z2 * x2;  // of |D|^2; of |Q|
    const double bend_v = std::hypot(4.0 * x2 * x2, q * gap_most) / least, bend_m = q * (1.0 + x2 * x2) / least,
                 bend_q = q * gap_most / least;
    const double rest = 0.5 * (bend_v * Hv * Hv + 2.0 * bend_m * Hv * Hq + bend_q * Hq * Hq);
    const double power = f.power;
    double turn_v = bend_v * Hv + bend_m * Hq, turn_q = bend_m * Hv + bend_q * Hq;
    std::complex<double> slope_v = 0.0, slope_q = 0.0;
    // Where the box is wide for the resonance: the ranges of size and angle themselves, slopes bounded by size.
    const auto angle = [&](double X, double Z) { return std::atan2(2.0 * Z * X, (1.0 - X) * (1.0 + X)); };
    double natural = infinity, middle_s = 0.0, middle_angle = 0.0;
    if (!(rest < 0.2) && least > 0.0) {
        const auto square = [](double X2, double Z) { return (1.0 - X2) * (1.0 - X2) + 4.0 * Z * Z * X2; };
        const double deepest = std::clamp(1.0 - 2.0 * z1 * z1, x1 * x1, x2 * x2);
        const double s1 = 0.5 * std::log(square(deepest, z1));
        const double s2 = 0.5 * std::log(std::max(square(x1 * x1, z2), square(x2 * x2, z2)));
        const double a1 = angle(x1, x1 < 1.0 ? z1 : z2), a2 = angle(x2, x2 < 1.0 ? z2 : z1);
        natural = std::hypot(0.5 * (s2 - s1), 0.5 * (a2 - a1));
        middle_s = 0.5 * (s1 + s2);
        middle_angle = std::copysign(0.5 * (a1 + a2), z);
    }
    const double D_re = (1.0 - x) * (1.0 + x), D_im = 2.0 * z * x;
    if (natural < rest || !(rest < infinity)) {
        e.centered = false;
        e.rest += natural;
        e.s += power * middle_s;
        e.alpha += power * middle_angle;
        turn_v = std::hypot(2.0 * x2 * x2, q) / std::sqrt(least);
        turn_q = q / std::sqrt(least);
    } else {
        const double d = 1.0 / (D_re * D_re + D_im * D_im);
        const double a = f.power > 0 ? D_re : D_re * d, b = f.power > 0 ? D_im : -D_im * d;
        const double product = re_ * a - im_ * b;
        im_ = re_ * b + im_ * a;
        re_ = product;
        e.rest += rest;
        const double P_re = -2.0 * x * x, Q_im = D_im;
        slope_v = power * d * std::complex<double>{P_re * D_re + Q_im * D_im, Q_im * D_re - P_re * D_im};
        slope_q = power * d * std::complex<double>{Q_im * D_im, Q_im * D_re};
    }
    if (resonant) {  // by the first coordinate alone
        resonant_slope_ += slope_v;
        resonant_radius_ += turn_v;
    } else {
        e.slope[0] += slope_v;
        e.slope_radius[0] += turn_v;
    }
    if (time_moves && !resonant) slope_[jt] += slope_v, slope_radius_[jt] += turn_v;
    if (damping_moves) slope_[jz] += slope_q, slope_radius_[jz] += turn_q;
}

void LoopFamily::enclose_dead_time(Enclosure& e) noexcept {
    const bool moves = dead_time_parameter_ >= 0;
    const auto j = static_cast<std::size_t>(std::max(dead_time_parameter_, 0));
    const double reach = moves ? reach_[j] : 0.0, total = dead_time_ + (moves ? value_[j] : 0.0);
    if (total == 0.0 && reach == 0.0) return;
    const double h = half_, more = h == 0.0 ? 0.0 : std::expm1(h);
    const double turn = w_ * total, size = std::abs(turn);
    e.alpha -= turn;
    e.slope[0] -= std::complex<double>{0.0, turn};
    e.slope_radius[0] += size * more + w_ * (1.0 + more) * reach;
    e.rest += 0.5 * size * h * h * (1.0 + more) + w_ * reach * more + 4e-16 * size;
    if (!moves) return;
    slope_[j] = {0.0, -w_};
    slope_radius_[j] = w_ * more;
}

// From parameters to coordinates.
void LoopFamily::finish_slopes(Enclosure& e) noexcept {
    const std::size_t n = set_.size();
    if (resonance_ >= 0) {  // with the first coordinate held, the frequency falls as the time constant grows
        slope_[static_cast<std::size_t>(resonance_)] -= e.slope[0];
        slope_radius_[static_cast<std::size_t>(resonance_)] += e.slope_radius[0];
        e.slope[0] += resonant_slope_;
        e.slope_radius[0] += resonant_radius_;
    }
    if (!set_.is_ball()) {
        for (std::size_t j = 0; j < n; ++j) {
            e.slope[j + 1] = slope_[j];
            e.slope_radius[j + 1] = slope_radius_[j];
        }
        return;
    }
    for (std::size_t j = 0; j < n; ++j) {
        const bool linear = set_.parameters()[j].linear();
        const double size = std::abs(slope_[j]), t = linear ? 0.0 : share_[j];
        if (!(t < 1.0)) {
            e.rest = infinity;
            continue;
        }
        e.rest += linear ? 0.0 : size * (-std::log1p(-t) - t);
        for (std::size_t i = 0; i < n; ++i) {
            const double c = linear ? set_.axis(j, i) : set_.axis(j, i) / value_[j];
            e.slope[i + 1] += c * slope_[j];
            e.slope_radius[i + 1] += std::abs(c) * (slope_radius_[j] + (size + slope_radius_[j]) * t / (1.0 - t));
        }
    }
}

LoopFamily::Ends LoopFamily::ends(double fixed, int parameter) const noexcept {
    if (parameter < 0) return {std::abs(fixed), std::abs(fixed)};
    const Parameter& p = set_.parameters()[static_cast<std::size_t>(parameter)];
    return {p.low, p.high};
}

Rectangle LoopFamily::below(double w) const noexcept {
    const Ends K = ends(1.0, gain_parameter_), dead = dead_time_parameter_ >= 0 ? ends(0.0, dead_time_parameter_) : Ends{0.0, 0.0};
    Rectangle r{std::log(std::abs(gain_) * K.low), std::log(std::abs(gain_) * K.high), 0.0, 0.0};
    r.alpha_low = r.alpha_high = (gain_ > 0.0 ? pi : 0.0) - 0.5 * pi * integrators_;
    r.alpha_low -= w * (dead_time_ + dead.high);
    const auto add = [&](int power, double s_low, double s_high, double angle, double sign) {
        (power > 0 ? r.s_high : r.s_low) += power * s_high;
        (power > 0 ? r.s_low : r.s_high) += power * s_low;
        (power * sign > 0.0 ? r.alpha_high : r.alpha_low) += power * sign * angle;
    };
    for (const First& f : firsts_) {
        const double x = w * ends(f.time, f.parameter).high;
        add(f.power, 0.0, 0.5 * std::log1p(x * x), std::atan(x), f.time < 0.0 ? -1.0 : 1.0);
    }
    for (const Pair& f : pairs_) {
        const double x = w * ends(f.time, f.time_parameter).high, z = ends(f.damping, f.damping_parameter).high;
        if (!(x < 0.7)) return {-infinity, infinity, -infinity, infinity};
        add(f.power, std::log1p(-x * x), 0.5 * std::log((1.0 + x * x) * (1.0 + x * x) + 4.0 * z * z * x * x),
            std::atan2(2.0 * z * x, 1.0 - x * x), f.damping < 0.0 ? -1.0 : 1.0);
    }
    if (integrators_ > 0) r.s_high = infinity;
    if (integrators_ < 0) r.s_low = -infinity;
    if (integrators_ > 0) r.s_low -= integrators_ * std::log(w);
    if (integrators_ < 0) r.s_high -= integrators_ * std::log(w);
    return r;
}

Rectangle LoopFamily::above(double w) const noexcept {
    const Ends K = ends(1.0, gain_parameter_), dead = dead_time_parameter_ >= 0 ? ends(0.0, dead_time_parameter_) : Ends{0.0, 0.0};
    Rectangle r{std::log(std::abs(gain_) * K.low), std::log(std::abs(gain_) * K.high), 0.0, 0.0};
    r.alpha_low = r.alpha_high = (gain_ > 0.0 ? pi : 0.0) - 0.5 * pi * integrators_;
    int rise = -integrators_;
    const auto add = [&](int power, double s_low, double s_high, double a_low, double a_high, double sign) {
        r.s_low += power > 0 ? s_low : -s_high;
        r.s_high += power > 0 ? s_high : -s_low;
        const double turn = power * sign;
        r.alpha_low += turn > 0.0 ? a_low : -a_high;
        r.alpha_high += turn > 0.0 ? a_high : -a_low;
    };
    for (const First& f : firsts_) {
        const Ends T = ends(f.time, f.parameter);
        const double x = w * T.low;
        rise += f.power;
        add(f.power, std::log(T.low), std::log(T.high) + 0.5 * std::log1p(1.0 / (x * x)), std::atan(x), 0.5 * pi,
            f.time < 0.0 ? -1.0 : 1.0);
    }
    for (const Pair& f : pairs_) {
        const Ends T = ends(f.time, f.time_parameter), z = ends(f.damping, f.damping_parameter);
        const double x = w * T.low, y = 1.0 / (x * x);
        if (!(y < 0.5)) return {-infinity, infinity, -infinity, infinity};
        rise += 2 * f.power;
        add(f.power, 2.0 * std::log(T.low) + std::log1p(-y),
            2.0 * std::log(T.high) + 0.5 * std::log((1.0 + y) * (1.0 + y) + 4.0 * z.high * z.high * y),
            std::atan2(2.0 * z.high * x, (1.0 - x) * (1.0 + x)), pi, f.damping < 0.0 ? -1.0 : 1.0);
    }
    if (rise > 0) return {-infinity, infinity, -infinity, infinity};
    r.s_high += rise * std::log(w);
    r.s_low = rise < 0 ? -infinity : r.s_low;
    if (dead_time_ + dead.high > 0.0) r.alpha_low = -infinity, r.alpha_high = infinity;
    return r;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
