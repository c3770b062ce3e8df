// What fast_math_host_test.cpp, compiled with -ffast-math, makes of the finite checks.
#pragma once

namespace oracle {

bool fast_math_host_is_fast() noexcept;
bool fast_math_host_finite(double x) noexcept;
bool fast_math_host_nan(double x) noexcept;
bool fast_math_host_same_bits() noexcept;

}  // namespace oracle
