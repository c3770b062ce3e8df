// What an enclosure says of the figure: lower bounds.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "assess/family_search.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double pi = std::numbers::pi, turn = 2.0 * pi;

}  // namespace

// log of the distance from -1 to an annular sector.
double FamilySearch::nearness_of(const Rectangle& r) const noexcept {
    const double r_low = std::exp(r.s_low), r_high = std::exp(r.s_high);
    if (holds_turn(r.alpha_low, r.alpha_high)) {
        if (r_low > 1.0) return std::log(r_low - 1.0);
        return r_high < 1.0 ? std::log1p(-r_high) : -infinity;
    }
    const double beyond = r.alpha_low - std::floor(r.alpha_low / turn) * turn;
    const double angle = std::min(beyond, turn - (beyond + r.alpha_high - r.alpha_low));
    const double c = std::cos(angle), nearest = std::clamp(c, r_low, r_high);
    return 0.5 * std::log(nearest * (nearest - 2.0 * c) + 1.0);
}

// The figure's lower bound over ranges of log |L| and angle.
double FamilySearch::figure_of(const Rectangle& r, double w_high) const noexcept {
    if (!(r.s_low <= r.s_high) || !(r.alpha_low <= r.alpha_high)) return infinity;  // nothing there
    if (aim_ == Aim::nearness) return nearness_of(r);
    if (aim_ == Aim::gain_margin) {
        if (!holds_turn(r.alpha_low, r.alpha_high) || r.s_low >= 0.0) return infinity;
        return std::max(-r.s_high, 0.0);
    }
    if (r.s_low > 0.0 || r.s_high < 0.0) return infinity;
    if (holds_turn(r.alpha_low, r.alpha_high)) return 0.0;
    const double above = r.alpha_low - std::floor(r.alpha_low / turn) * turn;
    if (aim_ == Aim::delay_margin) return above / w_high;
    return std::min(above, turn - (above + r.alpha_high - r.alpha_low));
}

// Largest change of a linear form over the box (and the ball), the form given by its changes over half widths.
double FamilySearch::most(const std::vector<double>& form) const noexcept {
    double sum = std::abs(form[0]), rest = 0.0;
    for (std::size_t i = 1; i < form.size(); ++i) rest += std::abs(form[i]);
    if (set_.is_ball()) {
        double square = 0.0, at_center = 0.0;
        bool usable = true;
        for (std::size_t i = 1; i < form.size(); ++i) {
            if (form[i] == 0.0) continue;
            usable &= box_.half[i] > 0.0;
            const double g = form[i] / box_.half[i];
            square += g * g;
            at_center += g * box_.center[i];
        }
        const double round = std::sqrt(square) * (1.0 + 1e-14) - at_center + 1e-15;
        if (usable && square > 0.0) rest = std::min(rest, round);
    }
    return sum + rest;
}

// Upper bound of `sign` times the change of own (with its rest) where the other one is 0: by linear
// programming's dual, whose best multiplier stands at one of few places. `middle` is the other at the center.
double FamilySearch::dual(double own_share, double middle, double sign) {
    const std::vector<double>& own = own_share > 0.0 ? s_ : a_;
    const std::vector<double>& other = own_share > 0.0 ? a_ : s_;
    const auto at = [&](double m) {
        for (std::size_t i = 0; i < own.size(); ++i) form_[i] = sign * own[i] + m * other[i];
        return most(form_) + m * middle + std::abs(m) * e_.rest;
    };
    double least = at(0.0);
    for (std::size_t i = 0; i < own.size(); ++i)
        if (other[i] != 0.0) least = std::min(least, at(-sign * own[i] / other[i]));
    return least + e_.rest;
}

// Narrows the ranges to what can meet the condition of a margin: L on the negative axis, or |L| = 1.
Rectangle FamilySearch::conditioned(const Rectangle& r) {
    Rectangle narrow = r;
    if (aim_ == Aim::gain_margin) {
        if (!holds_turn(r.alpha_low, r.alpha_high) || r.alpha_high - r.alpha_low >= turn) return r;
        const double off = e_.alpha - std::floor(r.alpha_high / turn) * turn;
        narrow.s_high = std::min(r.s_high, e_.s + dual(1.0, off, 1.0));
        narrow.s_low = std::max(r.s_low, e_.s - dual(1.0, off, -1.0));
        return narrow;
    }
    if (r.s_low > 0.0 || r.s_high < 0.0) return r;
    narrow.alpha_high = std::min(r.alpha_high, e_.alpha + dual(-1.0, e_.s, 1.0));
    narrow.alpha_low = std::max(r.alpha_low, e_.alpha - dual(-1.0, e_.s, -1.0));
    return narrow;
}

