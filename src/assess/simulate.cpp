#include "tauwright/assess/simulate.hpp"

#include <algorithm>
#include <cmath>

#include "assess/driven_process.hpp"
#include "assess/duty_columns.hpp"
#include "assess/first_order_loop.hpp"
#include "assess/lane_setup.hpp"
#include "tauwright/run/pid_block.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using detail::DrivenProcess;
using detail::load_ramps;
using detail::progress;
using detail::run_away;

// The lag is in the plant; what is left of the transmitter is noise and quantization.
TransmitterSettings converter_of(const Duty& duty) noexcept { return {.resolution = duty.transmitter.resolution}; }

void cut(Trend& trend, std::size_t n) {
    trend.ran_away = true;
    for (auto* column : {&trend.time_s, &trend.setpoint, &trend.process_value, &trend.output, &trend.measured,
                         &trend.valve_position, &trend.load})
        column->resize(n);
}

// A ramp of the load changes within the scan: its response is that of process / s to the ramp's slope, which is
// constant over a scan.
class LoadRamp {
public:
    LoadRamp(const TransferFunction& process, const Duty& duty, double h)
        : duty_(duty), scan_time_(h), response_(process * TransferFunction::from_factors({.integrators = 1}), h, 0.0, 0.0) {}

    /// The change of the process value that the ramp has made at the end of scan k.
    double step(std::size_t k) noexcept { return response_.step((at(k + 1) - at(k)) / scan_time_); }
    double at(std::size_t k) const noexcept {
        return duty_.load_step * progress(static_cast<double>(k) * scan_time_, duty_.load_time, duty_.load_ramp_time);
    }

private:
    const Duty& duty_;
    double scan_time_;
    DrivenProcess response_;
};

// What a process answers to valve and load: the way to its own value, or through the transmitter's lag.
class Plant {
public:
    Plant(const TransferFunction& process, const Duty& duty, double h)
        : to_valve_(process, h, duty.resting_output(), duty.resting_process_value()) {
        if (load_ramps(duty)) ramp_.emplace(process, duty, h);
    }

    /// One scan; returns the value at its end.
    double step(double position, double load, std::size_t k) noexcept {
        if (!ramp_) return to_valve_.step(position + load);
        const double held_load = load - ramp_->at(k);
        const double answer = to_valve_.step(position + held_load);
        return answer + ramp_->step(k);
    }

private:
    DrivenProcess to_valve_;
    std::optional<LoadRamp> ramp_;
};

void check_order(const TransferFunction& process, const Duty& duty) {
    const bool lag = duty.transmitter.lag > 0.0, ramp = load_ramps(duty);
    const int most = 20 - (lag ? 1 : 0) - (ramp ? 1 : 0);
    if (process.order() > most)
        detail::refuse(error_code::out_of_domain, "process order", process.order(),
                       detail::joined({"give a process of order up to ", text_of(most), lag ? " with a transmitter lag" : "",
                                       ramp ? " with a ramp of the load" : ""}));
    if (process.relative_degree() < 0)
        detail::refuse(error_code::out_of_domain, "process relative degree", process.relative_degree(),
                       "give a process with at least as many lags as leads");
}

run::PidBlock controller_of(const PidSettings& settings, const Duty& duty, double h) {
    run::PidCoefficients coefficients = discretize(settings, h);
    if (duty.output_rate_limit) coefficients.output_change_per_scan = *duty.output_rate_limit * h;
    return {coefficients, duty.output_low, duty.output_high, duty.resting_output()};
}

// The one loop over scans. `measure` makes the measured value of the process value, `move` the valve position of the
// output, `answer` the next process value of position, load and scan.
template <class Measure, class Move, class Answer>
void run_scans(Trend& trend, run::PidBlock controller, Measure measure, Move move, Answer answer) {
    const std::size_t n = trend.size();
    const double rest = trend.duty.resting_process_value();
    const double* const setpoint = trend.setpoint.data();
    double value = rest;
    std::uint32_t flags = 0;
    for (std::size_t k = 0; k < n; ++k) {
        const double measured = measure(value), output = controller.step(setpoint[k], measured), position = move(output);
        trend.process_value[k] = value;
        trend.measured[k] = measured;
        trend.output[k] = output;
        trend.valve_position[k] = position;
        flags |= controller.flags();
        value = answer(position, trend.load[k], k);
        if (!(std::abs(value - rest) <= run_away) && k + 1 < n) {
            cut(trend, k + 1);
            break;
        }
    }
    trend.limited = (flags & (run::flag_limited_low | run::flag_limited_high)) != 0;
}

// Nothing but controller and process of a named form: the common case, free of everything else.
void run_plain(Trend& trend, const run::PidBlock& controller, const TransferFunction& process, double h) {
    const Duty& duty = trend.duty;
    const run::ProcessCoefficients coefficients = detail::lane_coefficients(process, h);
    if (detail::run_first_order_loop(trend, controller, coefficients)) {
        trend.measured = trend.process_value;
        trend.valve_position = trend.output;
        return;
    }
    run::ProcessBlock block(coefficients, duty.resting_output(), duty.resting_process_value());
    std::vector<double> line(run::delay_line_length(block.coefficients()));
    block.start(line.data(), line.size());
    const auto same = [](double x) { return x; };
    run_scans(trend, controller, same, same, [&, memory = line.data()](double position, double load, std::size_t) {
        return block.step(position + load, memory);
    });
}

void run_full(Trend& trend, const run::PidBlock& controller, const TransferFunction& process, double h) {
    const Duty& duty = trend.duty;
    const double rest = duty.resting_process_value();
    Plant plant(process, duty, h);
    std::optional<Plant> behind_lag;
    if (duty.transmitter.lag > 0.0)
        behind_lag.emplace(process * TransferFunction::from_factors({.lags = {duty.transmitter.lag}}), duty, h);
    run::Transmitter transmitter(discretize(converter_of(duty), h, duty.noise, duty.seed), rest);
    run::Valve valve(discretize(duty.valve, h, duty.output_low, duty.output_high), duty.resting_output());
    double lagged = rest;
    run_scans(
        trend, controller, [&](double value) { return transmitter.step(behind_lag ? lagged : value); },
        [&](double output) { return valve.step(output); },
        [&](double position, double load, std::size_t k) {
            if (behind_lag) lagged = behind_lag->step(position, load, k);
            return plant.step(position, load, k);
        });
}

}  // namespace

Trend simulate(const TransferFunction& process, const PidSettings& settings, const Duty& duty, double horizon_s) {
    check(duty);
    detail::require_positive("horizon", horizon_s);
    if (!duty.scan_time)
        throw Error(error_code::missing_argument, "duty.scan_time is not given; the simulated controller needs one");
    const double h = *duty.scan_time, rest = duty.resting_process_value();
    const std::size_t n = detail::count_of_scans(h, horizon_s);
    check_order(process, duty);
    run::PidBlock controller = controller_of(settings, duty, h);
    controller.step(rest, run::Transmitter(discretize(converter_of(duty), h), rest).step(rest));  // at rest before time 0

    Trend trend = detail::known_columns(duty, h, n);
    for (auto* column : {&trend.process_value, &trend.output, &trend.measured, &trend.valve_position}) column->resize(n);
    const bool plain = duty.valve.perfect() && duty.transmitter.perfect() && duty.noise == 0.0 && !load_ramps(duty);
    if (plain && detail::fits_process_block(process)) run_plain(trend, controller, process, h);
    else run_full(trend, controller, process, h);
    return trend;
}

}  // namespace v0
}  // namespace tauwright
