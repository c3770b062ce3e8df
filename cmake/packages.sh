# Sourced by demo.sh and test.sh: what both need of the machine, and how they speak.
#   need PACKAGE...   installs the Debian packages that are missing
#   step TEXT CMD...  runs a command quietly; shows its output only when it fails

log_folder=$(mktemp -d)
trap 'rm -rf "$log_folder"' EXIT

need() {
  local missing=()
  for package in "$@"; do
    dpkg-query -W -f='${Status}' "$package" 2>/dev/null | grep -q '^install ok installed' || missing+=("$package")
  done
  [ ${#missing[@]} -eq 0 ] && return 0
  local as_root=()
  if [ "$(id -u)" -ne 0 ]; then
    command -v sudo > /dev/null || { echo "These packages are missing: ${missing[*]}"; echo "Install them as root, or install sudo, and run this again."; exit 1; }
    as_root=(sudo)
  fi
  echo "Installing with apt-get: ${missing[*]}"
  step "apt-get update" "${as_root[@]}" apt-get update -q
  step "apt-get install" "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y -q \
    --no-install-recommends -o DPkg::Lock::Timeout=600 "${missing[@]}"
}

step() {
  local text=$1 began=$SECONDS log=$log_folder/step.log
  shift
  printf '%s ... ' "$text"
  if [ -t 1 ] && [ "$1" = cmake ] && [ "$2" = --build ]; then
    echo
    # On a terminal the build shows its own progress.
    if "$@"; then echo "$text: done in $((SECONDS - began)) s"; return 0; fi
    echo "$text: FAILED"; exit 1
  fi
  if "$@" > "$log" 2>&1; then
    echo "done in $((SECONDS - began)) s"
  else
    local code=$?
    echo "FAILED"
    tail -n 200 "$log"
    echo "The command was: $*"
    exit "$code"
  fi
}

build_packages=(g++ cmake ninja-build libeigen3-dev libboost-dev nlohmann-json3-dev)
python_packages=(python3 python3-dev pybind11-dev python3-numpy python3-matplotlib)
