/* Margins with exact dead time, worst cases over what is not known of a process, closed-loop trends and
 * their figures, valve cycles. */
#ifndef TAUWRIGHT_ASSESS_H
#define TAUWRIGHT_ASSESS_H

#include <tauwright/control.h>
#include <tauwright/discretize.h>
#include <tauwright/identify.h>

#ifdef __cplusplus
extern "C" {
#endif

/* A closed-loop trend, one value a scan. Immutable. */
typedef struct tauw_trend tauw_trend;
/* Margins with every crossover and every range of stable dead times. Immutable. */
typedef struct tauw_margins tauw_margins;
/* What is not known of a process: a set of processes. Immutable. */
typedef struct tauw_uncertainty tauw_uncertainty;

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
    double scan_time;   /* > 0 s: the loop as the PID block runs it, the output held over each scan */
    double extra_delay; /* >= 0 s; one scan for a controller that answers a scan late */
} tauw_robustness_options;

/* What the open loop L says of the closed loop. Margins that nothing limits are infinite
 * (gain_reduction_margin: 0). Of a loop that is not stable, margins and peaks are not given (has_... 0,
 * the number 0); the verdict and the count of unstable poles stand. */
typedef struct tauw_robustness {
    uint32_t struct_size;
    int32_t verdict;    /* enum tauw_verdict */
    int32_t has_stable; /* 0 where undetermined */
    int32_t stable;
    int32_t has_unstable_poles; /* 0 where undetermined, marginal or infinitely many */
    int32_t unstable_poles;     /* of the closed loop; of a sampled one, outside the unit circle */
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
    int32_t has_sensitivity_bandwidth;
    int32_t has_complementary_bandwidth;
    int32_t has_delay_reduction_margin;
    int32_t fragile;                 /* 1: an arbitrarily small error of the dead time can destabilize */
    int32_t phase_crossovers_capped; /* 1: there are more than are counted here */
    uint32_t reserved;
    double sensitivity_bandwidth;   /* rad/s; lowest at which |S| rises through 1/sqrt(2) */
    double complementary_bandwidth; /* rad/s; highest at which |T| falls through 1/sqrt(2) */
    double delay_reduction_margin;  /* s; smallest reduction of the dead time that destabilizes */
    size_t gain_crossover_count;    /* a tauw_margins hands them out one by one */
    size_t phase_crossover_count;   /* at most 1000 */
    size_t stable_dead_time_count;  /* ranges; 0 for sampled loops */
} tauw_robustness;

/* A frequency at which the open loop has gain 1. */
typedef struct tauw_gain_crossover {
    uint32_t struct_size;
    int32_t touches; /* 1: the gain reaches 1 without passing it, as far as rounding tells */
    double frequency_rad_s;
    double phase_margin_deg; /* angle from -1, 0 to 180, whichever direction */
    double delay_margin;     /* s of dead time that would bring the loop through -1 here */
    double error_bound;      /* rad/s, of a touch: between two crossings and none lies this much */
} tauw_gain_crossover;

/* A frequency at which the open loop is real and negative. */
typedef struct tauw_phase_crossover {
    uint32_t struct_size;
    int32_t touches; /* 1: reaches the negative real axis without passing it */
    double frequency_rad_s;
    double gain_factor; /* factor on the gain that would bring the loop through -1 here */
    double error_bound; /* rad/s, of a touch */
} tauw_phase_crossover;

/* An interval of dead times in s; `high` may be infinite. */
typedef struct tauw_delay_range {
    uint32_t struct_size;
    uint32_t reserved;
    double low;
    double high;
} tauw_delay_range;

/* What takes part in the dead time that the loop feels, in s, and in its working gain: first-order estimates;
 * the margins with a scan time have the exact figures. */
typedef struct tauw_delay_budget {
    uint32_t struct_size;
    uint32_t reserved;
    double process_dead_time;
    double half_scan; /* sampling and hold */
    double extra_delay;
    double measurement_filter_time;
    double total;        /* of the four above */
    double working_gain; /* 1 + scan time / (2 integral time) */
} tauw_delay_budget;

enum tauw_uncertainty_kind {
    TAUW_UNCERTAINTY_BOX = 0,               /* every parameter within its own limits, independent of the others */
    TAUW_UNCERTAINTY_CONFIDENCE_REGION = 1, /* the joint region of a fit's parameters */
    TAUW_UNCERTAINTY_MODELS = 2             /* operating points, one model each */
};

/* Half widths about the nominal process, >= 0: relative (0.3 means from 0.7 to 1.3 of it, below 1 but for the
 * dead time), or absolute in each parameter's own unit, s for times. Every lag and lead moves by itself. */
