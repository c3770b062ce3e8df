// exp(A t) - identity for the small matrices of a loop.
#pragma once

#include <cstddef>
#include <vector>

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Square, row by row.
struct StateMatrix {
    std::size_t size = 0;
    std::vector<double> data = {};

    explicit StateMatrix(std::size_t n = 0) : size(n), data(n * n, 0.0) {}
    double& operator()(std::size_t i, std::size_t j) noexcept { return data[i * size + j]; }
    double operator()(std::size_t i, std::size_t j) const noexcept { return data[i * size + j]; }
};

/// The difference from the identity is what is computed, by Taylor and doubling D(2t) = 2 D + D^2, so that nothing
/// cancels for short times. Source: Van Loan, IEEE TAC 23, 1978.
StateMatrix exponential_growth(const StateMatrix& A, double t);

/// x + D x.
void grow(const StateMatrix& D, std::vector<double>& x, std::vector<double>& scratch);

/// Solves A x = b by elimination with row pivoting, x in place of b; false where A is singular.
bool solve_in_place(StateMatrix A, std::vector<double>& b);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
