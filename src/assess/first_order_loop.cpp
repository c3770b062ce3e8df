#include "assess/first_order_loop.hpp"

#include <algorithm>
#include <cmath>

#include "assess/lane_setup.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

bool tiny(double x) noexcept { return __builtin_expect_with_probability(std::abs(x) < 1e-200, 0, 0.999); }

// What is not tiny does not wait for the comparison.
double flushed(double x) noexcept {
    if (tiny(x)) return 0.0;
    return x;
}

double smoothed(double state, double input, double share) noexcept {
    const double difference = input - state;
    if (tiny(difference)) return input;
    return state + share * difference;
}

// Off its limits the integral gives nothing up: then it does not wait for the output. A branch that is nearly always
// foreseen takes the place of a chain through limits and tracking.
template <bool derivative>
void run(Trend& trend, const run::PidCoefficients& c, const run::ProcessCoefficients& p, const SharedDuty& duty, double integral) {
    const std::size_t n = trend.size(), delay = std::min(static_cast<std::size_t>(p.delay_scans), n);
    std::vector<double> line(n + delay + 1);  // the input that acts in scan k is at k + 1
    const double *const setpoint = trend.setpoint.data(), *const load = trend.load.data();
    double *const values = trend.process_value.data(), *const outputs = trend.output.data(), *const input = line.data();
    const double growth = p.growth[0][0], now = p.now[0], before = p.before[0], gain = p.outputs[0];
    const double low = duty.output_low, high = duty.output_high, rest = duty.rest_process_value + 0.0;
    double value = duty.rest_process_value, state = 0.0, measured = flushed(value), lagged = measured;
    bool limited = false;
    for (std::size_t k = 0; k < n; ++k) {
        const double sp = flushed(setpoint[k]);
        values[k] = value;
        measured = smoothed(measured, flushed(value), c.measurement_smoothing);
        const double P = c.gain * (c.setpoint_weight * sp - measured);
        integral += c.integral_per_scan * (sp - measured);
        double wanted = P + integral;
        if constexpr (derivative) {
            wanted += -c.derivative_per_scan * (measured - lagged);
            lagged = smoothed(lagged, measured, c.derivative_smoothing);
        }
        double output = wanted;
        if (!(wanted > low && wanted < high) || std::abs(wanted) < 1e-200) [[unlikely]] {
            const double above = wanted > low ? wanted : low;
            output = flushed(above < high ? above : high);
            limited = limited || output <= low || output >= high;
            integral += c.tracking_per_scan * (output - wanted);
        }
        integral = flushed(integral);
        outputs[k] = output;
        input[k + 1 + delay] = (output + load[k]) - duty.rest_output;
        state = flushed(state + (growth * state + now * input[k + 1] + before * input[k]));
        value = rest + gain * state;
    }
    trend.limited = limited;
}

}  // namespace

bool run_first_order_loop(Trend& trend, const run::PidBlock& controller, const run::ProcessCoefficients& process) {
    const run::PidCoefficients& c = controller.coefficients();
    const SharedDuty duty = shared_duty(trend.duty);
    const DutySizes sizes = sizes_of(trend.duty, trend.size());
    const bool good_start = (controller.flags() & run::flag_bad_input) == 0;
    if (!good_start || !is_plain_first_order(c, process, controller.integral(), duty, sizes)) return false;
    if (c.derivative_per_scan == 0.0) run<false>(trend, c, process, duty, controller.integral());
    else run<true>(trend, c, process, duty, controller.integral());
    return true;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
