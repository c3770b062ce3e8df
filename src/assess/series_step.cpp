#include "assess/series_step.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr std::size_t m = series_terms;

// One series a row of term numbers, with a column for everything the signal depends on.
class Rows {
public:
    explicit Rows(std::size_t columns) : columns_(columns), data_(m * columns, 0.0) {}
    double* operator[](std::size_t row) noexcept { return data_.data() + row * columns_; }
    const double* operator[](std::size_t row) const noexcept { return data_.data() + row * columns_; }
    std::size_t columns() const noexcept { return columns_; }
    void add(double factor, const Rows& other) noexcept {
        for (std::size_t i = 0; i < data_.size(); ++i) data_[i] += factor * other.data_[i];
    }

private:
    std::size_t columns_;
    std::vector<double> data_;
};

void add_row(double* to, double factor, const double* from, std::size_t count) noexcept {
    for (std::size_t c = 0; c < count; ++c) to[c] += factor * from[c];
}

// The integral from -1 on times `scale`, cut after m terms; 0 at the left end. From
// integral T_k = T_{k+1}/(2(k+1)) - T_{k-1}/(2(k-1)).
Rows integral(const Rows& a, double scale) {
    Rows b(a.columns());
    for (std::size_t j = 1; j < m; ++j) {
        const double weight = scale / (2.0 * static_cast<double>(j));
        add_row(b[j], j == 1 ? 2.0 * weight : weight, a[j - 1], a.columns());
        if (j + 1 < m) add_row(b[j], -weight, a[j + 1], a.columns());
        add_row(b[0], j % 2 == 1 ? 1.0 : -1.0, b[j], a.columns());
    }
    return b;
}

template <std::size_t n>
using Square = std::array<std::array<double, n>, n>;

// Adds factor times term j of the integral (j >= 1) of the series that begins at `column`.
template <std::size_t n>
void add_integral_term(Square<n>& A, std::size_t row, std::size_t column, std::size_t j, double factor) noexcept {
    const double weight = factor / (2.0 * static_cast<double>(j));
    A[row][column + j - 1] += j == 1 ? 2.0 * weight : weight;
    if (j + 1 < m) A[row][column + j + 1] -= weight;
}

// Solves A X = right by elimination with row pivoting; the rows of `right` stand in any number of Rows one below the other.
template <std::size_t n>
void solve(Square<n>& A, const std::array<double*, n>& right, std::size_t columns) noexcept {
    for (std::size_t k = 0; k < n; ++k) {
        std::size_t pivot = k;
        for (std::size_t i = k + 1; i < n; ++i)
            if (std::abs(A[i][k]) > std::abs(A[pivot][k])) pivot = i;
        if (pivot != k) {
            std::swap(A[k], A[pivot]);
            for (std::size_t c = 0; c < columns; ++c) std::swap(right[k][c], right[pivot][c]);
        }
        for (std::size_t i = k + 1; i < n; ++i) {
            if (A[i][k] == 0.0) continue;
            const double factor = A[i][k] / A[k][k];
            for (std::size_t j = k + 1; j < n; ++j) A[i][j] -= factor * A[k][j];
            add_row(right[i], -factor, right[k], columns);
        }
    }
    for (std::size_t k = n; k-- > 0;) {
        for (std::size_t j = k + 1; j < n; ++j)
            if (A[k][j] != 0.0) add_row(right[k], -A[k][j], right[j], columns);
        const double inverse = 1.0 / A[k][k];
        for (std::size_t c = 0; c < columns; ++c) right[k][c] *= inverse;
    }
}

// The series of all states, block by block: x = x(start) + integral of its rate.
class StateSeries {
public:
    StateSeries(const LoopStates& loop, double length)
        : loop_(loop), half_(0.5 * length), columns_(m + loop.size() + 2) {
        series_.reserve(loop.size());
        std::size_t i = 0;
        for (std::size_t block : loop.block_sizes) {
            if (block == 1) put_one(i);
            else put_two(i);
            i += block;
        }
    }

    Rows of(const SignalForm& signal) const { return upto(signal, loop_.size()); }
    const Rows& operator[](std::size_t state) const noexcept { return series_[state]; }

private:
    Rows upto(const SignalForm& signal, std::size_t states) const {
        Rows sum(columns_);
        for (std::size_t i = 0; i < states; ++i)
            if (signal.states[i] != 0.0) sum.add(signal.states[i], series_[i]);
        if (signal.input != 0.0)
            for (std::size_t k = 0; k < m; ++k) sum[k][k] += signal.input;
        for (std::size_t k = 0; k < 2; ++k) sum[k][columns_ - 2 + k] += signal.setpoint;
        return sum;
    }

    // Terms 1 and up of x = start + integral of (a x + g); in the place of term 0 stands that x is `start` at the left end,
    // which keeps the start's digits beside large a.
    void put_one(std::size_t i) {
        Rows x = integral(upto(loop_.rates[i], i), half_);
        const double a = loop_.rates[i].states[i] * half_;
        if (a == 0.0) {
            x[0][m + i] += 1.0;
            series_.push_back(std::move(x));
            return;
        }
        Square<m> A{};
        std::array<double*, m> right{};
        put_start<m>(A, x, 0, i);
        const double scale = 1.0 / std::max(1.0, std::abs(a));
        for (std::size_t j = 0; j < m; ++j) {
            right[j] = x[j];
            if (j == 0) continue;
            A[j][j] += scale;
            add_integral_term<m>(A, j, 0, j, -a * scale);
            for (std::size_t c = 0; c < columns_; ++c) x[j][c] *= scale;
        }
        solve<m>(A, right, columns_);
        series_.push_back(std::move(x));
    }

