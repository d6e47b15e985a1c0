"""Draws of a circular block bootstrap: the studentised shift of a sum of log ratios."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.kernels.compile import jit


@jit
def studentised_shifts(
    total: FloatArray, count: FloatArray, sign: FloatArray, start: IntArray, length: int, bins: int
) -> FloatArray:
    """Shift of theta = sum_j sign_j log(sum total_j / sum count_j) in each draw, over the draw's own standard error.

    Parameters
    ----------
    total, count
        Shape (runs, bins + length + 1). Running sums over the bins, from 0, going round the circle by one block.
    sign
        Shape (runs,).
    start
        Shape (draws, blocks). First bin of each drawn block; the last block is cut so that a draw has ``bins`` bins.
    length
        Bins in a block.
    bins
        Bins on the circle.

    Returns
    -------
    Shape (draws,); NaN where all blocks of a draw are alike.
    """
    runs, (draws, blocks) = total.shape[0], start.shape
    last = bins - length * (blocks - 1)
    mean = np.empty(runs)
    theta = 0.0
    for r in range(runs):
        mean[r] = total[r, bins] / count[r, bins]
        theta += sign[r] * np.log(mean[r])
    found = np.full(draws, np.nan)
    again = np.empty(runs)
    weight = np.empty(runs)
    for d in range(draws):
        shift = -theta
        for r in range(runs):
            whole = weights = 0.0
            for b in range(blocks):
                first = start[d, b]
                end = first + (length if b < blocks - 1 else last)
                whole += total[r, end] - total[r, first]
                weights += count[r, end] - count[r, first]
            weight[r] = max(weights, 1.0)
            again[r] = max(whole / weight[r], 1e-12 * mean[r])
            shift += sign[r] * np.log(again[r])
        spread = 0.0
        for b in range(blocks):
            first = start[d, b]
            end = first + (length if b < blocks - 1 else last)
            part = 0.0
            for r in range(runs):
                drawn = total[r, end] - total[r, first]
                part += sign[r] * (drawn / again[r] - (count[r, end] - count[r, first])) / weight[r]
            spread += part * part
        if spread > 1e-20:  # the square of rounding: all blocks alike
            found[d] = shift / np.sqrt(spread)
    return found
