#include <stdlib.h>
#include <string.h>

#include "check.h"

/* A list of loops for a stream, and what came back. */
typedef struct stream {
    const tauw_audit_loop* loops;
    size_t count, given, taken, stop_after;
    int32_t source_says, in_order;
} stream;

static int32_t next_loop(tauw_audit_loop* loop, void* context) {
    stream* s = context;
    if (s->source_says != 1) return s->source_says;
    if (s->given == s->count) return 0;
    CHECK(loop->struct_size == sizeof *loop && loop->process == NULL);
    *loop = s->loops[s->given++];
    return 1;
}

static int32_t take_row(const tauw_audit* audit, void* context) {
    stream* s = context;
    char name[32];
    OK(tauw_audit_item(audit, 0, TAUW_AUDIT_NAME, name, sizeof name, NULL, &error));
    s->in_order &= strcmp(name, s->loops[s->taken].name) == 0;
    return ++s->taken != s->stop_after;
}

static int32_t stop_at_two(size_t done, void* context) {
    (void)context;
    return done < 2;
}

static char* item_of(const tauw_audit* audit, size_t index, int32_t item) {
    size_t needed = 0;
    OK(tauw_audit_item(audit, index, item, NULL, 0, &needed, &error));
    char* text = malloc(needed);
    OK(tauw_audit_item(audit, index, item, text, needed, NULL, &error));
    return text;
}

/* Oracle: 80 % is gain 1.25, 2 repeats per minute 30 s; the stated rule with D = 5 s + half a scan gives
 * Kc = lag / (gain (tau + D)) with tau = D, Ti = lag. */
