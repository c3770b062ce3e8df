// The shell around every entry: no exception crosses it, and what went wrong becomes code and text.
#pragma once

#include <cstddef>
#include <cstdint>
#include <exception>
#include <new>
#include <stdexcept>
#include <string>
#include <string_view>
#include <vector>

#include "tauwright/core.h"
#include "tauwright/core/error.hpp"

namespace tauwright::shell {

/// True for NULL and for an error struct this library can write to.
bool usable(const tauw_error* error) noexcept;

/// Writes code and message, cut to fit, where `error` is not NULL; returns the code. Never allocates.
std::int32_t report(tauw_error* error, error_code code, std::string_view message) noexcept;

/// At most `room` bytes of UTF-8 text, cut between characters.
std::string_view cut(std::string_view text, std::size_t room) noexcept;

/// Runs the body of an entry that may throw.
template <class Body>
std::int32_t guard(tauw_error* error, Body&& body) noexcept {
    if (!usable(error)) return TAUW_ERROR_WRONG_STRUCT_SIZE;
    try {
        body();
        return report(error, error_code::ok, "");
    } catch (const Error& e) {
        return report(error, e.code(), e.what());
    } catch (const std::bad_alloc&) {
        return report(error, error_code::out_of_memory, "memory could not be allocated; give a smaller task");
    } catch (const std::length_error&) {  // a count that no container can hold
        return report(error, error_code::out_of_memory, "a length is beyond all memory; give a smaller one");
    } catch (const std::exception& e) {
        return report(error, error_code::internal, e.what());
    } catch (...) {
        return report(error, error_code::internal, "unknown exception; please report it");
    }
}

[[noreturn]] inline void refuse_null(const std::string& name, std::string_view remedy = "give a pointer") {
    throw Error(error_code::null_pointer, name + " is NULL; " + std::string(remedy));
}

/// The object behind a pointer that must be given.
template <class T>
T& given(T* pointer, const char* name) {
    if (pointer == nullptr) refuse_null(name);
    return *pointer;
}

/// `pointer[n]`, which may be NULL only for n = 0.
template <class T>
T* array(T* pointer, std::size_t n, const char* name) {
    if (pointer == nullptr && n != 0) refuse_null(name, "give an array of " + std::to_string(n) + " elements");
    return pointer;
}

/// A copy of `values[n]`. A count beyond all memory must not even form a pointer.
template <class T>
std::vector<T> copied(const T* values, std::size_t n, const char* name) {
    if (n > PTRDIFF_MAX / sizeof(T)) throw std::length_error(name);
    array(values, n, name);
    return {values, values + n};
}

/// A text that may be left out.
inline std::string text_or_empty(const char* text) { return text == nullptr ? std::string() : std::string(text); }

}  // namespace tauwright::shell
