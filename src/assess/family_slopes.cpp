// What slopes say of where the worst member can lie.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "assess/family_search.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double pi = std::numbers::pi, turn = 2.0 * pi;

// Of a pair of ends.
template <class Interval>
Interval times(Interval x, Interval y) noexcept {
    const double a = x.low * y.low, b = x.low * y.high, c = x.high * y.low, d = x.high * y.high;
    return {std::min({a, b, c, d}), std::max({a, b, c, d})};
}
template <class Interval>
Interval minus(Interval x, Interval y) noexcept { return {x.low - y.high, x.high - y.low}; }
template <class Interval>
Interval plus(Interval x, Interval y) noexcept { return {x.low + y.low, x.high + y.high}; }
template <class Interval>
bool has_sign(Interval x) noexcept { return x.low > 0.0 || x.high < 0.0; }

}  // namespace

FamilySearch::Interval FamilySearch::part(std::size_t i, bool imaginary) const noexcept {
    const double c = imaginary ? e_.slope[i].imag() : e_.slope[i].real();
    return {c - e_.slope_radius[i], c + e_.slope_radius[i]};
}

// Sign-preserving multiples of the figure's slopes along each coordinate, all by one positive factor.
bool FamilySearch::gradient() {
    const std::size_t n = e_.slope.size();
    if (aim_ == Aim::nearness) {
        // Re(T slope) |1 + L|^2 / |L| = Re(slope) (|L| - cos alpha) + Im(slope) sin alpha.
        if (!(whole_.alpha_high - whole_.alpha_low < pi) || !(whole_.s_high < 500.0)) return false;
        const auto cosine = [](double low, double high) {
            Interval c{std::min(std::cos(low), std::cos(high)), std::max(std::cos(low), std::cos(high))};
            if (holds_turn(low, high)) c.high = 1.0;
            if (holds_turn(low - pi, high - pi)) c.low = -1.0;
            return c;
        };
        const Interval size{std::exp(whole_.s_low), std::exp(whole_.s_high)};
        const Interval x = minus(size, cosine(whole_.alpha_low, whole_.alpha_high));
        const Interval y = cosine(whole_.alpha_low - 0.5 * pi, whole_.alpha_high - 0.5 * pi);
        for (std::size_t i = 0; i < n; ++i) gradient_[i] = plus(times(part(i, false), x), times(part(i, true), y));
        if (!set_.is_ball()) sharpen(x, y);
        return true;
    }
    const Interval u = part(0, false), v = part(0, true);
    const Interval led = aim_ == Aim::gain_margin ? v : u;  // by it the frequency follows
    double sign = led.low > 0.0 ? 1.0 : led.high < 0.0 ? -1.0 : 0.0;
    if (sign == 0.0) return false;
    Interval angle{1.0, 1.0};
    if (aim_ != Aim::gain_margin) {
        if (holds_turn(whole_.alpha_low, whole_.alpha_high)) return false;
        const double below = std::floor(whole_.alpha_low / turn) * turn;
        angle = {whole_.alpha_low - below, whole_.alpha_high - below};
        if (aim_ == Aim::phase_margin) {
            if (angle.low < pi && angle.high > pi) return false;
            if (angle.low >= pi) sign = -sign;
        }
    }
    gradient_[0] = {-1.0, 1.0};
    for (std::size_t i = 1; i < n; ++i) {
        const Interval cross = minus(times(part(i, true), u), times(part(i, false), v));  // phi_i u_y - phi_y u_i
        Interval g = cross;
        if (aim_ == Aim::delay_margin) {
            const double k = family_.frequency_slope(i);
            g = plus(cross, times(minus(part(i, false), times(Interval{k, k}, u)), angle));
        }
        gradient_[i] = sign > 0.0 ? g : Interval{-g.high, -g.low};
    }
    return true;
}

