"""Sudden motions that no rest precedes: a joint that creeps up to a fold of its cogging and snaps into the next cog."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_orders import expected_orders, orders
from armeval.evaluate.sticking.rest import RELEASE_WINDOW, Rest, sample_period, stretches
from armeval.model.drive import Drive
from armeval.model.trial import StickingRule

JUMP_SHARE = 0.4
"""Share of a cog pitch that a joint gains on its target in a jump: a snap over one pitch gains half a pitch or more."""

_CORE = 0.1  # of what was gained is left aside at both ends to say when a jump began and ended


def cog_pitch(drive: Drive) -> float | None:
    """Joint angle [rad or m] of one period of the dominant order; None where it is not known."""
    found = orders(drive.cog_map) if drive.cog_map is not None else ()
    order = found[0].order if found else expected_orders(drive.slots, drive.poles).fundamental
    return None if order is None else 2.0 * np.pi / order / abs(drive.gear_ratio)


def jumps(
    drive: Drive,
    time: FloatArray,
    angle: FloatArray,
    target: FloatArray,
    told: FloatArray,
    rests: Sequence[Rest],
    rule: StickingRule,
    count: float,
) -> Iterator[Rest]:
    """Find where a joint gains much of a cog pitch on its target within the time of a release.

    Parameters
    ----------
    drive
        The joint's drive; without a known order nothing is found.
    time, angle, target, told
        Shape (k,) [s], [rad], [rad], [rad/s].
    rests
        The joint's rests: what follows one of them is its release.
    rule
        When a joint counts as told to move.
    count
        Joint angle of one encoder count [rad]; 0 where exact.

    Yields
    ------
    Rest
        From the start to the end of the jump, with the angle at which it set off.
    """
    pitch = cog_pitch(drive)
    if pitch is None or len(time) < 3:
        return
    way = np.sign(told)
    behind = way * (target - angle)
    later = np.minimum(np.searchsorted(time, time + RELEASE_WINDOW), len(time) - 1)
    moving = (np.abs(told) >= rule.least_target_speed) & (way[later] == way)
    gained = np.where(moving, behind - behind[later], 0.0)
    period = sample_period(time)
    free_from = -np.inf
    for first, stop in stretches(gained >= max(JUMP_SHARE * pitch, 4.0 * count)):
        best = first + int(np.argmax(gained[first:stop]))
        course = behind[best : later[best] + 1]
        done = (course[0] - course) / (course[0] - course[-1])
        begin = best + int(np.flatnonzero(done <= _CORE)[-1])
        end = best + int(np.flatnonzero(done >= 1.0 - _CORE)[0])
        if end <= begin or time[begin] < free_from:
            continue
        if any(rest.start <= time[end] and time[begin] <= rest.end + RELEASE_WINDOW for rest in rests):
            continue
        free_from = time[end]
        yield Rest(float(time[begin]), float(time[end]), period, period, float(angle[begin]), max(0.3 * count, 1e-9))
