// A loop with a faulty valve, run by the classical Runge-Kutta method: nothing of the library but its plain structs. The valve is
// written twice: as a hysteresis operator applied once a step, and as events found within the step.
#pragma once

#include <algorithm>
#include <cmath>
#include <functional>
#include <vector>

namespace oracle {

/// Lags in series, then an integrator if asked for, behind dead time; a PI or PID controller with filtered derivative.
struct ValveLoop {
    double gain = 1.0, dead_time = 0.0;
    std::vector<double> lags = {};
    bool integrating = false;
    double Kc = 1.0, Ki = 0.0, Td = 0.0, Tf = 0.0;
};

/// What the last third of a run shows.
struct SeenCycle {
    double period = 0.0, value_amplitude = 0.0, output_amplitude = 0.0;
    int turns = 0;               ///< changes of the position's direction
    double position_swing = 0.0; ///< peak to peak
};

class ValveRun {
public:
    enum class Model { hysteresis_operator, events };

    /// Exactly one of `stick` and `dead_band` is not 0. Starts with the position at `position` and everything else at rest.
    ValveRun(const ValveLoop& loop, double stick, double dead_band, Model model, double step, double position, double value)
        : loop_(loop), stick_(stick), play_(0.5 * dead_band), model_(model), h_(step), position_(position) {
        states_.assign(loop.lags.size() + (loop.integrating ? 1 : 0) + 2, 0.0);
        if (value != 0.0) states_[value_index()] = value / loop.gain;
        history_ = {{-1e300, position}};
        const double u = output(states_);
        if (play_ > 0.0 && std::abs(u - position_) > play_) {
            side_ = u > position_ ? 1 : -1;
            place(u - side_ * play_);
        }
    }

    SeenCycle run(double horizon) {
        std::vector<double> before, ups;
        double value_high = -1e300, value_low = 1e300, output_high = -1e300, output_low = 1e300, high = -1e300, low = 1e300;
        SeenCycle seen;
        double last_way = 0.0;
        while (time_ < horizon) {
            const double position_before = position_;
            model_ == Model::events ? step_to_event() : step_whole();
            const double move = position_ - position_before;
            if (move != 0.0 && move * last_way < 0.0) {
                if (time_ > horizon * 2.0 / 3.0) ++seen.turns;
                if (move > 0.0 && time_ > horizon * 2.0 / 3.0) ups.push_back(time_);
            }
            if (move != 0.0) last_way = move;
            if (time_ < horizon * 2.0 / 3.0) continue;
            const double u = output(states_), y = value(states_);
            value_high = std::max(value_high, y), value_low = std::min(value_low, y);
            output_high = std::max(output_high, u), output_low = std::min(output_low, u);
            high = std::max(high, position_), low = std::min(low, position_);
        }
        if (ups.size() >= 2) seen.period = (ups.back() - ups.front()) / static_cast<double>(ups.size() - 1);
        seen.value_amplitude = 0.5 * (value_high - value_low);
        seen.output_amplitude = 0.5 * (output_high - output_low);
        seen.position_swing = high - low;
        return seen;
    }

private:
    using States = std::vector<double>;
    struct Past {
        double time, position;
    };

