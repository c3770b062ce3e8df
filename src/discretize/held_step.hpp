// One scan of a cascade with held input, in twice the digits.
#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

#include "discretize/held_sections.hpp"
#include "tauwright/discretize/held.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// A dead time in scans: whole ones, and the rest of it as a share of a scan in [0, 1).
struct DelayInScans {
    std::int64_t whole = 0;
    Twice fraction;
    bool has_fraction() const noexcept { return fraction.high > 0.0; }
};

/// Within 1e-9 of a whole scan it is whole: 0.3 s at 0.1 s is three scans, whatever the last bit of the quotient
/// says. `dead_time` and `scan_time` have been checked.
DelayInScans delay_in_scans(double dead_time, double scan_time) noexcept;

/// The recursion of `DiscreteTransferFunction`, before its delay by whole scans.
struct SampledCascade {
    std::size_t order = 0;
    std::vector<Twice> growth;  // by rows
    std::vector<std::size_t> last;  // the last column of each row that can be other than 0
    std::vector<Twice> now, before, ahead, outputs;
    Twice direct_now, direct_before;
    bool pole_at_zero = false;  // whether the input one scan older takes part
};

SampledCascade sampled(const Cascade& cascade, const Twice& fraction, Between between);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
