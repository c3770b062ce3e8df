#include "assess/member_set.hpp"

#include <algorithm>
#include <cmath>
#include <string>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

std::string name_of_place(Place place, std::size_t index) {
    switch (place) {
        case Place::gain: return "gain";
        case Place::lag: return item_name("lags", index);
        case Place::lead: return item_name("leads", index);
        case Place::lag_time: return joined({item_name("lag_pairs", index), ".time_constant"});
        case Place::lag_damping: return joined({item_name("lag_pairs", index), ".damping"});
        case Place::lead_time: return joined({item_name("lead_pairs", index), ".time_constant"});
        case Place::lead_damping: return joined({item_name("lead_pairs", index), ".damping"});
        case Place::dead_time: return "dead_time";
    }
    return "parameter";
}

void put(Factors& f, const Parameter& p, double magnitude) {
    const double value = p.sign * magnitude;
    switch (p.place) {
        case Place::gain: f.gain = value; break;
        case Place::lag: f.lags[p.index] = value; break;
        case Place::lead: f.leads[p.index] = value; break;
        case Place::lag_time: f.lag_pairs[p.index].time_constant = value; break;
        case Place::lag_damping: f.lag_pairs[p.index].damping = value; break;
        case Place::lead_time: f.lead_pairs[p.index].time_constant = value; break;
        case Place::lead_damping: f.lead_pairs[p.index].damping = value; break;
        case Place::dead_time: f.dead_time = std::max(value, 0.0); break;
    }
}

void insist_equal(const char* name, double value, double fitted) {
    if (std::abs(value - fitted) <= 1e-9 * std::abs(fitted)) return;
    throw Error(error_code::conflicting_arguments,
                joined({"process has a ", name, " of ", text_of(value), ", the fit one of ", text_of(fitted),
                        "; give the fit's own model, its gain in any unit"}));
}

}  // namespace

MemberSet::MemberSet(const TransferFunction& process, const Uncertainty& uncertainty) : process_(process) {
    if (uncertainty.kind() == UncertaintyKind::box) take_box(uncertainty.half_widths());
    else take_region(uncertainty);
    for (std::size_t i = 0; i < size(); ++i) {
        const Parameter& p = parameters_[i];
        lowest_.push_back(is_ball() ? -1.0 : p.linear() ? p.low : std::log(p.low));
        highest_.push_back(is_ball() ? 1.0 : p.linear() ? p.high : std::log(p.high));
        nominal_.push_back(is_ball() ? 0.0 : p.linear() ? p.center : std::log(p.center));
    }
}

void MemberSet::add(Place place, std::size_t index, double value, double half_width, const UncertaintyBox& box) {
    if (half_width == 0.0) return;
    Parameter p{place, index, value < 0.0 ? -1.0 : 1.0, std::abs(value), 0.0, 0.0};
    const double half = box.absolute ? half_width : half_width * p.center;
    p.low = p.center - half;
    p.high = p.center + half;
    if (p.linear()) p.low = std::max(p.low, 0.0);
    else if (!(p.low > 0.0))
        refuse(error_code::out_of_domain, joined({"half width of ", name_of_place(place, index)}), half,
               joined({"the value is ", text_of(value), " and the box would hold 0; give a half width below its size"}));
    require_finite(joined({"upper end of ", name_of_place(place, index)}), p.high);
    if (p.high > p.low) parameters_.push_back(p);
}

void MemberSet::take_box(const UncertaintyBox& box) {
    const Factors& f = process_.factors();
    add(Place::gain, 0, f.gain, box.gain, box);
    for (std::size_t i = 0; i < f.lags.size(); ++i) add(Place::lag, i, f.lags[i], box.lags, box);
    for (std::size_t i = 0; i < f.leads.size(); ++i) add(Place::lead, i, f.leads[i], box.leads, box);
    const auto add_pair = [&](Place time, Place damping, std::size_t i, const QuadraticFactor& pair, double half_time) {
        add(time, i, pair.time_constant, half_time, box);
        if (!box.absolute && pair.damping == 0.0) return;  // a share of nothing
        add(damping, i, pair.damping, box.damping, box);
    };
    for (std::size_t i = 0; i < f.lag_pairs.size(); ++i)
        add_pair(Place::lag_time, Place::lag_damping, i, f.lag_pairs[i], box.lags);
    for (std::size_t i = 0; i < f.lead_pairs.size(); ++i)
        add_pair(Place::lead_time, Place::lead_damping, i, f.lead_pairs[i], box.leads);
    add(Place::dead_time, 0, f.dead_time, box.dead_time, box);
}

