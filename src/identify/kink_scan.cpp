#include "identify/kink_scan.hpp"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>

#include "identify/decay_sums.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

void DeadTimeScan::add_block(std::size_t first, std::size_t last) {
    const double y = data_.y[first], c = data_.t[first] - options_.time_center;
    const DecaySums s = last - first == 1 ? DecaySums{1.0, 1.0, 1.0, y, c, y, y * c, c, c * c}
                                          : decay_sums(data_.t.data() + first, data_.y.data() + first, last - first,
                                                       data_.t[first], 1.0 / lag_, options_.time_center);
    time_.push_back(data_.t[first]);
    from_.push_back({s.e, s.ee, s.ye, s.ce});
    before_.push_back({before_.back().n + s.n, before_.back().y + s.y, before_.back().c + s.c});
    cc_ += s.cc;
    yc_ += s.yc;
}

DeadTimeScan::DeadTimeScan(const FitData& data, const FitOptions& options, double lag, DeadTimeWindow window)
    : data_(data), options_(options), lag_(lag), before_(1) {
    const std::size_t n = data.t.size();
    for (double y : data.y) yy_ += y * y;
    const auto at = [&](double time, std::size_t from) {
        const auto begin = data.t.begin() + static_cast<std::ptrdiff_t>(from);
        return static_cast<std::size_t>(std::lower_bound(begin, data.t.end(), time) - data.t.begin());
    };
    std::size_t next = 0;
    for (const Edge& edge : data.edges) {
        const std::size_t low = std::max(at(edge.time + window.low, next), next), high = at(edge.time + window.high, low);
        if (next < low) add_block(next, low);
        for (std::size_t i = low; i < high; ++i) add_block(i, i + 1);
        next = high;
    }
    if (next < n) add_block(next, n);
    for (std::size_t k = from_.size(); k-- > 1;) {
        const double q = std::exp(-(time_[k] - time_[k - 1]) / lag);
        From &here = from_[k - 1], &after = from_[k];
        here.e += q * after.e;
        here.ee += q * q * after.ee;
        here.ye += q * after.ye;
        here.ce += q * after.ce;
    }
    from_.push_back({});
}

std::pair<ParameterArray, double> DeadTimeScan::best_linear(double dead_time) const {
    const std::size_t n = time_.size();
    double x = 0, xx = 0, xy = 0, xc = 0;
    double U = 0.0, A = 0.0;
    std::size_t first = 0;
    for (std::size_t k = 0; k < data_.edges.size() && first < n; ++k) {
        const double start = data_.edges[k].time + dead_time;
        const auto at = [&](double time) {
            return static_cast<std::size_t>(
                std::lower_bound(time_.begin() + static_cast<std::ptrdiff_t>(first), time_.end(), time) - time_.begin());
        };
        first = at(start);
        A += U - data_.edges[k].level;
        U = data_.edges[k].level;
        double next_decay = 0.0;
        std::size_t last = n;
        if (k + 1 < data_.edges.size()) {
            last = at(data_.edges[k + 1].time + dead_time);
            next_decay = std::exp(-(data_.edges[k + 1].time - data_.edges[k].time) / lag_);
        }
        if (first < last) {
            const double f = std::exp(-(time_[first] - start) / lag_);
            const double g = last < n ? std::exp(-(time_[last] - time_[first]) / lag_) : 0.0;
            const From &a = from_[first], &b = from_[last];
            const double e = f * (a.e - g * b.e), ee = f * f * (a.ee - g * g * b.ee);
            const double ye = f * (a.ye - g * b.ye), ce = f * (a.ce - g * b.ce);
            const double count = before_[last].n - before_[first].n;
            x += count * U + A * e;
            xx += count * U * U + 2.0 * U * A * e + A * A * ee;
            xy += U * (before_[last].y - before_[first].y) + A * ye;
            xc += U * (before_[last].c - before_[first].c) + A * ce;
        }
        A *= next_decay;
        first = last;
    }
    // Normal equations of 1, c, x against y; fixed ones move to the right-hand side.
    const Before& all = before_[n];
    const double gram[3][3] = {{all.n, all.c, x}, {all.c, cc_, xc}, {x, xc, xx}};
    const double right[3] = {all.y, yc_, xy};
    constexpr std::size_t place[3] = {at_offset, at_drift, at_gain};
    ParameterArray p = options_.fixed;
    p[at_lag] = lag_;
    p[at_dead_time] = dead_time;
    Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::ColMajor, 3, 3> G;
    Eigen::Matrix<double, Eigen::Dynamic, 1, Eigen::ColMajor, 3, 1> r;
    std::size_t chosen[3];
    Eigen::Index m = 0;
    for (std::size_t i = 0; i < 3; ++i)
        if (options_.free[place[i]]) chosen[m++] = i;
    G.resize(m, m);
    r.resize(m);
    for (Eigen::Index i = 0; i < m; ++i) {
        const std::size_t row = chosen[i];
        r(i) = right[row];
        for (std::size_t j = 0; j < 3; ++j)
            if (!options_.free[place[j]]) r(i) -= gram[row][j] * options_.fixed[place[j]];
        for (Eigen::Index j = 0; j < m; ++j) G(i, j) = gram[row][chosen[j]];
        G(i, i) *= 1.0 + 1e-14;  // a response that no sample sees must not divide by 0
    }
    const auto solved = G.ldlt().solve(r).eval();
    for (Eigen::Index i = 0; i < m; ++i) p[place[chosen[i]]] = solved(i);
    double sum = yy_;
    for (std::size_t i = 0; i < 3; ++i) {
        sum -= 2.0 * p[place[i]] * right[i];
        for (std::size_t j = 0; j < 3; ++j) sum += p[place[i]] * p[place[j]] * gram[i][j];
    }
    return {p, sum};
}

