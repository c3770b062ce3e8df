// First order plus dead time: a global scan on few points, then least squares on all of them.
#include <algorithm>
#include <cmath>
#include <limits>

#include "identify/kink_scan.hpp"
#include "identify/process_fit.hpp"
#include "math/vector_exponential.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// Sums over the samples of a piece, with e = exp(-(t - start)/lag), d = t - start, c = t - center and
// r the residual: everything Gauss-Newton needs.
enum Sum : std::size_t { s_r, s_rr, s_rc, s_re, s_rde, s_e, s_ee, s_de, s_dee, s_ddee, s_ce, s_cde, s_c, s_cc, sum_count };
using Sums = std::array<double, sum_count>;

struct PieceModel {
    double start, inverse_lag, center;
    double constant, drift, decay;  // fitted value = constant + drift c + decay e
};

// Eight independent lanes let the compiler use whatever vectors the machine has; their order of
// addition is fixed, so that every machine adds up to the same bits.
TAUWRIGHT_DETAIL_FOR_EVERY_CPU
void add_piece(const double* t, const double* y, std::size_t count, const PieceModel& m, double* sums) {
    constexpr std::size_t lanes = 8;
    double acc[sum_count][lanes] = {};
    std::size_t i = 0;
    for (; i + lanes <= count; i += lanes) {
        for (std::size_t l = 0; l < lanes; ++l) {
            const double d = t[i + l] - m.start;
            const double e = decaying_exponential(-d * m.inverse_lag);
            const double c = t[i + l] - m.center;
            const double r = y[i + l] - (m.constant + m.drift * c + m.decay * e);
            const double de = d * e;
            acc[s_r][l] += r;
            acc[s_rr][l] += r * r;
            acc[s_rc][l] += r * c;
            acc[s_re][l] += r * e;
            acc[s_rde][l] += r * de;
            acc[s_e][l] += e;
            acc[s_ee][l] += e * e;
            acc[s_de][l] += de;
            acc[s_dee][l] += de * e;
            acc[s_ddee][l] += de * de;
            acc[s_ce][l] += c * e;
            acc[s_cde][l] += c * de;
            acc[s_c][l] += c;
            acc[s_cc][l] += c * c;
        }
    }
    for (; i < count; ++i) {
        const double d = t[i] - m.start, e = decaying_exponential(-d * m.inverse_lag), c = t[i] - m.center;
        const double r = y[i] - (m.constant + m.drift * c + m.decay * e), de = d * e;
        const double terms[sum_count] = {r,      r * r,   r * c,  r * e, r * de, e, e * e,
                                         de,     de * e,  de * de, c * e, c * de, c, c * c};
        for (std::size_t k = 0; k < sum_count; ++k) acc[k][i % lanes] += terms[k];
    }
    for (std::size_t k = 0; k < sum_count; ++k)
        for (std::size_t l = 0; l < lanes; ++l) sums[k] += acc[k][l];
}

// In a piece the response to the moves is x = U + A e; A changes with the lag as B does.
struct Response {
    double U = 0.0, A = 0.0, B = 0.0;
};

void enter_piece(Response& x, const FitData& data, std::size_t piece, double lag) {
    if (piece == 0) return;
    const Edge& edge = data.edges[piece - 1];
    if (piece > 1) {
        const double gone = edge.time - data.edges[piece - 2].time;
        const double decay = std::exp(-gone / lag);
        x.B = (x.B + x.A * gone / (lag * lag)) * decay;
        x.A *= decay;
    }
    x.A += x.U - edge.level;  // the value goes on from where it was: U + A stays
    x.U = edge.level;
}

