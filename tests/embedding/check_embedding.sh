#!/usr/bin/env bash
# Installs the build, moves the tree, and uses it from small outside projects.
#   check_embedding.sh BUILD SOURCE RECORD RESULTS [c]
# Leaves the key-value output of the C++ and the C example in RESULTS for the comparison of languages.
set -euo pipefail
build=$1 source=$2 record=$3 results=$4 with_c=${5:-}
here=$source/tests/embedding
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
mkdir -p "$results"
version=$(sed -n 's/.*TAUWRIGHT_VERSION_M[AI][JN]OR //p' "$source/include/tauwright/core/version.hpp" | paste -sd.)

say() { echo "embedding: $*"; }
configure() { cmake -G Ninja -DCMAKE_BUILD_TYPE=Release "$@" > "$work/log" 2>&1; }
must() { "$@" > "$work/log" 2>&1 || { cat "$work/log"; echo "embedding: failed: $*"; exit 1; }; }

say "install and move the tree"
must cmake --install "$build" --prefix "$work/first"
mv "$work/first" "$work/moved"
prefix=$work/moved
if grep -rlE '#include <(Eigen|boost|nlohmann)' "$prefix/include"; then say "installed headers need Eigen, Boost or JSON"; exit 1; fi
if grep -rlE 'Eigen|Boost|nlohmann' "$prefix"/lib*/cmake "$prefix"/lib/*/cmake 2>/dev/null; then say "the package looks for Eigen or Boost"; exit 1; fi
if grep -rl "$work/first" "$prefix/lib" --include='*.cmake' --include='*.pc'; then say "the package holds its first path"; exit 1; fi

# Machines without these packages: nothing may look for them.
none=(-DCMAKE_DISABLE_FIND_PACKAGE_Eigen3=ON -DCMAKE_DISABLE_FIND_PACKAGE_Boost=ON -DCMAKE_DISABLE_FIND_PACKAGE_nlohmann_json=ON)

say "find_package from C++"
must configure -S "$here/find_package" -B "$work/cxx" -DCMAKE_PREFIX_PATH="$prefix" -DTAUWRIGHT_VERSION_WANTED="$version" "${none[@]}"
must cmake --build "$work/cxx"
"$work/cxx/bump_to_settings" "$record" > "$results/cxx.txt"

say "a wrong version is refused"
for wanted in 9.0 0.99; do
  if configure -S "$here/find_package" -B "$work/wrong-$wanted" -DCMAKE_PREFIX_PATH="$prefix" -DTAUWRIGHT_VERSION_WANTED=$wanted; then
    say "version $wanted was accepted"; exit 1
  fi
  grep -q 'version' "$work/log" || { cat "$work/log"; say "refused for another reason"; exit 1; }
done

if [ -n "$with_c" ]; then
  example=$source/capi/examples/bump_to_settings.c
  say "find_package from C"
  must configure -S "$here/find_package_c" -B "$work/c" -DCMAKE_PREFIX_PATH="$prefix" -DEXAMPLE_SOURCE="$example" "${none[@]}"
  must cmake --build "$work/c"
  "$work/c/bump_to_settings_c" "$record" > "$results/c.txt"

  say "pkg-config from C"
  pc=$(dirname "$(find "$prefix" -name tauwright-c.pc)")
  flags=$(PKG_CONFIG_PATH=$pc pkg-config --cflags --libs tauwright-c)
  must gcc -std=c99 -pedantic-errors -Wall -Wextra -Werror "$example" -o "$work/pc" $flags -lm
  LD_LIBRARY_PATH=$(PKG_CONFIG_PATH=$pc pkg-config --variable=libdir tauwright-c) "$work/pc" "$record" > "$work/pc.txt"
  diff <(tail -n 9 "$results/c.txt") <(tail -n 9 "$work/pc.txt")
fi

say "pkg-config from C++"
pc=$(dirname "$(find "$prefix" -name tauwright.pc)")
must g++ -std=c++20 -O1 "$here/find_package/bump_to_settings.cpp" -o "$work/pcxx" $(PKG_CONFIG_PATH=$pc pkg-config --cflags --libs tauwright)
"$work/pcxx" "$record" > /dev/null

say "headers alone"
must g++ -std=c++20 -O1 -I"$prefix/include" "$here/headers_only/headers_only.cpp" -o "$work/headers_only"
must "$work/headers_only"

say "run alone, without exceptions and RTTI"
must g++ -std=c++20 -O2 -ffp-contract=off -fno-exceptions -fno-rtti -Wall -Wextra -Werror -I"$prefix/include" \
  "$here/run_alone/run_alone.cpp" -c -o "$work/run_alone.o"
# No heap, no exceptions, no libm in the object.
if nm -u "$work/run_alone.o" | grep -E ' (_Zn|_Zd|malloc|free|__cxa|exp|pow|sqrt|sin|cos|log)'; then say "run needs a runtime"; exit 1; fi
must g++ "$work/run_alone.o" -o "$work/run_alone"
must "$work/run_alone"

say "add_subdirectory"
must configure -S "$here/add_subdirectory" -B "$work/sub" -DTAUWRIGHT_SOURCE="$source"
must cmake --build "$work/sub" --target host
must "$work/sub/host"
say "all outside projects work"