typedef struct tauw_uncertainty_box {
    uint32_t struct_size;
    int32_t absolute;
    double gain;    /* or slope of an integrating process */
    double lags;    /* and time constants of lag pairs */
    double leads;   /* and time constants of lead pairs */
    double damping; /* of every pair */
    double dead_time;
} tauw_uncertainty_box;

/* What an uncertainty holds. A region is estimates + half axes * (ball of radius 1). The arrays belong to it. */
typedef struct tauw_uncertainty_parts {
    uint32_t struct_size;
    int32_t kind;           /* enum tauw_uncertainty_kind */
    double confidence;      /* of a region, else 0 */
    size_t model_count;     /* of a list; of a region 1, its center */
    size_t parameter_count; /* of a region: of gain (or slope), lag_1, dead_time those that were fitted */
    const double* estimates; /* estimates[parameter_count] */
    const double* half_axes; /* half_axes[parameter_count * parameter_count], lower triangle by rows */
} tauw_uncertainty_parts;

/* Takes the share of long work that is done, 0 to 1, on the calling thread. Returns 1 to go on, 0 to cancel. */
typedef int32_t (*tauw_progress)(double share_done, void* context);

typedef struct tauw_worst_case_options {
    uint32_t struct_size;
    uint32_t reserved;
    double extra_delay;     /* >= 0 s, added to every member's loop */
    double tolerance;       /* relative, to which the proof closes, 1e-9 to 0.5; default 1e-6 */
    size_t most_boxes;      /* of the proof; where they run out, certified is 0; default 120000 */
    tauw_progress progress; /* or NULL */
    void* context;          /* handed to progress */
} tauw_worst_case_options;

/* Of each figure the worst that an analyzed member reaches, and a bound that no member exceeds. Absent unless every
 * member is proved stable, or the verdict is undetermined (then what was reached so far, bounds where known). */
typedef struct tauw_worst_case {
    uint32_t struct_size;
    int32_t verdict;   /* stable: of all; unstable, marginal: of the member found; else the proof did not close */
    int32_t certified; /* 1: the verdict is proved and the bounds lie within the tolerance */
    int32_t cancelled; /* by progress */
    int32_t has_max_sensitivity;
    int32_t has_max_sensitivity_bound;
    int32_t has_gain_margin;
    int32_t has_gain_margin_bound;
    int32_t has_phase_margin_deg;
    int32_t has_phase_margin_deg_bound;
    int32_t has_delay_margin;
    int32_t has_delay_margin_bound;
    int32_t has_at_model; /* 1 for a list of models */
    uint32_t reserved;
    double max_sensitivity;
    double max_sensitivity_bound; /* no member has more */
    double gain_margin;           /* margins: infinite for none */
    double gain_margin_bound;     /* no member has less; a margin above 1000 is proved to be above 1000 */
    double phase_margin_deg;
    double phase_margin_deg_bound;
    double delay_margin; /* s */
    double delay_margin_bound;
    size_t at_model;      /* index of the worst model in the list */
    size_t members_tried; /* analyzed one by one */
    size_t boxes_used;    /* of the proof */
} tauw_worst_case;

/* What a loop should keep; a member must be stable in any case. */
typedef struct tauw_violation_limits {
    uint32_t struct_size;
    int32_t has_max_sensitivity;
    int32_t has_gain_margin;
    int32_t has_phase_margin_deg;
    double max_sensitivity;  /* at most this, >= 1 */
    double gain_margin;      /* at least this, >= 1 */
    double phase_margin_deg; /* at least this, 0 to 180 */
} tauw_violation_limits;

typedef struct tauw_violation_options {
    uint32_t struct_size;
    uint32_t reserved;
    size_t members;     /* to draw, >= 1; default 1000 */
    uint64_t seed;      /* equal seeds draw equal members; default 1 */
    double extra_delay; /* >= 0 s */
    tauw_progress progress; /* or NULL */
    void* context;          /* handed to progress */
} tauw_violation_options;

