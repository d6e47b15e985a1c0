"""The sticking events of a lap: rests found joint by joint, and all that the lap tells about each."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.joint_in_log import joints_in_log, target_speed
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.rest import Rest, rests_by_speed
from armeval.evaluate.rests_in_counts import rests_in_counts
from armeval.evaluate.servo_torque import servo_pull
from armeval.evaluate.sticking_event import StickingEvent
from armeval.model.arm import Arm
from armeval.model.trial import StickingRule

RELEASE_WINDOW = 0.050
"""Within this time [s] after a rest its release is measured."""

_BEFORE = 0.1  # s: how far back a reversal of the target counts as the reason that the pull must build up anew


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
    if track.speed is not None:
        found = [
            rests_by_speed(track.time, track.angle[:, j], track.speed[:, j], told[:, j], rule)
            for j in range(arm.chain.count)
        ]
    else:
        found = [rests_in_counts(joint, rule) for joint in joints_in_log(arm, track)]
    events = [_measured(arm, track, j, rest, told[:, j], rule) for j, rests in enumerate(found) for rest in rests]
    return tuple(sorted(events, key=lambda event: (event.start, event.joint)))


def _measured(arm: Arm, track: LapTrack, j: int, rest: Rest, told: FloatArray, rule: StickingRule) -> StickingEvent:
    """Read everything else about a rest off the lap."""
    time = track.time
    first, last = (int(i) for i in np.clip(np.searchsorted(time, (rest.start, rest.end)), 0, len(time) - 1))
    direction = float(np.sign(track.target[last, j] - track.target[first, j])) or 1.0
    after = slice(last, max(last + 1, int(np.searchsorted(time, rest.end + RELEASE_WINDOW, side="right"))))
    turned = track.angle[after, j] - rest.angle
    moved = np.linalg.norm(track.tip[after] - track.tip[last], axis=1)
    ends = [first, last]
    pull = direction * servo_pull(arm, track.angle[ends], track.target[ends])[:, j]
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
        start_arc=float(np.interp(rest.start, time, track.arc)),
        end_arc=float(np.interp(rest.end, time, track.arc)),
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
        reversal=_after_reversal(time, told, first, direction, rule),
        probability=rest.probability,
    )


def _after_reversal(time: FloatArray, told: FloatArray, first: int, direction: float, rule: StickingRule) -> bool:
    """Whether the target stood still or came from the other side just before."""
    since = int(np.searchsorted(time, time[first] - _BEFORE))
    before = direction * told[since : first + 1]
    return bool((before < rule.least_target_speed).any()) or since == 0
