/* NULL for every pointer that must be given, and handles of every wrong kind. */
#include <string.h>

#include "check.h"

#define NULL_IN(call) CHECK_STATUS(call, TAUW_ERROR_NULL_POINTER)
#define WRONG(call) CHECK_STATUS(call, TAUW_ERROR_WRONG_HANDLE)

static void null_pointers_of_builders(void) {
    tauw_model* model = NULL;
    tauw_record* record = NULL;
    const double one[1] = {1.0};
    tauw_factors factors;
    tauw_record_columns columns;
    tauw_range range;
    tauw_factors_defaults(&factors, sizeof factors);
    tauw_record_columns_defaults(&columns, sizeof columns);
    tauw_range_defaults(&range, sizeof range);
    CHECK(tauw_error_defaults(NULL, sizeof(tauw_error)) == TAUW_ERROR_NULL_POINTER);
    CHECK(tauw_duty_defaults(NULL, sizeof(tauw_duty)) == TAUW_ERROR_NULL_POINTER);
    NULL_IN(tauw_first_order_plus_dead_time(1.0, 1.0, 1.0, NULL, &error));
    NULL_IN(tauw_second_order_plus_dead_time(1.0, 1.0, 1.0, 1.0, NULL, &error));
    NULL_IN(tauw_integrating_plus_dead_time(1.0, 1.0, 1.0, NULL, &error));
    NULL_IN(tauw_oscillatory_plus_dead_time(1.0, 1.0, 1.0, 1.0, NULL, &error));
    NULL_IN(tauw_model_from_factors(NULL, &model, &error));
    factors.lag_count = 1;
    NULL_IN(tauw_model_from_factors(&factors, &model, &error));
    factors.lag_count = 0;
    factors.lead_pair_count = 1;
    NULL_IN(tauw_model_from_factors(&factors, &model, &error));
    NULL_IN(tauw_model_from_polynomials(NULL, 1, one, 1, 0.0, &model, &error));
    NULL_IN(tauw_model_from_polynomials(one, 1, NULL, 1, 0.0, &model, &error));
    NULL_IN(tauw_model_from_polynomials(one, 1, one, 1, 0.0, NULL, &error));
    NULL_IN(tauw_read_record(NULL, &record, &error));
    NULL_IN(tauw_read_record("x", NULL, &error));
    NULL_IN(tauw_read_record_text(NULL, 1, "x", &record, &error));
    NULL_IN(tauw_record_create(NULL, &record, &error));
    columns.n = 1;
    NULL_IN(tauw_record_create(&columns, &record, &error));
    CHECK(strstr(error.message, "columns.time_s") != NULL);
    columns.time_s = columns.output = one;
    NULL_IN(tauw_record_create(&columns, &record, &error));
    CHECK(record == NULL && model == NULL);
}

