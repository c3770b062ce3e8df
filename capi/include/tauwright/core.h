/* Status codes, the error struct, instrument ranges, versions: what every other header needs.
 *
 * How this interface works
 * - Every call that can fail returns an int32_t status, TAUW_OK (0) or one of enum tauw_error_code.
 *   The last parameter `error` may be NULL; otherwise it gets the same code and a message that names
 *   the argument, the value and the remedy. On a failure no result is written, and a handle asked
 *   for is NULL; nothing has to be released.
 * - Besides the errors listed at each function, any call may return TAUW_ERROR_NULL_POINTER,
 *   TAUW_ERROR_WRONG_STRUCT_SIZE, TAUW_ERROR_WRONG_HANDLE, TAUW_ERROR_UNKNOWN_NAME (an enumeration or
 *   a 0/1 member holds another number), TAUW_ERROR_OUT_OF_MEMORY and TAUW_ERROR_INTERNAL.
 * - An `error` whose struct_size is wrong is refused before anything is done: all memory stays as it was.
 * - Structs begin with struct_size. Call tauw_<x>_defaults(&x, sizeof x) first, for inputs and for
 *   results alike; a size this library does not know is refused. `has_...` members are 0 or 1 and say
 *   whether the member of that name is given; members called `reserved` are 0.
 * - Handles (tauw_model* and its like) are opaque. Each belongs to the caller and is released by its
 *   tauw_<x>_destroy(&handle), which makes it NULL; NULL is fine. Handles never refer to each other:
 *   any order of release is right. A handle of another kind is refused; one that was released and
 *   kept in a second variable must not be used.
 * - Texts are UTF-8. Functions that return text or an array take `capacity` and `needed`: a NULL
 *   buffer with capacity 0 asks for the size only; a buffer that is too small is left as it was and
 *   gives TAUW_ERROR_BUFFER_TOO_SMALL. `needed` may be NULL if there is a buffer. It counts bytes
 *   with the terminating zero for texts, and elements for arrays.
 * - A pointer that a result struct hands out points into the handle it was asked of and is good until
 *   that handle is destroyed.
 * - Any number of threads may call at the same time, also with the same handle where it is a pointer
 *   to const. Nothing is printed, no thread started, no global state kept.
 */
#ifndef TAUWRIGHT_CORE_H
#define TAUWRIGHT_CORE_H

#include <stddef.h>
#include <stdint.h>

#if defined(_WIN32) && defined(TAUW_BUILDING_LIBRARY)
#define TAUW_API __declspec(dllexport)
#elif defined(_WIN32)
#define TAUW_API __declspec(dllimport)
#elif defined(__GNUC__)
#define TAUW_API __attribute__((visibility("default")))
#else
#define TAUW_API
#endif

#ifdef __cplusplus
extern "C" {
#endif

/* Values never change; new codes take free numbers. */
enum tauw_error_code {
    TAUW_OK = 0,
    TAUW_ERROR_NOT_FINITE = 10,
    TAUW_ERROR_OUT_OF_DOMAIN = 11,
    TAUW_ERROR_WRONG_LENGTH = 12,
    TAUW_ERROR_CONFLICTING_ARGUMENTS = 13,
    TAUW_ERROR_MISSING_ARGUMENT = 14,
    TAUW_ERROR_MISSING_RANGE = 15,
    TAUW_ERROR_UNKNOWN_NAME = 16,
    TAUW_ERROR_UNSUPPORTED_FORM = 17,
    TAUW_ERROR_NULL_POINTER = 20,
    TAUW_ERROR_WRONG_STRUCT_SIZE = 21,
    TAUW_ERROR_WRONG_HANDLE = 22,
    TAUW_ERROR_BUFFER_TOO_SMALL = 23,
    TAUW_ERROR_FILE_NOT_READABLE = 30,
    TAUW_ERROR_FILE_MALFORMED = 31,
    TAUW_ERROR_TIME_NOT_INCREASING = 32,
    TAUW_ERROR_TIME_ZONE_MISSING = 33,
    TAUW_ERROR_RECORD_TOO_SHORT = 34,
    TAUW_ERROR_NO_USABLE_SAMPLE = 35,
    TAUW_ERROR_NO_EQUIVALENT = 40,
    TAUW_ERROR_ACTION_WOULD_BE_LOST = 41,
    TAUW_ERROR_OUTSIDE_FIELD_LIMITS = 42,
    TAUW_ERROR_SAFETY_FUNCTION = 50,
    TAUW_ERROR_SCHEMA_UNSUPPORTED = 70,
    TAUW_ERROR_OUT_OF_MEMORY = 90,
    TAUW_ERROR_INTERNAL = 99
};

/* What went wrong. `message` ends with a zero; one that does not fit is cut between characters. */
typedef struct tauw_error {
    uint32_t struct_size;
    int32_t code; /* enum tauw_error_code */
    char message[512];
} tauw_error;

/* What 0 % and 100 % mean: low < high in `unit` (UTF-8, ends with a zero). */
typedef struct tauw_range {
    uint32_t struct_size;
    uint32_t reserved;
    double low;    /* default 0 */
    double high;   /* default 100 */
    char unit[64]; /* default "%"; a longer unit in a file is cut between characters when handed out */
} tauw_range;

/* Fill a struct with its defaults; `size` is sizeof of it. Return TAUW_OK,
 * TAUW_ERROR_NULL_POINTER or TAUW_ERROR_WRONG_STRUCT_SIZE, then leaving the memory as it was.
 * Since 0.1. Any thread. Never allocates. */
TAUW_API int32_t tauw_error_defaults(tauw_error* error, uint32_t size);
TAUW_API int32_t tauw_range_defaults(tauw_range* range, uint32_t size);

/* The version of the binary interface: programs built for one number run with every library that
 * returns the same. Since 0.1. Any thread. Never allocates. */
TAUW_API int32_t tauw_abi_version(void);

/* The library's version, "major.minor.patch". Static memory. Since 0.1. Any thread. Never allocates. */
TAUW_API const char* tauw_version(void);

/* The code's word ("not_finite"; "unknown" for a number that is no code), and its meaning in one
 * sentence. Static memory. Since 0.1. Any thread. Never allocate. */
TAUW_API const char* tauw_error_name(int32_t code);
TAUW_API const char* tauw_error_meaning(int32_t code);

#ifdef __cplusplus
}
#endif

#endif