    // The same of two states that drive each other.
    void put_two(std::size_t i) {
        std::array<Rows, 2> x = {integral(upto(loop_.rates[i], i), half_), integral(upto(loop_.rates[i + 1], i), half_)};
        Square<2 * m> A{};
        std::array<double*, 2 * m> right{};
        for (std::size_t s = 0; s < 2; ++s) {
            put_start<2 * m>(A, x[s], s * m, i + s);
            const double a[2] = {loop_.rates[i + s].states[i] * half_, loop_.rates[i + s].states[i + 1] * half_};
            const double scale = 1.0 / std::max({1.0, std::abs(a[0]), std::abs(a[1])});
            for (std::size_t j = 0; j < m; ++j) {
                right[s * m + j] = x[s][j];
                if (j == 0) continue;
                A[s * m + j][s * m + j] += scale;
                for (std::size_t other = 0; other < 2; ++other)
                    add_integral_term<2 * m>(A, s * m + j, other * m, j, -a[other] * scale);
                for (std::size_t c = 0; c < columns_; ++c) x[s][j][c] *= scale;
            }
        }
        solve<2 * m>(A, right, columns_);
        for (Rows& rows : x) series_.push_back(std::move(rows));
    }

    template <std::size_t n>
    void put_start(Square<n>& A, Rows& x, std::size_t at, std::size_t state) const noexcept {
        for (std::size_t k = 0; k < m; ++k) A[at][at + k] = k % 2 == 0 ? 1.0 : -1.0;
        for (std::size_t c = 0; c < columns_; ++c) x[0][c] = 0.0;
        x[0][m + state] = 1.0;
    }

    const LoopStates& loop_;
    double half_;
    std::size_t columns_;
    std::vector<Rows> series_;
};

}  // namespace

SeriesStep::SeriesStep(const LoopStates& loop, double length) : states_(loop.size()), length_(length) {
    const StateSeries series(loop, length);
    const Rows u = series.of(loop.output), y = series.of(loop.value);
    columns_.assign(inputs() * results(), 0.0);
    for (std::size_t c = 0; c < inputs(); ++c) {
        double* column = columns_.data() + c * results();
        for (std::size_t k = 0; k < m; ++k) {
            column[k] = u[k][c];
            column[m + k] = y[k][c];
        }
        for (std::size_t i = 0; i < states_; ++i) {
            double end = 0.0;
            for (std::size_t k = m; k-- > 0;) end += series[i][k][c];
            column[2 * m + i] = end;
            column[2 * m + states_ + 2 * i] = series[i][m - 2][c];
            column[2 * m + states_ + 2 * i + 1] = series[i][m - 1][c];
        }
    }
}

void SeriesStep::apply(const double* in, double* out) const noexcept {
    const std::size_t rows = results();
    for (std::size_t r = 0; r < rows; ++r) out[r] = 0.0;
    const double* column = columns_.data();
    for (std::size_t c = 0; c < inputs(); ++c, column += rows) {
        const double x = in[c];
        if (x == 0.0) continue;
        for (std::size_t r = 0; r < rows; ++r) out[r] += x * column[r];
    }
}

namespace {

// T_k((x + shift)/2) by its recurrence, as series in x: shift -1 for the left half, 1 for the right.
Series half_of(const Series& whole, double shift) noexcept {
    Series before{}, now{}, sum{};
    before[0] = 1.0;
    now[0] = 0.5 * shift, now[1] = 0.5;
    sum[0] = whole[0];
    for (std::size_t k = 1; k < m; ++k) {
        for (std::size_t i = 0; i <= k; ++i) sum[i] += whole[k] * now[i];
        Series next{};
        for (std::size_t i = 0; i <= k && k + 1 < m; ++i) {
            next[i] += shift * now[i] - before[i];
            // x T_i = (T_{i+1} + T_{i-1})/2
            next[i + 1] += i == 0 ? now[i] : 0.5 * now[i];
            if (i > 0) next[i - 1] += 0.5 * now[i];
        }
        before = now;
        now = next;
    }
    return sum;
}

}  // namespace

Series left_half(const Series& whole) noexcept { return half_of(whole, -1.0); }
Series right_half(const Series& whole) noexcept { return half_of(whole, 1.0); }

JoinedHalves::JoinedHalves() {
    constexpr double pi = 3.14159265358979323846;
    for (auto& column : columns_) column.fill(0.0);
    for (std::size_t node = 0; node < m; ++node) {
        const double angle = pi * (static_cast<double>(node) + 0.5) / static_cast<double>(m), x = std::cos(angle);
        const bool right = x > 0.0;
        const double inside = std::acos(right ? 2.0 * x - 1.0 : 2.0 * x + 1.0);
        for (std::size_t k = 0; k < m; ++k) {  // term k of that half, seen at the node, into every term of the whole
            const double seen = std::cos(static_cast<double>(k) * inside);
            for (std::size_t j = 0; j < m; ++j)
                columns_[(right ? m : 0) + k][j] +=
                    (j == 0 ? 1.0 : 2.0) / static_cast<double>(m) * seen * std::cos(static_cast<double>(j) * angle);
        }
    }
}

Series JoinedHalves::operator()(const Series& left, const Series& right) const noexcept {
    Series whole{};
    for (std::size_t k = 0; k < 2 * m; ++k) {
        const double x = k < m ? left[k] : right[k - m];
        for (std::size_t j = 0; j < m; ++j) whole[j] += x * columns_[k][j];
    }
    return whole;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
