#!/usr/bin/env bash
# Compile time of #include <tauwright/tauwright.hpp> against the standard headers it uses.
#   include_cost.sh SOURCE   (the checkout, or an installed prefix)
set -euo pipefail
include=$1/include
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
echo '#include <tauwright/tauwright.hpp>' > "$work/ours.cpp"
grep -rhoE '^#include <[a-z_/]+>' "$include/tauwright" --include='*.hpp' | sort -u > "$work/standard.cpp"
median() {
  for _ in $(seq 11); do
    local began=$(date +%s%N)
    g++ -std=c++20 -O0 -I"$include" -c "$1" -o "$work/out.o"
    echo $(($(date +%s%N) - began))
  done | sort -n | sed -n 6p
}
ours=$(median "$work/ours.cpp") standard=$(median "$work/standard.cpp")
echo "tauwright.hpp $((ours / 1000000)) ms, its standard headers $((standard / 1000000)) ms, ratio $(echo "scale=2; $ours / $standard" | bc 2>/dev/null || awk "BEGIN{printf \"%.2f\", $ours/$standard}")"
