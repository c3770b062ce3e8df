// The loop without dead time: one linear system with the drives as states, by its matrix exponential.
#include <algorithm>
#include <cmath>

#include "assess/continuous_run.hpp"
#include "assess/state_exponential.hpp"
#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// Steps between two points at which the output is held against its limits.
constexpr std::size_t looks = 4;

class InstantRun {
public:
    InstantRun(const LoopStates& loop, ContinuousRun& run) : run_(run), n_(loop.size()), A_(n_ + 4) {
        // u = Cu z + Du (u + d) + Fu r, solved for u.
        const double rest = 1.0 - loop.output.input;
        if (std::abs(rest) < 1e-12)
            refuse(error_code::out_of_domain, "settings.gain times the process's instant gain", -loop.output.input,
                   "without dead time the loop answers itself at once and has no solution; add dead time or a filter");
        u_.assign(n_ + 4, 0.0);
        for (std::size_t i = 0; i < n_; ++i) u_[i] = loop.output.states[i] / rest;
        u_[n_] = loop.output.setpoint / rest;
        u_[n_ + 1] = loop.output.input / rest;
        y_ = closed(loop.value);
        for (std::size_t i = 0; i < n_; ++i) {
            const std::vector<double> row = closed(loop.rates[i]);
            for (std::size_t j = 0; j < n_ + 4; ++j) A_(i, j) = row[j];
        }
        A_(n_, n_ + 2) = A_(n_ + 1, n_ + 3) = 1.0;
        x_.assign(n_ + 4, 0.0);
    }

    void operator()() {
        std::vector<double> corners;
        for (const Drive* drive : {&run_.setpoint, &run_.load})
            for (double event : {drive->start, drive->start + drive->duration}) corners.push_back(event);
        std::sort(corners.begin(), corners.end());
        const double part = run_.horizon / static_cast<double>((run_.points - 1) * looks);
        const StateMatrix step = exponential_growth(A_, part);
        set_drives(0.0);
        double t = 0.0;
        for (std::size_t i = 0;; ++i) {
            const double next = run_.horizon * static_cast<double>(i) / static_cast<double>((run_.points - 1) * looks);
            bool whole = i > 0;
            for (double corner : corners)
                if (corner > t + time_rounding(t) && corner < next - time_rounding(next)) {
                    grow(exponential_growth(A_, corner - t), x_, scratch_);
                    set_drives(t = corner);
                    run_.look_at(of(u_));
                    whole = false;
                }
            if (whole) grow(step, x_, scratch_);
            else if (next > t) grow(exponential_growth(A_, next - t), x_, scratch_);
            run_.look_at(of(u_));  // the end of a stretch, before a jump
            set_drives(t = next);
            write(i);
            if (run_.complete()) return;
        }
    }

private:
    std::vector<double> closed(const SignalForm& signal) const {
        std::vector<double> row(n_ + 4, 0.0);
        for (std::size_t i = 0; i < n_ + 4; ++i) row[i] = signal.input * u_[i];
        for (std::size_t i = 0; i < n_; ++i) row[i] += signal.states[i];
        row[n_] += signal.setpoint;
        row[n_ + 1] += signal.input;
        return row;
    }
    // A corner that rounding puts just after t is at t.
    void set_drives(double t) {
        const Drive::Line r = run_.setpoint.at(t + time_rounding(t)), d = run_.load.at(t + time_rounding(t));
        x_[n_] = r.value, x_[n_ + 1] = d.value, x_[n_ + 2] = r.slope, x_[n_ + 3] = d.slope;
    }
    double of(const std::vector<double>& row) const {
        double sum = 0.0;
        for (std::size_t i = 0; i < row.size(); ++i) sum += row[i] * x_[i];
        return sum;
    }
    void write(std::size_t i) {
        const double u = of(u_), y = of(y_);
        if (!is_finite(u) || !is_finite(y))
            refuse(error_code::out_of_domain, "horizon", run_.horizon,
                   "the response grows beyond all numbers; give a shorter horizon");
        run_.look_at(u);
        if (i % looks != 0) return;
        run_.output[run_.done] = u;
        run_.value[run_.done++] = y;
    }

    ContinuousRun& run_;
    std::size_t n_;
    StateMatrix A_;  // states, set point, load, and the slopes of both
    std::vector<double> u_, y_, x_, scratch_;
};

}  // namespace

void run_instantly(const LoopStates& loop, ContinuousRun& run) { InstantRun(loop, run)(); }

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
