#!/usr/bin/python3
"""Compiles and runs the README's three examples and compares what they print with what it says.

check_readme.py SOURCE BUILD, with PYTHONPATH=<build>/python.
"""

import re
import subprocess
import sys
import tempfile
from pathlib import Path

source, build = Path(sys.argv[1]), Path(sys.argv[2])
readme = (source / "README.md").read_text()


def block(language):
    found = [text for name, text in re.findall(r"^```(\w*)\n(.*?)^```$", readme, re.M | re.S) if name == language]
    assert len(found) == 1, f"README.md has {len(found)} blocks of {language or 'output'}, not 1"
    return found[0]


def run(*command, **options):
    done = subprocess.run([str(c) for c in command], capture_output=True, text=True, **options)
    assert done.returncode == 0, f"{command} failed:\n{done.stdout}{done.stderr}"
    return done.stdout


def main():
    expected = block("")
    commands = re.findall(r"^(cmake/\w+\.sh)", block("sh"), re.M)
    assert commands == ["cmake/demo.sh", "cmake/test.sh"], f"README.md shows {commands}"
    with tempfile.TemporaryDirectory() as folder:
        folder = Path(folder)
        printed = {}
        (folder / "x.py").write_text(block("python"))
        printed["Python"] = run("/usr/bin/python3", folder / "x.py")
        (folder / "x.cpp").write_text(block("cpp"))
        run("g++", "-std=c++20", "-Wall", "-Wextra", "-Werror", "-I", source / "include", folder / "x.cpp",
            build / "src/libtauwright.a", "-o", folder / "cxx")
        printed["C++"] = run(folder / "cxx")
        (folder / "x.c").write_text(block("c"))
        library = build / "capi"
        run("gcc", "-std=c99", "-Wall", "-Wextra", "-Werror", "-pedantic-errors", "-I", source / "capi/include", folder / "x.c",
            "-L", library, "-ltauwright_c", f"-Wl,-rpath,{library}", "-o", folder / "c")
        printed["C"] = run(folder / "c")
    for language, text in printed.items():
        assert text == expected, f"{language} prints\n{text}\nREADME.md says\n{expected}"
    print("the README's examples print what it says")


if __name__ == "__main__":
    main()