void MemberSet::take_region(const Uncertainty& region) {
    const Factors& f = process_.factors();
    const Factors& fitted = region.models().front().factors();
    if (f.integrators != fitted.integrators || f.lags.size() != fitted.lags.size() || f.zeros_at_origin != 0 ||
        !f.leads.empty() || !f.lag_pairs.empty() || !f.lead_pairs.empty())
        throw Error(error_code::conflicting_arguments,
                    joined({"process is ", process_.text(), ", the fit's model is ", region.models().front().text(),
                            "; give the fit's own model, its gain in any unit"}));
    if (!f.lags.empty()) insist_equal("lag", f.lags[0], fitted.lags[0]);
    insist_equal("dead time", f.dead_time, fitted.dead_time);
    const auto& names = region.parameter_names();
    const std::size_t n = names.size();
    for (std::size_t j = 0; j < n; ++j) {
        Parameter p;
        double scale = 1.0;  // from the fit's unit to magnitudes of the process
        const double estimate = region.estimates()[j];
        if (names[j] == "lag_1") p = {Place::lag, 0, estimate < 0.0 ? -1.0 : 1.0, std::abs(estimate), 0.0, 0.0};
        else if (names[j] == "dead_time") p = {Place::dead_time, 0, 1.0, estimate, 0.0, 0.0};
        else {
            p = {Place::gain, 0, f.gain < 0.0 ? -1.0 : 1.0, std::abs(f.gain), 0.0, 0.0};
            scale = std::abs(f.gain) / estimate;
        }
        if (p.place == Place::lag) scale = p.sign;
        double square = 0.0;
        for (std::size_t i = 0; i < n; ++i) {
            const double axis = scale * region.half_axes()[j * n + i];
            axes_.push_back(axis);
            square += axis * axis;
        }
        p.low = p.center - std::sqrt(square);
        p.high = p.center + std::sqrt(square);
        if (p.linear()) p.low = std::max(p.low, 0.0);
        parameters_.push_back(p);
    }
    if (std::all_of(axes_.begin(), axes_.end(), [](double a) { return a == 0.0; })) {
        axes_.clear();
        parameters_.clear();
    }
}

double MemberSet::value(std::size_t j, const double* z) const noexcept {
    const Parameter& p = parameters_[j];
    if (!is_ball()) {
        if (p.linear()) return z[j];
        // The ends themselves come back to the last bit.
        return z[j] == lowest_[j] ? p.low : z[j] == highest_[j] ? p.high : std::exp(z[j]);
    }
    double sum = p.center;
    for (std::size_t i = 0; i < size(); ++i) sum += axis(j, i) * z[i];
    return sum;
}

bool MemberSet::contains(const double* z) const noexcept {
    if (!is_ball()) return true;
    double square = 0.0;
    for (std::size_t i = 0; i < size(); ++i) square += z[i] * z[i];
    if (square > 1.0 + 1e-12) return false;
    for (std::size_t j = 0; j < size(); ++j)
        if (parameters_[j].linear() && value(j, z) < 0.0) return false;
    return true;
}

void MemberSet::pull_inside(double* z) const noexcept {
    if (!is_ball()) {
        for (std::size_t i = 0; i < size(); ++i) z[i] = std::clamp(z[i], lowest_[i], highest_[i]);
        return;
    }
    double square = 0.0;
    for (std::size_t i = 0; i < size(); ++i) square += z[i] * z[i];
    double share = square > 1.0 ? 1.0 / std::sqrt(square) : 1.0;
    for (std::size_t j = 0; j < size(); ++j) {
        const double change = value(j, z) - parameters_[j].center;
        if (parameters_[j].linear() && parameters_[j].center + share * change < 0.0)
            share = -parameters_[j].center / change * (1.0 - 1e-15);
    }
    if (share < 1.0)
        for (std::size_t i = 0; i < size(); ++i) z[i] *= share;
}

// Householder's reflection between z and the first coordinate.
void MemberSet::align(const std::vector<double>& z) {
    double square = 0.0;
    for (double x : z) square += x * x;
    mirror_.clear();
    if (!is_ball() || !(square > 0.0)) return;
    mirror_ = z;
    mirror_[0] += std::copysign(std::sqrt(square), z[0]);
    for (std::size_t j = 0; j < size(); ++j) {
        const auto row = axes_.begin() + static_cast<std::ptrdiff_t>(j * size());
        const std::vector<double> turned = reflect({row, row + static_cast<std::ptrdiff_t>(size())});
        std::copy(turned.begin(), turned.end(), row);
    }
}

std::vector<double> MemberSet::reflect(std::vector<double> z) const {
    double along = 0.0, square = 0.0;
    for (std::size_t i = 0; i < mirror_.size(); ++i) {
        along += mirror_[i] * z[i];
        square += mirror_[i] * mirror_[i];
    }
    for (std::size_t i = 0; i < mirror_.size(); ++i) z[i] -= 2.0 * along / square * mirror_[i];
    return z;
}

TransferFunction MemberSet::member(const double* z) const {
    std::vector<double> values(size());
    for (std::size_t j = 0; j < size(); ++j) values[j] = value(j, z);
    return member_of_values(values.data());
}

TransferFunction MemberSet::member_of_values(const double* values) const {
    Factors f = process_.factors();
    for (std::size_t j = 0; j < size(); ++j) put(f, parameters_[j], values[j]);
    return TransferFunction::from_factors(std::move(f));
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
