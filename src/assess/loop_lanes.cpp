#include "assess/loop_lanes.hpp"

#include "math/vector_exponential.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr std::size_t L = lanes_of_block;

[[gnu::always_inline]] inline double magnitude(double x) noexcept { return __builtin_fabs(x); }
[[gnu::always_inline]] inline double flushed(double x) noexcept { return magnitude(x) < 1e-200 ? 0.0 : x; }
[[gnu::always_inline]] inline double smoothed(double state, double input, double share) noexcept {
    const double difference = input - state;
    return magnitude(difference) < 1e-200 ? input : state + share * difference;
}

// The controllers of all lanes, as `run::PidBlock::step` in automatic with good input.
template <bool derivative, bool rate_limit>
[[gnu::always_inline]] inline void control(LoopLanes& b, const SharedDuty& duty, std::size_t k, const LaneRow& __restrict process_value,
                                           LaneRow& __restrict output, LaneRow& __restrict input) noexcept {
    const double sp = duty.setpoint[k], load = duty.load[k], noise = duty.noise[k];
    const double low = duty.output_low, high = duty.output_high, change = duty.output_change_per_scan, rest = duty.rest_output;
    for (std::size_t j = 0; j < L; ++j) {
        const double raw = flushed(process_value[j] + noise);
        const double measured = smoothed(b.measured[j], raw, b.measurement_smoothing[j]);
        b.measured[j] = measured;
        const double P = b.gain[j] * (b.setpoint_weight[j] * sp - measured);
        const double integral = b.integral[j] + b.integral_per_scan[j] * (sp - measured);
        double wanted = P + integral;
        if constexpr (derivative) {
            wanted += b.minus_derivative_per_scan[j] * (measured - b.lagged[j]);
            b.lagged[j] = smoothed(b.lagged[j], measured, b.derivative_smoothing[j]);
        }
        double within = wanted;
        if constexpr (rate_limit) {
            const double lowest = b.output[j] - change, highest = b.output[j] + change;
            within = within > lowest ? within : lowest;
            within = within < highest ? within : highest;
        }
        within = within > low ? within : low;
        within = within < high ? within : high;
        const double out = flushed(within);
        if constexpr (rate_limit) b.output[j] = out;
        b.integral[j] = flushed(integral + b.tracking_per_scan[j] * (out - wanted));
        output[j] = out;
        input[j] = (out + load) - rest;
    }
}

// The processes of all lanes, as `run::ProcessBlock::step`. Terms of states that stay 0 are left out: they change at
// most the sign of a zero, which the flushing takes away.
template <bool one_state>
[[gnu::always_inline]] inline void answer(LoopLanes& b, const SharedDuty& duty, const LaneRow* __restrict input,
                                          LaneRow& __restrict process_value) noexcept {
    const double rest = duty.rest_process_value + 0.0, run_away = duty.run_away;  // a rest of -0 is left for 0
    for (std::size_t j = 0; j < L; ++j) {
        const double u0 = input[0][j], u1 = input[-1][j], x0 = b.state0[j];
        if constexpr (one_state) {
            const double next = flushed(x0 + (b.growth00[j] * x0 + b.now0[j] * u0 + b.before0[j] * u1));
            b.state0[j] = next;
            process_value[j] = rest + b.outputs0[j] * next;
        } else {
            const double x1 = b.state1[j];
            const double next0 = flushed(x0 + (b.growth00[j] * x0 + b.growth01[j] * x1 + b.now0[j] * u0 + b.before0[j] * u1));
            const double next1 = flushed(x1 + (b.growth10[j] * x0 + b.growth11[j] * x1 + b.now1[j] * u0 + b.before1[j] * u1));
            b.state0[j] = next0;
            b.state1[j] = next1;
            const double value = rest + (b.outputs0[j] * next0 + b.outputs1[j] * next1 + b.direct[j] * u0);
            process_value[j] = value;
            b.ran_away[j] = magnitude(value - rest) <= run_away ? b.ran_away[j] : 1.0;
        }
    }
}

// Every lane writes its input as many rows ahead as its dead time has scans: the row to be read is then contiguous,
// and the row before it holds the inputs one scan older.
template <bool derivative, bool one_state, bool rate_limit>
[[gnu::always_inline]] inline void run_lanes(LoopLanes& b, const LaneRun& run) noexcept {
    LaneRow* value = run.process_value;
    *value = b.process_value;
    for (std::size_t t = 0; t < run.count; ++t) {
        LaneRow* const row = run.line + t;
        LaneRow& output = run.output[t * run.stride];
        if (run.one_delay) {
            control<derivative, rate_limit>(b, run.duty, run.first + t, *value, output, row[b.delay_scans[0]]);
        } else {
            LaneRow input;
            control<derivative, rate_limit>(b, run.duty, run.first + t, *value, output, input);
            double* const from_row = row->lane;
            for (std::size_t j = 0; j < L; ++j) from_row[b.ahead[j]] = input[j];
        }
        value += run.stride;
        answer<one_state>(b, run.duty, row, *value);
        run.rows_1->some();
        run.rows_2->some();
    }
    b.process_value = *value;
}

}  // namespace

TAUWRIGHT_DETAIL_FOR_EVERY_CPU
void run_first_order_pi(LoopLanes& lanes, const LaneRun& run) noexcept { run_lanes<false, true, false>(lanes, run); }

TAUWRIGHT_DETAIL_FOR_EVERY_CPU
void run_first_order_pid(LoopLanes& lanes, const LaneRun& run) noexcept { run_lanes<true, true, false>(lanes, run); }

TAUWRIGHT_DETAIL_FOR_EVERY_CPU
void run_any_lanes(LoopLanes& lanes, const LaneRun& run) noexcept { run_lanes<true, false, true>(lanes, run); }

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
