/* Margins with exact dead time, closed-loop trends of the sampled loop, and their figures. */
#ifndef TAUWRIGHT_ASSESS_H
#define TAUWRIGHT_ASSESS_H

#include <tauwright/control.h>

#ifdef __cplusplus
extern "C" {
#endif

/* A closed-loop trend, one value a scan. Immutable. */
typedef struct tauw_trend tauw_trend;

enum tauw_verdict {
    TAUW_VERDICT_STABLE = 0,
    TAUW_VERDICT_UNSTABLE = 1,
    TAUW_VERDICT_MARGINAL = 2,
    TAUW_VERDICT_UNDETERMINED = 3
};

/* What stands between process and controller besides themselves. Default: nothing. */
typedef struct tauw_robustness_options {
    uint32_t struct_size;
    int32_t has_scan_time;
    double scan_time;   /* > 0; half of it stands in for sampling and hold as dead time */
    double extra_delay; /* >= 0; dead time added to the loop */
} tauw_robustness_options;

/* What the open loop L says of the closed loop. Margins that nothing limits are infinite
 * (gain_reduction_margin: 0). Of a loop that is not stable, margins and peaks are not given (has_... 0,
 * the number 0); the verdict and the count of unstable poles stand. */
typedef struct tauw_robustness {
    uint32_t struct_size;
    int32_t verdict;    /* enum tauw_verdict */
    int32_t has_stable; /* 0 where undetermined */
    int32_t stable;
    int32_t has_unstable_poles; /* 0 where undetermined */
    int32_t unstable_poles;     /* of the closed loop */
    int32_t has_gain_margin;
    int32_t has_gain_reduction_margin;
    int32_t has_phase_margin_deg;
    int32_t has_delay_margin;
    int32_t has_max_sensitivity;
    int32_t has_max_sensitivity_frequency;
    int32_t has_max_complementary_sensitivity;
    int32_t has_max_complementary_sensitivity_frequency;
    double gain_margin;           /* smallest factor above 1 that destabilizes */
    double gain_reduction_margin; /* largest factor below 1 that destabilizes */
    double phase_margin_deg;      /* smallest angle from -1 over all gain crossovers */
    double delay_margin;        /* smallest dead time that destabilizes */
    double max_sensitivity;       /* Ms = max |1/(1 + L)|, at least 1 */
    double max_sensitivity_frequency;               /* rad/s; infinite where only a limit */
    double max_complementary_sensitivity;           /* Mt = max |L/(1 + L)| */
    double max_complementary_sensitivity_frequency; /* rad/s; 0 where at rest */
} tauw_robustness;

/* What a loop must face, about an operating point. Numbers are in the units of process and settings:
 * percent of span unless said otherwise. */
typedef struct tauw_duty {
    uint32_t struct_size;
    int32_t has_scan_time;
    double scan_time;   /* > 0 */
    double setpoint_step; /* at time 0 */
    double load_step;     /* at the process input, from load_time on */
    double load_time;
    double noise;       /* standard deviation of the measurement noise */
    uint64_t seed;      /* of the noise; equal seeds give equal trends; default 1 */
    double output_low;  /* limits of the controller output; default 0 */
    double output_high; /* default 100 */
    int32_t has_rest_output;        /* 0: the middle of the output limits */
    int32_t has_rest_process_value; /* 0: 50 */
    double rest_output;             /* holds the process at rest */
    double rest_process_value;      /* where it rests and the trend starts */
} tauw_duty;

/* Figures of a trend. Times count from the step. */
typedef struct tauw_figures {
    uint32_t struct_size;
    int32_t has_overshoot_percent; /* 0 without a set-point step */
    int32_t has_settling_time;   /* 0 where it does not settle within the horizon */
    int32_t has_peak_load_error;   /* 0 without a load step */
    double overshoot_percent;      /* of the set-point step */
    double settling_time;        /* until it stays within 2 % of the set-point step */
    double peak_load_error;        /* largest |error| after the load step */
    double integrated_absolute_error; /* unit of the process value times s */
    double valve_travel;              /* sum of |output changes|, from the rest output on */
} tauw_figures;

/* The arrays of a trend, all of length n. They belong to the trend. */
typedef struct tauw_trend_columns {
    uint32_t struct_size;
    int32_t limited; /* 1: the output stood on a limit at least once */
    size_t n;
    const double* time_s;        /* time_s[n] */
    const double* setpoint;      /* setpoint[n] */
    const double* process_value; /* process_value[n] */
    const double* output;        /* output[n] */
} tauw_trend_columns;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_robustness_options_defaults(tauw_robustness_options* options, uint32_t size);
TAUW_API int32_t tauw_robustness_defaults(tauw_robustness* robustness, uint32_t size);
TAUW_API int32_t tauw_duty_defaults(tauw_duty* duty, uint32_t size);
TAUW_API int32_t tauw_figures_defaults(tauw_figures* figures, uint32_t size);
TAUW_API int32_t tauw_trend_columns_defaults(tauw_trend_columns* columns, uint32_t size);

/* The word of a verdict, for example "stable"; "unknown" for another number. Static memory.
 * Since 0.1. Any thread. Never allocates. */
TAUW_API const char* tauw_verdict_name(int32_t verdict);

/* Of process and settings, every filter included; `options` NULL means the defaults. Margins and peaks to
 * about 1e-10 relative. Errors: NOT_FINITE, OUT_OF_DOMAIN, CONFLICTING_ARGUMENTS.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates memory that it frees again. */
TAUW_API int32_t tauw_robustness_of(const tauw_model* process, const tauw_pid_settings* settings,
                                    const tauw_robustness_options* options, tauw_robustness* robustness,
                                    tauw_error* error);

/* Of an open loop as it is.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates memory that it frees again. */
TAUW_API int32_t tauw_robustness_of_open_loop(const tauw_model* open_loop, tauw_robustness* robustness,
                                              tauw_error* error);

/* Runs the PID block of the settings against the exact sampled process over horizon_s seconds, 2 to ten
 * million scans. Errors: MISSING_ARGUMENT (no scan time), UNSUPPORTED_FORM, NOT_FINITE, OUT_OF_DOMAIN,
 * CONFLICTING_ARGUMENTS.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_simulate(const tauw_model* process, const tauw_pid_settings* settings, const tauw_duty* duty,
                               double horizon_s, tauw_trend** trend, tauw_error* error);

/* The arrays of a trend. They belong to the trend and are good until it is destroyed.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_trend_view(const tauw_trend* trend, tauw_trend_columns* columns, tauw_error* error);

/* The figures of a trend.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_trend_figures(const tauw_trend* trend, tauw_figures* figures, tauw_error* error);

/* Releases the trend and makes *trend NULL; NULL is fine. Returns TAUW_OK or TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_trend_destroy(tauw_trend** trend);

#ifdef __cplusplus
}
#endif

#endif
