#include <string.h>

#include "check.h"

#define PI 3.14159265358979323846

/* Oracle: closed form, L = k exp(-theta s) / s. */
static void open_loop_margins(void) {
    const double k = 0.2, theta = 3.0;
    tauw_model* loop = NULL;
    tauw_robustness r;
    tauw_robustness_defaults(&r, sizeof r);
    CHECK(r.verdict == TAUW_VERDICT_UNDETERMINED && r.has_stable == 0);
    OK(tauw_integrating_plus_dead_time(k, theta, 0.0, &loop, &error));
    OK(tauw_robustness_of_open_loop(loop, &r, &error));
    CHECK(r.verdict == TAUW_VERDICT_STABLE && r.has_stable == 1 && r.stable == 1);
    CHECK(r.has_unstable_poles == 1 && r.unstable_poles == 0);
    CHECK(r.has_gain_margin == 1 && r.has_phase_margin_deg == 1 && r.has_delay_margin == 1);
    CHECK_NEAR(r.gain_margin, PI / (2.0 * k * theta), 1e-9);
    CHECK_NEAR(r.phase_margin_deg, 90.0 - k * theta * 180.0 / PI, 1e-9);
    CHECK_NEAR(r.delay_margin, PI / (2.0 * k) - theta, 1e-9);
    CHECK(r.has_gain_reduction_margin == 1 && r.gain_reduction_margin == 0.0);
    CHECK(r.has_max_sensitivity == 1 && r.max_sensitivity > 1.0);
    OK(tauw_model_destroy(&loop));

    OK(tauw_integrating_plus_dead_time(1.0, theta, 0.0, &loop, &error));
    OK(tauw_robustness_of_open_loop(loop, &r, &error));
    CHECK(strcmp(tauw_verdict_name(r.verdict), "unstable") == 0 && r.stable == 0);
    CHECK(r.unstable_poles == 2 && r.has_gain_margin == 0 && r.gain_margin == 0.0);
    OK(tauw_model_destroy(&loop));
}

/* Oracle: closed form, C G = 0.1 exp(-(theta + extra) s) / s after the lag is cancelled; sampled, trade fact D11 (published). */
static void process_and_settings(void) {
    tauw_model* process = NULL;
    tauw_pid_settings settings;
    tauw_robustness_options options;
    tauw_robustness r;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_robustness_options_defaults(&options, sizeof options);
    tauw_robustness_defaults(&r, sizeof r);
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 2.0, &process, &error));
    settings.gain = 0.5;
    settings.has_integral_time = 1;
    settings.integral_time = 10.0;
    OK(tauw_robustness_of(process, &settings, NULL, &r, &error));
    CHECK_NEAR(r.gain_margin, PI / (2.0 * 0.1 * 2.0), 1e-9);
    options.extra_delay = 1.0;
    OK(tauw_robustness_of(process, &settings, &options, &r, &error));
    CHECK_NEAR(r.gain_margin, PI / (2.0 * 0.1 * 3.0), 1e-9);
    options.has_scan_time = 1;
    options.scan_time = 0.0;
    CHECK_STATUS(tauw_robustness_of(process, &settings, &options, &r, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_NEAR(r.gain_margin, PI / (2.0 * 0.1 * 3.0), 1e-9);
    OK(tauw_model_destroy(&process));
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 3.0, &process, &error));
    settings.gain = 10.0 / 12.0;
    options.scan_time = 1.0;
    options.extra_delay = 0.0;
    OK(tauw_robustness_of(process, &settings, &options, &r, &error));
    CHECK_NEAR(r.gain_margin, 2.566065737262941, 2e-3);
    OK(tauw_model_destroy(&process));
}

static void trend(void) {
    tauw_model* process = NULL;
    tauw_pid_settings settings;
    tauw_duty duty;
    tauw_trend* trend = NULL;
    tauw_trend_columns c;
    tauw_figures figures;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_trend_columns_defaults(&c, sizeof c);
    tauw_figures_defaults(&figures, sizeof figures);
    CHECK(duty.seed == 1 && duty.output_high == 100.0);
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 2.0, &process, &error));
    settings.gain = 1.0;
    settings.has_integral_time = 1;
    settings.integral_time = 10.0;
    duty.setpoint_step = 2.0;
    CHECK_STATUS(tauw_simulate(process, &settings, &duty, 100.0, &trend, &error), TAUW_ERROR_MISSING_ARGUMENT);
    CHECK(trend == NULL);
    duty.has_scan_time = 1;
    duty.scan_time = 0.5;
    OK(tauw_simulate(process, &settings, &duty, 100.0, &trend, &error));
    OK(tauw_trend_view(trend, &c, &error));
    CHECK(c.n >= 200 && c.limited == 0 && c.time_s[1] - c.time_s[0] == 0.5);
    /* Invariant: integral action brings the process value to the set point. */
    CHECK_NEAR(c.process_value[c.n - 1], 52.0, 1e-6);
    CHECK_NEAR(c.output[c.n - 1], 51.0, 1e-6);
    CHECK(c.setpoint[c.n - 1] == 52.0);
    OK(tauw_trend_figures(trend, &figures, &error));
    CHECK(figures.has_overshoot_percent == 1 && figures.has_settling_time == 1 && figures.has_peak_load_error == 0);
    CHECK(figures.integrated_absolute_error > 0.0 && figures.valve_travel >= 2.0 - 1e-9);
    OK(tauw_trend_destroy(&trend));
    OK(tauw_model_destroy(&process));
}

void test_assess(void) {
    CHECK(strcmp(tauw_verdict_name(TAUW_VERDICT_MARGINAL), "marginal") == 0);
    open_loop_margins();
    process_and_settings();
    trend();
}
