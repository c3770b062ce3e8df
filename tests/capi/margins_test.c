/* Margins with their lists, of the exact controller, of sampled loops; delay budgets; structs that grew. */
#include <stddef.h>
#include <string.h>

#include "check.h"

#define PI 3.14159265358979323846

static tauw_pid_settings pi_settings(double gain, double integral_time) {
    tauw_pid_settings settings;
    tauw_pid_settings_defaults(&settings, sizeof settings);
    settings.gain = gain;
    settings.has_integral_time = 1;
    settings.integral_time = integral_time;
    return settings;
}

/* |1 + factor L(jw)| of a model. */
static double distance(const tauw_model* loop, double w, double* size) {
    double real = 0.0, imaginary = w;
    OK(tauw_model_at(loop, &real, &imaginary, 1, &real, &imaginary, &error));
    *size = hypot(real, imaginary);
    return hypot(1.0 + real, imaginary);
}

/* Oracle: closed form, L = k exp(-theta s)/s. Gain crossover at k; phase crossovers at (pi/2 + 2 pi n)/theta, where
 * the gain is k/w; stable for dead times up to pi/(2 k). */
static void every_crossover(void) {
    const double k = 0.2, theta = 3.0;
    tauw_model* loop = NULL;
    tauw_margins* margins = NULL;
    tauw_robustness r;
    tauw_gain_crossover gain;
    tauw_phase_crossover phase;
    tauw_delay_range range;
    tauw_robustness_defaults(&r, sizeof r);
    tauw_gain_crossover_defaults(&gain, sizeof gain);
    tauw_phase_crossover_defaults(&phase, sizeof phase);
    tauw_delay_range_defaults(&range, sizeof range);
    OK(tauw_integrating_plus_dead_time(k, theta, 0.0, &loop, &error));
    OK(tauw_margins_of_open_loop(loop, &margins, &error));
    OK(tauw_margins_summarize(margins, &r, &error));
    CHECK(r.verdict == TAUW_VERDICT_STABLE && r.gain_crossover_count == 1 && r.phase_crossover_count >= 1);
    OK(tauw_margins_gain_crossover(margins, 0, &gain, &error));
    CHECK(gain.touches == 0 && gain.error_bound == 0.0);
    CHECK_NEAR(gain.frequency_rad_s, k, 1e-11);
    CHECK_NEAR(gain.phase_margin_deg, 90.0 - k * theta * 180.0 / PI, 1e-10);
    CHECK_NEAR(gain.delay_margin, PI / (2.0 * k) - theta, 1e-10);
    for (size_t n = 0; n < r.phase_crossover_count; ++n) {
        OK(tauw_margins_phase_crossover(margins, n, &phase, &error));
        CHECK_NEAR(phase.frequency_rad_s, (0.5 + 2.0 * (double)n) * PI / theta, 1e-10);
        CHECK_NEAR(phase.gain_factor, phase.frequency_rad_s / k, 1e-10);
    }
    CHECK(r.stable_dead_time_count == 1 && r.fragile == 0);
    OK(tauw_margins_stable_dead_time(margins, 0, &range, &error));
    CHECK(range.low == 0.0);
    CHECK_NEAR(range.high, PI / (2.0 * k), 1e-10);
    CHECK(r.has_delay_reduction_margin == 1 && r.delay_reduction_margin == INFINITY);
    /* Invariant: the bandwidths are where they say they are. */
    double size = 0.0, near_one = 0.0;
    CHECK(r.has_sensitivity_bandwidth == 1 && r.has_complementary_bandwidth == 1);
    CHECK_NEAR(distance(loop, r.sensitivity_bandwidth, &size), sqrt(2.0), 1e-9);
    near_one = distance(loop, r.complementary_bandwidth, &size);
    CHECK_NEAR(size / near_one, sqrt(0.5), 1e-9);

    CHECK_STATUS(tauw_margins_gain_crossover(margins, 1, &gain, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_margins_phase_crossover(margins, r.phase_crossover_count, &phase, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_margins_stable_dead_time(margins, SIZE_MAX, &range, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    gain.struct_size -= 8;
    CHECK_STATUS(tauw_margins_gain_crossover(margins, 0, &gain, &error), TAUW_ERROR_WRONG_STRUCT_SIZE);
    CHECK_STATUS(tauw_margins_summarize(margins, NULL, &error), TAUW_ERROR_NULL_POINTER);
    /* Margins outlive the loop they came from. */
    OK(tauw_model_destroy(&loop));
    OK(tauw_margins_summarize(margins, &r, &error));
    OK(tauw_margins_destroy(&margins));
    CHECK(margins == NULL);
}

/* Oracle: published, trade fact D11 (derived, recomputed, 2e-3): a PI made for the dead time, run once a second. */
static void sampled(void) {
    tauw_model* process = NULL;
    tauw_margins* margins = NULL;
    tauw_robustness r, same;
    tauw_robustness_options options;
    tauw_delay_budget budget;
    tauw_pid_settings settings = pi_settings(10.0 / 12.0, 10.0);
    tauw_robustness_defaults(&r, sizeof r);
    tauw_robustness_defaults(&same, sizeof same);
    tauw_robustness_options_defaults(&options, sizeof options);
    tauw_delay_budget_defaults(&budget, sizeof budget);
    options.has_scan_time = 1;
    options.scan_time = 1.0;
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 3.0, &process, &error));
    OK(tauw_margins_of(process, &settings, &options, &margins, &error));
    OK(tauw_margins_summarize(margins, &r, &error));
    CHECK_NEAR(r.gain_margin, 2.566065737262941, 2e-3);
    CHECK_NEAR(r.phase_margin_deg, 56.46702142536884, 2e-3);
    CHECK_NEAR(r.max_sensitivity, 1.7873060539373125, 2e-3);
    CHECK(r.stable_dead_time_count == 0 && r.gain_crossover_count >= 1);
    OK(tauw_robustness_of(process, &settings, &options, &same, &error));
    CHECK(memcmp(&r, &same, sizeof r) == 0);
    OK(tauw_margins_destroy(&margins));
    /* The same, answering one scan late. */
    options.extra_delay = 1.0;
    OK(tauw_robustness_of(process, &settings, &options, &r, &error));
    CHECK_NEAR(r.gain_margin, 2.008281790260677, 2e-3);
    CHECK_NEAR(r.phase_margin_deg, 46.55080731797952, 2e-3);
    CHECK_NEAR(r.max_sensitivity, 2.2074622801656756, 2e-3);

    /* Oracle: closed form, sums. */
    settings.measurement_filter_time = 0.25;
    OK(tauw_delay_budget_of(process, &settings, &options, &budget, &error));
    CHECK(budget.process_dead_time == 3.0 && budget.half_scan == 0.5 && budget.extra_delay == 1.0);
    CHECK(budget.measurement_filter_time == 0.25 && budget.total == 4.75);
    CHECK_NEAR(budget.working_gain, 1.05, 1e-15);
    OK(tauw_delay_budget_of(process, &settings, NULL, &budget, &error));
    CHECK(budget.total == 3.25 && budget.working_gain == 1.0);
    options.extra_delay = -1.0;
    CHECK_STATUS(tauw_delay_budget_of(process, &settings, &options, &budget, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    CHECK_STATUS(tauw_margins_of(process, &settings, &options, &margins, &error), TAUW_ERROR_OUT_OF_DOMAIN);
    options.extra_delay = NAN;
    CHECK_STATUS(tauw_margins_of(process, &settings, &options, &margins, &error), TAUW_ERROR_NOT_FINITE);
    CHECK(margins == NULL);
    OK(tauw_model_destroy(&process));
}

/* Oracle: closed form. The exact controller without mismatch gives T = exp(-theta s)/(tau_c s + 1), so S = 1 - T, and
 * with tau_c = theta, x = w theta: |S|^2 = (x^2 + 2 (1 - cos x + x sin x))/(1 + x^2), looked at on a fine grid. */
static void exact_controller(void) {
    const double theta = 2.0;
    tauw_model *process = NULL, *stronger = NULL;
    tauw_desired_response desired;
    tauw_synthesis* synthesis = NULL;
    tauw_margins* margins = NULL;
    tauw_robustness r, other;
    tauw_desired_response_defaults(&desired, sizeof desired);
    tauw_robustness_defaults(&r, sizeof r);
    tauw_robustness_defaults(&other, sizeof other);
    desired.has_time_constant = 1;
    desired.time_constant = theta;
    OK(tauw_first_order_plus_dead_time(3.0, 10.0, theta, &process, &error));
    OK(tauw_synthesize(process, &desired, &synthesis, &error));
    OK(tauw_margins_of_exact_controller(process, synthesis, 0.0, &margins, &error));
    OK(tauw_margins_summarize(margins, &r, &error));
    double largest = 0.0;
    for (int i = 1; i <= 2000000; ++i) {
        const double x = 1e-5 * i;
        largest = fmax(largest, (x * x + 2.0 * (1.0 - cos(x) + x * sin(x))) / (1.0 + x * x));
    }
    CHECK(r.verdict == TAUW_VERDICT_STABLE);
    CHECK_NEAR(r.max_sensitivity, sqrt(largest), 1e-8);
    CHECK_NEAR(r.max_complementary_sensitivity, 1.0, 1e-9);
    OK(tauw_margins_destroy(&margins));
    /* Invariant: a process 1.25 times as strong uses up that factor of the gain margin. */
    OK(tauw_first_order_plus_dead_time(3.75, 10.0, theta, &stronger, &error));
    OK(tauw_margins_of_exact_controller(stronger, synthesis, 0.0, &margins, &error));
    OK(tauw_margins_summarize(margins, &other, &error));
    CHECK_NEAR(other.gain_margin, r.gain_margin / 1.25, 1e-8);
    OK(tauw_margins_destroy(&margins));
    /* Invariant: dead time added to the loop is dead time of the process. */
    OK(tauw_model_destroy(&stronger));
    OK(tauw_first_order_plus_dead_time(3.0, 10.0, theta + 0.5, &stronger, &error));
    OK(tauw_margins_of_exact_controller(process, synthesis, 0.5, &margins, &error));
    OK(tauw_margins_summarize(margins, &r, &error));
    OK(tauw_margins_destroy(&margins));
    OK(tauw_margins_of_exact_controller(stronger, synthesis, 0.0, &margins, &error));
    OK(tauw_margins_summarize(margins, &other, &error));
    CHECK_NEAR(r.max_sensitivity, other.max_sensitivity, 1e-9);
    OK(tauw_margins_destroy(&margins));
    CHECK_STATUS(tauw_margins_of_exact_controller(process, synthesis, -1.0, &margins, &error),
                 TAUW_ERROR_OUT_OF_DOMAIN);
    OK(tauw_synthesis_destroy(&synthesis));
    CHECK_STATUS(tauw_margins_of_exact_controller(process, synthesis, 0.0, &margins, &error), TAUW_ERROR_NULL_POINTER);
    /* T = 1 needs an infinite controller, so there is none. */
    tauw_factors factors;
    tauw_model* one = NULL;
    tauw_factors_defaults(&factors, sizeof factors);
    OK(tauw_model_from_factors(&factors, &one, &error));
    desired.has_time_constant = 0;
    desired.transfer_function = one;
    OK(tauw_model_destroy(&process));
    OK(tauw_first_order_plus_dead_time(3.0, 10.0, 0.0, &process, &error));
    OK(tauw_synthesize(process, &desired, &synthesis, &error));
    CHECK_STATUS(tauw_margins_of_exact_controller(process, synthesis, 0.0, &margins, &error),
                 TAUW_ERROR_MISSING_ARGUMENT);
    CHECK(margins == NULL);
    OK(tauw_synthesis_destroy(&synthesis));
    OK(tauw_model_destroy(&one));
    OK(tauw_model_destroy(&stronger));
    OK(tauw_model_destroy(&process));
}

/* A program compiled when the structs were shorter: nothing past its own size is touched or read. */
static void older_structs(void) {
    tauw_model* process = NULL;
    tauw_trend* trend = NULL;
    tauw_pid_settings settings = pi_settings(1.0, 10.0);
    tauw_robustness r, old;
    tauw_duty duty;
    tauw_figures figures;
    tauw_trend_columns columns;
    tauw_pid_coefficients coefficients;
    memset(&old, 0x5a, sizeof old);
    memset(&duty, 0x5a, sizeof duty);
    memset(&figures, 0x5a, sizeof figures);
    memset(&columns, 0x5a, sizeof columns);
    memset(&coefficients, 0x5a, sizeof coefficients);
    tauw_robustness_defaults(&r, sizeof r);
    CHECK(tauw_robustness_defaults(&old, offsetof(tauw_robustness, has_sensitivity_bandwidth)) == TAUW_OK);
    CHECK(tauw_duty_defaults(&duty, offsetof(tauw_duty, setpoint_ramp_time)) == TAUW_OK);
    CHECK(tauw_figures_defaults(&figures, offsetof(tauw_figures, has_rise_time)) == TAUW_OK);
    CHECK(tauw_trend_columns_defaults(&columns, offsetof(tauw_trend_columns, measured)) == TAUW_OK);
    CHECK(tauw_pid_coefficients_defaults(&coefficients, offsetof(tauw_pid_coefficients, output_change_per_scan)) ==
          TAUW_OK);
    OK(tauw_first_order_plus_dead_time(2.0, 10.0, 2.0, &process, &error));
    OK(tauw_robustness_of(process, &settings, NULL, &r, &error));
    OK(tauw_robustness_of(process, &settings, NULL, &old, &error));
    CHECK(old.max_sensitivity == r.max_sensitivity && old.fragile == 0x5a5a5a5a);
    duty.has_scan_time = 1;
    duty.scan_time = 1.0;
    duty.setpoint_step = 1.0;
    OK(tauw_simulate(process, &settings, &duty, 100.0, &trend, &error));
    OK(tauw_trend_view(trend, &columns, &error));
    OK(tauw_trend_figures(trend, &figures, &error));
    CHECK(columns.n > 50 && columns.ran_away == 0x5a5a5a5a);
    CHECK(figures.has_settling_time == 1 && figures.has_rise_time == 0x5a5a5a5a);
    OK(tauw_discretize_pid(&settings, 1.0, &coefficients, &error));
    double memory[64];
    tauw_pid_block* block = NULL;
    CHECK(tauw_pid_block_size() <= sizeof memory);
    OK(tauw_pid_block_init(memory, sizeof memory, &coefficients, 0.0, 100.0, NULL, &block, &error));
    OK(tauw_trend_destroy(&trend));
    OK(tauw_model_destroy(&process));
}

void test_margins(void) {
    every_crossover();
    sampled();
    exact_controller();
    older_structs();
}
