#!/usr/bin/python3
"""Checks the house against DEVELOPERS.md: floors, manners, names. Prints each breach and fails."""

import re
import subprocess
import sys
from pathlib import Path

ROOT = Path(sys.argv[1]).resolve()
CODE = {".hpp", ".cpp", ".h", ".c", ".def", ".py", ".pyi"}
TOP = {"CMakeLists.txt", "README.md", "DEVELOPERS.md", "LICENSE", "include", "src", "capi", "bindings", "tests", "bench", "cmake"}
RUN_MAY_INCLUDE = {"tauwright/core/error_code.hpp", "tauwright/core/finite.hpp", "tauwright/core/version.hpp"}
# The one room that starts threads, and only when a caller asks for more than one.
STARTS_THREADS = {"audit_workers.hpp", "audit_workers.cpp"}
INCLUDE = re.compile(r'^\s*#\s*include\s*[<"]([^>"]+)[>"]', re.M)


def floor_table(text):
    """Floor -> floors it may include, from the table of DEVELOPERS.md."""
    rows = re.findall(r"^\| \d+ \| (\w+) \|[^|]*\|([^|]*)\|$", text, re.M)
    table = {name: {f.strip() for f in may.split(",") if f.strip()} | {name} for name, may in rows}
    assert len(table) == 10, f"the floor table of DEVELOPERS.md has {len(table)} rows, not 10"
    return table


def floor_of(include, floors):
    """The floor an include path belongs to, or None for what is not ours."""
    if include == "tauwright/tauwright.hpp":
        return "tune"  # the umbrella holds every floor
    parts = include.split("/")
    name = parts[1] if parts[0] == "tauwright" and len(parts) > 2 else parts[0] if len(parts) > 1 else None
    return name if name in floors else None


def climbing(path, floor, text, table):
    """Includes of a file that leave its floor's reach."""
    found = []
    for include in INCLUDE.findall(text):
        target = floor_of(include, table)
        if target and target not in table[floor]:
            found.append(f"{path}: {floor} includes {include}, which is on {target}")
        if floor == "run" and target == "core" and include not in RUN_MAY_INCLUDE:
            found.append(f"{path}: run includes {include}")
    return found


def files():
    listed = []
    for top in ("include", "src", "capi", "bindings", "tests", "bench", "cmake"):
        listed += [p for p in (ROOT / top).rglob("*") if p.is_file() and "__pycache__" not in p.parts]
    return [p for p in listed if "build" not in p.relative_to(ROOT).parts]


def tracked():
    """What belongs to the project; a user's own files beside it are nobody's business. Empty without git."""
    try:
        listed = subprocess.run(["git", "-C", str(ROOT), "ls-files"], capture_output=True, text=True, check=True)
    except (OSError, subprocess.CalledProcessError):
        return []
    return listed.stdout.splitlines()


def without_comments(text):
    return re.sub(r"//[^\n]*|/\*.*?\*/", "", text, flags=re.S)


def main():
    table = floor_table((ROOT / "DEVELOPERS.md").read_text())
    # The check must be able to fail: an include that climbs is one.
    assert climbing("x", "model", '#include "tauwright/assess/robustness.hpp"\n', table), "a climbing include passed"
    assert climbing("x", "run", '#include "tauwright/core/error.hpp"\n', table), "run took the exception"
    assert climbing("x", "run", "#include <tauwright/tauwright.hpp>\n", table), "the umbrella passed from below"
    assert not climbing("x", "tune", '#include "tauwright/model/forms.hpp"\n', table), "a descending include failed"

    breaches, names = [], {}
    manners = {
        r"\bstd::(cout|cerr|clog)\b|\bf?printf\s*\(|\bf?puts\s*\(|\bputchar\s*\(": "prints",
        r"\b(std::)?(abort|exit|terminate)\s*\(": "ends the host",
        r"\bsetlocale\b|\bstd::locale\b|\bstrtod\b|\bstod\b|\batof\b": "reads the locale",
        r"\bstd::(isnan|isfinite|isinf)\b": "checks numbers as -ffast-math would undo",
        r"(system|steady|high_resolution)_clock|\bstd::clock\b|gettimeofday|clock_gettime|\btime\s*\(\s*(NULL|nullptr|0)\s*\)": "reads a clock",
        r"\bstd::(thread|async)\b": "starts threads",
    }
    for path in files():
        shown = path.relative_to(ROOT)
        if path.suffix not in CODE and path.name != "CMakeLists.txt":
            continue
        text = path.read_text(encoding="utf-8")
        if not text.isascii():
            breaches.append(f"{shown}: not ASCII")
        lines = text.count("\n")
        if lines > 450 and not path.name.endswith(("_data.hpp", ".pyi")):
            breaches.append(f"{shown}: {lines} lines; give it a second room")
        parts = shown.parts
        if path.suffix in {".hpp", ".cpp", ".c"}:
            # src/x/y.cpp is the body of include/tauwright/x/y.hpp: one name, two files.
            key = (path.name, "python" if parts[0] == "bindings" else parts[0] if parts[0] in ("capi", "include", "src") else "tests")
            if key in names:
                breaches.append(f"{shown}: the name is taken by {names[key]}")
            names[key] = shown
        library = parts[0] in ("include", "src")
        if library:
            floor = parts[2] if parts[0] == "include" and len(parts) > 3 else parts[1] if parts[0] == "src" else None
            if floor in table:
                breaches += climbing(shown, floor, text, table)
            elif not (parts[0] == "include" and path.name == "tauwright.hpp") and path.suffix in {".hpp", ".cpp"}:
                breaches.append(f"{shown}: on no floor")
        if library or parts[:2] == ("capi", "src"):
            code = without_comments(text)
            for pattern, what in manners.items():
                if re.search(pattern, code) and not (what == "starts threads" and path.name in STARTS_THREADS):
                    breaches.append(f"{shown}: {what}")
            if re.search(r"boost::math::(tools::)?[a-z]\w*\s*\(", code) and "promote_double<false>" not in code:
                breaches.append(f"{shown}: calls Boost.Math without our policy")
        if parts[0] == "include" and re.search(r"#include <(Eigen|boost|nlohmann|unsupported)/", text):
            breaches.append(f"{shown}: a public header with a heavy include")
        if parts[0] in ("capi", "bindings", "bench") or parts[:2] == ("tests", "embedding"):
            for include in INCLUDE.findall(text):
                if "/" in include and not include.startswith("tauwright/") and (ROOT / "src" / include).exists():
                    breaches.append(f"{shown}: includes the private {include}")
        if parts[0] == "capi" and parts[1] == "include":
            for include in INCLUDE.findall(text):
                if include not in ("stddef.h", "stdint.h") and not include.startswith("tauwright/"):
                    breaches.append(f"{shown}: a C header includes {include}")
    for line, what in (("std::fprintf(stderr, x);", "prints"), ("boost::math::erf(x)", "policy"), ("std::clock()", "reads a clock")):
        hit = any(re.search(pattern, line) for pattern in manners) or re.search(r"boost::math::(tools::)?[a-z]\w*\s*\(", line)
        assert hit, f"the check for code that {what} cannot fail"
    stray = sorted({path.split("/")[0] for path in tracked()} - TOP)
    stray = [name for name in stray if not name.startswith(".")]
    if stray:
        breaches.append(f"not in the fixed top level: {' '.join(stray)}")
    print("\n".join(breaches) if breaches else f"{len(names)} sources keep the house's rules")
    return 1 if breaches else 0


if __name__ == "__main__":
    sys.exit(main())
