/* From a process and a response asked for to the controller, what stands in its way, and the PID. */
#ifndef TAUWRIGHT_SYNTHESIZE_H
#define TAUWRIGHT_SYNTHESIZE_H

#include <tauwright/assess.h>

#ifdef __cplusplus
extern "C" {
#endif

/* The answer of a synthesis. Immutable. */
typedef struct tauw_synthesis tauw_synthesis;

/* The closed loop asked for: a time constant, from which the default response of the process follows, or
 * a transfer function taken at its word; both, or neither, is an error. */
typedef struct tauw_desired_response {
    uint32_t struct_size;
    int32_t has_time_constant;
    double time_constant; /* > 0 s */
    int32_t order;        /* 1 to 20; default 1 */
    uint32_t reserved;
    const tauw_model* transfer_function; /* or NULL; the caller's, used during the call only */
} tauw_desired_response;

enum tauw_obstacle_code {
    TAUW_OBSTACLE_INFINITE_CONTROLLER = 1,
    TAUW_OBSTACLE_NO_INTEGRAL_ACTION = 2,
    TAUW_OBSTACLE_PREDICTION_NEEDED = 3,
    TAUW_OBSTACLE_FASTER_THAN_DEAD_TIME = 4,
    TAUW_OBSTACLE_IMPROPER = 5,
    TAUW_OBSTACLE_RIGHT_HALF_PLANE_ZERO_CANCELLED = 6,
    TAUW_OBSTACLE_UNSTABLE_POLE_CANCELLED = 7,
    TAUW_OBSTACLE_SLOW_POLE_CANCELLED = 8,
    TAUW_OBSTACLE_NEGATIVE_TIME = 9
};

enum tauw_severity {
    TAUW_SEVERITY_CAUTION = 0,      /* can be built; think twice */
    TAUW_SEVERITY_NEEDS_FILTER = 1, /* can be built with a filter or a response of higher order */
    TAUW_SEVERITY_IMPOSSIBLE = 2    /* cannot be built, or not made stable inside */
};

/* One thing that stands in the way of the controller asked for, or that it brings with it. Its message
 * and repair are texts of their own. */
typedef struct tauw_obstacle {
    uint32_t struct_size;
    int32_t code;     /* enum tauw_obstacle_code */
    int32_t severity; /* enum tauw_severity */
    uint32_t reserved;
    double value; /* the number that shows it */
} tauw_obstacle;

typedef struct tauw_synthesis_summary {
    uint32_t struct_size;
    int32_t buildable;       /* 1: no obstacle is impossible */
    int32_t pid_expressible; /* 1: the settings are the exact controller without loss, but for the dead time */
    int32_t has_controller;  /* 0 where impossible */
    int32_t has_settings;    /* 0 where impossible or not expressible */
    int32_t controller_integrators; /* integrating actions of the exact controller */
    size_t obstacle_count;
} tauw_synthesis_summary;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_desired_response_defaults(tauw_desired_response* desired, uint32_t size);
TAUW_API int32_t tauw_obstacle_defaults(tauw_obstacle* obstacle, uint32_t size);
TAUW_API int32_t tauw_synthesis_summary_defaults(tauw_synthesis_summary* summary, uint32_t size);

/* The words, for example "improper" and "caution"; "unknown" for another number. Static memory.
 * Since 0.1. Any thread. Never allocate. */
TAUW_API const char* tauw_obstacle_name(int32_t code);
TAUW_API const char* tauw_severity_name(int32_t severity);

/* Solves the loop for the controller (1/G) T/(1 - T). What cannot be built is said in obstacles, not by an
 * error. Errors: CONFLICTING_ARGUMENTS (both or two contradicting wishes), MISSING_ARGUMENT (neither),
 * OUT_OF_DOMAIN, NOT_FINITE, UNSUPPORTED_FORM (a default response for a process that is not stable or has
 * more than one integrator).
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_synthesize(const tauw_model* process, const tauw_desired_response* desired,
                                 tauw_synthesis** synthesis, tauw_error* error);

/* What came of it, and how many obstacles there are.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_synthesis_summarize(const tauw_synthesis* synthesis, tauw_synthesis_summary* summary,
                                          tauw_error* error);

/* The P, I, PI or PID settings. Errors: MISSING_ARGUMENT where there are none (has_settings 0).
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_synthesis_settings(const tauw_synthesis* synthesis, tauw_pid_settings* settings,
                                         tauw_error* error);

/* Obstacle `index`, 0 to obstacle_count - 1; its message (what and why) and its repair (what to ask for
 * instead) to text[capacity], see core.h for `needed`. Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_synthesis_obstacle(const tauw_synthesis* synthesis, size_t index, tauw_obstacle* obstacle,
                                         tauw_error* error);
TAUW_API int32_t tauw_synthesis_obstacle_message(const tauw_synthesis* synthesis, size_t index, char* text,
                                                 size_t capacity, size_t* needed, tauw_error* error);
TAUW_API int32_t tauw_synthesis_obstacle_repair(const tauw_synthesis* synthesis, size_t index, char* text,
                                                size_t capacity, size_t* needed, tauw_error* error);

/* The closed loop T that the exact controller gives, a model of its own.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates; the caller destroys the model. */
TAUW_API int32_t tauw_synthesis_attained(const tauw_synthesis* synthesis, tauw_model** model, tauw_error* error);

/* The exact controller, dead time inside, and the closed loop with the settings in its place, at each
 * complex s: s_real[n], s_imaginary[n] in rad/s to value_real[n], value_imaginary[n], which may be the same
 * arrays. Errors: MISSING_ARGUMENT where there is no controller, or no settings.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_synthesis_controller_at(const tauw_synthesis* synthesis, const double* s_real,
                                              const double* s_imaginary, size_t n, double* value_real,
                                              double* value_imaginary, tauw_error* error);
TAUW_API int32_t tauw_synthesis_attained_with_settings_at(const tauw_synthesis* synthesis, const double* s_real,
                                                          const double* s_imaginary, size_t n, double* value_real,
                                                          double* value_imaginary, tauw_error* error);

/* Margins of a process with the exact controller, which holds its model's dead time, in place of the settings; `process`
 * may differ from the one the controller was made for. extra_delay >= 0 s is added to the loop. Errors:
 * MISSING_ARGUMENT where there is no controller, NOT_FINITE, OUT_OF_DOMAIN.
 * Since 0.1. Concurrent calls on the same handles are fine. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_margins_of_exact_controller(const tauw_model* process, const tauw_synthesis* synthesis,
                                                  double extra_delay, tauw_margins** margins, tauw_error* error);

/* Releases the synthesis and makes *synthesis NULL; NULL is fine. Returns TAUW_OK or
 * TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_synthesis_destroy(tauw_synthesis** synthesis);

#ifdef __cplusplus
}
#endif

#endif