std::optional<ParameterArray> better_dead_time(const FitData& data, const FitOptions& options,
                                               const LeastSquaresResult& found, double spread) {
    constexpr std::size_t most_candidates = 400;
    const double middle = found.parameters[at_dead_time];
    const double low = std::max(0.0, middle - 4.0 * spread), high = middle + 4.0 * spread;
    // Between two kinks the sum of squares is smooth; one look a piece is enough.
    std::vector<double> kinks{low, high};
    for (const Edge& edge : data.edges) {
        auto it = std::lower_bound(data.t.begin(), data.t.end(), edge.time + low);
        for (; it != data.t.end() && *it < edge.time + high; ++it) kinks.push_back(*it - edge.time);
    }
    std::sort(kinks.begin(), kinks.end());
    const std::size_t stride = (kinks.size() + most_candidates - 1) / most_candidates;

    const DeadTimeScan scan(data, options, found.parameters[at_lag], {low, high});
    const double here = scan.best_linear(middle).second;
    // With the lag free as well the true valley is wider than this cut through it: give back the part
    // of the parabola that the lag would take away.
    const auto inverse = inverse_of_free(found.equations, options.free);
    auto without_lag = options.free;
    without_lag[at_lag] = false;
    const auto inverse_cut = inverse_of_free(found.equations, without_lag);
    if (!inverse || !inverse_cut) return std::nullopt;
    const double valley = (*inverse)[at_dead_time][at_dead_time], cut = (*inverse_cut)[at_dead_time][at_dead_time];
    const double give_back = valley > 0.0 && cut > 0.0 ? 1.0 / cut - 1.0 / valley : 0.0;
    const double lag_per_dead_time =
        options.free[at_lag] && valley > 0.0 ? (*inverse)[at_lag][at_dead_time] / valley : 0.0;

    double lowest = here - 1e-3 * found.equations.sum_of_squares / std::max<double>(1.0, static_cast<double>(data.t.size()));
    std::optional<ParameterArray> best;
    for (std::size_t i = 0; i + 1 < kinks.size(); i += stride) {
        const double dead_time = 0.5 * (kinks[i] + kinks[std::min(i + stride, kinks.size() - 1)]);
        const double away = dead_time - middle;
        auto [p, sum] = scan.best_linear(dead_time);
        const double promised = sum - give_back * away * away;
        if (promised < lowest) {
            lowest = promised;
            p[at_lag] = std::max(found.parameters[at_lag] + lag_per_dead_time * away, 0.1 * found.parameters[at_lag]);
            best = p;
        }
    }
    return best;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
