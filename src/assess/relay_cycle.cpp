#include "assess/relay_cycle.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include "assess/state_exponential.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// A half period from the position's jump to 1/2 on. The delayed position is -`level` until `turn`, then `level`.
struct HalfPeriod {
    double length = 0.0, turn = 0.0, level = 0.5;
    std::size_t pending = 0;        ///< jumps on their way through the dead time
    std::vector<double> start = {}; ///< states at its beginning, and the delayed position just before
    double miss = 0.0;              ///< output just before the jump less the threshold
};

class RelayLoop {
public:
    RelayLoop(const LoopStates& loop, double threshold) : loop_(loop), n_(loop.size()), threshold_(threshold), A_(n_ + 1) {
        for (std::size_t i = 0; i < n_; ++i) {
            for (std::size_t j = 0; j < n_; ++j) A_(i, j) = loop.rates[i].states[j];
            A_(i, n_) = loop.rates[i].input;
        }
    }

    // Antiperiodic: the states at the end are those at the start with the other sign, so that
    // (1 + Phi(H)) z = -(Phi(H - turn) Gamma(turn) (-level) + Gamma(H - turn) level). Source: Tsypkin, 1984.
    HalfPeriod half_period(double length) const {
        HalfPeriod h;
        h.length = length;
        const double whole = std::floor(loop_.dead_time / length);
        if (!(whole < 1e9)) {  // no cycle that fast is one of this loop
            h.start.assign(n_ + 1, 0.0);
            h.miss = std::numeric_limits<double>::quiet_NaN();
            return h;
        }
        h.pending = static_cast<std::size_t>(whole);
        h.turn = std::max(0.0, loop_.dead_time - whole * length);
        h.level = h.pending % 2 == 0 ? 0.5 : -0.5;
        const StateMatrix all = exponential_growth(A_, length);
        std::vector<double> x(n_ + 1, 0.0);
        x[n_] = -h.level;
        if (h.turn > 0.0) grow(exponential_growth(A_, h.turn), x, scratch_);
        x[n_] = h.level;
        grow(exponential_growth(A_, length - h.turn), x, scratch_);
        StateMatrix sum(n_);
        for (std::size_t i = 0; i < n_; ++i) {
            for (std::size_t j = 0; j < n_; ++j) sum(i, j) = all(i, j) + (i == j ? 2.0 : 0.0);
            x[i] = -x[i];
        }
        x.resize(n_);
        const bool solved = solve_in_place(std::move(sum), x);
        x.push_back(-h.level);
        h.start = std::move(x);
        h.miss = solved ? of(loop_.output, h.start) - threshold_ : std::numeric_limits<double>::quiet_NaN();
        return h;
    }

    // The half period at which the output meets the threshold between two that miss it on either side.
    HalfPeriod between(HalfPeriod low, HalfPeriod high) const {
        for (int i = 0; i < 200 && high.length - low.length > 1e-13 * high.length; ++i) {
            // The secant where it falls well inside, the middle otherwise and every third time.
            double at = low.length - low.miss * (high.length - low.length) / (high.miss - low.miss);
            const double margin = 1e-3 * (high.length - low.length);
            if (i % 3 == 2 || !(at > low.length + margin && at < high.length - margin)) at = 0.5 * (low.length + high.length);
            HalfPeriod middle = half_period(at);
            (low.miss > 0.0) == (middle.miss > 0.0) ? low = std::move(middle) : high = std::move(middle);
        }
        return std::abs(low.miss) < std::abs(high.miss) ? low : high;
    }

    // Goes through the half period; false where the output meets a threshold before its end.
    bool goes_through(const HalfPeriod& h, RelayCycle& cycle) const {
        constexpr int parts = 400;
        std::vector<double> x = h.start;
        const double upper = threshold_ + 1.0, slack = 1e-7;
        bool kept = true;
        Extreme value, output;
        for (int stretch = 0; stretch < 2; ++stretch) {
            const double length = stretch == 0 ? h.turn : h.length - h.turn;
            x[n_] = stretch == 0 ? -h.level : h.level;
            if (length <= 0.0) continue;
            const StateMatrix step = exponential_growth(A_, length / parts);
            value.begin(), output.begin();
            for (int k = 0; k <= parts; ++k) {
                if (k > 0) grow(step, x, scratch_);
                const double u = of(loop_.output, x);
                kept &= u <= upper + slack && (u >= -threshold_ - slack || (stretch == 1 && k == parts));
                value.see(of(loop_.value, x));
                output.see(u);
            }
        }
        cycle = {2.0 * h.length, value.largest, output.largest};
        return kept && output_rate(h) > 0.0;
    }

