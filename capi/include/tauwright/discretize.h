/* Settings, processes, valves and transmitters to the coefficients of one scan; processes as a computer sees them. */
#ifndef TAUWRIGHT_DISCRETIZE_H
#define TAUWRIGHT_DISCRETIZE_H

#include <tauwright/control.h>
#include <tauwright/run.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Any proper process with its input held between samples, H(z). Immutable. */
typedef struct tauw_discrete tauw_discrete;

/* What the input does between two samples: holds each value until the next one, as a controller's output
 * does, or goes straight from each to the next, as a signal read from a record does. */
enum tauw_between { TAUW_BETWEEN_CONSTANT = 0, TAUW_BETWEEN_LINEAR = 1 };

/* Everything a discrete process holds. The arrays belong to it. With samples u and y, state x and
 * d = delay_scans, a sample being read before the input changes:
 *   x[k+1] = x[k] + growth x[k] + ahead u[k+1-d] + now u[k-d] + before u[k-1-d]
 *   y[k]   = outputs . x[k] + direct_now u[k-d] + direct_before u[k-1-d]
 *   H(z) = leading z^-d product(z - 1 - zero_offsets) / product(z - 1 - pole_offsets)
 * Offsets are roots less 1, real part then imaginary part: short scans lose no digits. */
typedef struct tauw_discrete_parts {
    uint32_t struct_size;
    int32_t between; /* enum tauw_between */
    double scan_time;
    size_t order;        /* number of states */
    int64_t delay_scans; /* whole scans of dead time */
    double steady_gain;  /* H(1); infinite with the gain's sign for an integrating process */
    double leading;
    double factored_error; /* relative error of the factored form away from its roots */
    double direct_now;
    double direct_before;
    const double* growth;       /* growth[order * order], by rows; exp(A scan_time) - identity */
    const double* now;          /* now[order] */
    const double* before;       /* before[order] */
    const double* ahead;        /* ahead[order]; 0 for constant input */
    const double* outputs;      /* outputs[order] */
    const double* pole_offsets; /* pole_offsets[2 * pole_count] */
    size_t pole_count;
    const double* zero_offsets; /* zero_offsets[2 * zero_count] */
    size_t zero_count;
} tauw_discrete_parts;

/* What a control valve does to its demand, percent of travel; all 0 is a perfect valve. See
 * tauw_valve_coefficients for how the faults act together. */
typedef struct tauw_valve_settings {
    uint32_t struct_size;
    int32_t has_travel_rate_per_s; /* 0: at once */
    double dead_band;              /* full width: what a reversal loses, >= 0 */
    double stick;                  /* holds until the demand is farther away than this, then jumps to it, >= 0 */
    double resolution;             /* moves in whole multiples of this, >= 0 */
    double travel_rate_per_s;      /* > 0; 5 for a stroke of 20 s */
} tauw_valve_settings;

/* What stands between the process value and the controller, but for noise; all 0 is a perfect transmitter. */
typedef struct tauw_transmitter_settings {
    uint32_t struct_size;
    uint32_t reserved;
    double lag;        /* time constant, >= 0 s */
    double resolution; /* smallest step of the measured value, in its unit, >= 0 */
} tauw_transmitter_settings;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_discrete_parts_defaults(tauw_discrete_parts* parts, uint32_t size);
TAUW_API int32_t tauw_valve_settings_defaults(tauw_valve_settings* valve, uint32_t size);
TAUW_API int32_t tauw_transmitter_settings_defaults(tauw_transmitter_settings* transmitter, uint32_t size);

/* Backward differences for integral, derivative and both filters: stable at every scan time, never
 * ringing. scan_time > 0. Errors: NOT_FINITE, OUT_OF_DOMAIN, CONFLICTING_ARGUMENTS.
 * Since 0.1. Any thread. Never allocates but for an error. */
TAUW_API int32_t tauw_discretize_pid(const tauw_pid_settings* settings, double scan_time,
                                     tauw_pid_coefficients* coefficients, tauw_error* error);

/* The exact recursion of a process whose input is held over each scan; whole and fractional scans of
 * dead time are exact, at most ten million of them. scan_time > 0. Errors: UNSUPPORTED_FORM (more than
 * two lags, than one oscillatory pair, or than an integrator with one lag; leads), NOT_FINITE,
 * OUT_OF_DOMAIN.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_discretize_process(const tauw_model* process, double scan_time,
                                         tauw_process_coefficients* coefficients, tauw_error* error);

/* A valve and a transmitter stepped every scan_time > 0 s. The travel goes from position_low to
 * position_high, low < high; `noise` is the standard deviation of the measurement noise, >= 0. The
 * transmitter takes its input as held over the scan before. Errors: NOT_FINITE, OUT_OF_DOMAIN.
 * Since 0.1. Any thread. Never allocate but for an error. */
TAUW_API int32_t tauw_discretize_valve(const tauw_valve_settings* valve, double scan_time, double position_low,
                                       double position_high, tauw_valve_coefficients* coefficients, tauw_error* error);
TAUW_API int32_t tauw_discretize_transmitter(const tauw_transmitter_settings* transmitter, double scan_time,
                                             double noise, uint64_t seed, tauw_transmitter_coefficients* coefficients,
                                             tauw_error* error);

/* The process with its input held between samples scan_time s apart; `between` is enum tauw_between. Any proper
 * process of order 0 to 20, whole and fractional scans of dead time exact. Errors: NOT_FINITE, UNKNOWN_NAME
 * (between), OUT_OF_DOMAIN (scan time not above 0 or not within 1e-12 to 1e12 of every lag, improper process, order
 * above 20, more than ten million scans of dead time, an unstable process that grows more than a millionfold a scan).
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_held(const tauw_model* process, double scan_time, int32_t between, tauw_discrete** discrete,
                           tauw_error* error);

/* H at each complex z, and at each z = 1 + offset, which keeps more digits near 1: real and imaginary parts
 * [n] to value_real[n], value_imaginary[n], which may be the same arrays. Infinite at a pole.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_discrete_at(const tauw_discrete* discrete, const double* z_real, const double* z_imaginary,
                                  size_t n, double* value_real, double* value_imaginary, tauw_error* error);
TAUW_API int32_t tauw_discrete_at_offset(const tauw_discrete* discrete, const double* offset_real,
                                         const double* offset_imaginary, size_t n, double* value_real,
                                         double* value_imaginary, tauw_error* error);

/* H at z = exp(j w scan_time) for each w = frequency_rad_s[n], z - 1 formed without cancellation. Infinite at
 * the w = 0 of an integrator. `value_real` may be the array of frequencies.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_discrete_at_frequency(const tauw_discrete* discrete, const double* frequency_rad_s, size_t n,
                                            double* value_real, double* value_imaginary, tauw_error* error);

/* Coefficients, poles and zeros. The arrays belong to the handle and are good until it is destroyed.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_discrete_view(const tauw_discrete* discrete, tauw_discrete_parts* parts, tauw_error* error);

/* Releases the handle and makes *discrete NULL; NULL is fine. Returns TAUW_OK or TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_discrete_destroy(tauw_discrete** discrete);

#ifdef __cplusplus
}
#endif

#endif
