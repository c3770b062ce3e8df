/* Runs the tests of the C interface, and what they share. */
#include <stdlib.h>
#include <string.h>

#include "check.h"

int checks_done = 0;
int checks_failed = 0;
tauw_error error;

tauw_record* made_record(void) {
    enum { n = 240 };
    double time_s[n], output[n], process_value[n];
    /* Oracle: closed form, the sum of the moves' step responses. */
    const double moves[3][2] = {{10.0, 4.0}, {80.0, -7.0}, {160.0, 5.0}};
    for (int i = 0; i < n; ++i) {
        time_s[i] = i;
        output[i] = 50.0;
        process_value[i] = 40.0;
        for (int m = 0; m < 3; ++m) {
            const double since = time_s[i] - moves[m][0];
            if (since >= 0.0) output[i] += moves[m][1];
            if (since > 3.5) process_value[i] += moves[m][1] * 2.0 * (1.0 - exp(-(since - 3.5) / 10.0));
        }
    }
    tauw_range percent;
    tauw_record_columns columns;
    tauw_record* record = NULL;
    tauw_range_defaults(&percent, sizeof percent);
    tauw_record_columns_defaults(&columns, sizeof columns);
    columns.n = n;
    columns.time_s = time_s;
    columns.output = output;
    columns.process_value = process_value;
    columns.output_range = &percent;
    columns.process_value_range = &percent;
    OK(tauw_record_create(&columns, &record, &error));
    return record;
}

void test_core(void) {
    tauw_range range;
    CHECK(tauw_abi_version() == 0);
    CHECK(strcmp(tauw_version(), TAUWRIGHT_EXPECTED_VERSION) == 0);
    CHECK(strcmp(tauw_error_name(TAUW_ERROR_NOT_FINITE), "not_finite") == 0);
    CHECK(strcmp(tauw_error_name(TAUW_OK), "ok") == 0);
    CHECK(strcmp(tauw_error_name(12345), "unknown") == 0);
    CHECK(strlen(tauw_error_meaning(TAUW_ERROR_MISSING_RANGE)) > 20);
    OK(tauw_range_defaults(&range, sizeof range));
    CHECK(range.struct_size == sizeof range && range.low == 0.0 && range.high == 100.0);
    CHECK(strcmp(range.unit, "%") == 0);
    CHECK(error.code == TAUW_OK && error.message[0] == '\0');
}

int main(void) {
    if (tauw_error_defaults(&error, sizeof error) != TAUW_OK) return EXIT_FAILURE;
    test_core();
    test_models();
    test_identify();
    test_control();
    test_blocks();
    test_assess();
    test_field_blocks();
    test_discrete();
    test_margins();
    test_uncertain();
    test_trends();
    test_synthesize();
    test_tune();
    test_audit();
    test_null_pointers();
    test_handles();
    test_bad_input();
    printf("%d checks, %d failed\n", checks_done, checks_failed);
    return checks_failed == 0 && checks_done > 400 ? EXIT_SUCCESS : EXIT_FAILURE;
}
