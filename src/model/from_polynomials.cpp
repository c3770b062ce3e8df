#include <vector>

#include "math/polynomial_roots.hpp"
#include "tauwright/model/transfer_function.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

struct Side {
    double lowest = 0.0;  // the lowest coefficient that is not 0
    int at_origin = 0;
    std::vector<double> real;
    std::vector<QuadraticFactor> pairs;
};

Side factored(const char* name, std::span<const double> coefficients) {
    for (std::size_t i = 0; i < coefficients.size(); ++i)
        detail::require_finite(std::string(name) + "[" + std::to_string(i) + "]", coefficients[i]);
    while (!coefficients.empty() && coefficients.front() == 0.0) coefficients = coefficients.subspan(1);
    if (coefficients.empty())
        throw Error(error_code::out_of_domain,
                    std::string(name) + " has no coefficient other than 0; give at least one, highest power first");
    Side side;
    while (coefficients.back() == 0.0) {
        ++side.at_origin;
        coefficients = coefficients.first(coefficients.size() - 1);
    }
    side.lowest = coefficients.back();
    const auto roots = detail::polynomial_roots(coefficients).values;
    for (std::size_t i = 0; i < roots.size(); ++i) {
        if (roots[i].imag() == 0.0) {
            side.real.push_back(-1.0 / roots[i].real());
        } else {
            const double T = 1.0 / std::abs(roots[i]);
            side.pairs.push_back({.time_constant = T, .damping = -roots[i].real() * T});
            ++i;  // its conjugate
        }
    }
    return side;
}

}  // namespace

TransferFunction TransferFunction::from_polynomials(std::span<const double> numerator,
                                                    std::span<const double> denominator, double dead_time) {
    Side above = factored("numerator", numerator);
    Side below = factored("denominator", denominator);
    return from_factors({.gain = above.lowest / below.lowest,
                         .integrators = below.at_origin,
                         .zeros_at_origin = above.at_origin,
                         .leads = std::move(above.real),
                         .lags = std::move(below.real),
                         .lead_pairs = std::move(above.pairs),
                         .lag_pairs = std::move(below.pairs),
                         .dead_time = dead_time});
}

}  // namespace v0
}  // namespace tauwright
