#include "assess/state_exponential.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

StateMatrix product(const StateMatrix& a, const StateMatrix& b) {
    const std::size_t n = a.size;
    StateMatrix c(n);
    for (std::size_t i = 0; i < n; ++i)
        for (std::size_t k = 0; k < n; ++k) {
            const double x = a(i, k);
            if (x == 0.0) continue;
            for (std::size_t j = 0; j < n; ++j) c(i, j) += x * b(k, j);
        }
    return c;
}

}  // namespace

StateMatrix exponential_growth(const StateMatrix& A, double t) {
    const std::size_t n = A.size;
    StateMatrix scaled(n);
    double norm = 0.0;
    for (std::size_t i = 0; i < n; ++i) {
        double row = 0.0;
        for (std::size_t j = 0; j < n; ++j) row += std::abs(scaled(i, j) = A(i, j) * t);
        norm = std::max(norm, row);
    }
    int doublings = 0;
    for (; norm > 0.25 && doublings < 1100; ++doublings) norm *= 0.5;
    for (double& x : scaled.data) x = std::ldexp(x, -doublings);
    StateMatrix D = scaled, term = scaled;
    for (int k = 2; k <= 13; ++k) {  // 0.25^13/14! is below 1e-18
        term = product(term, scaled);
        for (std::size_t i = 0; i < n * n; ++i) D.data[i] += term.data[i] /= k;
    }
    for (int i = 0; i < doublings; ++i) {
        const StateMatrix square = product(D, D);
        for (std::size_t k = 0; k < n * n; ++k) D.data[k] = 2.0 * D.data[k] + square.data[k];
    }
    return D;
}

void grow(const StateMatrix& D, std::vector<double>& x, std::vector<double>& scratch) {
    const std::size_t n = D.size;
    scratch.assign(x.begin(), x.end());
    for (std::size_t i = 0; i < n; ++i) {
        double sum = 0.0;
        for (std::size_t j = 0; j < n; ++j) sum += D(i, j) * scratch[j];
        x[i] = scratch[i] + sum;
    }
}

bool solve_in_place(StateMatrix A, std::vector<double>& b) {
    const std::size_t n = A.size;
    for (std::size_t k = 0; k < n; ++k) {
        std::size_t pivot = k;
        for (std::size_t i = k + 1; i < n; ++i)
            if (std::abs(A(i, k)) > std::abs(A(pivot, k))) pivot = i;
        if (A(pivot, k) == 0.0) return false;
        for (std::size_t j = 0; j < n && pivot != k; ++j) std::swap(A(k, j), A(pivot, j));
        std::swap(b[k], b[pivot]);
        for (std::size_t i = k + 1; i < n; ++i) {
            const double factor = A(i, k) / A(k, k);
            if (factor == 0.0) continue;
            for (std::size_t j = k + 1; j < n; ++j) A(i, j) -= factor * A(k, j);
            b[i] -= factor * b[k];
        }
    }
    for (std::size_t k = n; k-- > 0;) {
        for (std::size_t j = k + 1; j < n; ++j) b[k] -= A(k, j) * b[j];
        b[k] /= A(k, k);
    }
    return true;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
