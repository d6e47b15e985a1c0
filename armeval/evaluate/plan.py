"""From a path to a trajectory: when is the tip where, and where are the joints then."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.errors import Findings, InputError
from armeval.evaluate.planning.reach import (
    REACH_TOLERANCE,
    RowPlaces,
    find_beyond_range,
    find_singular,
    find_unreached,
    poses,
)
from armeval.evaluate.planning.time_law import servo_times, trapezoid
from armeval.kernels.chain import tip_positions
from armeval.model.arm import Arm
from armeval.model.planned_path import PlannedPath
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Trial

_SAME = 1e-8
"""Points nearer to each other than this [m] are one point."""

_FINE = 2e-3
"""Step [rad] in which a joint path is followed between its rows to find the tip's curve: chord errors stay below
half a millionth of the arm's reach."""


@dataclass(frozen=True, eq=False)
class _Curve:
    """The tip's path: a polyline, the stops on it, and the arc lengths of the points that it was made of."""

    path: FloatArray
    path_arc: FloatArray
    corners: FloatArray
    point_arc: FloatArray


def plan_trial(trial: Trial, *, near_singular: bool = False) -> Trajectory:
    """Plan the trajectory of a trial; see :func:`plan`."""
    return plan(
        trial.arm,
        trial.path,
        feed=trial.feed,
        acceleration=trial.acceleration,
        corner_angle=trial.corner_angle,
        near_singular=near_singular,
    )


def plan(
    arm: Arm,
    path: PlannedPath,
    *,
    feed: float | None = None,
    acceleration: float | None = None,
    corner_angle: float = math.radians(5.0),
    near_singular: bool = False,
) -> Trajectory:
    """Put time on a path and find the joint targets, at every servo period.

    A path with its own time is taken as it is, linear between its rows. Else the speed along it is trapezoidal on each
    stretch between stops; it stops where its direction turns by more than ``corner_angle`` and passes other points at
    speed. A joint path is linear in the joints between its rows, and its arc length is that of the tip.

    A redundant arm takes the pose nearest to its rest angles. Joint speeds and accelerations are the central
    differences of the joint targets, one-sided (and zero acceleration) at the ends.

    Parameters
    ----------
    arm
        The arm, n joints.
    path
        Tip points or joint targets; repeated points are dropped.
    feed, acceleration
        Along the path [m/s], [m/s^2]; due where the path has no time of its own.
    corner_angle
        [rad].
    near_singular
        Whether the path may lead past singular poses, as a hand may; the servo's motion there is not to be trusted.

    Raises
    ------
    InputError
        With every stretch that is out of reach, beyond a joint's range or near a singular pose; where feed or
        acceleration are missing; where the tip does not move.
    """
    try:
        if path.space == "tip":
            return _plan_tip(arm, path, feed, acceleration, corner_angle, near_singular)
        return _plan_joint(arm, path, feed, acceleration, corner_angle, near_singular)
    except InputError as fault:
        raise fault.placed(file=path.source) from None


def _plan_tip(
    arm: Arm,
    path: PlannedPath,
    feed: float | None,
    acceleration: float | None,
    corner_angle: float,
    near_singular: bool,
) -> Trajectory:
    curve = _polyline(path.points, np.ones(len(path.points), dtype=np.bool_), corner_angle)
    period = arm.servo.period
    if path.time is None:
        time, arc = _law(curve, feed, acceleration, period)
        tip = _between(arc, curve.path_arc, curve.path)
    else:
        time = servo_times(path.time[-1] - path.time[0], period)
        tip = _between(time, path.time - path.time[0], path.points)
        arc = np.interp(time, path.time - path.time[0], curve.point_arc)
    q, left = poses(arm.chain, tip, arm.rest)
    rows = RowPlaces(curve.point_arc)
    findings = find_unreached(arm.chain, tip, q, left, arm.rest, arc, rows)
    if not near_singular:
        findings.extend(find_singular(arm.chain, q, left <= REACH_TOLERANCE, arc, period, rows).found)
    findings.raise_errors()
    return _trajectory(time, arc, tip, q, curve, period)


