// The version, typed once: CMake and the Python build read these three lines.
#pragma once

#define TAUWRIGHT_VERSION_MAJOR 0
#define TAUWRIGHT_VERSION_MINOR 1
#define TAUWRIGHT_VERSION_PATCH 0

#define TAUWRIGHT_DETAIL_QUOTE(x) #x
#define TAUWRIGHT_DETAIL_DOTTED(a, b, c) \
    TAUWRIGHT_DETAIL_QUOTE(a) "." TAUWRIGHT_DETAIL_QUOTE(b) "." TAUWRIGHT_DETAIL_QUOTE(c)

namespace tauwright {
inline namespace v0 {

/// "major.minor.patch" of these headers.
inline constexpr char version[] =
    TAUWRIGHT_DETAIL_DOTTED(TAUWRIGHT_VERSION_MAJOR, TAUWRIGHT_VERSION_MINOR, TAUWRIGHT_VERSION_PATCH);

}  // namespace v0
}  // namespace tauwright
