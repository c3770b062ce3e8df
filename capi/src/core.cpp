#include "tauwright/core.h"

#include <array>
#include <string_view>

#include "structs.hpp"
#include "tauwright/core/version.hpp"

namespace {

struct Code {
    std::int32_t value;
    std::string_view name;
};

// The C enumeration as written out, against the one list of codes.
constexpr std::array codes_in_c = {
    Code{TAUW_OK, "ok"},
    Code{TAUW_ERROR_NOT_FINITE, "not_finite"},
    Code{TAUW_ERROR_OUT_OF_DOMAIN, "out_of_domain"},
    Code{TAUW_ERROR_WRONG_LENGTH, "wrong_length"},
    Code{TAUW_ERROR_CONFLICTING_ARGUMENTS, "conflicting_arguments"},
    Code{TAUW_ERROR_MISSING_ARGUMENT, "missing_argument"},
    Code{TAUW_ERROR_MISSING_RANGE, "missing_range"},
    Code{TAUW_ERROR_UNKNOWN_NAME, "unknown_name"},
    Code{TAUW_ERROR_UNSUPPORTED_FORM, "unsupported_form"},
    Code{TAUW_ERROR_NULL_POINTER, "null_pointer"},
    Code{TAUW_ERROR_WRONG_STRUCT_SIZE, "wrong_struct_size"},
    Code{TAUW_ERROR_WRONG_HANDLE, "wrong_handle"},
    Code{TAUW_ERROR_BUFFER_TOO_SMALL, "buffer_too_small"},
    Code{TAUW_ERROR_FILE_NOT_READABLE, "file_not_readable"},
    Code{TAUW_ERROR_FILE_MALFORMED, "file_malformed"},
    Code{TAUW_ERROR_TIME_NOT_INCREASING, "time_not_increasing"},
    Code{TAUW_ERROR_TIME_ZONE_MISSING, "time_zone_missing"},
    Code{TAUW_ERROR_RECORD_TOO_SHORT, "record_too_short"},
    Code{TAUW_ERROR_NO_USABLE_SAMPLE, "no_usable_sample"},
    Code{TAUW_ERROR_NO_EQUIVALENT, "no_equivalent"},
    Code{TAUW_ERROR_ACTION_WOULD_BE_LOST, "action_would_be_lost"},
    Code{TAUW_ERROR_OUTSIDE_FIELD_LIMITS, "outside_field_limits"},
    Code{TAUW_ERROR_SAFETY_FUNCTION, "safety_function"},
    Code{TAUW_ERROR_SCHEMA_UNSUPPORTED, "schema_unsupported"},
    Code{TAUW_ERROR_OUT_OF_MEMORY, "out_of_memory"},
    Code{TAUW_ERROR_INTERNAL, "internal"},
};

constexpr std::array codes_in_list = {
#define TAUWRIGHT_ERROR(name, value, meaning) Code{value, #name},
#include "tauwright/core/errors.def"
#undef TAUWRIGHT_ERROR
};

constexpr bool same_codes() {
    if (codes_in_c.size() != codes_in_list.size()) return false;
    for (std::size_t i = 0; i < codes_in_c.size(); ++i)
        if (codes_in_c[i].value != codes_in_list[i].value || codes_in_c[i].name != codes_in_list[i].name) return false;
    return true;
}
static_assert(same_codes(), "enum tauw_error_code and core/errors.def differ");

}  // namespace

namespace shell = tauwright::shell;

int32_t tauw_error_defaults(tauw_error* error, uint32_t size) { return shell::fill_defaults(error, size); }

int32_t tauw_range_defaults(tauw_range* range, uint32_t size) { return shell::fill_defaults(range, size); }

// Equal to the library's SOVERSION.
int32_t tauw_abi_version(void) { return 0; }

const char* tauw_version(void) { return tauwright::version; }

const char* tauw_error_name(int32_t code) { return name_of(static_cast<tauwright::error_code>(code)); }

const char* tauw_error_meaning(int32_t code) { return meaning_of(static_cast<tauwright::error_code>(code)); }