NormalEquations equations(const FitData& data, const FitOptions& options, const ParameterArray& p) {
    NormalEquations out;
    const double lag = p[at_lag], K = p[at_gain];
    const auto list = pieces(data, p[at_dead_time]);
    Response x;
    for (std::size_t k = 0; k < list.size(); ++k) {
        enter_piece(x, data, k, lag);
        const Piece& piece = list[k];
        if (piece.first == piece.last) continue;
        Sums s{};
        add_piece(data.t.data() + piece.first, data.y.data() + piece.first, piece.last - piece.first,
                  {piece.start, 1.0 / lag, options.time_center, p[at_offset] + K * x.U, p[at_drift], K * x.A}, s.data());
        const auto n = static_cast<double>(piece.last - piece.first);
        // Columns of the Jacobian: 1, c, x = U + A e, K (B e + A d e / lag^2), K A e / lag.
        const double a = K * x.B, b = K * x.A / (lag * lag), h = K * x.A / lag;
        auto& G = out.gram;
        G[at_offset][at_offset] += n;
        G[at_offset][at_drift] += s[s_c];
        G[at_offset][at_gain] += n * x.U + x.A * s[s_e];
        G[at_offset][at_lag] += a * s[s_e] + b * s[s_de];
        G[at_offset][at_dead_time] += h * s[s_e];
        G[at_drift][at_drift] += s[s_cc];
        G[at_drift][at_gain] += x.U * s[s_c] + x.A * s[s_ce];
        G[at_drift][at_lag] += a * s[s_ce] + b * s[s_cde];
        G[at_drift][at_dead_time] += h * s[s_ce];
        G[at_gain][at_gain] += n * x.U * x.U + 2.0 * x.U * x.A * s[s_e] + x.A * x.A * s[s_ee];
        G[at_gain][at_lag] += x.U * (a * s[s_e] + b * s[s_de]) + x.A * (a * s[s_ee] + b * s[s_dee]);
        G[at_gain][at_dead_time] += h * (x.U * s[s_e] + x.A * s[s_ee]);
        G[at_lag][at_lag] += a * a * s[s_ee] + 2.0 * a * b * s[s_dee] + b * b * s[s_ddee];
        G[at_lag][at_dead_time] += h * (a * s[s_ee] + b * s[s_dee]);
        G[at_dead_time][at_dead_time] += h * h * s[s_ee];
        out.gradient[at_offset] += s[s_r];
        out.gradient[at_drift] += s[s_rc];
        out.gradient[at_gain] += x.U * s[s_r] + x.A * s[s_re];
        out.gradient[at_lag] += a * s[s_re] + b * s[s_rde];
        out.gradient[at_dead_time] += h * s[s_re];
        out.sum_of_squares += s[s_rr];
    }
    for (std::size_t i = 0; i < most_parameters; ++i)
        for (std::size_t j = 0; j < i; ++j) out.gram[i][j] = out.gram[j][i];
    return out;
}

struct Bounds {
    double lag_low, lag_high, dead_time_high;
};

Bounds bounds_of(const FitData& data) {
    const double step = data.sampling > 0.0 ? data.sampling : data.span;
    return {0.05 * step, 100.0 * data.span, longest_dead_time(data)};
}

// Rough: to a hundredth of the noise. Good: to a thousandth of a standard error. Last digits: as far
// as the arithmetic goes.
enum class Effort { rough, good, last_digits };

LeastSquaresResult descend(const FitData& data, const FitOptions& options, const ParameterArray& start, Effort effort) {
    const Bounds bounds = bounds_of(data);
    LeastSquaresProblem problem;
    problem.evaluate = [&](const ParameterArray& p) { return equations(data, options, p); };
    problem.free = options.free;
    problem.lowest.fill(-std::numeric_limits<double>::max());
    problem.highest.fill(std::numeric_limits<double>::max());
    problem.lowest[at_lag] = bounds.lag_low;
    problem.highest[at_lag] = bounds.lag_high;
    problem.lowest[at_dead_time] = 0.0;
    problem.highest[at_dead_time] = bounds.dead_time_high;
    problem.samples = data.t.size();
    problem.tolerance = effort == Effort::rough ? 1e-2 : 1e-6;
    problem.polished = effort == Effort::last_digits;
    return minimize(problem, start);
}

