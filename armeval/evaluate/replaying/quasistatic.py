"""How far cogging and dry friction make the tip stray when the path is run very slowly, and where joints jump.

Nothing but the servo's stiffness, cogging torque, friction and, where it is not fed forward, weight act: no inertia, no
damping, no delay, no encoder, no torque limit. What the replay shows beyond this is owed to speed and to the firmware.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.cogging.net_cogging import net_cogging
from armeval.evaluate.document import JsonValue
from armeval.evaluate.planning.path_progress import path_progress
from armeval.kernels.chain import tip_positions
from armeval.kernels.quasistatic import DraggedJoint, follow_target
from armeval.model.arm import Arm
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation

if TYPE_CHECKING:
    import pandas as pd

_LEAST_CELLS = 4096


@dataclass(frozen=True)
class Jump:
    """A sudden motion while the target hardly moves.

    Attributes
    ----------
    joint
        The joint that jumps; under ``tip_impedance`` all joints move together, and this one moves most.
    time, arc
        When [s] and where along the path [m] the trajectory's target is then.
    joint_angle
        Before the jump [rad or m].
    size
        Of the jump [rad or m], with its sign.
    release
        Distance that the tip moves with it [m].
    """

    joint: str
    time: float
    arc: float
    joint_angle: float
    size: float
    release: float

    def to_document(self) -> dict[str, JsonValue]:
        """Give the jump's entry in the JSON document."""
        return {
            "joint": self.joint,
            "time_s": self.time,
            "at_m": self.arc,
            "joint_angle_rad": self.joint_angle,
            "release_rad": self.size,
            "release_m": self.release,
        }


@dataclass(frozen=True, eq=False)
class Quasistatic:
    """Where the arm rests at each target of a trajectory that is run very slowly; k samples, n joints.

    Attributes
    ----------
    joints
        The joints' names.
    compensated
        Whether compensation acts.
    arc
        Shape (k,) [m]. Arc length of the target along the path.
    angle, target
        Shape (k, n) [rad or m]. Joint angles, joint targets.
    tip, target_tip
        Shape (k, 3) [m]. Tip and tip target.
    deviation
        Shape (k,) [m]. Shortest distance from the tip to the path near the target.
    jumps
        In the order of time.
    """

    joints: tuple[str, ...]
    compensated: bool
    arc: FloatArray
    angle: FloatArray
    target: FloatArray
    tip: FloatArray
    target_tip: FloatArray
    deviation: FloatArray
    jumps: tuple[Jump, ...]

    @property
    def deflection(self) -> FloatArray:
        """Shape (k, n) [rad or m]. Joint angle minus its target."""
        return np.asarray(self.angle - self.target)

    @property
    def tracking(self) -> FloatArray:
        """Shape (k,) [m]. Distance from the tip to its target."""
        return np.asarray(np.linalg.norm(self.tip - self.target_tip, axis=1))

    @property
    def tracking_rms(self) -> float:
        """Root mean square of :attr:`tracking` over the trajectory's samples [m]."""
        return float(np.sqrt(np.mean(self.tracking**2)))

    @property
    def deviation_rms(self) -> float:
        """Root mean square of :attr:`deviation` over the trajectory's samples [m]."""
        return float(np.sqrt(np.mean(self.deviation**2)))

    def to_frame(self) -> pd.DataFrame:
        """One row a jump."""
        import pandas as pd

        columns = ["joint", "time_s", "at_m", "joint_angle_rad", "release_rad", "release_m"]
        return pd.DataFrame([jump.to_document() for jump in self.jumps], columns=columns)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document."""
        return {
            "tracking_rms_m": self.tracking_rms,
            "tracking_max_m": float(self.tracking.max()),
            "deviation_rms_m": self.deviation_rms,
            "deviation_max_m": float(self.deviation.max()),
            "jumps": [jump.to_document() for jump in self.jumps],
        }


def quasistatic(
    arm: Arm,
    trajectory: Trajectory,
    *,
    compensated: bool = False,
    compensation: Compensation | None = None,
    seed: int = 0,
) -> Quasistatic:
    """Follow the arm along a trajectory as if it were run very slowly.

    The arm starts at rest on the first target and settles from there.

    Parameters
    ----------
    arm, trajectory
        The trajectory is one that was planned for this arm.
    compensated, compensation, seed
        Whether compensation acts, what the firmware's table can do and the seed of its noise; see
        :func:`armeval.evaluate.cogging.net_cogging.net_cogging`.

    Raises
    ------
    InputError
        If a joint has no stiffness under ``joint_pd``.
    """
    tables = net_cogging(arm, compensated=compensated, compensation=compensation, seed=seed)
    load = _weight(arm, trajectory)
    follow = _follow_joints if arm.servo.law == "joint_pd" else _follow_tip
    angle, moved = follow(arm, trajectory, tables, load)
    tip = tip_positions(arm.chain.arrays, angle)
    return Quasistatic(
        joints=arm.joints,
        compensated=compensated,
        arc=trajectory.arc,
        angle=angle,
        target=trajectory.joint,
        tip=tip,
        target_tip=trajectory.tip,
        deviation=path_progress(tip, trajectory.arc, trajectory)[0],
        jumps=_jumps(arm, trajectory, moved),
    )


@dataclass(frozen=True)
class _Moved:
    """One jump as the kernels give it: joint's place, sample after it, poses (n,) before and after."""

    joint: int
    sample: int
    before: FloatArray
    after: FloatArray


