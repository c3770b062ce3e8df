#include "assess/delay_ranges.hpp"

#include <algorithm>
#include <numbers>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double turn = 2.0 * std::numbers::pi;
constexpr std::size_t most_changes = 20'000;

/// The dead times at which one gain crossing lets a pair of poles pass.
struct Passing {
    double next, period;
    int poles;  ///< that go to the right as the dead time grows
};

std::vector<Passing> passings(const LoopCurve& curve, const SweepResult& found, double dead_time) {
    std::vector<Passing> list;
    for (const Crossing& c : found.gain_crossings) {
        if (c.touches) continue;
        const double period = turn / c.w, here = dead_time + std::arg(-curve.value(c.w)) / c.w;
        const int poles = curve.gain_falls(c.w) ? 2 : -2;
        list.push_back({here - std::floor(here / period) * period, period, poles});
    }
    return list;
}

}  // namespace

std::vector<DelayRange> stable_dead_times(const LoopCurve& curve, const SweepResult& found, double dead_time, int unstable_poles) {
    std::vector<Passing> list = passings(curve, found, dead_time);
    double rate = 0.0;
    int count = unstable_poles;  // with no dead time at all
    for (const Passing& p : list) {
        rate += p.poles / p.period;
        if (p.next < dead_time) count -= p.poles * static_cast<int>(std::ceil((dead_time - p.next) / p.period));
    }
    // Beyond `last` the passings to the right have outnumbered those to the left for good.
    double most = 0.0;
    for (const Passing& p : list) most += std::abs(p.poles);
    const double last = rate > 0.0 ? (most + std::abs(count)) / rate : 0.0;
    std::vector<DelayRange> ranges;
    if (list.empty()) {
        if (count == 0) ranges.push_back({0.0, std::numeric_limits<double>::infinity()});
        return ranges;
    }
    // A heap with the soonest passing on top.
    const auto later = [](const Passing& a, const Passing& b) { return a.next > b.next; };
    std::make_heap(list.begin(), list.end(), later);
    double from = 0.0;
    for (std::size_t changes = 0; changes < most_changes && list.front().next <= last; ++changes) {
        std::pop_heap(list.begin(), list.end(), later);
        Passing& soonest = list.back();
        if (count == 0 && soonest.next > from) ranges.push_back({from, soonest.next});
        count += soonest.poles;
        from = soonest.next;
        soonest.next += soonest.period;
        std::push_heap(list.begin(), list.end(), later);
    }
    return ranges;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
