// Block coefficients between C and C++. Never throws.
#pragma once

#include <cstring>

#include "structs.hpp"
#include "tauwright/run.h"
#include "tauwright/run/pid_block.hpp"
#include "tauwright/run/process_block.hpp"
#include "tauwright/run/transmitter.hpp"
#include "tauwright/run/valve.hpp"

namespace tauwright::shell {

inline tauw_pid_coefficients from(const run::PidCoefficients& from) noexcept {
    tauw_pid_coefficients c = blank<tauw_pid_coefficients>();
    c.gain = from.gain;
    c.setpoint_weight = from.setpoint_weight;
    c.integral_per_scan = from.integral_per_scan;
    c.derivative_per_scan = from.derivative_per_scan;
    c.derivative_smoothing = from.derivative_smoothing;
    c.measurement_smoothing = from.measurement_smoothing;
    c.tracking_per_scan = from.tracking_per_scan;
    c.output_change_per_scan = from.output_change_per_scan;
    return c;
}

inline run::PidCoefficients pid_coefficients(const tauw_pid_coefficients& c) noexcept {
    return {.gain = c.gain,
            .setpoint_weight = c.setpoint_weight,
            .integral_per_scan = c.integral_per_scan,
            .derivative_per_scan = c.derivative_per_scan,
            .derivative_smoothing = c.derivative_smoothing,
            .measurement_smoothing = c.measurement_smoothing,
            .tracking_per_scan = c.tracking_per_scan,
            .output_change_per_scan = c.output_change_per_scan};
}

inline tauw_valve_coefficients from(const run::ValveCoefficients& from) noexcept {
    tauw_valve_coefficients c = blank<tauw_valve_coefficients>();
    c.dead_band = from.dead_band;
    c.stick = from.stick;
    c.resolution = from.resolution;
    c.travel_per_scan = from.travel_per_scan;
    c.position_low = from.position_low;
    c.position_high = from.position_high;
    return c;
}

inline run::ValveCoefficients valve_coefficients(const tauw_valve_coefficients& c) noexcept {
    return {.dead_band = c.dead_band,
            .stick = c.stick,
            .resolution = c.resolution,
            .travel_per_scan = c.travel_per_scan,
            .position_low = c.position_low,
            .position_high = c.position_high};
}

inline tauw_transmitter_coefficients from(const run::TransmitterCoefficients& from) noexcept {
    tauw_transmitter_coefficients c = blank<tauw_transmitter_coefficients>();
    c.smoothing = from.smoothing;
    c.noise = from.noise;
    c.resolution = from.resolution;
    c.seed = from.seed;
    return c;
}

inline run::TransmitterCoefficients transmitter_coefficients(const tauw_transmitter_coefficients& c) noexcept {
    return {.smoothing = c.smoothing, .noise = c.noise, .resolution = c.resolution, .seed = c.seed};
}

inline tauw_process_coefficients from(const run::ProcessCoefficients& from) noexcept {
    tauw_process_coefficients c = blank<tauw_process_coefficients>();
    std::memcpy(c.growth, from.growth, sizeof c.growth);
    std::memcpy(c.now, from.now, sizeof c.now);
    std::memcpy(c.before, from.before, sizeof c.before);
    std::memcpy(c.outputs, from.outputs, sizeof c.outputs);
    c.direct = from.direct;
    c.delay_scans = from.delay_scans;
    return c;
}

inline run::ProcessCoefficients process_coefficients(const tauw_process_coefficients& c) noexcept {
    run::ProcessCoefficients to;
    std::memcpy(to.growth, c.growth, sizeof to.growth);
    std::memcpy(to.now, c.now, sizeof to.now);
    std::memcpy(to.before, c.before, sizeof to.before);
    std::memcpy(to.outputs, c.outputs, sizeof to.outputs);
    to.direct = c.direct;
    to.delay_scans = c.delay_scans;
    return to;
}

}  // namespace tauwright::shell