// Does alpha stay above the wanted delay times the frequency all over the box, where |L| = 1?
bool FamilySearch::delay_kept(const Rectangle& r) {
    const double delay = wanted(), w = e_.frequency, h = family_.log_frequency_half(box_), more = std::expm1(h);
    if (!(delay < infinity) || holds_turn(r.alpha_low, r.alpha_high)) return false;
    const double below = std::floor(r.alpha_low / turn) * turn;
    const double kept_rest = e_.rest;
    for (std::size_t i = 0; i < a_.size(); ++i) a_[i] -= delay * w * family_.frequency_slope(i) * box_.half[i];
    e_.rest += 0.5 * delay * w * h * h * (1.0 + more);
    const double least = e_.alpha - below - delay * w - dual(-1.0, e_.s, -1.0);
    for (std::size_t i = 0; i < a_.size(); ++i) a_[i] += delay * w * family_.frequency_slope(i) * box_.half[i];
    e_.rest = kept_rest;
    return least >= 0.0;
}

// Is |1 + L| at least b = exp(wanted) all over the box? With zeta = log(-L) that is zeta outside the image of the
// disc |z| < b under log(1 + z), which is convex for b < 1. So is what encloses zeta: they are apart where a line
// parts them. The line touches the image at z/(1 + z) = t exp(j psi), psi being the direction of its normal.
bool FamilySearch::kept_away() noexcept {
    const double b = std::exp(wanted());
    if (!(b < 1.0) || !(e_.rest < 1.0) || whole_.alpha_high > 1.5 * pi || whole_.alpha_low < -1.5 * pi) return false;
    const auto parted = [&](double n_s, double n_a) {
        const double size = std::sqrt(n_s * n_s + n_a * n_a);
        if (!(size > 0.0)) return false;
        const double c = n_s / size, s = n_a / size;
        for (std::size_t i = 0; i < s_.size(); ++i) form_[i] = -c * s_[i] - s * a_[i];
        const double least = c * e_.s + s * e_.alpha - most(form_) - e_.rest;
        if (!(least > 0.0)) return false;
        const double t = b / (b * c + std::sqrt(1.0 - b * b * s * s));
        const double q_re = 1.0 - t * c, q_im = -t * s;  // 1 + z = 1/(1 - t exp(j psi))
        const double touch = -0.5 * c * std::log(q_re * q_re + q_im * q_im) - s * std::atan2(q_im, q_re);
        return least >= touch * (1.0 + 1e-14) + 1e-14;
    };
    if (parted(std::exp(e_.s) - std::cos(e_.alpha), std::sin(e_.alpha))) return true;  // as |1 + L| grows at the center
    for (std::size_t i = 0; i < s_.size() && !set_.is_ball(); ++i) {
        const double along = s_[i] * e_.alpha - a_[i] * e_.s;  // normals across the longest sides
        if (parted(std::copysign(1.0, -along) * a_[i], std::copysign(1.0, along) * s_[i])) return true;
    }
    return false;
}

void FamilySearch::narrow_to_ball() noexcept {
    const auto reach = [&](const std::vector<double>& form, double sign) {
        for (std::size_t i = 0; i < form.size(); ++i) form_[i] = sign * form[i];
        return most(form_) + e_.rest;
    };
    whole_.s_high = std::min(whole_.s_high, e_.s + reach(s_, 1.0));
    whole_.s_low = std::max(whole_.s_low, e_.s - reach(s_, -1.0));
    whole_.alpha_high = std::min(whole_.alpha_high, e_.alpha + reach(a_, 1.0));
    whole_.alpha_low = std::max(whole_.alpha_low, e_.alpha - reach(a_, -1.0));
}

double FamilySearch::enclosed_bound() noexcept {
    double width_s = e_.rest, width_a = e_.rest;
    for (std::size_t i = 0; i < s_.size(); ++i) {
        s_[i] = e_.slope[i].real() * box_.half[i];
        a_[i] = e_.slope[i].imag() * box_.half[i];
        width_s += std::abs(s_[i]);
        width_a += std::abs(a_[i]);
    }
    whole_ = {e_.s - width_s, e_.s + width_s, e_.alpha - width_a, e_.alpha + width_a};
    if (!(width_s < 500.0) || !(width_a < 500.0)) return aim_ == Aim::nearness ? -infinity : 0.0;
    if (set_.is_ball()) narrow_to_ball();
    if (aim_ == Aim::nearness) {
        const double least = nearness_of(whole_);
        return least < wanted() && kept_away() ? wanted() : least;
    }
    const double w_high = e_.frequency * std::exp(family_.log_frequency_half(box_)) * (1.0 + 1e-14);
    double figure = figure_of(whole_, w_high);
    if (figure >= wanted()) return figure;
    whole_ = conditioned(whole_);
    figure = figure_of(whole_, w_high);
    if (aim_ == Aim::delay_margin && figure < wanted() && delay_kept(whole_)) figure = wanted();
    return figure;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
