#!/usr/bin/env bash
# Compares the C library with what is committed in capi/abi: exported names, layouts and enumeration
# values, and the debug information's view of every function.
#   check_abi.sh LIBRARY INCLUDE_DIR PRINT_LAYOUT [update]
# PRINT_LAYOUT is the program built from print_layout.c. With `update` the committed files are written
# anew: in 0.x they may change in the same commit as the headers, with a line that says why.
set -euo pipefail
export LC_ALL=C
library=$1 include=$2 print_layout=$3 mode=${4:-check}
abi=$(cd "$(dirname "$0")/../../capi/abi" && pwd)
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT

fail() { echo "capi_abi: $*"; exit 1; }
for tool in nm readelf abidw abidiff; do
  command -v $tool > /dev/null || fail "$tool is missing; install binutils and abigail-tools"
done
# Without debug information two libraries compare equal whatever they hold.
readelf -S --wide "$library" | grep -q '\.debug_info' || fail "$library has no debug information"

nm -D --defined-only "$library" | awk '$2 != "A" { print $3 }' | sed 's/@.*//' | sort > "$work/symbols.txt"
if grep -v '^tauw_' "$work/symbols.txt"; then fail "these names leave the library"; fi
# Every function a header declares is exported, and nothing else is.
cat "$include"/tauwright/*.h | tr '\n' ' ' | grep -oE "TAUW_API [^(]*\(" | grep -oE "tauw_\w+\("  | tr -d "(" | sort > "$work/declared.txt"
diff "$work/declared.txt" "$work/symbols.txt" || fail "declared and exported functions differ"

"$print_layout" > "$work/layout.txt" || fail "print_layout.c does not list every member"
# Every constant a header defines is listed.
grep -ohE 'TAUW_[A-Z0-9_]+ = ' "$include"/tauwright/*.h | sed 's/ = //' | sort > "$work/constants.txt"
grep -oE 'TAUW_[A-Z0-9_]+' "$work/layout.txt" | sort | diff "$work/constants.txt" - ||
  fail "print_layout.c does not list every constant"
grep -ohE '^typedef struct \w+ \{' "$include"/tauwright/*.h | awk '{ print $3 }' | sort > "$work/structs.txt"
awk '$1 == "struct" { print $2 }' "$work/layout.txt" | sort | diff "$work/structs.txt" - ||
  fail "print_layout.c does not list every struct"

if [ "$mode" = update ]; then
  cp "$work/symbols.txt" "$work/layout.txt" "$abi/"
  abidw --headers-dir "$include" --drop-private-types --exported-interfaces-only --short-locs --no-corpus-path \
    --no-comp-dir-path --out-file "$abi/baseline.abi" "$library"
  echo "capi_abi: wrote $(wc -l < "$abi/symbols.txt") names, layouts and baseline to capi/abi"
  exit 0
fi
diff "$abi/symbols.txt" "$work/symbols.txt" || fail "exported names differ from capi/abi/symbols.txt"
diff "$abi/layout.txt" "$work/layout.txt" || fail "layouts or values differ from capi/abi/layout.txt"
# Any difference counts: an appended member only gives exit code 4.
abidiff --no-added-syms --headers-dir2 "$include" "$abi/baseline.abi" "$library" || fail "the ABI differs from capi/abi/baseline.abi"
echo "capi_abi: $(wc -l < "$work/symbols.txt") functions, layouts and values as committed"
