"""The replay: how the arm will move along a trajectory, with everything in it that moves the tip."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.errors import InputError
from armeval.evaluate.replaying.members import nominal_member
from armeval.evaluate.replaying.replay_input import ReplayInput, replay_input
from armeval.kernels.replay import replay_lap
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation

_ALL_CAUSES = Causes()
_IDEAL_TABLE = Compensation()


@dataclass(frozen=True, eq=False)
class Replay:
    """A replayed lap on the trajectory's time grid, k periods of n joints.

    Attributes
    ----------
    time
        Shape (k,) [s].
    angle, speed
        Shape (k, n) [rad or m], [rad/s or m/s]. True joint angles and speeds.
    torque
        Shape (k, n) [N m or N]. Joint torque commanded at that instant; it acts after the servo's delay.
    saturated
        Shape (k, n). Whether the command was cut at the torque limit.
    resting
        Shape (k, n). Whether dry friction held the joint exactly still over the step before.
    """

    time: FloatArray
    angle: FloatArray
    speed: FloatArray
    torque: FloatArray
    saturated: BoolArray
    resting: BoolArray


def replay(
    arm: Arm,
    trajectory: Trajectory,
    *,
    compensated: bool,
    compensation: Compensation = _IDEAL_TABLE,
    substeps: int = 1,
    seed: int = 0,
    settle: float = 0.5,
    causes: Causes = _ALL_CAUSES,
    start: FloatArray | None = None,
) -> Replay:
    """Replay one lap of an arm along a trajectory.

    Parameters
    ----------
    arm, trajectory
        The trajectory is one that was planned for this arm.
    compensated
        Whether the firmware feeds its compensation table forward.
    compensation
        What that table can do. Every joint's table is out of step by just the index error, and its entries carry noise.
    substeps
        Time steps in a servo period.
    seed
        Of the table's noise.
    settle
        Time [s] for which the first target is held before the lap.
    causes
        What acts; default: everything.
    start
        Shape (n,) [rad or m]. Where the arm rests before settling; default: the first target.

    Raises
    ------
    InputError
        If the trajectory does not fit the arm, or the motion grows beyond all bounds.
    """
    first = np.asarray(trajectory.joint[0] if start is None else start, dtype=np.float64)
    prepared = replay_input(
        arm,
        trajectory,
        [nominal_member(arm, compensation, first, seed)],
        compensated=compensated,
        compensation=compensation,
        causes=causes,
        substeps=substeps,
        settle=settle,
    )
    lost = replay_lap(*prepared)
    if lost >= 0:
        raise lost_servo(prepared, lost)
    lap = prepared.lap
    return Replay(
        time=np.array(trajectory.time),
        angle=lap["angle"].copy(),
        speed=lap["speed"].copy(),
        torque=lap["torque"].copy(),
        saturated=lap["cut"] != 0.0,
        resting=lap["rests"] != 0.0,
    )


def lost_servo(prepared: ReplayInput, lost: int) -> InputError:
    """Say that the motion left the numbers in period ``lost``, settling included."""
    when = (lost - len(prepared.targets) + len(prepared.lap)) * float(prepared.servo["period"][0])
    place = f"at {when:.3f} s of the lap" if when >= 0.0 else "before the lap, while the arm holds its first target"
    return InputError(
        f"the motion grows beyond all bounds {place}: the servo loop is not stable",
        "lower stiffness or damping, shorten the delay, or raise the speed filter's corner",
    )