def _plan_joint(
    arm: Arm,
    path: PlannedPath,
    feed: float | None,
    acceleration: float | None,
    corner_angle: float,
    near_singular: bool,
) -> Trajectory:
    n = arm.chain.count
    if path.points.shape[1] != n:
        raise InputError(
            f"the path has {path.points.shape[1]} joint columns, the arm {n} joints", "give one column a joint"
        )
    find_beyond_range(arm.chain, path.points).raise_errors()
    number = np.arange(len(path.points), dtype=np.float64)
    place, is_row = _fine_places(path.points)
    curve = _polyline(tip_positions(arm.chain.arrays, _between(place, number, path.points)), is_row, corner_angle)
    period = arm.servo.period
    if path.time is None:
        _refuse_still_tip(path.points, curve.point_arc[is_row])
        time, arc = _law(curve, feed, acceleration, period)
        row = np.interp(arc, curve.point_arc, place)
    else:
        time = servo_times(path.time[-1] - path.time[0], period)
        row = np.interp(time, path.time - path.time[0], number)
        arc = np.interp(row, place, curve.point_arc)
    q = _between(row, number, path.points)
    if path.time is None and not near_singular:
        # At a given feed, the joints race where they hardly move the tip.
        rows = RowPlaces(curve.point_arc[is_row])
        find_singular(arm.chain, q, np.ones(len(q), dtype=np.bool_), arc, period, rows).raise_errors()
    return _trajectory(time, arc, tip_positions(arm.chain.arrays, q), q, curve, period)


def _trajectory(
    time: FloatArray, arc: FloatArray, tip: FloatArray, q: FloatArray, curve: _Curve, period: float
) -> Trajectory:
    if len(time) < 3:
        raise InputError(
            f"the trajectory lasts {len(time) - 1} servo period(s)",
            "lengthen the path, lower the feed or raise the rate",
        )
    bend = np.zeros_like(q)
    bend[1:-1] = (q[2:] - 2.0 * q[1:-1] + q[:-2]) / period**2
    return Trajectory(
        time=time,
        arc=arc,
        tip=tip,
        joint=q,
        joint_speed=np.gradient(q, period, axis=0),
        joint_acceleration=bend,
        path=curve.path,
        path_arc=curve.path_arc,
        corners=curve.corners,
    )


def _law(curve: _Curve, feed: float | None, acceleration: float | None, period: float) -> tuple[FloatArray, FloatArray]:
    if feed is None or acceleration is None:
        raise InputError("the path has no time, and feed or acceleration are missing", "give both, or a `time` column")
    for name, value in (("feed", feed), ("acceleration", acceleration)):
        if not 0.0 < value < math.inf:
            raise InputError(f"`{name}` is {value}", "give a value above 0")
    return trapezoid(curve.corners, feed, acceleration, period)


def _polyline(points: FloatArray, is_row: BoolArray, corner_angle: float) -> _Curve:
    """Drop repeated points and find the stops; only points that are rows of the file can be stops."""
    arc = _arc_of(points)
    kept = np.concatenate([[True], np.diff(np.floor(arc / _SAME)) > 0.0])
    path = points[kept]
    if len(path) < 2:
        raise InputError("the tip does not move along this path", "give a path on which the tip moves")
    point_of = np.cumsum(kept) - 1
    row_here = np.zeros(len(path), dtype=np.bool_)
    row_here[point_of[is_row]] = True
    step = np.diff(path, axis=0)
    across = np.linalg.norm(np.cross(step[:-1], step[1:]), axis=1)
    turn = np.arctan2(across, np.einsum("ij,ij->i", step[:-1], step[1:]))
    path_arc = _arc_of(path)
    stops = np.flatnonzero((turn > corner_angle) & row_here[1:-1]) + 1
    corners = np.concatenate([path_arc[:1], path_arc[stops], path_arc[-1:]])
    return _Curve(path, path_arc, corners, path_arc[point_of])


def _fine_places(rows: FloatArray) -> tuple[FloatArray, BoolArray]:
    """Places between the rows of a joint path (row number and share), and which of them are the rows."""
    parts = np.maximum(np.ceil(np.abs(np.diff(rows, axis=0)).sum(axis=1) / _FINE), 1.0).astype(np.int64)
    first = np.concatenate([[0], np.cumsum(parts)])
    is_row = np.zeros(int(first[-1]) + 1, dtype=np.bool_)
    is_row[first] = True
    return np.interp(np.arange(len(is_row)), first, np.arange(len(rows))), is_row


def _refuse_still_tip(rows: FloatArray, row_arc: FloatArray) -> None:
    """Refuse rows between which the joints move and the tip does not: a feed cannot say how fast."""
    findings = Findings()
    still = (np.abs(np.diff(rows, axis=0)).max(axis=1) > 0.0) & (np.diff(row_arc) < _SAME)
    for i in np.flatnonzero(still):
        findings.error(
            "the joints move and the tip does not, so a feed cannot say how fast",
            "give the path a `time [s]` column",
            place=f"points {i + 1} to {i + 2}",
        )
    findings.raise_errors()


def _arc_of(points: FloatArray) -> FloatArray:
    return np.concatenate([np.zeros(1), np.cumsum(np.linalg.norm(np.diff(points, axis=0), axis=1))])


def _between(x: FloatArray, known: FloatArray, values: FloatArray) -> FloatArray:
    return np.ascontiguousarray(np.column_stack([np.interp(x, known, column) for column in values.T]))