/* The share of the members drawn that violate a limit or are not stable. */
typedef struct tauw_violating_share {
    uint32_t struct_size;
    int32_t cancelled; /* 1: the rest counts the members drawn before */
    double share;
    double standard_error; /* of the share; 0 for a list of models */
    size_t members;
    size_t unstable; /* not stable, or not decided */
} tauw_violating_share;

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
    double setpoint_ramp_time;      /* s over which the set point makes its step; default 0, at once */
    double load_ramp_time;          /* s over which the load makes its step; default 0, at once */
    int32_t has_output_rate_limit;  /* 0: none */
    uint32_t reserved;
    double output_rate_limit;       /* fastest change of the output per s, > 0 */
    const tauw_valve_settings* valve;             /* or NULL: a perfect one */
    const tauw_transmitter_settings* transmitter; /* or NULL: a perfect one */
    const double* disturbance;      /* disturbance[disturbance_count] at the process input: one value a scan, held; */
    size_t disturbance_count;       /* 0 after its end. Pointers are the caller's, read during the call only. */
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
    double valve_travel;              /* sum of |changes| of the valve position, from the rest output on */
    int32_t has_rise_time;  /* 0 without a set-point step, or where it does not get there */
    int32_t has_decay_ratio; /* 0 without two peaks */
    int32_t has_peak_load_error_time; /* 0 without a load step */
    uint32_t reserved;
    double rise_time;            /* s from 10 to 90 % of the set-point step */
    double decay_ratio;          /* second peak beyond the set point over the first */
    double peak_load_error_time; /* s from the load to the peak */
    double integrated_squared_error;
    double integrated_time_absolute_error; /* time from the set-point step; without one, from the load */
    double integrated_error;               /* set point less process value */
    double time_at_limits;                 /* s the output stands on a limit */
    size_t reversals;                      /* turns of the valve */
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
    const double* measured;       /* measured[n]: what the controller sees */
    const double* valve_position; /* valve_position[n] */
    const double* load;           /* load[n], added behind the valve */
    int32_t ran_away;             /* 1: an unstable process left its rest by more than 1e60; the trend ends there */
    uint32_t reserved;
} tauw_trend_columns;

enum tauw_cycle_existence { TAUW_CYCLE_NONE = 0, TAUW_CYCLE_PERSISTS = 1, TAUW_CYCLE_UNDETERMINED = 2 };

/* What a valve does to a loop. Amplitudes are half of peak to peak. */
typedef struct tauw_valve_cycle {
    uint32_t struct_size;
    int32_t existence;  /* enum tauw_cycle_existence */
    int32_t has_period; /* 0, as below, without a cycle or where its size is not known */
    int32_t has_process_value_amplitude;
    int32_t has_output_amplitude;
    int32_t retuning_cures; /* 1: other settings end the cycle; 0 where there is none */
    double period;          /* s */
    double process_value_amplitude;
    double output_amplitude;
    char reason[512]; /* one plain line, ends with a zero; cut between characters where it does not fit */
} tauw_valve_cycle;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_robustness_options_defaults(tauw_robustness_options* options, uint32_t size);
TAUW_API int32_t tauw_robustness_defaults(tauw_robustness* robustness, uint32_t size);
TAUW_API int32_t tauw_duty_defaults(tauw_duty* duty, uint32_t size);
TAUW_API int32_t tauw_figures_defaults(tauw_figures* figures, uint32_t size);
TAUW_API int32_t tauw_trend_columns_defaults(tauw_trend_columns* columns, uint32_t size);
TAUW_API int32_t tauw_gain_crossover_defaults(tauw_gain_crossover* crossover, uint32_t size);
TAUW_API int32_t tauw_phase_crossover_defaults(tauw_phase_crossover* crossover, uint32_t size);
TAUW_API int32_t tauw_delay_range_defaults(tauw_delay_range* range, uint32_t size);
TAUW_API int32_t tauw_delay_budget_defaults(tauw_delay_budget* budget, uint32_t size);
TAUW_API int32_t tauw_uncertainty_box_defaults(tauw_uncertainty_box* half_widths, uint32_t size);
TAUW_API int32_t tauw_uncertainty_parts_defaults(tauw_uncertainty_parts* parts, uint32_t size);
TAUW_API int32_t tauw_worst_case_options_defaults(tauw_worst_case_options* options, uint32_t size);
TAUW_API int32_t tauw_worst_case_defaults(tauw_worst_case* worst, uint32_t size);
TAUW_API int32_t tauw_violation_limits_defaults(tauw_violation_limits* limits, uint32_t size);
TAUW_API int32_t tauw_violation_options_defaults(tauw_violation_options* options, uint32_t size);
TAUW_API int32_t tauw_violating_share_defaults(tauw_violating_share* share, uint32_t size);
TAUW_API int32_t tauw_valve_cycle_defaults(tauw_valve_cycle* cycle, uint32_t size);

/* The words, for example "stable", "box" and "persists"; "unknown" for another number. Static memory.
 * Since 0.1. Any thread. Never allocate. */
