/* Oracle throughout: closed form, the definitions of the forms. */
#include <complex.h>
#include <string.h>

#include "check.h"

static tauw_pid_settings pid(double gain, double integral_time, double derivative_time) {
    tauw_pid_settings s;
    tauw_pid_settings_defaults(&s, sizeof s);
    s.gain = gain;
    s.has_integral_time = 1;
    s.integral_time = integral_time;
    s.derivative_time = derivative_time;
    return s;
}

static void response(void) {
    tauw_pid_settings s = pid(1.5, 20.0, 4.0);
    s.filter_time = 0.5;
    s.measurement_filter_time = 0.25;
    double real = 0.0, imaginary = 0.3, model_real, model_imaginary;
    const double w = 0.3, zero = 0.0;
    const double complex x = w * I;
    const double complex expected = 1.5 * (1.0 + 1.0 / (20.0 * x) + 4.0 * x / (0.5 * x + 1.0)) / (0.25 * x + 1.0);
    /* In place. */
    OK(tauw_pid_settings_at(&s, &real, &imaginary, 1, &real, &imaginary, &error));
    CHECK_NEAR(real, creal(expected), 1e-13);
    CHECK_NEAR(imaginary, cimag(expected), 1e-13);
    tauw_model* model = NULL;
    OK(tauw_transfer_function(&s, &model, &error));
    OK(tauw_model_at(model, &zero, &w, 1, &model_real, &model_imaginary, &error));
    CHECK_NEAR(model_real, creal(expected), 1e-13);
    CHECK_NEAR(model_imaginary, cimag(expected), 1e-13);
    OK(tauw_model_destroy(&model));
}

static void series_band_repeats(void) {
    /* Ti = 10, Td = 1.6 s: Ti' = (10 + sqrt(100 - 64)) / 2 = 8, Td' = 2, Kc' = 0.8 Kc. */
    const tauw_pid_settings ideal = pid(-2.0, 10.0, 1.6);
    tauw_controller_form form;
    tauw_entered entered;
    tauw_pid_settings back;
    tauw_controller_form_defaults(&form, sizeof form);
    tauw_entered_defaults(&entered, sizeof entered);
    tauw_pid_settings_defaults(&back, sizeof back);
    CHECK(form.derivative_on == TAUW_ACTS_ON_PROCESS_VALUE && form.proportional_on == TAUW_ACTS_ON_ERROR);
    form.equation = TAUW_EQUATION_SERIES;
    form.gain_as = TAUW_GAIN_AS_PROPORTIONAL_BAND;
    form.integral_as = TAUW_INTEGRAL_AS_REPEATS;
    form.integral_unit = TAUW_TIME_UNIT_MINUTES;
    form.derivative_unit = TAUW_TIME_UNIT_MINUTES;
    OK(tauw_entered_as(&ideal, &form, &entered, &error));
    CHECK(entered.has_proportional_band == 1 && entered.has_gain == 0 && entered.has_repeats == 1);
    CHECK(entered.has_derivative_time == 1 && entered.action == TAUW_ACTION_DIRECT);
    CHECK_NEAR(entered.proportional_band, 100.0 / 1.6, 1e-14);
    CHECK_NEAR(entered.repeats, 60.0 / 8.0, 1e-14);
    CHECK_NEAR(entered.derivative_time, 2.0 / 60.0, 1e-14);
    OK(tauw_settings_from(&entered, &form, &back, &error));
    CHECK_NEAR(back.gain, -2.0, 1e-13);
    CHECK_NEAR(back.integral_time, 10.0, 1e-13);
    CHECK_NEAR(back.derivative_time, 1.6, 1e-13);

    /* No real series equivalent; a lost action; a field's limit. */
    tauw_pid_settings strong = pid(2.0, 10.0, 5.0);
    CHECK_STATUS(tauw_entered_as(&strong, &form, &entered, &error), TAUW_ERROR_NO_EQUIVALENT);
    form.derivative_resolution = 1.0;
    CHECK_STATUS(tauw_entered_as(&ideal, &form, &entered, &error), TAUW_ERROR_ACTION_WOULD_BE_LOST);
    form.derivative_resolution = 0.0;
    form.has_gain_high = 1;
    form.gain_high = 50.0;
    CHECK_STATUS(tauw_entered_as(&ideal, &form, &entered, &error), TAUW_ERROR_OUTSIDE_FIELD_LIMITS);
    CHECK_NEAR(entered.proportional_band, 100.0 / 1.6, 1e-14);
}

static void engineering_units(void) {
    /* 0..200 degC, 4..20 mA: gain in mA/degC is gain in %/% times 16/200. */
    const tauw_pid_settings settings = pid(2.5, 30.0, 0.0);
    tauw_controller_form form;
    tauw_entered entered;
    tauw_range degrees, current;
    tauw_controller_form_defaults(&form, sizeof form);
    tauw_entered_defaults(&entered, sizeof entered);
    tauw_range_defaults(&degrees, sizeof degrees);
    tauw_range_defaults(&current, sizeof current);
    form.gain_unit = TAUW_GAIN_UNIT_ENGINEERING;
    CHECK_STATUS(tauw_entered_as(&settings, &form, &entered, &error), TAUW_ERROR_MISSING_RANGE);
    degrees.high = 200.0;
    current.low = 4.0;
    current.high = 20.0;
    form.process_value_range = &degrees;
    form.output_range = &current;
    OK(tauw_entered_as(&settings, &form, &entered, &error));
    CHECK_NEAR(entered.gain, 2.5 * 16.0 / 200.0, 1e-14);
    CHECK(entered.action == TAUW_ACTION_REVERSE && entered.integral_time == 30.0);
}

static void integral_alone(void) {
    tauw_pid_settings s;
    tauw_pid_settings_defaults(&s, sizeof s);
    CHECK(s.setpoint_weight == 1.0 && s.has_integral_time == 0);
    CHECK_STATUS(tauw_pid_settings_check(&s, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    s.has_integral_gain = 1;
    s.integral_gain = 0.02;
    OK(tauw_pid_settings_check(&s, &error));
    s.gain = 1.0;
    CHECK_STATUS(tauw_pid_settings_check(&s, &error), TAUW_ERROR_CONFLICTING_ARGUMENTS);
    CHECK(strstr(error.message, "integral_gain") != NULL);
}

void test_control(void) {
    response();
    series_band_repeats();
    engineering_units();
    integral_alone();
}
