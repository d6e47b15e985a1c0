"""Why a joint rests: found by more than one route, or not claimed.

For a predicted rest the replay is asked again with one cause taken out. For a logged one there is no such replay; the
limits, the torque that built up, the cog map about the angle, and the pitch that all rests of the joint keep, must say
it. Cogging is claimed only where the map or the pitch shows it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Literal, Protocol

import numpy as np

from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking.cause_routes import (
    counterfactual_route,
    held_share,
    limits_route,
    map_ratio,
    map_route,
    torque_route,
)
from armeval.evaluate.sticking.joint_in_log import friction_alone, joint_stiffness_along
from armeval.evaluate.sticking.jumps import cog_pitch
from armeval.evaluate.sticking.periodicity import Periodicity, periodicity
from armeval.evaluate.sticking.regions import same_places
from armeval.evaluate.sticking.rests import sticking_events
from armeval.evaluate.sticking.sticking_event import CauseName, Route, StickingEvent
from armeval.model.arm import Arm
from armeval.model.drive import Drive
from armeval.model.trial import Compensation, StickingRule

Removable = Literal["cogging", "friction", "torque limit", "joint limit"]


class Counterfactual(Protocol):
    """Replays a predicted lap with one cause taken out of one joint."""

    def __call__(self, joint: str, without: Removable) -> LapTrack:
        """Give the lap as it would be if the joint's cogging, friction or limit were not there."""
        ...


def find_causes(
    arm: Arm,
    tracks: Sequence[LapTrack],
    events: Sequence[StickingEvent],
    *,
    rule: StickingRule,
    compensation: Compensation,
    counterfactual: Counterfactual | None = None,
) -> list[StickingEvent]:
    """Find the causes of all events of one run.

    Parameters
    ----------
    arm
        The arm.
    tracks
        All laps of the run.
    events
        Their events.
    rule
        When a joint counts as resting.
    compensation
        What the firmware's table can do; counts where the run is compensated.
    counterfactual
        For a predicted run: its lap replayed with a cause taken out; None: the causes are found as from a log.

    Returns
    -------
    The same events with ``cause`` and ``routes``.
    """
    lap = {track.lap: track for track in tracks}
    table = compensation if tracks[0].compensated else None
    stiffnesses = {track.lap: joint_stiffness_along(arm, track.angle) for track in tracks}
    held_by_friction = {track.lap: friction_alone(arm, track, stiffnesses[track.lap]) for track in tracks}
    pitch = {joint: _pitch(arm, joint, events) for joint in {event.joint for event in events}}
    found = []
    for event in events:
        j = arm.chain.index(event.joint)
        drive, track = arm.drives[j], lap[event.lap]
        rows = slice(*np.searchsorted(track.time, (event.start, event.end)))
        stiffness = float(np.mean(stiffnesses[event.lap][rows, j]))
        held = held_share(held_by_friction[event.lap][rows, j], event, _place(arm, drive))
        torque = torque_route(drive, event, held)
        friction_holds = drive.breakaway_friction == 0.0 or torque.says == "friction"
        ratio = map_ratio(drive, event, stiffness, table)
        routes = [
            limits_route(arm, track, event),
            torque,
            map_route(drive, event, ratio, friction_holds, table is not None),
            _pitch_route(pitch[event.joint], event),
        ]
        found.append(replace(event, routes=tuple(routes), cause=judged(event, routes)))
    if counterfactual is not None:
        found = _replayed(arm, found, rule, counterfactual)
    return found


def _place(arm: Arm, drive: Drive) -> float | None:
    """Give the joint's cog pitch where an angle at rest can be told: an arm that sags under its weight rests lower."""
    return cog_pitch(drive) if arm.servo.gravity_feedforward else None


def judged(event: StickingEvent, routes: Sequence[Route]) -> CauseName:
    """Weigh what the routes say about one logged event; what none of them shows stays unexplained."""
    says = {route.name: route.says for route in routes}
    if says["limits"] != "not shown":
        return _cause(says["limits"])
    if event.kind == "jump":
        return "cogging" if "cogging" in (says["map"], says["periodicity"]) else "unexplained"
    if says["torque"] == "friction":
        return "friction"
    if "cogging" in (says["map"], says["periodicity"]):
        return "cogging"
    return "unexplained"


def _cause(says: str) -> CauseName:
    for name in ("cogging", "friction", "torque limit", "joint limit"):
        if says == name:
            return name
    return "unexplained"


def _pitch(arm: Arm, joint: str, events: Sequence[StickingEvent]) -> Periodicity:
    """Test the joint's rests in steady motion, one for each place."""
    drive = arm.drives[arm.chain.index(joint)]
    steady = [event for event in events if event.joint == joint and event.kind == "rest" and not event.reversal]
    return periodicity(drive, [group[0] for group in same_places(steady)])


def _pitch_route(pitch: Periodicity, event: StickingEvent) -> Route:
    says: CauseName | Literal["not shown"] = "cogging" if pitch.shown and not event.reversal else "not shown"
    return Route("periodicity", says, pitch.text)


def _replayed(
    arm: Arm, events: Sequence[StickingEvent], rule: StickingRule, counterfactual: Counterfactual
) -> list[StickingEvent]:
    """Ask the replay about every event: first the limits that may bear on it, then cogging, then friction."""
    asked: dict[tuple[str, Removable], tuple[StickingEvent, ...]] = {}

    def without(joint: str, removed: Removable) -> tuple[StickingEvent, ...]:
        if (joint, removed) not in asked:
            asked[joint, removed] = sticking_events(arm, counterfactual(joint, removed), rule)
        return asked[joint, removed]

    pitch = {drive.joint: cog_pitch(drive) for drive in arm.drives}
    found = []
    for event in events:
        limit = next(route.says for route in event.routes if route.name == "limits")
        order: list[Removable] = ["cogging", "friction"]
        if limit in ("torque limit", "joint limit"):
            order.insert(0, limit)
        routes = list(event.routes)
        cause: CauseName = "unexplained"
        for removed in order:
            # Only cogging holds a rest to its angle; without friction or a limit the joint may drift along its cog.
            place = pitch[event.joint] if removed == "cogging" else None
            route = counterfactual_route(event, removed, without(event.joint, removed), place)
            routes.append(route)
            if route.says != "not shown":
                cause = removed
                break
        found.append(replace(event, routes=tuple(routes), cause=cause))
    return found
