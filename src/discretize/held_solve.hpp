// The response of a sampled cascade at one point, by forward substitution through its states.
#pragma once

#include <array>
#include <cstddef>

#include "discretize/held_twice.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

constexpr std::size_t most_states = 20;

/// The recursion as it stands in memory, in either kind of number; matrices by rows. Row i of `growth` ends at the
/// diagonal, or one further in the first row of a pair.
template <class Real>
struct HeldColumns {
    std::size_t order;
    const Real *growth, *now, *before, *ahead, *outputs;
    Real direct_now, direct_before;
};

template <class Real>
using StatesAt = std::array<Point<Real>, most_states>;

/// x = (w - growth)^-1 b, in place. Where w hits an eigenvalue to the last digit the result is not finite.
template <class Real>
void solve_states(const HeldColumns<Real>& c, const Point<Real>& w, StatesAt<Real>& x) noexcept {
    const std::size_t n = c.order;
    const auto gather = [&](std::size_t i, std::size_t end) {
        for (std::size_t j = 0; j < end; ++j) x[i] = x[i] + c.growth[i * n + j] * x[j];
    };
    for (std::size_t i = 0; i < n;) {
        const Real* row = c.growth + i * n;
        const Point<Real> own{w.re - row[i], w.im};
        gather(i, i);
        if (i + 1 == n || rounded(row[i + 1]) == 0.0) {
            x[i] = x[i] / own;
            ++i;
            continue;
        }
        // A pair: (own, -a; -b, other) (x, y) = (p, q).
        const Real* next = row + n;
        gather(i + 1, i);
        const Point<Real> other{w.re - next[i + 1], w.im};
        Point<Real> determinant = own * other;
        determinant.re = determinant.re - row[i + 1] * next[i];
        const Point<Real> p = x[i], q = x[i + 1];
        x[i] = (other * p + row[i + 1] * q) / determinant;
        x[i + 1] = (own * q + next[i] * p) / determinant;
        i += 2;
    }
}

template <class Real>
Point<Real> outputs_of(const HeldColumns<Real>& c, const StatesAt<Real>& x) noexcept {
    Point<Real> sum;
    for (std::size_t i = 0; i < c.order; ++i) sum = sum + c.outputs[i] * x[i];
    return sum;
}

/// b = ahead column * ahead + now column * now + before column * before
template <class Real>
void combine_inputs(const HeldColumns<Real>& c, const Point<Real>& ahead, const Point<Real>& now,
                    const Point<Real>& before, StatesAt<Real>& b) noexcept {
    for (std::size_t i = 0; i < c.order; ++i)
        b[i] = c.ahead[i] * ahead + c.now[i] * now + c.before[i] * before;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
