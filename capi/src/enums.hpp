// Proof, at compile time, that a C constant and its C++ twin are the same number.
#pragma once

#include <cstdint>

#define TAUW_SAME(c_constant, cpp_value) \
    static_assert(static_cast<std::int32_t>(cpp_value) == static_cast<std::int32_t>(c_constant))
