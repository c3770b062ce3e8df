/* Struct sizes, enumeration values and numbers that are refused; the error struct itself. */
#include <string.h>

#include "check.h"

/* Every _defaults refuses other sizes and then leaves the memory alone. */
#define DEFAULTS(type)                                                                  \
    do {                                                                                \
        type it_;                                                                       \
        memset(&it_, 0x5a, sizeof it_);                                                 \
        CHECK(type##_defaults(&it_, sizeof it_ - 1) == TAUW_ERROR_WRONG_STRUCT_SIZE);   \
        CHECK(type##_defaults(&it_, sizeof it_ + 8) == TAUW_ERROR_WRONG_STRUCT_SIZE);   \
        CHECK(type##_defaults(&it_, 0) == TAUW_ERROR_WRONG_STRUCT_SIZE);                \
        CHECK(((unsigned char*)&it_)[0] == 0x5a);                                       \
        CHECK(type##_defaults(&it_, sizeof it_) == TAUW_OK);                            \
        CHECK(it_.struct_size == sizeof it_);                                           \
    } while (0)

static void defaults(void) {
    DEFAULTS(tauw_error);
    DEFAULTS(tauw_range);
    DEFAULTS(tauw_factors);
    DEFAULTS(tauw_record_columns);
    DEFAULTS(tauw_identify_options);
    DEFAULTS(tauw_fit_summary);
    DEFAULTS(tauw_move);
    DEFAULTS(tauw_finding);
    DEFAULTS(tauw_pid_settings);
    DEFAULTS(tauw_controller_form);
    DEFAULTS(tauw_entered);
    DEFAULTS(tauw_pid_coefficients);
    DEFAULTS(tauw_process_coefficients);
    DEFAULTS(tauw_robustness_options);
    DEFAULTS(tauw_robustness);
    DEFAULTS(tauw_duty);
    DEFAULTS(tauw_figures);
    DEFAULTS(tauw_trend_columns);
    DEFAULTS(tauw_valve_coefficients);
    DEFAULTS(tauw_transmitter_coefficients);
    DEFAULTS(tauw_valve_settings);
    DEFAULTS(tauw_transmitter_settings);
    DEFAULTS(tauw_discrete_parts);
    DEFAULTS(tauw_gain_crossover);
    DEFAULTS(tauw_phase_crossover);
    DEFAULTS(tauw_delay_range);
    DEFAULTS(tauw_delay_budget);
    DEFAULTS(tauw_uncertainty_box);
    DEFAULTS(tauw_uncertainty_parts);
    DEFAULTS(tauw_worst_case_options);
    DEFAULTS(tauw_worst_case);
    DEFAULTS(tauw_violation_limits);
    DEFAULTS(tauw_violation_options);
    DEFAULTS(tauw_violating_share);
    DEFAULTS(tauw_valve_cycle);
    DEFAULTS(tauw_desired_response);
    DEFAULTS(tauw_obstacle);
    DEFAULTS(tauw_synthesis_summary);
    DEFAULTS(tauw_tuning_request);
    DEFAULTS(tauw_sheet_summary);
    DEFAULTS(tauw_audit_loop);
    DEFAULTS(tauw_audit_options);
    DEFAULTS(tauw_audit_row);
    DEFAULTS(tauw_audit_summary);
}

static void the_error_itself(void) {
    tauw_error small;
    tauw_model* model = (tauw_model*)&small;
    memset(&small, 0, sizeof small);
    CHECK(tauw_first_order_plus_dead_time(1.0, 1.0, 1.0, &model, &small) == TAUW_ERROR_WRONG_STRUCT_SIZE);
    CHECK(model == (tauw_model*)&small && small.code == 0);
    CHECK(tauw_first_order_plus_dead_time(1.0, -1.0, 1.0, &model, NULL) == TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK(model == NULL);

    /* A long path: the message ends with a zero, between characters of two bytes. */
    char path[2001];
    tauw_record* record = NULL;
    for (int i = 0; i < 2000; i += 2) memcpy(path + i, "\xc3\xa9", 2);
    path[2000] = '\0';
    CHECK_STATUS(tauw_read_record(path, &record, &error), TAUW_ERROR_FILE_NOT_READABLE);
    const size_t length = strlen(error.message);
    CHECK(length >= sizeof error.message - 2 && length < sizeof error.message);
    CHECK((unsigned char)error.message[length - 1] == 0xa9);
    CHECK(error.code == TAUW_ERROR_FILE_NOT_READABLE && record == NULL);
}

#define SIZE_REFUSED(struct_, call)                                \
    do {                                                           \
        const uint32_t size_ = (struct_).struct_size;              \
        (struct_).struct_size = size_ + 8;                         \
        CHECK_STATUS(call, TAUW_ERROR_WRONG_STRUCT_SIZE);          \
        (struct_).struct_size = 0;                                 \
        CHECK_STATUS(call, TAUW_ERROR_WRONG_STRUCT_SIZE);          \
        (struct_).struct_size = size_;                             \
    } while (0)

#define VALUE_REFUSED(member, value, call)                     \
    do {                                                       \
        const int32_t was_ = (member);                         \
        (member) = (value);                                    \
        CHECK_STATUS(call, TAUW_ERROR_UNKNOWN_NAME);           \
        (member) = was_;                                       \
    } while (0)

static void sizes_and_values(void) {
    tauw_record* record = made_record();
    tauw_model* model = NULL;
    tauw_fit* fit = NULL;
    tauw_sheet* sheet = NULL;
    tauw_synthesis* synthesis = NULL;
    tauw_trend* trend = NULL;
    tauw_range range;
    tauw_factors factors;
    tauw_identify_options options;
    tauw_pid_settings settings;
    tauw_controller_form form;
    tauw_entered entered;
    tauw_robustness_options robustness_options;
    tauw_robustness robustness;
    tauw_duty duty;
    tauw_desired_response desired;
    tauw_tuning_request request;
    tauw_pid_coefficients coefficients;
    tauw_uncertainty* uncertainty = NULL;
    tauw_uncertainty_box half_widths;
    tauw_worst_case worst;
    tauw_worst_case_options worst_options;
    tauw_violation_limits limits;
    tauw_violating_share share;
    tauw_valve_settings valve;
    tauw_valve_cycle cycle;
    tauw_delay_budget budget;
    tauw_uncertainty_box_defaults(&half_widths, sizeof half_widths);
    tauw_worst_case_defaults(&worst, sizeof worst);
    tauw_worst_case_options_defaults(&worst_options, sizeof worst_options);
    tauw_violation_limits_defaults(&limits, sizeof limits);
    tauw_violating_share_defaults(&share, sizeof share);
    tauw_valve_settings_defaults(&valve, sizeof valve);
    tauw_valve_cycle_defaults(&cycle, sizeof cycle);
    tauw_delay_budget_defaults(&budget, sizeof budget);
    tauw_range_defaults(&range, sizeof range);
    tauw_factors_defaults(&factors, sizeof factors);
    tauw_identify_options_defaults(&options, sizeof options);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_controller_form_defaults(&form, sizeof form);
    tauw_entered_defaults(&entered, sizeof entered);
    tauw_robustness_options_defaults(&robustness_options, sizeof robustness_options);
    tauw_robustness_defaults(&robustness, sizeof robustness);
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_desired_response_defaults(&desired, sizeof desired);
    tauw_tuning_request_defaults(&request, sizeof request);
    tauw_pid_coefficients_defaults(&coefficients, sizeof coefficients);
    settings.gain = 1.0;

    SIZE_REFUSED(factors, tauw_model_from_factors(&factors, &model, &error));
    OK(tauw_first_order_plus_dead_time(1.0, 10.0, 1.0, &model, &error));
    SIZE_REFUSED(options, tauw_identify(record, &options, &fit, &error));
    SIZE_REFUSED(settings, tauw_pid_settings_check(&settings, &error));
    CHECK(strstr(error.message, "settings.struct_size is 0") != NULL);
    CHECK(strstr(error.message, "tauw_pid_settings_defaults") != NULL);
    SIZE_REFUSED(form, tauw_entered_as(&settings, &form, &entered, &error));
    SIZE_REFUSED(entered, tauw_entered_as(&settings, &form, &entered, &error));
    SIZE_REFUSED(robustness_options, tauw_robustness_of(model, &settings, &robustness_options, &robustness, &error));
    SIZE_REFUSED(robustness, tauw_robustness_of(model, &settings, &robustness_options, &robustness, &error));
    SIZE_REFUSED(duty, tauw_simulate(model, &settings, &duty, 10.0, &trend, &error));
    SIZE_REFUSED(desired, tauw_synthesize(model, &desired, &synthesis, &error));
    SIZE_REFUSED(request, tauw_tune(record, &request, &sheet, &error));
    SIZE_REFUSED(coefficients, tauw_discretize_pid(&settings, 1.0, &coefficients, &error));
    SIZE_REFUSED(half_widths, tauw_uncertainty_of_box(&half_widths, &uncertainty, &error));
    OK(tauw_uncertainty_of_box(&half_widths, &uncertainty, &error));
    SIZE_REFUSED(worst, tauw_worst_case_of(model, &settings, uncertainty, &worst_options, &worst, NULL, &error));
    SIZE_REFUSED(worst_options, tauw_worst_case_of(model, &settings, uncertainty, &worst_options, &worst, NULL, &error));
    SIZE_REFUSED(limits, tauw_violating_share_of(model, &settings, uncertainty, &limits, NULL, &share, &error));
    SIZE_REFUSED(share, tauw_violating_share_of(model, &settings, uncertainty, &limits, NULL, &share, &error));
    OK(tauw_uncertainty_destroy(&uncertainty));
    SIZE_REFUSED(valve, tauw_valve_cycle_of(model, &settings, &valve, &cycle, &error));
    SIZE_REFUSED(cycle, tauw_valve_cycle_of(model, &settings, &valve, &cycle, &error));
    SIZE_REFUSED(budget, tauw_delay_budget_of(model, &settings, NULL, &budget, &error));
    VALUE_REFUSED(valve.has_travel_rate_per_s, 2, tauw_valve_cycle_of(model, &settings, &valve, &cycle, &error));
    form.output_range = &range;
    SIZE_REFUSED(range, tauw_entered_as(&settings, &form, &entered, &error));
    form.output_range = NULL;
    request.duty = &duty;
    SIZE_REFUSED(duty, tauw_tune(record, &request, &sheet, &error));

    VALUE_REFUSED(options.form, 3, tauw_identify(record, &options, &fit, &error));
    VALUE_REFUSED(options.form, -1, tauw_identify(record, &options, &fit, &error));
    VALUE_REFUSED(options.drift, 2, tauw_identify(record, &options, &fit, &error));
    VALUE_REFUSED(options.has_fixed_gain, 7, tauw_identify(record, &options, &fit, &error));
    CHECK(strstr(error.message, "options.has_fixed_gain is 7") != NULL);
    VALUE_REFUSED(settings.has_integral_time, -1, tauw_pid_settings_check(&settings, &error));
    VALUE_REFUSED(form.equation, 3, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.gain_as, 2, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.gain_unit, 2, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.integral_as, 3, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.integral_unit, 2, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.derivative_unit, 2, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.filter_as, 2, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.proportional_on, 2, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.derivative_on, INT32_MAX, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.action_as, INT32_MIN, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(form.has_filter_high, 5, tauw_entered_as(&settings, &form, &entered, &error));
    VALUE_REFUSED(entered.action, 2, tauw_settings_from(&entered, &form, &settings, &error));
    VALUE_REFUSED(duty.has_scan_time, 3, tauw_simulate(model, &settings, &duty, 10.0, &trend, &error));
    VALUE_REFUSED(desired.has_time_constant, 3, tauw_synthesize(model, &desired, &synthesis, &error));
    VALUE_REFUSED(request.safety_function, 3, tauw_tune(record, &request, &sheet, &error));

    settings.reserved = 1;
    CHECK_STATUS(tauw_pid_settings_check(&settings, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    memset(range.unit, 'u', sizeof range.unit);
    tauw_model* percent = NULL;
    CHECK_STATUS(tauw_in_percent(model, &range, &range, &percent, &error), TAUW_ERROR_WRONG_LENGTH);
    CHECK(percent == NULL);
    CHECK(fit == NULL && sheet == NULL && synthesis == NULL && trend == NULL);
    OK(tauw_model_destroy(&model));
    OK(tauw_record_destroy(&record));
}

#define FILE_REFUSED(text, code) CHECK_STATUS(tauw_read_record_text(text, sizeof(text) - 1, "f", &record, &error), code)

static void records(void) {
    tauw_record* record = NULL;
    CHECK_STATUS(tauw_read_record("/nowhere/at all.csv", &record, &error), TAUW_ERROR_FILE_NOT_READABLE);
    FILE_REFUSED("", TAUW_ERROR_FILE_MALFORMED);
    FILE_REFUSED("time_s,output,process_value\n0,1,2\n1,x,2\n", TAUW_ERROR_FILE_MALFORMED);
    CHECK(strstr(error.message, "3") != NULL);
    FILE_REFUSED("time_s,output,process_value\n0,1\n", TAUW_ERROR_FILE_MALFORMED);
    FILE_REFUSED("time_s,output,process_value\n0,1,2\n0,1,2\n", TAUW_ERROR_TIME_NOT_INCREASING);
    FILE_REFUSED("time,output,process_value\n2026-01-01T00:00:00Z,1,2\n2026-01-01T00:00:01,1,2\n",
                 TAUW_ERROR_TIME_ZONE_MISSING);

    double time_s[3] = {0.0, 1.0, 2.0}, output[3] = {1.0, 2.0, 2.0}, process_value[3] = {1.0, NAN, 1.0};
    const uint8_t good[3] = {1, 0, 1}, all_bad[3] = {0, 0, 0};
    tauw_record_columns c;
    tauw_range range;
    tauw_range_defaults(&range, sizeof range);
    tauw_record_columns_defaults(&c, sizeof c);
    CHECK_STATUS(tauw_record_create(&c, &record, &error), TAUW_ERROR_RECORD_TOO_SHORT);
    c.n = 3;
    c.time_s = time_s;
    c.output = output;
    c.process_value = process_value;
    CHECK_STATUS(tauw_record_create(&c, &record, &error), TAUW_ERROR_NOT_FINITE);
    c.good = good;
    time_s[2] = 1.0;
    CHECK_STATUS(tauw_record_create(&c, &record, &error), TAUW_ERROR_TIME_NOT_INCREASING);
    time_s[2] = 2.0;
    range.low = 100.0;
    c.output_range = &range;
    CHECK_STATUS(tauw_record_create(&c, &record, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    c.output_range = NULL;
    c.good = all_bad;
    CHECK(record == NULL);
    OK(tauw_record_create(&c, &record, &error));
    tauw_fit* fit = NULL;
    CHECK_STATUS(tauw_identify(record, NULL, &fit, &error), TAUW_ERROR_NO_USABLE_SAMPLE);
    CHECK(fit == NULL);
    OK(tauw_record_destroy(&record));
}

static void numbers(void) {
    tauw_model* model = NULL;
    tauw_process_coefficients coefficients;
    tauw_process_coefficients_defaults(&coefficients, sizeof coefficients);
    CHECK_STATUS(tauw_first_order_plus_dead_time(1.0, 0.0, 1.0, &model, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK(strstr(error.message, "lag is 0") != NULL);
    CHECK_STATUS(tauw_first_order_plus_dead_time(1.0, 1.0, -1.0, &model, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_first_order_plus_dead_time(NAN, 1.0, 1.0, &model, &error), TAUW_ERROR_NOT_FINITE);
    CHECK_STATUS(tauw_model_from_polynomials(NULL, 0, NULL, 0, 0.0, &model, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK(model == NULL);
    OK(tauw_first_order_plus_dead_time(1.0, 1.0, 1.0, &model, &error));
    CHECK_STATUS(tauw_discretize_process(model, 0.0, &coefficients, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_discretize_process(model, -1.0, &coefficients, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_discretize_process(model, NAN, &coefficients, &error), TAUW_ERROR_NOT_FINITE);
    OK(tauw_model_destroy(&model));
    /* A count that no memory can hold. */
    tauw_factors factors;
    const double lag = 1.0;
    tauw_factors_defaults(&factors, sizeof factors);
    factors.lags = factors.lag_pairs = &lag;
    factors.lag_count = SIZE_MAX;
    CHECK_STATUS(tauw_model_from_factors(&factors, &model, &error), TAUW_ERROR_OUT_OF_MEMORY);
    factors.lag_count = 0;
    factors.lag_pair_count = SIZE_MAX;
    CHECK_STATUS(tauw_model_from_factors(&factors, &model, &error), TAUW_ERROR_OUT_OF_MEMORY);
}

void test_bad_input(void) {
    defaults();
    the_error_itself();
    sizes_and_values();
    records();
    numbers();
}
