"""Stretches over which a signal keeps within a width."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray, IntArray, read_only
from armeval.kernels.compile import jit


def within_width(signal: FloatArray, width: float) -> IntArray:
    """Find the longest stretches over which a signal keeps within a width, in one pass.

    Parameters
    ----------
    signal
        Shape (k,).
    width
        Largest minus smallest value that is allowed, not negative.

    Returns
    -------
    Shape (h, 2), first sample and the one after the last, in order. None of them can be made longer. Of two that
    overlap by more than half of the first, only the longer one is given.
    """
    found, queues = np.empty((len(signal), 2), np.int64), np.empty((2, len(signal)), np.int64)
    return found[: _within_width(read_only(signal), width, queues, found)].copy()


@jit
def _within_width(signal: FloatArray, width: float, queues: IntArray, found: IntArray) -> int:
    """Fill in the stretches and give their number."""
    k = signal.shape[0]
    h = 0
    # Two queues of samples hold the largest and the smallest value of the stretch that ends here.
    high, low = queues[0], queues[1]
    high_first = high_stop = low_first = low_stop = 0
    start = 0
    for i in range(k + 1):
        if i < k:
            while high_stop > high_first and signal[high[high_stop - 1]] <= signal[i]:
                high_stop -= 1
            high[high_stop] = i
            high_stop += 1
            while low_stop > low_first and signal[low[low_stop - 1]] >= signal[i]:
                low_stop -= 1
            low[low_stop] = i
            low_stop += 1
            if signal[high[high_first]] - signal[low[low_first]] <= width:
                continue
        if h > 0 and 2 * start < found[h - 1, 0] + found[h - 1, 1]:
            if i - start > found[h - 1, 1] - found[h - 1, 0]:
                found[h - 1, 0], found[h - 1, 1] = start, i
        else:
            found[h, 0], found[h, 1] = start, i
            h += 1
        if i == k:
            break
        while signal[high[high_first]] - signal[low[low_first]] > width:
            start += 1
            if high[high_first] < start:
                high_first += 1
            if low[low_first] < start:
                low_first += 1
    return h
