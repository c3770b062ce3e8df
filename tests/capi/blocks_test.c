/* Oracle throughout: closed form, the recursions as the header states them. */
#include <stdlib.h>
#include <string.h>

#include "check.h"

static void pid_block(void) {
    tauw_pid_settings settings;
    tauw_pid_coefficients c;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_pid_coefficients_defaults(&c, sizeof c);
    settings.gain = 2.0;
    settings.has_integral_time = 1;
    settings.integral_time = 10.0;
    OK(tauw_discretize_pid(&settings, 0.5, &c, &error));
    CHECK(c.gain == 2.0 && c.setpoint_weight == 1.0 && c.derivative_per_scan == 0.0);
    CHECK_NEAR(c.integral_per_scan, 2.0 / 10.0 * 0.5, 1e-15);

    void* memory = malloc(tauw_pid_block_size() + 16);
    tauw_pid_block* block = NULL;
    const double initial = 30.0;
    double output = 0.0;
    uint32_t flags = 99;
    int32_t mode = -1;
    CHECK(tauw_pid_block_align() <= 16);
    OK(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 0.0, 100.0, &initial, &block, &error));
    CHECK((void*)block == memory);
    OK(tauw_pid_block_step(block, 50.0, 50.0, &output, &error));
    CHECK(output == 30.0);
    OK(tauw_pid_block_step(block, 54.0, 50.0, &output, &error));
    CHECK_NEAR(output, 30.0 + 2.0 * 4.0 + 0.1 * 4.0, 1e-14);
    OK(tauw_pid_block_mode(block, &mode, &error));
    CHECK(mode == TAUW_MODE_AUTOMATIC);

    /* A copy of the bytes goes on as the original does. */
    void* copy = malloc(tauw_pid_block_size());
    memcpy(copy, memory, tauw_pid_block_size());
    double from_copy = 0.0, integral = 0.0;
    OK(tauw_pid_block_step(block, 54.0, 51.0, &output, &error));
    OK(tauw_pid_block_step((tauw_pid_block*)copy, 54.0, 51.0, &from_copy, &error));
    CHECK(output == from_copy);
    OK(tauw_pid_block_integral(block, &integral, &error));
    CHECK_NEAR(integral + 2.0 * 3.0, output, 1e-14);

    /* A bad value holds the output and is no error; limits are flagged. */
    OK(tauw_pid_block_step(block, 54.0, NAN, &from_copy, &error));
    CHECK(from_copy == output);
    OK(tauw_pid_block_flags(block, &flags, &error));
    CHECK((flags & TAUW_FLAG_BAD_INPUT) != 0);
    OK(tauw_pid_block_step(block, 54.0, 51.0, &output, &error));
    OK(tauw_pid_block_step(block, 500.0, 51.0, &output, &error));
    OK(tauw_pid_block_flags(block, &flags, &error));
    CHECK(output == 100.0 && flags == TAUW_FLAG_LIMITED_HIGH);

    OK(tauw_pid_block_to_manual(block, &error));
    OK(tauw_pid_block_set_manual_output(block, 12.5, &error));
    CHECK_STATUS(tauw_pid_block_set_manual_output(block, INFINITY, &error), TAUW_ERROR_NOT_FINITE);
    OK(tauw_pid_block_step(block, 54.0, 51.0, &output, &error));
    OK(tauw_pid_block_flags(block, &flags, &error));
    CHECK(output == 12.5 && flags == TAUW_FLAG_MANUAL);
    OK(tauw_pid_block_to_automatic(block, &error));
    OK(tauw_pid_block_step(block, 54.0, 51.0, &output, &error));
    CHECK(output == 12.5);
    OK(tauw_pid_block_output(block, &output, &error));
    CHECK(output == 12.5);

    /* What cannot be set up. */
    CHECK_STATUS(tauw_pid_block_init(memory, tauw_pid_block_size() - 1, &c, 0.0, 100.0, NULL, &block, &error),
                 TAUW_ERROR_BUFFER_TOO_SMALL);
    CHECK(block == NULL);
    CHECK_STATUS(tauw_pid_block_init((char*)memory + 1, tauw_pid_block_size(), &c, 0.0, 100.0, NULL, &block, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 100.0, 0.0, NULL, &block, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 0.0, INFINITY, NULL, &block, &error),
                 TAUW_ERROR_NOT_FINITE);
    c.gain = NAN;
    CHECK_STATUS(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 0.0, 100.0, NULL, &block, &error),
                 TAUW_ERROR_NOT_FINITE);
    c.gain = 1.0;
    c.struct_size = 4;
    CHECK_STATUS(tauw_pid_block_init(memory, tauw_pid_block_size(), &c, 0.0, 100.0, NULL, &block, &error),
                 TAUW_ERROR_WRONG_STRUCT_SIZE);
    memset(memory, 0, tauw_pid_block_size());
    CHECK_STATUS(tauw_pid_block_step((tauw_pid_block*)memory, 1.0, 1.0, &output, &error), TAUW_ERROR_WRONG_HANDLE);
    free(copy);
    free(memory);
}

static void process_block(void) {
    tauw_model* process = NULL;
    tauw_process_coefficients c;
    tauw_process_coefficients_defaults(&c, sizeof c);
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 3.5, &process, &error));
    OK(tauw_discretize_process(process, 1.0, &c, &error));
    CHECK(c.delay_scans == 3);
    size_t length = 0;
    OK(tauw_delay_line_length(&c, &length, &error));
    CHECK(length == 5);
    double delay_line[5], value = 0.0;
    void* memory = malloc(tauw_process_block_size());
    tauw_process_block* block = NULL;
    CHECK(tauw_process_block_align() <= 16);
    CHECK_STATUS(tauw_process_block_init(memory, tauw_process_block_size(), &c, 50.0, 20.0, delay_line, 4, &block, &error),
                 TAUW_ERROR_BUFFER_TOO_SMALL);
    CHECK_STATUS(tauw_process_block_init(memory, tauw_process_block_size(), &c, 50.0, 20.0, NULL, 5, &block, &error),
                 TAUW_ERROR_NULL_POINTER);
    OK(tauw_process_block_init(memory, tauw_process_block_size(), &c, 50.0, 20.0, delay_line, 5, &block, &error));
    for (int k = 1; k <= 20; ++k) {
        OK(tauw_process_block_step(block, 51.0, delay_line, 5, &value, &error));
        const double since = k - 3.5;
        CHECK_NEAR(value, 20.0 + (since > 0.0 ? 2.0 * (1.0 - exp(-since / 10.0)) : 0.0), 1e-13);
    }
    double now = 0.0;
    OK(tauw_process_block_process_value(block, &now, &error));
    CHECK(now == value);
    CHECK_STATUS(tauw_process_block_step(block, 51.0, delay_line, 4, &value, &error), TAUW_ERROR_BUFFER_TOO_SMALL);
    CHECK_STATUS(tauw_process_block_step(block, 51.0, NULL, 5, &value, &error), TAUW_ERROR_NULL_POINTER);
    /* A block of the other kind. */
    CHECK_STATUS(tauw_pid_block_step((tauw_pid_block*)memory, 1.0, 1.0, &value, &error), TAUW_ERROR_WRONG_HANDLE);
    c.delay_scans = -1;
    CHECK_STATUS(tauw_delay_line_length(&c, &length, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    c.delay_scans = INT64_MAX;
    CHECK_STATUS(tauw_process_block_init(memory, tauw_process_block_size(), &c, 50.0, 20.0, delay_line, 5, &block, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    free(memory);
    OK(tauw_model_destroy(&process));
}

void test_blocks(void) {
    pid_block();
    process_block();
}
