#include <string.h>

#include "check.h"

static void record_from_text(void) {
    const char* csv =
        "# output_range: 4 20 mA\n# process_value_range: -10 90 degC\n"
        "time_s,output,process_value,quality,setpoint,mode\n"
        "0,8,20,good,25,manual\n1,8,20.5,bad,25,manual\n2,12,20,good,25,automatic\n";
    tauw_record* record = NULL;
    OK(tauw_read_record_text(csv, strlen(csv), "line 3", &record, &error));
    tauw_record_columns c;
    tauw_record_columns_defaults(&c, sizeof c);
    OK(tauw_record_view(record, &c, &error));
    CHECK(c.n == 3 && c.time_s[2] == 2.0 && c.output[2] == 12.0 && c.process_value[0] == 20.0);
    CHECK(c.good[0] == 1 && c.good[1] == 0 && c.setpoint[1] == 25.0 && c.automatic[2] == 1 && c.automatic[0] == 0);
    CHECK(c.output_range->low == 4.0 && c.output_range->high == 20.0 && strcmp(c.output_range->unit, "mA") == 0);
    CHECK(c.process_value_range->low == -10.0 && strcmp(c.process_value_range->unit, "degC") == 0);
    char text[80];
    OK(tauw_record_sha256(record, text, sizeof text, NULL, &error));
    /* Oracle: independent computation, Python's hashlib.sha256 of the same bytes. */
    CHECK(strcmp(text, "8a823ec087fb7b18ce7e89480ee44488eeb70e9204190c5adc93e091bd3c1b22") == 0);
    OK(tauw_record_source(record, text, sizeof text, NULL, &error));
    OK(tauw_record_first_stamp(record, text, sizeof text, NULL, &error));
    OK(tauw_record_destroy(&record));
}

static void fit_of_made_record(void) {
    tauw_record* record = made_record();
    tauw_fit* fit = NULL;
    tauw_fit_summary summary;
    tauw_fit_summary_defaults(&summary, sizeof summary);
    OK(tauw_identify(record, NULL, &fit, &error));
    OK(tauw_fit_summarize(fit, &summary, &error));
    /* Oracle: the parameters the record was made from. */
    CHECK(summary.form == TAUW_FORM_FIRST_ORDER_PLUS_DEAD_TIME && summary.has_model == 1);
    CHECK_NEAR(summary.gain, 2.0, 1e-6);
    CHECK_NEAR(summary.dead_time, 3.5, 1e-6);
    CHECK_NEAR(summary.offset, 40.0, 1e-6);
    CHECK(summary.first_output == 50.0);
    CHECK(summary.lag_count == 1 && summary.move_count == 3 && summary.samples_used == 240);
    CHECK(summary.r_squared > 0.999999);
    double lags[2] = {-1.0, -1.0};
    size_t needed = 0;
    OK(tauw_fit_lags(fit, lags, 2, &needed, &error));
    CHECK(needed == 1 && lags[1] == -1.0);
    CHECK_NEAR(lags[0], 10.0, 1e-6);
    CHECK_STATUS(tauw_fit_lags(fit, lags, 0, &needed, &error), TAUW_ERROR_BUFFER_TOO_SMALL);

    tauw_move move;
    tauw_move_defaults(&move, sizeof move);
    OK(tauw_fit_move(fit, 1, &move, &error));
    CHECK(move.sample == 80 && move.size == -7.0);
    CHECK_NEAR(move.gain, 2.0, 1e-5);
    CHECK_STATUS(tauw_fit_move(fit, 3, &move, &error), TAUW_ERROR_OUT_OF_DOMAIN);

    /* Oracle: the record itself, which the fit repeats. */
    double fitted[240];
    tauw_record_columns columns;
    tauw_record_columns_defaults(&columns, sizeof columns);
    OK(tauw_record_view(record, &columns, &error));
    OK(tauw_fitted_response(fit, record, NULL, 0, &needed, &error));
    CHECK(needed == 240);
    OK(tauw_fitted_response(fit, record, fitted, 240, NULL, &error));
    for (int i = 0; i < 240; i += 30) CHECK_NEAR(fitted[i], columns.process_value[i], 1e-6);

    tauw_model* model = NULL;
    double gain = 0.0;
    OK(tauw_fit_model(fit, &model, &error));
    /* The handles do not hang together. */
    OK(tauw_fit_destroy(&fit));
    OK(tauw_record_destroy(&record));
    OK(tauw_model_steady_gain(model, &gain, &error));
    CHECK(gain == summary.gain);
    OK(tauw_model_destroy(&model));
}

