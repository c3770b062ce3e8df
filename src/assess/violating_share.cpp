#include <algorithm>
#include <cmath>

#include "assess/member_set.hpp"
#include "tauwright/assess/worst_case.hpp"
#include "tauwright/run/noise.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using namespace detail;

void check_limits(const ViolationLimits& limits) {
    const auto check_range = [](const char* name, const std::optional<double>& value, double low, double high, const char* remedy) {
        if (!value) return;
        require_finite(name, *value);
        if (!(*value >= low) || !(*value <= high)) refuse(error_code::out_of_domain, name, *value, remedy);
    };
    check_range("limits.max_sensitivity", limits.max_sensitivity, 1.0, 1e300, "give 1 or a number above it");
    check_range("limits.gain_margin", limits.gain_margin, 1.0, 1e300, "give a factor of 1 or more");
    check_range("limits.phase_margin_deg", limits.phase_margin_deg, 0.0, 180.0, "give degrees from 0 to 180");
}

bool violates(const Robustness& r, const ViolationLimits& limits) {
    return r.verdict != Verdict::stable || (limits.max_sensitivity && *r.max_sensitivity > *limits.max_sensitivity) ||
           (limits.gain_margin && *r.gain_margin < *limits.gain_margin) ||
           (limits.phase_margin_deg && *r.phase_margin_deg < *limits.phase_margin_deg);
}

class Draw {
public:
    Draw(const MemberSet& set, std::uint64_t seed) : set_(set), noise_(seed), z_(set.size()), values_(set.size()) {}

    TransferFunction next() {
        const auto& parameters = set_.parameters();
        if (!set_.is_ball()) {
            for (std::size_t j = 0; j < set_.size(); ++j)
                values_[j] = parameters[j].low + uniform() * (parameters[j].high - parameters[j].low);
            return set_.member_of_values(values_.data());
        }
        do {  // evenly over the cube, kept where the region is: 52 % of the cube, less what the cut takes
            for (double& z : z_) z = 2.0 * uniform() - 1.0;
        } while (!set_.contains(z_.data()));
        return set_.member(z_.data());
    }

private:
    // The part behind the point of a sum of even numbers is even itself.
    double uniform() noexcept {
        const double sum = noise_.next();
        return sum - std::floor(sum);
    }

    const MemberSet& set_;
    run::Noise noise_;
    std::vector<double> z_, values_;
};

}  // namespace

ViolatingShare violating_share(const TransferFunction& process, const PidSettings& settings, const Uncertainty& uncertainty,
                               const ViolationLimits& limits, std::size_t members, std::uint64_t seed, double extra_delay,
                               const Progress& progress) {
    check_limits(limits);
    require(settings);
    require_not_negative("extra_delay", extra_delay);
    const bool listed = uncertainty.kind() == UncertaintyKind::models;
    if (members == 0 && !listed) refuse(error_code::out_of_domain, "members", 0.0, "draw at least 1");
    std::optional<MemberSet> set;
    std::optional<Draw> draw;
    if (!listed) {
        set.emplace(process, uncertainty);
        draw.emplace(*set, seed);
    }
    const std::size_t count = listed ? uncertainty.models().size() : members;
    ViolatingShare result;
    std::size_t violating = 0;
    for (std::size_t i = 0; i < count; ++i) {
        if (progress && i % 16 == 0 && !progress(static_cast<double>(i) / static_cast<double>(count))) {
            result.cancelled = true;
            break;
        }
        const Robustness r = robustness(listed ? uncertainty.models()[i] : draw->next(), settings,
                                        {.scan_time = {}, .extra_delay = extra_delay});
        ++result.members;
        violating += violates(r, limits);
        result.unstable += r.verdict != Verdict::stable;
    }
    if (result.members == 0) return result;
    const auto n = static_cast<double>(result.members);
    result.share = static_cast<double>(violating) / n;
    result.standard_error = listed ? 0.0 : std::sqrt(result.share * (1.0 - result.share) / n);
    return result;
}

}  // namespace v0
}  // namespace tauwright
