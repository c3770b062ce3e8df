/* PID settings, and exact conversion to and from the numbers a controller's fields take. */
#ifndef TAUWRIGHT_CONTROL_H
#define TAUWRIGHT_CONTROL_H

#include <tauwright/model.h>

#ifdef __cplusplus
extern "C" {
#endif

/* C(s) = Kc (1 + 1/(Ti s) + Td s/(Tf s + 1)) / (Tm s + 1), the ideal form, times in seconds.
 * Positive gain is reverse acting. Bare gains are in percent of span per percent of span.
 * Legal: P, PI, PID, PD, and I alone (gain 0, integral_gain given). */
typedef struct tauw_pid_settings {
    uint32_t struct_size;
    int32_t has_integral_time;      /* 0 means no integral action */
    double gain;                    /* Kc; 0 only for integral action alone */
    double integral_time;           /* Ti > 0 in s */
    double derivative_time;         /* Td >= 0 in s */
    double filter_time;             /* Tf >= 0 in s, on the derivative alone */
    double measurement_filter_time; /* Tm >= 0 in s, on the process value */
    double setpoint_weight;         /* share of the set point that proportional action sees; default 1 */
    int32_t has_integral_gain;      /* only for integral action alone */
    uint32_t reserved;
    double integral_gain; /* Ki in 1/s */
} tauw_pid_settings;

/* Which equation the controller computes (e the error, all filters beside):
 *   ideal     Kc (e + 1/Ti integral e + Td de/dt)
 *   series    Kc (e + 1/Ti integral e) followed by (Td s + 1)/(Tf s + 1)
 *   parallel  Kp e + Ki integral e + Kd de/dt */
enum tauw_equation { TAUW_EQUATION_IDEAL = 0, TAUW_EQUATION_SERIES = 1, TAUW_EQUATION_PARALLEL = 2 };
/* Gain itself, or proportional band = 100 / gain in percent. */
enum tauw_gain_as { TAUW_GAIN_AS_GAIN = 0, TAUW_GAIN_AS_PROPORTIONAL_BAND = 1 };
/* Integral action as a time, as repeats per time unit, or as a gain Ki. */
enum tauw_integral_as { TAUW_INTEGRAL_AS_TIME = 0, TAUW_INTEGRAL_AS_REPEATS = 1, TAUW_INTEGRAL_AS_GAIN = 2 };
enum tauw_time_unit { TAUW_TIME_UNIT_SECONDS = 0, TAUW_TIME_UNIT_MINUTES = 1 };
/* Derivative filter as its time Tf, or as the ratio Td / Tf. */
enum tauw_filter_as { TAUW_FILTER_AS_TIME = 0, TAUW_FILTER_AS_RATIO = 1 };
/* Percent of span on both sides, or engineering units of both ranges. */
enum tauw_gain_unit { TAUW_GAIN_UNIT_PERCENT = 0, TAUW_GAIN_UNIT_ENGINEERING = 1 };
/* What an action looks at. */
enum tauw_acts_on { TAUW_ACTS_ON_ERROR = 0, TAUW_ACTS_ON_PROCESS_VALUE = 1 };
/* Direction entered as a switch beside an unsigned gain, or as the sign of the gain. */
enum tauw_action_as { TAUW_ACTION_AS_SWITCH = 0, TAUW_ACTION_AS_SIGN = 1 };
/* Reverse: the output rises when the process value falls (positive process gain). */
enum tauw_action { TAUW_ACTION_REVERSE = 0, TAUW_ACTION_DIRECT = 1 };

/* What the controller at hand expects. Defaults: ideal, gain in percent, integral time and derivative
 * time in seconds, action by a switch, no limits, no rounding. */
typedef struct tauw_controller_form {
    uint32_t struct_size;
    int32_t equation;        /* enum tauw_equation */
    int32_t gain_as;         /* enum tauw_gain_as */
    int32_t gain_unit;       /* enum tauw_gain_unit */
    int32_t integral_as;     /* enum tauw_integral_as */
    int32_t integral_unit;   /* enum tauw_time_unit */
    int32_t derivative_unit; /* enum tauw_time_unit */
    int32_t filter_as;       /* enum tauw_filter_as; a filter time is in the derivative's unit */
    int32_t proportional_on; /* enum tauw_acts_on; default error */
    int32_t derivative_on;   /* enum tauw_acts_on; default process value */
    int32_t action_as;       /* enum tauw_action_as */
    int32_t has_fixed_filter;
    double fixed_filter; /* the filter number built in, not to be entered */
    double integral_off; /* the integral number that means no integral action; default 0 */
    const tauw_range* process_value_range; /* or NULL; both are needed for engineering units */
    const tauw_range* output_range;        /* or NULL */
    int32_t has_gain_low;                  /* lowest and highest number each field takes */
    int32_t has_gain_high;
    int32_t has_integral_low;
    int32_t has_integral_high;
    int32_t has_derivative_low;
    int32_t has_derivative_high;
    int32_t has_filter_low;
    int32_t has_filter_high;
    double gain_low;
    double gain_high;
    double integral_low;
    double integral_high;
    double derivative_low;
    double derivative_high;
    double filter_low;
    double filter_high;
    double gain_resolution; /* smallest step of each field's display; 0 means no rounding */
    double integral_resolution;
    double derivative_resolution;
    double filter_resolution;
} tauw_controller_form;

/* The very numbers to key in. Which members are given follows from the form. */
typedef struct tauw_entered {
    uint32_t struct_size;
    int32_t action; /* enum tauw_action */
    int32_t has_gain;
    int32_t has_proportional_band;
    int32_t has_integral_time;
    int32_t has_repeats;
    int32_t has_integral_gain;
    int32_t has_derivative_time;
    int32_t has_derivative_gain;
    int32_t has_filter_time;
    int32_t has_filter_ratio;
    uint32_t reserved;
    double gain;              /* Kc or Kp, unsigned where the action is a switch */
    double proportional_band; /* percent */
    double integral_time;     /* in the form's integral unit */
    double repeats;           /* per the form's integral unit */
    double integral_gain;     /* Ki per the form's integral unit */
    double derivative_time;   /* in the form's derivative unit */
    double derivative_gain;   /* Kd times the form's derivative unit */
    double filter_time;       /* in the form's derivative unit */
    double filter_ratio;
    double measurement_filter_time; /* s */
    double setpoint_weight;         /* default 1 */
} tauw_entered;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_pid_settings_defaults(tauw_pid_settings* settings, uint32_t size);
TAUW_API int32_t tauw_controller_form_defaults(tauw_controller_form* form, uint32_t size);
TAUW_API int32_t tauw_entered_defaults(tauw_entered* entered, uint32_t size);

/* Finds the first thing wrong with settings. Errors: NOT_FINITE, OUT_OF_DOMAIN, CONFLICTING_ARGUMENTS.
 * Since 0.1. Any thread. Never allocates but for an error. */
TAUW_API int32_t tauw_pid_settings_check(const tauw_pid_settings* settings, tauw_error* error);

/* C at each complex s: s_real[n], s_imaginary[n] in rad/s to value_real[n], value_imaginary[n], which may
 * be the same arrays. Errors as tauw_pid_settings_check.
 * Since 0.1. Any thread. Never allocates but for an error. */
TAUW_API int32_t tauw_pid_settings_at(const tauw_pid_settings* settings, const double* s_real,
                                      const double* s_imaginary, size_t n, double* value_real, double* value_imaginary,
                                      tauw_error* error);

/* C(s) as a model, both filters included; multiply by a process for the open loop. Errors as
 * tauw_pid_settings_check.
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_transfer_function(const tauw_pid_settings* settings, tauw_model** model, tauw_error* error);

/* The numbers to key in for settings (gain in percent per percent, times in seconds), rounded to the
 * form's display; exact up to that rounding. Errors: NO_EQUIVALENT, ACTION_WOULD_BE_LOST,
 * OUTSIDE_FIELD_LIMITS, MISSING_RANGE, CONFLICTING_ARGUMENTS, NOT_FINITE, OUT_OF_DOMAIN.
 * Since 0.1. Any thread. Allocates memory that it frees again. */
TAUW_API int32_t tauw_entered_as(const tauw_pid_settings* settings, const tauw_controller_form* form,
                                 tauw_entered* entered, tauw_error* error);

/* The settings that numbers keyed into a controller of this form amount to; the inverse of
 * tauw_entered_as. Errors: MISSING_ARGUMENT, CONFLICTING_ARGUMENTS, OUT_OF_DOMAIN, NOT_FINITE,
 * NO_EQUIVALENT, MISSING_RANGE.
 * Since 0.1. Any thread. Allocates memory that it frees again. */
TAUW_API int32_t tauw_settings_from(const tauw_entered* entered, const tauw_controller_form* form,
                                    tauw_pid_settings* settings, tauw_error* error);

#ifdef __cplusplus
}
#endif

#endif
