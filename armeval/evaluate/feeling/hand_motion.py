"""The motion that a hand leads an arm through: planned, or as the encoders logged it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.errors import InputError
from armeval.kernels.chain import tip_positions
from armeval.kernels.inverse import poses_along, reach_of
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.model.trajectory import Trajectory

_JOLT = 0.25
"""A change of the tip's speed within one sample by more than this share of the usual speed is a step, not a motion."""

_STILL = 1e-6
"""A tip slower than this [m/s] has no direction of motion of its own."""


@dataclass(frozen=True, eq=False)
class HandMotion:
    """What arm and tip do while the hand leads them, k samples of n joints.

    Attributes
    ----------
    time
        Shape (k,) [s], in equal steps.
    arc
        Shape (k,) [m]. Way of the tip since the start; for a planned motion, along the planned path.
    tip
        Shape (k, 3) [m] in the base frame.
    joint, joint_speed, joint_acceleration
        Shape (k, n) [rad], [rad/s], [rad/s^2].
    source
        ``planned``, or the run and lap that were logged.
    bandwidth
        Where the motion was smoothed [Hz]; infinite: nowhere.
    moved
        Furthest that smoothing moved the tip [m].
    jolts
        Shape (k,). Samples near a step of the given motion; what inertia asks for there is no answer to anything.
    dry_friction
        Shape (k, n) [N m]. Where the inner motion of a redundant arm was worked out: what dry friction, and stops at
        the ends of the ranges, exert against it. None: the direction of friction is that of the joint's speed.
    """

    time: FloatArray
    arc: FloatArray
    tip: FloatArray
    joint: FloatArray
    joint_speed: FloatArray
    joint_acceleration: FloatArray
    source: str
    bandwidth: float
    moved: float
    jolts: BoolArray
    dry_friction: FloatArray | None = None

    @property
    def period(self) -> float:
        """Time from one sample to the next [s]."""
        return float(self.time[1] - self.time[0])

    @property
    def length(self) -> float:
        """Way of the tip [m]."""
        return float(self.arc[-1] - self.arc[0])

    @property
    def duration(self) -> float:
        """Time from the first sample to the last [s]."""
        return float(self.time[-1] - self.time[0])

    @property
    def tip_speed(self) -> FloatArray:
        """Shape (k,) [m/s]."""
        return np.asarray(np.linalg.norm(np.gradient(self.tip, self.period, axis=0), axis=1))

    @property
    def is_still(self) -> bool:
        """Whether the hand does not move the tip at all."""
        return bool(self.tip_speed.max() < _STILL)

    @property
    def direction(self) -> FloatArray:
        """Shape (k, 3). Unit vectors along the motion; where the tip rests, as before; zeros where it never moves."""
        velocity = np.gradient(self.tip, self.period, axis=0)
        speed = np.linalg.norm(velocity, axis=1)
        moving = speed > _STILL
        if not moving.any():
            return np.zeros_like(velocity)
        last = np.maximum.accumulate(np.where(moving, np.arange(len(speed)), int(np.argmax(moving))))
        return np.asarray(velocity[last] / speed[last, None])

    @property
    def weights(self) -> FloatArray:
        """Shape (k,), sum 1. Share of the way that each sample stands for; of the time where there is no way."""
        way = self.tip_speed
        return np.asarray(way / way.sum()) if way.max() > _STILL else np.full(len(way), 1.0 / len(way))


def planned_motion(
    arm: Arm, trajectory: Trajectory, *, bandwidth: float = math.inf, space: Literal["tip", "joint"] = "joint"
) -> HandMotion:
    """Let the hand follow a planned trajectory, no faster than a hand can.

    Parameters
    ----------
    arm, trajectory
        The trajectory is one that was planned for this arm.
    bandwidth
        Where the motion is smoothed [Hz].
    space
        Whether the path of the tip or that of the joints was given; that one is smoothed.
    """
    step = float(trajectory.time[1] - trajectory.time[0])
    speed = np.diff(trajectory.tip, axis=0) / step
    usual = float(np.quantile(np.linalg.norm(speed, axis=1), 0.95))
    change = np.linalg.norm(np.diff(speed, axis=0), axis=1)
    jolts = np.concatenate([[False], change > _JOLT * max(usual, _STILL), [False]])
    if space == "tip":
        tip = np.ascontiguousarray(_low_pass(trajectory.tip, step, bandwidth))
        joint, _ = poses_along(arm.chain.arrays, tip, arm.rest, trajectory.joint[0])
    else:
        joint = _low_pass(trajectory.joint, step, bandwidth)
    return _motion(arm, trajectory.time, joint, trajectory.tip, "planned", bandwidth, jolts, trajectory.arc)