static void null_pointers_of_handles(void) {
    tauw_model* model = NULL;
    tauw_fit* fit = NULL;
    tauw_sheet* sheet = NULL;
    tauw_trend* trend = NULL;
    tauw_synthesis* synthesis = NULL;
    tauw_differences* differences = NULL;
    tauw_margins* margins = NULL;
    tauw_uncertainty* uncertainty = NULL;
    tauw_discrete* discrete = NULL;
    tauw_pid_settings settings;
    tauw_duty duty;
    tauw_desired_response desired;
    double x = 0.0;
    size_t needed = 0;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_desired_response_defaults(&desired, sizeof desired);
    NULL_IN(tauw_model_product(NULL, NULL, &model, &error));
    NULL_IN(tauw_in_percent(NULL, NULL, NULL, &model, &error));
    NULL_IN(tauw_model_at(NULL, &x, &x, 1, &x, &x, &error));
    NULL_IN(tauw_step_response(NULL, &x, 1, &x, &error));
    NULL_IN(tauw_model_steady_gain(NULL, &x, &error));
    NULL_IN(tauw_model_view(NULL, NULL, &error));
    NULL_IN(tauw_model_text(NULL, NULL, 0, &needed, &error));
    NULL_IN(tauw_record_view(NULL, NULL, &error));
    NULL_IN(tauw_record_source(NULL, NULL, 0, &needed, &error));
    NULL_IN(tauw_record_first_stamp(NULL, NULL, 0, &needed, &error));
    NULL_IN(tauw_record_sha256(NULL, NULL, 0, &needed, &error));
    NULL_IN(tauw_identify(NULL, NULL, &fit, &error));
    NULL_IN(tauw_fit_summarize(NULL, NULL, &error));
    NULL_IN(tauw_fit_model(NULL, &model, &error));
    NULL_IN(tauw_fit_lags(NULL, &x, 1, &needed, &error));
    NULL_IN(tauw_fit_standard_error(NULL, "gain", &x, &error));
    NULL_IN(tauw_fit_parameter_name(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_fit_covariance(NULL, &x, 1, &needed, &error));
    NULL_IN(tauw_fit_move(NULL, 0, NULL, &error));
    NULL_IN(tauw_fit_finding(NULL, 0, NULL, &error));
    NULL_IN(tauw_fit_finding_message(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_fit_form_reason(NULL, NULL, 0, &needed, &error));
    NULL_IN(tauw_fitted_response(NULL, NULL, &x, 1, &needed, &error));
    NULL_IN(tauw_pid_settings_check(NULL, &error));
    NULL_IN(tauw_pid_settings_at(NULL, &x, &x, 1, &x, &x, &error));
    NULL_IN(tauw_transfer_function(NULL, &model, &error));
    NULL_IN(tauw_entered_as(&settings, NULL, NULL, &error));
    NULL_IN(tauw_settings_from(NULL, NULL, &settings, &error));
    NULL_IN(tauw_discretize_pid(NULL, 1.0, NULL, &error));
    NULL_IN(tauw_discretize_process(NULL, 1.0, NULL, &error));
    NULL_IN(tauw_delay_line_length(NULL, &needed, &error));
    NULL_IN(tauw_robustness_of(NULL, &settings, NULL, NULL, &error));
    NULL_IN(tauw_robustness_of_open_loop(NULL, NULL, &error));
    NULL_IN(tauw_simulate(NULL, &settings, &duty, 1.0, &trend, &error));
    NULL_IN(tauw_trend_view(NULL, NULL, &error));
    NULL_IN(tauw_trend_figures(NULL, NULL, &error));
    NULL_IN(tauw_continuous_trend(NULL, &settings, &duty, 1.0, 9, &trend, &error));
    NULL_IN(tauw_valve_cycle_of(NULL, &settings, NULL, NULL, &error));
    NULL_IN(tauw_margins_of(NULL, &settings, NULL, &margins, &error));
    NULL_IN(tauw_margins_of_open_loop(NULL, &margins, &error));
    NULL_IN(tauw_margins_of_exact_controller(NULL, NULL, 0.0, &margins, &error));
    NULL_IN(tauw_margins_summarize(NULL, NULL, &error));
    NULL_IN(tauw_margins_gain_crossover(NULL, 0, NULL, &error));
    NULL_IN(tauw_margins_phase_crossover(NULL, 0, NULL, &error));
    NULL_IN(tauw_margins_stable_dead_time(NULL, 0, NULL, &error));
    NULL_IN(tauw_delay_budget_of(NULL, &settings, NULL, NULL, &error));
    NULL_IN(tauw_uncertainty_of_box(NULL, &uncertainty, &error));
    NULL_IN(tauw_uncertainty_view(NULL, NULL, &error));
    NULL_IN(tauw_uncertainty_half_widths(NULL, NULL, &error));
    NULL_IN(tauw_uncertainty_parameter_name(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_uncertainty_model(NULL, 0, &model, &error));
    NULL_IN(tauw_worst_case_of(NULL, &settings, NULL, NULL, NULL, &model, &error));
    NULL_IN(tauw_violating_share_of(NULL, &settings, NULL, NULL, NULL, NULL, &error));
    NULL_IN(tauw_held(NULL, 1.0, 0, &discrete, &error));
    NULL_IN(tauw_discrete_at(NULL, &x, &x, 1, &x, &x, &error));
    NULL_IN(tauw_discrete_at_offset(NULL, &x, &x, 1, &x, &x, &error));
    NULL_IN(tauw_discrete_at_frequency(NULL, &x, 1, &x, &x, &error));
    NULL_IN(tauw_discrete_view(NULL, NULL, &error));
    NULL_IN(tauw_synthesize(NULL, &desired, &synthesis, &error));
    NULL_IN(tauw_synthesis_summarize(NULL, NULL, &error));
    NULL_IN(tauw_synthesis_settings(NULL, &settings, &error));
    NULL_IN(tauw_synthesis_obstacle(NULL, 0, NULL, &error));
    NULL_IN(tauw_synthesis_obstacle_message(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_synthesis_obstacle_repair(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_synthesis_attained(NULL, &model, &error));
    NULL_IN(tauw_synthesis_controller_at(NULL, &x, &x, 1, &x, &x, &error));
    NULL_IN(tauw_synthesis_attained_with_settings_at(NULL, &x, &x, 1, &x, &x, &error));
    NULL_IN(tauw_tune(NULL, NULL, &sheet, &error));
    NULL_IN(tauw_sheet_summarize(NULL, NULL, &error));
    NULL_IN(tauw_sheet_settings(NULL, 1, &settings, &error));
    NULL_IN(tauw_sheet_entered(NULL, 1, NULL, &error));
    NULL_IN(tauw_sheet_margins(NULL, 1, NULL, &error));
    NULL_IN(tauw_sheet_figures(NULL, 1, NULL, &error));
    NULL_IN(tauw_sheet_fit(NULL, &fit, &error));
    NULL_IN(tauw_sheet_model(NULL, &model, &error));
    NULL_IN(tauw_sheet_finding(NULL, 0, NULL, &error));
    NULL_IN(tauw_sheet_finding_message(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_obstacle(NULL, 0, NULL, &error));
    NULL_IN(tauw_sheet_obstacle_message(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_obstacle_repair(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_withheld(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_caution(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_item(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_text(NULL, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_json(NULL, NULL, 0, &needed, &error));
    NULL_IN(tauw_sheet_from_json(NULL, 5, &sheet, &error));
    NULL_IN(tauw_differences_between(NULL, NULL, &differences, &error));
    NULL_IN(tauw_differences_count(NULL, &needed, &error));
    NULL_IN(tauw_differences_path(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_differences_earlier(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_differences_later(NULL, 0, NULL, 0, &needed, &error));
    NULL_IN(tauw_pid_block_init(NULL, 1000, NULL, 0.0, 1.0, NULL, NULL, &error));
    NULL_IN(tauw_pid_block_step(NULL, 1.0, 1.0, &x, &error));
    NULL_IN(tauw_pid_block_to_manual(NULL, &error));
    NULL_IN(tauw_pid_block_to_automatic(NULL, &error));
    NULL_IN(tauw_pid_block_set_manual_output(NULL, 1.0, &error));
    NULL_IN(tauw_pid_block_flags(NULL, NULL, &error));
    NULL_IN(tauw_pid_block_mode(NULL, NULL, &error));
    NULL_IN(tauw_pid_block_output(NULL, &x, &error));
    NULL_IN(tauw_pid_block_integral(NULL, &x, &error));
    NULL_IN(tauw_process_block_init(NULL, 1000, NULL, 0.0, 0.0, &x, 1, NULL, &error));
    NULL_IN(tauw_process_block_step(NULL, 1.0, &x, 1, &x, &error));
    NULL_IN(tauw_process_block_process_value(NULL, &x, &error));
}

void test_null_pointers(void) {
    null_pointers_of_builders();
    null_pointers_of_handles();
    /* Results that have no place to go. */
    tauw_model* model = NULL;
    double x = 0.5;
    OK(tauw_first_order_plus_dead_time(1.0, 1.0, 1.0, &model, &error));
    NULL_IN(tauw_model_steady_gain(model, NULL, &error));
    NULL_IN(tauw_model_at(model, NULL, &x, 1, &x, &x, &error));
    NULL_IN(tauw_model_at(model, &x, NULL, 1, &x, &x, &error));
    NULL_IN(tauw_model_at(model, &x, &x, 1, NULL, &x, &error));
    NULL_IN(tauw_model_at(model, &x, &x, 1, &x, NULL, &error));
    NULL_IN(tauw_step_response(model, NULL, 1, &x, &error));
    NULL_IN(tauw_step_response(model, &x, 1, NULL, &error));
    NULL_IN(tauw_model_view(model, NULL, &error));
    tauw_model* percent = NULL;
    NULL_IN(tauw_in_percent(model, NULL, NULL, &percent, &error));
    CHECK(percent == NULL);
    OK(tauw_model_destroy(&model));
}

/* A live handle of another kind is refused wherever a handle is taken. */
void test_handles(void) {
    tauw_record* record = made_record();
    tauw_model *model = NULL, *made = NULL;
    tauw_fit *fit = NULL, *other_fit = NULL;
    tauw_sheet *sheet = NULL, *other_sheet = NULL;
    tauw_synthesis *synthesis = NULL, *other_synthesis = NULL;
    tauw_trend *trend = NULL, *other_trend = NULL;
    tauw_differences *differences = NULL, *other_differences = NULL;
    tauw_margins *margins = NULL, *other_margins = NULL;
    tauw_uncertainty *uncertainty = NULL, *other_uncertainty = NULL;
    tauw_discrete *discrete = NULL, *other_discrete = NULL;
    tauw_uncertainty_box half_widths;
    tauw_worst_case worst;
    tauw_desired_response desired;
    tauw_pid_settings settings;
    tauw_duty duty;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    settings.gain = 0.1;
    tauw_duty_defaults(&duty, sizeof duty);
    duty.has_scan_time = 1;
    duty.scan_time = 1.0;
    tauw_desired_response_defaults(&desired, sizeof desired);
    desired.has_time_constant = 1;
    desired.time_constant = 4.0;
    OK(tauw_identify(record, NULL, &fit, &error));
    OK(tauw_fit_model(fit, &model, &error));
    OK(tauw_tune(record, NULL, &sheet, &error));
    OK(tauw_synthesize(model, &desired, &synthesis, &error));
    OK(tauw_simulate(model, &settings, &duty, 10.0, &trend, &error));
    OK(tauw_differences_between(sheet, sheet, &differences, &error));
    tauw_uncertainty_box_defaults(&half_widths, sizeof half_widths);
    tauw_worst_case_defaults(&worst, sizeof worst);
    OK(tauw_margins_of(model, &settings, NULL, &margins, &error));
    OK(tauw_uncertainty_of_box(&half_widths, &uncertainty, &error));
    OK(tauw_held(model, 1.0, TAUW_BETWEEN_CONSTANT, &discrete, &error));

    double x = 0.0;
    size_t needed = 0;
    void* all[10] = {record, model, fit, sheet, synthesis, trend, differences, margins, uncertainty, discrete};
    for (int i = 0; i < 10; ++i) {
        void* it = all[i];
        if (it != record) {
            WRONG(tauw_record_sha256(it, NULL, 0, &needed, &error));
            WRONG(tauw_identify(it, NULL, &other_fit, &error));
            WRONG(tauw_tune(it, NULL, &other_sheet, &error));
            WRONG(tauw_record_view(it, NULL, &error));
            tauw_record* alias = it;
            WRONG(tauw_record_destroy(&alias));
            CHECK(alias == it);
        }
        if (it != model) {
            WRONG(tauw_model_steady_gain(it, &x, &error));
            WRONG(tauw_model_product(model, it, &made, &error));
            WRONG(tauw_model_product(it, model, &made, &error));
            WRONG(tauw_robustness_of_open_loop(it, NULL, &error));
            WRONG(tauw_simulate(it, &settings, &duty, 10.0, &other_trend, &error));
            WRONG(tauw_synthesize(it, &desired, &other_synthesis, &error));
            WRONG(tauw_discretize_process(it, 1.0, NULL, &error));
            WRONG(tauw_margins_of_open_loop(it, &other_margins, &error));
            WRONG(tauw_held(it, 1.0, 0, &other_discrete, &error));
            const tauw_model* list[2] = {model, it};
            WRONG(tauw_uncertainty_of_models(list, 2, &other_uncertainty, &error));
            WRONG(tauw_worst_case_of(it, &settings, uncertainty, NULL, &worst, &made, &error));
            tauw_desired_response literal = desired;
            literal.has_time_constant = 0;
            literal.transfer_function = it;
            WRONG(tauw_synthesize(model, &literal, &other_synthesis, &error));
            tauw_model* alias = it;
            WRONG(tauw_model_destroy(&alias));
        }
        if (it != fit) {
            WRONG(tauw_fit_lags(it, &x, 1, NULL, &error));
            WRONG(tauw_fitted_response(it, record, NULL, 0, &needed, &error));
            WRONG(tauw_fit_summarize(it, NULL, &error));
            WRONG(tauw_uncertainty_from_fit(it, 0.95, &other_uncertainty, &error));
            tauw_fit* alias = it;
            WRONG(tauw_fit_destroy(&alias));
        }
        if (it != sheet) {
            WRONG(tauw_sheet_text(it, NULL, 0, &needed, &error));
            WRONG(tauw_sheet_settings(it, 1, &settings, &error));
            WRONG(tauw_sheet_item(it, 0, NULL, 0, &needed, &error));
            WRONG(tauw_differences_between(sheet, it, &other_differences, &error));
            tauw_sheet* alias = it;
            WRONG(tauw_sheet_destroy(&alias));
        }
        if (it != synthesis) {
            WRONG(tauw_synthesis_settings(it, &settings, &error));
            WRONG(tauw_synthesis_controller_at(it, &x, &x, 1, &x, &x, &error));
            WRONG(tauw_margins_of_exact_controller(model, it, 0.0, &other_margins, &error));
            tauw_synthesis* alias = it;
            WRONG(tauw_synthesis_destroy(&alias));
        }
        if (it != trend) {
            WRONG(tauw_trend_figures(it, NULL, &error));
            tauw_trend* alias = it;
            WRONG(tauw_trend_destroy(&alias));
        }
        if (it != differences) {
            WRONG(tauw_differences_count(it, &needed, &error));
            tauw_differences* alias = it;
            WRONG(tauw_differences_destroy(&alias));
        }
        if (it != margins) {
            WRONG(tauw_margins_summarize(it, NULL, &error));
            tauw_margins* alias = it;
            WRONG(tauw_margins_destroy(&alias));
        }
        if (it != uncertainty) {
            WRONG(tauw_uncertainty_view(it, NULL, &error));
            WRONG(tauw_worst_case_of(model, &settings, it, NULL, &worst, &made, &error));
            tauw_uncertainty* alias = it;
            WRONG(tauw_uncertainty_destroy(&alias));
        }
        if (it != discrete) {
            WRONG(tauw_discrete_view(it, NULL, &error));
            tauw_discrete* alias = it;
            WRONG(tauw_discrete_destroy(&alias));
        }
        WRONG(tauw_pid_block_output(it, &x, &error));
        WRONG(tauw_process_block_process_value(it, &x, &error));
        WRONG(tauw_valve_position(it, &x, &error));
        WRONG(tauw_transmitter_measured(it, &x, &error));
    }
    WRONG(tauw_fit_lags((tauw_fit*)model, &x, 1, NULL, &error));
    CHECK(strstr(error.message, "fit is a tauw_model") != NULL && strstr(error.message, "give a tauw_fit") != NULL);
    CHECK(made == NULL && other_fit == NULL && other_sheet == NULL && other_synthesis == NULL && other_trend == NULL);

    /* Every handle, twice; then nothing, and nowhere. */
    for (int i = 0; i < 2; ++i) {
        OK(tauw_record_destroy(&record));
        OK(tauw_model_destroy(&model));
        OK(tauw_fit_destroy(&fit));
        OK(tauw_sheet_destroy(&sheet));
        OK(tauw_synthesis_destroy(&synthesis));
        OK(tauw_trend_destroy(&trend));
        OK(tauw_differences_destroy(&differences));
        OK(tauw_margins_destroy(&margins));
        OK(tauw_uncertainty_destroy(&uncertainty));
        OK(tauw_discrete_destroy(&discrete));
    }
    CHECK(margins == NULL && uncertainty == NULL && discrete == NULL);
    CHECK(other_margins == NULL && other_uncertainty == NULL && other_discrete == NULL);
    CHECK(record == NULL && model == NULL && fit == NULL && sheet == NULL && synthesis == NULL && trend == NULL);
    CHECK(differences == NULL);
    OK(tauw_model_destroy(NULL));
    NULL_IN(tauw_model_steady_gain(model, &x, &error));
}
