#include "math/damped_least_squares.hpp"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>

#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr auto most = static_cast<int>(most_parameters);
using Matrix = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::ColMajor, most, most>;
using Vector = Eigen::Matrix<double, Eigen::Dynamic, 1, Eigen::ColMajor, most, 1>;

std::vector<std::size_t> indices(const std::array<bool, most_parameters>& chosen) {
    std::vector<std::size_t> list;
    for (std::size_t i = 0; i < most_parameters; ++i)
        if (chosen[i]) list.push_back(i);
    return list;
}

// The chosen rows and columns scaled to a unit diagonal, which tames parameters of unlike size.
struct ScaledSystem {
    Matrix gram;
    Vector gradient, scale;
};

ScaledSystem scaled(const NormalEquations& e, const std::vector<std::size_t>& chosen) {
    const auto n = static_cast<Eigen::Index>(chosen.size());
    ScaledSystem s{Matrix(n, n), Vector(n), Vector(n)};
    for (Eigen::Index i = 0; i < n; ++i) {
        const double diagonal = e.gram[chosen[static_cast<std::size_t>(i)]][chosen[static_cast<std::size_t>(i)]];
        s.scale(i) = diagonal > 0.0 ? 1.0 / std::sqrt(diagonal) : 0.0;
    }
    for (Eigen::Index i = 0; i < n; ++i) {
        const std::size_t row = chosen[static_cast<std::size_t>(i)];
        s.gradient(i) = e.gradient[row] * s.scale(i);
        for (Eigen::Index j = 0; j < n; ++j)
            s.gram(i, j) = i == j ? 1.0 : e.gram[row][chosen[static_cast<std::size_t>(j)]] * s.scale(i) * s.scale(j);
    }
    return s;
}

// Free parameters that do not push against a bound they stand on.
std::vector<std::size_t> movable(const LeastSquaresProblem& problem, const ParameterArray& p, const NormalEquations& e) {
    auto chosen = problem.free;
    for (std::size_t i = 0; i < most_parameters; ++i)
        if ((p[i] <= problem.lowest[i] && e.gradient[i] <= 0.0) || (p[i] >= problem.highest[i] && e.gradient[i] >= 0.0))
            chosen[i] = false;
    return indices(chosen);
}

struct Step {
    ParameterArray to = {};
    double predicted = 0.0;  // decrease of the sum of squares that an undamped step promises
    bool possible = false;
};

Step step_from(const LeastSquaresProblem& problem, const LeastSquaresResult& at, double damping) {
    Step step{at.parameters, 0.0, false};
    const auto chosen = movable(problem, at.parameters, at.equations);
    if (chosen.empty()) return step;
    ScaledSystem system = scaled(at.equations, chosen);
    step.predicted = Eigen::LDLT<Matrix>(system.gram).solve(system.gradient).dot(system.gradient);
    system.gram.diagonal().array() += damping;
    const Vector move = Eigen::LDLT<Matrix>(system.gram).solve(system.gradient);
    for (std::size_t i = 0; i < chosen.size(); ++i) {
        const std::size_t k = chosen[i];
        const auto row = static_cast<Eigen::Index>(i);
        step.to[k] = std::clamp(step.to[k] + move(row) * system.scale(row), problem.lowest[k], problem.highest[k]);
    }
    step.possible = true;
    return step;
}

// Near the minimum the sum of squares no longer tells better from worse, but the gradient does.
void polish(const LeastSquaresProblem& problem, LeastSquaresResult& best) {
    Step step = step_from(problem, best, 0.0);
    for (int pass = 0; pass < 10 && step.possible; ++pass) {
        LeastSquaresResult next{step.to, problem.evaluate(step.to), true};
        const Step after = step_from(problem, next, 0.0);
        if (!(after.predicted < step.predicted)) return;
        best = next;
        step = after;
    }
}

}  // namespace

LeastSquaresResult minimize(const LeastSquaresProblem& problem, const ParameterArray& start) {
    LeastSquaresResult best{start, problem.evaluate(start), false};
    const double freedom = std::max(1.0, static_cast<double>(problem.samples) -
                                             static_cast<double>(indices(problem.free).size()));
    double damping = problem.damping;
    for (int pass = 1; pass < problem.most_passes && !best.converged; ++pass) {
        const Step step = step_from(problem, best, damping);
        if (!step.possible || !(step.predicted > problem.tolerance * best.equations.sum_of_squares / freedom)) {
            best.converged = true;
            break;
        }
        const NormalEquations at_trial = problem.evaluate(step.to);
        if (is_finite(at_trial.sum_of_squares) && at_trial.sum_of_squares <= best.equations.sum_of_squares) {
            best.converged = at_trial.sum_of_squares == best.equations.sum_of_squares;  // rounding decides from here on
            best.parameters = step.to;
            best.equations = at_trial;
            damping *= 0.02;
        } else {
            damping = std::max(damping * 30.0, 1e-6);
            if (damping > 1e12) break;
        }
    }
    if (problem.polished) polish(problem, best);
    return best;
}

std::optional<ParameterMatrix> inverse_of_free(const NormalEquations& equations,
                                               const std::array<bool, most_parameters>& free) {
    ParameterMatrix inverse{};
    const auto chosen = indices(free);
    const ScaledSystem system = scaled(equations, chosen);
    const Eigen::LDLT<Matrix> factors(system.gram);
    // A parameter that no sample feels has a column of zeros.
    if (chosen.empty() || !(system.scale.minCoeff() > 0.0) || !(factors.vectorD().minCoeff() > 1e-14)) return std::nullopt;
    const Matrix inverse_scaled = factors.solve(Matrix::Identity(system.gram.rows(), system.gram.cols()));
    for (std::size_t i = 0; i < chosen.size(); ++i)
        for (std::size_t j = 0; j < chosen.size(); ++j) {
            const auto r = static_cast<Eigen::Index>(i), c = static_cast<Eigen::Index>(j);
            inverse[chosen[i]][chosen[j]] = inverse_scaled(r, c) * system.scale(r) * system.scale(c);
        }
    return inverse;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