TAUW_API const char* tauw_verdict_name(int32_t verdict);
TAUW_API const char* tauw_uncertainty_kind_name(int32_t kind);
TAUW_API const char* tauw_cycle_existence_name(int32_t existence);

/* Of process and settings, every filter included, and of an open loop as it is; `options` NULL means the defaults.
 * Margins and peaks to about 1e-12 relative, 1e-10 where the curve passes close to -1. With a scan time of the sampled
 * loop, on frequencies up to half the sampling frequency. Errors: NOT_FINITE, OUT_OF_DOMAIN, CONFLICTING_ARGUMENTS.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocate memory that they free again. */
TAUW_API int32_t tauw_robustness_of(const tauw_model* process, const tauw_pid_settings* settings,
                                    const tauw_robustness_options* options, tauw_robustness* robustness,
                                    tauw_error* error);
TAUW_API int32_t tauw_robustness_of_open_loop(const tauw_model* open_loop, tauw_robustness* robustness,
                                              tauw_error* error);

/* The same with every crossover and range of stable dead times; tauw_margins_of_exact_controller is in synthesize.h.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocate the handle; the caller destroys it. */
TAUW_API int32_t tauw_margins_of(const tauw_model* process, const tauw_pid_settings* settings,
                                 const tauw_robustness_options* options, tauw_margins** margins, tauw_error* error);
TAUW_API int32_t tauw_margins_of_open_loop(const tauw_model* open_loop, tauw_margins** margins, tauw_error* error);

/* The figures with the counts of the lists; element `index` of each list, in ascending order. Stable dead times
 * are those of the process (of the open loop, where that is all there is). Errors: OUT_OF_DOMAIN (index).
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_margins_summarize(const tauw_margins* margins, tauw_robustness* robustness, tauw_error* error);
TAUW_API int32_t tauw_margins_gain_crossover(const tauw_margins* margins, size_t index, tauw_gain_crossover* crossover,
                                             tauw_error* error);
TAUW_API int32_t tauw_margins_phase_crossover(const tauw_margins* margins, size_t index,
                                              tauw_phase_crossover* crossover, tauw_error* error);
TAUW_API int32_t tauw_margins_stable_dead_time(const tauw_margins* margins, size_t index, tauw_delay_range* range,
                                               tauw_error* error);

/* Where the loop's effective dead time comes from; `options` NULL means the defaults. Errors as tauw_robustness_of.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_delay_budget_of(const tauw_model* process, const tauw_pid_settings* settings,
                                      const tauw_robustness_options* options, tauw_delay_budget* budget,
                                      tauw_error* error);

/* A box about the nominal process; the joint region that holds the truth of a fit with a confidence such as 0.95; a
 * list models[model_count], copied. Errors: NOT_FINITE, OUT_OF_DOMAIN (half widths; confidence; a region that reaches
 * a gain or lag of 0), MISSING_ARGUMENT (a fit without a model or all fixed; no model in the list).
 * Since 0.1. Concurrent calls on the same handles are fine. Allocate the handle; the caller destroys it. */
TAUW_API int32_t tauw_uncertainty_of_box(const tauw_uncertainty_box* half_widths, tauw_uncertainty** uncertainty,
                                         tauw_error* error);
TAUW_API int32_t tauw_uncertainty_from_fit(const tauw_fit* fit, double confidence, tauw_uncertainty** uncertainty,
                                           tauw_error* error);
TAUW_API int32_t tauw_uncertainty_of_models(const tauw_model* const* models, size_t model_count,
                                            tauw_uncertainty** uncertainty, tauw_error* error);

/* What it holds; the half widths of a box (else 0). Arrays belong to the handle and are good until it is destroyed.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_uncertainty_view(const tauw_uncertainty* uncertainty, tauw_uncertainty_parts* parts,
                                       tauw_error* error);
TAUW_API int32_t tauw_uncertainty_half_widths(const tauw_uncertainty* uncertainty, tauw_uncertainty_box* half_widths,
                                              tauw_error* error);

/* The name of parameter `index` of a region to text[capacity], see core.h for `needed`; model `index`, a handle of
 * its own that the caller destroys. Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. The second allocates. */
TAUW_API int32_t tauw_uncertainty_parameter_name(const tauw_uncertainty* uncertainty, size_t index, char* text,
                                                 size_t capacity, size_t* needed, tauw_error* error);
TAUW_API int32_t tauw_uncertainty_model(const tauw_uncertainty* uncertainty, size_t index, tauw_model** model,
                                        tauw_error* error);

