"""A stretch of time in which one joint rests while it is told to move, by the definition alone."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from armeval.arrays import BoolArray, FloatArray, IntArray
from armeval.model.trial import StickingRule

RELEASE_WINDOW = 0.050
"""Within this time [s] after a rest its release is measured."""


@dataclass(frozen=True)
class Rest:
    """A stretch of a lap in which one joint rests.

    Attributes
    ----------
    start, end
        Times [s] on the track's clock.
    start_error, end_error
        One standard deviation [s].
    angle, angle_error
        Where it rests and one standard deviation [rad or m].
    probability
        On the evidence of the log; 1 where true speeds are known.
    """

    start: float
    end: float
    start_error: float
    end_error: float
    angle: float
    angle_error: float
    probability: float = 1.0


def sample_period(time: FloatArray) -> float:
    """Time between samples [s]: the median over the first thousand, which a lost sample does not move."""
    return float(np.median(np.diff(time[:1001])))


def stretches(flag: BoolArray) -> IntArray:
    """Find where a flag stays up: shape (r, 2), first sample and the one after the last."""
    edges = np.diff(np.concatenate(([0], flag.astype(np.int8), [0])))
    return np.stack([np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)], axis=1)


def rests_by_speed(
    time: FloatArray, angle: FloatArray, speed: FloatArray, told: FloatArray, rule: StickingRule
) -> Iterator[Rest]:
    """Find the rests of one joint whose true speed is known.

    Parameters
    ----------
    time, angle, speed, told
        Shape (k,) [s], [rad], [rad/s], [rad/s]. ``told`` is the speed of the target.
    rule
        The thresholds.
    """
    resting = (np.abs(told) >= rule.least_target_speed) & (np.abs(speed) < rule.speed_share * np.abs(told))
    half = 0.5 * sample_period(time)
    for first, stop in stretches(resting):
        start, end = float(time[first]), float(time[min(stop, len(time) - 1)])
        if end - start >= rule.least_dwell - 1e-9:
            within = angle[first:stop]
            yield Rest(start, end, half, half, float(np.median(within)), float(np.std(within)))
