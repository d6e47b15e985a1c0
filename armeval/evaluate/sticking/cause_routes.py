"""Ways of finding out why a joint rested, each for itself: limits, torque, map, replay without a cause."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_loss import residual
from armeval.evaluate.cogging.cog_orders import orders, slope
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking.sticking_event import CauseName, Route, StickingEvent
from armeval.model.arm import Arm
from armeval.model.drive import Drive
from armeval.model.trial import Compensation
from armeval.units import angle_text, significant, torque_text

NEAR_LIMIT = np.radians(0.2)
"""A joint this near to the end of its range rests against it [rad or m]."""

HELD_SHARE = 0.5
"""Share of a rest from which friction alone is taken for its cause; friction itself is known to a quarter at best."""

_SAME_PLACE = 0.2
"""Share of a cog pitch within which a rest is still at the same place when a cause is taken out."""

BRAKING_RATIO = 0.4
"""Sticking ratio above which cogging, too gentle to make a joint stick by itself, slows it markedly in each pitch."""


def limits_route(arm: Arm, track: LapTrack, event: StickingEvent) -> Route:
    """Ask whether the joint stood at the end of its range, or its torque at the limit."""
    j = arm.chain.index(event.joint)
    end = arm.chain.upper[j] if event.direction > 0.0 else arm.chain.lower[j]
    room = float(event.direction * (end - event.joint_angle))
    if room <= max(NEAR_LIMIT, 2.0 * float(track.resolution[j])):
        return Route("limits", "joint limit", f"it rests {angle_text(abs(room))} from the end of its range")
    limit = arm.drives[j].torque_limit
    if not np.isfinite(limit):
        return Route("limits", "not shown", "no end of the range near, no torque limit given")
    if track.torque is not None:
        rows = slice(*np.searchsorted(track.time, (event.start, event.end)))
        applied = np.abs(track.torque[rows, j])
        cut = float(np.mean(applied >= limit - arm.drives[j].torque_step - 1e-9 * limit)) if applied.size else 0.0
        if cut >= 0.5:
            return Route(
                "limits", "torque limit", f"the torque stands at its limit for {100.0 * cut:.0f} % of the rest"
            )
        most = float(applied.max()) if applied.size else 0.0
    else:
        most = max(abs(event.pull_start), abs(event.pull_end))
        if most >= limit:
            told = f"the servo asks for {torque_text(most)} of {torque_text(limit)}"
            return Route("limits", "torque limit", told)
    return Route("limits", "not shown", f"the torque reaches {torque_text(most)} of {torque_text(limit)}")


def held_share(alone: FloatArray, event: StickingEvent, pitch: float | None) -> float:
    """Share of a rest during which friction alone would hold the joint at the same place.

    Parameters
    ----------
    alone
        Shape (m,) [rad or m]. Where friction alone would hold it, at the samples of the rest; nan where it moves
        (:func:`armeval.evaluate.sticking.joint_in_log.friction_alone`).
    event
        The rest.
    pitch
        The joint's cog pitch [rad or m]; None: any place counts as the same.
    """
    held = np.isfinite(alone)
    if pitch is not None:
        held &= np.abs(np.where(held, alone, np.inf) - event.joint_angle) <= _SAME_PLACE * pitch
    return float(np.mean(held)) if held.size else 0.0


def torque_route(drive: Drive, event: StickingEvent, held_share: float) -> Route:
    """Hold the torque that built up against what friction alone explains.

    Friction alone brings a joint to rest where its target stops or turns back, and lets it go when the servo's pull
    has grown to Fs: where, a calculation with nothing but inertia and friction says.

    Parameters
    ----------
    drive, event
        The joint's drive, and the rest.
    held_share
        Share of the rest during which friction alone would hold the joint here (:func:`held_share`).
    """
    if drive.breakaway_friction == 0.0:
        return Route("torque", "not shown", "friction is not known: give `coulomb_friction`, or map both directions")
    built = torque_text(event.pull_end - event.pull_start, 2)
    told = f"{built} built up; friction alone would hold the joint here for {100.0 * held_share:.0f} % of this time"
    return Route("torque", "friction" if held_share >= HELD_SHARE else "not shown", told)


def map_ratio(drive: Drive, event: StickingEvent, stiffness: float, compensation: Compensation | None) -> float:
    """Sticking ratio about a rest: steepest slope of the cogging within half a pitch, over the stiffness.

    Compensated, the slope is that of what the table may leave, order by order, with twice the index error's sigma.
    """
    if drive.cog_map is None:
        return 0.0
    found = orders(drive.cog_map)
    if not found:
        return 0.0
    square = drive.gear_ratio**2
    if compensation is not None:
        doubtful = replace(compensation, index_error=2.0 * compensation.index_error)
        left = {part.order: part.share for part in residual(drive.cog_map, doubtful).orders}
        steepest = max(order.order * order.amplitude * left[order.order] for order in found)
        return square * steepest / stiffness
    half = np.pi / found[0].order
    around = event.motor_angle + np.linspace(-half, half, 65)
    return float(square * np.max(slope(drive.cog_map, around)) / stiffness)


def map_route(drive: Drive, event: StickingEvent, ratio: float, friction_holds: bool, compensated: bool) -> Route:
    """Ask the cog map whether a slow motion past the rest's angle is unstable, or braked where friction is too weak.

    Parameters
    ----------
    drive, event
        The joint's drive, and the rest.
    ratio
        Sticking ratio about it, from :func:`map_ratio`.
    friction_holds
        Whether friction alone would hold the joint here, as far as known.
    compensated
        Whether the ratio is that of what the compensation table leaves.
    """
    if drive.cog_map is None:
        return Route("map", "not shown", f"no cog map of {event.joint}: measure one")
    what = "what the table may leave of the cogging" if compensated else "cogging"
    told = f"within half a pitch {what} rises {significant(ratio)} times as steeply as the servo's torque falls"
    if ratio > 1.0:
        return Route("map", "cogging", told)
    if ratio > BRAKING_RATIO and not friction_holds:
        return Route("map", "cogging", f"{told}: it brakes the joint, and friction alone would not hold it")
    return Route("map", "not shown", told)


def counterfactual_route(
    event: StickingEvent, removed: CauseName, without: Sequence[StickingEvent], pitch: float | None
) -> Route:
    """Ask a replay without one cause whether the rest is still there.

    It is there still when the joint rests at the same angle for at least half of the time. Where cogging is taken out,
    a rest that is found further than a fifth of a cog pitch away was held there by the cogging: it moved away.

    Parameters
    ----------
    event, removed
        The rest, and the cause that was taken out.
    without
        All rests of the replay without it.
    pitch
        The joint's cog pitch [rad or m]; None where it has none.
    """
    same = [other for other in without if other.joint == event.joint and other.kind == "rest"]
    near = [
        other for other in same if pitch is None or abs(other.joint_angle - event.joint_angle) <= _SAME_PLACE * pitch
    ]
    if _shared(event, near) >= 0.5 * event.dwell:
        return Route("counterfactual", "not shown", f"without {removed} it still rests here")
    if _shared(event, same) >= 0.5 * event.dwell:
        other = max(same, key=lambda other: _shared(event, [other]))
        moved = angle_text(abs(other.joint_angle - event.joint_angle), 2)
        return Route("counterfactual", removed, f"without {removed} it rests {moved} away from here")
    return Route("counterfactual", removed, f"without {removed} it does not rest here")


def _shared(event: StickingEvent, others: Sequence[StickingEvent]) -> float:
    """Time [s] that an event shares with others."""
    return sum(max(0.0, min(other.end, event.end) - max(other.start, event.start)) for other in others)
