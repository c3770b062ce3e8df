// Cycles with more than one jump each way, as tight loops have them: the loop followed from jump to jump until it repeats.
#include <algorithm>
#include <cmath>
#include <deque>
#include <vector>

#include "assess/relay_cycle.hpp"
#include "assess/state_exponential.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double steps_a_period = 1500.0, most_periods = 150.0;
constexpr std::size_t alike = 6;  // periods in a row that must agree

class Staircase {
public:
    Staircase(const LoopStates& loop, double threshold, double period)
        : loop_(loop), n_(loop.size()), away_(threshold + 0.5), step_(period / steps_a_period), end_(period * most_periods), A_(n_ + 1) {
        for (std::size_t i = 0; i < n_; ++i) {
            for (std::size_t j = 0; j < n_; ++j) A_(i, j) = loop.rates[i].states[j];
            A_(i, n_) = loop.rates[i].input;
        }
        full_ = exponential_growth(A_, step_);
        x_.assign(n_ + 1, 0.0);
        x_[n_] = position_;
    }

    std::optional<RelayCycle> operator()() {
        while (time_ < end_) {
            const double ahead = under_way_.empty() ? step_ : std::min(step_, under_way_.front().first - time_);
            go(ahead);
            while (!under_way_.empty() && under_way_.front().first <= time_) {
                x_[n_] = under_way_.front().second;
                under_way_.pop_front();
            }
            look();
            for (int jumps = 0; std::abs(output() - position_) >= away_ * (1.0 - 1e-12); ++jumps) {
                if (jumps == 100) return std::nullopt;
                jump(output() > position_ ? 1.0 : -1.0);
            }
            if (!is_finite(output())) return std::nullopt;
            if (repeats()) return cycle();
        }
        return std::nullopt;
    }

private:
    double of(const SignalForm& signal) const {
        double sum = signal.input * x_[n_];
        for (std::size_t i = 0; i < n_; ++i) sum += signal.states[i] * x_[i];
        return sum;
    }
    double output() const { return of(loop_.output); }
    double output_rate() const {
        double sum = 0.0;
        for (std::size_t i = 0; i < n_; ++i) sum += loop_.output.states[i] * of(loop_.rates[i]);
        return sum;
    }

    // As far as `ahead`, or to where the output gets away from the position: the cubic through both ends of the step
    // and their slopes tells where.
    void go(double ahead) {
        if (ahead <= 0.0) return;
        const std::vector<double> start = x_;
        const double u0 = output(), slope0 = output_rate() * ahead;
        if (ahead == step_) grow(full_, x_, scratch_);
        else grow(exponential_growth(A_, ahead), x_, scratch_);
        const double u1 = output(), slope1 = output_rate() * ahead;
        if (std::abs(u1 - position_) <= away_ || std::abs(u0 - position_) >= away_) {
            time_ += ahead;
            return;
        }
        const double target = position_ + (u1 > position_ ? away_ : -away_), sign = u1 > position_ ? 1.0 : -1.0;
        double low = 0.0, high = 1.0;
        for (int i = 0; i < 50; ++i) {
            const double s = 0.5 * (low + high), r = 1.0 - s;
            const double u = (1.0 + 2.0 * s) * r * r * u0 + s * r * r * slope0 + s * s * (3.0 - 2.0 * s) * u1 - s * s * r * slope1;
            (sign * (u - target) < 0.0 ? low : high) = s;
        }
        x_ = start;
        grow(exponential_growth(A_, high * ahead), x_, scratch_);
        time_ += high * ahead;
        // What the cubic misses does not keep it from jumping here.
        look();
        jump(sign);
    }

    void jump(double way) {
        position_ += way;
        if (loop_.dead_time > 0.0) under_way_.emplace_back(time_ + loop_.dead_time, position_);
        else x_[n_] = position_;
        if (way > 0.0 && last_way_ < 0.0) {  // a period ends with the first jump up
            marks_.push_back(time_);
            sizes_.push_back(seen_);
            seen_ = {};
            look();
        }
        last_way_ = way;
    }

    struct Seen {
        double value_low = 1e300, value_high = -1e300, output_low = 1e300, output_high = -1e300;
    };
    void look() {
        const double y = of(loop_.value), u = output();
        seen_.value_low = std::min(seen_.value_low, y), seen_.value_high = std::max(seen_.value_high, y);
        seen_.output_low = std::min(seen_.output_low, u), seen_.output_high = std::max(seen_.output_high, u);
    }
    bool repeats() const {
        if (marks_.size() < alike + 2) return false;
        const double last = marks_.back() - marks_[marks_.size() - 2], size = sizes_.back().value_high;
        for (std::size_t i = 1; i < alike; ++i) {
            const double period = marks_[marks_.size() - 1 - i] - marks_[marks_.size() - 2 - i];
            if (std::abs(period - last) > 1e-4 * last || std::abs(sizes_[sizes_.size() - 1 - i].value_high - size) > 1e-3 * std::abs(size))
                return false;
        }
        return true;
    }
    RelayCycle cycle() const {
        const Seen& s = sizes_.back();
        return {marks_.back() - marks_[marks_.size() - 2], 0.5 * (s.value_high - s.value_low), 0.5 * (s.output_high - s.output_low)};
    }

    const LoopStates& loop_;
    std::size_t n_;
    double away_, step_, end_, time_ = 0.0, position_ = 0.5, last_way_ = 0.0;
    StateMatrix A_, full_;  // states and the delayed position
    std::vector<double> x_, scratch_, marks_;
    std::vector<Seen> sizes_;
    std::deque<std::pair<double, double>> under_way_;
    Seen seen_;
};

}  // namespace

std::optional<RelayCycle> staircase_cycle(const LoopStates& loop, double threshold, double period) {
    return Staircase(loop, threshold, period)();
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
