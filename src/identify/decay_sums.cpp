#include "identify/decay_sums.hpp"

#include "math/vector_exponential.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

enum Sum : std::size_t { s_e, s_ee, s_ye, s_ce, s_y, s_yc, s_c, s_cc, sum_count };

// Eight lanes in a fixed order: the same bits on every machine.
TAUWRIGHT_DETAIL_FOR_EVERY_CPU
void add(const double* t, const double* y, std::size_t count, double start, double rate, double center, double* sums) {
    constexpr std::size_t lanes = 8;
    double acc[sum_count][lanes] = {};
    std::size_t i = 0;
    for (; i + lanes <= count; i += lanes) {
        for (std::size_t l = 0; l < lanes; ++l) {
            const double e = decaying_exponential(-rate * (t[i + l] - start)), c = t[i + l] - center, v = y[i + l];
            acc[s_e][l] += e;
            acc[s_ee][l] += e * e;
            acc[s_ye][l] += v * e;
            acc[s_ce][l] += c * e;
            acc[s_y][l] += v;
            acc[s_yc][l] += v * c;
            acc[s_c][l] += c;
            acc[s_cc][l] += c * c;
        }
    }
    for (; i < count; ++i) {
        const double e = decaying_exponential(-rate * (t[i] - start)), c = t[i] - center, v = y[i];
        const double terms[sum_count] = {e, e * e, v * e, c * e, v, v * c, c, c * c};
        for (std::size_t k = 0; k < sum_count; ++k) acc[k][i % lanes] += terms[k];
    }
    for (std::size_t k = 0; k < sum_count; ++k)
        for (std::size_t l = 0; l < lanes; ++l) sums[k] += acc[k][l];
}

TAUWRIGHT_DETAIL_FOR_EVERY_CPU
void fill(const double* t, const double* y, std::size_t count, const DecayModel& m, double* out) {
    for (std::size_t i = 0; i < count; ++i)
        out[i] = y[i] - (m.constant + m.drift * (t[i] - m.center) + m.decay * decaying_exponential(-m.rate * (t[i] - m.start)));
}

}  // namespace

void decay_residuals(const double* t, const double* y, std::size_t count, const DecayModel& model, double* out) {
    fill(t, y, count, model, out);
}

DecaySums decay_sums(const double* t, const double* y, std::size_t count, double start, double rate, double center) {
    double s[sum_count] = {};
    add(t, y, count, start, rate, center, s);
    return {static_cast<double>(count), s[s_e], s[s_ee], s[s_ye], s[s_ce], s[s_y], s[s_yc], s[s_c], s[s_cc]};
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
