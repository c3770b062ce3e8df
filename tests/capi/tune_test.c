#include <stdlib.h>
#include <string.h>

#include "check.h"

/* The whole text of a sheet, to be freed. */
static char* whole(int32_t (*get)(const tauw_sheet*, char*, size_t, size_t*, tauw_error*), const tauw_sheet* sheet) {
    size_t needed = 0;
    OK(get(sheet, NULL, 0, &needed, &error));
    char* text = malloc(needed);
    OK(get(sheet, text, needed, NULL, &error));
    CHECK(strlen(text) + 1 == needed);
    return text;
}

/* Oracle: the stated rule max(D, 0.1 lag, 3 scans, ...) with D = 3.5 s + half a scan, and
 * Kc = lag / (gain (tau + D)), Ti = lag as lag < 4 (tau + D). */
static void settings_by_the_rule(const tauw_sheet* sheet) {
    tauw_sheet_summary summary;
    tauw_pid_settings settings;
    tauw_entered entered;
    tauw_robustness margins;
    tauw_figures figures;
    tauw_worst_case worst;
    tauw_valve_cycle cycle;
    tauw_sheet_summary_defaults(&summary, sizeof summary);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_entered_defaults(&entered, sizeof entered);
    tauw_robustness_defaults(&margins, sizeof margins);
    tauw_figures_defaults(&figures, sizeof figures);
    OK(tauw_sheet_summarize(sheet, &summary, &error));
    CHECK(summary.has_model == 1 && summary.has_speed == 1 && summary.has_proposed == 1);
    CHECK(summary.withheld_count == 0 && summary.has_as_found == 1 && summary.has_proposed_entered == 1);
    CHECK_NEAR(summary.effective_dead_time, 4.0, 1e-6);
    CHECK_NEAR(summary.time_constant, 4.0, 1e-6);
    CHECK(summary.half_scan == 0.5 && summary.measurement_filter_time == 0.0);
    OK(tauw_sheet_settings(sheet, TAUW_SHEET_PROPOSED, &settings, &error));
    OK(tauw_sheet_entered(sheet, TAUW_SHEET_PROPOSED, &entered, &error));
    /* 100 / 0.625 = 160 %, 60 / 10 = 6 repeats per minute. */
    CHECK_NEAR(entered.proportional_band, 160.0, 1e-4);
    CHECK_NEAR(entered.repeats, 6.0, 1e-4);
    CHECK_NEAR(settings.gain, 0.625, 1e-4);
    OK(tauw_sheet_margins(sheet, TAUW_SHEET_PROPOSED, &margins, &error));
    CHECK(margins.stable == 1 && margins.max_sensitivity > 1.0 && margins.max_sensitivity < 2.0);
    OK(tauw_sheet_entered(sheet, TAUW_SHEET_AS_FOUND, &entered, &error));
    CHECK(entered.proportional_band == 300.0 && entered.repeats == 4.0);
    OK(tauw_sheet_settings(sheet, TAUW_SHEET_AS_FOUND, &settings, &error));
    CHECK_NEAR(settings.gain, 1.0 / 3.0, 1e-12);
    CHECK_NEAR(settings.integral_time, 15.0, 1e-12);
    CHECK(summary.has_proposed_figures == 1);
    tauw_worst_case_defaults(&worst, sizeof worst);
    OK(tauw_sheet_worst_case(sheet, TAUW_SHEET_PROPOSED, &worst, &error));
    CHECK(worst.certified == 1 && worst.has_max_sensitivity == 1 && worst.max_sensitivity <= worst.max_sensitivity_bound);
    tauw_valve_cycle_defaults(&cycle, sizeof cycle);
    CHECK_STATUS(tauw_sheet_valve_cycle(sheet, TAUW_SHEET_PROPOSED, &cycle, &error), TAUW_ERROR_MISSING_ARGUMENT);
    OK(tauw_sheet_figures(sheet, TAUW_SHEET_PROPOSED, &figures, &error));
    CHECK(figures.integrated_absolute_error > 0.0);
    for (size_t i = 0; i < summary.caution_count; ++i) {
        char caution[1024];
        OK(tauw_sheet_caution(sheet, i, caution, sizeof caution, NULL, &error));
        CHECK(strlen(caution) > 10);
    }
    CHECK_STATUS(tauw_sheet_withheld(sheet, 0, NULL, 0, &(size_t){0}, &error), TAUW_ERROR_OUT_OF_DOMAIN);
}

