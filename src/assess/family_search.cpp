#include "assess/family_search.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <utility>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double turn = 2.0 * std::numbers::pi;
constexpr double log_largest_gain_margin = 6.907755278982137;  // 1000: beyond it no digits are proved

}  // namespace

FamilySearch::FamilySearch(LoopFamily& family, Aim aim, SearchLimits limits)
    : family_(family), set_(family.set()), aim_(aim), limits_(std::move(limits)) {
    const std::size_t n = set_.size() + 1;
    box_.center.resize(n);
    box_.half.resize(n);
    point_ = box_;
    s_.resize(n);
    a_.resize(n);
    form_.resize(n);
    gradient_.resize(n);
}

// Boxes whose bound reaches this hold nothing of interest.
double FamilySearch::wanted() const noexcept {
    const double best = best_->figure;
    if (aim_ == Aim::nearness) return best - limits_.tolerance;
    if (aim_ == Aim::gain_margin) return std::min(best - limits_.tolerance * std::min(1.0, best), log_largest_gain_margin);
    return best * (1.0 - limits_.tolerance);
}

void FamilySearch::run(FamilyPoint& best) {
    best_ = &best;
    told_ = best.figure;
    const double start = std::exp(best.log_frequency);
    double low = start / 8.0, high = start * 4.0;
    if (!close_end(true, low) || !close_end(false, high)) {
        complete_ = false;
        bound_ = aim_ == Aim::nearness ? -infinity : 0.0;
        return;
    }
    const double from = family_.lowest_first(std::log(low)), range = family_.highest_first(std::log(high)) - from;
    const auto pieces = static_cast<std::size_t>(std::ceil(2.0 * range));
    FamilyBox box = box_;
    const std::size_t n = set_.size(), stride = 2 * (n + 1) + 1;
    for (std::size_t k = 0; k < pieces && complete_; ++k) {
        share_ = static_cast<double>(k) / static_cast<double>(pieces);
        const double width = range / static_cast<double>(pieces);
        box.half[0] = 0.5 * width;
        box.center[0] = from + (static_cast<double>(k) + 0.5) * width;
        for (std::size_t i = 0; i < n; ++i) {
            box.center[i + 1] = 0.5 * (set_.lowest(i) + set_.highest(i));
            box.half[i + 1] = 0.5 * (set_.highest(i) - set_.lowest(i)) * (1.0 + 1e-15);
        }
        take(box, -infinity);
        while (!stack_.empty()) {
            const double known = stack_[stack_.size() - stride];
            if (!complete_) {  // what is left keeps the bound it had
                bound_ = std::min(bound_, known);
                stack_.resize(stack_.size() - stride);
                continue;
            }
            const auto first = stack_.end() - static_cast<std::ptrdiff_t>(stride - 1);
            std::copy(first, first + static_cast<std::ptrdiff_t>(n + 1), box.center.begin());
            std::copy(first + static_cast<std::ptrdiff_t>(n + 1), stack_.end(), box.half.begin());
            stack_.resize(stack_.size() - stride);
            take(box, known);
        }
    }
    if (!complete_ && share_ + 1.0 / static_cast<double>(pieces) < 1.0 - 1e-9)
        bound_ = aim_ == Aim::nearness ? -infinity : 0.0;  // frequencies not looked at
    bound_ = std::min(bound_, best.figure);
}

// Moves an end outward until nothing beyond it is worse than the best known.
bool FamilySearch::close_end(bool low_end, double& w) {
    for (int i = 0; i < 200; ++i) {
        const Rectangle r = low_end ? family_.below(w) : family_.above(w);
        const double figure = figure_of(r, low_end ? w : infinity);
        if (figure >= wanted()) {
            bound_ = std::min(bound_, figure);
            return true;
        }
        w *= low_end ? 0.25 : 2.0;
        if (!(w > 1e-250) || !(w < 1e250)) break;
    }
    return false;
}

