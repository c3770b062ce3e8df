#include "assess/member_trials.hpp"

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

}  // namespace

double figure_of(Aim aim, const Robustness& r) noexcept {
    switch (aim) {
        case Aim::nearness: return -std::log(r.max_sensitivity.value_or(1.0));
        case Aim::gain_margin: return std::log(r.gain_margin.value_or(infinity));
        case Aim::phase_margin: return r.phase_margin_deg.value_or(infinity) * (pi / 180.0);
        case Aim::delay_margin: return r.delay_margin.value_or(infinity);
    }
    return infinity;
}

double frequency_of(Aim aim, const Robustness& r) noexcept {
    if (aim == Aim::nearness) return r.max_sensitivity_frequency.value_or(0.0);
    double best = infinity, frequency = 0.0;
    const auto take = [&](double figure, double w) {
        if (figure < best) best = figure, frequency = w;
    };
    if (aim == Aim::gain_margin)
        for (const auto& c : r.phase_crossovers) take(c.gain_factor > 1.0 ? c.gain_factor : infinity, c.frequency_rad_s);
    else
        for (const auto& c : r.gain_crossovers)
            take(aim == Aim::phase_margin ? c.phase_margin_deg : c.delay_margin, c.frequency_rad_s);
    return frequency;
}

MemberTrials::MemberTrials(LoopFamily& family, const PidSettings& settings, double extra_delay)
    : family_(family), set_(family.set()), settings_(settings), extra_delay_(extra_delay) {}

bool MemberTrials::analyze(const std::vector<double>& z) {
    if (failed_) return false;
    for (const Trial& t : trials_)
        if (t.z == z) return true;
    Robustness r = robustness(set_.member(z.data()), settings_, {.scan_time = {}, .extra_delay = extra_delay_});
    if (r.verdict != Verdict::stable) {
        failed_ = z;
        failed_verdict_ = r.verdict;
        return false;
    }
    trials_.push_back({z, std::move(r)});
    for (Aim aim : every_aim)
        if (figure_of(aim, trials_.back().found) < figure_of(aim, worst(aim))) worst_[index(aim)] = trials_.size() - 1;
    return true;
}

bool MemberTrials::climb(Aim aim) {
    for (int i = 0; i < 8; ++i) {
        const double before = figure_of(aim, worst(aim));
        const auto next = pointed_to(aim);
        if (!next) break;
        if (!analyze(*next)) return false;
        if (!(figure_of(aim, worst(aim)) < before)) break;
    }
    return true;
}

// Along the slopes of the figure at the worst member, all the way to the edge of the set.
std::optional<std::vector<double>> MemberTrials::pointed_to(Aim aim) {
    const double w = frequency_of(aim, worst(aim));
    const std::vector<double>& z = worst_z(aim);
    if (!(w > 0.0) || !is_finite(w)) return aim == Aim::nearness ? std::optional(extreme(z, w > 0.0)) : std::nullopt;
    FamilyBox point;
    point.center.push_back(family_.first_of(std::log(w), z.data()));
    point.center.insert(point.center.end(), z.begin(), z.end());
    point.half.assign(point.center.size(), 0.0);
    family_.enclose(point, e_);
    const double size = std::exp(e_.s), u = e_.slope[0].real(), v = e_.slope[0].imag();
    const double ahead = e_.alpha > 0.0 ? e_.alpha : e_.alpha + 2.0 * pi;
    std::vector<double> next = z, slope(z.size());
    double square = 0.0;
    for (std::size_t i = 0; i < z.size(); ++i) {
        const double a = e_.slope[i + 1].real(), b = e_.slope[i + 1].imag(), cross = b * u - v * a;
        double g = 0.0;
        if (aim == Aim::nearness) g = a * (size - std::cos(e_.alpha)) + b * std::sin(e_.alpha);
        if (aim == Aim::gain_margin) g = std::copysign(1.0, v) * cross;
        if (aim == Aim::phase_margin) g = std::copysign(1.0, u) * std::copysign(1.0, e_.alpha) * cross;
        if (aim == Aim::delay_margin) g = std::copysign(1.0, u) * (cross + (a - family_.frequency_slope(i + 1) * u) * ahead);
        slope[i] = g;
        square += g * g;
    }
    for (std::size_t i = 0; i < z.size(); ++i) {
        if (!set_.is_ball() && slope[i] != 0.0) next[i] = slope[i] > 0.0 ? set_.lowest(i) : set_.highest(i);
        if (set_.is_ball() && square > 0.0) next[i] = -slope[i] / std::sqrt(square);
    }
    set_.pull_inside(next.data());
    return next;
}

