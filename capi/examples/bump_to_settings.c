/* From a bump-test record to settings and a running block, in C.
 *
 *   bump_to_settings record.csv
 *
 * Reads the record, fits the process, solves the loop for a controller, checks its margins, runs the
 * controller block against the process block, and lets the library do the whole walk at once. The last
 * lines are `name value` pairs at full precision. */
#include <stdio.h>
#include <stdlib.h>

#include <tauwright/tauwright.h>

static tauw_error error;

/* Every call returns a status; the error says what was wrong and what to do. */
static void must(int32_t status) {
    if (status == TAUW_OK) return;
    fprintf(stderr, "%s: %s\n", tauw_error_name(status), error.message);
    exit(2);
}

/* Prints what the record says of itself. */
static void print_findings(const tauw_fit* fit, size_t count) {
    for (size_t i = 0; i < count; ++i) {
        tauw_finding finding;
        char message[1024];
        tauw_finding_defaults(&finding, sizeof finding);
        must(tauw_fit_finding(fit, i, &finding, &error));
        must(tauw_fit_finding_message(fit, i, message, sizeof message, NULL, &error));
        printf("found %s: %s\n", tauw_finding_name(finding.code), message);
    }
}

/* Ten scans after a set-point step from 50 % to 54 %; the last output. */
static double run_blocks(const tauw_pid_settings* settings, const tauw_model* process, double scan_time) {
    tauw_pid_coefficients pid_coefficients;
    tauw_process_coefficients process_coefficients;
    tauw_pid_coefficients_defaults(&pid_coefficients, sizeof pid_coefficients);
    tauw_process_coefficients_defaults(&process_coefficients, sizeof process_coefficients);
    must(tauw_discretize_pid(settings, scan_time, &pid_coefficients, &error));
    must(tauw_discretize_process(process, scan_time, &process_coefficients, &error));

    /* All memory of the blocks is ours: here from malloc, in firmware as well static. */
    size_t length = 0;
    must(tauw_delay_line_length(&process_coefficients, &length, &error));
    double* delay_line = malloc(length * sizeof *delay_line);
    void* pid_memory = malloc(tauw_pid_block_size());
    void* process_memory = malloc(tauw_process_block_size());
    const double initial_output = 50.0;
    tauw_pid_block* controller = NULL;
    tauw_process_block* plant = NULL;
    must(tauw_pid_block_init(pid_memory, tauw_pid_block_size(), &pid_coefficients, 0.0, 100.0, &initial_output,
                             &controller, &error));
    must(tauw_process_block_init(process_memory, tauw_process_block_size(), &process_coefficients, 50.0, 50.0,
                                 delay_line, length, &plant, &error));

    double value = 50.0, output = 50.0;
    must(tauw_pid_block_step(controller, 50.0, value, &output, &error));
    for (int scan = 0; scan < 10; ++scan) {
        must(tauw_pid_block_step(controller, 54.0, value, &output, &error));
        must(tauw_process_block_step(plant, output, delay_line, length, &value, &error));
    }
    free(process_memory);
    free(pid_memory);
    free(delay_line);
    return output;
}

/* The whole walk in one call: settings with a scan time, or the reasons why there are none. */
static void print_sheet(const tauw_record* record, double scan_time) {
    tauw_duty duty;
    tauw_tuning_request request;
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_tuning_request_defaults(&request, sizeof request);
    duty.has_scan_time = 1;
    duty.scan_time = scan_time;
    request.duty = &duty;
    tauw_sheet* sheet = NULL;
    must(tauw_tune(record, &request, &sheet, &error));

    tauw_sheet_summary summary;
    tauw_sheet_summary_defaults(&summary, sizeof summary);
    must(tauw_sheet_summarize(sheet, &summary, &error));
    for (size_t i = 0; i < summary.withheld_count; ++i) {
        char reason[1024];
        must(tauw_sheet_withheld(sheet, i, reason, sizeof reason, NULL, &error));
        printf("sheet: settings withheld: %s\n", reason);
    }
    if (summary.has_proposed) {
        tauw_pid_settings settings;
        tauw_pid_settings_defaults(&settings, sizeof settings);
        must(tauw_sheet_settings(sheet, TAUW_SHEET_PROPOSED, &settings, &error));
        printf("sheet: closed-loop time constant %.4g s, gain %.4g, integral time %.4g s\n", summary.time_constant,
               settings.gain, settings.integral_time);
    }
    must(tauw_sheet_destroy(&sheet));
}

