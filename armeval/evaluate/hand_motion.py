"""The motion that a hand leads an arm through: planned, or as the encoders logged it."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.errors import InputError
from armeval.evaluate.net_cogging import net_cogging
from armeval.evaluate.replay_input import COG_CELLS
from armeval.kernels.chain import tip_positions
from armeval.kernels.inverse import reach_of
from armeval.kernels.periodic import periodic_slopes, periodic_values
from armeval.kernels.records import joint_records
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation

_JOLT = 0.25
"""A change of the tip's speed within one sample by more than this share of the usual speed is a step, not a motion."""

_INNER_RATE = 16e3
"""Steps a second for the inner motion: where joints catch and let go, a thousand would miss the force by a fifth."""

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


def planned_motion(arm: Arm, trajectory: Trajectory, *, bandwidth: float = math.inf) -> HandMotion:
    """Let the hand follow a planned trajectory, no faster than a hand can."""
    step = trajectory.time[1] - trajectory.time[0]
    speed = np.diff(trajectory.tip, axis=0) / step
    usual = float(np.quantile(np.linalg.norm(speed, axis=1), 0.95))
    change = np.linalg.norm(np.diff(speed, axis=0), axis=1)
    jolts = np.concatenate([[False], change > _JOLT * max(usual, _STILL), [False]])
    return _motion(arm, trajectory.time, trajectory.joint, "planned", bandwidth, jolts, trajectory.arc)


def logged_motion(arm: Arm, log: JointLog, *, name: str, bandwidth: float) -> HandMotion:
    """Take the motion from logged joint angles, with their counts smoothed away; of a log with gaps the longest stretch.

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
    return _motion(arm, time, joint, f"run {name}, lap {log.lap}", bandwidth, np.zeros(count, dtype=np.bool_), None)


def _motion(
    arm: Arm,
    time: FloatArray,
    joint: FloatArray,
    source: str,
    bandwidth: float,
    jolts: BoolArray,
    arc: FloatArray | None,
) -> HandMotion:
    chain, step = arm.chain.arrays, float(time[1] - time[0])
    given = tip_positions(chain, np.ascontiguousarray(joint))
    smoothed = np.ascontiguousarray(_low_pass(joint, step, bandwidth))
    tip = tip_positions(chain, smoothed)
    bend = np.zeros_like(smoothed)
    bend[1:-1] = (smoothed[2:] - 2.0 * smoothed[1:-1] + smoothed[:-2]) / step**2
    if arc is None:
        arc = np.concatenate([np.zeros(1), np.cumsum(np.linalg.norm(np.diff(tip, axis=0), axis=1))])
    return HandMotion(
        time=np.asarray(time - time[0]),
        arc=arc,
        tip=tip,
        joint=smoothed,
        joint_speed=np.gradient(smoothed, step, axis=0),
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


def with_inner_motion(
    arm: Arm,
    motion: HandMotion,
    *,
    compensated: bool,
    compensation: Compensation,
    carries_weight: bool,
    seed: int = 0,
) -> HandMotion:
    """Replace the joint motion of a redundant arm by the one that its tip's motion and its own mechanics bring about.

    The tip goes as before. The arm starts in the motion's first pose and at its speed; friction, cogging, weight and
    inertia move what the tip leaves free, and stops at the ends of the joints' ranges halt it.

    Raises
    ------
    InputError
        If the inner motion grows beyond all bounds.
    """
    from armeval.kernels.led_tip import led_by_the_tip

    parts = max(1, math.ceil(motion.period * _INNER_RATE - 1e-9))
    tip = _between(motion.tip, parts)
    k, n = len(tip), arm.chain.count
    tables = net_cogging(arm, compensated=compensated, compensation=compensation, seed=seed)
    joints = joint_records(arm.chain.arrays)
    for name in ("gear_ratio", "stribeck_speed", "coulomb_friction", "viscous_friction"):
        joints[name] = [getattr(drive, name) for drive in arm.drives]
    joints["static_friction"] = [drive.breakaway_friction for drive in arm.drives]
    joints["reflected_inertia"] = [drive.gear_ratio**2 * drive.rotor_inertia for drive in arm.drives]
    joints["index"] = [drive.index_offset for drive in arm.drives]
    joints["lower"], joints["upper"] = arm.chain.lower, arm.chain.upper
    joints["angle"], joints["speed"] = motion.joint[0], motion.joint_speed[0]
    angle, speed, friction = np.empty((k, n)), np.empty((k, n)), np.empty((k, n))
    lost = led_by_the_tip(
        arm.chain.arrays,
        joints,
        np.array(arm.gravity),
        np.stack([_cells(table) for table in tables]),
        tip,
        motion.period / parts,
        carries_weight,
        angle,
        speed,
        friction,
    )
    if lost >= 0:
        raise InputError(
            f"the arm's inner motion grows beyond all bounds {motion.time[lost // parts]:.3f} s into the hand's motion",
            "check masses and friction, or give a joint path",
        )
    change = np.empty((k, n))
    change[:-1] = np.diff(speed, axis=0) * (parts / motion.period)
    change[-1] = change[-2]
    shown = slice(None, None, parts)
    return replace(
        motion,
        tip=tip_positions(arm.chain.arrays, np.ascontiguousarray(angle[shown])),
        joint=np.ascontiguousarray(angle[shown]),
        joint_speed=speed[shown].copy(),
        joint_acceleration=change[shown].copy(),
        dry_friction=friction[shown].copy(),
    )


def _between(points: FloatArray, parts: int) -> FloatArray:
    """Give points (k, 3) with so many steps from each to the next, by a cubic spline."""
    from scipy.interpolate import CubicSpline

    number = np.arange((len(points) - 1) * parts + 1) / parts
    return np.ascontiguousarray(CubicSpline(np.arange(len(points)), points)(number))


def _cells(table: FloatArray) -> FloatArray:
    """Give a table as the kernel takes it, (2, cells + 2): torque, slope times a cell's width; the first two again."""
    cells = 4 * COG_CELLS
    at = 2.0 * np.pi * np.arange(cells) / cells
    nodes = np.stack([periodic_values(table, at), periodic_slopes(table, at) * (2.0 * np.pi / cells)])
    return np.concatenate([nodes, nodes[:, :2]], axis=1)


def rest_speeds(arm: Arm) -> FloatArray:
    """Shape (n,). Below these joint speeds [rad/s or m/s] the direction of dry friction is not known."""
    return np.where(arm.chain.prismatic, 1e-3 * reach_of(arm.chain.arrays), 1e-3)
