/* The whole street in one call: a record in, the tuning sheet out. */
#ifndef TAUWRIGHT_TUNE_H
#define TAUWRIGHT_TUNE_H

#include <tauwright/assess.h>
#include <tauwright/identify.h>
#include <tauwright/synthesize.h>

#ifdef __cplusplus
extern "C" {
#endif

/* The record of a tuning. Immutable. */
typedef struct tauw_sheet tauw_sheet;
/* What differs between two sheets. Immutable. */
typedef struct tauw_differences tauw_differences;

/* What loops in service really do, beside what is proposed: one row a loop. Immutable. */
typedef struct tauw_audit tauw_audit;

/* What to tune for. Everything is optional. Structs and texts pointed to are the caller's and used
 * during the call only. */
typedef struct tauw_tuning_request {
    uint32_t struct_size;
    int32_t has_time_constant;        /* 0: chosen from the model */
    double time_constant;             /* closed-loop time constant, > 0 s */
    const tauw_controller_form* form; /* the controller at hand, or NULL */
    const tauw_duty* duty;            /* scan time, steps for the trends; limits in percent; or NULL */
    const tauw_entered* as_found;     /* settings in service, in `form`, or NULL */
    const tauw_identify_options* identify; /* or NULL */
    int32_t safety_function;               /* 1 is refused */
    uint32_t reserved;
    const char* accept_weak_margins_by; /* who accepts settings with weak margins, or NULL */
    const char* loop_name;              /* or NULL */
} tauw_tuning_request;

/* The controllers on a sheet. */
enum tauw_sheet_controller { TAUW_SHEET_AS_FOUND = 0, TAUW_SHEET_PROPOSED = 1 };

/* Single texts on a sheet. */
enum tauw_sheet_item {
    TAUW_SHEET_LIBRARY_VERSION = 0,
    TAUW_SHEET_LOOP_NAME = 1,
    TAUW_SHEET_SOURCE = 2,      /* file, or empty for arrays */
    TAUW_SHEET_FIRST_STAMP = 3, /* of the record, as written */
    TAUW_SHEET_INPUT_SHA256 = 4,
    TAUW_SHEET_GAIN_UNIT = 5, /* of gains in settings: "%/%", or the record's own units */
    TAUW_SHEET_SPEED_REASON = 6,
    TAUW_SHEET_WEAK_MARGINS_ACCEPTED_BY = 7
};

/* What is on a sheet. */
typedef struct tauw_sheet_summary {
    uint32_t struct_size;
    int32_t advice;    /* enum tauw_advice */
    int32_t has_model; /* 0 where nothing could be fitted */
    int32_t has_speed; /* 1: the four times below are given */
    int32_t has_as_found;
    int32_t has_as_found_entered;
    int32_t has_as_found_figures;
    int32_t has_proposed; /* 0 when settings are withheld */
    int32_t has_proposed_entered;
    int32_t has_proposed_figures;
    double time_constant;
    double effective_dead_time; /* dead time + half a scan + measurement filter */
    double half_scan;
    double measurement_filter_time;
    size_t finding_count;
    size_t obstacle_count;
    size_t withheld_count;
    size_t caution_count;
} tauw_sheet_summary;

/* One loop to audit. Structs, handles and texts pointed to are the caller's; they are read once and not kept. */
typedef struct tauw_audit_loop {
    uint32_t struct_size;
    int32_t process_gain_unit;         /* enum tauw_gain_unit; engineering needs both ranges in form */
    const char* name;                  /* or NULL */
    const tauw_model* process;         /* needed */
    const tauw_pid_settings* settings; /* in service, in percent of span and seconds; NULL with entered */
    const tauw_entered* entered;       /* in service, as it stands in form; NULL with settings */
    const tauw_controller_form* form;  /* the controller, or NULL */
    const tauw_pid_settings* proposal; /* or NULL: one is made */
    const tauw_duty* duty;             /* scan time for margins and trends, steps for figures; or NULL */
    double horizon;                    /* of both trends in s, > 0 */
    int32_t has_horizon;               /* 0: chosen from process and duty */
    uint32_t reserved;
} tauw_audit_loop;

/* Fills `loop`, which holds the defaults. What it points to must live until the next call or the end of the
 * audit. Returns 1 for a loop, 0 for the end. */
typedef int32_t (*tauw_audit_source)(tauw_audit_loop* loop, void* context);

/* Takes one row: row 0 of `audit`, which lives during the call only. Returns 1 to go on, 0 to cancel. */
typedef int32_t (*tauw_audit_sink)(const tauw_audit* audit, void* context);

/* Takes the number of loops done. Returns 1 to go on, 0 to begin no further loop. */
typedef int32_t (*tauw_audit_progress)(size_t done, void* context);

/* How to audit many loops. Callbacks run on the calling thread only. */
typedef struct tauw_audit_options {
    uint32_t struct_size;
    uint32_t threads;             /* 1 to 1024, default 1; those started end before the call returns */
    tauw_audit_progress progress; /* or NULL */
    void* context;                /* handed to source, sink and progress */
} tauw_audit_options;

/* What a row comes to. */
enum tauw_audit_outcome {
    TAUW_AUDIT_FAILED = 0,
    TAUW_AUDIT_UNSTABLE_IN_SERVICE = 1, /* on this model, or marginal */
    TAUW_AUDIT_WEAK_IN_SERVICE = 2,     /* Ms above 2, gain margin below 1.7, or phase margin below 30 degrees */
    TAUW_AUDIT_PROPOSAL_BETTER = 3,     /* a figure by more than 10 %, none worse */
    TAUW_AUDIT_NO_CASE = 4,             /* no figure differs by more than 10 % */
    TAUW_AUDIT_TRADE_OFF = 5,           /* some figures are better, some worse */
    TAUW_AUDIT_PROPOSAL_WORSE = 6,
    TAUW_AUDIT_NO_PROPOSAL = 7,  /* none was given and none could be made */
    TAUW_AUDIT_UNDETERMINED = 8  /* the stability of a side could not be decided */
};

/* The sides of a row. */
enum tauw_audit_side { TAUW_AUDIT_IN_SERVICE = 0, TAUW_AUDIT_PROPOSAL = 1 };

/* The texts of a row. */
enum tauw_audit_item {
    TAUW_AUDIT_NAME = 0,
    TAUW_AUDIT_REASON = 1, /* one line: the main point in words and numbers */
    TAUW_AUDIT_ERROR = 2,  /* what failed and the remedy; empty when nothing did */
    TAUW_AUDIT_TEXT = 3    /* both sides beside each other, 78 columns */
};

/* What a row holds. */
typedef struct tauw_audit_row {
    uint32_t struct_size;
    int32_t outcome; /* enum tauw_audit_outcome */
    int32_t code;    /* enum tauw_error_code: of the first thing that failed for this loop */
    int32_t change_worthwhile;
    int32_t proposal_made; /* here, because none was given */
    int32_t has_in_service;
    int32_t has_in_service_entered;
    int32_t has_in_service_figures;
    int32_t has_proposal;
    int32_t has_proposal_entered;
    int32_t has_proposal_figures;
    uint32_t reserved;
    double horizon; /* of the trends in s; 0 without figures */
} tauw_audit_row;

/* Counts over the rows delivered. */
typedef struct tauw_audit_summary {
    uint32_t struct_size;
    int32_t cancelled;
    size_t rows;
    size_t failed; /* rows with an error, whatever else they hold */
    size_t unstable_in_service;
    size_t weak_in_service;
    size_t changes_worthwhile;
} tauw_audit_summary;

/* See tauw_error_defaults. Since 0.1. Any thread. Never allocate. */
TAUW_API int32_t tauw_tuning_request_defaults(tauw_tuning_request* request, uint32_t size);
TAUW_API int32_t tauw_sheet_summary_defaults(tauw_sheet_summary* summary, uint32_t size);
TAUW_API int32_t tauw_audit_loop_defaults(tauw_audit_loop* loop, uint32_t size);
TAUW_API int32_t tauw_audit_options_defaults(tauw_audit_options* options, uint32_t size);
TAUW_API int32_t tauw_audit_row_defaults(tauw_audit_row* row, uint32_t size);
TAUW_API int32_t tauw_audit_summary_defaults(tauw_audit_summary* summary, uint32_t size);

/* Record in, sheet out; `request` NULL means nothing asked. Settings may be withheld, which is no error:
 * the sheet says why. Errors: SAFETY_FUNCTION, MISSING_RANGE (a form in percent or engineering units without
 * both ranges), CONFLICTING_ARGUMENTS, MISSING_ARGUMENT (as-found numbers without a form), and what
 * tauw_identify and tauw_settings_from return.
 * Since 0.1. Concurrent calls on the same record are fine. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_tune(const tauw_record* record, const tauw_tuning_request* request, tauw_sheet** sheet,
                           tauw_error* error);

/* What is on the sheet.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_sheet_summarize(const tauw_sheet* sheet, tauw_sheet_summary* summary, tauw_error* error);

/* Settings, numbers as entered, margins (with scan time and every filter) and figures of the trend of one
 * `controller` (enum tauw_sheet_controller). Gains in settings are in the sheet's gain unit.
 * Errors: MISSING_ARGUMENT where the sheet has none, as the summary says.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_sheet_settings(const tauw_sheet* sheet, int32_t controller, tauw_pid_settings* settings,
                                     tauw_error* error);
TAUW_API int32_t tauw_sheet_entered(const tauw_sheet* sheet, int32_t controller, tauw_entered* entered,
                                    tauw_error* error);
TAUW_API int32_t tauw_sheet_margins(const tauw_sheet* sheet, int32_t controller, tauw_robustness* margins,
                                    tauw_error* error);
TAUW_API int32_t tauw_sheet_figures(const tauw_sheet* sheet, int32_t controller, tauw_figures* figures,
                                    tauw_error* error);
/* The worst case over the fit's joint 95 % confidence region, and what the duty's valve makes of the loop. */
TAUW_API int32_t tauw_sheet_worst_case(const tauw_sheet* sheet, int32_t controller, tauw_worst_case* worst,
                                       tauw_error* error);
TAUW_API int32_t tauw_sheet_valve_cycle(const tauw_sheet* sheet, int32_t controller, tauw_valve_cycle* cycle,
                                        tauw_error* error);

/* The fit in the record's units, and the process in the sheet's gain unit, each a handle of its own;
 * *model is NULL, with TAUW_OK, where nothing could be fitted.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocate; the caller destroys the results. */
TAUW_API int32_t tauw_sheet_fit(const tauw_sheet* sheet, tauw_fit** fit, tauw_error* error);
TAUW_API int32_t tauw_sheet_model(const tauw_sheet* sheet, tauw_model** model, tauw_error* error);

/* Finding `index`, 0 to finding_count - 1, and its message to text[capacity]; see core.h for `needed`.
 * Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_sheet_finding(const tauw_sheet* sheet, size_t index, tauw_finding* finding, tauw_error* error);
TAUW_API int32_t tauw_sheet_finding_message(const tauw_sheet* sheet, size_t index, char* text, size_t capacity,
                                            size_t* needed, tauw_error* error);

/* Obstacle `index`, 0 to obstacle_count - 1, its message and its repair to text[capacity]; see core.h for
 * `needed`. Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_sheet_obstacle(const tauw_sheet* sheet, size_t index, tauw_obstacle* obstacle,
                                     tauw_error* error);
TAUW_API int32_t tauw_sheet_obstacle_message(const tauw_sheet* sheet, size_t index, char* text, size_t capacity,
                                             size_t* needed, tauw_error* error);
TAUW_API int32_t tauw_sheet_obstacle_repair(const tauw_sheet* sheet, size_t index, char* text, size_t capacity,
                                            size_t* needed, tauw_error* error);

/* Why settings are withheld (index 0 to withheld_count - 1) and what to mind (0 to caution_count - 1), to
 * text[capacity]; see core.h for `needed`. Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_sheet_withheld(const tauw_sheet* sheet, size_t index, char* text, size_t capacity,
                                     size_t* needed, tauw_error* error);
TAUW_API int32_t tauw_sheet_caution(const tauw_sheet* sheet, size_t index, char* text, size_t capacity,
                                    size_t* needed, tauw_error* error);

/* One text of the sheet (enum tauw_sheet_item) to text[capacity]; empty where there is none. See core.h for
 * `needed`. Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_sheet_item(const tauw_sheet* sheet, int32_t item, char* text, size_t capacity, size_t* needed,
                                 tauw_error* error);

/* The whole sheet as plain text of 78 columns, and as JSON (RFC 8259, schema "tauwright-tuning-sheet"
 * version 1), to text[capacity]; see core.h for `needed`. Errors: BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocate memory that they free again. */
TAUW_API int32_t tauw_sheet_text(const tauw_sheet* sheet, char* text, size_t capacity, size_t* needed,
                                 tauw_error* error);
TAUW_API int32_t tauw_sheet_json(const tauw_sheet* sheet, char* text, size_t capacity, size_t* needed,
                                 tauw_error* error);

/* Reads json[length] as tauw_sheet_json wrote it; no terminating zero is needed. Errors, with the place:
 * FILE_MALFORMED, SCHEMA_UNSUPPORTED.
 * Since 0.1. Any thread. Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_sheet_from_json(const char* json, size_t length, tauw_sheet** sheet, tauw_error* error);

/* Releases the sheet and makes *sheet NULL; NULL is fine. Returns TAUW_OK or TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_sheet_destroy(tauw_sheet** sheet);

/* Everything that differs between two sheets, in the order of the document.
 * Since 0.1. Concurrent calls on the same handles are fine. Allocates; the caller destroys the result. */
TAUW_API int32_t tauw_differences_between(const tauw_sheet* earlier, const tauw_sheet* later,
                                          tauw_differences** differences, tauw_error* error);

/* How many there are.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocates but for an error. */
TAUW_API int32_t tauw_differences_count(const tauw_differences* differences, size_t* count, tauw_error* error);

/* Of difference `index`, 0 to count - 1: its JSON pointer, and the earlier and the later value as JSON text
 * ("" for absent), to text[capacity]; see core.h for `needed`. Errors: OUT_OF_DOMAIN (index),
 * BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_differences_path(const tauw_differences* differences, size_t index, char* text, size_t capacity,
                                       size_t* needed, tauw_error* error);
TAUW_API int32_t tauw_differences_earlier(const tauw_differences* differences, size_t index, char* text,
                                          size_t capacity, size_t* needed, tauw_error* error);
TAUW_API int32_t tauw_differences_later(const tauw_differences* differences, size_t index, char* text, size_t capacity,
                                        size_t* needed, tauw_error* error);

/* Releases the differences and makes *differences NULL; NULL is fine. Returns TAUW_OK or
 * TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_differences_destroy(tauw_differences** differences);

/* The outcome's word ("no_case"; "unknown" for a number that is none). Static memory.
 * Since 0.1. Any thread. Never allocates. */
TAUW_API const char* tauw_audit_outcome_name(int32_t outcome);

/* Audits loops[count], in order; `options` NULL means one thread and no progress. What is wrong with a loop's
 * numbers is in its row and no error of the call. Equal rows for any number of threads. Cancelled, the
 * audit has fewer rows than loops. Errors, before any work: WRONG_STRUCT_SIZE, WRONG_HANDLE, UNKNOWN_NAME (a
 * flag or an enumeration), OUT_OF_DOMAIN (threads).
 * Since 0.1. Concurrent calls on the same handles are fine. Starts threads where asked for more than one.
 * Allocates the handle; the caller destroys it. */
TAUW_API int32_t tauw_audit_loops(const tauw_audit_loop* loops, size_t count, const tauw_audit_options* options,
                                  tauw_audit** audit, tauw_error* error);

/* Audits a stream in memory for at most 64 loops a thread: `source` hands over the loops, `sink` takes the rows in
 * the same order; both must be given. `summary` may be NULL. Errors as above, of a loop when it is handed over:
 * that ends the stream, and rows not yet delivered are lost.
 * Since 0.1. Concurrent calls are fine. Starts threads where asked for more than one. Allocates memory that
 * it frees again. */
TAUW_API int32_t tauw_audit_stream(tauw_audit_source source, tauw_audit_sink sink, const tauw_audit_options* options,
                                   tauw_audit_summary* summary, tauw_error* error);

/* The counts of an audit, and what its row `index`, 0 to rows - 1, holds. Errors: OUT_OF_DOMAIN (index).
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_audit_summarize(const tauw_audit* audit, tauw_audit_summary* summary, tauw_error* error);
TAUW_API int32_t tauw_audit_row_at(const tauw_audit* audit, size_t index, tauw_audit_row* row, tauw_error* error);

/* Settings, numbers as entered in the loop's form, margins and figures of one `side` (enum tauw_audit_side) of
 * row `index`. Errors: OUT_OF_DOMAIN (index), MISSING_ARGUMENT where the row has none, as tauw_audit_row says.
 * Since 0.1. Concurrent calls on the same handle are fine. Never allocate but for an error. */
TAUW_API int32_t tauw_audit_settings(const tauw_audit* audit, size_t index, int32_t side, tauw_pid_settings* settings,
                                     tauw_error* error);
TAUW_API int32_t tauw_audit_entered(const tauw_audit* audit, size_t index, int32_t side, tauw_entered* entered,
                                    tauw_error* error);
TAUW_API int32_t tauw_audit_margins(const tauw_audit* audit, size_t index, int32_t side, tauw_robustness* margins,
                                    tauw_error* error);
TAUW_API int32_t tauw_audit_figures(const tauw_audit* audit, size_t index, int32_t side, tauw_figures* figures,
                                    tauw_error* error);

/* One text (enum tauw_audit_item) of row `index`, and the table of the whole audit, 78 columns, to
 * text[capacity]; see core.h for `needed`. Errors: OUT_OF_DOMAIN (index), BUFFER_TOO_SMALL.
 * Since 0.1. Concurrent calls on the same handle are fine. Allocate memory that they free again. */
TAUW_API int32_t tauw_audit_item(const tauw_audit* audit, size_t index, int32_t item, char* text, size_t capacity,
                                 size_t* needed, tauw_error* error);
TAUW_API int32_t tauw_audit_text(const tauw_audit* audit, char* text, size_t capacity, size_t* needed,
                                 tauw_error* error);

/* Releases the audit and makes *audit NULL; NULL is fine. Returns TAUW_OK or TAUW_ERROR_WRONG_HANDLE.
 * Since 0.1. No other thread may be using the handle. Frees. */
TAUW_API int32_t tauw_audit_destroy(tauw_audit** audit);

#ifdef __cplusplus
}
#endif

#endif