void FamilySearch::take(FamilyBox& box, double known) {
    for (int pass = 0;; ++pass) {
        if (++boxes_ > limits_.most_boxes || (boxes_ % 256 == 0 && !may_go_on(share_))) {
            complete_ = false;
            bound_ = std::min(bound_, std::max(known, aim_ == Aim::nearness ? -infinity : 0.0));
            return;
        }
        if (set_.is_ball() && !shrink_to_ball(box)) return;
        box_ = box;
        family_.enclose(box_, e_);
        const double figure = std::max(known, enclosed_bound());
        if (figure >= wanted()) {
            bound_ = std::min(bound_, figure);
            return;
        }
        known = figure;
        bool shrunk = false;
        if (gradient() ? no_worst_inside(box, shrunk) : no_worst_at_fold(box)) return;
        if (!shrunk || pass > 20) break;
    }
    // Corners found before are mostly the worst members: looking for others pays where the proof is long.
    if (boxes_ > 48) try_center(box);
    if (stopped_) {
        complete_ = false;
        bound_ = std::min(bound_, known);
        return;
    }
    if (known >= wanted()) bound_ = std::min(bound_, known);
    else split(box, known);
}

// Looks at the member in the middle, at the frequency that the figure asks for.
void FamilySearch::try_center(const FamilyBox& box) {
    point_.center = box.center;
    set_.pull_inside(&point_.center[1]);
    for (int i = 0; i < 6; ++i) {
        family_.enclose(point_, at_point_);
        const double s = at_point_.s, alpha = at_point_.alpha, log_frequency = std::log(at_point_.frequency);
        if (aim_ == Aim::nearness) {
            const double size = std::exp(s), c = std::cos(alpha);
            offer(0.5 * std::log(size * (size - 2.0 * c) + 1.0), log_frequency, &point_.center[1]);
            return;
        }
        const bool on_axis = aim_ == Aim::gain_margin;
        const double miss = on_axis ? alpha : s, slope = on_axis ? at_point_.slope[0].imag() : at_point_.slope[0].real();
        if (std::abs(miss) < 1e-11) {
            const double ahead = alpha > 0.0 ? alpha : alpha + turn;
            if (on_axis && s < 0.0) offer(-s, log_frequency, &point_.center[1]);
            if (aim_ == Aim::phase_margin) offer(std::abs(alpha), log_frequency, &point_.center[1]);
            if (aim_ == Aim::delay_margin) offer(ahead / at_point_.frequency, log_frequency, &point_.center[1]);
            return;
        }
        const double step = -miss / slope;
        if (!(std::abs(step) < 1.0)) return;
        point_.center[0] += step;
    }
}

void FamilySearch::offer(double figure, double log_frequency, const double* z) {
    if (!(figure < best_->figure)) return;
    best_->figure = figure;
    best_->log_frequency = log_frequency;
    best_->z.assign(z, z + set_.size());
    if (aim_ == Aim::nearness && limits_.closer && figure < told_ - 0.7) {
        stopped_ = !limits_.closer(*best_);
        told_ = best_->figure;
    }
}

void FamilySearch::split(const FamilyBox& box, double bound) {
    std::size_t widest = 0;
    double most_turned = -1.0;
    for (std::size_t i = 0; i < box.half.size(); ++i) {
        if (box.half[i] == 0.0) continue;
        const double turned = (std::abs(e_.slope[i].real()) + std::abs(e_.slope[i].imag()) + e_.slope_radius[i]) * box.half[i];
        if (turned > most_turned) most_turned = turned, widest = i;
    }
    const double half = 0.5 * box.half[widest];
    if (most_turned < 0.0 || box.center[widest] + half == box.center[widest] - half || most_turned < 1e-13) {
        bound_ = std::min(bound_, bound);
        complete_ = false;
        return;
    }
    for (double side : {1.0, -1.0}) {
        stack_.push_back(bound);
        const std::size_t at = stack_.size();
        stack_.insert(stack_.end(), box.center.begin(), box.center.end());
        stack_.insert(stack_.end(), box.half.begin(), box.half.end());
        stack_[at + widest] += side * half;
        stack_[at + box.center.size() + widest] = half * (1.0 + 1e-14);
    }
}

bool FamilySearch::may_go_on(double share) {
    if (!limits_.go_on || limits_.go_on(share)) return true;
    cancelled_ = true;
    return false;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