static void one_row(const tauw_audit* audit) {
    tauw_audit_row row;
    tauw_pid_settings settings;
    tauw_entered entered;
    tauw_robustness now, proposed;
    tauw_figures figures;
    tauw_audit_row_defaults(&row, sizeof row);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_entered_defaults(&entered, sizeof entered);
    tauw_robustness_defaults(&now, sizeof now);
    tauw_robustness_defaults(&proposed, sizeof proposed);
    tauw_figures_defaults(&figures, sizeof figures);
    OK(tauw_audit_row_at(audit, 0, &row, &error));
    CHECK(row.outcome == TAUW_AUDIT_PROPOSAL_BETTER && row.change_worthwhile == 1 && row.code == TAUW_OK);
    CHECK(row.proposal_made == 1 && row.horizon == 250.0);
    CHECK(row.has_in_service == 1 && row.has_in_service_entered == 1 && row.has_in_service_figures == 1);
    CHECK(row.has_proposal == 1 && row.has_proposal_entered == 1 && row.has_proposal_figures == 1);
    OK(tauw_audit_settings(audit, 0, TAUW_AUDIT_IN_SERVICE, &settings, &error));
    CHECK_NEAR(settings.gain, 1.25, 1e-15);
    CHECK_NEAR(settings.integral_time, 30.0, 1e-15);
    OK(tauw_audit_settings(audit, 0, TAUW_AUDIT_PROPOSAL, &settings, &error));
    CHECK_NEAR(settings.gain, 30.0 / (1.2 * 10.5), 1e-12);
    CHECK_NEAR(settings.integral_time, 30.0, 1e-12);
    OK(tauw_audit_entered(audit, 0, TAUW_AUDIT_PROPOSAL, &entered, &error));
    CHECK_NEAR(entered.proportional_band, 42.0, 1e-12);
    OK(tauw_audit_margins(audit, 0, TAUW_AUDIT_IN_SERVICE, &now, &error));
    OK(tauw_audit_margins(audit, 0, TAUW_AUDIT_PROPOSAL, &proposed, &error));
    CHECK(now.stable == 1 && proposed.stable == 1 && now.max_sensitivity < proposed.max_sensitivity);
    OK(tauw_audit_figures(audit, 0, TAUW_AUDIT_PROPOSAL, &figures, &error));
    CHECK(figures.has_settling_time == 1 && figures.settling_time > 10.0 && figures.settling_time < 60.0);
    CHECK_STATUS(tauw_audit_settings(audit, 0, 2, &settings, &error), TAUW_ERROR_UNKNOWN_NAME);
    CHECK_STATUS(tauw_audit_row_at(audit, 3, &row, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    char* reason = item_of(audit, 0, TAUW_AUDIT_REASON);
    CHECK(strstr(reason, "settles in") != NULL);
    free(reason);
    char* text = item_of(audit, 0, TAUW_AUDIT_TEXT);
    CHECK(strstr(text, "Proportional band         80 %") != NULL);
    free(text);
    CHECK_STATUS(tauw_audit_item(audit, 0, 4, NULL, 0, &(size_t){0}, &error), TAUW_ERROR_UNKNOWN_NAME);
}

/* The failing one: no numbers in service, but a proposal. */
static void failed_row(const tauw_audit* audit) {
    tauw_audit_row row;
    tauw_pid_settings settings;
    tauw_figures figures;
    tauw_audit_row_defaults(&row, sizeof row);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_figures_defaults(&figures, sizeof figures);
    OK(tauw_audit_row_at(audit, 1, &row, &error));
    CHECK(row.outcome == TAUW_AUDIT_FAILED && row.code == TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK(row.has_in_service == 0 && row.has_proposal == 1 && row.has_proposal_entered == 0 && row.has_proposal_figures == 0);
    CHECK_STATUS(tauw_audit_settings(audit, 1, TAUW_AUDIT_IN_SERVICE, &settings, &error), TAUW_ERROR_MISSING_ARGUMENT);
    CHECK_STATUS(tauw_audit_figures(audit, 1, TAUW_AUDIT_PROPOSAL, &figures, &error), TAUW_ERROR_MISSING_ARGUMENT);
    CHECK_STATUS(tauw_audit_entered(audit, 1, TAUW_AUDIT_PROPOSAL, NULL, &error), TAUW_ERROR_MISSING_ARGUMENT);
    char* what = item_of(audit, 1, TAUW_AUDIT_ERROR);
    CHECK(strstr(what, "settings.gain is 0") != NULL);
    free(what);
}

static void streams(const tauw_audit_loop* loops, size_t count) {
    tauw_audit_options options;
    tauw_audit_summary summary;
    stream s = {loops, count, 0, 0, 0, 1, 1};
    OK(tauw_audit_options_defaults(&options, sizeof options));
    CHECK(options.threads == 1 && options.progress == NULL);
    tauw_audit_summary_defaults(&summary, sizeof summary);
    options.context = &s;
    options.threads = 2;
    OK(tauw_audit_stream(next_loop, take_row, &options, &summary, &error));
    CHECK(s.taken == count && s.in_order == 1 && summary.rows == count && summary.cancelled == 0);
    CHECK(summary.failed == 1 && summary.changes_worthwhile == 2);
    s = (stream){loops, count, 0, 0, 1, 1, 1};
    OK(tauw_audit_stream(next_loop, take_row, &options, &summary, &error));
    CHECK(s.taken == 1 && summary.rows == 1 && summary.cancelled == 1);
    s = (stream){loops, count, 0, 0, 0, 1, 1};
    options.threads = 1;
    options.progress = stop_at_two;
    OK(tauw_audit_stream(next_loop, take_row, &options, &summary, &error));
    CHECK(s.taken == 2 && summary.rows == 2 && summary.cancelled == 1);
    s = (stream){loops, count, 0, 0, 0, -1, 1};
    CHECK_STATUS(tauw_audit_stream(next_loop, take_row, &options, &summary, &error), TAUW_ERROR_UNKNOWN_NAME);
    CHECK(strstr(error.message, "source returned -1") != NULL);
    options.threads = 0;
    CHECK_STATUS(tauw_audit_stream(next_loop, take_row, &options, NULL, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_audit_stream(NULL, take_row, NULL, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_audit_stream(next_loop, NULL, NULL, NULL, &error), TAUW_ERROR_NULL_POINTER);
}

static void refusals(tauw_audit_loop loop, const tauw_audit* audit) {
    tauw_audit* made = NULL;
    tauw_sheet* sheet = (tauw_sheet*)(uintptr_t)audit;
    loop.process_gain_unit = 7;
    CHECK_STATUS(tauw_audit_loops(&loop, 1, NULL, &made, &error), TAUW_ERROR_UNKNOWN_NAME);
    CHECK(strstr(error.message, "loops[0].process_gain_unit is 7") != NULL);
    loop.process_gain_unit = 0;
    loop.reserved = 1;
    CHECK_STATUS(tauw_audit_loops(&loop, 1, NULL, &made, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    loop.reserved = 0;
    loop.process = (const tauw_model*)(uintptr_t)audit;
    CHECK_STATUS(tauw_audit_loops(&loop, 1, NULL, &made, &error), TAUW_ERROR_WRONG_HANDLE);
    loop.struct_size = 8;
    CHECK_STATUS(tauw_audit_loops(&loop, 1, NULL, &made, &error), TAUW_ERROR_WRONG_STRUCT_SIZE);
    CHECK(made == NULL);
    CHECK_STATUS(tauw_audit_loops(NULL, 1, NULL, &made, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_audit_loops(&loop, 1, NULL, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_audit_summarize(NULL, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_audit_summarize(audit, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_audit_row_at(audit, 0, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_audit_margins(audit, 0, 0, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_audit_text(NULL, NULL, 0, &(size_t){0}, &error), TAUW_ERROR_NULL_POINTER);
    CHECK(tauw_sheet_destroy(&sheet) == TAUW_ERROR_WRONG_HANDLE);
    CHECK(tauw_audit_destroy(NULL) == TAUW_OK);
    OK(tauw_audit_loops(NULL, 0, NULL, &made, &error));
    OK(tauw_audit_destroy(&made));
    CHECK(tauw_audit_options_defaults(NULL, 0) == TAUW_ERROR_NULL_POINTER);
    CHECK(tauw_audit_loop_defaults(&loop, 3) == TAUW_ERROR_WRONG_STRUCT_SIZE);
}

void test_audit(void) {
    tauw_model* process = NULL;
    tauw_controller_form form;
    tauw_entered entered;
    tauw_duty duty;
    tauw_pid_settings nothing, tight;
    tauw_audit_loop loops[3];
    tauw_audit* audit = NULL;
    tauw_audit_summary summary;
    OK(tauw_first_order_plus_dead_time(1.2, 30.0, 5.0, &process, &error));
    tauw_controller_form_defaults(&form, sizeof form);
    form.gain_as = TAUW_GAIN_AS_PROPORTIONAL_BAND;
    form.integral_as = TAUW_INTEGRAL_AS_REPEATS;
    form.integral_unit = TAUW_TIME_UNIT_MINUTES;
    tauw_entered_defaults(&entered, sizeof entered);
    entered.has_proportional_band = entered.has_repeats = 1;
    entered.proportional_band = 80.0;
    entered.repeats = 2.0;
    tauw_duty_defaults(&duty, sizeof duty);
    duty.has_scan_time = 1;
    duty.scan_time = 0.5;
    duty.setpoint_step = 5.0;
    tauw_pid_settings_defaults(&nothing, sizeof nothing);
    tauw_pid_settings_defaults(&tight, sizeof tight);
    nothing.gain = 0.0;
    tight.gain = 5.2;
    tight.has_integral_time = 1;
    tight.integral_time = 12.0;
    for (int i = 0; i < 3; ++i) {
        OK(tauw_audit_loop_defaults(&loops[i], sizeof loops[i]));
        loops[i].process = process;
    }
    loops[0].name = "TIC-1";
    loops[0].entered = &entered;
    loops[0].form = &form;
    loops[0].duty = &duty;
    loops[0].has_horizon = 1;
    loops[0].horizon = 250.0;
    loops[1].name = "TIC-2";
    loops[1].settings = &nothing;
    loops[2].name = "TIC-3";
    loops[2].settings = &tight;
    OK(tauw_audit_loops(loops, 3, NULL, &audit, &error));
    one_row(audit);
    failed_row(audit);
    tauw_audit_summary_defaults(&summary, sizeof summary);
    OK(tauw_audit_summarize(audit, &summary, &error));
    CHECK(summary.rows == 3 && summary.failed == 1 && summary.weak_in_service == 1 && summary.changes_worthwhile == 2);
    CHECK(summary.unstable_in_service == 0 && summary.cancelled == 0);
    CHECK(strcmp(tauw_audit_outcome_name(TAUW_AUDIT_NO_CASE), "no_case") == 0);
    CHECK(strcmp(tauw_audit_outcome_name(99), "unknown") == 0);
    size_t needed = 0;
    OK(tauw_audit_text(audit, NULL, 0, &needed, &error));
    char* table = malloc(needed);
    OK(tauw_audit_text(audit, table, needed, NULL, &error));
    CHECK(strstr(table, "2 changes worthwhile, 0 unstable and 1 weak in service, 1 failed") != NULL);
    CHECK_STATUS(tauw_audit_text(audit, table, needed - 1, NULL, &error), TAUW_ERROR_BUFFER_TOO_SMALL);
    free(table);
    streams(loops, 3);
    refusals(loops[0], audit);
    OK(tauw_audit_destroy(&audit));
    CHECK(audit == NULL);
    tauw_audit_options options;
    tauw_audit_options_defaults(&options, sizeof options);
    options.progress = stop_at_two;
    OK(tauw_audit_loops(loops, 3, &options, &audit, &error));
    OK(tauw_audit_summarize(audit, &summary, &error));
    CHECK(summary.rows == 2 && summary.cancelled == 1);
    OK(tauw_audit_destroy(&audit));
    OK(tauw_model_destroy(&process));
}
