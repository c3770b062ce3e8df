/* Trends with ramps, valve, transmitter, rate limit and disturbance; continuous trends; valve cycles. */
#include <string.h>

#include "check.h"

static tauw_pid_settings settings_of(double gain, double integral_time) {
    tauw_pid_settings settings;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    settings.gain = gain;
    settings.has_integral_time = 1;
    settings.integral_time = integral_time;
    return settings;
}

/* Oracle: closed form, the columns as the duty states them. */
static void duty_columns(void) {
    tauw_model* process = NULL;
    tauw_trend* trend = NULL;
    tauw_trend_columns c;
    tauw_duty duty;
    tauw_valve_settings valve;
    tauw_transmitter_settings transmitter;
    const double disturbance[3] = {1.0, -2.0, 0.5};
    const tauw_pid_settings settings = settings_of(1.25, 10.0);
    tauw_trend_columns_defaults(&c, sizeof c);
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_valve_settings_defaults(&valve, sizeof valve);
    tauw_transmitter_settings_defaults(&transmitter, sizeof transmitter);
    CHECK(duty.valve == NULL && duty.transmitter == NULL && duty.disturbance == NULL && duty.has_output_rate_limit == 0);
    OK(tauw_first_order_plus_dead_time(1.0, 10.0, 2.0, &process, &error));
    duty.has_scan_time = 1;
    duty.scan_time = 0.5;
    duty.setpoint_step = 8.0;
    duty.setpoint_ramp_time = 10.0;
    duty.has_output_rate_limit = 1;
    duty.output_rate_limit = 0.5;
    duty.disturbance = disturbance;
    duty.disturbance_count = 3;
    valve.resolution = 0.25;
    transmitter.resolution = 0.125;
    duty.valve = &valve;
    duty.transmitter = &transmitter;
    OK(tauw_simulate(process, &settings, &duty, 200.0, &trend, &error));
    OK(tauw_trend_view(trend, &c, &error));
    CHECK(c.n >= 400 && c.ran_away == 0);
    for (size_t k = 0; k < c.n; ++k) {
        CHECK_NEAR(c.setpoint[k], 50.0 + 8.0 * fmin(c.time_s[k] / 10.0, 1.0), 1e-12);
        CHECK(c.load[k] == (k < 3 ? disturbance[k] : 0.0));
        CHECK(c.measured[k] * 8.0 == floor(c.measured[k] * 8.0));
        CHECK(fabs(c.measured[k] - c.process_value[k]) <= 0.0625 + 1e-9);
        CHECK(fabs(c.valve_position[k] - c.output[k]) <= 0.25 + 1e-9);
        if (k > 0) CHECK(fabs(c.output[k] - c.output[k - 1]) <= 0.25 + 1e-12);
    }
    OK(tauw_trend_destroy(&trend));
    duty.valve = NULL;
    duty.transmitter = NULL;
    duty.disturbance_count = 0;
    OK(tauw_simulate(process, &settings, &duty, 200.0, &trend, &error));
    OK(tauw_trend_view(trend, &c, &error));
    CHECK(memcmp(c.measured, c.process_value, c.n * sizeof *c.measured) == 0);
    CHECK(memcmp(c.valve_position, c.output, c.n * sizeof *c.output) == 0);
    OK(tauw_trend_destroy(&trend));

    duty.disturbance_count = 3;
    duty.disturbance = NULL;
    CHECK_STATUS(tauw_simulate(process, &settings, &duty, 9.0, &trend, &error), TAUW_ERROR_NULL_POINTER);
    CHECK(strstr(error.message, "duty.disturbance") != NULL);
    duty.disturbance_count = 0;
    valve.stick = -1.0;
    duty.valve = &valve;
    CHECK_STATUS(tauw_simulate(process, &settings, &duty, 9.0, &trend, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    valve.struct_size = 3;
    CHECK_STATUS(tauw_simulate(process, &settings, &duty, 9.0, &trend, &error), TAUW_ERROR_WRONG_STRUCT_SIZE);
    CHECK(strstr(error.message, "duty.valve") != NULL);
    duty.valve = NULL;
    transmitter.reserved = 1;
    duty.transmitter = &transmitter;
    CHECK_STATUS(tauw_simulate(process, &settings, &duty, 9.0, &trend, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    duty.transmitter = NULL;
    duty.has_output_rate_limit = 5;
    CHECK_STATUS(tauw_simulate(process, &settings, &duty, 9.0, &trend, &error), TAUW_ERROR_UNKNOWN_NAME);
    duty.has_output_rate_limit = 0;
    duty.load_ramp_time = NAN;
    CHECK_STATUS(tauw_simulate(process, &settings, &duty, 9.0, &trend, &error), TAUW_ERROR_NOT_FINITE);
    CHECK(trend == NULL);
    OK(tauw_model_destroy(&process));
}

/* Oracle: closed form. L = k exp(-theta s)/s answers a unit step of the set point with
 * sum over n of (-1)^(n+1) k^n (t - n theta)^n / n!, as far as t > n theta. */
static double step_by_hand(double k, double theta, double t) {
    double sum = 0.0, factorial = 1.0;
    for (int n = 1; t > n * theta; ++n) {
        factorial *= n;
        sum += (n % 2 == 1 ? 1.0 : -1.0) * pow(k * (t - n * theta), n) / factorial;
    }
    return sum;
}

static void continuous(void) {
    const double k = 0.25, theta = 2.0;
    tauw_model* process = NULL;
    tauw_trend* trend = NULL;
    tauw_trend_columns c;
    tauw_figures f;
    tauw_duty duty;
    const tauw_pid_settings settings = settings_of(k * 10.0 / 1.5, 10.0);
    tauw_trend_columns_defaults(&c, sizeof c);
    tauw_figures_defaults(&f, sizeof f);
    tauw_duty_defaults(&duty, sizeof duty);
    duty.setpoint_step = 4.0;
    OK(tauw_first_order_plus_dead_time(1.5, 10.0, theta, &process, &error));
    OK(tauw_continuous_trend(process, &settings, &duty, 20.0, 201, &trend, &error));
    OK(tauw_trend_view(trend, &c, &error));
    CHECK(c.n == 201 && c.time_s[200] == 20.0);
    for (size_t i = 0; i < c.n; ++i)
        CHECK(fabs(c.process_value[i] - 50.0 - 4.0 * step_by_hand(k, theta, c.time_s[i])) < 2e-11);
    OK(tauw_trend_destroy(&trend));
    /* Oracle: closed form, integral action ends where gain/Ti times the integrated error is the output's move. */
    OK(tauw_continuous_trend(process, &settings, &duty, 400.0, 40001, &trend, &error));
    OK(tauw_trend_figures(trend, &f, &error));
    CHECK_NEAR(f.integrated_error, 4.0 / 1.5 * 10.0 / settings.gain, 1e-2);
    CHECK(f.has_rise_time == 1 && f.rise_time > 0.0 && f.has_peak_load_error_time == 0 && f.time_at_limits == 0.0);
    CHECK(f.integrated_squared_error > 0.0 && f.integrated_time_absolute_error > 0.0);
    OK(tauw_trend_destroy(&trend));
    CHECK_STATUS(tauw_continuous_trend(process, &settings, &duty, 20.0, 1, &trend, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_continuous_trend(process, &settings, &duty, NAN, 9, &trend, &error), TAUW_ERROR_NOT_FINITE);
    duty.noise = 1.0;
    CHECK_STATUS(tauw_continuous_trend(process, &settings, &duty, 20.0, 9, &trend, &error),
                 TAUW_ERROR_CONFLICTING_ARGUMENTS);
    CHECK(trend == NULL);
    OK(tauw_model_destroy(&process));
}

/* Oracle: published, trade fact H02 (derived, recomputed, 2 %): a sticking valve under PI, simulated with a scan of
 * 0.1 s: peak to peak 0.38408356423567913 with 0.5 % of sticking, mean period 39.96944444444445 s. */
static void sticking_valve(void) {
    tauw_model* process = NULL;
    tauw_trend* trend = NULL;
    tauw_trend_columns c;
    tauw_duty duty;
    tauw_valve_settings valve;
    tauw_valve_cycle cycle;
    const tauw_pid_settings settings = settings_of(1.25, 10.0);
    tauw_trend_columns_defaults(&c, sizeof c);
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_valve_settings_defaults(&valve, sizeof valve);
    tauw_valve_cycle_defaults(&cycle, sizeof cycle);
    CHECK(cycle.existence == TAUW_CYCLE_UNDETERMINED);
    OK(tauw_first_order_plus_dead_time(1.0, 10.0, 2.0, &process, &error));
    valve.stick = 0.5;
    duty.has_scan_time = 1;
    duty.scan_time = 0.1;
    duty.setpoint_step = 1.0;
    duty.valve = &valve;
    OK(tauw_simulate(process, &settings, &duty, 3000.0, &trend, &error));
    OK(tauw_trend_view(trend, &c, &error));
    double low = INFINITY, high = -INFINITY;
    for (size_t k = c.n / 2; k < c.n; ++k) {
        low = fmin(low, c.process_value[k]);
        high = fmax(high, c.process_value[k]);
    }
    CHECK_NEAR(high - low, 0.38408356423567913, 0.02);
    OK(tauw_trend_destroy(&trend));
    OK(tauw_valve_cycle_of(process, &settings, &valve, &cycle, &error));
    CHECK(strcmp(tauw_cycle_existence_name(cycle.existence), "persists") == 0 && cycle.retuning_cures == 0);
    CHECK(cycle.has_period == 1 && cycle.has_process_value_amplitude == 1 && cycle.has_output_amplitude == 1);
    CHECK_NEAR(2.0 * cycle.process_value_amplitude, 0.38408356423567913, 0.02);
    CHECK_NEAR(cycle.period, 39.96944444444445, 0.02);
    CHECK(strstr(cycle.reason, "repair the valve") != NULL);
    valve.stick = 0.0;
    OK(tauw_valve_cycle_of(process, &settings, &valve, &cycle, &error));
    CHECK(cycle.existence == TAUW_CYCLE_NONE && cycle.has_period == 0 && cycle.period == 0.0);
    CHECK(strlen(cycle.reason) > 20 && strlen(cycle.reason) < sizeof cycle.reason);
    valve.dead_band = INFINITY;
    CHECK_STATUS(tauw_valve_cycle_of(process, &settings, &valve, &cycle, &error), TAUW_ERROR_NOT_FINITE);
    CHECK_STATUS(tauw_valve_cycle_of(process, &settings, NULL, &cycle, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_valve_cycle_of(process, &settings, &valve, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK(strcmp(tauw_cycle_existence_name(-1), "unknown") == 0);
    OK(tauw_model_destroy(&process));
}

/* Oracle: invariant, every column is the trend of its loop alone. */
static void many_loops(void) {
    enum { LOOPS = 3 };
    tauw_model* models[LOOPS] = {NULL, NULL, NULL};
    const tauw_model* processes[LOOPS];
    tauw_pid_settings settings[LOOPS];
    tauw_duty duty;
    size_t scans = 0;
    double process_value[LOOPS * 61], output[LOOPS * 61];
    tauw_duty_defaults(&duty, sizeof duty);
    duty.has_scan_time = 1;
    duty.scan_time = 0.5;
    duty.setpoint_step = 40.0;
    duty.noise = 0.25;
    for (size_t i = 0; i < LOOPS; ++i) {
        OK(tauw_first_order_plus_dead_time(1.0 + (double)i, 10.0, 0.8 * (double)i, &models[i], &error));
        processes[i] = models[i];
        settings[i] = settings_of(6.0 / (1.0 + (double)i), 10.0);
    }
    OK(tauw_scans_of(&duty, 30.0, &scans, &error));
    CHECK(scans == 61);
    OK(tauw_simulate_many(processes, settings, LOOPS, &duty, 30.0, process_value, output, LOOPS * scans, &error));
    for (size_t i = 0; i < LOOPS; ++i) {
        tauw_trend* trend = NULL;
        tauw_trend_columns c;
        tauw_trend_columns_defaults(&c, sizeof c);
        OK(tauw_simulate(models[i], &settings[i], &duty, 30.0, &trend, &error));
        OK(tauw_trend_view(trend, &c, &error));
        CHECK(c.n == scans && c.limited == 1);
        for (size_t k = 0; k < c.n; ++k)
            CHECK(process_value[k * LOOPS + i] == c.process_value[k] && output[k * LOOPS + i] == c.output[k]);
        OK(tauw_trend_destroy(&trend));
    }
    OK(tauw_simulate_many(NULL, NULL, 0, &duty, 30.0, NULL, NULL, 0, &error));
    CHECK_STATUS(tauw_scans_of(&duty, 0.1, &scans, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_scans_of(&duty, 30.0, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_simulate_many(processes, settings, LOOPS, &duty, 30.0, process_value, output, 182, &error), TAUW_ERROR_BUFFER_TOO_SMALL);
    CHECK_STATUS(tauw_simulate_many(processes, settings, LOOPS, &duty, 60.0, NULL, output, 363, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_simulate_many(processes, NULL, LOOPS, &duty, 30.0, process_value, output, 183, &error), TAUW_ERROR_NULL_POINTER);
    settings[1].integral_time = -1.0;
    CHECK_STATUS(tauw_simulate_many(processes, settings, LOOPS, &duty, 30.0, process_value, output, 183, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK(strstr(error.message, "[1]") != NULL);
    settings[1].struct_size = 3;
    CHECK_STATUS(tauw_simulate_many(processes, settings, LOOPS, &duty, 30.0, process_value, output, 183, &error), TAUW_ERROR_WRONG_STRUCT_SIZE);
    settings[1] = settings_of(2.0, 10.0);
    processes[2] = NULL;
    CHECK_STATUS(tauw_simulate_many(processes, settings, LOOPS, &duty, 30.0, process_value, output, 183, &error), TAUW_ERROR_NULL_POINTER);
    for (size_t i = 0; i < LOOPS; ++i) OK(tauw_model_destroy(&models[i]));
}

void test_trends(void) {
    duty_columns();
    many_loops();
    continuous();
    sticking_valve();
}