static void items(const tauw_sheet* sheet, const tauw_record* record) {
    char text[256], sha256[80];
    OK(tauw_sheet_item(sheet, TAUW_SHEET_LOOP_NAME, text, sizeof text, NULL, &error));
    CHECK(strcmp(text, "FIC-1 (invented)") == 0);
    OK(tauw_sheet_item(sheet, TAUW_SHEET_LIBRARY_VERSION, text, sizeof text, NULL, &error));
    CHECK(strcmp(text, tauw_version()) == 0);
    OK(tauw_sheet_item(sheet, TAUW_SHEET_INPUT_SHA256, text, sizeof text, NULL, &error));
    OK(tauw_record_sha256(record, sha256, sizeof sha256, NULL, &error));
    CHECK(strcmp(text, sha256) == 0 && strlen(text) == 64);
    OK(tauw_sheet_item(sheet, TAUW_SHEET_GAIN_UNIT, text, sizeof text, NULL, &error));
    CHECK(strcmp(text, "%/%") == 0);
    OK(tauw_sheet_item(sheet, TAUW_SHEET_SPEED_REASON, text, sizeof text, NULL, &error));
    CHECK(strlen(text) > 10);
    OK(tauw_sheet_item(sheet, TAUW_SHEET_SOURCE, text, sizeof text, NULL, &error));
    CHECK(text[0] == '\0');
    CHECK_STATUS(tauw_sheet_item(sheet, 8, text, sizeof text, NULL, &error), TAUW_ERROR_UNKNOWN_NAME);
}