/* Worst case of the loop of `settings` around every member of the set about `process`: the box's center, the fit's
 * model for a region; NULL for a list. `options` NULL means the defaults. `*at` becomes the member with the largest
 * Ms found, or one that is not stable, for the caller to destroy; `at` NULL means not wanted. Cancelling is no error.
 * Errors: NOT_FINITE, OUT_OF_DOMAIN, CONFLICTING_ARGUMENTS (a region of another process), UNKNOWN_NAME (an answer of
 * progress that is neither 0 nor 1).
 * Since 0.1. Concurrent calls on the same handles are fine. Allocates; the caller destroys *at. */
TAUW_API int32_t tauw_worst_case_of(const tauw_model* process, const tauw_pid_settings* settings,
                                    const tauw_uncertainty* uncertainty, const tauw_worst_case_options* options,
                                    tauw_worst_case* worst, tauw_model** at, tauw_error* error);

/* Draws members evenly over the box or region (a list is taken whole) and analyzes each. Arguments and errors as
 * above, and OUT_OF_DOMAIN for limits outside their domain and for 0 members; `options` NULL means the defaults.
 * Since 0.1. Concurrent calls on the same handles are fine. Allocates memory that it frees again. */
TAUW_API int32_t tauw_violating_share_of(const tauw_model* process, const tauw_pid_settings* settings,
                                         const tauw_uncertainty* uncertainty, const tauw_violation_limits* limits,
                                         const tauw_violation_options* options, tauw_violating_share* share,
                                         tauw_error* error);

/* Runs the PID block of the settings against the exact sampled process of any order up to 20 over horizon_s
 * seconds, 2 to ten million scans. Errors: MISSING_ARGUMENT (no scan time), NOT_FINITE, OUT_OF_DOMAIN,
 * CONFLICTING_ARGUMENTS. The last gives the same bits for each processes[loops] with settings[loops] under one duty, in
 * process_value[length] and output[length], all loops of scan 0 first; `length` is tauw_scans_of times `loops`. Where an
 * unstable process ran away its last values are repeated. Also BUFFER_TOO_SMALL; of no use are arrays after an error.
 * Since 0.1. Concurrent calls on the same handle are fine. The first allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_simulate(const tauw_model* process, const tauw_pid_settings* settings, const tauw_duty* duty,
                               double horizon_s, tauw_trend** trend, tauw_error* error);
TAUW_API int32_t tauw_scans_of(const tauw_duty* duty, double horizon_s, size_t* scans, tauw_error* error);
TAUW_API int32_t tauw_simulate_many(const tauw_model* const* processes, const tauw_pid_settings* settings, size_t loops,
                                    const tauw_duty* duty, double horizon_s, double* process_value, double* output,
                                    size_t length, tauw_error* error);

/* The response as the differential equations give it, without scan and limits, at `points` (2 to ten million) evenly
 * spaced times from 0 to horizon_s; to 1e-12 of the largest deviation. The duty's scan time and seed are ignored.
 * Errors: NOT_FINITE, OUT_OF_DOMAIN (also unfiltered derivative on a process that answers a step at once, a response
 * beyond all numbers), CONFLICTING_ARGUMENTS (noise, rate limit, valve, transmitter or disturbance asked for).
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_continuous_trend(const tauw_model* process, const tauw_pid_settings* settings,
                                       const tauw_duty* duty, double horizon_s, size_t points, tauw_trend** trend,
                                       tauw_error* error);

/* The arrays of a trend, which belong to it and are good until it is destroyed; its figures.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_trend_view(const tauw_trend* trend, tauw_trend_columns* columns, tauw_error* error);
TAUW_API int32_t tauw_trend_figures(const tauw_trend* trend, tauw_figures* figures, tauw_error* error);

/* Whether the loop, left alone under a constant load, cycles because of its valve, and how: sticking and resolution
 * exactly, a dead band within about 1 %. Errors: NOT_FINITE, OUT_OF_DOMAIN, CONFLICTING_ARGUMENTS.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates memory that it frees again. */
TAUW_API int32_t tauw_valve_cycle_of(const tauw_model* process, const tauw_pid_settings* settings,
                                     const tauw_valve_settings* valve, tauw_valve_cycle* cycle, tauw_error* error);

/* Release the handle and make it NULL; NULL is fine. Return TAUW_OK or TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Free. */
TAUW_API int32_t tauw_trend_destroy(tauw_trend** trend);
TAUW_API int32_t tauw_margins_destroy(tauw_margins** margins);
TAUW_API int32_t tauw_uncertainty_destroy(tauw_uncertainty** uncertainty);

#ifdef __cplusplus
}
#endif

#endif
