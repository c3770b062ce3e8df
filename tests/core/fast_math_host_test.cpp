// A host compiled with -ffast-math (flags.cmake): here std::isfinite and x == x may lie.
// Without Catch2 on purpose, so that none of its inline functions is compiled this way.
#include "core/fast_math_host.hpp"

#include "tauwright/core/finite.hpp"
#include "tauwright/run/pid_block.hpp"

namespace oracle {

bool fast_math_host_is_fast() noexcept {
#ifdef __FAST_MATH__
    return true;
#else
    return false;
#endif
}

bool fast_math_host_finite(double x) noexcept { return tauwright::is_finite(x); }
bool fast_math_host_nan(double x) noexcept { return tauwright::is_nan(x); }
bool fast_math_host_same_bits() noexcept { return tauwright::run::gives_same_bits(); }

}  // namespace oracle
