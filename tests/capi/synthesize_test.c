#include <complex.h>
#include <string.h>

#include "check.h"

/* Oracle: closed form. C = (1/G) T/(1 - T) = (T s + 1) / (K (tau s + 1 - exp(-theta s))), and with the
 * dead time to first order Kc = T / (K (tau + theta)), Ti = T. */
static void direct_synthesis(void) {
    tauw_model *process = NULL, *attained = NULL;
    tauw_desired_response desired;
    tauw_synthesis* answer = NULL;
    tauw_synthesis_summary summary;
    tauw_pid_settings settings;
    tauw_desired_response_defaults(&desired, sizeof desired);
    tauw_synthesis_summary_defaults(&summary, sizeof summary);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    CHECK(desired.order == 1 && desired.has_time_constant == 0 && desired.transfer_function == NULL);
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 3.0, &process, &error));
    desired.has_time_constant = 1;
    desired.time_constant = 5.0;
    OK(tauw_synthesize(process, &desired, &answer, &error));
    OK(tauw_synthesis_summarize(answer, &summary, &error));
    CHECK(summary.buildable == 1 && summary.has_controller == 1 && summary.has_settings == 1);
    CHECK(summary.controller_integrators == 1);
    OK(tauw_synthesis_settings(answer, &settings, &error));
    CHECK_NEAR(settings.gain, 10.0 / (2.0 * 8.0), 1e-13);
    CHECK_NEAR(settings.integral_time, 10.0, 1e-13);
    CHECK(settings.has_integral_time == 1 && settings.derivative_time == 0.0);

    const double s_real = 0.0, s_imaginary = 0.4;
    double real, imaginary;
    const double complex s = s_imaginary * I;
    const double complex controller = (10.0 * s + 1.0) / (2.0 * (5.0 * s + 1.0 - cexp(-3.0 * s)));
    OK(tauw_synthesis_controller_at(answer, &s_real, &s_imaginary, 1, &real, &imaginary, &error));
    CHECK_NEAR(real, creal(controller), 1e-12);
    CHECK_NEAR(imaginary, cimag(controller), 1e-12);
    const double complex loop = 0.625 * (1.0 + 1.0 / (10.0 * s)) * 2.0 * cexp(-3.0 * s) / (10.0 * s + 1.0);
    OK(tauw_synthesis_attained_with_settings_at(answer, &s_real, &s_imaginary, 1, &real, &imaginary, &error));
    CHECK_NEAR(real, creal(loop / (1.0 + loop)), 1e-12);
    CHECK_NEAR(imaginary, cimag(loop / (1.0 + loop)), 1e-12);
    OK(tauw_synthesis_attained(answer, &attained, &error));
    OK(tauw_model_at(attained, &s_real, &s_imaginary, 1, &real, &imaginary, &error));
    CHECK_NEAR(real, creal(cexp(-3.0 * s) / (5.0 * s + 1.0)), 1e-13);
    OK(tauw_model_destroy(&attained));
    OK(tauw_synthesis_destroy(&answer));

    /* Both wishes, neither, and a wrong order. */
    OK(tauw_first_order_plus_dead_time(1.0, 1.0, 3.0, &attained, &error));
    desired.transfer_function = attained;
    CHECK_STATUS(tauw_synthesize(process, &desired, &answer, &error), TAUW_ERROR_CONFLICTING_ARGUMENTS);
    CHECK(answer == NULL);
    desired.has_time_constant = 0;
    OK(tauw_synthesize(process, &desired, &answer, &error));
    OK(tauw_synthesis_destroy(&answer));
    desired.transfer_function = NULL;
    CHECK_STATUS(tauw_synthesize(process, &desired, &answer, &error), TAUW_ERROR_MISSING_ARGUMENT);
    desired.has_time_constant = 1;
    desired.order = 0;
    CHECK_STATUS(tauw_synthesize(process, &desired, &answer, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    OK(tauw_model_destroy(&attained));
    OK(tauw_model_destroy(&process));
}

/* A perfect response needs an infinite controller: an outcome, not an error. */
static void impossible(void) {
    tauw_model *process = NULL, *one = NULL;
    tauw_factors factors;
    tauw_desired_response desired;
    tauw_synthesis* answer = NULL;
    tauw_synthesis_summary summary;
    tauw_pid_settings settings;
    tauw_obstacle obstacle;
    tauw_factors_defaults(&factors, sizeof factors);
    tauw_desired_response_defaults(&desired, sizeof desired);
    tauw_synthesis_summary_defaults(&summary, sizeof summary);
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_obstacle_defaults(&obstacle, sizeof obstacle);
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 0.0, &process, &error));
    OK(tauw_model_from_factors(&factors, &one, &error));
    desired.transfer_function = one;
    OK(tauw_synthesize(process, &desired, &answer, &error));
    OK(tauw_synthesis_summarize(answer, &summary, &error));
    CHECK(summary.buildable == 0 && summary.has_controller == 0 && summary.has_settings == 0);
    CHECK(summary.obstacle_count >= 1);
    int infinite = 0;
    for (size_t i = 0; i < summary.obstacle_count; ++i) {
        char message[1024], repair[1024];
        OK(tauw_synthesis_obstacle(answer, i, &obstacle, &error));
        OK(tauw_synthesis_obstacle_message(answer, i, message, sizeof message, NULL, &error));
        OK(tauw_synthesis_obstacle_repair(answer, i, repair, sizeof repair, NULL, &error));
        CHECK(strlen(message) > 10 && strlen(repair) > 5);
        infinite += strcmp(tauw_obstacle_name(obstacle.code), "infinite_controller") == 0 &&
                    strcmp(tauw_severity_name(obstacle.severity), "impossible") == 0;
    }
    CHECK(infinite == 1);
    CHECK_STATUS(tauw_synthesis_obstacle(answer, summary.obstacle_count, &obstacle, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_synthesis_settings(answer, &settings, &error), TAUW_ERROR_MISSING_ARGUMENT);
    double real = 0.0, imaginary = 1.0;
    CHECK_STATUS(tauw_synthesis_controller_at(answer, &real, &imaginary, 1, &real, &imaginary, &error),
                 TAUW_ERROR_MISSING_ARGUMENT);
    CHECK_STATUS(tauw_synthesis_attained_with_settings_at(answer, &real, &imaginary, 1, &real, &imaginary, &error),
                 TAUW_ERROR_MISSING_ARGUMENT);
    OK(tauw_synthesis_destroy(&answer));
    OK(tauw_model_destroy(&one));
    OK(tauw_model_destroy(&process));
}

void test_synthesize(void) {
    direct_synthesis();
    impossible();
}
