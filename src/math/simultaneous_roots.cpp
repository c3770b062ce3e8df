#include "math/simultaneous_roots.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "math/double_double.hpp"
#include "math/lanes.hpp"
#include "math/scaled_iterates.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double unit_roundoff = 0x1p-53;
constexpr double hair = 0x1p-56;
constexpr double infinity = std::numeric_limits<double>::infinity();
// Simple roots take about 8 and 2 passes. Multiple ones creep, and here and there two of them keep stepping within
// the rounding error of p; the radii hold wherever they are stopped.
constexpr int most_approach_passes = 50;
constexpr int most_refine_passes = 40;

using Flags = std::vector<unsigned char>;

bool any_of_four(const Flags& flags, std::size_t c) {
    return (flags[c] | flags[c + 1] | flags[c + 2] | flags[c + 3]) != 0;
}

/// Two stages over the same iterates: approach() in plain double, refine() with p(y) as if in twice the precision.
class Iteration {
public:
    explicit Iteration(std::span<const double> coefficients);
    void approach();
    void refine();
    std::vector<EnclosedRoot> enclosed() const;

private:
    bool approach_lanes(std::size_t c);
    void evaluate_lanes(std::size_t c);
    void correct_lanes(std::size_t c);
    bool improve();
    bool wants_move(std::size_t i);
    void move_lanes(std::size_t c, const bool* moves);
    bool same_place(std::size_t i, std::size_t j) const;
    Lanes same_place_lanes(std::size_t c, std::size_t j, Lanes square) const;
    bool has_earlier_twin(std::size_t i) const;
    void separate(std::size_t i);
    void cover_groups(std::vector<EnclosedRoot>& roots) const;

    ScaledIterates y_;
    double n_;
    Flags active_, fresh_;
    std::vector<double> value_re_, value_im_, noise_;  // p(y_i), and a bound on its error
    std::vector<double> correction_re_, correction_im_, last_correction_, parted_;  // parted_: see separate()
    std::vector<double> radius_, nearest_, places_;  // nearest_: squared; places_: roots at this very place
};

Iteration::Iteration(std::span<const double> coefficients) : y_(coefficients), n_(static_cast<double>(y_.degree())) {
    active_.resize(y_.lanes());
    fresh_.resize(y_.lanes());
    for (auto* row : {&value_re_, &value_im_, &noise_, &correction_re_, &correction_im_, &last_correction_, &parted_,
                      &radius_, &nearest_, &places_})
        row->resize(y_.lanes());
}

// One step of Aberth's iteration, y -= p / (p' - p sum 1 / (y - y_j)), on four roots; true if one still moves.
bool Iteration::approach_lanes(std::size_t c) {
    const Lanes zero(0.0);
    const ComplexLanes y = y_.at(c);
    const Lanes size = y_.moduli(c);
    ComplexLanes p{y_.coefficients(y_.degree(), c), zero}, slope{zero, zero}, others{zero, zero};
    Lanes bound = magnitude(p.re);
    for (std::size_t k = y_.degree(); k-- > 0;) {
        const Lanes a = y_.coefficients(k, c);
        slope = slope * y + p;
        p = p * y;
        p.re = p.re + a;
        bound = bound * size + magnitude(a);
    }
    for (std::size_t j = 0; j < y_.degree(); ++j) {
        const ComplexLanes d = y_.differences(c, j);
        const Lanes square = squared(d);
        const Lanes inverse = y_.own_lanes(c, j) / (square + at_most(square, zero));
        others = others + ComplexLanes{d.re * inverse, zero - d.im * inverse};
    }
    const ComplexLanes step = p / (slope - p * others);
    const Lanes noise = Lanes(8.0 * n_ * unit_roundoff) * bound;
    // Cubic convergence: after a step this small, also against the distance of the others, refine() needs one more.
    const Lanes close = at_most(squared(step) * squared(others), Lanes(0x1p-16)) *
                        at_most(squared(step), Lanes(0x1p-24) * squared(y));
    double in_noise[Lanes::count], is_close[Lanes::count], step_re[Lanes::count], step_im[Lanes::count];
    at_most(squared(p), noise * noise).store(in_noise);
    close.store(is_close);
    step.store(step_re, step_im);
    bool moving = false;
    for (std::size_t l = 0; l < Lanes::count; ++l) {
        if (!active_[c + l]) continue;
        if (in_noise[l] == 0.0) y_.move(c + l, step_re[l], step_im[l]);
        active_[c + l] = in_noise[l] + is_close[l] == 0.0;
        moving = moving || active_[c + l];
    }
    return moving;
}

void Iteration::approach() {
    std::fill_n(active_.begin(), y_.degree(), static_cast<unsigned char>(1));
    bool moving = true;
    for (int pass = 0; moving && pass < most_approach_passes; ++pass) {
        moving = false;
        for (std::size_t c = 0; c < y_.lanes(); c += Lanes::count)
            if (any_of_four(active_, c)) moving = approach_lanes(c) || moving;
        y_.keep_in_scale();
    }
}

