"""Distances between rows of points, sample by sample."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray


def distances(first: FloatArray, second: FloatArray) -> FloatArray:
    """Distance of every point of one row from the same of another: (k, 3) and (k, 3) give (k,) [m]."""
    way = first - second
    return np.asarray(np.sqrt(np.einsum("kr,kr->k", way, way)))
