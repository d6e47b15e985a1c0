"""The one way in which kernels are compiled, and kept on disk.

Numba keeps machine code beside the source (in a cache folder of the user's where that is read-only) and throws it away
when the file of the compiled function changes. A kernel is more than its own file, though: the functions that it calls
are compiled into it. So the code is kept under a digest of all kernels' sources, and an index that cannot be read any
more, because a class that it names is gone, counts as empty.
"""

from __future__ import annotations

import contextlib
import functools
import hashlib
from collections.abc import Callable
from pathlib import Path
from typing import Any, ParamSpec, TypeVar

import numba

P = ParamSpec("P")
R = TypeVar("R")


@functools.cache
def sources_digest() -> str:
    """Digest of the names and texts of all modules in this folder."""
    digest = hashlib.sha256()
    for file in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(file.name.encode() + b"\0" + file.read_bytes() + b"\0")
    return digest.hexdigest()


def jit(function: Callable[P, R]) -> Callable[P, R]:
    """Compile a kernel on its first call and keep the machine code on disk.

    ``error_model="numpy"``: a division by zero gives inf or NaN as in numpy; Python's check would stop vectorisation.
    ``contract``: a product and a sum may become one rounded operation; nothing else of fast math, which would take a
    NaN for a number.
    """
    compiled: Any = numba.njit(error_model="numpy", nogil=True, fastmath={"contract"})(function)
    _keep_on_disk(compiled, function)
    typed: Callable[P, R] = compiled
    return typed


def jit_inline(function: Callable[P, R]) -> Callable[P, R]:
    """Compile a part into whatever kernel calls it, so that what is constant there is constant here too.

    It cannot be called from Python.
    """
    options = {"error_model": "numpy", "nogil": True, "fastmath": {"contract"}}
    compiled: Callable[P, R] = numba.njit(forceinline=True, no_cpython_wrapper=True, no_cfunc_wrapper=True, **options)(
        function
    )
    return compiled


def jit_part(function: Callable[P, R]) -> Callable[P, R]:
    """Compile a part of a kernel that only kernels call: without an entry from Python, which takes longer than most."""
    options = {"error_model": "numpy", "nogil": True, "fastmath": {"contract"}}
    compiled: Callable[P, R] = numba.njit(no_cpython_wrapper=True, no_cfunc_wrapper=True, **options)(function)
    return compiled


def _keep_on_disk(compiled: Any, function: Callable[..., Any]) -> None:
    """Give a compiled function its cache; where numba's inside has changed, numba's own; where none can be, none."""
    if compiled is function:
        return  # numba is told not to compile
    try:
        compiled._cache = _kernel_cache()(function)
    except (ImportError, AttributeError, TypeError):
        compiled.enable_caching()
    except RuntimeError:
        return  # no folder to write to: compiled anew in each process


@functools.cache
def _kernel_cache() -> Any:
    from numba.core.caching import FunctionCache

    class KernelCache(FunctionCache):  # type: ignore[misc]
        """Numba's cache of one function, that notices edits of any kernel."""

        def __init__(self, function: Callable[..., Any]) -> None:
            super().__init__(function)
            file = self._cache_file
            file._source_stamp = (file._source_stamp, sources_digest())

        def load_overload(self, sig: Any, target_context: Any) -> Any:
            try:
                return super().load_overload(sig, target_context)
            except Exception:  # whatever unpickling raises
                with contextlib.suppress(OSError):
                    self.flush()
                return None

    return KernelCache
