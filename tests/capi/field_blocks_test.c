/* Valve and transmitter blocks, and the controller's rate limit. Oracle throughout: closed form, the rules as the
 * header states them. */
#include <stdlib.h>
#include <string.h>

#include "check.h"

static double position_after(tauw_valve* valve, double demand) {
    double position = NAN, again = NAN;
    OK(tauw_valve_step(valve, demand, &position, &error));
    OK(tauw_valve_position(valve, &again, &error));
    CHECK(position == again);
    return position;
}

static void valve_faults(void) {
    tauw_valve_settings settings;
    tauw_valve_coefficients c;
    tauw_valve* valve = NULL;
    tauw_valve_settings_defaults(&settings, sizeof settings);
    tauw_valve_coefficients_defaults(&c, sizeof c);
    CHECK(c.travel_per_scan == INFINITY && c.position_high == 100.0);
    void* memory = malloc(tauw_valve_size());
    CHECK(tauw_valve_align() <= 16);

    settings.stick = 1.0; /* holds until more than 1 away, then jumps */
    OK(tauw_discretize_valve(&settings, 0.5, 0.0, 100.0, &c, &error));
    CHECK(c.stick == 1.0 && c.travel_per_scan == INFINITY);
    OK(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error));
    CHECK((void*)valve == memory);
    CHECK(position_after(valve, 51.0) == 50.0 && position_after(valve, 51.25) == 51.25);
    CHECK(position_after(valve, NAN) == 51.25 && position_after(valve, 120.0) == 100.0);

    settings.stick = 0.0;
    settings.dead_band = 2.0; /* a reversal loses 2, of which the middle start takes 1 */
    OK(tauw_discretize_valve(&settings, 0.5, 0.0, 100.0, &c, &error));
    OK(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error));
    CHECK(position_after(valve, 55.0) == 54.0 && position_after(valve, 53.0) == 54.0);
    CHECK(position_after(valve, 52.0) == 53.0);

    settings.dead_band = 0.0;
    settings.resolution = 0.5;
    settings.has_travel_rate_per_s = 1;
    settings.travel_rate_per_s = 4.0; /* 2 a scan */
    OK(tauw_discretize_valve(&settings, 0.5, 0.0, 100.0, &c, &error));
    CHECK(c.travel_per_scan == 2.0);
    OK(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error));
    CHECK(position_after(valve, 50.4) == 50.0 && position_after(valve, 53.2) == 52.0);
    CHECK(position_after(valve, 53.2) == 53.0);
    /* A copy of the bytes goes on as the original does. */
    void* copy = malloc(tauw_valve_size());
    memcpy(copy, memory, tauw_valve_size());
    CHECK(position_after(valve, 60.0) == 55.0 && position_after((tauw_valve*)copy, 60.0) == 55.0);

    CHECK_STATUS(tauw_valve_init(memory, tauw_valve_size() - 1, &c, 50.0, &valve, &error), TAUW_ERROR_BUFFER_TOO_SMALL);
    CHECK_STATUS(tauw_valve_init((char*)copy + 1, tauw_valve_size(), &c, 50.0, &valve, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_valve_init(memory, tauw_valve_size(), &c, NAN, &valve, &error), TAUW_ERROR_NOT_FINITE);
    c.travel_per_scan = NAN;
    CHECK_STATUS(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error), TAUW_ERROR_NOT_FINITE);
    c.travel_per_scan = 0.0;
    CHECK_STATUS(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    c.travel_per_scan = 1.0;
    c.position_low = 100.0;
    CHECK_STATUS(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    c.position_low = 0.0;
    c.stick = -1.0;
    CHECK_STATUS(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK(valve == NULL);
    c.struct_size = 8;
    CHECK_STATUS(tauw_valve_init(memory, tauw_valve_size(), &c, 50.0, &valve, &error), TAUW_ERROR_WRONG_STRUCT_SIZE);
    settings.stick = -1.0;
    c.struct_size = sizeof c;
    CHECK_STATUS(tauw_discretize_valve(&settings, 0.5, 0.0, 100.0, &c, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    settings.stick = 0.0;
    CHECK_STATUS(tauw_discretize_valve(&settings, 0.0, 0.0, 100.0, &c, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_discretize_valve(&settings, 0.5, 9.0, 9.0, &c, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_discretize_valve(NULL, 0.5, 0.0, 100.0, &c, &error), TAUW_ERROR_NULL_POINTER);
    double position = 0.0;
    CHECK_STATUS(tauw_valve_step(NULL, 1.0, &position, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_valve_step((tauw_valve*)memory, 1.0, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_transmitter_step((tauw_transmitter*)memory, 1.0, &position, &error), TAUW_ERROR_WRONG_HANDLE);
    free(copy);
    free(memory);
}

static void transmitter_faults(void) {
    tauw_transmitter_settings settings;
    tauw_transmitter_coefficients c;
    tauw_transmitter *transmitter = NULL, *twin = NULL;
    double measured = 0.0, lagged = 20.0;
    tauw_transmitter_settings_defaults(&settings, sizeof settings);
    tauw_transmitter_coefficients_defaults(&c, sizeof c);
    CHECK(c.smoothing == 1.0 && c.seed == 1);
    void* memory = malloc(2 * tauw_transmitter_size() + 16);
    void* second = (char*)memory + (tauw_transmitter_size() + 15) / 16 * 16;
    CHECK(tauw_transmitter_align() <= 16);
    settings.lag = 2.0;
    OK(tauw_discretize_transmitter(&settings, 0.5, 0.0, 1, &c, &error));
    CHECK_NEAR(c.smoothing, -expm1(-0.25), 1e-15);
    OK(tauw_transmitter_init(memory, tauw_transmitter_size(), &c, 20.0, &transmitter, &error));
    for (int k = 0; k < 8; ++k) {
        OK(tauw_transmitter_step(transmitter, 30.0, &measured, &error));
        lagged = 30.0 - 10.0 * exp(-0.25 * (k + 1));
        CHECK_NEAR(measured, lagged, 1e-14);
    }
    OK(tauw_transmitter_step(transmitter, NAN, &measured, &error));
    CHECK(isnan(measured));
    OK(tauw_transmitter_measured(transmitter, &measured, &error));
    CHECK_NEAR(measured, lagged, 1e-14);

    /* Quantized noise: equal seeds give equal values, all whole multiples of the resolution, of the deviation asked for. */
    settings.lag = 0.0;
    settings.resolution = 0.125;
    OK(tauw_discretize_transmitter(&settings, 0.5, 2.0, 42, &c, &error));
    OK(tauw_transmitter_init(memory, tauw_transmitter_size(), &c, 20.0, &transmitter, &error));
    OK(tauw_transmitter_init(second, tauw_transmitter_size(), &c, 20.0, &twin, &error));
    double squares = 0.0;
    for (int k = 0; k < 4000; ++k) {
        double other = 0.0;
        OK(tauw_transmitter_step(transmitter, 20.0, &measured, &error));
        OK(tauw_transmitter_step(twin, 20.0, &other, &error));
        CHECK(measured == other && measured * 8.0 == floor(measured * 8.0));
        squares += (measured - 20.0) * (measured - 20.0);
    }
    /* Standard error of the deviation 2/sqrt(8000); four of them. */
    CHECK(fabs(sqrt(squares / 4000.0) - 2.0) < 4.0 * 2.0 / sqrt(8000.0));

    c.smoothing = 0.0;
    CHECK_STATUS(tauw_transmitter_init(memory, tauw_transmitter_size(), &c, 20.0, &transmitter, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    c.smoothing = 1.0;
    c.noise = NAN;
    CHECK_STATUS(tauw_transmitter_init(memory, tauw_transmitter_size(), &c, 20.0, &transmitter, &error),
                 TAUW_ERROR_NOT_FINITE);
    CHECK(transmitter == NULL);
    CHECK_STATUS(tauw_discretize_transmitter(&settings, 0.5, -2.0, 42, &c, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    settings.lag = NAN;
    CHECK_STATUS(tauw_discretize_transmitter(&settings, 0.5, 2.0, 42, &c, &error), TAUW_ERROR_NOT_FINITE);
    CHECK_STATUS(tauw_transmitter_init(NULL, 0, &c, 20.0, &transmitter, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_transmitter_measured(NULL, &measured, &error), TAUW_ERROR_NULL_POINTER);
    free(memory);
}

static void output_rate(void) {
    tauw_pid_coefficients c;
    tauw_pid_block* block = NULL;
    const double initial = 30.0;
    double output = 0.0;
    tauw_pid_coefficients_defaults(&c, sizeof c);
    CHECK(c.output_change_per_scan == INFINITY);
    void* memory = malloc(tauw_pid_block_size());
    c.gain = 2.0;
    c.output_change_per_scan = 0.5;
    OK(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 0.0, 100.0, &initial, &block, &error));
    OK(tauw_pid_block_step(block, 50.0, 50.0, &output, &error));
    CHECK(output == 30.0);
    for (int k = 1; k <= 3; ++k) {
        OK(tauw_pid_block_step(block, 54.0, 50.0, &output, &error)); /* asks for 38 */
        CHECK(output == 30.0 + 0.5 * k);
    }
    c.output_change_per_scan = -0.5;
    CHECK_STATUS(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 0.0, 100.0, NULL, &block, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    c.output_change_per_scan = NAN;
    CHECK_STATUS(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 0.0, 100.0, NULL, &block, &error),
                 TAUW_ERROR_NOT_FINITE);
    CHECK(block == NULL);
    free(memory);
}

void test_field_blocks(void) {
    valve_faults();
    transmitter_faults();
    output_rate();
}
