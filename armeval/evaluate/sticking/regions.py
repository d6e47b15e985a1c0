"""Stretches of path where a joint sticks, merged over laps, and the same stretch found again in another run."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from armeval.evaluate.document import JsonValue
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking.sticking_event import CauseName, StickingEvent

Fate = Literal["gone", "weaker", "same", "new"]
FoundBy = Literal["both", "measured only", "predicted only"]

_REACH = 1e-3  # m: laps stick at the same place when their rests are within this along the path
_WEAKER = 0.7  # a region is weaker when what is left of its strength is below this share


@dataclass(frozen=True)
class Region:
    """Where one joint sticks, over the laps of a run.

    Attributes
    ----------
    run, source, joint
        Where it belongs.
    start_arc, end_arc
        Stretch of the path [m] that the rests of all laps cover.
    joint_angle, motor_angle
        Mean angle at which the joint rested [rad or m], [rad].
    direction, target_speed
        Which way the joint was told to move, and how fast [rad/s].
    laps, of_laps
        In how many laps it stuck here, of how many.
    dwell
        How long a lap rests here, mean over the laps that stuck [s].
    lag
        Lag built up in one lap, mean over the laps that stuck [m].
    release_angle, release_distance
        Largest release [rad or m], [m at the tip].
    pull
        Largest pull of the servo before a release [N m].
    harm
        Share of the run's squared tip error that falls within the stretch.
    cause
        The cause of most of its rests.
    events
        Its events.
    """

    run: str
    source: Literal["log", "prediction"]
    joint: str
    start_arc: float
    end_arc: float
    joint_angle: float
    motor_angle: float
    direction: float
    target_speed: float
    laps: int
    of_laps: int
    dwell: float
    lag: float
    release_angle: float
    release_distance: float
    pull: float
    harm: float
    cause: CauseName
    events: tuple[StickingEvent, ...]
    action: str = ""

    @property
    def strength(self) -> float:
        """Lag built up a lap, over all laps [m]: by it two runs are compared."""
        return max(self.lag, 0.0) * self.laps / self.of_laps

    def meets(self, other: Region) -> bool:
        """Whether both are the same joint at the same place of the path, within a millimetre."""
        near = self.start_arc - _REACH <= other.end_arc and other.start_arc - _REACH <= self.end_arc
        return self.joint == other.joint and near

    def to_document(self) -> dict[str, JsonValue]:
        """Give the region's entry in the JSON document."""
        return {
            "joint": self.joint,
            "start_m": self.start_arc,
            "end_m": self.end_arc,
            "joint_angle_rad": self.joint_angle,
            "motor_angle_rad": self.motor_angle,
            "target_speed_rad_s": self.direction * self.target_speed,
            "laps": self.laps,
            "of_laps": self.of_laps,
            "dwell_s": self.dwell,
            "lag_m": self.lag,
            "release_rad": self.release_angle,
            "release_m": self.release_distance,
            "pull_Nm": self.pull,
            "harm": self.harm,
            "cause": self.cause,
            "action": self.action,
        }


@dataclass(frozen=True)
class Counterpart:
    """A region of one run beside the one at the same place in another; either may be missing.

    Attributes
    ----------
    first, second
        Places in the two lists of regions, from 0; None where there is none.
    fate
        Bare against compensated: what became of it.
    """

    first: int | None
    second: int | None
    fate: Fate


def regions(tracks: Sequence[LapTrack], events: Sequence[StickingEvent]) -> tuple[Region, ...]:
    """Merge the rests of all laps of a run.

    Parameters
    ----------
    tracks
        All laps of the run.
    events
        Their rests, with causes.

    Returns
    -------
    The regions, the most harmful first.
    """
    found: list[Region] = []
    for joint in dict.fromkeys(event.joint for event in events):
        same = [event for event in events if event.joint == joint]
        found.extend(_region(tracks, group) for group in same_places(same))
    return tuple(sorted(found, key=lambda region: -region.harm))


def same_places(events: Sequence[StickingEvent]) -> list[list[StickingEvent]]:
    """Group the rests of one joint that overlap along the path, and those of other laps within a millimetre."""
    groups: list[list[StickingEvent]] = []
    for event in sorted(events, key=lambda event: event.start_arc):
        for group in reversed(groups):
            if any(_same_place(event, other) for other in group):
                group.append(event)
                break
        else:
            groups.append([event])
    return groups


def _same_place(event: StickingEvent, other: StickingEvent) -> bool:
    reach = 0.0 if event.lap == other.lap else _REACH
    return (
        event.direction == other.direction
        and event.start_arc - reach <= other.end_arc
        and other.start_arc - reach <= event.end_arc
    )


def _region(tracks: Sequence[LapTrack], group: Sequence[StickingEvent]) -> Region:
    laps = len({event.lap for event in group})
    start, end = min(event.start_arc for event in group), max(event.end_arc for event in group)
    motor = np.angle(np.mean(np.exp(1j * np.array([event.motor_angle for event in group]))))
    return Region(
        run=group[0].run,
        source=group[0].source,
        joint=group[0].joint,
        start_arc=start,
        end_arc=end,
        joint_angle=float(np.mean([event.joint_angle for event in group])),
        motor_angle=float(np.mod(motor, 2.0 * np.pi)),
        direction=group[0].direction,
        target_speed=float(np.mean([event.target_speed for event in group])),
        laps=laps,
        of_laps=len({track.lap for track in tracks}),
        dwell=sum(event.dwell for event in group) / laps,
        lag=sum(event.lag for event in group) / laps,
        release_angle=max((event.release_angle for event in group), key=abs),
        release_distance=max(event.release_distance for event in group),
        pull=max(event.pull_end for event in group),
        harm=harm(tracks, start, end),
        cause=Counter(event.cause for event in group).most_common(1)[0][0],
        events=tuple(group),
    )


def harm(tracks: Sequence[LapTrack], start_arc: float, end_arc: float) -> float:
    """Share of the squared tip error, over time and all laps, while the target is on a stretch of the path."""
    within = whole = 0.0
    for track in tracks:
        squared = track.tracking**2 * np.gradient(track.time)
        whole += float(squared.sum())
        within += float(squared[(track.arc >= start_arc) & (track.arc <= end_arc)].sum())
    return within / whole if whole > 0.0 else 0.0


def counterparts(first: Sequence[Region], second: Sequence[Region]) -> tuple[Counterpart, ...]:
    """Find the regions of one run again in another: bare first, or measured first.

    Each region is paired with the unpaired one at the same place that is strongest.
    """
    left = set(range(len(second)))
    pairs = []
    for i in sorted(range(len(first)), key=lambda i: -first[i].strength):
        there = [j for j in left if first[i].meets(second[j])]
        if not there:
            pairs.append(Counterpart(i, None, "gone"))
            continue
        j = max(there, key=lambda j: second[j].strength)
        left.remove(j)
        pairs.append(Counterpart(i, j, "weaker" if second[j].strength < _WEAKER * first[i].strength else "same"))
    pairs.extend(Counterpart(None, j, "new") for j in sorted(left))
    return tuple(pairs)