// The polynomial at four roots, and a bound on what rounding has left in it.
void Iteration::evaluate_lanes(std::size_t c) {
    const ComplexLanes y = y_.at(c);
    const Lanes size = y_.moduli(c);
    const Lanes zero(0.0);
    const auto y_re = halves(y.re), y_im = halves(y.im);
    CompensatedComplex<Lanes> h{y_.coefficients(y_.degree(), c), zero, zero, zero, zero};
    for (std::size_t k = y_.degree(); k-- > 0;) multiply_add(h, y_re, y_im, size, y_.coefficients(k, c));
    const ComplexLanes p{h.re + h.re_error, h.im + h.im_error};
    p.store(&value_re_[c], &value_im_[c]);
    const Lanes last_rounding = Lanes(unit_roundoff) * (magnitude(p.re) + magnitude(p.im));
    const Lanes underflow(0x1p-590);  // at most, here and in scaling
    (Lanes(4.0 * (n_ + 1.0) * unit_roundoff) * h.error_size + last_rounding + underflow).store(&noise_[c]);
}

// Whether x_i and x_j are one place, closer than a double tells apart; written so that both see it alike.
bool Iteration::same_place(std::size_t i, std::size_t j) const {
    const double own = y_.own(i, j), other = y_.other(i, j);
    const double re = own * y_.re(i) - other * y_.re(j), im = own * y_.im(i) - other * y_.im(j);
    const double size_j = std::abs(y_.re(j)) + std::abs(y_.im(j));
    const double size = own * (std::abs(y_.re(i)) + std::abs(y_.im(i))) + other * size_j;
    return re * re + im * im <= hair * hair * (size * size);
}

// The same for four, given the squares of their differences: 1 or 0.
Lanes Iteration::same_place_lanes(std::size_t c, std::size_t j, Lanes square) const {
    const ComplexLanes y = y_.at(c);
    const Lanes size_j(std::abs(y_.re(j)) + std::abs(y_.im(j)));
    const Lanes size = y_.own_lanes(c, j) * (magnitude(y.re) + magnitude(y.im)) + y_.other_lanes(c, j) * size_j;
    return at_most(square, Lanes(hair * hair) * (size * size));
}

// Weierstrass corrections p(y_i) / (a_n prod (y_i - y_j)). n times their moduli, with the error of p, are the
// radii of disks that hold all roots, and each group of touching disks holds as many as it has disks.
void Iteration::correct_lanes(std::size_t c) {
    ComplexLanes product{y_.lead(c), Lanes(0.0)};
    Lanes places(0.0), nearest(1e300);
    for (std::size_t j = 0; j < y_.degree(); ++j) {
        const ComplexLanes d = y_.differences(c, j);
        const Lanes square = squared(d);
        const Lanes same = same_place_lanes(c, j, square);
        places = places + same;
        nearest = smaller(nearest, square + same * Lanes(1e300));
        product = product * ComplexLanes{d.re + same, d.im};
    }
    (ComplexLanes::load(&value_re_[c], &value_im_[c]) / product).store(&correction_re_[c], &correction_im_[c]);
    places.store(&places_[c]);
    nearest.store(&nearest_[c]);
    double square[Lanes::count];
    squared(product).store(square);
    const double factor = n_ * (1.0 + 16.0 * n_ * unit_roundoff);  // with the rounding of the product
    for (std::size_t l = 0; l < Lanes::count; ++l) {
        const std::size_t i = c + l;
        const double p = length(value_re_[i], value_im_[i]) + noise_[i];
        const bool in_range = square[l] > 1e-280 && square[l] < 1e280;
        radius_[i] = in_range ? factor * p / std::sqrt(square[l]) : infinity;
    }
}

bool Iteration::has_earlier_twin(std::size_t i) const {
    for (std::size_t j = 0; j < i; ++j)
        if (same_place(i, j)) return true;
    return false;
}

// Two roots at one place would each hide the other from the correction: part them by about what the error of p
// allows. If the next correction leads back, it is a multiple root, and they stay parted.
void Iteration::separate(std::size_t i) {
    const double y = y_.modulus(i);
    parted_[i] = y * std::clamp(std::pow(radius_[i] / y, 1.0 / places_[i]), 8.0 * unit_roundoff, 0x1p-8);
    y_.move(i, -parted_[i], 0.0);
}

bool Iteration::wants_move(std::size_t i) {
    const double size = length(correction_re_[i], correction_im_[i]);
    const bool stalled = size >= 0.5 * last_correction_[i];
    last_correction_[i] = size;
    if (size <= 1.5 * unit_roundoff * y_.modulus(i)) return false;
    const bool in_noise = length(value_re_[i], value_im_[i]) <= 16.0 * noise_[i];
    if (size <= 4.0 * parted_[i] || (stalled && in_noise)) active_[i] = 0;
    parted_[i] = 0.0;
    return active_[i] != 0;
}

