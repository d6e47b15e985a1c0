"""Largest value of a periodic table over any arc of the circle, at once for many arcs.

Level j of the pyramid holds at each place the largest of the 2^j values from there on (a sparse table, Bender &
Farach-Colton 2000); any arc is covered by two overlapping powers of two.
"""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray


def largest_on_arcs(values: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
    """Largest value between two angles, the entries just outside both included.

    Parameters
    ----------
    values
        Shape (m,). Values at the angles ``2 pi k / m``.
    low, high
        Shape (k,) [rad], low <= high, any turn.

    Returns
    -------
    Shape (k,).
    """
    m = len(values)
    first = np.floor(low * (m / (2.0 * np.pi))).astype(np.int64)
    count = np.ceil(high * (m / (2.0 * np.pi))).astype(np.int64) - first + 1
    count = np.minimum(count, m)
    level = np.frexp(count.astype(np.float64))[1] - 1
    largest = np.empty(len(first))
    row = np.asarray(values, dtype=np.float64)
    for j in range(int(level.max()) + 1 if len(level) else 0):
        if j > 0:
            row = np.maximum(row, np.roll(row, -(1 << (j - 1))))
        here = level == j
        begin = first[here]
        largest[here] = np.maximum(row[begin % m], row[(begin + count[here] - (1 << j)) % m])
    return largest
