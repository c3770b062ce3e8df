/* Oracle throughout: closed form. */
#include <complex.h>
#include <string.h>

#include "check.h"

static void named_forms(void) {
    const double s_real[3] = {0.0, 0.0, 0.1}, s_imaginary[3] = {0.05, 1.0, 0.2};
    double real[3], imaginary[3];
    tauw_model* model = NULL;
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 3.0, &model, &error));
    OK(tauw_model_at(model, s_real, s_imaginary, 3, real, imaginary, &error));
    for (int i = 0; i < 3; ++i) {
        const double complex s = s_real[i] + s_imaginary[i] * I;
        const double complex expected = 2.0 * cexp(-3.0 * s) / (10.0 * s + 1.0);
        CHECK_NEAR(real[i], creal(expected), 1e-13);
        CHECK_NEAR(imaginary[i], cimag(expected), 1e-13);
    }
    double gain = 0.0;
    OK(tauw_model_steady_gain(model, &gain, &error));
    CHECK(gain == 2.0);

    const double time_s[4] = {0.0, 3.0, 5.0, 40.0};
    double response[4];
    OK(tauw_step_response(model, time_s, 4, response, &error));
    CHECK(response[0] == 0.0 && response[1] == 0.0);
    CHECK_NEAR(response[2], 2.0 * (1.0 - exp(-0.2)), 1e-14);
    CHECK_NEAR(response[3], 2.0 * (1.0 - exp(-3.7)), 1e-14);
    OK(tauw_step_response(model, NULL, 0, NULL, &error));
    OK(tauw_model_destroy(&model));
    CHECK(model == NULL);

    OK(tauw_integrating_plus_dead_time(-0.5, 1.0, 0.0, &model, &error));
    OK(tauw_model_steady_gain(model, &gain, &error));
    CHECK(isinf(gain) && gain < 0.0);
    OK(tauw_model_destroy(&model));

    OK(tauw_oscillatory_plus_dead_time(1.5, 2.0, 0.3, 0.0, &model, &error));
    tauw_factors factors;
    tauw_factors_defaults(&factors, sizeof factors);
    OK(tauw_model_view(model, &factors, &error));
    CHECK(factors.gain == 1.5 && factors.lag_pair_count == 1 && factors.lag_count == 0);
    CHECK(factors.lag_pairs[0] == 2.0 && factors.lag_pairs[1] == 0.3);
    OK(tauw_model_destroy(&model));
}

static void factors_and_polynomials(void) {
    /* 12 (2 s + 1) / ((3 s + 1)(4 s + 1)) = (24 s + 12) / (12 s^2 + 7 s + 1) */
    const double leads[1] = {2.0}, lags[2] = {3.0, 4.0};
    const double numerator[2] = {24.0, 12.0}, denominator[3] = {12.0, 7.0, 1.0};
    const double s_real[1] = {0.02}, s_imaginary[1] = {0.3};
    double a_real, a_imaginary, b_real, b_imaginary;
    tauw_factors factors;
    tauw_model *from_factors = NULL, *from_polynomials = NULL;
    tauw_factors_defaults(&factors, sizeof factors);
    CHECK(factors.gain == 1.0 && factors.lags == NULL);
    factors.gain = 12.0;
    factors.dead_time = 0.5;
    factors.leads = leads;
    factors.lead_count = 1;
    factors.lags = lags;
    factors.lag_count = 2;
    OK(tauw_model_from_factors(&factors, &from_factors, &error));
    OK(tauw_model_from_polynomials(numerator, 2, denominator, 3, 0.5, &from_polynomials, &error));
    OK(tauw_model_at(from_factors, s_real, s_imaginary, 1, &a_real, &a_imaginary, &error));
    OK(tauw_model_at(from_polynomials, s_real, s_imaginary, 1, &b_real, &b_imaginary, &error));
    CHECK_NEAR(a_real, b_real, 1e-13);
    CHECK_NEAR(a_imaginary, b_imaginary, 1e-13);
    OK(tauw_model_destroy(&from_factors));
    OK(tauw_model_destroy(&from_polynomials));
}

static void product_percent_and_text(void) {
    tauw_model *valve = NULL, *process = NULL, *both = NULL, *percent = NULL;
    OK(tauw_first_order_plus_dead_time(0.5, 2.0, 0.0, &valve, &error));
    OK(tauw_second_order_plus_dead_time(3.0, 20.0, 5.0, 4.0, &process, &error));
    OK(tauw_model_product(valve, process, &both, &error));
    tauw_factors factors;
    tauw_factors_defaults(&factors, sizeof factors);
    OK(tauw_model_view(both, &factors, &error));
    CHECK(factors.gain == 1.5 && factors.dead_time == 4.0 && factors.lag_count == 3);

    tauw_range process_value_range, output_range;
    tauw_range_defaults(&process_value_range, sizeof process_value_range);
    tauw_range_defaults(&output_range, sizeof output_range);
    process_value_range.low = -50.0;
    process_value_range.high = 150.0;
    strcpy(process_value_range.unit, "degC");
    output_range.high = 50.0;
    OK(tauw_in_percent(both, &process_value_range, &output_range, &percent, &error));
    double gain = 0.0;
    OK(tauw_model_steady_gain(percent, &gain, &error));
    CHECK_NEAR(gain, 1.5 * 50.0 / 200.0, 1e-15);

    size_t needed = 0;
    char text[64];
    OK(tauw_model_text(valve, NULL, 0, &needed, &error));
    CHECK(needed == strlen("0.5 / (2 s + 1)") + 1);
    text[0] = 'x';
    CHECK_STATUS(tauw_model_text(valve, text, needed - 1, NULL, &error), TAUW_ERROR_BUFFER_TOO_SMALL);
    CHECK(text[0] == 'x');
    OK(tauw_model_text(valve, text, needed, NULL, &error));
    CHECK(strcmp(text, "0.5 / (2 s + 1)") == 0);
    CHECK_STATUS(tauw_model_text(valve, NULL, 0, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_model_text(valve, NULL, 5, &needed, &error), TAUW_ERROR_NULL_POINTER);

    /* The same handle twice, and without an error struct. */
    tauw_model* square = NULL;
    OK(tauw_model_product(valve, valve, &square, NULL));
    OK(tauw_model_destroy(&square));
    OK(tauw_model_destroy(&percent));
    OK(tauw_model_destroy(&both));
    OK(tauw_model_destroy(&process));
    OK(tauw_model_destroy(&valve));
}

void test_models(void) {
    named_forms();
    factors_and_polynomials();
    product_percent_and_text();
}
