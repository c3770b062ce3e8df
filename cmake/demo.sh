#!/usr/bin/env bash
# Runs the main job: a bump-test record in, a tuning sheet out.
#
#   cmake/demo.sh                             an invented record, shipped with the C example
#   cmake/demo.sh record.csv [request.json]   your own
#
# Installs the Debian packages it needs, builds the library and the Python package once, prints the tuning
# sheet, and leaves it as JSON and as a picture in the current folder. Run it as root or as a user with sudo.
set -euo pipefail
case "${1:-}" in -h | --help) sed -n '2,9s/^# \{0,1\}//p' "$0"; exit 0 ;; esac
here=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
source "$here/cmake/packages.sh"
if [ $# -eq 0 ]; then
  set -- "$here/capi/examples/bottle_washer.csv" "$here/capi/examples/bottle_washer_request.json"
fi

need "${build_packages[@]}" "${python_packages[@]}"
build=$here/build/demo
step "Configuring" cmake -S "$here" -B "$build" -G Ninja -DCMAKE_BUILD_TYPE=Release -DPython3_EXECUTABLE=/usr/bin/python3 \
  -DTAUWRIGHT_C=OFF -DTAUWRIGHT_TESTS=OFF -DTAUWRIGHT_BENCH=OFF
step "Building (a minute or two the first time)" cmake --build "$build" --target tauwright_python
echo
PYTHONPATH=$build/python PYTHONDONTWRITEBYTECODE=1 MPLBACKEND=Agg /usr/bin/python3 -m tauwright "$@"
