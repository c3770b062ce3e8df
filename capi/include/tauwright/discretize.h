/* Settings and processes to the coefficients of one scan. */
#ifndef TAUWRIGHT_DISCRETIZE_H
#define TAUWRIGHT_DISCRETIZE_H

#include <tauwright/control.h>
#include <tauwright/run.h>

#ifdef __cplusplus
extern "C" {
#endif

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

#ifdef __cplusplus
}
#endif

#endif
