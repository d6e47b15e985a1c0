"""The one way in which kernels are compiled."""

from __future__ import annotations

from collections.abc import Callable
from typing import ParamSpec, TypeVar

import numba

P = ParamSpec("P")
R = TypeVar("R")


def jit(function: Callable[P, R]) -> Callable[P, R]:
    """Compile a kernel on its first call and keep the machine code on disk.

    ``error_model="numpy"``: a division by zero gives inf or NaN as in numpy; Python's check would stop vectorisation.
    """
    compiled: Callable[P, R] = numba.njit(cache=True, error_model="numpy", nogil=True)(function)
    return compiled


def jit_inline(function: Callable[P, R]) -> Callable[P, R]:
    """Compile a part of a kernel into whatever kernel calls it, so that what is constant there is constant here too."""
    compiled: Callable[P, R] = numba.njit(error_model="numpy", nogil=True, fastmath={"contract"}, forceinline=True)(
        function
    )
    return compiled
