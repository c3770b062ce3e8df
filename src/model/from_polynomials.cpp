#include <complex>
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

// The derivative of order `times`, highest power first.
std::vector<double> derivative(std::span<const double> p, std::size_t times) {
    std::vector<double> d(p.begin(), p.end());
    for (; times > 0; --times) {
        const std::size_t degree = d.size() - 1;
        for (std::size_t i = 0; i < degree; ++i) d[i] *= static_cast<double>(degree - i);
        d.pop_back();
    }
    return d;
}

// An m-fold root is a simple root of the derivative of order m - 1, where Newton's iteration is at ease.
std::complex<double> repeated_root(std::span<const double> polynomial, std::size_t times, std::complex<double> near) {
    const std::vector<double> p = derivative(polynomial, times - 1);
    for (int pass = 0; pass < 4; ++pass) {
        std::complex<double> value = 0.0, slope = 0.0;
        for (double c : p) {
            slope = slope * near + value;
            value = value * near + c;
        }
        if (slope == 0.0) break;
        near -= value / slope;
    }
    return near;
}

// Roots that rounding cannot tell apart become equal: their mean is far more accurate than they are,
// and a repeated factor stays recognizable as one.
std::vector<std::complex<double>> merged(std::span<const double> polynomial, detail::PolynomialRoots found) {
    auto& roots = found.values;
    std::vector<bool> taken(roots.size(), false);
    for (std::size_t i = 0; i < roots.size(); ++i) {
        if (taken[i]) continue;
        std::vector<std::size_t> cluster{i};
        std::complex<double> sum = roots[i];
        for (std::size_t j = i + 1; j < roots.size(); ++j) {
            if (taken[j] || std::abs(roots[j] - roots[i]) > found.error_radii[i] + found.error_radii[j]) continue;
            cluster.push_back(j);
            sum += roots[j];
        }
        if (cluster.size() < 2) continue;
        std::complex<double> mean = sum / static_cast<double>(cluster.size());
        // A cluster on the real axis holds its own conjugates; one off it has a mirrored twin.
        const bool real = std::abs(mean.imag()) <= found.error_radii[i];
        const std::complex<double> polished = repeated_root(polynomial, cluster.size(), real ? mean.real() : mean);
        if (std::abs(polished - mean) <= found.error_radii[i]) mean = polished;
        for (std::size_t j : cluster) {
            roots[j] = real ? mean.real() : mean;
            taken[j] = true;
        }
    }
    return roots;
}

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
    const auto roots = merged(coefficients, detail::polynomial_roots(coefficients));
    for (const auto& root : roots) {
        if (root.imag() < 0.0) continue;  // its conjugate speaks for it
        const double T = 1.0 / std::abs(root);
        if (root.imag() == 0.0) side.real.push_back(-1.0 / root.real());
        else side.pairs.push_back({.time_constant = T, .damping = -root.real() * T});
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
