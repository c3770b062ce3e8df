// Results of a size the caller does not know in advance, and values at arrays of complex numbers.
#pragma once

#include <complex>
#include <cstring>
#include <span>
#include <string>
#include <string_view>

#include "shell.hpp"

namespace tauwright::shell {

namespace sizes {

// The size query common to texts and arrays: true where the caller wants the elements.
template <class T>
bool asked_for(std::size_t count, const T* buffer, std::size_t capacity, std::size_t* needed, const char* name) {
    if (buffer == nullptr && (capacity != 0 || needed == nullptr))
        refuse_null(capacity != 0 ? name : "needed", "give a buffer, or capacity 0 and a place for the size");
    if (needed != nullptr) *needed = count;
    if (buffer == nullptr) return false;
    if (capacity < count)
        throw Error(error_code::buffer_too_small, "capacity is " + std::to_string(capacity) + "; give " + name +
                                                      " room for " + std::to_string(count));
    return true;
}

}  // namespace sizes

inline void give_text(std::string_view from, char* text, std::size_t capacity, std::size_t* needed) {
    if (!sizes::asked_for(from.size() + 1, text, capacity, needed, "text")) return;
    if (!from.empty()) std::memcpy(text, from.data(), from.size());
    text[from.size()] = '\0';
}

inline void give_array(std::span<const double> from, double* values, std::size_t capacity, std::size_t* needed,
                       const char* name) {
    if (!sizes::asked_for(from.size(), values, capacity, needed, name)) return;
    if (!from.empty()) std::memcpy(values, from.data(), from.size_bytes());
}

/// The element `index` of a list.
template <class List>
const auto& element(const List& list, std::size_t index) {
    if (index >= list.size())
        throw Error(error_code::out_of_domain, "index is " + std::to_string(index) + "; there are " +
                                                   std::to_string(list.size()) + ", counted from 0");
    return list[index];
}

/// The arrays of an evaluation at complex numbers.
struct ComplexArrays {
    const double* s_real;
    const double* s_imaginary;
    std::size_t n;
    double* value_real;
    double* value_imaginary;
    const char* real_name = "s_real";  ///< for messages
    const char* imaginary_name = "s_imaginary";
};

template <class Function>
void evaluate(const Function& function, const ComplexArrays& a) {
    array(a.s_real, a.n, a.real_name);
    array(a.s_imaginary, a.n, a.imaginary_name);
    array(a.value_real, a.n, "value_real");
    array(a.value_imaginary, a.n, "value_imaginary");
    for (std::size_t i = 0; i < a.n; ++i) {
        const std::complex<double> value = function(std::complex<double>(a.s_real[i], a.s_imaginary[i]));
        a.value_real[i] = value.real();
        a.value_imaginary[i] = value.imag();
    }
}

}  // namespace tauwright::shell
