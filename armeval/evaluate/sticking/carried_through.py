"""Where sticking ratio and replay disagree: speed carries a joint through, or it rests though its cogging is gentle.

The sticking ratio says what happens when the path is followed slowly enough. At the path's own speed inertia and
damping may carry a joint over a place where the ratio exceeds 1; and friction may stop it where the ratio stays below.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import BoolArray, FloatArray, IntArray
from armeval.evaluate.document import JsonValue
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.replaying.sticking_ratio import StickingRatio
from armeval.evaluate.sticking.joint_in_log import target_speed
from armeval.evaluate.sticking.jumps import cog_pitch
from armeval.evaluate.sticking.rest import stretches
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.model.arm import Arm
from armeval.model.trial import StickingRule
from armeval.units import significant


@dataclass(frozen=True)
class CarriedStretch:
    """A stretch of path whose steep places a joint passes without resting.

    Attributes
    ----------
    start_arc, end_arc
        Along the path [m].
    places
        How many places with a ratio above 1 it holds.
    ratio
        The largest ratio there.
    slowest, fastest
        Mean speed that the joint is told at the slowest and the fastest of them [rad/s], without sign.
    """

    start_arc: float
    end_arc: float
    places: int
    ratio: float
    slowest: float
    fastest: float


@dataclass(frozen=True)
class GentleRest:
    """A rest where the ratio stays at or below 1 for half a cog pitch to either side of the plan.

    Attributes
    ----------
    rest
        The rest, with the cause that was found.
    ratio
        The largest ratio there.
    """

    rest: StickingEvent
    ratio: float


@dataclass(frozen=True)
class CarriedThrough:
    """Sticking ratio against replay, for one joint of a predicted run.

    Attributes
    ----------
    joint
        The joint.
    places
        So many places with a ratio above 1 lie along the path, told to move all the way over them.
    sticks_at
        At so many of them it rests, or jumps.
    fastest_rest
        The fastest target at which it rests or jumps at one of them [rad/s]; 0 where it never does.
    carried
        Where it does not.
    gentle_rests
        Rests that the ratio does not foresee.
    """

    joint: str
    places: int
    sticks_at: int
    fastest_rest: float
    carried: tuple[CarriedStretch, ...]
    gentle_rests: tuple[GentleRest, ...]

    @property
    def text(self) -> str:
        """Say it in one or two sentences; empty where ratio and replay have nothing to say."""
        said = []
        passed = self.places - self.sticks_at
        if self.places:
            told = f"the sticking ratio of {self.joint} exceeds 1 at {_count(self.places, 'place')}"
            if passed == 0:
                said.append(f"{told}, and it sticks at {'all of them' if self.places > 1 else 'it'}.")
            else:
                slowest = significant(min(stretch.slowest for stretch in self.carried), 2)
                fastest = significant(max(stretch.fastest for stretch in self.carried), 2)
                speeds = f"{slowest} rad/s" if slowest == fastest else f"{slowest} to {fastest} rad/s"
                sticks = f"sticks at {self.sticks_at}, told at most {significant(self.fastest_rest, 2)} rad/s"
                sticks = sticks if self.sticks_at else "sticks at none"
                said.append(f"{told}: it {sticks}; speed carries it through {passed}, told {speeds} there.")
        if self.gentle_rests:
            causes = Counter(gentle.rest.cause for gentle in self.gentle_rests)
            named = ", ".join(f"{name} {many}" for name, many in causes.most_common())
            many = len(self.gentle_rests)
            verb = "is" if many == 1 else "are"
            said.append(f"{_count(many, 'rest')} of {self.joint} {verb} where the ratio stays below 1 ({named}).")
        return " ".join(sentence[0].upper() + sentence[1:] for sentence in said)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the joint's entry in the JSON document."""
        return {
            "joint": self.joint,
            "places": self.places,
            "sticks_at": self.sticks_at,
            "fastest_rest_rad_s": self.fastest_rest,
            "carried": [
                {
                    "start_m": stretch.start_arc,
                    "end_m": stretch.end_arc,
                    "places": stretch.places,
                    "ratio": stretch.ratio,
                    "slowest_rad_s": stretch.slowest,
                    "fastest_rad_s": stretch.fastest,
                }
                for stretch in self.carried
            ],
            "gentle_rests": [
                {
                    "start_m": gentle.rest.start_arc,
                    "end_m": gentle.rest.end_arc,
                    "ratio": gentle.ratio,
                    "cause": gentle.rest.cause,
                }
                for gentle in self.gentle_rests
            ],
            "text": self.text,
        }


