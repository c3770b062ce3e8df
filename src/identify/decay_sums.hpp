// Sums over samples against one decaying exponential, vectorized.
#pragma once

#include <cstddef>

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Over the samples of a block, with e = exp(-(t - start) rate) and c = t - center.
struct DecaySums {
    double n = 0, e = 0, ee = 0, ye = 0, ce = 0, y = 0, yc = 0, c = 0, cc = 0;
};

DecaySums decay_sums(const double* t, const double* y, std::size_t count, double start, double rate, double center);

/// out[i] = y[i] - (constant + drift (t[i] - center) + decay exp(-(t[i] - start) rate)).
struct DecayModel {
    double start = 0, rate = 0, center = 0, constant = 0, drift = 0, decay = 0;
};
void decay_residuals(const double* t, const double* y, std::size_t count, const DecayModel& model, double* out);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
