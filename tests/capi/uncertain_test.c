/* Sets of processes, the worst of them, and the share that violates limits. */
#include <string.h>

#include "check.h"

#define PI 3.14159265358979323846
/* Trade fact C07 (derived, recomputed, 1e-5): with this tau_c/theta the loop exp(-theta s)/((tau_c + theta) s) has
 * Ms = 2.0 and the margins below. */
#define C07_RATIO 0.42618856809648575
#define C07_GAIN_MARGIN 2.2402517640828328
#define C07_PHASE_MARGIN_DEG 49.825943921599226

static int calls;
static double last_share;

static int32_t count_on(double share_done, void* context) {
    ++calls;
    CHECK(share_done >= 0.0 && share_done <= 1.0 && share_done >= last_share);
    last_share = share_done;
    return context == NULL ? 1 : *(const int32_t*)context;
}

/* A PI with Ti = tau around 2 exp(-theta s)/(10 s + 1) leaves L = k exp(-theta s)/s. */
static tauw_pid_settings settings_of(double k) {
    tauw_pid_settings settings;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    settings.gain = k * 10.0 / 2.0;
    settings.has_integral_time = 1;
    settings.integral_time = 10.0;
    return settings;
}

/* Oracle: published (C07) and closed form; gain and dead time at their upper limits are the worst corner. */
static void box(void) {
    const double theta = 3.0, k = 1.0 / (theta * (C07_RATIO + 1.0)) / (1.2 * 1.3);
    const double worst_k = 1.2 * k, worst_theta = 1.3 * theta;
    tauw_model *process = NULL, *at = NULL;
    tauw_uncertainty* uncertainty = NULL;
    tauw_uncertainty_box half_widths, back;
    tauw_worst_case_options options;
    tauw_worst_case worst;
    tauw_factors factors;
    tauw_pid_settings settings = settings_of(k);
    tauw_uncertainty_box_defaults(&half_widths, sizeof half_widths);
    tauw_uncertainty_box_defaults(&back, sizeof back);
    tauw_worst_case_options_defaults(&options, sizeof options);
    tauw_worst_case_defaults(&worst, sizeof worst);
    tauw_factors_defaults(&factors, sizeof factors);
    CHECK(worst.verdict == TAUW_VERDICT_UNDETERMINED && options.tolerance == 1e-6 && options.most_boxes == 120000);
    half_widths.gain = 0.2;
    half_widths.dead_time = 0.3;
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, theta, &process, &error));
    OK(tauw_uncertainty_of_box(&half_widths, &uncertainty, &error));
    OK(tauw_uncertainty_half_widths(uncertainty, &back, &error));
    CHECK(memcmp(&half_widths, &back, sizeof back) == 0);
    OK(tauw_worst_case_of(process, &settings, uncertainty, &options, &worst, &at, &error));
    CHECK(worst.verdict == TAUW_VERDICT_STABLE && worst.certified == 1 && worst.cancelled == 0);
    CHECK_NEAR(worst.max_sensitivity, 2.0, 1e-5);
    CHECK(worst.max_sensitivity_bound >= worst.max_sensitivity);
    CHECK_NEAR(worst.max_sensitivity_bound, worst.max_sensitivity, 1.01e-6);
    CHECK_NEAR(worst.gain_margin, C07_GAIN_MARGIN, 1e-5);
    CHECK_NEAR(worst.gain_margin_bound, worst.gain_margin, 1.01e-6);
    CHECK_NEAR(worst.phase_margin_deg, C07_PHASE_MARGIN_DEG, 1e-5);
    CHECK_NEAR(worst.phase_margin_deg_bound, worst.phase_margin_deg, 1.01e-6);
    CHECK_NEAR(worst.delay_margin, PI / (2.0 * worst_k) - worst_theta, 1e-6);
    CHECK_NEAR(worst.delay_margin_bound, worst.delay_margin, 1.01e-6);
    CHECK(worst.has_at_model == 0 && worst.members_tried > 0);
    OK(tauw_model_view(at, &factors, &error));
    CHECK_NEAR(factors.gain, 2.4, 1e-9);
    CHECK_NEAR(factors.dead_time, worst_theta, 1e-9);
    CHECK_NEAR(factors.lags[0], 10.0, 1e-12);
    OK(tauw_model_destroy(&at));

    /* Twice the gain margin: a member is unstable, and it is handed out. */
    settings = settings_of(2.5 * k);
    OK(tauw_worst_case_of(process, &settings, uncertainty, NULL, &worst, &at, &error));
    CHECK(worst.verdict == TAUW_VERDICT_UNSTABLE && worst.has_gain_margin == 0 && at != NULL);
    OK(tauw_model_destroy(&at));
    options.tolerance = 0.9;
    CHECK_STATUS(tauw_worst_case_of(process, &settings, uncertainty, &options, &worst, NULL, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_worst_case_of(NULL, &settings, uncertainty, NULL, &worst, NULL, &error), TAUW_ERROR_NULL_POINTER);
    OK(tauw_uncertainty_destroy(&uncertainty));
    half_widths.gain = 1.0;
    CHECK_STATUS(tauw_uncertainty_of_box(&half_widths, &uncertainty, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    half_widths.gain = NAN;
    CHECK_STATUS(tauw_uncertainty_of_box(&half_widths, &uncertainty, &error), TAUW_ERROR_NOT_FINITE);
    half_widths.gain = 0.1;
    half_widths.absolute = 2;
    CHECK_STATUS(tauw_uncertainty_of_box(&half_widths, &uncertainty, &error), TAUW_ERROR_UNKNOWN_NAME);
    CHECK(uncertainty == NULL);
    OK(tauw_model_destroy(&process));
}

/* Oracle: closed form. The gain margin pi/(2 k theta) is divided by 1 + e, e even over [-0.5, 0.5]: below 2 for all
 * e > pi/(4 k theta) - 1. */
static void shares(void) {
    const double theta = 3.0, k = 0.25 * PI / (theta * 1.2);
    tauw_model* process = NULL;
    tauw_uncertainty* uncertainty = NULL;
    tauw_uncertainty_box half_widths;
    tauw_violation_limits limits;
    tauw_violation_options options;
    tauw_violating_share share, again;
    const tauw_pid_settings settings = settings_of(k);
    tauw_uncertainty_box_defaults(&half_widths, sizeof half_widths);
    tauw_violation_limits_defaults(&limits, sizeof limits);
    tauw_violation_options_defaults(&options, sizeof options);
    tauw_violating_share_defaults(&share, sizeof share);
    tauw_violating_share_defaults(&again, sizeof again);
    half_widths.gain = 0.5;
    limits.has_gain_margin = 1;
    limits.gain_margin = 2.0;
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, theta, &process, &error));
    OK(tauw_uncertainty_of_box(&half_widths, &uncertainty, &error));
    CHECK(options.members == 1000 && options.seed == 1);
    OK(tauw_violating_share_of(process, &settings, uncertainty, &limits, NULL, &share, &error));
    CHECK(share.members == 1000 && share.unstable == 0 && share.cancelled == 0);
    CHECK(fabs(share.share - 0.3) <= 4.0 * share.standard_error);
    CHECK_NEAR(share.standard_error, sqrt(share.share * (1.0 - share.share) / 1000.0), 1e-12);
    OK(tauw_violating_share_of(process, &settings, uncertainty, &limits, &options, &again, &error));
    CHECK(memcmp(&share, &again, sizeof share) == 0);
    options.members = 0;
    CHECK_STATUS(tauw_violating_share_of(process, &settings, uncertainty, &limits, &options, &share, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    options.members = 10;
    limits.gain_margin = 0.5;
    CHECK_STATUS(tauw_violating_share_of(process, &settings, uncertainty, &limits, &options, &share, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    limits.has_gain_margin = 7;
    CHECK_STATUS(tauw_violating_share_of(process, &settings, uncertainty, &limits, &options, &share, &error),
                 TAUW_ERROR_UNKNOWN_NAME);
    OK(tauw_uncertainty_destroy(&uncertainty));
    OK(tauw_model_destroy(&process));
}

/* Oracle: published (C07) for the worst of three; a list holds copies, so the models may go before it. */
static void models(void) {
    const double theta = 3.0, k = 1.0 / (theta * (C07_RATIO + 1.0));
    tauw_model *list[3] = {NULL, NULL, NULL}, *at = NULL, *copy = NULL;
    tauw_uncertainty* uncertainty = NULL;
    tauw_uncertainty_parts parts;
    tauw_worst_case worst;
    tauw_violation_limits limits;
    tauw_violating_share share;
    tauw_worst_case_options options;
    tauw_violation_options drawing;
    const tauw_pid_settings settings = settings_of(k);
    tauw_worst_case_options_defaults(&options, sizeof options);
    tauw_violation_options_defaults(&drawing, sizeof drawing);
    tauw_uncertainty_parts_defaults(&parts, sizeof parts);
    tauw_worst_case_defaults(&worst, sizeof worst);
    tauw_violation_limits_defaults(&limits, sizeof limits);
    tauw_violating_share_defaults(&share, sizeof share);
    OK(tauw_first_order_plus_dead_time(1.0, 10.0, theta, &list[0], &error));
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, theta, &list[1], &error));
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 0.5 * theta, &list[2], &error));
    OK(tauw_uncertainty_of_models((const tauw_model* const*)list, 3, &uncertainty, &error));
    for (int i = 0; i < 3; ++i) OK(tauw_model_destroy(&list[i]));
    OK(tauw_uncertainty_view(uncertainty, &parts, &error));
    CHECK(parts.kind == TAUW_UNCERTAINTY_MODELS && parts.model_count == 3 && parts.parameter_count == 0);
    CHECK(strcmp(tauw_uncertainty_kind_name(parts.kind), "models") == 0);
    CHECK(strcmp(tauw_uncertainty_kind_name(3), "unknown") == 0);
    OK(tauw_worst_case_of(NULL, &settings, uncertainty, NULL, &worst, &at, &error));
    CHECK(worst.certified == 1 && worst.has_at_model == 1 && worst.at_model == 1);
    CHECK_NEAR(worst.max_sensitivity, 2.0, 1e-5);
    CHECK_NEAR(worst.gain_margin, C07_GAIN_MARGIN, 1e-5);
    limits.has_max_sensitivity = 1;
    limits.max_sensitivity = 1.9;
    OK(tauw_violating_share_of(NULL, &settings, uncertainty, &limits, NULL, &share, &error));
    CHECK(share.members == 3 && share.standard_error == 0.0);
    CHECK_NEAR(share.share, 1.0 / 3.0, 1e-15);

    /* Cancelled: no error, nothing certified. Another answer is one, and nothing is written. */
    int32_t answer = 1;
    options.progress = drawing.progress = count_on;
    options.context = drawing.context = &answer;
    calls = 0;
    last_share = 0.0;
    OK(tauw_worst_case_of(NULL, &settings, uncertainty, &options, &worst, NULL, &error));
    CHECK(calls >= 3 && worst.cancelled == 0 && worst.certified == 1);
    answer = 0;
    last_share = 0.0;
    OK(tauw_worst_case_of(NULL, &settings, uncertainty, &options, &worst, NULL, &error));
    CHECK(worst.cancelled == 1 && worst.certified == 0);
    OK(tauw_violating_share_of(NULL, &settings, uncertainty, &limits, &drawing, &share, &error));
    CHECK(share.cancelled == 1 && share.members < 3);
    answer = 2;
    worst.members_tried = share.members = 4711;
    OK(tauw_model_destroy(&at));
    CHECK_STATUS(tauw_worst_case_of(NULL, &settings, uncertainty, &options, &worst, &at, &error),
                 TAUW_ERROR_UNKNOWN_NAME);
    CHECK(strstr(error.message, "options.progress") != NULL && at == NULL && worst.members_tried == 4711);
    CHECK_STATUS(tauw_violating_share_of(NULL, &settings, uncertainty, &limits, &drawing, &share, &error),
                 TAUW_ERROR_UNKNOWN_NAME);
    CHECK(share.members == 4711);

    char text[8];
    double gain = 0.0;
    OK(tauw_uncertainty_model(uncertainty, 0, &copy, &error));
    OK(tauw_uncertainty_destroy(&uncertainty));
    OK(tauw_model_steady_gain(copy, &gain, &error));
    CHECK(gain == 1.0);
    list[0] = copy;
    CHECK_STATUS(tauw_uncertainty_of_models((const tauw_model* const*)list, 2, &uncertainty, &error),
                 TAUW_ERROR_NULL_POINTER);
    CHECK(strstr(error.message, "models[1] is NULL") != NULL && uncertainty == NULL);
    CHECK_STATUS(tauw_uncertainty_of_models(NULL, 0, &uncertainty, &error), TAUW_ERROR_MISSING_ARGUMENT);
    CHECK_STATUS(tauw_uncertainty_of_models(NULL, 2, &uncertainty, &error), TAUW_ERROR_NULL_POINTER);
    OK(tauw_uncertainty_of_models((const tauw_model* const*)list, 1, &uncertainty, &error));
    CHECK_STATUS(tauw_uncertainty_model(uncertainty, 1, &list[1], &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_uncertainty_parameter_name(uncertainty, 0, text, sizeof text, NULL, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    OK(tauw_uncertainty_destroy(&uncertainty));
    OK(tauw_model_destroy(&at));
    OK(tauw_model_destroy(&copy));
}

/* The made record with noise from a fixed integer sequence, and its fit. */
static tauw_fit* noisy_fit(void) {
    tauw_record *clean = made_record(), *record = NULL;
    tauw_record_columns columns;
    tauw_fit* fit = NULL;
    double process_value[240];
    uint32_t state = 12345;
    tauw_record_columns_defaults(&columns, sizeof columns);
    OK(tauw_record_view(clean, &columns, &error));
    CHECK(columns.n == 240);
    for (size_t i = 0; i < columns.n && i < 240; ++i) {
        state = state * 1664525u + 1013904223u;
        process_value[i] = columns.process_value[i] + ((double)(state >> 8) / 16777216.0 - 0.5) * 0.2;
    }
    columns.process_value = process_value;
    OK(tauw_record_create(&columns, &record, &error));
    OK(tauw_identify(record, NULL, &fit, &error));
    OK(tauw_record_destroy(&record));
    OK(tauw_record_destroy(&clean));
    return fit;
}

/* Oracle: closed form, half axes times their transpose are the covariance times the 95 % quantile of chi-square with
 * three degrees of freedom, 7.814727903251179 (published in every table). */
static void region(void) {
    tauw_fit* fit = noisy_fit();
    tauw_uncertainty* uncertainty = NULL;
    tauw_uncertainty_parts parts;
    tauw_worst_case worst;
    tauw_model *model = NULL, *other = NULL;
    tauw_pid_settings settings = settings_of(0.15);
    double covariance[36];
    char name[16], in_fit[16];
    size_t needed = 0, position[3] = {0, 0, 0};
    tauw_uncertainty_parts_defaults(&parts, sizeof parts);
    tauw_worst_case_defaults(&worst, sizeof worst);
    OK(tauw_uncertainty_from_fit(fit, 0.95, &uncertainty, &error));
    OK(tauw_uncertainty_view(uncertainty, &parts, &error));
    CHECK(parts.kind == TAUW_UNCERTAINTY_CONFIDENCE_REGION && parts.confidence == 0.95 && parts.parameter_count == 3);
    OK(tauw_fit_covariance(fit, covariance, 36, &needed, &error));
    const size_t all = (size_t)(sqrt((double)needed) + 0.5);
    for (size_t i = 0; i < 3; ++i) {
        OK(tauw_uncertainty_parameter_name(uncertainty, i, name, sizeof name, NULL, &error));
        for (size_t j = 0; j < all; ++j) {
            OK(tauw_fit_parameter_name(fit, j, in_fit, sizeof in_fit, NULL, &error));
            if (strcmp(name, in_fit) == 0) position[i] = j;
        }
    }
    CHECK_NEAR(parts.estimates[0], 2.0, 0.05);
    for (size_t i = 0; i < 3; ++i)
        for (size_t j = 0; j < 3; ++j) {
            double product = 0.0;
            for (size_t m = 0; m < 3; ++m) product += parts.half_axes[3 * i + m] * parts.half_axes[3 * j + m];
            CHECK_NEAR(product, 7.814727903251179 * covariance[position[i] * all + position[j]], 1e-7);
        }
    OK(tauw_fit_model(fit, &model, &error));
    OK(tauw_worst_case_of(model, &settings, uncertainty, NULL, &worst, NULL, &error));
    CHECK(worst.verdict == TAUW_VERDICT_STABLE && worst.certified == 1);
    CHECK(worst.max_sensitivity_bound >= worst.max_sensitivity && worst.max_sensitivity > 1.0);
    OK(tauw_first_order_plus_dead_time(2.0, 99.0, 3.0, &other, &error));
    CHECK_STATUS(tauw_worst_case_of(other, &settings, uncertainty, NULL, &worst, NULL, &error),
                 TAUW_ERROR_CONFLICTING_ARGUMENTS);
    OK(tauw_uncertainty_destroy(&uncertainty));
    CHECK_STATUS(tauw_uncertainty_from_fit(fit, 1.0, &uncertainty, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_uncertainty_from_fit(NULL, 0.95, &uncertainty, &error), TAUW_ERROR_NULL_POINTER);
    CHECK(uncertainty == NULL);
    OK(tauw_model_destroy(&other));
    OK(tauw_model_destroy(&model));
    OK(tauw_fit_destroy(&fit));
}

void test_uncertain(void) {
    box();
    shares();
    models();
    region();
}
