# Compile options of everything this project compiles itself; none of them reaches a user.

add_library(tauwright_options INTERFACE)
target_compile_features(tauwright_options INTERFACE cxx_std_20 c_std_99)
# Contraction off: equal inputs give equal bits on every machine. No -ffast-math, no -march.
target_compile_options(tauwright_options INTERFACE
  -fno-math-errno -fno-trapping-math -ffp-contract=off
  -Wall -Wextra -Wpedantic -Wshadow
  $<$<COMPILE_LANGUAGE:CXX>:-Wconversion>
  # GCC 12 sees overlapping copies in std::string where there are none (GCC bug 105329).
  $<$<COMPILE_LANG_AND_ID:CXX,GNU>:-Wno-restrict>)
if(PROJECT_IS_TOP_LEVEL)
  target_compile_options(tauwright_options INTERFACE -Werror)
endif()
if(TAUWRIGHT_SANITIZE)
  target_compile_options(tauwright_options INTERFACE
    -fsanitize=address,undefined -fno-sanitize-recover=undefined -fno-omit-frame-pointer -g
    # Under sanitizers GCC 12 loses track of std::optional.
    $<$<COMPILE_LANG_AND_ID:CXX,GNU>:-Wno-maybe-uninitialized>)
  target_link_options(tauwright_options INTERFACE -fsanitize=address,undefined)
endif()
if(TAUWRIGHT_FUZZ)
  target_compile_options(tauwright_options INTERFACE
    -fsanitize=fuzzer-no-link,address,undefined -fno-sanitize-recover=undefined -g -O1)
  target_link_options(tauwright_options INTERFACE -fsanitize=address,undefined)
endif()
set(CMAKE_CXX_FLAGS_RELEASE "-O3 -DNDEBUG")
set(CMAKE_C_FLAGS_RELEASE "-O3 -DNDEBUG")
set(CMAKE_CXX_EXTENSIONS OFF)
set(CMAKE_C_EXTENSIONS OFF)