// With the largest gain at frequency 0 or at infinity.
std::vector<double> MemberTrials::extreme(std::vector<double> z, bool at_infinity) const {
    std::vector<double> slope(z.size(), 0.0);
    double square = 0.0;
    for (std::size_t j = 0; j < set_.size(); ++j) {
        const Parameter& p = set_.parameters()[j];
        double power = p.place == Place::gain ? 1.0 : 0.0;
        if (at_infinity && p.place == Place::lead) power = 1.0;
        if (at_infinity && p.place == Place::lag) power = -1.0;
        if (at_infinity && p.place == Place::lead_time) power = 2.0;
        if (at_infinity && p.place == Place::lag_time) power = -2.0;
        if (power == 0.0) continue;
        if (!set_.is_ball()) z[j] = power > 0.0 ? set_.highest(j) : set_.lowest(j);
        for (std::size_t i = 0; i < set_.size() && set_.is_ball(); ++i) slope[i] += power * set_.axis(j, i) / p.center;
    }
    for (double g : slope) square += g * g;
    for (std::size_t i = 0; i < z.size() && square > 0.0; ++i) z[i] = slope[i] / std::sqrt(square);
    set_.pull_inside(z.data());
    return z;
}

// The figure of one member near a frequency, which moves to where the margin is read; infinite where there is none.
double MemberTrials::figure_at(Aim aim, FamilyBox& point) {
    for (int i = 0; i < 8; ++i) {
        family_.enclose(point, e_);
        if (aim == Aim::nearness) {
            const double size = std::exp(e_.s), c = std::cos(e_.alpha);
            return 0.5 * std::log(std::max(size * (size - 2.0 * c) + 1.0, 1e-300));
        }
        const bool on_axis = aim == Aim::gain_margin;
        const double miss = on_axis ? e_.alpha : e_.s;
        if (std::abs(miss) < 1e-12) {
            if (on_axis) return e_.s < 0.0 ? -e_.s : infinity;
            if (aim == Aim::phase_margin) return std::abs(e_.alpha);
            return (e_.alpha > 0.0 ? e_.alpha : e_.alpha + 2.0 * pi) / e_.frequency;
        }
        const double step = -miss / (on_axis ? e_.slope[0].imag() : e_.slope[0].real());
        if (!(std::abs(step) < 0.5)) break;
        point.center[0] += step;
    }
    return infinity;
}

// Steps along each coordinate, halved where none helps.
void MemberTrials::polish(Aim aim, FamilyPoint& best) {
    FamilyBox point;
    point.center.push_back(family_.first_of(best.log_frequency, best.z.data()));
    point.center.insert(point.center.end(), best.z.begin(), best.z.end());
    point.half.assign(point.center.size(), 0.0);
    const std::size_t n = point.center.size();
    best.figure = figure_at(aim, point);
    double step = 0.1;
    for (int round = 0; round < 200 && step > 1e-9; ++round) {
        bool better = false;
        for (std::size_t i = aim == Aim::nearness ? 0 : 1; i < n; ++i)
            for (double side : {1.0, -1.0}) {
                FamilyBox next = point;
                next.center[i] += side * step * (i == 0 ? 1.0 : set_.highest(i - 1) - set_.lowest(i - 1));
                set_.pull_inside(&next.center[1]);
                const double figure = figure_at(aim, next);
                if (!(figure < best.figure)) continue;
                best.figure = figure;
                point = next;
                better = true;
                break;
            }
        if (!better) step *= 0.5;
    }
    best.z.assign(point.center.begin() + 1, point.center.end());
    best.log_frequency = point.center[0] - family_.first_of(0.0, best.z.data());
}

void MemberTrials::align(MemberSet& set) {
    set.align(worst_z(Aim::nearness));
    for (Trial& t : trials_) t.z = set.reflect(std::move(t.z));
}

bool MemberTrials::refine(Aim aim) {
    const auto next = pointed_to(aim);
    double apart = 0.0;
    if (next)
        for (std::size_t i = 0; i < next->size(); ++i) {
            const double width = set_.highest(i) - set_.lowest(i);
            apart = std::max(apart, std::abs((*next)[i] - worst_z(aim)[i]) / width);
        }
    const double w = frequency_of(aim, worst(aim));
    if (apart < 1e-6 || !(w > 0.0) || !is_finite(w)) return true;
    FamilyPoint point{figure_of(aim, worst(aim)), std::log(w), worst_z(aim)};
    const double before = point.figure;
    polish(aim, point);
    return !(point.figure < before) || analyze(point.z);
}

bool MemberTrials::follow(FamilyPoint& point) {
    polish(Aim::nearness, point);
    if (!analyze(point.z)) return false;
    if (point.figure > -4.6 || ++neighborhoods_ > 4) return true;
    // |1 + L| < 0.01 here: members on the other side of -1 are not stable.
    const std::vector<double> at = point.z;
    for (double share : {1e-6, 1e-4, 1e-2, 0.1})
        for (std::size_t i = 0; i < at.size(); ++i)
            for (double side : {1.0, -1.0}) {
                std::vector<double> z = at;
                z[i] += side * share * (set_.highest(i) - set_.lowest(i));
                set_.pull_inside(z.data());
                if (!analyze(z)) return false;
            }
    return true;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
