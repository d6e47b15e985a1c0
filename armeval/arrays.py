"""Names for the arrays that travel through the program, and the one check at the door of every object."""

from __future__ import annotations

from typing import TypeAlias, TypeGuard

import numpy as np
import numpy.typing as npt

from armeval.errors import InputError

FloatArray: TypeAlias = npt.NDArray[np.float64]
IntArray: TypeAlias = npt.NDArray[np.int64]
BoolArray: TypeAlias = npt.NDArray[np.bool_]


def frozen(values: npt.ArrayLike, shape: tuple[int | None, ...], name: str) -> FloatArray:
    """Give a read-only contiguous float64 array of the wanted shape: a copy, unless the values are one already.

    Parameters
    ----------
    values
        Anything numpy can read as numbers.
    shape
        Wanted length of each axis; ``None`` leaves an axis free.
    name
        What the array is, for the message.

    Raises
    ------
    InputError
        If the shape differs, or a number is not finite.
    """
    array = values if _is_frozen(values) else np.array(values, dtype=np.float64, order="C")
    if array.ndim != len(shape) or any(w is not None and w != g for w, g in zip(shape, array.shape, strict=True)):
        wanted = " x ".join("any" if w is None else str(w) for w in shape)
        raise InputError(f"{name} has shape {array.shape}", f"give it the shape {wanted}")
    if not _is_finite(array):
        raise InputError(f"{name} holds values that are not finite numbers", "remove NaN and infinite values")
    array.setflags(write=False)
    return array


def read_only(values: FloatArray) -> FloatArray:
    """Give a read-only contiguous view, or a copy where there is no such view.

    Kernels are compiled anew for every mix of arrays that may and that may not be written, so what they only read is
    handed to them like this.
    """
    view = np.ascontiguousarray(values, dtype=np.float64).view()
    view.setflags(write=False)
    return view


def _is_finite(array: FloatArray) -> bool:
    """Whether all numbers are finite: their sum tells in one pass over a long log; where it overflows, each of them."""
    with np.errstate(over="ignore", invalid="ignore"):
        return bool(np.isfinite(array.sum())) or bool(np.isfinite(array).all())


def _is_frozen(values: npt.ArrayLike) -> TypeGuard[FloatArray]:
    """Whether nobody can write into it: long logs are then shared between objects instead of copied."""
    if not isinstance(values, np.ndarray) or values.dtype != np.float64 or not values.flags.c_contiguous:
        return False
    owner = values if values.base is None else values.base
    return not values.flags.writeable and isinstance(owner, np.ndarray) and not owner.flags.writeable


def frozen_limits(values: npt.ArrayLike, shape: tuple[int | None, ...], name: str) -> FloatArray:
    """Like :func:`frozen`, but infinite values are allowed: a joint may have no limit."""
    array = np.array(values, dtype=np.float64, order="C")
    frozen(np.where(np.isinf(array), 0.0, array), shape, name)
    array.setflags(write=False)
    return array
