#include "discretize/held_step.hpp"

#include <algorithm>
#include <cmath>

#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

/// A square matrix in twice the digits, rows of the two parts apart so that loops along a row run in lanes.
/// Row i has nothing beyond column last[i].
class Rows {
public:
    Rows(std::size_t size, const std::vector<std::size_t>& last)
        : size_(size), last_(&last), high_(size * size), low_(size * size) {}

    std::size_t size() const noexcept { return size_; }
    std::size_t last(std::size_t i) const noexcept { return (*last_)[i]; }
    Twice at(std::size_t i, std::size_t j) const noexcept { return {high_[i * size_ + j], low_[i * size_ + j]}; }
    void set(std::size_t i, std::size_t j, const Twice& x) noexcept {
        high_[i * size_ + j] = x.high;
        low_[i * size_ + j] = x.low;
    }
    void clear() noexcept {
        std::fill(high_.begin(), high_.end(), 0.0);
        std::fill(low_.begin(), low_.end(), 0.0);
    }
    /// row i += factor * row k of `other`.
    void add_row(std::size_t i, const Twice& factor, const Rows& other, std::size_t k) noexcept {
        double* to_high = &high_[i * size_];
        double* to_low = &low_[i * size_];
        const double* high = &other.high_[k * size_];
        const double* low = &other.low_[k * size_];
        const std::size_t width = other.last(k) + 1;
        const auto f = halves(factor.high);
        for (std::size_t j = 0; j < width; ++j) {
            const auto p = two_product(f, halves(high[j]));
            const double tail = p.error + (factor.high * low[j] + factor.low * high[j]);
            const auto s = two_sum(to_high[j], p.value);
            const auto t = two_sum(to_low[j], tail);
            const double rest = s.error + t.value;
            const double sum = s.value + rest;
            const double left = (rest - (sum - s.value)) + t.error;
            to_high[j] = sum + left;
            to_low[j] = left - (to_high[j] - sum);
        }
    }

private:
    std::size_t size_;
    const std::vector<std::size_t>* last_;
    std::vector<double> high_, low_;
};

// Adds x y to z.
void add_product(Rows& z, const Rows& x, const Rows& y) noexcept {
    for (std::size_t i = 0; i < z.size(); ++i)
        for (std::size_t k = 0; k <= x.last(i); ++k)
            if (const Twice factor = x.at(i, k); factor.high != 0.0) z.add_row(i, factor, y, k);
}

// D of twice the time is 2 D + D^2.
void double_time(Rows& D, Rows& scratch) noexcept {
    scratch.clear();
    for (std::size_t i = 0; i < D.size(); ++i) scratch.add_row(i, 2.0, D, i);
    add_product(scratch, D, D);
    std::swap(D, scratch);
}

double row_norm(const Rows& M) noexcept {
    double norm = 0.0;
    for (std::size_t i = 0; i < M.size(); ++i) {
        double sum = 0.0;
        for (std::size_t j = 0; j <= M.last(i); ++j) sum += std::abs(M.at(i, j).high);
        norm = std::max(norm, sum);
    }
    return norm;
}

// exp(M) - identity: the series of the difference on M / 2^s in Horner's form, D <- M (identity + D) / k, then s
// doublings, so that small entries keep their digits. An entry r steps below the diagonal begins with the power r;
// 17 terms more leave less than 1e-32 of it for a norm of 1/8.
void difference_from_identity(Rows& M, Rows& D, Rows& scratch) noexcept {
    int doublings = 0;
    double norm = row_norm(M);
    for (; norm > 0.125 && is_finite(norm); norm *= 0.5) ++doublings;
    const double scale = std::ldexp(1.0, -doublings);
    const std::size_t n = M.size();
    D.clear();
    for (std::size_t k = n + 17; k >= 1; --k) {
        const Twice factor = Twice(scale) / Twice(static_cast<double>(k));
        scratch.clear();
        for (std::size_t i = 0; i < n; ++i)
            for (std::size_t j = 0; j <= M.last(i); ++j) {
                const Twice x = M.at(i, j);
                if (x.high == 0.0) continue;
                const Twice scaled = x * factor;
                scratch.set(i, j, scratch.at(i, j) + scaled);
                scratch.add_row(i, scaled, D, j);
            }
        std::swap(D, scratch);
    }
    for (int i = 0; i < doublings; ++i) double_time(D, scratch);
}

/// What a time of `share` scans does: growth of the state, and the effect of an input of 1 and of one that rises
/// from 0 by 1 a scan.
struct Piece {
    std::vector<Twice> growth, level, slope;
};