def logged_motion(arm: Arm, log: JointLog, *, name: str, bandwidth: float) -> HandMotion:
    """Take the motion from logged joint angles, counts smoothed away; of a log with gaps, the longest stretch.

    Raises
    ------
    InputError
        If the log is too short to be smoothed.
    """
    whole = max(log.segments, key=lambda part: part.stop - part.start)
    logged, angle = log.time[whole] - log.time[whole][0], log.angle[whole]
    period = max(arm.servo.period, 0.25 * log.period)
    count = int(float(logged[-1]) / period + 1e-9) + 1
    if count < 8:
        raise InputError(f"the log holds {count} samples", "log a longer motion", file=log.source)
    time: FloatArray = np.arange(count, dtype=np.float64) * period
    joint = np.column_stack([np.interp(time, logged, column) for column in angle.T])
    given, jolts = tip_positions(arm.chain.arrays, joint), np.zeros(count, dtype=np.bool_)
    smoothed = _low_pass(joint, period, bandwidth)
    return _motion(arm, time, smoothed, given, f"run {name}, lap {log.lap}", bandwidth, jolts, None)


def _motion(
    arm: Arm,
    time: FloatArray,
    joint: FloatArray,
    given: FloatArray,
    source: str,
    bandwidth: float,
    jolts: BoolArray,
    arc: FloatArray | None,
) -> HandMotion:
    step = float(time[1] - time[0])
    joint = np.ascontiguousarray(joint)
    tip = tip_positions(arm.chain.arrays, joint)
    bend = np.zeros_like(joint)
    bend[1:-1] = (joint[2:] - 2.0 * joint[1:-1] + joint[:-2]) / step**2
    if arc is None:
        arc = np.concatenate([np.zeros(1), np.cumsum(np.linalg.norm(np.diff(tip, axis=0), axis=1))])
    return HandMotion(
        time=np.asarray(time - time[0]),
        arc=arc,
        tip=tip,
        joint=joint,
        joint_speed=np.gradient(joint, step, axis=0),
        joint_acceleration=bend,
        source=source,
        bandwidth=bandwidth,
        moved=float(np.linalg.norm(tip - given, axis=1).max()),
        jolts=_near(jolts, round(0.5 / bandwidth / step)),
    )


def _low_pass(columns: FloatArray, step: float, bandwidth: float) -> FloatArray:
    """Fourth-order Butterworth run forwards and backwards: no delay, half the amplitude at the bandwidth."""
    from scipy.signal import butter, sosfiltfilt

    if bandwidth >= 0.4 / step:
        return columns
    sections = butter(4, bandwidth, fs=1.0 / step, output="sos")
    return np.asarray(
        sosfiltfilt(sections, columns, axis=0, padlen=min(len(columns) - 1, round(3.0 / bandwidth / step)))
    )


def _near(marked: BoolArray, reach: int) -> BoolArray:
    """Mark samples within so many of a marked one."""
    count = np.cumsum(np.concatenate([[0], marked]))
    index = np.arange(len(marked))
    return np.asarray(count[np.minimum(index + reach + 1, len(marked))] > count[np.maximum(index - reach, 0)])


def rest_speeds(arm: Arm) -> FloatArray:
    """Shape (n,). Below these joint speeds [rad/s or m/s] the direction of dry friction is not known."""
    return np.where(arm.chain.prismatic, 1e-3 * reach_of(arm.chain.arrays), 1e-3)
