#!/usr/bin/env bash
# Builds everything and passes every test.
#
#   cmake/test.sh               C++, C, Python, outside projects
#   cmake/test.sh --sanitized   the C++ and C tests under address and undefined-behavior sanitizers
#   cmake/test.sh --fuzz        the fuzz targets, twenty seconds each
#   cmake/test.sh --long        a million random loops against brute force: half an hour, for releases
#
# Installs the Debian packages it needs. Run it as root or as a user with sudo.
set -euo pipefail
here=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
tier=${1:-}
case "$tier" in
  "" | --sanitized | --fuzz | --long) ;;
  -h | --help) sed -n '2,10s/^# \{0,1\}//p' "$0"; exit 0 ;;
  *) echo "unknown option $tier; see cmake/test.sh --help" >&2; exit 2 ;;
esac
source "$here/cmake/packages.sh"

case "$tier" in
  "" | --long)
    need "${build_packages[@]}" "${python_packages[@]}" catch2 libbenchmark-dev python3-scipy python3-mpmath python3-pytest \
      python3-hypothesis python3-jsonschema python3-setuptools python3-wheel python3-pip python3-venv mypy pkg-config abigail-tools
    build=$here/build/test
    options=(-DPython3_EXECUTABLE=/usr/bin/python3) ;;
  --sanitized)
    need "${build_packages[@]}" catch2
    build=$here/build/sanitized
    options=(-DCMAKE_BUILD_TYPE=Debug -DCMAKE_CXX_FLAGS_DEBUG=-O1 -DCMAKE_C_FLAGS_DEBUG=-O1 -DTAUWRIGHT_SANITIZE=ON
      -DTAUWRIGHT_PYTHON=OFF -DTAUWRIGHT_BENCH=OFF) ;;
  --fuzz)
    need "${build_packages[@]}" clang-14 libclang-rt-14-dev catch2
    build=$here/build/fuzz
    options=(-DCMAKE_CXX_COMPILER=clang++-14 -DCMAKE_C_COMPILER=clang-14 -DTAUWRIGHT_FUZZ=ON -DTAUWRIGHT_PYTHON=OFF
      -DTAUWRIGHT_BENCH=OFF) ;;
esac

step "Configuring" cmake -S "$here" -B "$build" -G Ninja -DCMAKE_BUILD_TYPE=Release "${options[@]}"
if [ "$tier" = --long ]; then
  step "Building the margins' tests" cmake --build "$build" --target assess_test
  TAUWRIGHT_LONG=1 "$build/tests/assess_test" "*random*"
elif [ "$tier" = --fuzz ]; then
  step "Building the fuzz targets" cmake --build "$build" --target fuzz_targets
  ctest --test-dir "$build" --output-on-failure --no-tests=error -R '_fuzz$'
else
  step "Building everything (some minutes)" cmake --build "$build"
  export UBSAN_OPTIONS=print_stacktrace=1 ASAN_OPTIONS=detect_stack_use_after_return=1
  ctest --test-dir "$build" --output-on-failure --no-tests=error
fi
