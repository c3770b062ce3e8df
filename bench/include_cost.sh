#!/usr/bin/env bash
# Compile time of #include <tauwright/tauwright.hpp> against the standard headers it uses.
#   include_cost.sh SOURCE   (the checkout, or an installed prefix)
set -euo pipefail
include=$1/include
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
echo '#include <tauwright/tauwright.hpp>' > "$work/ours.cpp"
grep -rhoE '^#include <[a-z_/]+>' "$include/tauwright" --include='*.hpp' | sort -u > "$work/standard.cpp"
once() {
  local began=$(date +%s%N)
  g++ -std=c++20 -O0 -I"$include" -c "$1" -o "$work/out.o"
  echo $((($(date +%s%N) - began) / 1000000))
}
# By turns, so that a busy moment hits both.
for _ in $(seq 21); do
  once "$work/ours.cpp" >> "$work/ours.ms"
  once "$work/standard.cpp" >> "$work/standard.ms"
done
median() { sort -n "$1" | sed -n 11p; }
ours=$(median "$work/ours.ms") standard=$(median "$work/standard.ms")
echo "tauwright.hpp $ours ms, its standard headers $standard ms, ratio $(awk "BEGIN{printf \"%.2f\", $ours/$standard}")"
