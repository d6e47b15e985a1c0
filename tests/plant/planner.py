"""The plant's own plan: a trapezoidal speed on each straight stretch, and joint targets by Newton's method.

Independent of the package under test; kinematics are MuJoCo's.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from tests.plant.mujoco_plant import Plant

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Plan:
    """Targets, one row a servo period: time (k,), arc (k,), tip (k, 3), joint angle, speed, acceleration (k, n)."""

    time: FloatArray
    arc: FloatArray
    tip: FloatArray
    angle: FloatArray
    speed: FloatArray
    acceleration: FloatArray


def stops(points: FloatArray, corner_angle: float) -> FloatArray:
    """Indices of the points where the motion stops: the ends, and where the direction turns by more than the angle."""
    legs = np.diff(points, axis=0)
    legs /= np.linalg.norm(legs, axis=1)[:, None]
    across, along = np.cross(legs[:-1], legs[1:]), np.einsum("ij,ij->i", legs[:-1], legs[1:])
    turned = np.arctan2(np.linalg.norm(across, axis=1), along)
    return np.concatenate([[0], np.flatnonzero(turned > corner_angle) + 1, [len(points) - 1]])


def arc_lengths(points: FloatArray) -> FloatArray:
    """Arc length at each point, shape (k,) [m]."""
    return np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(points, axis=0), axis=1))])


def trapezoid(length: float, feed: float, acceleration: float, t: FloatArray) -> FloatArray:
    """Distance gone after times ``t`` on one stretch that starts and ends at rest."""
    top = min(feed, np.sqrt(length * acceleration))
    ramp = top / acceleration
    total = length / top + ramp
    t = np.clip(t, 0.0, total)
    rising, falling = 0.5 * acceleration * t**2, length - 0.5 * acceleration * (total - t) ** 2
    return np.where(t < ramp, rising, np.where(t > total - ramp, falling, top * (t - 0.5 * ramp)))


def stretch_time(length: float, feed: float, acceleration: float) -> float:
    """Time one stretch takes from rest to rest [s]."""
    top = min(feed, np.sqrt(length * acceleration))
    return float(length / top + top / acceleration)


def plan(
    plant: Plant,
    points: FloatArray,
    rest: FloatArray,
    *,
    feed: float,
    acceleration: float,
    corner_angle: float = np.radians(5.0),
) -> Plan:
    """Plan a lap along tip points of shape (p, 3) [m], joint angles starting near ``rest``."""
    period = plant.servo.period
    along = arc_lengths(points)
    ends = along[stops(points, corner_angle)]
    starts_at = np.concatenate([[0.0], np.cumsum([stretch_time(d, feed, acceleration) for d in np.diff(ends)])])
    time = period * np.arange(int(np.ceil(starts_at[-1] / period - 1e-9)) + 1)
    stretch = np.clip(np.searchsorted(starts_at, time, side="right") - 1, 0, len(ends) - 2)
    arc = np.empty(len(time))
    for i in range(len(ends) - 1):
        here = stretch == i
        arc[here] = ends[i] + trapezoid(ends[i + 1] - ends[i], feed, acceleration, time[here] - starts_at[i])
    tip = np.column_stack([np.interp(arc, along, points[:, c]) for c in range(3)])
    angle = inverse_kinematics(plant, tip, rest)
    speed = np.gradient(angle, period, axis=0)
    speed[[0, -1]] = 0.0
    return Plan(time, arc, tip, angle, speed, np.gradient(speed, period, axis=0))


def inverse_kinematics(plant: Plant, tips: FloatArray, start: FloatArray) -> FloatArray:
    """Joint angles (k, n) that put the tip on each point (k, 3) [m], each found from the one before."""
    q = np.array(start, dtype=float)
    angles = np.empty((len(tips), plant.count))
    for k, wanted in enumerate(tips):
        for _ in range(200):
            error = wanted - plant.tip(q)[0]
            if np.abs(error).max() < 1e-11:
                break
            step = np.linalg.lstsq(plant.jacobian(q), error, rcond=1e-9)[0]
            q = q + step * min(1.0, 0.3 / max(np.abs(step).max(), 1e-12))
        else:
            raise ValueError(f"no joint angles found for point {k}, {wanted}")
        angles[k] = q
    return angles