static void uncertainty_and_options(void) {
    tauw_record* record = made_record();
    tauw_identify_options options;
    tauw_fit* fit = NULL;
    tauw_fit_summary summary;
    tauw_identify_options_defaults(&options, sizeof options);
    tauw_fit_summary_defaults(&summary, sizeof summary);
    options.form = TAUW_FORM_FIRST_ORDER_PLUS_DEAD_TIME;
    options.has_fixed_dead_time = 1;
    options.fixed_dead_time = 2.0;
    OK(tauw_identify(record, &options, &fit, &error));
    OK(tauw_fit_summarize(fit, &summary, &error));
    CHECK(summary.dead_time == 2.0 && summary.sum_of_squares > 1e-3);

    /* Invariant: the standard errors are the roots of the covariance's diagonal. */
    double covariance[25], standard_error = 0.0;
    size_t needed = 0;
    OK(tauw_fit_covariance(fit, covariance, 25, &needed, &error));
    CHECK(needed == summary.parameter_count * summary.parameter_count && needed > 0);
    int named_gain = 0;
    for (size_t i = 0; i < summary.parameter_count; ++i) {
        char name[32];
        OK(tauw_fit_parameter_name(fit, i, name, sizeof name, NULL, &error));
        named_gain += strcmp(name, "gain") == 0;
        OK(tauw_fit_standard_error(fit, name, &standard_error, &error));
        CHECK(standard_error > 0.0);
        CHECK_NEAR(standard_error * standard_error, covariance[i * summary.parameter_count + i], 1e-12);
    }
    CHECK(named_gain == 1);
    CHECK_STATUS(tauw_fit_standard_error(fit, "dead_time", &standard_error, &error), TAUW_ERROR_UNKNOWN_NAME);
    CHECK(strstr(error.message, "dead_time") != NULL && strstr(error.message, "lag_1") != NULL);
    char reason[512];
    OK(tauw_fit_form_reason(fit, reason, sizeof reason, NULL, &error));
    CHECK(strlen(reason) > 5);
    OK(tauw_fit_destroy(&fit));
    OK(tauw_record_destroy(&record));
}

static void no_move_is_a_finding(void) {
    const char* csv = "time_s,output,process_value\n0,50,1\n1,50,2\n2,50,1\n3,50,2\n4,50,1\n5,50,2\n6,50,1\n7,50,2\n";
    tauw_record* record = NULL;
    tauw_fit* fit = NULL;
    tauw_model* model = NULL;
    tauw_fit_summary summary;
    tauw_finding finding;
    tauw_fit_summary_defaults(&summary, sizeof summary);
    tauw_finding_defaults(&finding, sizeof finding);
    OK(tauw_read_record_text(csv, strlen(csv), NULL, &record, &error));
    OK(tauw_identify(record, NULL, &fit, &error));
    OK(tauw_fit_summarize(fit, &summary, &error));
    CHECK(summary.has_model == 0 && summary.finding_count >= 1 && summary.advice >= TAUW_ADVICE_TEST_AGAIN);
    OK(tauw_fit_model(fit, &model, &error));
    CHECK(model == NULL);
    OK(tauw_fit_finding(fit, 0, &finding, &error));
    CHECK(strcmp(tauw_finding_name(finding.code), "no_move") == 0);
    size_t needed = 0;
    char message[1024];
    OK(tauw_fit_finding_message(fit, 0, NULL, 0, &needed, &error));
    OK(tauw_fit_finding_message(fit, 0, message, sizeof message, NULL, &error));
    CHECK(needed == strlen(message) + 1 && needed > 20);
    CHECK_STATUS(tauw_fit_finding(fit, summary.finding_count, &finding, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    OK(tauw_fit_destroy(&fit));
    OK(tauw_record_destroy(&record));
}

void test_identify(void) {
    CHECK(strcmp(tauw_form_name(TAUW_FORM_INTEGRATING_PLUS_DEAD_TIME), "integrating_plus_dead_time") == 0);
    CHECK(strcmp(tauw_advice_name(TAUW_ADVICE_REPAIR_VALVE), "repair_valve") == 0);
    CHECK(strcmp(tauw_finding_name(99), "unknown") == 0);
    record_from_text();
    fit_of_made_record();
    uncertainty_and_options();
    no_move_is_a_finding();
}
