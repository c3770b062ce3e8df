"""The stub against the compiled module, and against what a user writes."""

import ast
import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import tauwright as tw

HERE = Path(__file__).parent
PACKAGE = Path(tw.__file__).parent
ENVIRONMENT = {**os.environ, "PYTHONPATH": str(PACKAGE.parent), "MYPYPATH": str(PACKAGE.parent), "PYTHONDONTWRITEBYTECODE": "1"}


def run(*command, cwd):
    return subprocess.run(command, cwd=cwd, env=ENVIRONMENT, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True)


def test_names_agree(tmp_path):
    pytest.importorskip("mypy")
    done = run(sys.executable, "-m", "mypy.stubtest", "tauwright", "--allowlist", str(HERE / "stub_allowlist.txt"), cwd=tmp_path)
    assert done.returncode == 0, done.stdout


def test_a_strict_user_is_content(tmp_path):
    pytest.importorskip("mypy")
    shutil.copy(HERE / "typed_user.py", tmp_path)
    done = run(sys.executable, "-m", "mypy", "--strict", "--cache-dir", str(tmp_path / "cache"), "typed_user.py", cwd=tmp_path)
    assert done.returncode == 0, done.stdout
    done = run(sys.executable, "-m", "mypy", "--strict", "--cache-dir", str(tmp_path / "cache"), "-p", "tauwright", cwd=tmp_path)
    assert done.returncode == 0, done.stdout
    wrong = tmp_path / "wrong.py"
    wrong.write_text("import tauwright as tw\ntw.Duty(1, 2)\ntw.PidSettings(gian=1)\n")
    done = run(sys.executable, "-m", "mypy", "--strict", "--cache-dir", str(tmp_path / "cache"), str(wrong), cwd=tmp_path)
    assert done.stdout.count("error:") == 2, done.stdout


def test_that_user_runs(tmp_path):
    done = run(sys.executable, "-W", "error", str(HERE / "typed_user.py"), cwd=tmp_path)
    assert done.returncode == 0, done.stdout


def split_arguments(text):
    """The arguments in a signature line, split at commas outside brackets and quotes."""
    depth, start, parts, quoted = 0, 0, [], False
    for i, c in enumerate(text):
        quoted ^= c == "'"
        if not quoted:
            depth += (c in "([{<") - (c in ")]}>")
            if c == "," and depth == 0:
                parts.append(text[start:i].strip())
                start = i + 1
    return [p for p in [*parts, text[start:].strip()] if p]


def compiled_arguments(item):
    """Names, whether optional, whether keyword only, from the signature that the binding writes into the docstring."""
    signature = re.match(r"\w+\((.*)\) -> ", item.__doc__.splitlines()[0])[1]
    arguments, keyword_only = [], False
    for part in split_arguments(signature):
        if part == "*":
            keyword_only = True
            continue
        name = re.match(r"\w+", part)[0]
        if name != "self":
            arguments.append((name, " = " in part, keyword_only))
    return arguments


def stub_arguments(node):
    plain, only = node.args.args, node.args.kwonlyargs
    first_default = len(plain) - len(node.args.defaults)
    arguments = [(a.arg, i >= first_default, False) for i, a in enumerate(plain) if a.arg != "self"]
    return arguments + [(a.arg, d is not None, True) for a, d in zip(only, node.args.kw_defaults)]


def functions(body, owner, prefix):
    for node in body:
        if isinstance(node, ast.ClassDef) and node.name != "Error":
            yield from functions(node.body, getattr(owner, node.name), node.name + ".")
        elif isinstance(node, ast.FunctionDef):
            special = node.name.startswith("__") and node.name not in ("__init__", "__call__")
            if not special and not any(isinstance(d, ast.Name) and d.id == "property" for d in node.decorator_list):
                yield prefix + node.name, node, getattr(owner, node.name)


def test_arguments_agree():
    # stubtest sees no signature of a compiled function; the binding's docstring has it.
    tree = ast.parse((PACKAGE / "__init__.pyi").read_text())
    seen = 0
    for name, node, item in functions(tree.body, tw, ""):
        assert stub_arguments(node) == compiled_arguments(item), name
        seen += 1
    assert seen > 50