def carried_through(
    arm: Arm, track: LapTrack, ratio: StickingRatio, events: Sequence[StickingEvent], rule: StickingRule
) -> tuple[CarriedThrough, ...]:
    """Hold the sticking ratio along the path against where a replayed lap rests.

    A place is a stretch of the plan over which a joint's ratio stays above 1: one in each cog pitch. The joint sticks
    there when it rests, or jumps, within half a pitch of it while its target is within a pitch of it: a joint that
    follows a target over such a place rests before the fold, at most that far away.

    Parameters
    ----------
    arm
        The arm, n joints.
    track
        The replayed lap, k samples.
    ratio
        Along the same k samples of the plan.
    events
        The lap's rests and jumps, with causes.
    rule
        When a joint counts as told to move.

    Returns
    -------
    One entry a joint, in the chain's order.
    """
    told = np.abs(target_speed(track))
    found = []
    for j, drive in enumerate(arm.drives):
        own = [event for event in events if event.joint == drive.joint]
        pitch = cog_pitch(drive)
        steep = _passed(ratio.ratio[:, j] > 1.0, told[:, j] >= rule.least_target_speed)
        if pitch is None:
            steep = steep[:0]
        way = np.concatenate(([0.0], np.cumsum(np.abs(np.diff(track.target[:, j])))))
        sticks = [_sticks(track, j, way, int(first), int(stop), pitch or 0.0, own) for first, stop in steep]
        fastest = max((event.target_speed for events in sticks for event in events), default=0.0)
        runs = stretches(np.array([not events for events in sticks], dtype=bool))
        carried = tuple(_carried(track, ratio, told, j, steep[begin:end]) for begin, end in runs)
        gentle = tuple(_gentle(track, ratio, j, own))
        found.append(
            CarriedThrough(drive.joint, len(steep), sum(map(bool, sticks)), fastest, carried, gentle),
        )
    return tuple(found)


def _passed(steep: BoolArray, moving: BoolArray) -> IntArray:
    """Find the steep places that the target passes as a whole: it neither stops, starts nor turns back within."""
    places = stretches(steep)
    return np.array([(first, stop) for first, stop in places if moving[first:stop].all()], dtype=np.int64).reshape(
        -1, 2
    )


def _sticks(
    track: LapTrack,
    j: int,
    way: FloatArray,
    first: int,
    stop: int,
    pitch: float,
    events: Sequence[StickingEvent],
) -> list[StickingEvent]:
    """Give the rests and jumps at a steep place; ``way`` is how far the target has gone."""
    target = track.target[:, j]
    near = np.searchsorted(way, (way[first] - pitch, way[stop - 1] + pitch))
    begin, end = (float(track.time[min(int(row), len(way) - 1)]) for row in near)
    low, high = sorted((float(target[first]), float(target[stop - 1])))
    return [
        event
        for event in events
        if event.start <= end and event.end >= begin and low - 0.5 * pitch <= event.joint_angle <= high + 0.5 * pitch
    ]


def _carried(track: LapTrack, ratio: StickingRatio, told: FloatArray, j: int, places: IntArray) -> CarriedStretch:
    rows = np.concatenate([np.arange(first, stop) for first, stop in places])
    speeds = [float(told[first:stop, j].mean()) for first, stop in places]
    return CarriedStretch(
        start_arc=float(track.arc[rows[0]]),
        end_arc=float(track.arc[rows[-1]]),
        places=len(places),
        ratio=float(ratio.ratio[rows, j].max()),
        slowest=min(speeds),
        fastest=max(speeds),
    )


def _gentle(track: LapTrack, ratio: StickingRatio, j: int, events: Sequence[StickingEvent]) -> list[GentleRest]:
    found = []
    for event in events:
        first, last = np.searchsorted(track.time, (event.start, event.end))
        most = float(ratio.envelope[first : last + 1, j].max())
        if event.kind == "rest" and most <= 1.0:
            found.append(GentleRest(event, most))
    return found


def _count(many: int, what: str) -> str:
    return f"{many} {what}{'' if many == 1 else 's'}"
