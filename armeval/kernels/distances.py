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


@jit
def farthest(points: FloatArray, arc: FloatArray, path: FloatArray, path_arc: FloatArray) -> tuple[float, int]:
    """Greatest distance of points (k, 3) from a polyline at arc lengths (k,) that never fall, and which point it is."""
    last = path_arc.shape[0] - 2
    worst, which, segment = -1.0, 0, 0
    for j in range(points.shape[0]):
        while segment < last and arc[j] >= path_arc[segment + 1]:
            segment += 1
        share = (arc[j] - path_arc[segment]) / (path_arc[segment + 1] - path_arc[segment])
        square = 0.0
        for r in range(3):
            square += (points[j, r] - path[segment, r] - share * (path[segment + 1, r] - path[segment, r])) ** 2
        if square > worst:
            worst, which = square, j
    return np.sqrt(worst), which
