"""The wheel: CMake builds and lays out the package, setuptools packs what it laid."""

import os
import re
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

from setuptools import Distribution, setup
from setuptools.command.build_py import build_py

HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[1]


def version() -> str:
    header = (ROOT / "include/tauwright/core/version.hpp").read_text(encoding="utf-8")
    return ".".join(re.search(rf"define TAUWRIGHT_VERSION_{part} (\d+)", header)[1] for part in ("MAJOR", "MINOR", "PATCH"))


class BuildWithCMake(build_py):
    """Builds the target tauwright_python outside the source tree and takes the package from there."""

    def run(self) -> None:
        with tempfile.TemporaryDirectory(prefix="tauwright-wheel-") as build:
            generator = ["-G", "Ninja"] if shutil.which("ninja") else []
            subprocess.run(
                ["cmake", "-S", str(ROOT), "-B", build, *generator, f"-DPython3_EXECUTABLE={sys.executable}",
                 "-DCMAKE_BUILD_TYPE=Release", "-DTAUWRIGHT_PYTHON=ON", "-DTAUWRIGHT_C=OFF", "-DTAUWRIGHT_TESTS=OFF",
                 "-DTAUWRIGHT_BENCH=OFF"],
                check=True)
            subprocess.run(
                ["cmake", "--build", build, "--target", "tauwright_python", "--parallel", str(os.cpu_count() or 1)],
                check=True)
            target = Path(self.build_lib) / "tauwright"
            shutil.copytree(Path(build) / "python/tauwright", target, dirs_exist_ok=True,
                            ignore=shutil.ignore_patterns("__pycache__"))


class BinaryDistribution(Distribution):
    """Tells setuptools that the package is of one platform and one Python."""

    def has_ext_modules(self) -> bool:
        return True


# What setuptools leaves behind goes beside no source file.
SCRATCH = tempfile.mkdtemp(prefix="tauwright-setuptools-")
setup(
    version=version(),
    packages=["tauwright"],
    package_dir={"tauwright": "tauwright"},
    cmdclass={"build_py": BuildWithCMake},
    distclass=BinaryDistribution,
    options={"build": {"build_base": SCRATCH}, "egg_info": {"egg_base": SCRATCH}},
)
shutil.rmtree(SCRATCH, ignore_errors=True)
