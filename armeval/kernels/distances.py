"""Distances between rows of points, sample by sample."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit


@jit
def distances(first: FloatArray, second: FloatArray) -> FloatArray:
    """Distance of every point of one row from the same of another: (k, 3) and (k, 3) give (k,) [m]."""
    k = first.shape[0]
    found = np.empty(k)
    for j in range(k):
        x, y, z = first[j, 0] - second[j, 0], first[j, 1] - second[j, 1], first[j, 2] - second[j, 2]
        found[j] = np.sqrt(x * x + y * y + z * z)
    return found
