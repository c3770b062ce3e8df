/* Real-time blocks in the caller's memory. Once a block is set up, every call takes bounded time and
 * neither allocates nor throws; only filling `error` copies a fixed text. The memory of a block may be
 * copied byte for byte to save and restore its state, to any address of the right alignment. */
#ifndef TAUWRIGHT_RUN_H
#define TAUWRIGHT_RUN_H

#include <tauwright/core.h>

#ifdef __cplusplus
extern "C" {
#endif

/* A PID controller that runs once per scan, a process that answers it, and what stands between them. */
typedef struct tauw_pid_block tauw_pid_block;
typedef struct tauw_process_block tauw_process_block;
typedef struct tauw_valve tauw_valve;
typedef struct tauw_transmitter tauw_transmitter;

enum tauw_mode { TAUW_MODE_MANUAL = 0, TAUW_MODE_AUTOMATIC = 1 };

/* Bits that say what the last step of a PID block had to say. */
enum tauw_pid_flag {
    TAUW_FLAG_BAD_INPUT = 1,    /* no usable set point or process value; the output was held */
    TAUW_FLAG_LIMITED_LOW = 2,  /* the output is at its low limit */
    TAUW_FLAG_LIMITED_HIGH = 4, /* the output is at its high limit */
    TAUW_FLAG_MANUAL = 8        /* the output is the manual one */
};

/* Coefficients of one scan of a PID block, made by tauw_discretize_pid. Plain data: equal bits give
 * equal outputs. */
typedef struct tauw_pid_coefficients {
    uint32_t struct_size;
    uint32_t reserved;
    double gain;
    double setpoint_weight; /* default 1 */
    double integral_per_scan;
    double derivative_per_scan;
    double derivative_smoothing;  /* default 1 */
    double measurement_smoothing; /* default 1 */
    double tracking_per_scan;     /* share of the excess over a limit that the integral gives up per scan */
    double output_change_per_scan; /* farthest the output goes in one scan in automatic, >= 0; default infinity */
} tauw_pid_coefficients;

/* Coefficients of one scan of a process block, made by tauw_discretize_process:
 *   x += growth x + now u[k - delay_scans] + before u[k - delay_scans - 1],  y = outputs . x + direct u */
typedef struct tauw_process_coefficients {
    uint32_t struct_size;
    uint32_t reserved;
    double growth[2][2];
    double now[2];
    double before[2];
    double outputs[2];
    double direct;
    int64_t delay_scans; /* whole scans of dead time, 0 to 10000000 */
} tauw_process_coefficients;

/* Coefficients of one scan of a valve, made by tauw_discretize_valve; percent of travel, 0 is a fault that is
 * not there. In this order: the demand is limited to the travel; the play of the dead band is taken up; a
 * valve at rest stays until the demand is farther away than `stick`, then goes to it, in whole multiples of
 * `resolution` and no faster than `travel_per_scan`. */
typedef struct tauw_valve_coefficients {
    uint32_t struct_size;
    uint32_t reserved;
    double dead_band;       /* full width: what a reversal loses, >= 0 */
    double stick;           /* >= 0 */
    double resolution;      /* >= 0 */
    double travel_per_scan; /* > 0; default infinity */
    double position_low;    /* ends of the travel; default 0 */
    double position_high;   /* default 100 */
} tauw_valve_coefficients;

/* Coefficients of one scan of a transmitter, made by tauw_discretize_transmitter; unit of the process value.
 * The measured value is the process value behind a lag, with noise, rounded to a multiple of the resolution. */
typedef struct tauw_transmitter_coefficients {
    uint32_t struct_size;
    uint32_t reserved;
    double smoothing;  /* share of the change taken over per scan, above 0, at most 1; default 1 is no lag */
    double noise;      /* standard deviation, >= 0 */
    double resolution; /* >= 0 */
    uint64_t seed;     /* of the noise; equal seeds give equal values; default 1 */
} tauw_transmitter_coefficients;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_pid_coefficients_defaults(tauw_pid_coefficients* coefficients, uint32_t size);
TAUW_API int32_t tauw_process_coefficients_defaults(tauw_process_coefficients* coefficients, uint32_t size);
TAUW_API int32_t tauw_valve_coefficients_defaults(tauw_valve_coefficients* coefficients, uint32_t size);
TAUW_API int32_t tauw_transmitter_coefficients_defaults(tauw_transmitter_coefficients* coefficients, uint32_t size);

/* Bytes and alignment of a block's memory. malloc'd memory is aligned enough.
 * Since 0.1. Any thread. Never allocate. */
TAUW_API size_t tauw_pid_block_size(void);
TAUW_API size_t tauw_pid_block_align(void);
TAUW_API size_t tauw_process_block_size(void);
TAUW_API size_t tauw_process_block_align(void);
TAUW_API size_t tauw_valve_size(void);
TAUW_API size_t tauw_valve_align(void);
TAUW_API size_t tauw_transmitter_size(void);
TAUW_API size_t tauw_transmitter_align(void);

/* Sets up a block in memory[size], which stays the caller's; *block is its address as a typed pointer.
 * Limits are finite with output_low < output_high. With `initial_output` (else NULL) the first step
 * presets the integral so that it returns that value; without, the integral starts at output_low. The
 * block starts in automatic. Errors: NOT_FINITE, OUT_OF_DOMAIN (limits, output change, alignment),
 * BUFFER_TOO_SMALL.
 * Since 0.1. One thread at a time per block. Never allocates. */
TAUW_API int32_t tauw_pid_block_init(void* memory, size_t size, const tauw_pid_coefficients* coefficients,
                                     double output_low, double output_high, const double* initial_output,
                                     tauw_pid_block** block, tauw_error* error);

/* One scan. A set point or process value that is not finite, or beyond 1e150, is no error: it holds the output, sets
 * TAUW_FLAG_BAD_INPUT, and the next good scan takes over without a bump.
 * Since 0.1. One thread at a time per block. Real-time safe. */
TAUW_API int32_t tauw_pid_block_step(tauw_pid_block* block, double setpoint, double process_value, double* output,
                                     tauw_error* error);

/* To manual: the output stays where it is until tauw_pid_block_set_manual_output. To automatic: the next
 * step returns the manual output, then control goes on from there.
 * Since 0.1. One thread at a time per block. Real-time safe. */
TAUW_API int32_t tauw_pid_block_to_manual(tauw_pid_block* block, tauw_error* error);
TAUW_API int32_t tauw_pid_block_to_automatic(tauw_pid_block* block, tauw_error* error);

/* The output in manual, limited to the output range. Errors: NOT_FINITE, leaving everything as it was.
 * Since 0.1. One thread at a time per block. Real-time safe. */
TAUW_API int32_t tauw_pid_block_set_manual_output(tauw_pid_block* block, double output, tauw_error* error);

/* What the last step left: bits of enum tauw_pid_flag, enum tauw_mode, output, integral.
 * Since 0.1. Concurrent calls on the same block are fine while none changes it. Real-time safe. */
TAUW_API int32_t tauw_pid_block_flags(const tauw_pid_block* block, uint32_t* flags, tauw_error* error);
TAUW_API int32_t tauw_pid_block_mode(const tauw_pid_block* block, int32_t* mode, tauw_error* error);
TAUW_API int32_t tauw_pid_block_output(const tauw_pid_block* block, double* output, tauw_error* error);
TAUW_API int32_t tauw_pid_block_integral(const tauw_pid_block* block, double* integral, tauw_error* error);

/* How many doubles a process block needs for its delay line. Errors: OUT_OF_DOMAIN (delay_scans).
 * Since 0.1. Any thread. Never allocates. */
TAUW_API int32_t tauw_delay_line_length(const tauw_process_coefficients* coefficients, size_t* length,
                                        tauw_error* error);

/* Sets up a process at rest in memory[size] and fills delay_line[length]: an output held at rest_output
 * keeps the process value at rest_process_value. Both memories stay the caller's. Errors: NOT_FINITE,
 * OUT_OF_DOMAIN (delay_scans, alignment), BUFFER_TOO_SMALL.
 * Since 0.1. One thread at a time per block. Never allocates. */
TAUW_API int32_t tauw_process_block_init(void* memory, size_t size, const tauw_process_coefficients* coefficients,
                                         double rest_output, double rest_process_value, double* delay_line,
                                         size_t length, tauw_process_block** block, tauw_error* error);

/* Holds `output` for one scan; *process_value is the one at its end. The delay line is the one given to
 * tauw_process_block_init, or its copy. An output that is not finite is taken as the one before.
 * Errors: BUFFER_TOO_SMALL.
 * Since 0.1. One thread at a time per block. Real-time safe. */
TAUW_API int32_t tauw_process_block_step(tauw_process_block* block, double output, double* delay_line, size_t length,
                                         double* process_value, tauw_error* error);

/* The process value now.
 * Since 0.1. Concurrent calls on the same block are fine while none changes it. Real-time safe. */
TAUW_API int32_t tauw_process_block_process_value(const tauw_process_block* block, double* process_value,
                                                  tauw_error* error);

/* Sets up a valve at rest at initial_position (limited to the travel), in the middle of its dead band, or a
 * transmitter at rest at initial_value, in memory[size], which stays the caller's. Errors: NOT_FINITE,
 * OUT_OF_DOMAIN (coefficients, alignment), BUFFER_TOO_SMALL.
 * Since 0.1. One thread at a time per block. Never allocate. */
TAUW_API int32_t tauw_valve_init(void* memory, size_t size, const tauw_valve_coefficients* coefficients,
                                 double initial_position, tauw_valve** valve, tauw_error* error);
TAUW_API int32_t tauw_transmitter_init(void* memory, size_t size, const tauw_transmitter_coefficients* coefficients,
                                       double initial_value, tauw_transmitter** transmitter, tauw_error* error);

/* One scan of a valve; the position is held over it. A demand that is not finite is taken as the one before.
 * Since 0.1. One thread at a time per block. Real-time safe. */
TAUW_API int32_t tauw_valve_step(tauw_valve* valve, double demand, double* position, tauw_error* error);

/* One scan of a transmitter. A process value that is not finite is handed on as it is and not remembered.
 * Since 0.1. One thread at a time per block. Real-time safe. */
TAUW_API int32_t tauw_transmitter_step(tauw_transmitter* transmitter, double process_value, double* measured,
                                       tauw_error* error);

/* The position now, and the measured value that the last step gave.
 * Since 0.1. Concurrent calls on the same block are fine while none changes it. Real-time safe. */
TAUW_API int32_t tauw_valve_position(const tauw_valve* valve, double* position, tauw_error* error);
TAUW_API int32_t tauw_transmitter_measured(const tauw_transmitter* transmitter, double* measured, tauw_error* error);

#ifdef __cplusplus
}
#endif

#endif
