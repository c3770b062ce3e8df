// The members of a box or a confidence region, by coordinates that span them.
#pragma once

#include <cstddef>
#include <vector>

#include "tauwright/assess/uncertainty.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

enum class Place { gain, lag, lead, lag_time, lag_damping, lead_time, lead_damping, dead_time };

/// One number of the process that is not known. Magnitudes; `sign` gives it back. Dead time is
/// `linear`, all others are looked at by their logarithm.
struct Parameter {
    Place place = Place::gain;
    std::size_t index = 0;  ///< of the factor among its like
    double sign = 1.0;
    double center = 0.0, low = 0.0, high = 0.0;

    bool linear() const noexcept { return place == Place::dead_time; }
};

/// Coordinates z: for a box one a parameter, its logarithm (the dead time itself) between two ends; for a
/// region the ball |z| <= 1, parameters = centers + axes * z, cut where the dead time is 0.
class MemberSet {
public:
    MemberSet(const TransferFunction& process, const Uncertainty& uncertainty);

    std::size_t size() const noexcept { return parameters_.size(); }
    const std::vector<Parameter>& parameters() const noexcept { return parameters_; }
    const TransferFunction& process() const noexcept { return process_; }
    bool is_ball() const noexcept { return !axes_.empty(); }
    double axis(std::size_t parameter, std::size_t z) const noexcept { return axes_[parameter * size() + z]; }
    double lowest(std::size_t z) const noexcept { return lowest_[z]; }
    double highest(std::size_t z) const noexcept { return highest_[z]; }
    const std::vector<double>& nominal() const noexcept { return nominal_; }

    /// Magnitude of a parameter at z; below 0 for a dead time outside the set.
    double value(std::size_t parameter, const double* z) const noexcept;
    bool contains(const double* z) const noexcept;
    /// The nearest coordinates of the set on the way from z to the nominal ones.
    void pull_inside(double* z) const noexcept;
    /// Of a ball: turns the coordinates so that z comes to lie on the first of them; `reflect` takes others along.
    void align(const std::vector<double>& z);
    std::vector<double> reflect(std::vector<double> z) const;
    TransferFunction member(const double* z) const;
    /// The member whose parameters have these magnitudes.
    TransferFunction member_of_values(const double* values) const;

private:
    void add(Place place, std::size_t index, double value, double half_width, const UncertaintyBox& box);
    void take_box(const UncertaintyBox& box);
    void take_region(const Uncertainty& region);

    TransferFunction process_;
    std::vector<Parameter> parameters_;
    std::vector<double> axes_, lowest_, highest_, nominal_, mirror_;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
