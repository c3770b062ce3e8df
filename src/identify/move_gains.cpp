// The gain each move shows on its own, with lag and dead time as fitted to all of them.
#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>

#include "identify/decay_sums.hpp"
#include "identify/process_fit.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// The response to unit move j, seen in a piece that began later, is alpha + beta b(t).
struct Share {
    double alpha = 0.0, beta = 0.0;
};

Share share_of(Form form, double lag, double since_move) {
    if (form == Form::integrating_plus_dead_time) return {since_move, 1.0};
    return {1.0, -std::exp(-since_move / lag)};
}

PieceSums sums_of(const FitData& data, const Piece& piece, Form form, const ParameterArray& p, double center) {
    const std::size_t count = piece.last - piece.first;
    const double *t = data.t.data() + piece.first, *y = data.y.data() + piece.first;
    if (form == Form::first_order_plus_dead_time) {
        const DecaySums s = decay_sums(t, y, count, piece.start, 1.0 / p[at_lag], center);
        return {s.n, s.e, s.ee, s.c, s.cc, s.ce, s.y, s.yc, s.ye};
    }
    PieceSums s;
    for (std::size_t i = 0; i < count; ++i) {
        const double b = t[i] - piece.start, c = t[i] - center;
        const double value = y[i] - p[at_curvature] * c * c;
        s.n += 1.0;
        s.b += b;
        s.bb += b * b;
        s.t += c;
        s.tt += c * c;
        s.tb += c * b;
        s.y += value;
        s.yt += value * c;
        s.yb += value * b;
    }
    return s;
}

}  // namespace

GroupGains group_gains(const FitData& data, Form form, const FitResult& fit, const FitOptions& options,
                       const std::vector<std::size_t>& group_of, std::size_t groups, double noise) {
    const auto list = pieces(data, fit.parameters[at_dead_time]);
    const auto m = static_cast<Eigen::Index>(groups) + 2;  // offset, drift, then the groups
    Eigen::MatrixXd gram = Eigen::MatrixXd::Zero(m, m);
    Eigen::VectorXd right = Eigen::VectorXd::Zero(m);
    for (std::size_t k = 0; k < list.size(); ++k) {
        const PieceSums s = sums_of(data, list[k], form, fit.parameters, options.time_center);
        std::vector<Share> shares(groups);
        for (std::size_t j = 0; j < k; ++j) {
            const Share one = share_of(form, fit.parameters[at_lag], data.edges[k - 1].time - data.edges[j].time);
            shares[group_of[j]].alpha += data.edges[j].size * one.alpha;
            shares[group_of[j]].beta += data.edges[j].size * one.beta;
        }
        gram(0, 0) += s.n;
        gram(0, 1) += s.t;
        gram(1, 1) += s.tt;
        right(0) += s.y;
        right(1) += s.yt;
        for (Eigen::Index i = 2; i < m; ++i) {
            const Share& a = shares[static_cast<std::size_t>(i - 2)];
            gram(0, i) += a.alpha * s.n + a.beta * s.b;
            gram(1, i) += a.alpha * s.t + a.beta * s.tb;
            right(i) += a.alpha * s.y + a.beta * s.yb;
            for (Eigen::Index j = i; j < m; ++j) {
                const Share& b = shares[static_cast<std::size_t>(j - 2)];
                gram(i, j) += a.alpha * b.alpha * s.n + (a.alpha * b.beta + a.beta * b.alpha) * s.b + a.beta * b.beta * s.bb;
            }
        }
    }
    // A parameter that the fit holds still is held here too.
    const std::size_t held[2] = {at_offset, at_drift};
    for (Eigen::Index i = 0; i < 2; ++i) {
        if (options.free[held[i]]) continue;
        const double value = fit.parameters[held[i]];
        for (Eigen::Index j = 0; j < m; ++j)
            if (j != i) right(j) -= value * (i < j ? gram(i, j) : gram(j, i));
        for (Eigen::Index j = 0; j < m; ++j) (i < j ? gram(i, j) : gram(j, i)) = i == j ? 1.0 : 0.0;
        right(i) = value;
    }
    GroupGains out{std::vector<double>(groups, 0.0), std::vector<double>(groups, 0.0)};
    for (Eigen::Index i = 0; i < m; ++i)
        if (gram(i, i) <= 0.0) gram(i, i) = 1.0;  // a move that no sample sees: gain 0, error unknown
    const Eigen::MatrixXd full = gram.selfadjointView<Eigen::Upper>();
    const Eigen::LDLT<Eigen::MatrixXd> factors(full);
    const Eigen::VectorXd solved = factors.solve(right);
    const Eigen::MatrixXd inverse = factors.solve(Eigen::MatrixXd::Identity(m, m));
    for (std::size_t g = 0; g < groups; ++g) {
        const auto i = static_cast<Eigen::Index>(g) + 2;
        out.gains[g] = solved(i);
        out.standard_errors[g] = noise * std::sqrt(std::max(inverse(i, i), 0.0));
    }
    return out;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