int main(int argc, char** argv) {
    const double scan_time = 1.0;
    tauw_error_defaults(&error, sizeof error);

    tauw_record* record = NULL;
    must(tauw_read_record(argc > 1 ? argv[1] : "bottle_washer.csv", &record, &error));

    /* What the record says of the process, and whether to tune at all. */
    tauw_fit* fit = NULL;
    tauw_fit_summary fitted;
    tauw_fit_summary_defaults(&fitted, sizeof fitted);
    must(tauw_identify(record, NULL, &fit, &error));
    must(tauw_fit_summarize(fit, &fitted, &error));
    print_findings(fit, fitted.finding_count);
    if (fitted.advice > TAUW_ADVICE_TUNE_WITH_CARE || !fitted.has_model || fitted.lag_count == 0) {
        printf("advice: %s\n", tauw_advice_name(fitted.advice));
        tauw_fit_destroy(&fit);
        tauw_record_destroy(&record);
        return 1;
    }
    double lag = 0.0;
    must(tauw_fit_lags(fit, &lag, 1, NULL, &error));

    /* The process in percent of span, as controllers see it. */
    tauw_record_columns columns;
    tauw_record_columns_defaults(&columns, sizeof columns);
    must(tauw_record_view(record, &columns, &error));
    tauw_model* in_units = NULL;
    tauw_model* process = NULL;
    must(tauw_fit_model(fit, &in_units, &error));
    must(tauw_in_percent(in_units, columns.process_value_range, columns.output_range, &process, &error));

    /* Ask for a closed loop twice as slow as the dead time; the controller follows. */
    tauw_desired_response desired;
    tauw_pid_settings settings;
    tauw_synthesis* answer = NULL;
    tauw_desired_response_defaults(&desired, sizeof desired);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    desired.has_time_constant = 1;
    desired.time_constant = 2.0 * fitted.dead_time;
    must(tauw_synthesize(process, &desired, &answer, &error));
    must(tauw_synthesis_settings(answer, &settings, &error));

    tauw_robustness_options options;
    tauw_robustness margins;
    tauw_robustness_options_defaults(&options, sizeof options);
    tauw_robustness_defaults(&margins, sizeof margins);
    options.has_scan_time = 1;
    options.scan_time = scan_time;
    must(tauw_robustness_of(process, &settings, &options, &margins, &error));

    char model[256];
    must(tauw_model_text(process, model, sizeof model, NULL, &error));
    printf("process in percent of span: %s\n", model);
    printf("settings: gain %.4g, integral time %.4g s\n", settings.gain, settings.integral_time);
    printf("margins: the loop is %s, gain margin %.3g, phase margin %.3g deg\n", tauw_verdict_name(margins.verdict),
           margins.gain_margin, margins.phase_margin_deg);
    const double output = run_blocks(&settings, process, scan_time);
    print_sheet(record, scan_time);

    printf("gain %.17g\nlag_1 %.17g\ndead_time %.17g\n", fitted.gain, lag, fitted.dead_time);
    printf("controller_gain %.17g\nintegral_time_s %.17g\n", settings.gain, settings.integral_time);
    printf("gain_margin %.17g\nphase_margin_deg %.17g\nmax_sensitivity %.17g\n", margins.gain_margin,
           margins.phase_margin_deg, margins.max_sensitivity);
    printf("block_output_10 %.17g\n", output);

    tauw_synthesis_destroy(&answer);
    tauw_model_destroy(&process);
    tauw_model_destroy(&in_units);
    tauw_fit_destroy(&fit);
    tauw_record_destroy(&record);
    return 0;
}
