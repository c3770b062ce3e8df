// A proper transfer function as a cascade of sections of one or two states, in twice the digits.
#pragma once

#include <cstddef>
#include <vector>

#include "discretize/held_twice.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// x' = A x + b u, y = outputs . x + direct u, with the scan time as the unit of time. A has entries on and below
/// the diagonal, and just above it inside the block of a pair: last[i] is the last column of row i that has one.
struct Cascade {
    std::size_t order = 0;
    std::vector<Twice> A, b, outputs;  // A by rows
    std::vector<std::size_t> last;
    Twice direct;
};

/// The rational part of a proper process, its gain taken as 1 so that nothing overflows. Each section has gain 1 at rest (1/(scan time s) for an integrator),
/// short time constants first; each lead stands with the lag nearest to it.
Cascade cascade_of(const Factors& factors, double scan_time);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
