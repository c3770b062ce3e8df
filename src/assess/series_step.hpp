// One step of a loop by Chebyshev series: the delayed input as a series gives the output as a series.
#pragma once

#include <array>
#include <cstddef>
#include <vector>

#include "assess/loop_states.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Terms of a series a[0] + a[1] T_1(x) + ..., x from -1 to 1 over the step.
constexpr std::size_t series_terms = 14;
using Series = std::array<double, series_terms>;

/// Everything a step takes and gives, for one loop and one length.
class SeriesStep {
public:
    SeriesStep(const LoopStates& loop, double length);

    double length() const noexcept { return length_; }
    /// Values for `apply`: the delayed input's series, the states at the start, the set point's middle and half change.
    std::size_t inputs() const noexcept { return series_terms + states_ + 2; }
    /// Results of `apply`: series of u, series of y, states at the end, last two terms of every state's series.
    std::size_t results() const noexcept { return 2 * series_terms + 3 * states_; }
    void apply(const double* in, double* out) const noexcept;

private:
    std::size_t states_;
    double length_;
    std::vector<double> columns_;  // results() a column, one column an input
};

/// A series over the left or right half of its interval as a series over that half.
Series left_half(const Series& whole) noexcept;
Series right_half(const Series& whole) noexcept;

/// The series that passes through both halves at its own nodes, to be checked by halving it again.
class JoinedHalves {
public:
    JoinedHalves();
    Series operator()(const Series& left, const Series& right) const noexcept;

private:
    std::array<Series, 2 * series_terms> columns_;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
