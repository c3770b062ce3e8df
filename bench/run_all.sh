#!/usr/bin/env bash
# Every measurement, one after another on one pinned core: medians of five, yardsticks in the same run.
#   run_all.sh BUILD SOURCE
set -euo pipefail
build=$1 source=$2
core=$(($(nproc) - 1))
for floor in identify run assess synthesize tune; do
  echo "== $floor"
  taskset -c "$core" "$build/bench/${floor}_bench" --benchmark_repetitions=5 --benchmark_report_aggregates_only=true 2> /dev/null |
    awk '/_median/ { sub("_median", "", $1); print "  " $1, $2, $3 }'
done
echo "== identify against scipy.optimize.curve_fit"
PYTHONPATH=$build/python PYTHONDONTWRITEBYTECODE=1 /usr/bin/python3 "$source/bench/compare_with_scipy.py"
echo "== margins against SciPy on a grid"
PYTHONPATH=$build/python PYTHONDONTWRITEBYTECODE=1 /usr/bin/python3 "$source/bench/compare_margins.py"
echo "== trends against Python, NumPy and SciPy"
PYTHONPATH=$build/python PYTHONDONTWRITEBYTECODE=1 /usr/bin/python3 "$source/bench/compare_trends.py"
echo "== compile time"
"$source/bench/include_cost.sh" "$source"
echo "== C library, stripped"
strip -o "$build/stripped.so" "$(readlink -f "$build/capi/libtauwright_c.so")"
echo "  $(stat -c %s "$build/stripped.so") bytes"
