// Integrating plus dead time: everything but the dead time is linear.
#include <algorithm>
#include <cmath>
#include <limits>

#include "identify/process_fit.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// In a piece the integral of the delayed output is X = X0 + U (t - start).
struct Ramp {
    double X0 = 0.0, U = 0.0;
};

void enter_piece(Ramp& x, const FitData& data, std::size_t piece) {
    if (piece == 0) return;
    const Edge& edge = data.edges[piece - 1];
    if (piece > 1) x.X0 += x.U * (edge.time - data.edges[piece - 2].time);
    x.U = edge.level;
}

NormalEquations equations(const FitData& data, const FitOptions& options, const ParameterArray& p) {
    NormalEquations out;
    const auto list = pieces(data, p[at_dead_time]);
    Ramp x;
    for (std::size_t k = 0; k < list.size(); ++k) {
        enter_piece(x, data, k);
        const double by_dead_time = -p[at_gain] * x.U;
        for (std::size_t i = list[k].first; i < list[k].last; ++i) {
            const double c = data.t[i] - options.time_center, X = x.X0 + x.U * (data.t[i] - list[k].start);
            const double columns[most_parameters] = {1.0, c, c * c, X, 0.0, by_dead_time};
            const double r = data.y[i] - (p[at_offset] + c * (p[at_drift] + c * p[at_curvature]) + p[at_gain] * X);
            for (std::size_t a = 0; a < most_parameters; ++a) {
                for (std::size_t b = a; b < most_parameters; ++b) out.gram[a][b] += columns[a] * columns[b];
                out.gradient[a] += columns[a] * r;
            }
            out.sum_of_squares += r * r;
        }
    }
    for (std::size_t a = 0; a < most_parameters; ++a)
        for (std::size_t b = 0; b < a; ++b) out.gram[a][b] = out.gram[b][a];
    return out;
}

LeastSquaresProblem problem_for(const FitData& data, const FitOptions& options) {
    LeastSquaresProblem problem;
    problem.evaluate = [&](const ParameterArray& p) { return equations(data, options, p); };
    problem.free = options.free;
    problem.lowest.fill(-std::numeric_limits<double>::max());
    problem.highest.fill(std::numeric_limits<double>::max());
    problem.lowest[at_dead_time] = 0.0;
    problem.highest[at_dead_time] = longest_dead_time(data);
    problem.samples = data.t.size();
    return problem;
}

// At a fixed dead time the problem is linear: one undamped step from anywhere solves it.
LeastSquaresResult at_dead_time_of(LeastSquaresProblem problem, ParameterArray p, double dead_time) {
    p[at_dead_time] = dead_time;
    problem.free[at_dead_time] = false;
    problem.damping = 0.0;
    problem.most_passes = 6;
    return minimize(problem, p);
}

}  // namespace

FitResult fit_integrating(const FitData& data, const FitOptions& options) {
    constexpr int scan_count = 24;
    constexpr std::size_t scan_points = 120;
    const FitData few = thinned(data, scan_points);
    const LeastSquaresProblem coarse = problem_for(few, options);
    ParameterArray p = options.fixed;
    std::vector<LeastSquaresResult> scan;
    if (options.free[at_dead_time])
        for (int i = 0; i < scan_count; ++i)
            scan.push_back(at_dead_time_of(coarse, p, coarse.highest[at_dead_time] * std::pow(i / (scan_count - 1.0), 2.0)));
    else
        scan.push_back(at_dead_time_of(coarse, p, options.fixed[at_dead_time]));

    LeastSquaresProblem fine = problem_for(data, options);
    fine.polished = data.t.size() <= 4000;
    LeastSquaresResult best;
    best.equations.sum_of_squares = std::numeric_limits<double>::infinity();
    for (std::size_t i = 0; i < scan.size(); ++i) {
        const double here = scan[i].equations.sum_of_squares;
        const bool lowest = (i == 0 || scan[i - 1].equations.sum_of_squares >= here) &&
                            (i + 1 == scan.size() || scan[i + 1].equations.sum_of_squares >= here);
        if (!lowest) continue;
        const ParameterArray start = data.t.size() > 2 * scan_points ? minimize(coarse, scan[i].parameters).parameters
                                                                     : scan[i].parameters;
        const LeastSquaresResult found = minimize(fine, start);
        if (found.equations.sum_of_squares < best.equations.sum_of_squares) best = found;
    }
    return {best.parameters, best.equations};
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
