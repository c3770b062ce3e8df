// The one exception, and the argument checks that throw it.
#pragma once

#include <charconv>
#include <cstddef>
#include <initializer_list>
#include <stdexcept>
#include <string>
#include <string_view>

#include "tauwright/core/error_code.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {

/// Thrown for bad input. `what()` names the argument, the value and the remedy; `code()` is stable.
class Error : public std::runtime_error {
public:
    Error(error_code code, const std::string& message) : std::runtime_error(message), code_(code) {}
    error_code code() const noexcept { return code_; }

private:
    error_code code_;
};

/// The shortest decimal text that reads back as the same double; always with '.', never a locale.
inline std::string text_of(double x) {
    if (is_nan(x)) return "nan";
    if (!is_finite(x)) return x > 0 ? "inf" : "-inf";
    char buffer[32];
    const auto end = std::to_chars(buffer, buffer + sizeof buffer, x);
    return {buffer, end.ptr};
}

/// The same rounded to `digits` significant ones, for people to read.
inline std::string text_of(double x, int digits) {
    if (!is_finite(x) || x == 0.0) return text_of(x == 0.0 ? 0.0 : x);
    char buffer[40];
    const auto end = std::to_chars(buffer, buffer + sizeof buffer, x, std::chars_format::general, digits);
    return {buffer, end.ptr};
}

namespace detail {

/// The parts in one string. Chains of operator+ cost every includer far more to compile.
inline std::string joined(std::initializer_list<std::string_view> parts) {
    std::string out;
    for (std::string_view part : parts) out.append(part);
    return out;
}

inline std::string item_name(std::string_view list, std::size_t index) {
    return joined({list, "[", text_of(static_cast<double>(index)), "]"});
}

[[noreturn]] inline void refuse(error_code code, std::string_view name, double value, std::string_view remedy) {
    throw Error(code, joined({name, " is ", text_of(value), "; ", remedy}));
}

inline void require_finite(std::string_view name, double value) {
    if (!is_finite(value)) refuse(error_code::not_finite, name, value, "give a finite number");
}

inline void require_positive(std::string_view name, double value) {
    require_finite(name, value);
    if (!(value > 0)) refuse(error_code::out_of_domain, name, value, "give a number above 0");
}

inline void require_not_negative(std::string_view name, double value) {
    require_finite(name, value);
    if (!(value >= 0)) refuse(error_code::out_of_domain, name, value, "give 0 or a number above it");
}

inline void require_not_zero(std::string_view name, double value) {
    require_finite(name, value);
    if (value == 0) refuse(error_code::out_of_domain, name, value, "give a number other than 0");
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