def _weight(arm: Arm, trajectory: Trajectory) -> FloatArray:
    """Shape (k, n) [N m]: torque of the weight in the planned pose, where the servo does not feed it forward."""
    q = np.array(trajectory.joint)
    if arm.servo.gravity_feedforward:
        return np.zeros_like(q)
    from armeval.kernels.dynamics import mass_matrix_and_bias

    return -mass_matrix_and_bias(arm.chain.arrays, np.array(arm.gravity), q, np.zeros_like(q))[2]


def _step(table: FloatArray, gear: float) -> float:
    """Joint angle [rad] of one cell of the table."""
    return 2.0 * np.pi / (max(len(table), _LEAST_CELLS) * abs(gear))


def _follow_joints(
    arm: Arm, trajectory: Trajectory, tables: tuple[FloatArray, ...], load: FloatArray
) -> tuple[FloatArray, list[_Moved]]:
    angle = np.empty(trajectory.joint.shape)
    found: list[tuple[int, int, float, float]] = []
    for i, (drive, table) in enumerate(zip(arm.drives, tables, strict=True)):
        if drive.stiffness == 0.0:
            raise InputError("the joint has no stiffness", "give it one", place=f"[joint.{drive.joint}] stiffness")
        static = drive.breakaway_friction
        joint = DraggedJoint(
            stiffness=drive.stiffness,
            coulomb=drive.coulomb_friction,
            static=static,
            gear=drive.gear_ratio,
            index_offset=drive.index_offset,
            lower=float(arm.chain.lower[i]),
            upper=float(arm.chain.upper[i]),
            table=table,
        )
        step = _step(table, drive.gear_ratio)
        # Friction alone makes slips of (Fs - Fc) / K; only larger ones owe something to cogging.
        least = step + 2.0 * (static - drive.coulomb_friction) / drive.stiffness
        target = np.array(trajectory.joint[:, i])
        angle[:, i], samples, jumps = follow_target(
            joint, target, np.ascontiguousarray(load[:, i]), float(target[0]), step, least
        )
        found += [(i, int(s), float(a), float(b)) for s, (a, b) in zip(samples, jumps, strict=True)]
    moved = []
    for i, s, a, b in sorted(found, key=lambda jump: jump[1]):
        before, after = angle[s].copy(), angle[s].copy()
        before[i], after[i] = a, b
        moved.append(_Moved(i, s, before, after))
    return angle, moved


def _follow_tip(
    arm: Arm, trajectory: Trajectory, tables: tuple[FloatArray, ...], load: FloatArray
) -> tuple[FloatArray, list[_Moved]]:
    from armeval.kernels.quasistatic_tip import DraggedArm, follow_tip_target

    size = max(len(table) for table in tables)
    dragged = DraggedArm(
        chain=arm.chain.arrays,
        spring=np.array(arm.servo.tip_stiffness),
        coulomb=np.array([drive.coulomb_friction for drive in arm.drives]),
        static=np.array([drive.breakaway_friction for drive in arm.drives]),
        gear=arm.gear_ratio,
        index_offset=np.array([drive.index_offset for drive in arm.drives]),
        tables=np.stack([table if len(table) == size else np.zeros((size, 2)) for table in tables]),
    )
    step = np.array([8.0 * _step(dragged.tables[i], drive.gear_ratio) for i, drive in enumerate(arm.drives)])
    angle, fell = follow_tip_target(dragged, np.array(trajectory.tip), load, np.array(trajectory.joint[0]), step)
    moved = []
    for s in np.flatnonzero(fell):
        before = angle[s - 1] if s > 0 else trajectory.joint[0]
        joint = int(np.argmax(np.abs(angle[s] - before) / step))
        if abs(angle[s, joint] - before[joint]) > step[joint]:
            moved.append(_Moved(joint, int(s), before, angle[s]))
    return angle, moved


def _jumps(arm: Arm, trajectory: Trajectory, moved: list[_Moved]) -> tuple[Jump, ...]:
    if not moved:
        return ()
    chain = arm.chain.arrays
    before, after = np.stack([one.before for one in moved]), np.stack([one.after for one in moved])
    release = np.linalg.norm(tip_positions(chain, after) - tip_positions(chain, before), axis=1)
    return tuple(
        Jump(
            joint=arm.joints[one.joint],
            time=float(trajectory.time[one.sample]),
            arc=float(trajectory.arc[one.sample]),
            joint_angle=float(one.before[one.joint]),
            size=float(one.after[one.joint] - one.before[one.joint]),
            release=float(distance),
        )
        for one, distance in zip(moved, release, strict=True)
    )
