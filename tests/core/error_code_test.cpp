#include <set>
#include <string>

#include "core/oracle_tools.hpp"
#include "tauwright/core/error_code.hpp"

using namespace tauwright;

namespace {

struct Pinned {
    const char* name;
    int value;
};

// The numbers as first published. A line may be added; none may change.
constexpr Pinned pinned[] = {
    {"ok", 0},
    {"not_finite", 10},
    {"out_of_domain", 11},
    {"wrong_length", 12},
    {"conflicting_arguments", 13},
    {"missing_argument", 14},
    {"missing_range", 15},
    {"unknown_name", 16},
    {"unsupported_form", 17},
    {"null_pointer", 20},
    {"wrong_struct_size", 21},
    {"wrong_handle", 22},
    {"buffer_too_small", 23},
    {"file_not_readable", 30},
    {"file_malformed", 31},
    {"time_not_increasing", 32},
    {"time_zone_missing", 33},
    {"record_too_short", 34},
    {"no_usable_sample", 35},
    {"no_equivalent", 40},
    {"action_would_be_lost", 41},
    {"outside_field_limits", 42},
    {"safety_function", 50},
    {"schema_unsupported", 70},
    {"out_of_memory", 90},
    {"internal", 99},
};

constexpr Pinned listed[] = {
#define TAUWRIGHT_ERROR(name, value, meaning) {#name, value},
#include "tauwright/core/errors.def"
#undef TAUWRIGHT_ERROR
};

}  // namespace

TEST_CASE("error codes keep their names and numbers", "[regression]") {
    for (const auto& code : pinned) {
        INFO(code.name);
        CHECK(std::string(name_of(static_cast<error_code>(code.value))) == code.name);
    }
    CHECK(std::size(listed) == std::size(pinned));
}

TEST_CASE("error codes are distinct, have meanings, and fit the C enumeration", "[invariant]") {
    std::set<int> values;
    std::set<std::string> names, meanings;
    for (const auto& code : listed) {
        values.insert(code.value);
        names.insert(code.name);
        const std::string meaning = meaning_of(static_cast<error_code>(code.value));
        INFO(code.name << ": " << meaning);
        CHECK(meaning.size() > 5);
        CHECK(meaning.back() != '.');
        meanings.insert(meaning);
    }
    CHECK(values.size() == std::size(listed));
    CHECK(names.size() == std::size(listed));
    CHECK(meanings.size() == std::size(listed));
    STATIC_REQUIRE(sizeof(error_code) == 4);
}

TEST_CASE("a number that is no code says so", "[regression]") {
    CHECK(std::string(name_of(static_cast<error_code>(1))) == "unknown");
    CHECK(std::string(name_of(static_cast<error_code>(-7))) == "unknown");
    CHECK(std::string(meaning_of(static_cast<error_code>(12345))) == "not a code of this library");
}
