/* Plant records, and process models from them with standard errors and findings. */
#ifndef TAUWRIGHT_IDENTIFY_H
#define TAUWRIGHT_IDENTIFY_H

#include <tauwright/model.h>

#ifdef __cplusplus
extern "C" {
#endif

/* A checked plant record. Immutable; owns its arrays. */
typedef struct tauw_record tauw_record;
/* A fit of a record. Immutable. */
typedef struct tauw_fit tauw_fit;

/* The forms of a fitted process. */
enum tauw_form {
    TAUW_FORM_AUTOMATIC = 0, /* in options: the record decides; in a fit: nothing could be fitted */
    TAUW_FORM_FIRST_ORDER_PLUS_DEAD_TIME = 1,
    TAUW_FORM_INTEGRATING_PLUS_DEAD_TIME = 2
};

/* From the mildest to the one that overrules all others. */
enum tauw_advice {
    TAUW_ADVICE_TUNE = 0,
    TAUW_ADVICE_TUNE_WITH_CARE = 1,
    TAUW_ADVICE_TEST_AGAIN = 2,
    TAUW_ADVICE_REPAIR_MEASUREMENT = 3,
    TAUW_ADVICE_REPAIR_VALVE = 4,
    TAUW_ADVICE_LEAVE_ALONE = 5
};

enum tauw_finding_code {
    TAUW_FINDING_NO_MOVE = 1,
    TAUW_FINDING_BELOW_NOISE = 2,
    TAUW_FINDING_ENDS_EARLY = 3,
    TAUW_FINDING_NOT_STEADY_AT_START = 4,
    TAUW_FINDING_OUTPUT_CLIPPED = 5,
    TAUW_FINDING_BAD_SAMPLES_LEFT_OUT = 6,
    TAUW_FINDING_OUTPUT_MOVED_BY_CONTROLLER = 7,
    TAUW_FINDING_GAIN_DIFFERS = 8,
    TAUW_FINDING_MODEL_DOES_NOT_FIT = 9
};

/* The arrays of a record, all of length n. NULL for an optional one means not known. */
typedef struct tauw_record_columns {
    uint32_t struct_size;
    uint32_t reserved;
    size_t n;
    const double* time_s;        /* time_s[n], strictly increasing, seconds from any origin */
    const double* output;        /* output[n], held from its sample to the next */
    const double* process_value; /* process_value[n] */
    const uint8_t* good;         /* good[n] or NULL; 0 drops the process value, its output is still held */
    const double* setpoint;      /* setpoint[n] or NULL */
    const uint8_t* automatic;    /* automatic[n] or NULL; 1 where the loop was in automatic */
    const tauw_range* output_range;        /* or NULL */
    const tauw_range* process_value_range; /* or NULL */
} tauw_record_columns;

/* How to fit. Fixed values are in the record's units and seconds; fixed_gain belongs to a first
 * order form, fixed_slope to an integrating one. Default: automatic form, no drift, nothing fixed. */
typedef struct tauw_identify_options {
    uint32_t struct_size;
    int32_t form;  /* enum tauw_form */
    int32_t drift; /* 1: fit a straight drift beside the response (curved, for an integrating form) */
    int32_t has_fixed_gain;
    int32_t has_fixed_slope;
    int32_t has_fixed_lag_1;
    int32_t has_fixed_dead_time;
    int32_t has_fixed_offset;
    double fixed_gain;
    double fixed_slope;
    double fixed_lag_1;
    double fixed_dead_time;
    double fixed_offset; /* the process value at rest, at the first output */
} tauw_identify_options;

/* The numbers of a fit: process value = offset + drift + G(s) acting on (output - first output). */
typedef struct tauw_fit_summary {
    uint32_t struct_size;
    int32_t form;      /* enum tauw_form */
    int32_t advice;    /* enum tauw_advice: the gravest of the findings */
    int32_t has_model; /* 0 where nothing could be fitted */
    double gain;       /* gain, or slope per second, in process-value units per output unit */
    double dead_time;  /* s */
    double first_output; /* the record's first output, where the fit starts at rest ... */
    double offset;       /* ... and the process value at rest there */
    double drift_per_s; /* for an integrating form: its slope at the first output */
    double drift_per_s2;
    double sum_of_squares; /* of the residuals at the samples used */
    double residual_rms;   /* root of sum_of_squares / samples_used */
    double noise;          /* root of sum_of_squares / degrees of freedom */
    double r_squared;
    double residual_correlation; /* of neighboring residuals; 0 where they are independent */
    double response_to_noise;    /* largest excursion of the response in units of noise */
    double tested_output_low, tested_output_high; /* of the record */
    double tested_process_value_low, tested_process_value_high; /* among the samples used */
    size_t samples_used;
    size_t lag_count;
    size_t parameter_count; /* of the covariance */
    size_t move_count;
    size_t finding_count;
} tauw_fit_summary;

/* The response to one output move, fitted with the fit's lag and dead time. */
typedef struct tauw_move {
    uint32_t struct_size;
    uint32_t reserved;
    size_t sample; /* first sample of the new output */
    double size;   /* in output units */
    double gain;   /* gain or slope from this move alone */
    double standard_error;
} tauw_move;

/* One thing found in a record; its message is a text of its own. */
typedef struct tauw_finding {
    uint32_t struct_size;
    int32_t code;   /* enum tauw_finding_code */
    int32_t advice; /* enum tauw_advice */
    uint32_t reserved;
    double value; /* the number that shows it; the message says its meaning */
    size_t first; /* samples first .. last, both included, show it */
    size_t last;
} tauw_finding;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_record_columns_defaults(tauw_record_columns* columns, uint32_t size);
TAUW_API int32_t tauw_identify_options_defaults(tauw_identify_options* options, uint32_t size);
TAUW_API int32_t tauw_fit_summary_defaults(tauw_fit_summary* summary, uint32_t size);
TAUW_API int32_t tauw_move_defaults(tauw_move* move, uint32_t size);
TAUW_API int32_t tauw_finding_defaults(tauw_finding* finding, uint32_t size);

/* The words, for example "no_move"; "unknown" for another number. Static memory.
 * Since 0.1. Any thread. Never allocate. */
TAUW_API const char* tauw_form_name(int32_t form);
TAUW_API const char* tauw_advice_name(int32_t advice);
TAUW_API const char* tauw_finding_name(int32_t code);

/* Reads a CSV file; `path` is UTF-8 and ends with a zero. A header row names the columns in any order
 * and case: time_s (seconds) or time (RFC 3339 with an offset), output, process_value; optional quality
 * (good or bad), setpoint, mode (manual or automatic). Comment lines such as "# output_range: 0 100 %"
 * and "# process_value_range: 0 120 degC" give the ranges. Errors, with the line: FILE_NOT_READABLE,
 * FILE_MALFORMED, TIME_ZONE_MISSING, TIME_NOT_INCREASING; RECORD_TOO_SHORT, OUT_OF_DOMAIN (a range).
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_read_record(const char* path, tauw_record** record, tauw_error* error);

/* The same from text[length] in memory, which need not end with a zero; `name` stands for the file in
 * messages, NULL for "record". Errors as tauw_read_record.
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_read_record_text(const char* text, size_t length, const char* name, tauw_record** record,
                                       tauw_error* error);

/* A record from arrays, which are copied. Errors: NOT_FINITE (a process value may be anything where good
 * is 0), TIME_NOT_INCREASING with the index, RECORD_TOO_SHORT for n = 0, OUT_OF_DOMAIN (a range).
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_record_create(const tauw_record_columns* columns, tauw_record** record, tauw_error* error);

/* The arrays and ranges. They belong to the record and are good until it is destroyed. `good` is always
 * there, the other optional ones where known.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_record_view(const tauw_record* record, tauw_record_columns* columns, tauw_error* error);

/* Where the record was read from (empty for arrays), when its first sample was taken as written in the
 * file (empty where not), and SHA-256 in hexadecimal of the file's bytes or of the arrays, to
 * text[capacity]; see core.h for `needed`. Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocate memory that they free again. */
TAUW_API int32_t tauw_record_source(const tauw_record* record, char* text, size_t capacity, size_t* needed,
                                    tauw_error* error);
TAUW_API int32_t tauw_record_first_stamp(const tauw_record* record, char* text, size_t capacity, size_t* needed,
                                         tauw_error* error);
TAUW_API int32_t tauw_record_sha256(const tauw_record* record, char* text, size_t capacity, size_t* needed,
                                    tauw_error* error);

/* Releases the record and makes *record NULL; NULL is fine. Returns TAUW_OK or TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_record_destroy(tauw_record** record);

/* Fits a process to a record; `options` NULL means the defaults. Weak or unusable records are findings,
 * not errors. Errors: NO_USABLE_SAMPLE, RECORD_TOO_SHORT, CONFLICTING_ARGUMENTS, and for fixed values
 * NOT_FINITE and OUT_OF_DOMAIN.
 * Since 0.1. Concurrent calls on the same record are fine. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_identify(const tauw_record* record, const tauw_identify_options* options, tauw_fit** fit,
                               tauw_error* error);

/* The numbers of a fit, and how many lags, parameters, moves and findings it has.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_fit_summarize(const tauw_fit* fit, tauw_fit_summary* summary, tauw_error* error);

/* The fitted process in the record's units, a handle of its own; *model is NULL, with TAUW_OK, where
 * nothing could be fitted.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocates; the caller destroys the model. */
TAUW_API int32_t tauw_fit_model(const tauw_fit* fit, tauw_model** model, tauw_error* error);

/* The lags in s to lags[capacity]; see core.h for `needed`. Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_fit_lags(const tauw_fit* fit, double* lags, size_t capacity, size_t* needed, tauw_error* error);

/* One standard deviation of the parameter `name`: "gain" (or "slope"), "lag_1", "dead_time", "offset",
 * "drift", "curvature", as tauw_fit_parameter_name lists them; in the parameter's unit.
 * Errors: UNKNOWN_NAME (also for a parameter that was fixed).
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_fit_standard_error(const tauw_fit* fit, const char* name, double* standard_error,
                                         tauw_error* error);

/* The name of the covariance's parameter `index`, 0 to parameter_count - 1, to text[capacity]; see core.h
 * for `needed`. Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_fit_parameter_name(const tauw_fit* fit, size_t index, char* text, size_t capacity,
                                         size_t* needed, tauw_error* error);

/* The covariance row by row to covariance[capacity], parameter_count^2 numbers; see core.h for `needed`.
 * Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_fit_covariance(const tauw_fit* fit, double* covariance, size_t capacity, size_t* needed,
                                     tauw_error* error);

/* Move `index`, 0 to move_count - 1. Errors: OUT_OF_DOMAIN (index).
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_fit_move(const tauw_fit* fit, size_t index, tauw_move* move, tauw_error* error);

/* Finding `index`, 0 to finding_count - 1, and its message: what was found and what to do next.
 * Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_fit_finding(const tauw_fit* fit, size_t index, tauw_finding* finding, tauw_error* error);
TAUW_API int32_t tauw_fit_finding_message(const tauw_fit* fit, size_t index, char* text, size_t capacity,
                                          size_t* needed, tauw_error* error);

/* Why this form was chosen, in words, to text[capacity]; see core.h for `needed`.
 * Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_fit_form_reason(const tauw_fit* fit, char* text, size_t capacity, size_t* needed,
                                      tauw_error* error);

/* The fit's process value at every sample of `record`, bad ones included, to process_value[capacity];
 * no numbers where nothing was fitted. See core.h for `needed`. Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handles are fine. Allocates memory that it frees again. */
TAUW_API int32_t tauw_fitted_response(const tauw_fit* fit, const tauw_record* record, double* process_value,
                                      size_t capacity, size_t* needed, tauw_error* error);

/* Releases the fit and makes *fit NULL; NULL is fine. Returns TAUW_OK or TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_fit_destroy(tauw_fit** fit);

#ifdef __cplusplus
}
#endif

#endif