// Where |L| may be just 1 at a peak, the frequency does not follow; a coordinate that is free on both sides does.
// A slope along the frequency then says that the worst member is elsewhere.
bool FamilySearch::no_worst_at_fold(const FamilyBox& box) const noexcept {
    if (aim_ == Aim::nearness || (aim_ != Aim::gain_margin && holds_turn(whole_.alpha_low, whole_.alpha_high))) return false;
    double farthest = 0.0;
    for (std::size_t i = 1; i < box.half.size(); ++i) {
        const double far = std::abs(box.center[i]) + box.half[i];
        farthest += far * far;
    }
    if (set_.is_ball() && (farthest > 1.0 - 1e-12 || least_dead_time(box) <= 0.0)) return false;
    const double below = std::floor(whole_.alpha_low / turn) * turn;
    const Interval angle{whole_.alpha_low - below, whole_.alpha_high - below};
    if (aim_ == Aim::phase_margin && angle.low < pi && angle.high > pi) return false;
    for (std::size_t i = 1; i < box.half.size(); ++i) {
        const bool free = set_.is_ball() || (box.center[i] - box.half[i] > set_.lowest(i - 1) && box.center[i] + box.half[i] < set_.highest(i - 1));
        const Interval u = part(i, false), v = part(i, true);
        if (!free || !has_sign(aim_ == Aim::gain_margin ? v : u)) continue;
        Interval cross = minus(times(part(0, true), u), times(v, part(0, false)));
        if (aim_ == Aim::delay_margin) {
            const double k = family_.frequency_slope(i);
            cross = minus(cross, times(minus(u, times(Interval{k, k}, part(0, false))), angle));
        }
        if (has_sign(cross)) return true;
    }
    return false;
}

// Along a ridge, where a turn of L by one coordinate undoes that by another, slopes along single coordinates have no
// sign. With a second coordinate that is free to move, one that keeps the part of x, or of y, of the slope at 0:
// Re(slope) x + Im(slope) y leaves the cross product of both coordinates' slopes times the other part.
void FamilySearch::sharpen(Interval x, Interval y) noexcept {
    if (!has_sign(x) && !has_sign(y)) return;
    const auto cross = [&](std::size_t i, std::size_t j) {
        return minus(times(part(i, false), part(j, true)), times(part(i, true), part(j, false)));
    };
    const auto turned = [](Interval g, bool back) { return back ? Interval{-g.high, -g.low} : g; };
    const Interval u = part(0, false), v = part(0, true);
    for (std::size_t i = 1; i < gradient_.size(); ++i) {  // with the frequency, which is always free
        if (has_sign(gradient_[i]) || box_.half[i] == 0.0) continue;
        const Interval c = cross(i, 0);
        if (!has_sign(c)) continue;
        if (has_sign(x) && has_sign(v)) gradient_[i] = turned(times(c, x), v.low < 0.0);
        else if (has_sign(y) && has_sign(u)) gradient_[i] = turned(times(c, y), u.low > 0.0);
    }
    const auto inside = [&](std::size_t i) {
        return box_.center[i] - box_.half[i] > set_.lowest(i - 1) && box_.center[i] + box_.half[i] < set_.highest(i - 1);
    };
    for (std::size_t i = 1; i < gradient_.size(); ++i)
        for (std::size_t j = i + 1; j < gradient_.size() && inside(i); ++j)
            if (inside(j) && has_sign(cross(i, j))) gradient_[0] = {1.0, 1.0};  // no worst member here
}

// Where the figure has a slope all over the box, the worst member lies on the edge of the set or elsewhere.
bool FamilySearch::no_worst_inside(FamilyBox& box, bool& shrunk) noexcept {
    if (aim_ == Aim::nearness && has_sign(gradient_[0])) return true;
    if (set_.is_ball()) return no_worst_in_ball(box, shrunk);
    for (std::size_t i = 1; i < gradient_.size(); ++i) {
        if (box.half[i] == 0.0) continue;
        const double low = set_.lowest(i - 1), high = set_.highest(i - 1), slack = 1e-12 * (high - low);
        double edge = 0.0;
        if (gradient_[i].low > 0.0) {
            if (box.center[i] - box.half[i] > low + slack) return true;
            edge = low;
        } else if (gradient_[i].high < 0.0) {
            if (box.center[i] + box.half[i] < high - slack) return true;
            edge = high;
        } else {
            continue;
        }
        box.center[i] = edge;
        box.half[i] = 0.0;
        shrunk = true;
    }
    return false;
}

