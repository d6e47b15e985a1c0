"""How a path gets its time: trapezoidal speed on each stretch between two stops."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError

_MOST_PERIODS = 20_000_000
_ROUNDING = 1e-9


def servo_times(duration: float, period: float) -> FloatArray:
    """Give the times of the servo periods from 0 until a motion of the given duration [s] is over.

    Raises
    ------
    InputError
        If there would be more than twenty million of them.
    """
    periods = duration / period
    if periods > _MOST_PERIODS:
        raise InputError(
            f"the trajectory lasts {duration:.6g} s, which is {periods:.3g} servo periods",
            "raise the feed, check the unit of time, or cut the path into several trials",
        )
    return period * np.arange(int(np.ceil(periods - _ROUNDING)) + 1, dtype=np.float64)


def trapezoid(corners: FloatArray, feed: float, acceleration: float, period: float) -> tuple[FloatArray, FloatArray]:
    """Arc length over time along a path that is run stop by stop.

    On each stretch the speed rises at the given acceleration to the feed and falls again at the same rate; a stretch
    shorter than feed^2 / acceleration never gets to the feed (triangular speed).

    Parameters
    ----------
    corners
        Shape (c,) [m], rising. Arc lengths of the stops, first and last point of the path among them.
    feed, acceleration
        Along the path [m/s], [m/s^2].
    period
        Servo period [s].

    Returns
    -------
    time, arc
        Shape (k,) each. Servo periods [s] and arc length [m] then; the last one stands at the end of the path.
    """
    length = np.diff(corners)
    top = np.minimum(feed, np.sqrt(length * acceleration))
    rise = top / acceleration
    lasts = length / top + rise
    ends = np.cumsum(lasts)
    time = servo_times(float(ends[-1]), period)
    i = np.minimum(np.searchsorted(ends, time, side="right"), len(length) - 1)
    since = np.clip(time - (ends[i] - lasts[i]), 0.0, lasts[i])
    left = lasts[i] - since
    rising = 0.5 * acceleration * np.minimum(since, rise[i]) ** 2
    level = top[i] * np.clip(since - rise[i], 0.0, None)
    falling = length[i] - 0.5 * acceleration * left**2
    arc = corners[i] + np.where(left < rise[i], falling, rising + level)
    return time, np.maximum.accumulate(np.clip(arc, corners[0], corners[-1]))
