"""Columns of arrow to numpy and back without a copy, and without the import of pandas that arrow's own ways entail."""

from __future__ import annotations

from typing import TYPE_CHECKING, cast

import numpy as np

from armeval.arrays import FloatArray

if TYPE_CHECKING:
    import pyarrow as pa


def from_arrow(column: pa.ChunkedArray) -> FloatArray:
    """Give a column of float64 as one array, shape (k,), NaN where there is no number; copied if it is in pieces."""
    if column.null_count:
        column = column.fill_null(float("nan"))
    pieces = [cast(FloatArray, np.from_dlpack(chunk)) for chunk in column.chunks]
    return pieces[0] if len(pieces) == 1 else np.concatenate([np.empty(0), *pieces])


def to_arrow(values: FloatArray) -> pa.Array:
    """Give numbers, shape (k,), as a column."""
    import pyarrow as pa

    contiguous = np.ascontiguousarray(values, dtype=np.float64)
    return pa.Array.from_buffers(pa.float64(), len(contiguous), [None, pa.py_buffer(contiguous)])