    std::size_t value_index() const { return loop_.lags.size() + (loop_.integrating ? 1 : 0) - 1; }
    double value(const States& x) const { return loop_.gain * x[value_index()]; }
    // Filtered process value of the derivative, and the integral, are the last two states.
    double output(const States& x) const {
        const double y = value(x), D = loop_.Td > 0.0 ? loop_.Td * (y - x[x.size() - 2]) / loop_.Tf : 0.0;
        return -loop_.Kc * (y + D) + x[x.size() - 1];
    }
    // A stem that jumps is held between its events; one that slides is taken straight between its steps.
    double delayed(double t) const {
        const auto after = std::upper_bound(history_.begin(), history_.end(), t, [](double a, const Past& p) { return a < p.time; });
        const Past& left = *(after - 1);
        if (stick_ > 0.0 || after == history_.end() || left.time < -1e299) return left.position;
        return left.position + (after->position - left.position) * (t - left.time) / (after->time - left.time);
    }
    States rates(const States& x, double t) const {
        States d(x.size(), 0.0);
        double w = delayed(t - loop_.dead_time);
        std::size_t i = 0;
        for (double T : loop_.lags) {
            d[i] = (w - x[i]) / T;
            w = x[i++];
        }
        if (loop_.integrating) d[i] = w;
        const double y = value(x);
        d[x.size() - 2] = loop_.Td > 0.0 ? (y - x[x.size() - 2]) / loop_.Tf : 0.0;
        d[x.size() - 1] = -loop_.Ki * y;
        return d;
    }
    States moved(double h) const {
        const auto sum = [&](const States& d, double share) {
            States x = states_;
            for (std::size_t i = 0; i < x.size(); ++i) x[i] += share * d[i];
            return x;
        };
        // A jump of the delayed position lies between the steps but for rounding: look just inside.
        const double in = 1e-9 * h;
        const States a = rates(states_, time_ + in), b = rates(sum(a, 0.5 * h), time_ + 0.5 * h);
        const States c = rates(sum(b, 0.5 * h), time_ + 0.5 * h), e = rates(sum(c, h), time_ + h - in);
        States x = states_;
        for (std::size_t i = 0; i < x.size(); ++i) x[i] += h / 6.0 * (a[i] + 2.0 * b[i] + 2.0 * c[i] + e[i]);
        return x;
    }
    double output_rate(const States& x, double t) const {
        const States d = rates(x, t);
        const double y = loop_.gain * d[value_index()], D = loop_.Td > 0.0 ? loop_.Td * (y - d[x.size() - 2]) / loop_.Tf : 0.0;
        return -loop_.Kc * (y + D) + d[x.size() - 1];
    }
    void take(const States& x, double h) {
        states_ = x;
        time_ += h;
    }
    void place(double position) {
        position_ = position;
        history_.push_back({time_, position});
        // What is older than the dead time is not asked for again.
        if (history_.size() > 200000)
            history_.erase(history_.begin(), std::upper_bound(history_.begin(), history_.end() - 2, time_ - loop_.dead_time - h_ * 4.0,
                                                              [](double a, const Past& p) { return a < p.time; }) - 1);
    }

    void step_whole() {
        take(moved(h_), h_);
        const double u = output(states_);
        if (stick_ > 0.0) {
            if (std::abs(u - position_) > stick_) place(u);
        } else {
            place(std::clamp(position_, u - play_, u + play_));
        }
    }

    // The first zero of `miss` within the step ahead, or the whole step.
    double time_of(const std::function<double(const States&, double)>& miss) const {
        const double first = miss(states_, 0.0), last = miss(moved(h_), h_);
        if (!(first < 0.0) || last < 0.0) return h_;
        double low = 0.0, high = h_;
        for (int i = 0; i < 40; ++i) {
            const double middle = 0.5 * (low + high);
            (miss(moved(middle), middle) < 0.0 ? low : high) = middle;
        }
        return high;
    }
    void step_to_event() {
        if (stick_ > 0.0) {
            const double up = time_of([&](const States& x, double) { return output(x) - position_ - stick_; });
            const double down = time_of([&](const States& x, double) { return position_ - output(x) - stick_; });
            const double h = std::min(up, down);
            take(moved(h), h);
            if (up < h_ || down < h_) place(up < down ? position_ + stick_ : position_ - stick_);
            return;
        }
        // Free, or in contact on the upper (1) or lower (-1) side.
        const int side = side_;
        if (side == 0) {
            const double up = time_of([&](const States& x, double) { return output(x) - position_ - play_; });
            const double down = time_of([&](const States& x, double) { return position_ - output(x) - play_; });
            const double h = std::min(up, down);
            take(moved(h), h);
            if (up < h_ || down < h_) side_ = up < down ? 1 : -1;
            place(position_);
            return;
        }
        const double h = time_of([&](const States& x, double ahead) { return -side * output_rate(x, time_ + ahead * (1.0 - 1e-9)); });
        take(moved(h), h);
        place(output(states_) - side * play_);
        if (h < h_ || side * output_rate(states_, time_ + 1e-9 * h_) <= 0.0) side_ = 0;
    }

    ValveLoop loop_;
    double stick_, play_;
    Model model_;
    double h_, time_ = 0.0, position_;
    int side_ = 0;
    States states_;
    std::vector<Past> history_;
};

}  // namespace oracle