static void read_back_and_compare(const tauw_sheet* sheet, const tauw_record* record, tauw_tuning_request* request) {
    char* text = whole(tauw_sheet_text, sheet);
    char* json = whole(tauw_sheet_json, sheet);
    CHECK(strstr(text, "FIC-1 (invented)") != NULL && strstr(json, "tauwright-tuning-sheet") != NULL);

    /* Invariant: what is read back differs in nothing; another request differs in something. */
    tauw_sheet *back = NULL, *other = NULL;
    tauw_differences* differences = NULL;
    size_t count = 99;
    OK(tauw_sheet_from_json(json, strlen(json), &back, &error));
    OK(tauw_differences_between(sheet, back, &differences, &error));
    OK(tauw_differences_count(differences, &count, &error));
    CHECK(count == 0);
    CHECK_STATUS(tauw_differences_path(differences, 0, text, 1, NULL, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    OK(tauw_differences_destroy(&differences));

    request->has_time_constant = 1;
    request->time_constant = 20.0;
    OK(tauw_tune(record, request, &other, &error));
    OK(tauw_differences_between(sheet, other, &differences, &error));
    OK(tauw_differences_count(differences, &count, &error));
    CHECK(count > 0);
    int differs_in_speed = 0;
    for (size_t i = 0; i < count; ++i) {
        char path[256], earlier[2048], later[2048];
        OK(tauw_differences_path(differences, i, path, sizeof path, NULL, &error));
        OK(tauw_differences_earlier(differences, i, earlier, sizeof earlier, NULL, &error));
        OK(tauw_differences_later(differences, i, later, sizeof later, NULL, &error));
        CHECK(path[0] == '/' && strcmp(earlier, later) != 0);
        differs_in_speed += strstr(path, "time_constant") != NULL;
    }
    CHECK(differs_in_speed >= 1);
    OK(tauw_differences_destroy(&differences));
    OK(tauw_sheet_destroy(&other));
    OK(tauw_sheet_destroy(&back));
    CHECK_STATUS(tauw_sheet_from_json("{}", 2, &back, &error), TAUW_ERROR_SCHEMA_UNSUPPORTED);
    CHECK_STATUS(tauw_sheet_from_json(json, strlen(json) / 2, &back, &error), TAUW_ERROR_FILE_MALFORMED);
    CHECK(back == NULL);
    free(json);
    free(text);
}

static void proposal(void) {
    tauw_record* record = made_record();
    tauw_controller_form form;
    tauw_entered as_found;
    tauw_duty duty;
    tauw_identify_options options;
    tauw_tuning_request request;
    tauw_sheet* sheet = NULL;
    tauw_controller_form_defaults(&form, sizeof form);
    tauw_entered_defaults(&as_found, sizeof as_found);
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_identify_options_defaults(&options, sizeof options);
    tauw_tuning_request_defaults(&request, sizeof request);
    form.gain_as = TAUW_GAIN_AS_PROPORTIONAL_BAND;
    form.integral_as = TAUW_INTEGRAL_AS_REPEATS;
    form.integral_unit = TAUW_TIME_UNIT_MINUTES;
    as_found.has_proportional_band = 1;
    as_found.proportional_band = 300.0;
    as_found.has_repeats = 1;
    as_found.repeats = 4.0;
    duty.has_scan_time = 1;
    duty.scan_time = 1.0;
    duty.setpoint_step = 5.0;
    request.form = &form;
    request.as_found = &as_found;
    request.duty = &duty;
    request.identify = &options;
    request.loop_name = "FIC-1 (invented)";
    OK(tauw_tune(record, &request, &sheet, &error));
    settings_by_the_rule(sheet);
    items(sheet, record);
    read_back_and_compare(sheet, record, &request);

    /* The fit on the sheet is the fit. */
    tauw_fit* fit = NULL;
    tauw_model* model = NULL;
    tauw_fit_summary summary;
    double gain = 0.0;
    tauw_fit_summary_defaults(&summary, sizeof summary);
    OK(tauw_sheet_fit(sheet, &fit, &error));
    OK(tauw_fit_summarize(fit, &summary, &error));
    CHECK_NEAR(summary.gain, 2.0, 1e-6);
    OK(tauw_sheet_model(sheet, &model, &error));
    OK(tauw_model_steady_gain(model, &gain, &error));
    CHECK(gain == summary.gain);
    OK(tauw_model_destroy(&model));
    OK(tauw_fit_destroy(&fit));
    OK(tauw_sheet_destroy(&sheet));

    request.safety_function = 1;
    CHECK_STATUS(tauw_tune(record, &request, &sheet, &error), TAUW_ERROR_SAFETY_FUNCTION);
    CHECK(sheet == NULL);
    request.safety_function = 0;
    request.form = NULL;
    CHECK_STATUS(tauw_tune(record, &request, &sheet, &error), TAUW_ERROR_MISSING_ARGUMENT);
    OK(tauw_record_destroy(&record));
}

static void withheld(void) {
    const char* csv = "time_s,output,process_value\n0,50,1\n1,50,2\n2,50,1\n3,50,2\n4,50,1\n5,50,2\n6,50,1\n7,50,2\n";
    tauw_record* record = NULL;
    tauw_sheet* sheet = NULL;
    tauw_sheet_summary summary;
    tauw_pid_settings settings;
    tauw_finding finding;
    tauw_model* model = NULL;
    tauw_sheet_summary_defaults(&summary, sizeof summary);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_finding_defaults(&finding, sizeof finding);
    OK(tauw_read_record_text(csv, strlen(csv), NULL, &record, &error));
    OK(tauw_tune(record, NULL, &sheet, &error));
    OK(tauw_sheet_summarize(sheet, &summary, &error));
    CHECK(summary.has_proposed == 0 && summary.withheld_count >= 1 && summary.finding_count >= 1);
    char text[1024];
    OK(tauw_sheet_withheld(sheet, 0, text, sizeof text, NULL, &error));
    CHECK(strlen(text) > 10);
    OK(tauw_sheet_finding(sheet, 0, &finding, &error));
    CHECK(finding.code == TAUW_FINDING_NO_MOVE);
    OK(tauw_sheet_finding_message(sheet, 0, text, sizeof text, NULL, &error));
    CHECK(strlen(text) > 10);
    OK(tauw_sheet_model(sheet, &model, &error));
    CHECK(model == NULL);
    settings.gain = 7.0;
    CHECK_STATUS(tauw_sheet_settings(sheet, TAUW_SHEET_PROPOSED, &settings, &error), TAUW_ERROR_MISSING_ARGUMENT);
    CHECK_STATUS(tauw_sheet_settings(sheet, TAUW_SHEET_AS_FOUND, &settings, &error), TAUW_ERROR_MISSING_ARGUMENT);
    CHECK_STATUS(tauw_sheet_settings(sheet, 2, &settings, &error), TAUW_ERROR_UNKNOWN_NAME);
    CHECK(settings.gain == 7.0);
    tauw_obstacle obstacle;
    tauw_obstacle_defaults(&obstacle, sizeof obstacle);
    CHECK_STATUS(tauw_sheet_obstacle(sheet, summary.obstacle_count, &obstacle, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    OK(tauw_sheet_destroy(&sheet));
    OK(tauw_record_destroy(&record));
}

/* A time constant far below the dead time brings obstacles and weak margins. */
static void obstacles_on_the_sheet(void) {
    tauw_record* record = made_record();
    tauw_tuning_request request;
    tauw_sheet* sheet = NULL;
    tauw_sheet_summary summary;
    tauw_obstacle obstacle;
    tauw_tuning_request_defaults(&request, sizeof request);
    tauw_sheet_summary_defaults(&summary, sizeof summary);
    tauw_obstacle_defaults(&obstacle, sizeof obstacle);
    request.has_time_constant = 1;
    request.time_constant = 0.1;
    OK(tauw_tune(record, &request, &sheet, &error));
    OK(tauw_sheet_summarize(sheet, &summary, &error));
    CHECK(summary.obstacle_count >= 1 && summary.has_proposed == 0);
    int faster = 0;
    for (size_t i = 0; i < summary.obstacle_count; ++i) {
        char text[1024];
        OK(tauw_sheet_obstacle(sheet, i, &obstacle, &error));
        faster += obstacle.code == TAUW_OBSTACLE_FASTER_THAN_DEAD_TIME;
        OK(tauw_sheet_obstacle_message(sheet, i, text, sizeof text, NULL, &error));
        OK(tauw_sheet_obstacle_repair(sheet, i, text, sizeof text, NULL, &error));
    }
    CHECK(faster == 1);
    OK(tauw_sheet_destroy(&sheet));

    request.accept_weak_margins_by = "A. Nobody";
    OK(tauw_tune(record, &request, &sheet, &error));
    OK(tauw_sheet_summarize(sheet, &summary, &error));
    CHECK(summary.has_proposed == 1);
    char text[64];
    OK(tauw_sheet_item(sheet, TAUW_SHEET_WEAK_MARGINS_ACCEPTED_BY, text, sizeof text, NULL, &error));
    CHECK(strcmp(text, "A. Nobody") == 0);
    OK(tauw_sheet_destroy(&sheet));
    OK(tauw_record_destroy(&record));
}

void test_tune(void) {
    proposal();
    withheld();
    obstacles_on_the_sheet();
}