// On the sphere the slopes at the worst member point straight inward.
bool FamilySearch::no_worst_in_ball(FamilyBox& box, bool& shrunk) const noexcept {
    const auto coordinate = [&](std::size_t i) { return Interval{box.center[i] - box.half[i], box.center[i] + box.half[i]}; };
    // On the cut where the dead time is 0, more of it leads inward, the ball's center being on that side: where that
    // makes the figure worse, the worst member is not on the cut.
    for (std::size_t j = 0; j < set_.size() && least_dead_time(box) <= 0.0; ++j) {
        if (!set_.parameters()[j].linear()) continue;
        double worse = 0.0;
        for (std::size_t i = 0; i < set_.size(); ++i)
            worse += std::max(set_.axis(j, i) * gradient_[i + 1].low, set_.axis(j, i) * gradient_[i + 1].high);
        if (!(worse < 0.0)) return false;
    }
    double farthest = 0.0, outward = 0.0;
    bool slope = false;
    for (std::size_t i = 1; i < gradient_.size(); ++i) {
        const Interval z = coordinate(i);
        const double far = std::max(std::abs(z.low), std::abs(z.high));
        farthest += far * far;
        outward += times(gradient_[i], z).low;
        slope |= has_sign(gradient_[i]);
    }
    if (farthest < 1.0 - 1e-12) return slope;
    if (outward > 0.0) return true;
    for (std::size_t i = 1; i < gradient_.size(); ++i)
        for (std::size_t j = i + 1; j < gradient_.size(); ++j) {
            const Interval a = times(gradient_[i], coordinate(j)), b = times(gradient_[j], coordinate(i));
            if (a.low > b.high || b.low > a.high) return true;
        }
    if (!slope) return false;
    // The worst member lies on the sphere.
    for (std::size_t i = 1; i < gradient_.size(); ++i) {
        const Interval z = coordinate(i);
        const double far = std::max(std::abs(z.low), std::abs(z.high));
        if (z.low * z.high <= 0.0) continue;
        const double least = std::sqrt(std::max(1.0 - (farthest - far * far), 0.0)) - 1e-12;
        if (least > far) return true;
        if (!(least > far - 1.8 * box.half[i])) continue;  // hardly less
        const double half = 0.5 * (far - least);
        box.center[i] = std::copysign(far - half, box.center[i]);
        box.half[i] = half;
        shrunk = true;
    }
    return false;
}

// Over a box of a ball; infinite where the dead time is known.
double FamilySearch::least_dead_time(const FamilyBox& box) const noexcept {
    double least = std::numeric_limits<double>::infinity();
    for (std::size_t j = 0; j < set_.size(); ++j) {
        if (!set_.parameters()[j].linear()) continue;
        least = set_.value(j, &box.center[1]);
        for (std::size_t i = 0; i < set_.size(); ++i) least -= std::abs(set_.axis(j, i)) * box.half[i + 1];
    }
    return least;
}

// Cuts off what lies outside the ball or below a dead time of 0; false where nothing is left.
bool FamilySearch::shrink_to_ball(FamilyBox& box) const noexcept {
    const std::size_t n = set_.size();
    double nearest = 0.0;
    const auto near = [&](std::size_t i) { return std::max(std::abs(box.center[i]) - box.half[i], 0.0); };
    for (std::size_t i = 1; i <= n; ++i) nearest += near(i) * near(i);
    if (nearest > 1.0 + 1e-12) return false;
    for (std::size_t i = 1; i <= n; ++i) {
        const double own = near(i), reach = std::sqrt(std::max(1.0 - nearest + own * own, 0.0)) + 1e-12;
        const double low = std::max(box.center[i] - box.half[i], -reach), high = std::min(box.center[i] + box.half[i], reach);
        if (low > high) return false;
        if (low > box.center[i] - box.half[i] || high < box.center[i] + box.half[i]) {
            box.center[i] = 0.5 * (low + high);
            box.half[i] = 0.5 * (high - low);
        }
    }
    for (std::size_t j = 0; j < n; ++j) {
        if (!set_.parameters()[j].linear()) continue;
        double highest = set_.value(j, &box.center[1]);
        for (std::size_t i = 0; i < n; ++i) highest += std::abs(set_.axis(j, i)) * box.half[i + 1];
        if (highest < 0.0) return false;
    }
    return true;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
