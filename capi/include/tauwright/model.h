/* Linear processes with exact dead time, held as factors. Times in seconds, s in rad/s. */
#ifndef TAUWRIGHT_MODEL_H
#define TAUWRIGHT_MODEL_H

#include <tauwright/core.h>

#ifdef __cplusplus
extern "C" {
#endif

/* A transfer function. Immutable. */
typedef struct tauw_model tauw_model;

/* Everything a model holds:
 *   gain * s^zeros_at_origin / s^integrators * product (T s + 1 for T in leads) * (lead pairs)
 *        / product (T s + 1 for T in lags) / (lag pairs) * exp(-dead_time s)
 * A pair is T^2 s^2 + 2 z T s + 1, stored as two numbers: T > 0 in s, then the damping z.
 * A lead below 0 is a zero in the right half plane, a lag below 0 an unstable pole. */
typedef struct tauw_factors {
    uint32_t struct_size;
    uint32_t reserved;
    double gain;      /* not 0; default 1 */
    double dead_time; /* s, >= 0 */
    int32_t integrators;
    int32_t zeros_at_origin;
    const double* leads; /* leads[lead_count], s */
    size_t lead_count;
    const double* lags; /* lags[lag_count], s */
    size_t lag_count;
    const double* lead_pairs; /* lead_pairs[2 * lead_pair_count] */
    size_t lead_pair_count;
    const double* lag_pairs; /* lag_pairs[2 * lag_pair_count] */
    size_t lag_pair_count;
} tauw_factors;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocates. */
TAUW_API int32_t tauw_factors_defaults(tauw_factors* factors, uint32_t size);

/* gain exp(-dead_time s) / (lag s + 1). `gain` in process-value units per output unit (or %/%), not 0;
 * lag > 0 s; dead_time >= 0 s. Errors: NOT_FINITE, OUT_OF_DOMAIN.
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_first_order_plus_dead_time(double gain, double lag, double dead_time, tauw_model** model,
                                                 tauw_error* error);

/* gain exp(-dead_time s) / ((lag_1 s + 1)(lag_2 s + 1)), lags > 0 s. Errors: NOT_FINITE, OUT_OF_DOMAIN.
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_second_order_plus_dead_time(double gain, double lag_1, double lag_2, double dead_time,
                                                  tauw_model** model, tauw_error* error);

/* slope exp(-dead_time s) / (s (lag s + 1)). `slope` in process-value units per second per output unit,
 * not 0; lag >= 0 s, 0 meaning none. Errors: NOT_FINITE, OUT_OF_DOMAIN.
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_integrating_plus_dead_time(double slope, double dead_time, double lag, tauw_model** model,
                                                 tauw_error* error);

/* gain exp(-dead_time s) / (T^2 s^2 + 2 damping T s + 1), T = time_constant > 0 s, damping >= 0.
 * Errors: NOT_FINITE, OUT_OF_DOMAIN.
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_oscillatory_plus_dead_time(double gain, double time_constant, double damping, double dead_time,
                                                 tauw_model** model, tauw_error* error);

/* From factors. Errors: NOT_FINITE, OUT_OF_DOMAIN (gain 0, a lead or lag of 0, a pair's time constant
 * not above 0, negative counts or dead time).
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_model_from_factors(const tauw_factors* factors, tauw_model** model, tauw_error* error);

/* From polynomial coefficients in s, highest power first: numerator[numerator_count],
 * denominator[denominator_count], dead_time >= 0 s. Simple roots are found to about 1e-15 relative.
 * Errors: NOT_FINITE, OUT_OF_DOMAIN (a zero or empty polynomial).
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_model_from_polynomials(const double* numerator, size_t numerator_count, const double* denominator,
                                             size_t denominator_count, double dead_time, tauw_model** model,
                                             tauw_error* error);

/* first * second, in series: factors are joined, dead times add, nothing is cancelled.
 * Errors: NOT_FINITE, OUT_OF_DOMAIN (the product of the gains overflows or underflows).
 * Since 0.1. Concurrent calls on the same handles are fine. Allocates; the caller destroys the result. */
TAUW_API int32_t tauw_model_product(const tauw_model* first, const tauw_model* second, tauw_model** model,
                                    tauw_error* error);

/* The same process with process value and output in percent of span. Errors: NOT_FINITE, OUT_OF_DOMAIN
 * (a range that is not low < high).
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates; the caller destroys the result. */
TAUW_API int32_t tauw_in_percent(const tauw_model* process, const tauw_range* process_value_range,
                                 const tauw_range* output_range, tauw_model** model, tauw_error* error);

/* Value at each complex s, exact dead time: s_real[n], s_imaginary[n] in rad/s to value_real[n],
 * value_imaginary[n], which may be the same arrays. Infinite at an integrator's s = 0. About 2e-16
 * relative per factor away from roots.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_model_at(const tauw_model* model, const double* s_real, const double* s_imaginary, size_t n,
                               double* value_real, double* value_imaginary, tauw_error* error);

/* Response to a unit step of the output at time 0, at time_s[n] in s, to response[n]; 0 before the dead
 * time. Closed form, absolute error about 1e-15 of the gain. Errors: NOT_FINITE, UNSUPPORTED_FORM (more
 * than two lags, than one oscillatory pair, or than an integrator with one lag; leads).
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates memory that it frees again. */
TAUW_API int32_t tauw_step_response(const tauw_model* process, const double* time_s, size_t n, double* response,
                                    tauw_error* error);

/* Limit at s = 0; infinite with the gain's sign for integrators, 0 for zeros at the origin.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_model_steady_gain(const tauw_model* model, double* steady_gain, tauw_error* error);

/* The factors. The arrays belong to the model and are good until it is destroyed.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_model_view(const tauw_model* model, tauw_factors* factors, tauw_error* error);

/* One line such as "2 exp(-3 s) / (10 s + 1)" to text[capacity]; see core.h for `needed`.
 * Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates memory that it frees again. */
TAUW_API int32_t tauw_model_text(const tauw_model* model, char* text, size_t capacity, size_t* needed,
                                 tauw_error* error);

/* Releases the model and makes *model NULL; model or *model may be NULL. Returns TAUW_OK, or
 * TAUW_ERROR_WRONG_HANDLE and leaves everything as it was.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_model_destroy(tauw_model** model);

#ifdef __cplusplus
}
#endif

#endif
