// Branch and bound over frequency and members for one figure of the loop.
#pragma once

#include <cmath>
#include <cstddef>
#include <functional>
#include <limits>
#include <numbers>
#include <vector>

#include "assess/loop_family.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Does the range hold a whole multiple of a turn?
inline bool holds_turn(double low, double high) noexcept {
    constexpr double turn = 2.0 * std::numbers::pi;
    return std::floor(high / turn) * turn >= low;
}

/// What is made as small as it can be: log |1 + L|; -log |L| below 1 on the negative axis; the angle
/// from -1 where |L| is 1; the dead time that turns L to -1 there. Margins need |1 + L| > 0 on the set.
enum class Aim { nearness, gain_margin, phase_margin, delay_margin };

/// A member and the frequency of interest.
struct FamilyPoint {
    double figure = std::numeric_limits<double>::infinity();
    double log_frequency = 0.0;
    std::vector<double> z;
};

struct SearchLimits {
    double tolerance = 1e-3;        ///< boxes within this of the best are left: absolute for logarithms, else relative
    std::size_t most_boxes = 0;
    std::function<bool(double)> go_on;  ///< given the share of frequencies done; may be empty
    /// Told of a point that comes much closer than all before; false ends the search.
    std::function<bool(FamilyPoint&)> closer;
};

class FamilySearch {
public:
    FamilySearch(LoopFamily& family, Aim aim, SearchLimits limits);

    /// From the best point known. Improves it.
    void run(FamilyPoint& best);
    /// No member's figure is below this; negative infinity or 0 where nothing is proved.
    double bound() const noexcept { return bound_; }
    bool complete() const noexcept { return complete_; }
    bool cancelled() const noexcept { return cancelled_; }
    std::size_t boxes() const noexcept { return boxes_; }

private:
    struct Interval {
        double low, high;
    };
    double wanted() const noexcept;
    double nearness_of(const Rectangle& r) const noexcept;
    double figure_of(const Rectangle& r, double w_high) const noexcept;
    bool close_end(bool low_end, double& w);
    void take(FamilyBox& box, double known);
    double enclosed_bound() noexcept;
    void narrow_to_ball() noexcept;
    bool kept_away() noexcept;
    Rectangle conditioned(const Rectangle& r);
    double most(const std::vector<double>& form) const noexcept;
    double dual(double own_share, double middle, double sign);
    bool delay_kept(const Rectangle& r);
    Interval part(std::size_t i, bool imaginary) const noexcept;
    bool gradient();
    void sharpen(Interval x, Interval y) noexcept;
    bool no_worst_at_fold(const FamilyBox& box) const noexcept;
    bool no_worst_inside(FamilyBox& box, bool& shrunk) noexcept;
    bool no_worst_in_ball(FamilyBox& box, bool& shrunk) const noexcept;
    bool shrink_to_ball(FamilyBox& box) const noexcept;
    double least_dead_time(const FamilyBox& box) const noexcept;
    void try_center(const FamilyBox& box);
    void offer(double figure, double log_frequency, const double* z);
    void split(const FamilyBox& box, double bound);
    bool may_go_on(double share);

    LoopFamily& family_;
    const MemberSet& set_;
    Aim aim_;
    SearchLimits limits_;
    FamilyPoint* best_ = nullptr;
    double bound_ = std::numeric_limits<double>::infinity(), told_ = std::numeric_limits<double>::infinity();
    bool complete_ = true, cancelled_ = false, stopped_ = false;
    std::size_t boxes_ = 0;
    double share_ = 0.0;

    FamilyBox box_, point_;
    Enclosure e_, at_point_;
    Rectangle whole_;                   // of the box at hand
    std::vector<double> s_, a_, form_;  // changes of s and alpha over half widths
    std::vector<Interval> gradient_;    // proportional to the figure's slopes, entry 0 the frequency's
    std::vector<double> stack_;         // boxes: bound, center, half
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
