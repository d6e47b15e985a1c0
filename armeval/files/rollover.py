"""Counters that roll over: a number that jumps by the whole range of its counter has gone on all the same."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from armeval.arrays import FloatArray


def unroll(values: FloatArray, wraps: Sequence[float]) -> tuple[float, int] | None:
    """Undo the rollovers of a counter in place.

    A step of more than half a range is a rollover if the values stay within one range and every such step, once the
    range is taken off, is small: at most 1/64 of the range, or four times the largest usual step.

    Parameters
    ----------
    values
        Shape (k,), in the order of time; changed if there are rollovers.
    wraps
        Ranges that the counter may have, smallest first, in the unit of the values.

    Returns
    -------
    tuple of float and int, or None
        The range and how often it was passed; None if the counter never rolled over.
    """
    if len(values) < 2 or not wraps:
        return None
    lowest, highest = float(values.min()), float(values.max())
    if highest - lowest <= 0.5 * wraps[0]:
        return None
    steps = np.diff(values)
    for wrap in wraps:
        passed = np.abs(steps) > 0.5 * wrap
        if highest - lowest > wrap * (1.0 + 1e-9) or not passed.any():
            continue
        usual = float(np.abs(steps, where=~passed, out=np.zeros_like(steps)).max())
        turns = -np.sign(steps[passed])
        left = np.abs(steps[passed] + turns * wrap)
        if left.max() <= min(max(wrap / 64.0, 4.0 * usual), wrap / 4.0):
            places = np.flatnonzero(passed) + 1
            for place, turn in zip(places, turns, strict=True):
                values[place:] += turn * wrap
            return wrap, len(places)
    return None