    // Small shifts of the jumps must die out but for a common one: shift k follows from those before through the
    // loop's impulse response.
    bool comes_back(const HalfPeriod& h) const {
        if (h.pending > 1000) return false;
        const double rate = output_rate(h);
        const StateMatrix all = exponential_growth(A_, h.length), late = exponential_growth(A_, h.length - h.turn);
        std::vector<double> kick(n_ + 1, 0.0);
        for (std::size_t i = 0; i < n_; ++i) kick[i] = loop_.rates[i].input;
        grow(late, kick, scratch_);
        std::vector<double> shifts(h.pending + 1, 0.0), x(n_ + 1, 0.0);
        shifts[0] = 1.0;
        double before = 0.0, early = 0.0, last = 0.0;
        constexpr int rounds = 400;
        for (int k = 0; k < rounds; ++k) {
            const double shift = shifts[h.pending] * (h.pending % 2 == 0 ? 1.0 : -1.0);
            grow(all, x, scratch_);
            for (std::size_t i = 0; i < n_; ++i) x[i] = -x[i] + kick[i] * shift;
            const double next = -of(loop_.output, x) / rate, change = std::abs(next - before);
            before = next;
            std::rotate(shifts.begin(), shifts.end() - 1, shifts.end());
            shifts[0] = next;
            if (k < 40) early = std::max(early, change);
            if (k >= rounds - 40) last = std::max(last, change);
            if (!(change < 1e30)) return false;
        }
        return last <= 0.5 * early;
    }

private:
    // The largest magnitude of a signal, by the parabola through the three samples around it.
    struct Extreme {
        double largest = 0.0, before = 0.0, older = 0.0;
        int seen = 0;
        void begin() noexcept { seen = 0; }
        void see(double x) noexcept {
            largest = std::max(largest, std::abs(x));
            if (++seen >= 3 && std::abs(before) >= std::abs(older) && std::abs(before) >= std::abs(x)) {
                const double bend = older - 2.0 * before + x, slope = 0.5 * (x - older);
                if (bend != 0.0) largest = std::max(largest, std::abs(before - 0.5 * slope * slope / bend));
            }
            older = before;
            before = x;
        }
    };

    double of(const SignalForm& signal, const std::vector<double>& x) const {
        double sum = signal.input * x[n_];
        for (std::size_t i = 0; i < n_; ++i) sum += signal.states[i] * x[i];
        return sum;
    }
    double output_rate(const HalfPeriod& h) const {
        double sum = 0.0;
        for (std::size_t i = 0; i < n_; ++i) sum += loop_.output.states[i] * of(loop_.rates[i], h.start);
        return sum;
    }

    const LoopStates& loop_;
    std::size_t n_;
    double threshold_;
    StateMatrix A_;  // states and the delayed position
    mutable std::vector<double> scratch_;
};

// Longest and shortest time that can matter: the half periods to look at lie between.
struct Times {
    double shortest = std::numeric_limits<double>::max(), longest = 0.0;
    void see(double t) noexcept {
        if (!(t > 0.0) || !is_finite(t)) return;
        shortest = std::min(shortest, t);
        longest = std::max(longest, t);
    }
};

Times times_of(const LoopStates& loop) {
    Times times;
    times.see(loop.dead_time);
    for (std::size_t i = 0; i < loop.size(); ++i) {
        const SignalForm& rate = loop.rates[i];
        for (std::size_t j = 0; j <= i; ++j) times.see(1.0 / std::abs(rate.states[j]));
        times.see(1.0 / std::abs(rate.input));
    }
    return times;
}

}  // namespace

std::optional<RelayCycle> relay_cycle(const LoopStates& loop, double threshold) {
    const RelayLoop relay(loop, threshold);
    const Times times = times_of(loop);
    constexpr double ratio = 1.05;
    std::optional<RelayCycle> found;
    double near = times.longest;
    HalfPeriod before = relay.half_period(1e-3 * times.shortest);
    for (double length = before.length * ratio; length < 1e4 * times.longest; length *= ratio) {
        HalfPeriod now = relay.half_period(length);
        if (!is_nan(before.miss) && !is_nan(now.miss) && (before.miss > 0.0) != (now.miss > 0.0)) {
            const HalfPeriod h = relay.between(before, now);
            if (std::abs(h.miss) < 1e-6) {  // not where the miss jumps through infinity
                near = 2.0 * h.length;
                RelayCycle cycle;
                if (relay.goes_through(h, cycle) && relay.comes_back(h)) found = cycle;
            }
        }
        before = std::move(now);
    }
    return found ? found : staircase_cycle(loop, threshold, near);
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