// Minima of the scan over lag and dead time, best first, at most three and apart from one another.
std::vector<ParameterArray> scanned(const FitData& few, const FitOptions& options) {
    constexpr int lag_count = 11, dead_time_count = 26;
    const Bounds bounds = bounds_of(few);
    std::vector<double> lags, dead_times;
    if (options.free[at_lag]) {
        const double low = std::max(bounds.lag_low, few.sampling * 0.2), high = 3.0 * few.span;
        for (int i = 0; i < lag_count; ++i) lags.push_back(low * std::pow(high / low, i / (lag_count - 1.0)));
    } else {
        lags.push_back(options.fixed[at_lag]);
    }
    if (options.free[at_dead_time]) {
        // Denser near 0, where dead times usually are.
        for (int i = 0; i < dead_time_count; ++i)
            dead_times.push_back(bounds.dead_time_high * std::pow(i / (dead_time_count - 1.0), 2.0));
    } else {
        dead_times.push_back(options.fixed[at_dead_time]);
    }
    struct Candidate {
        ParameterArray p;
        double sum_of_squares;
    };
    std::vector<std::vector<Candidate>> grid;
    for (double lag : lags) {
        const DeadTimeScan scan(few, options, lag, {dead_times.front(), dead_times.back()});
        std::vector<Candidate> row;
        for (double dead_time : dead_times) {
            const auto [p, ss] = scan.best_linear(dead_time);
            row.push_back({p, ss});
        }
        grid.push_back(std::move(row));
    }
    std::vector<Candidate> minima;
    for (std::size_t i = 0; i < grid.size(); ++i)
        for (std::size_t j = 0; j < grid[i].size(); ++j) {
            bool lowest = true;
            for (std::size_t a = i > 0 ? i - 1 : 0; a <= std::min(i + 1, grid.size() - 1); ++a)
                for (std::size_t b = j > 0 ? j - 1 : 0; b <= std::min(j + 1, grid[i].size() - 1); ++b)
                    lowest &= grid[a][b].sum_of_squares >= grid[i][j].sum_of_squares;
            if (lowest) minima.push_back(grid[i][j]);
        }
    std::sort(minima.begin(), minima.end(), [](const auto& a, const auto& b) { return a.sum_of_squares < b.sum_of_squares; });
    std::vector<ParameterArray> starts;
    for (const Candidate& minimum : minima)  // one this much worse than the best does not catch up
        if (starts.size() < 3 && minimum.sum_of_squares <= 4.0 * minima.front().sum_of_squares) starts.push_back(minimum.p);
    return starts;
}

LeastSquaresResult best_of(const FitData& data, const FitOptions& options, const std::vector<ParameterArray>& starts,
                           Effort effort) {
    LeastSquaresResult best;
    best.equations.sum_of_squares = std::numeric_limits<double>::infinity();
    for (const ParameterArray& start : starts) {
        const LeastSquaresResult found = descend(data, options, start, effort);
        if (found.equations.sum_of_squares < best.equations.sum_of_squares) best = found;
    }
    return best;
}

// The sum of squares has a kink wherever the delayed edge passes a sample, and with it small minima
// that a descent stops in. Looks over the dead times nearby and descends again from the best.
void leave_small_minima(const FitData& data, const FitOptions& options, LeastSquaresResult& best, Effort effort) {
    if (!options.free[at_dead_time]) return;
    const double freedom = std::max(1.0, static_cast<double>(data.t.size()) - 4.0);
    for (int round = 0; round < 3; ++round) {
        const double variance = best.equations.sum_of_squares / freedom;
        const auto inverse = inverse_of_free(best.equations, options.free);
        if (!inverse) return;
        const double spread = std::sqrt((*inverse)[at_dead_time][at_dead_time] * variance);
        if (!(spread > 0.0)) return;
        const auto better = better_dead_time(data, options, best, spread);
        if (!better) return;
        const LeastSquaresResult found = descend(data, options, *better, effort);
        if (!(found.equations.sum_of_squares < best.equations.sum_of_squares - 1e-3 * variance)) {
            if (found.equations.sum_of_squares < best.equations.sum_of_squares) best = found;
            return;
        }
        best = found;
    }
}

}  // namespace

FitResult fit_first_order(const FitData& data, const FitOptions& options) {
    constexpr std::size_t scan_points = 128, middle_points = 4000;
    const FitData few = thinned(data, scan_points);
    std::vector<ParameterArray> starts = scanned(few, options);
    if (data.t.size() > 2 * scan_points) starts = {best_of(few, options, starts, Effort::rough).parameters};
    const bool many = data.t.size() > middle_points;
    if (many) starts = {best_of(thinned(data, middle_points), options, starts, Effort::good).parameters};
    const Effort effort = many ? Effort::good : Effort::last_digits;
    LeastSquaresResult best = best_of(data, options, starts, effort);
    leave_small_minima(data, options, best, effort);
    return {best.parameters, best.equations};
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
