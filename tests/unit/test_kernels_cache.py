"""The cache of compiled code: it covers all sources of it, and never answers with old code."""

import ast
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from lumentrace.jit import COMPILED

PACKAGE = Path(__file__).parents[2] / "lumentrace"
DECORATORS = {"kernel", "uncached_kernel", "allocating_kernel"}
FILES = sorted(PACKAGE.rglob("*.py"))


def is_covered(path: Path) -> bool:
    """Whether the digest that names the cache's folder covers a file."""
    inside = path.relative_to(PACKAGE).as_posix()
    return any(inside == place or inside.startswith(f"{place}/") for place in COMPILED)


def imports(path: Path) -> list[tuple[str, set[str]]]:
    """(module, names) of all imports of a file, also those within functions."""
    found = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found += [(alias.name, set()) for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0
            found.append((node.module, {alias.name for alias in node.names}))
    return found


def files_of(module: str, names: set[str]) -> list[Path]:
    """Files of the package that an import reads."""
    place = PACKAGE.parent.joinpath(*module.split("."))
    if place.is_dir():
        inside = [place / f"{name}.py" for name in names]
        return [p for p in inside if p.is_file()] or [place / "__init__.py"]
    return [place.with_suffix(".py")]


def test_each_place_exists():
    assert all((PACKAGE / place).exists() for place in COMPILED)


def test_compiled_code_stands_where_the_digest_sees_it():
    """No other file takes a decorator of `jit`, or numba itself."""
    takers = 0
    for path in FILES:
        for module, names in imports(path):
            compiles = module.split(".")[0] in ("numba", "llvmlite")
            compiles |= module == "lumentrace.jit" and bool(names & DECORATORS)
            takers += compiles
            assert is_covered(path) or not compiles, path
    assert takers > 20


def test_compiled_code_depends_on_nothing_that_the_digest_does_not_see():
    """What a file with kernels imports from the package is covered too: constants, callees."""
    for path in FILES:
        found = imports(path)
        if any(module == "lumentrace.jit" and names & DECORATORS for module, names in found):
            for module, names in found:
                if module.split(".")[0] == "lumentrace":
                    for file in files_of(module, names):
                        assert file.is_file() and is_covered(file), (path, file)


ASK = """
import numpy
from lumentrace.jit import cache_folder
from lumentrace.models.patterns.isotropic import emit
answer = emit(numpy.zeros(2), 0.25, 0.5)[2]
print(bool(emit.stats.cache_hits), cache_folder() and cache_folder().name, answer)
"""


@pytest.fixture
def ask(tmp_path):
    """(from the cache, folder, answer) of a copy of the compiled sources, in another process."""
    for place in ("__init__.py", "errors.py", *COMPILED):
        source, target = PACKAGE / place, tmp_path / "lumentrace" / place
        target.parent.mkdir(parents=True, exist_ok=True)
        ignore = shutil.ignore_patterns("__pycache__")
        if source.is_dir():
            shutil.copytree(source, target, ignore=ignore)
        else:
            shutil.copy(source, target)

    def run(cache=tmp_path / "cache"):
        done = subprocess.run(
            [sys.executable, "-c", ASK],
            cwd=tmp_path,
            env={**os.environ, "LUMENTRACE_CACHE": str(cache), "PYTHONPATH": str(tmp_path)},
            capture_output=True,
            text=True,
            timeout=300,
        )
        assert done.returncode == 0, done.stderr
        cached, folder, answer = done.stdout.split()
        return cached == "True", folder, float(answer)

    return run


def test_an_edited_callee_is_compiled_anew(ask, tmp_path):
    """The caller stands in another file; edited back, the first code is found again."""
    callee = tmp_path / "lumentrace" / "kernels" / "sampling.py"
    text = callee.read_text(encoding="utf-8")
    first = ask()
    assert first[0] is False and first[2] == 0.5
    assert ask() == (True, *first[1:])
    edited = text.replace("around_z(1.0 - 2.0 * u1, u2)", "around_z(1.0 - 3.0 * u1, u2)")
    assert edited != text
    callee.write_text(edited, encoding="utf-8")
    second = ask()
    assert second[0] is False and second[1] != first[1] and second[2] == 0.25
    callee.write_text(text, encoding="utf-8")
    assert ask() == (True, *first[1:])


def test_without_a_writable_folder_it_works_all_the_same(ask, tmp_path):
    blocked = tmp_path / "file"
    blocked.write_text("not a folder")
    assert ask(blocked / "below") == (False, "None", 0.5)