// The corrections w with what they do to each other, y -= w / (1 + sum w_j / (y - y_j)): cubic convergence
// without a derivative (W. Boersch-Supan, Numer. Math. 5, 1963).
void Iteration::move_lanes(std::size_t c, const bool* moves) {
    const Lanes zero(0.0);
    ComplexLanes sum{Lanes(1.0), zero};
    for (std::size_t j = 0; j < y_.degree(); ++j) {
        const ComplexLanes d = y_.differences(c, j);
        const Lanes square = squared(d);
        const Lanes inverse = y_.other_lanes(c, j) / (square + at_most(square, zero));
        sum = sum + ComplexLanes{Lanes(correction_re_[j]), Lanes(correction_im_[j])} *
                        ComplexLanes{d.re * inverse, zero - d.im * inverse};
    }
    double step_re[Lanes::count], step_im[Lanes::count];
    (ComplexLanes::load(&correction_re_[c], &correction_im_[c]) / sum).store(step_re, step_im);
    for (std::size_t l = 0; l < Lanes::count; ++l)
        if (moves[l]) y_.move(c + l, step_re[l], step_im[l]);
}

// Moves what can be bettered, and notes it as fresh; true if anything moved.
bool Iteration::improve() {
    bool any = false;
    for (std::size_t c = 0; c < y_.lanes(); c += Lanes::count) {
        bool moves[Lanes::count] = {};
        bool corrected = false;
        for (std::size_t i = c; i < std::min(c + Lanes::count, y_.degree()); ++i) {
            const bool twin = places_[i] > 1.0;
            fresh_[i] = twin ? has_earlier_twin(i) : wants_move(i);
            if (twin && fresh_[i]) separate(i);
            moves[i - c] = !twin && fresh_[i];
            corrected = corrected || moves[i - c];
            any = any || fresh_[i];
        }
        if (corrected) move_lanes(c, moves);
    }
    return any;
}

// Ends right after an evaluation, so that the radii belong to the roots.
void Iteration::refine() {
    std::fill_n(active_.begin(), y_.degree(), static_cast<unsigned char>(1));
    fresh_ = active_;
    std::fill(last_correction_.begin(), last_correction_.end(), infinity);
    for (int pass = 0;; ++pass) {
        for (std::size_t c = 0; c < y_.lanes(); c += Lanes::count)
            if (any_of_four(fresh_, c)) evaluate_lanes(c);
        for (std::size_t c = 0; c < y_.lanes(); c += Lanes::count) correct_lanes(c);
        if (pass == most_refine_passes || !improve()) break;
        if (y_.keep_in_scale()) std::fill_n(fresh_.begin(), y_.degree(), static_cast<unsigned char>(1));
    }
    for (std::size_t i = 0; i < y_.degree(); ++i)
        if (places_[i] > 1.0) radius_[i] = infinity;
}

// Disks that touch hold their roots together: each then gets a radius that reaches over its whole group.
void Iteration::cover_groups(std::vector<EnclosedRoot>& roots) const {
    std::vector<std::size_t> group(y_.degree());
    for (std::size_t i = 0; i < group.size(); ++i) group[i] = i;
    for (std::size_t i = 0; i < group.size(); ++i)
        for (std::size_t j = 0; j < i; ++j) {
            const std::size_t from = group[i], to = group[j];
            const double reach = y_.own(i, j) * radius_[i] + y_.other(i, j) * radius_[j];
            if (from != to && !(y_.distance(i, j) > reach)) std::replace(group.begin(), group.end(), from, to);
        }
    for (std::size_t i = 0; i < group.size(); ++i)
        for (std::size_t j = 0; j < group.size(); ++j) {
            if (j == i || group[i] != group[j]) continue;
            const double reach = (y_.distance(i, j) + y_.other(i, j) * radius_[j]) / y_.own(i, j);
            roots[i].radius = std::max(roots[i].radius, reach);
        }
}

// Where every disk holds one root, p(y_i) = a_n prod (y_i - root_j) bounds it better than the disk: by the
// correction itself, with each difference shortened by at most the share of it that the other radius takes.
std::vector<EnclosedRoot> Iteration::enclosed() const {
    std::vector<EnclosedRoot> roots(y_.degree());
    double shares = 0.0;
    for (std::size_t i = 0; i < roots.size(); ++i) {
        roots[i] = {{y_.re(i), y_.im(i)}, radius_[i], y_.scale(i)};
        shares += radius_[i] / std::sqrt(nearest_[i]);
    }
    if (shares < 0.25) {
        for (EnclosedRoot& root : roots) root.radius /= n_ * (1.0 - shares);
    } else {
        cover_groups(roots);
    }
    return roots;
}

}  // namespace

std::vector<EnclosedRoot> simultaneous_roots(std::span<const double> coefficients_lowest_first) {
    Iteration iteration(coefficients_lowest_first);
    iteration.approach();
    iteration.refine();
    return iteration.enclosed();
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
