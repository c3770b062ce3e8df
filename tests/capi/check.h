/* The smallest test frame: counts checks, prints what failed, main returns the failures. */
#ifndef TAUWRIGHT_TESTS_CAPI_CHECK_H
#define TAUWRIGHT_TESTS_CAPI_CHECK_H

#include <math.h>
#include <stdint.h>
#include <stdio.h>

#include <tauwright/tauwright.h>

extern int checks_done;
extern int checks_failed;

#define CHECK(condition)                                                        \
    do {                                                                        \
        ++checks_done;                                                          \
        if (!(condition)) {                                                     \
            ++checks_failed;                                                    \
            printf("%s:%d: not true: %s\n", __FILE__, __LINE__, #condition);    \
        }                                                                       \
    } while (0)

/* Compares the status of a call that reports into `error`. */
#define CHECK_STATUS(call, expected)                                                                          \
    do {                                                                                                      \
        const int32_t status_ = (call);                                                                       \
        ++checks_done;                                                                                        \
        if (status_ != (expected)) {                                                                          \
            ++checks_failed;                                                                                  \
            printf("%s:%d: %s is %s, not %s: %s\n", __FILE__, __LINE__, #call, tauw_error_name(status_),      \
                   tauw_error_name(expected), error.message);                                                 \
        }                                                                                                     \
    } while (0)

#define OK(call) CHECK_STATUS(call, TAUW_OK)

/* Relative to `expected`; infinities must be equal. */
#define CHECK_NEAR(value, expected, relative)                                                                  \
    do {                                                                                                       \
        const double value_ = (value), expected_ = (expected);                                                 \
        ++checks_done;                                                                                         \
        if (!(value_ == expected_ || fabs(value_ - expected_) <= (relative) * fabs(expected_))) {              \
            ++checks_failed;                                                                                   \
            printf("%s:%d: %s is %.17g, not %.17g\n", __FILE__, __LINE__, #value, value_, expected_);          \
        }                                                                                                      \
    } while (0)

extern tauw_error error;

/* A noiseless record of 2 exp(-3.5 s)/(10 s + 1) with moves at samples 10, 80 and 160, in % of both
 * spans; the caller destroys it. */
tauw_record* made_record(void);

void test_core(void);
void test_models(void);
void test_identify(void);
void test_control(void);
void test_blocks(void);
void test_assess(void);
void test_field_blocks(void);
void test_discrete(void);
void test_margins(void);
void test_uncertain(void);
void test_trends(void);
void test_synthesize(void);
void test_tune(void);
void test_audit(void);
void test_null_pointers(void);
void test_handles(void);
void test_bad_input(void);

#endif
