"""Where a joint rests while it is told to move: from true speeds in a prediction, from encoder counts in a log."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from armeval.arrays import BoolArray, FloatArray, IntArray
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.servo_pull import servo_pull
from armeval.evaluate.sticking_event import StickingEvent
from armeval.model.arm import Arm
from armeval.model.trial import StickingRule

_RELEASE_WINDOW = 0.050  # s: within this time after a rest the release is measured
_SPEED_WINDOW = 0.010  # s: over this time a logged target's speed is taken, so that its own steps do not matter


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


def stretches(flag: BoolArray) -> IntArray:
    """Find where a flag stays up: shape (r, 2), first sample and the one after the last."""
    edges = np.diff(np.concatenate(([0], flag.astype(np.int8), [0])))
    return np.stack([np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)], axis=1)


def target_speed(track: LapTrack) -> FloatArray:
    """Shape (k, n) [rad/s]. How fast each joint is told to move, by central differences of its target."""
    time, target = track.time, track.target
    if track.source == "prediction":
        return np.asarray(np.gradient(target, time, axis=0))
    period = float(np.median(np.diff(time)))
    half = max(1, round(0.5 * _SPEED_WINDOW / period))
    index = np.arange(len(time))
    before, after = np.maximum(index - half, 0), np.minimum(index + half, len(time) - 1)
    return np.asarray((target[after] - target[before]) / (time[after] - time[before])[:, None])


def rests_by_speed(
    time: FloatArray, angle: FloatArray, speed: FloatArray, told: FloatArray, rule: StickingRule
) -> Iterator[Rest]:
    """Find the rests of one joint whose true speed is known, by the definition alone.

    Parameters
    ----------
    time, angle, speed, told
        Shape (k,) [s], [rad], [rad/s], [rad/s]. ``told`` is the speed of the target.
    rule
        The thresholds.
    """
    resting = (np.abs(told) >= rule.least_target_speed) & (np.abs(speed) < rule.speed_share * np.abs(told))
    half = 0.5 * float(np.median(np.diff(time)))
    for first, stop in stretches(resting):
        start, end = float(time[first]), float(time[min(stop, len(time) - 1)])
        if end - start >= rule.least_dwell - 1e-9:
            within = angle[first:stop]
            yield Rest(start, end, half, half, float(np.median(within)), float(np.std(within)))


def rests_by_counts(
    time: FloatArray, angle: FloatArray, target: FloatArray, told: FloatArray, count: float, rule: StickingRule
) -> Iterator[Rest]:
    """Find the rests of one joint in a log.

    Parameters
    ----------
    time, angle, target, told
        Shape (k,) [s], [rad], [rad], [rad/s].
    count
        Joint angle of one encoder count [rad]; 0 where unknown: the smallest step in the log.
    rule
        The thresholds.
    """
    if count == 0.0:
        steps = np.abs(np.diff(angle))
        count = float(steps[steps > 0.0].min()) if steps.any() else 1e-6
    counts = np.rint(angle / count)
    moved = np.concatenate(([True], np.diff(counts) != 0.0))
    first = np.flatnonzero(moved)
    stop = np.append(first[1:], len(time))
    for a, b in zip(first, stop, strict=True):
        end = min(b, len(time) - 1)
        speed = np.abs(told[a:b])
        if (
            time[end] - time[a] >= rule.least_dwell
            and abs(target[end] - target[a]) >= 3.0 * count
            and speed.min() >= rule.least_target_speed
        ):
            yield Rest(float(time[a]), float(time[end]), 0.005, 0.005, float(angle[a]), 0.3 * count, 0.5)


def sticking_events(arm: Arm, track: LapTrack, rule: StickingRule) -> tuple[StickingEvent, ...]:
    """Find every rest of a lap, joint by joint, and measure it.

    Parameters
    ----------
    arm
        The arm, n joints.
    track
        The lap, measured or predicted.
    rule
        When a joint counts as resting.

    Returns
    -------
    The events in order of time, their causes not yet looked for.
    """
    told = target_speed(track)
    events: list[StickingEvent] = []
    for j in range(arm.chain.count):
        time, angle = track.time, track.angle[:, j]
        if track.speed is not None:
            found = rests_by_speed(time, angle, track.speed[:, j], told[:, j], rule)
        else:
            found = rests_by_counts(time, angle, track.target[:, j], told[:, j], float(track.resolution[j]), rule)
        events.extend(_measured(arm, track, j, rest, told[:, j], rule) for rest in found)
    return tuple(sorted(events, key=lambda event: (event.start, event.joint)))


def _measured(arm: Arm, track: LapTrack, j: int, rest: Rest, told: FloatArray, rule: StickingRule) -> StickingEvent:
    """Read everything else about a rest off the lap."""
    first, last = (int(i) for i in np.clip(np.searchsorted(track.time, (rest.start, rest.end)), 0, len(track.time) - 1))
    direction = float(np.sign(track.target[last, j] - track.target[first, j])) or 1.0
    after = slice(last, max(last + 1, int(np.searchsorted(track.time, rest.end + _RELEASE_WINDOW, side="right"))))
    turned = track.angle[after, j] - rest.angle
    moved = np.linalg.norm(track.tip[after] - track.tip[last], axis=1)
    pull = direction * servo_pull(arm, track, np.array([first, last]))[:, j]
    drive = arm.drives[j]
    return StickingEvent(
        run=track.run,
        lap=track.lap,
        source=track.source,
        joint=drive.joint,
        kind="rest",
        start=rest.start,
        end=rest.end,
        start_error=rest.start_error,
        end_error=rest.end_error,
        start_arc=float(np.interp(rest.start, track.time, track.arc)),
        end_arc=float(np.interp(rest.end, track.time, track.arc)),
        joint_angle=rest.angle,
        motor_angle=float(np.mod(drive.gear_ratio * rest.angle + drive.index_offset, 2.0 * np.pi)),
        angle_error=rest.angle_error,
        direction=direction,
        target_speed=float(np.mean(np.abs(told[first : last + 1]))),
        lag=float(track.lag[last] - track.lag[first]),
        release_angle=float(turned[np.argmax(np.abs(turned))]),
        release_distance=float(moved.max()),
        pull_start=float(pull[0]),
        pull_end=float(pull[1]),
        reversal=_after_reversal(track.time, told, first, direction, rule),
        probability=rest.probability,
    )


def _after_reversal(time: FloatArray, told: FloatArray, first: int, direction: float, rule: StickingRule) -> bool:
    """Whether the target stood still or came from the other side just before."""
    since = int(np.searchsorted(time, time[first] - 0.1))
    before = direction * told[since : first + 1]
    return bool((before < rule.least_target_speed).any()) or since == 0
