// Error codes without the exception, for code that must not throw.
#pragma once

#include <cstdint>

namespace tauwright {
inline namespace v0 {

enum class error_code : std::int32_t {
#define TAUWRIGHT_ERROR(name, value, meaning) name = value,
#include "tauwright/core/errors.def"
#undef TAUWRIGHT_ERROR
};

/// The code's word, for example "not_finite"; "unknown" for a number that is no code.
constexpr const char* name_of(error_code code) noexcept {
    switch (code) {
#define TAUWRIGHT_ERROR(name, value, meaning) \
    case error_code::name: return #name;
#include "tauwright/core/errors.def"
#undef TAUWRIGHT_ERROR
    }
    return "unknown";
}

/// What the code means, in one sentence without a full stop.
constexpr const char* meaning_of(error_code code) noexcept {
    switch (code) {
#define TAUWRIGHT_ERROR(name, value, meaning) \
    case error_code::name: return meaning;
#include "tauwright/core/errors.def"
#undef TAUWRIGHT_ERROR
    }
    return "not a code of this library";
}

}  // namespace v0
}  // namespace tauwright
