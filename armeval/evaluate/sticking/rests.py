"""The sticking events of a lap: rests and jumps found joint by joint, and all that the lap tells about each."""

from __future__ import annotations

from typing import Literal

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking.joint_in_log import joints_in_log, target_speed
from armeval.evaluate.sticking.jumps import jumps
from armeval.evaluate.sticking.rest import RELEASE_WINDOW, Rest, rests_by_speed
from armeval.evaluate.sticking.rests_in_counts import rests_in_counts
from armeval.evaluate.sticking.servo_torque import servo_pull
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.model.arm import Arm
from armeval.model.trial import StickingRule

_BEFORE = 0.1  # s: how far back a reversal of the target counts as the reason that the pull must build up anew


def sticking_events(arm: Arm, track: LapTrack, rule: StickingRule) -> tuple[StickingEvent, ...]:
    """Find every rest and every jump of a lap, joint by joint, and measure it.

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
    logged = joints_in_log(arm, track, told) if track.speed is None else ()
    events: list[StickingEvent] = []
    for j, drive in enumerate(arm.drives):
        time, angle, target, speed = track.time, track.angle[:, j], track.target[:, j], told[:, j]
        if track.speed is not None:
            rests = list(rests_by_speed(time, angle, track.speed[:, j], speed, rule))
        else:
            rests = list(rests_in_counts(logged[j], rule))
        skips = jumps(drive, time, angle, target, speed, rests, rule, float(track.resolution[j]))
        events += [_measured(arm, track, j, "rest", rest, speed, rule) for rest in rests]
        events += [_measured(arm, track, j, "jump", jump, speed, rule) for jump in skips]
    return tuple(sorted(events, key=lambda event: (event.start, event.joint)))


def _measured(
    arm: Arm, track: LapTrack, j: int, kind: Literal["rest", "jump"], rest: Rest, told: FloatArray, rule: StickingRule
) -> StickingEvent:
    """Read everything else about a rest off the lap."""
    time = track.time
    first, last = (int(i) for i in np.clip(np.searchsorted(time, (rest.start, rest.end)), 0, len(time) - 1))
    direction = float(np.sign(track.target[last, j] - track.target[first, j])) or 1.0
    sets_off = last if kind == "rest" else first
    after = slice(sets_off, max(last + 1, int(np.searchsorted(time, rest.end + RELEASE_WINDOW, side="right"))))
    turned = track.angle[after, j] - rest.angle
    moved = np.linalg.norm(track.tip[after] - track.tip[sets_off], axis=1)
    ends = [first, last]
    pull = direction * servo_pull(arm, track.angle[ends], track.target[ends])[:, j]
    drive = arm.drives[j]
    return StickingEvent(
        run=track.run,
        lap=track.lap,
        source=track.source,
        joint=drive.joint,
        kind=kind,
        start=rest.start,
        end=rest.end,
        start_error=rest.start_error,
        end_error=rest.end_error,
        start_arc=float(np.interp(rest.start, time, track.arc)),
        end_arc=float(np.interp(rest.end, time, track.arc)),
        joint_angle=rest.angle,
        motor_angle=float(np.mod(drive.gear_ratio * rest.angle + drive.index_offset, 2.0 * np.pi)),
        angle_error=rest.angle_error,
        direction=direction,
        target_speed=float(np.mean(np.abs(told[first : last + 1]))),
        lag=_fallen_behind(track, first, last),
        release_angle=float(turned[np.argmax(np.abs(turned))]),
        release_distance=float(moved.max()),
        pull_start=float(pull[0]),
        pull_end=float(pull[1]),
        reversal=_after_reversal(time, told, first, direction, rule),
        probability=rest.probability,
    )


def _fallen_behind(track: LapTrack, first: int, last: int) -> float:
    """How far the tip falls further behind between two samples, along the way that its target goes meanwhile [m]."""
    way = track.target_tip[last] - track.target_tip[first]
    length = float(np.linalg.norm(way))
    if length == 0.0:
        return 0.0
    return float((way - (track.tip[last] - track.tip[first])) @ way / length)


def _after_reversal(time: FloatArray, told: FloatArray, first: int, direction: float, rule: StickingRule) -> bool:
    """Whether the target stood still or came from the other side just before."""
    since = int(np.searchsorted(time, time[first] - _BEFORE))
    before = direction * told[since : first + 1]
    return bool((before < rule.least_target_speed).any()) or since == 0
