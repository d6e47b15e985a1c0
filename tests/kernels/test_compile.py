"""Machine code on disk: used again, and never when it is stale. In a small made-up copy of the package's kernels."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import armeval.kernels.compile as compiling

CALLED = """
from small.compile import jit, jit_inline

@jit_inline
def called(x):
    return {factor} * x
"""
CALLER = """
from small.compile import jit
from small.called import called

@jit
def caller(x):
    return called(x) + 1.0
"""
RUN = "from small.caller import caller; x = caller(2.0); print(x, sum(caller.stats.cache_hits.values()))"


@pytest.fixture
def package(tmp_path: Path) -> Path:
    folder = tmp_path / "small"
    folder.mkdir()
    (folder / "__init__.py").write_text("")
    shutil.copy(compiling.__file__, folder / "compile.py")
    (folder / "called.py").write_text(CALLED.format(factor="3.0"))
    (folder / "caller.py").write_text(CALLER)
    return folder


def run(package: Path, code: str = RUN, **environment: str) -> str:
    settings = {key: value for key, value in os.environ.items() if not key.startswith("NUMBA_")}
    settings |= {"XDG_CACHE_HOME": str(package.parent / "cache"), "PYTHONPATH": str(package.parent), **environment}
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, env=settings, check=False)
    assert done.returncode == 0, done.stderr
    return done.stdout.strip()


def test_a_second_process_takes_the_code_from_disk(package: Path) -> None:
    assert run(package) == "7.0 0"
    assert run(package) == "7.0 1"
    assert list((package / "__pycache__").glob("caller.caller-*.nbc"))


def test_an_edit_of_a_called_function_in_another_file_is_noticed_even_with_the_same_size_and_time(
    package: Path,
) -> None:
    assert run(package) == "7.0 0"
    called = package / "called.py"
    before = called.stat()
    called.write_text(CALLED.format(factor="5.0"))
    os.utime(called, ns=(before.st_atime_ns, before.st_mtime_ns))
    for stale in (package / "__pycache__").glob("called.*.pyc"):
        stale.unlink()  # Python itself goes by size and time
    assert run(package) == "11.0 0"
    assert run(package) == "11.0 1"


def test_a_package_that_cannot_be_written_to_keeps_its_code_in_the_users_cache_folder(package: Path) -> None:
    (package / "__pycache__").write_text("a file where the folder would be")
    assert run(package, PYTHONDONTWRITEBYTECODE="1") == "7.0 0"
    assert run(package, PYTHONDONTWRITEBYTECODE="1") == "7.0 1"
    assert list((package.parent / "cache").rglob("caller.caller-*.nbc"))


def test_without_any_folder_to_write_to_it_is_compiled_anew(package: Path) -> None:
    (package / "__pycache__").write_text("")
    (package.parent / "cache").write_text("")
    assert run(package, PYTHONDONTWRITEBYTECODE="1") == "7.0 0"


def test_an_index_that_cannot_be_read_counts_as_empty(package: Path) -> None:
    assert run(package) == "7.0 0"
    (index,) = (package / "__pycache__").glob("caller.caller-*.nbi")
    whole = index.read_bytes()
    # an index that names a class which is gone
    index.write_bytes(whole.replace(b"armeval", b"nowhere") if b"armeval" in whole else whole[:-20])
    assert run(package) == "7.0 0"
    assert run(package) == "7.0 1"


def test_a_numba_with_other_insides_still_compiles_and_keeps(package: Path) -> None:
    code = "import numba.core.caching as c\nc.FunctionCache = None\n" + RUN
    assert run(package, code).startswith("7.0")


def test_uncompiled_kernels_are_plain_functions(package: Path) -> None:
    assert run(package, "from small.caller import caller; print(caller(2.0))", NUMBA_DISABLE_JIT="1") == "7.0"
