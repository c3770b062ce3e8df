#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

#include "tauwright/assess/simulate.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

// What the figures look at; `n` samples, the load from `load_start` on (infinite without one).
struct View {
    const Trend& trend;
    std::size_t n;
    double step, load_start;
    const std::vector<double>& moved;  // valve position, or output

    double error(std::size_t k) const noexcept { return trend.setpoint[k] - trend.process_value[k]; }
};

double start_of_load(const Duty& duty, double scan_time) noexcept {
    if (duty.load_step != 0.0) return duty.load_time;
    for (std::size_t i = 0; i < duty.disturbance.size(); ++i)
        if (duty.disturbance[i] != 0.0) return static_cast<double>(i) * scan_time;
    return std::numeric_limits<double>::infinity();
}

void add_integrals(Figures& f, const View& view, double h) noexcept {
    const double from = view.step != 0.0 || view.load_start > view.trend.time_s[view.n - 1] ? 0.0 : view.load_start;
    double previous = view.trend.duty.resting_output();
    std::size_t at_limit = 0;
    for (std::size_t k = 0; k < view.n; ++k) {
        const double error = view.error(k), size = std::abs(error);
        const double share = k == 0 || k + 1 == view.n ? 0.5 * h : h;  // trapezoids
        f.integrated_absolute_error += size * share;
        f.integrated_error += error * share;
        f.integrated_squared_error += error * error * share;
        f.integrated_time_absolute_error += std::max(view.trend.time_s[k] - from, 0.0) * size * share;
        f.valve_travel += std::abs(view.moved[k] - previous);
        previous = view.moved[k];
        const double output = view.trend.output[k];
        // An output is held until the next scan.
        at_limit += k + 1 < view.n && (output <= view.trend.duty.output_low || output >= view.trend.duty.output_high);
    }
    f.time_at_limits = static_cast<double>(at_limit) * h;
}

// Turns of a path by more than `least`, counted from its last extreme.
std::size_t turns(const std::vector<double>& path, std::size_t n, double start, double least) noexcept {
    std::size_t count = 0;
    double extreme = start, direction = 0.0;
    for (std::size_t k = 0; k < n; ++k) {
        const double move = path[k] - extreme;
        if (direction * move > 0.0) extreme = path[k];
        else if (std::abs(move) > least) {
            count += direction != 0.0;
            direction = move > 0.0 ? 1.0 : -1.0;
            extreme = path[k];
        }
    }
    return count;
}

// Second peak above 0 of `height` over its first. Peaks and crossings within `least` of 0 do not count, and a peak
// counts only once it is passed.
template <class Height>
std::optional<double> ratio_of_peaks(std::size_t first, std::size_t last, double least, Height height) noexcept {
    double peaks[2] = {};
    std::size_t count = 0, highest_at = 0;
    bool above = false;
    for (std::size_t k = first; k < last; ++k) {
        const double x = height(k);
        if (std::abs(x) <= least) continue;
        if (x < 0.0) {
            above = false;
            continue;
        }
        if (!above && count == 2) break;
        if (!above) ++count;
        above = true;
        if (x > peaks[count - 1]) peaks[count - 1] = x, highest_at = k;
    }
    if (count < 2 || highest_at + 1 >= last) return std::nullopt;
    return peaks[1] / peaks[0];
}

// When the set-point step has been made to this share for the first time, straight between scans.
std::optional<double> time_of_share(const View& view, std::size_t last, double share) noexcept {
    const double start = view.trend.duty.resting_process_value();
    double before = 0.0;
    for (std::size_t k = 0; k < last; ++k) {
        const double made = (view.trend.process_value[k] - start) / view.step;
        if (made >= share) {
            if (k == 0) return view.trend.time_s[0];
            const double h = view.trend.time_s[k] - view.trend.time_s[k - 1];
            return view.trend.time_s[k - 1] + h * (share - before) / (made - before);
        }
        before = made;
    }
    return std::nullopt;
}

void add_setpoint_figures(Figures& f, const View& view) noexcept {
    const double final_value = view.trend.duty.resting_process_value() + view.step;
    // A load later on is another story than the set-point step.
    const bool load_follows = view.load_start > 0.0;
    double highest = 0.0;
    std::size_t outside = 0, followed = 0;  // one past the last sample outside the band; samples looked at
    for (std::size_t k = 0; k < view.n && !(load_follows && view.trend.time_s[k] > view.load_start); ++k) {
        const double error = final_value - view.trend.process_value[k];
        followed = k + 1;
        highest = std::max(highest, -error / view.step);
        if (std::abs(error) > 0.02 * std::abs(view.step)) outside = k + 1;
    }
    f.overshoot_percent = 100.0 * highest;
    if (outside < followed) f.settling_time = view.trend.time_s[outside];
    if (const auto late = time_of_share(view, followed, 0.9)) f.rise_time = *late - *time_of_share(view, followed, 0.1);
    const double sign = view.step > 0.0 ? 1.0 : -1.0;
    f.decay_ratio = ratio_of_peaks(0, followed, 1e-3 * std::abs(view.step), [&](std::size_t k) {
        return sign * (view.trend.process_value[k] - final_value);
    });
}

void add_load_figures(Figures& f, const View& view) noexcept {
    std::size_t first = view.n;
    for (std::size_t k = view.n; k-- > 0 && view.trend.time_s[k] >= view.load_start;) first = k;
    if (first == view.n) return;
    std::size_t peak_at = first;
    for (std::size_t k = first; k < view.n; ++k)
        if (std::abs(view.error(k)) > std::abs(view.error(peak_at))) peak_at = k;
    const double peak = std::abs(view.error(peak_at)), least = 1e-3 * peak;
    f.peak_load_error = peak;
    f.peak_load_error_time = view.trend.time_s[peak_at] - view.load_start;
    if (view.step != 0.0) return;
    std::size_t out = first;
    while (out < view.n && !(std::abs(view.error(out)) > least)) ++out;
    if (out == view.n) return;
    const double sign = view.error(out) > 0.0 ? 1.0 : -1.0;
    f.decay_ratio = ratio_of_peaks(out, view.n, least, [&](std::size_t k) { return sign * view.error(k); });
}

}  // namespace

Figures figures(const Trend& trend) {
    Figures f;
    const bool positions = trend.valve_position.size() >= trend.size();
    const std::vector<double>& moved = positions ? trend.valve_position : trend.output;
    const std::size_t n = std::min({trend.size(), trend.setpoint.size(), trend.process_value.size(), trend.output.size()});
    if (n < 2) return f;
    const Duty& duty = trend.duty;
    const double h = trend.time_s[1] - trend.time_s[0];
    const View view{trend, n, duty.setpoint_step, start_of_load(duty, h), moved};
    add_integrals(f, view, h);
    f.reversals = turns(moved, n, duty.resting_output(), 1e-6 * (duty.output_high - duty.output_low));
    if (view.step != 0.0) add_setpoint_figures(f, view);
    if (is_finite(view.load_start)) add_load_figures(f, view);
    return f;
}

}  // namespace v0
}  // namespace tauwright
