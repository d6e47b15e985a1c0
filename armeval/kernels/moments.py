"""Sums over long rows of errors in one pass, without temporary arrays."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.kernels.compile import jit


@jit
def moments(values: FloatArray) -> tuple[float, float, float]:
    """Sum, sum of squares and largest of values (k,); 0, 0 and minus infinity of none."""
    total = squares = 0.0
    largest = -np.inf
    for value in values:
        total += value
        squares += value * value
        largest = max(largest, value)
    return total, squares, largest


@jit
def squares_in_bins(values: FloatArray, edges: IntArray) -> tuple[FloatArray, float]:
    """Sum of squares in each bin, and the sum of fourth powers over all.

    Parameters
    ----------
    values
        Shape (k,).
    edges
        Shape (bins + 1,). First sample of each bin, and the end of the last.
    """
    bins = edges.shape[0] - 1
    squares = np.zeros(bins)
    fourth = 0.0
    for i in range(bins):
        for j in range(edges[i], edges[i + 1]):
            square = values[j] * values[j]
            squares[i] += square
            fourth += square * square
    return squares, fourth
