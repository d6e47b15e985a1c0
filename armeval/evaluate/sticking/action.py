"""What to do about a region: one plain sentence with numbers from the evidence."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_loss import residual
from armeval.evaluate.cogging.cog_orders import orders
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking.cause_routes import map_ratio
from armeval.evaluate.sticking.joint_in_log import inertia_along, joint_stiffness_along, target_speed
from armeval.evaluate.sticking.regions import Region
from armeval.evaluate.sticking.stable_stiffness import largest_stiffness
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.model.arm import Arm
from armeval.model.cogmap import CogMap
from armeval.model.trial import Compensation
from armeval.units import angle_text, significant, torque_text

_CLEARLY_FASTER = 1.2  # times the fastest target at which the joint rested: from there it is said to carry through


def fastest_told(tracks: Sequence[LapTrack]) -> FloatArray:
    """Shape (n,) [rad/s]. How fast a run asked each joint to move, but for the fastest hundredth of the time."""
    return np.asarray(np.max([np.quantile(np.abs(target_speed(track)), 0.99, axis=0) for track in tracks], axis=0))


def action(
    arm: Arm,
    region: Region,
    tracks: Sequence[LapTrack],
    events: Sequence[StickingEvent],
    *,
    asked: FloatArray,
    compensation: Compensation,
) -> str:
    """Say what would help in a region.

    Parameters
    ----------
    arm
        The arm.
    region
        Where it sticks.
    tracks, events
        The laps of its run, and all their rests.
    asked
        Shape (n,) [rad/s]. How fast the run asked each joint to move: :func:`fastest_told`.
    compensation
        What the firmware's table can do.
    """
    j = arm.chain.index(region.joint)
    drive, track = arm.drives[j], tracks[0]
    joint = region.joint
    if region.cause == "joint limit":
        lower, upper = arm.chain.lower[j], arm.chain.upper[j]
        end = upper if region.direction > 0.0 else lower
        return (
            f"Move the path or the arm: here {joint} is asked beyond the end of its range at {angle_text(float(end))}."
        )
    if region.cause == "torque limit":
        return (
            f"Give {joint} more torque than {torque_text(drive.torque_limit)}, less load or less acceleration: "
            "its limit is reached here."
        )
    if region.cause == "unexplained":
        if drive.cog_map is None:
            return f"Measure the cog map of {joint} first: without it no more can be shown."
        return (
            f"Look at the other joints, the load and the cables first: neither {joint}'s map nor its friction "
            f"explains {torque_text(abs(region.pull))} of pull here."
        )
    carry = _carry(region, events, float(asked[j]))
    pose = _pose(track, region)
    K = float(joint_stiffness_along(arm, pose)[0, j])
    if region.cause == "friction":
        dead_band = (drive.coulomb_friction + drive.breakaway_friction) / K
        return (
            f"Feed {joint}'s friction forward or stiffen it: it must be pulled through {angle_text(dead_band, 2)} "
            f"before it turns back, and that halves at {significant(2.0 * K, 2)} N·m/rad.{carry}"
        )
    if region.source == "log" and drive.cog_map is None:
        return f"Measure the cog map of {joint} first: its rests keep to the pitch of its motor.{carry}"
    table = compensation if tracks[0].compensated else None
    ratio = map_ratio(drive, region.events[0], K, table)
    J = float(inertia_along(arm, pose)[0, j])
    stiffer = _stiffer(arm, j, K, max(ratio, 1.0) * K, J)
    if table is None:
        return f"Compensate {joint}'s cogging first{stiffer}.{carry}"
    missed = _missed(drive.cog_map, compensation) if drive.cog_map is not None else ""
    return f"Mend {joint}'s compensation first: {missed}{stiffer}.{carry}"


def _stiffer(arm: Arm, j: int, K: float, wanted: float, inertia: float) -> str:
    """Say whether the joint could be made stiff enough."""
    drive, servo = arm.drives[j], arm.servo
    told = f", or raise its stiffness from {significant(K, 2)} to above {significant(wanted, 2)} N·m/rad"
    if servo.law != "joint_pd":
        return f"{told}, by the tip's stiffness"
    if wanted <= K:
        return f"; its stiffness of {significant(K, 2)} N·m/rad already exceeds the cogging's slope"
    wait = servo.delay + 0.5 * servo.period
    most = largest_stiffness(inertia, drive.stiffness, drive.damping, wait, servo.speed_cutoff)
    steepest = _most_cogging(drive.cog_map, drive.gear_ratio)
    if steepest + drive.breakaway_friction > drive.torque_limit:
        return f"{told}, but its torque limit of {torque_text(drive.torque_limit)} is too low to pull through"
    if most == 0.0:
        return f"{told}, but damped as it is its loop has no phase to spare for that: damp it more first"
    if most < wanted:
        return f"{told}, but at this servo rate and delay about {significant(most, 2)} N·m/rad is the most"
    return f"{told}, which torque limit and servo rate allow"


def _missed(cog_map: CogMap, compensation: Compensation) -> str:
    """Say what the table misses most: by leaving out one loss after the other."""
    found = orders(cog_map)
    whole = residual(cog_map, compensation)
    if not found or whole.rms == 0.0:
        return "the map shows no cogging that a table could miss, so measure it again"
    without = {
        f"its index error of {angle_text(compensation.index_error, 2)}": replace(compensation, index_error=0.0),
        f"its {compensation.table_bins} bins": replace(compensation, table_bins=1 << 20, interpolation="linear"),
        "the map's noise": replace(compensation, map_noise=0.0),
    }
    saved = {name: whole.rms**2 - residual(cog_map, better).rms ** 2 for name, better in without.items()}
    worst = max(saved, key=lambda name: saved[name])
    return f"the table should leave {100.0 * whole.share:.0f} % of the cogging, most of that through {worst}"


def _most_cogging(cog_map: CogMap | None, gear_ratio: float) -> float:
    return abs(gear_ratio) * float(np.abs(cog_map.torque).max()) if cog_map is not None else 0.0


def _carry(region: Region, events: Sequence[StickingEvent], asked: float) -> str:
    """Say above which speed the joint never rested in this run, if it was ever asked to be clearly faster."""
    fastest_rest = max(event.target_speed for event in events if event.joint == region.joint)
    if asked < _CLEARLY_FASTER * fastest_rest:
        return ""
    factor = fastest_rest / region.target_speed
    return (
        f" Told to move faster than {significant(fastest_rest, 2)} rad/s it never rested in this run; here that is "
        f"{significant(factor, 2)} times the speed."
    )


def _pose(track: LapTrack, region: Region) -> FloatArray:
    """Shape (1, n): the joint angles in the middle of the region."""
    middle = 0.5 * (region.start_arc + region.end_arc)
    return np.array([[np.interp(middle, track.arc, angle) for angle in track.angle.T]])
