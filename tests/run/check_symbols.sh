#!/bin/sh
# Usage: check_symbols.sh NM OBJECT. Fails where the object needs more than copying and filling memory:
# no heap, no libm, no exceptions, no C++ runtime.
set -eu
needed=$("$1" -u "$2" | awk '{print $NF}' | grep -Ev '^(memcpy|memset|memmove|_GLOBAL_OFFSET_TABLE_|__stack_chk_fail)$' || true)
if [ -n "$needed" ]; then
    echo "run alone needs from outside:" $needed >&2
    exit 1
fi
"$1" "$2" | grep -q run_alone_step
