"""Where a joint would stick if it were moved slowly enough: cogging slope over servo stiffness, along the path.

A rotor that a servo of stiffness K drags over a cogging torque stops following where the torque rises with the angle
faster than the servo's pull falls, d(tau_cog)/dq > K (Prandtl 1928, Tomlinson 1929; for one harmonic T sin(N q) when
N T / K > 1). In general: where K_q - diag(d tau_cog/dq) is no longer positive definite, K_q being the joint-space
stiffness. K_q is

- the gains K on the diagonal for ``joint_pd``;
- J^T K_x J - sum_r f_r d2 x_r/dq dq for ``tip_impedance``: differentiate the servo's torque J^T f, f = K_x (x_t - x),
  by q. The force f is the one that balances the cogging, J^T f = -tau_cog;
- plus the change of the weight's torque, dg/dq, where gravity is not fed forward.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.evaluate.cogging.net_cogging import net_cogging, pitch
from armeval.evaluate.document import JsonValue
from armeval.kernels.circular_maximum import largest_on_arcs
from armeval.kernels.periodic import periodic_values
from armeval.model.arm import Arm
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation

if TYPE_CHECKING:
    import pandas as pd

_NO_STIFFNESS = 1e-9
"""Share of the largest stiffness below which a motion counts as having none."""

_SAME_POSE = 5e-3
"""While no joint moves further than this [rad or m], the arm's stiffness is taken as one: it changes by under 1 %."""


