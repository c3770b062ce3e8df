#include "assess/dead_band_cycle.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <limits>
#include <vector>

#include "assess/state_exponential.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

using Complex = std::complex<double>;
constexpr double pi = 3.14159265358979323846;

// Describing function of backlash of half width b for an amplitude A, x = b/A in (0, 1): from 1 at x = 0 to 0 with a lag of
// 90 degrees at x = 1. Source: Gelb and Vander Velde, 1968.
Complex describing_function(double x) {
    const double y = 1.0 - 2.0 * x;
    return {(0.5 * pi + std::asin(y) + 2.0 * y * std::sqrt(x * (1.0 - x))) / pi, -4.0 * x * (1.0 - x) / pi};
}

// The x whose describing function lags by `lag` (0 to 90 degrees): its lag grows with x.
double size_of_lag(double lag) {
    double low = 0.0, high = 1.0;
    for (int i = 0; i < 60; ++i) {
        const double middle = 0.5 * (low + high);
        (-std::arg(describing_function(middle)) < lag ? low : high) = middle;
    }
    return 0.5 * (low + high);
}

struct Meeting {
    double x = 0.0;
    double ratio = 0.0;  ///< |L N|; 0 where the loop does not lag by 90 to 180 degrees, or is below 1/2
};

Meeting meeting_at(const TransferFunction& loop, double w) {
    const Complex L = loop(Complex{0.0, w});
    const double size = std::abs(L);  // the describing function is never above 1
    if (!(L.real() < 0.0 && L.imag() < 0.0) || !(size > 0.5) || !is_finite(size)) return {};
    Meeting m;
    m.x = size_of_lag(std::atan2(-L.imag(), -L.real()));
    m.ratio = size * std::abs(describing_function(m.x));
    return m;
}

// Odd harmonics of a waveform about 0, and the samples of one period they are balanced on.
constexpr std::size_t harmonics = 10, samples = 512;
using Harmonics = std::array<Complex, harmonics>;
using Waveform = std::array<double, samples>;

class Balance {
public:
    Balance(const TransferFunction& process, const TransferFunction& loop) : process_(process), loop_(loop) {
        for (std::size_t i = 0; i < samples; ++i) {
            const double angle = 2.0 * pi * static_cast<double>(i) / static_cast<double>(samples);
            turn_[i] = {std::cos(angle), std::sin(angle)};
        }
    }

    // Newton from the describing function's guess; false where it does not come together.
    bool solve(double w, double amplitude) {
        std::vector<double> unknowns(2 * harmonics, 0.0);  // frequency instead of the first sine: time has no origin
        unknowns[0] = amplitude, unknowns[1] = w;
        double size = norm(residual(unknowns));
        for (int round = 0; round < 60 && size > 1e-9 * amplitude; ++round) {
            std::vector<double> step = newton_step(unknowns);
            if (step.empty()) return false;
            double share = 1.0;
            for (int halving = 0;; ++halving, share *= 0.5) {
                if (halving == 12) return size <= 1e-4 * amplitude && keep(unknowns);
                std::vector<double> tried = unknowns;
                for (std::size_t i = 0; i < tried.size(); ++i) tried[i] += share * step[i];
                if (!(tried[0] > 0.5) || !(tried[1] > 0.2 * w && tried[1] < 5.0 * w)) continue;
                const double now = norm(residual(tried));
                if (!(now < size)) continue;
                unknowns = tried, size = now;
                break;
            }
        }
        return size <= 1e-4 * amplitude && keep(unknowns);
    }

