/* Processes with their input held. */
#include <complex.h>
#include <string.h>

#include "check.h"

/* Oracle: closed form. With a = exp(-0.1) and half a scan of dead time beyond three whole ones,
 *   H(z) = 2 z^-3 ((1 - exp(-0.05)) + (exp(-0.05) - a)/z)/(z - a). */
static double complex by_hand(double complex z) {
    const double a = exp(-0.1), now = 1.0 - exp(-0.05), before = exp(-0.05) - a;
    return 2.0 * (now + before / z) / (z - a) / (z * z * z);
}

static void first_order(void) {
    tauw_model* process = NULL;
    tauw_discrete* discrete = NULL;
    tauw_discrete_parts p;
    tauw_discrete_parts_defaults(&p, sizeof p);
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 3.5, &process, &error));
    OK(tauw_held(process, 1.0, TAUW_BETWEEN_CONSTANT, &discrete, &error));
    OK(tauw_model_destroy(&process));
    OK(tauw_discrete_view(discrete, &p, &error));
    CHECK(p.between == TAUW_BETWEEN_CONSTANT && p.scan_time == 1.0 && p.order == 1 && p.delay_scans == 3);
    CHECK_NEAR(p.steady_gain, 2.0, 1e-15);
    CHECK_NEAR(p.growth[0], expm1(-0.1), 1e-15);
    CHECK_NEAR(p.outputs[0] * p.now[0], -2.0 * expm1(-0.05), 1e-14);
    CHECK_NEAR(p.outputs[0] * p.before[0], 2.0 * (exp(-0.05) - exp(-0.1)), 1e-14);
    CHECK(p.ahead[0] == 0.0 && p.direct_now == 0.0 && p.direct_before == 0.0);
    CHECK(p.pole_count == 2 && p.zero_count == 1 && p.pole_offsets[1] == 0.0 && p.pole_offsets[3] == 0.0);
    CHECK_NEAR(p.pole_offsets[0] + p.pole_offsets[2], expm1(-0.1) - 1.0, 1e-15);
    CHECK_NEAR(p.zero_offsets[0], -(exp(-0.05) - exp(-0.1)) / (1.0 - exp(-0.05)) - 1.0, 1e-14);

    const double real[3] = {1.3, -0.4, 0.0}, imaginary[3] = {0.2, 0.7, -1.0};
    double offset[3], value_real[3], value_imaginary[3];
    OK(tauw_discrete_at(discrete, real, imaginary, 3, value_real, value_imaginary, &error));
    for (int i = 0; i < 3; ++i) {
        const double complex expected = by_hand(real[i] + imaginary[i] * I);
        CHECK_NEAR(value_real[i], creal(expected), 1e-12);
        CHECK_NEAR(value_imaginary[i], cimag(expected), 1e-12);
        offset[i] = real[i] - 1.0;
    }
    OK(tauw_discrete_at_offset(discrete, offset, imaginary, 1, value_real, value_imaginary, &error));
    CHECK_NEAR(value_real[0], creal(by_hand(1.3 + 0.2 * I)), 1e-12);
    /* Results may go where the arguments are. */
    double frequency[2] = {0.4, 0.01}, above[2];
    OK(tauw_discrete_at_frequency(discrete, frequency, 2, frequency, above, &error));
    CHECK_NEAR(frequency[0], creal(by_hand(cexp(0.4 * I))), 1e-13);
    CHECK_NEAR(above[1], cimag(by_hand(cexp(0.01 * I))), 1e-12);
    OK(tauw_discrete_at(discrete, NULL, NULL, 0, NULL, NULL, &error));
    CHECK_STATUS(tauw_discrete_at(discrete, NULL, imaginary, 1, value_real, value_imaginary, &error),
                 TAUW_ERROR_NULL_POINTER);
    CHECK(strstr(error.message, "z_real") != NULL);
    CHECK_STATUS(tauw_discrete_at_offset(discrete, offset, NULL, 1, value_real, value_imaginary, &error),
                 TAUW_ERROR_NULL_POINTER);
    CHECK_STATUS(tauw_discrete_at_frequency(discrete, frequency, 1, NULL, above, &error), TAUW_ERROR_NULL_POINTER);
    OK(tauw_discrete_destroy(&discrete));
    CHECK(discrete == NULL);
    CHECK_STATUS(tauw_discrete_view(discrete, &p, &error), TAUW_ERROR_NULL_POINTER);
}

/* Oracle: closed form. An integrator with a linear input is the trapezoidal rule, h/2 (z + 1)/(z - 1); no lags and
 * constant input read before the change, gain/z. */
static void other_inputs(void) {
    tauw_model* process = NULL;
    tauw_discrete* discrete = NULL;
    tauw_discrete_parts p;
    tauw_factors factors;
    double z[1] = {1.5}, zero[1] = {0.0}, real[1], imaginary[1];
    tauw_discrete_parts_defaults(&p, sizeof p);
    tauw_factors_defaults(&factors, sizeof factors);
    OK(tauw_integrating_plus_dead_time(3.0, 0.0, 0.0, &process, &error));
    OK(tauw_held(process, 0.5, TAUW_BETWEEN_LINEAR, &discrete, &error));
    OK(tauw_discrete_view(discrete, &p, &error));
    CHECK(p.steady_gain == INFINITY && p.order == 1 && p.growth[0] == 0.0);
    OK(tauw_discrete_at(discrete, z, zero, 1, real, imaginary, &error));
    CHECK_NEAR(real[0], 3.0 * 0.25 * 2.5 / 0.5, 1e-14);
    OK(tauw_discrete_at_frequency(discrete, zero, 1, real, imaginary, &error));
    CHECK(isinf(real[0]));
    OK(tauw_discrete_destroy(&discrete));

    CHECK_STATUS(tauw_held(process, 0.5, 2, &discrete, &error), TAUW_ERROR_UNKNOWN_NAME);
    CHECK_STATUS(tauw_held(process, 0.0, TAUW_BETWEEN_LINEAR, &discrete, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_held(process, NAN, TAUW_BETWEEN_LINEAR, &discrete, &error), TAUW_ERROR_NOT_FINITE);
    CHECK_STATUS(tauw_held(process, 0.5, TAUW_BETWEEN_LINEAR, NULL, &error), TAUW_ERROR_NULL_POINTER);
    CHECK(discrete == NULL);
    OK(tauw_model_destroy(&process));
    factors.gain = 4.0;
    OK(tauw_model_from_factors(&factors, &process, &error));
    OK(tauw_held(process, 0.5, TAUW_BETWEEN_CONSTANT, &discrete, &error));
    OK(tauw_discrete_at(discrete, z, zero, 1, real, imaginary, &error));
    CHECK_NEAR(real[0], 4.0 / 1.5, 1e-15);
    OK(tauw_discrete_view(discrete, &p, &error));
    CHECK(p.order == 0);
    OK(tauw_discrete_destroy(&discrete));
    OK(tauw_model_destroy(&process));
    /* An improper process is refused. */
    const double lead = 2.0;
    factors.leads = &lead;
    factors.lead_count = 1;
    OK(tauw_model_from_factors(&factors, &process, &error));
    CHECK_STATUS(tauw_held(process, 0.5, TAUW_BETWEEN_CONSTANT, &discrete, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    OK(tauw_model_destroy(&process));
}

void test_discrete(void) {
    first_order();
    other_inputs();
}