@dataclass(frozen=True, eq=False)
class StickingRatio:
    """Sticking ratio along the path; above 1 the joint sticks when moved slowly enough.

    Attributes
    ----------
    joints
        The joints' names, n of them.
    compensated
        Whether compensation acts.
    arc
        Shape (k,) [m]. Arc length of the trajectory's samples.
    ratio
        Shape (k, n). Largest cogging slope at the motor angles that each joint is to pass from this sample to the next,
        over the joint's stiffness while the other joints are held.
    envelope
        Shape (k, n). The same with the largest slope within half a cog pitch to either side. A loaded joint does not
        stand where it is planned, so it may meet a slope from there; this is the upper bound.
    arm, arm_envelope
        Shape (k,). Largest eigenvalue e of S v = e K_q v with S the slopes of ``ratio`` (``envelope``): above 1 some
        motion of all joints together is unstable. Motions that leave the tip where it is have no stiffness under
        ``tip_impedance``; friction alone holds them, and they are left out.
    """

    joints: tuple[str, ...]
    compensated: bool
    arc: FloatArray
    ratio: FloatArray
    envelope: FloatArray
    arm: FloatArray
    arm_envelope: FloatArray

    @property
    def max(self) -> FloatArray:
        """Shape (n,). Largest ratio of each joint along the path."""
        return np.asarray(self.ratio.max(axis=0))

    @property
    def at(self) -> FloatArray:
        """Shape (n,) [m]. Where along the path each joint has it."""
        return np.asarray(self.arc[self.ratio.argmax(axis=0)])

    def to_frame(self) -> pd.DataFrame:
        """One row a joint: largest ratio, where, and its upper bound."""
        import pandas as pd

        return pd.DataFrame(self.to_document())

    def to_document(self) -> list[dict[str, JsonValue]]:
        """Give the entries of the JSON document, one a joint."""
        return [
            {
                "joint": joint,
                "max": float(self.max[i]),
                "at_m": float(self.at[i]),
                "envelope_max": float(self.envelope[:, i].max()),
                "envelope_at_m": float(self.arc[self.envelope[:, i].argmax()]),
            }
            for i, joint in enumerate(self.joints)
        ]

    def arm_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document for all joints together."""
        return {
            "max": float(self.arm.max()),
            "at_m": float(self.arc[self.arm.argmax()]),
            "envelope_max": float(self.arm_envelope.max()),
            "envelope_at_m": float(self.arc[self.arm_envelope.argmax()]),
        }


def sticking_ratio(
    arm: Arm,
    trajectory: Trajectory,
    *,
    compensated: bool = False,
    compensation: Compensation | None = None,
    seed: int = 0,
) -> StickingRatio:
    """Evaluate the sticking ratio along a trajectory, for every joint and for the arm as a whole.

    Parameters
    ----------
    arm, trajectory
        The trajectory is one that was planned for this arm.
    compensated, compensation, seed
        Whether compensation acts, what the firmware's table can do and the seed of its noise; see
        :func:`armeval.evaluate.cogging.net_cogging.net_cogging`.
    """
    q = trajectory.joint
    tables = net_cogging(arm, compensated=compensated, compensation=compensation, seed=seed)
    slope, widest, torque = np.empty_like(q), np.empty_like(q), np.empty_like(q)
    for i, (drive, table) in enumerate(zip(arm.drives, tables, strict=True)):
        motor = drive.gear_ratio * q[:, i] + drive.index_offset
        following = np.concatenate([motor[1:], motor[-1:]])
        half = 0.5 * pitch(drive.cog_map)
        square = drive.gear_ratio**2
        slopes = np.ascontiguousarray(table[:, 1])
        slope[:, i] = square * largest_on_arcs(slopes, np.minimum(motor, following), np.maximum(motor, following))
        widest[:, i] = square * largest_on_arcs(slopes, motor - half, motor + half)
        torque[:, i] = drive.gear_ratio * periodic_values(table, motor)
    if arm.servo.law == "joint_pd" and arm.servo.gravity_feedforward:
        stiffness = np.array([drive.stiffness for drive in arm.drives])
        ratio, envelope = _over(slope, stiffness), _over(widest, stiffness)
        return StickingRatio(
            arm.joints, compensated, trajectory.arc, ratio, envelope, ratio.max(axis=1), envelope.max(axis=1)
        )
    begin = _group_starts(q)
    many = np.diff(np.append(begin, len(q)))
    poses = np.ascontiguousarray(q[begin])
    K = joint_stiffness(arm, poses, torque[begin])
    motions = _resisted_motions(arm, poses)
    diagonal = np.repeat(np.einsum("kii->ki", K), many, axis=0)
    return StickingRatio(
        arm.joints,
        compensated,
        trajectory.arc,
        _over(slope, diagonal),
        _over(widest, diagonal),
        np.repeat(_largest_eigenvalue(np.maximum.reduceat(slope, begin), K, motions), many),
        np.repeat(_largest_eigenvalue(np.maximum.reduceat(widest, begin), K, motions), many),
    )


def joint_stiffness(arm: Arm, q: FloatArray, torque: FloatArray) -> FloatArray:
    """Joint-space stiffness K_q of the servo in many poses (see the head of this module).

    Parameters
    ----------
    arm
        The arm, n joints.
    q
        Shape (k, n) [rad or m]. Poses.
    torque
        Shape (k, n) [N m]. Cogging torque there, which the servo balances.

    Returns
    -------
    Shape (k, n, n) [N m/rad].
    """
    from armeval.kernels.chain import tip_jacobians
    from armeval.kernels.tip_stiffness import spring_stiffness

    q = np.ascontiguousarray(q)
    if arm.servo.law == "tip_impedance":
        J = tip_jacobians(arm.chain.arrays, q)
        force = -np.einsum("knr,kn->kr", np.linalg.pinv(J, rcond=1e-6), torque)
        K = spring_stiffness(arm.chain.arrays, q, np.asarray(arm.servo.tip_stiffness), force)
    else:
        K = np.broadcast_to(np.diag([drive.stiffness for drive in arm.drives]), (len(q), q.shape[1], q.shape[1]))
    return K if arm.servo.gravity_feedforward else K + _weight_stiffness(arm, q)


def _group_starts(q: FloatArray) -> IntArray:
    """First sample of each group of samples within which no joint moves further than :data:`_SAME_POSE`."""
    way = np.concatenate([np.zeros(1), np.cumsum(np.abs(np.diff(q, axis=0)).max(axis=1))])
    return np.unique(np.floor(way / _SAME_POSE), return_index=True)[1]


def _weight_stiffness(arm: Arm, q: FloatArray) -> FloatArray:
    """Shape (k, n, n): dg/dq by central differences, symmetric because weight has a potential."""
    from armeval.kernels.dynamics import mass_matrix_and_bias

    step, still, gravity = 1e-4, np.zeros_like(q), np.array(arm.gravity)
    change = np.empty((*q.shape, q.shape[1]))
    for j in range(q.shape[1]):
        moved = step * np.eye(q.shape[1])[j]
        after = mass_matrix_and_bias(arm.chain.arrays, gravity, q + moved, still)[2]
        before = mass_matrix_and_bias(arm.chain.arrays, gravity, q - moved, still)[2]
        change[:, :, j] = (after - before) / (2.0 * step)
    return 0.5 * (change + change.transpose(0, 2, 1))


def _over(slope: FloatArray, stiffness: FloatArray) -> FloatArray:
    """Ratio of slope to stiffness; without stiffness any rising torque makes the joint run away."""
    held = stiffness > 0.0
    return np.where(
        np.broadcast_to(held, slope.shape), slope / np.where(held, stiffness, 1.0), np.where(slope > 0.0, np.inf, 0.0)
    )


def _resisted_motions(arm: Arm, q: FloatArray) -> FloatArray:
    """Shape (k, n, n): unit motions that the servo resists, in columns; zero columns in place of those it does not."""
    from armeval.kernels.tip_stiffness import spring_stiffness

    if arm.servo.law == "joint_pd":
        return np.broadcast_to(np.eye(q.shape[1]), (len(q), q.shape[1], q.shape[1]))
    K = spring_stiffness(arm.chain.arrays, q, np.asarray(arm.servo.tip_stiffness), np.zeros((len(q), 3)))
    w, V = np.linalg.eigh(K)
    return np.where((w > _NO_STIFFNESS * w[:, -1:])[:, None, :], V, 0.0)


def _largest_eigenvalue(slope: FloatArray, K: FloatArray, motions: FloatArray) -> FloatArray:
    """Largest e of S v = e K v among the given motions v, S = diag(slope); infinite where K pushes away."""
    across = motions.transpose(0, 2, 1)
    K = across @ K @ motions
    np.einsum("kii->ki", K)[...] += ~motions.any(axis=1)
    w, V = np.linalg.eigh(K)
    whitened = motions @ (V / np.sqrt(np.where(w > 0.0, w, 1.0))[:, None, :])
    largest = np.linalg.eigvalsh(whitened.transpose(0, 2, 1) @ (slope[:, :, None] * whitened))[:, -1]
    return np.where(w[:, 0] > 0.0, largest, np.inf)