    double frequency() const noexcept { return w_; }
    double output_amplitude() const { return largest(wave(output_)); }
    double value_amplitude() const {
        const Harmonics position = harmonics_of(played(wave(output_)));
        Harmonics value;
        for (std::size_t k = 0; k < harmonics; ++k) value[k] = position[k] * process_(Complex{0.0, order(k) * w_});
        return largest(wave(value));
    }
    double fastest_travel() const {
        const Waveform position = played(wave(output_));
        double fastest = 0.0;
        for (std::size_t i = 1; i < samples; ++i) fastest = std::max(fastest, std::abs(position[i] - position[i - 1]));
        return fastest * static_cast<double>(samples) * w_ / (2.0 * pi);
    }

private:
    static double order(std::size_t k) noexcept { return 2.0 * static_cast<double>(k) + 1.0; }
    static double largest(const Waveform& x) {
        double size = 0.0;
        for (double v : x) size = std::max(size, std::abs(v));
        return size;
    }
    static double norm(const std::vector<double>& x) {
        double sum = 0.0;
        for (double v : x) sum += v * v;
        return std::sqrt(sum);
    }
    Waveform wave(const Harmonics& h) const {
        Waveform x{};
        for (std::size_t k = 0; k < harmonics; ++k)
            for (std::size_t i = 0; i < samples; ++i) {
                const Complex e = turn_[(2 * k + 1) * i % samples];
                x[i] += h[k].real() * e.real() - h[k].imag() * e.imag();
            }
        return x;
    }
    Harmonics harmonics_of(const Waveform& x) const {
        Harmonics h{};
        for (std::size_t k = 0; k < harmonics; ++k) {
            for (std::size_t i = 0; i < samples; ++i) h[k] += x[i] * std::conj(turn_[(2 * k + 1) * i % samples]);
            h[k] *= 2.0 / static_cast<double>(samples);
        }
        return h;
    }
    // The position after one period to forget where it began.
    static Waveform played(const Waveform& demand) {
        Waveform position{};
        double p = demand[0];
        for (int round = 0; round < 2; ++round)
            for (std::size_t i = 0; i < samples; ++i) position[i] = p = std::clamp(p, demand[i] - 0.5, demand[i] + 0.5);
        return position;
    }
    static Harmonics output_of(const std::vector<double>& unknowns) {
        Harmonics u;
        u[0] = unknowns[0];
        for (std::size_t k = 1; k < harmonics; ++k) u[k] = {unknowns[2 * k], unknowns[2 * k + 1]};
        return u;
    }
    std::vector<double> residual(const std::vector<double>& unknowns) const {
        const Harmonics u = output_of(unknowns), p = harmonics_of(played(wave(u)));
        std::vector<double> rest(2 * harmonics);
        for (std::size_t k = 0; k < harmonics; ++k) {
            const Complex r = u[k] + loop_(Complex{0.0, order(k) * unknowns[1]}) * p[k];
            rest[2 * k] = r.real(), rest[2 * k + 1] = r.imag();
        }
        return rest;
    }
    std::vector<double> newton_step(const std::vector<double>& unknowns) const {
        const std::vector<double> here = residual(unknowns);
        StateMatrix slope(unknowns.size());
        for (std::size_t j = 0; j < unknowns.size(); ++j) {
            std::vector<double> moved = unknowns;
            const double by = 1e-6 * (j == 1 ? unknowns[1] : unknowns[0]);
            moved[j] += by;
            const std::vector<double> there = residual(moved);
            for (std::size_t i = 0; i < unknowns.size(); ++i) slope(i, j) = (there[i] - here[i]) / by;
        }
        std::vector<double> step = here;
        if (!solve_in_place(std::move(slope), step)) return {};
        for (double& x : step) {
            x = -x;
            if (!is_finite(x)) return {};
        }
        return step;
    }
    bool keep(const std::vector<double>& unknowns) {
        output_ = output_of(unknowns);
        w_ = unknowns[1];
        return true;
    }

    const TransferFunction& process_;
    const TransferFunction& loop_;
    std::array<Complex, samples> turn_{};
    Harmonics output_{};
    double w_ = 0.0;
};

// From far below the slowest to far above the fastest part of the loop.
std::pair<double, double> frequencies_of(const TransferFunction& loop) {
    double slowest = std::numeric_limits<double>::max(), fastest = 0.0;
    const auto see = [&](double w) {
        if (!(w > 0.0) || !is_finite(w)) return;
        slowest = std::min(slowest, w);
        fastest = std::max(fastest, w);
    };
    for (const auto& root : loop.poles()) see(std::abs(root));
    for (const auto& root : loop.zeros()) see(std::abs(root));
    see(1.0 / loop.dead_time());
    const int integrators = loop.integrators() - loop.zeros_at_origin();
    if (integrators > 0) see(std::pow(std::abs(loop.gain()), 1.0 / integrators));
    if (fastest == 0.0) slowest = fastest = 1.0;
    return {1e-4 * slowest, 1e2 * fastest};
}

}  // namespace

DeadBandCycle dead_band_cycle(const TransferFunction& process, const TransferFunction& loop) {
    DeadBandCycle cycle;
    const auto [low, high] = frequencies_of(loop);
    constexpr double ratio = 1.02;
    Meeting before = meeting_at(loop, low);
    double at = 0.0, size = 1.0;
    // Of several meetings the one with the largest cycle: the one that a large disturbance ends in.
    for (double w = low * ratio; w < high; w *= ratio) {
        const Meeting now = meeting_at(loop, w);
        cycle.closeness = std::max(cycle.closeness, now.ratio);
        if ((before.ratio > 1.0) != (now.ratio > 1.0)) {
            double a = w / ratio, b = w;
            for (int i = 0; i < 50; ++i) {
                const double middle = 0.5 * (a + b);
                ((meeting_at(loop, middle).ratio > 1.0) == (before.ratio > 1.0) ? a : b) = middle;
            }
            const Meeting meeting = meeting_at(loop, before.ratio > 1.0 ? a : b);
            // A jump of the ratio to 0 where the loop leaves the quadrant is no meeting.
            if (std::abs(meeting.ratio - 1.0) < 1e-3 && meeting.x < size) size = meeting.x, at = 0.5 * (a + b);
        }
        before = now;
    }
    cycle.exists = at > 0.0;
    if (!cycle.exists) return cycle;
    Balance balance(process, loop);
    if (!balance.solve(at, 0.5 / size)) return cycle;
    cycle.period = 2.0 * pi / balance.frequency();
    cycle.value_amplitude = balance.value_amplitude();
    cycle.output_amplitude = balance.output_amplitude();
    cycle.fastest_travel = balance.fastest_travel();
    return cycle;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