// x' = A x + b u, u' = v, v' = 0 as one system (v, u, x), which keeps it lower triangular but for the pairs.
Piece piece_of(const Cascade& cascade, const Twice& share, std::size_t inputs) {
    const std::size_t n = cascade.order, size = n + inputs;
    std::vector<std::size_t> last(size);
    for (std::size_t i = 0; i < size; ++i) last[i] = i < inputs ? i : cascade.last[i - inputs] + inputs;
    Rows M(size, last), D(size, last), scratch(size, last);
    if (inputs == 2) M.set(1, 0, share);
    for (std::size_t i = 0; i < n; ++i) {
        M.set(i + inputs, inputs - 1, share * cascade.b[i]);
        for (std::size_t j = 0; j <= cascade.last[i]; ++j) M.set(i + inputs, j + inputs, share * cascade.A[i * n + j]);
    }
    difference_from_identity(M, D, scratch);
    Piece piece{std::vector<Twice>(n * n), std::vector<Twice>(n), std::vector<Twice>(n)};
    for (std::size_t i = 0; i < n; ++i) {
        for (std::size_t j = 0; j <= cascade.last[i]; ++j) piece.growth[i * n + j] = D.at(i + inputs, j + inputs);
        piece.level[i] = D.at(i + inputs, inputs - 1);
        if (inputs == 2) piece.slope[i] = D.at(i + inputs, 0);
    }
    return piece;
}

// x + growth x
std::vector<Twice> grown(const Piece& piece, const std::vector<std::size_t>& last, const std::vector<Twice>& x) {
    std::vector<Twice> y = x;
    for (std::size_t i = 0; i < x.size(); ++i)
        for (std::size_t j = 0; j <= last[i]; ++j) y[i] = y[i] + piece.growth[i * x.size() + j] * x[j];
    return y;
}

// growth of both pieces, one after the other: late + early + late early
void combine(std::vector<Twice>& growth, const Piece& late, const Piece& early, const std::vector<std::size_t>& last) {
    const std::size_t n = last.size();
    for (std::size_t i = 0; i < n; ++i)
        for (std::size_t j = 0; j <= last[i]; ++j) {
            Twice sum = late.growth[i * n + j] + early.growth[i * n + j];
            for (std::size_t k = j > 0 ? j - 1 : 0; k <= last[i]; ++k)
                sum = sum + late.growth[i * n + k] * early.growth[k * n + j];
            growth[i * n + j] = sum;
        }
}

}  // namespace

DelayInScans delay_in_scans(double dead_time, double scan_time) noexcept {
    double whole = std::floor(dead_time / scan_time);
    // The quotient can have rounded up to a whole number; the rest is exact.
    Twice rest = Twice(dead_time) - Twice(whole) * Twice(scan_time);
    Twice fraction = rest / Twice(scan_time);
    if (fraction.high > 1.0 - 1e-9) {
        whole += 1.0;
        fraction = 0.0;
    }
    if (fraction.high < 1e-9) fraction = 0.0;
    return {static_cast<std::int64_t>(whole), fraction};
}

SampledCascade sampled(const Cascade& cascade, const Twice& fraction, Between between) {
    const bool linear = between == Between::linear, split = fraction.high > 0.0;
    const std::size_t n = cascade.order, inputs = linear ? 2 : 1;
    const auto& last = cascade.last;
    SampledCascade s;
    s.order = n;
    s.last = last;
    s.outputs = cascade.outputs;
    s.before.resize(n);
    s.ahead.resize(n);

    // The input of the last sample but one acts first, for the fraction; then the last one.
    const Twice share = Twice(1.0) - fraction;
    Piece late = piece_of(cascade, share, inputs);
    s.now = late.level;
    if (linear)
        for (std::size_t i = 0; i < n; ++i) {
            s.now[i] = late.level[i] - late.slope[i];
            s.ahead[i] = late.slope[i];
        }
    if (split) {
        const Piece early = piece_of(cascade, fraction, inputs);
        std::vector<Twice> older = early.level, newer(n);
        if (linear)
            for (std::size_t i = 0; i < n; ++i) {
                older[i] = fraction * early.level[i] - early.slope[i];
                newer[i] = share * early.level[i] + early.slope[i];
            }
        s.before = grown(late, last, older);
        newer = grown(late, last, newer);
        for (std::size_t i = 0; i < n; ++i) s.now[i] = s.now[i] + newer[i];
        s.growth.resize(n * n);
        combine(s.growth, late, early, last);
    } else {
        s.growth = std::move(late.growth);
    }

    s.direct_now = linear ? share * cascade.direct : Twice(0.0);
    s.direct_before = linear ? fraction * cascade.direct : cascade.direct;
    s.pole_at_zero = split || (!linear && cascade.direct.high != 0.0);
    return s;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
