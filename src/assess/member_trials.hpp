// Members of a set that were analyzed one by one, and where to look for worse ones.
#pragma once

#include <array>
#include <cstddef>
#include <optional>
#include <vector>

#include "assess/family_search.hpp"
#include "tauwright/assess/robustness.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

constexpr std::array<Aim, 4> every_aim = {Aim::nearness, Aim::gain_margin, Aim::phase_margin, Aim::delay_margin};

/// What an aim makes small, of an analyzed stable loop.
double figure_of(Aim aim, const Robustness& r) noexcept;
/// Where that figure is read, rad/s; 0 or infinite for limits and where there is none.
double frequency_of(Aim aim, const Robustness& r) noexcept;

class MemberTrials {
public:
    MemberTrials(LoopFamily& family, const PidSettings& settings, double extra_delay);

    /// Analyzes a member unless it was before. False where it is not stable; the trials end with it.
    bool analyze(const std::vector<double>& z);
    /// Steps to the member where the slopes point, as long as the figure gets worse.
    bool climb(Aim aim);
    /// Walks from a point to a lower |1 + L| nearby, analyzes the member there, and where it is close to the edge
    /// of stability its neighbors too. False where one is not stable.
    bool follow(FamilyPoint& point);
    /// The last digits of a worst member that lies inside the set; does nothing where the slopes say it cannot get worse.
    bool refine(Aim aim);

    /// Puts the first coordinate of a ball through the member with the largest Ms; `set` is the family's.
    void align(MemberSet& set);

    /// The worst stable member for an aim.
    const Robustness& worst(Aim aim) const noexcept { return trials_[worst_[index(aim)]].found; }
    const std::vector<double>& worst_z(Aim aim) const noexcept { return trials_[worst_[index(aim)]].z; }
    /// The member that ended the trials, and its verdict.
    const std::optional<std::vector<double>>& failed() const noexcept { return failed_; }
    Verdict failed_verdict() const noexcept { return failed_verdict_; }
    std::size_t count() const noexcept { return trials_.size() + (failed_ ? 1u : 0u); }

private:
    struct Trial {
        std::vector<double> z;
        Robustness found;
    };
    static std::size_t index(Aim aim) noexcept { return static_cast<std::size_t>(aim); }
    std::optional<std::vector<double>> pointed_to(Aim aim);
    std::vector<double> extreme(std::vector<double> z, bool at_infinity) const;
    double figure_at(Aim aim, FamilyBox& point);
    void polish(Aim aim, FamilyPoint& point);

    LoopFamily& family_;
    const MemberSet& set_;
    const PidSettings& settings_;
    double extra_delay_;
    std::vector<Trial> trials_;
    std::array<std::size_t, 4> worst_ = {};
    std::optional<std::vector<double>> failed_;
    Verdict failed_verdict_ = Verdict::undetermined;
    int neighborhoods_ = 0;
    Enclosure e_;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
