"""Which directions of the tip the joints reach, and what joint torques are at the tip.

The tip of an arm moves in m <= 3 directions: two for an arm of parallel turning joints, whatever their number, two for
any arm of two joints. Across them the structure carries every force; no joint feels it, and no figure is given.

Let the m columns of U span the directions that the joints reach in a pose, J_u = U^T J of shape (m, n), and a hand hold
the tip. The equations of motion with the hand's force F = U f are

    M q'' + r = J_u^T f,        r = everything but the inner motion's inertia: h - tau_drive - tau_cog + tau_friction

and the tip moves as the hand wants: J_u q'' = a. Eliminate q'' = M^-1 (J_u^T f - r):

    f = L (a + J_u M^-1 r),     L = (J_u M^-1 J_u^T)^-1, the tip's apparent mass

So a joint torque r is met at the tip as f = L J_u M^-1 r. For n = m that is J_u^-T r: M cancels. For n > m (a
redundant arm) the joints can also move without moving the tip; that inner motion is free, and whatever part of r drives
it is not met by the hand. L J_u M^-1 is the generalised inverse of J_u^T that the arm's own inertia chooses
(O. Khatib, "A unified approach for motion and force control of robot manipulators: the operational space formulation",
IEEE J. Robotics and Automation 3(1), 1987, from memory); any other, such as the one of least squares, would hold the
inner motion with a force that nobody exerts. Since J_u M^-1 M q'' = a - J_u' q', inertia M q'' of any
motion with the same tip acceleration is met as the same force.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.errors import InputError
from armeval.evaluate.planning.reach import LEAST_LEVER
from armeval.kernels.chain import tip_jacobians
from armeval.kernels.dynamics import mass_matrix_and_bias
from armeval.kernels.inverse import reach_of
from armeval.model.arm import Arm
from armeval.model.chain import Chain

_NO_LEVER = 1e-6
"""Share of the largest singular value below which a direction of the tip is not reached at all."""


@dataclass(frozen=True, eq=False)
class TipDirections:
    """What the joints are to the tip in k poses of an arm of n joints.

    Attributes
    ----------
    jacobian
        Shape (k, 3, n) [m/rad].
    basis
        Shape (k, 3, m). The directions that the joints reach, orthonormal, best lever first.
    lever
        Shape (k,). Smallest singular value of the Jacobian in these directions, over the arm's reach.
    singular
        Shape (k,). Whether that is below ``LEAST_LEVER`` (1 %): the joints have almost no lever on the tip, torque
        errors become huge forces, and no figure is given.
    inertia
        Shape (k, n, n) [kg m^2]. Mass matrix with reflected rotors.
    weight
        Shape (k, n) [N m]. Joint torque that holds the arm's weight.
    mobility
        Shape (k, 3, 3) [1/kg]. J M^-1 J^T: acceleration of the free tip for a force on it.
    torque_to_force
        Shape (k, 3, n) [N per N m]. U L J_u M^-1; zero where singular.
    """

    jacobian: FloatArray
    basis: FloatArray
    lever: FloatArray
    singular: BoolArray
    inertia: FloatArray
    weight: FloatArray
    mobility: FloatArray
    torque_to_force: FloatArray

    @property
    def count(self) -> int:
        """Number of directions, m."""
        return int(self.basis.shape[2])

    @property
    def blind(self) -> FloatArray | None:
        """Shape (3,). The direction that no joint reaches, where it is one and the same in all poses; else None."""
        if self.count != 2:
            return None
        normal = np.cross(self.basis[:, :, 0], self.basis[:, :, 1])
        spread = np.abs(normal @ normal[0])
        return normal[0] if spread.min() > 1.0 - 1e-9 else None


def tip_directions(arm: Arm, q: FloatArray) -> TipDirections:
    """Work out what the joints are to the tip in many poses.

    Parameters
    ----------
    arm
        The arm, n joints.
    q
        Shape (k, n) [rad or m].
    """
    chain = arm.chain.arrays
    q = np.ascontiguousarray(q)
    J = tip_jacobians(chain, q)
    reach = float(reach_of(chain))
    m = reached_directions(arm.chain, q)
    # A slide counts as a turn about an axis as far away as the arm reaches, so that both have the same unit.
    levers = J * np.where(arm.chain.prismatic, reach, 1.0)
    square, vectors = np.linalg.eigh(levers @ levers.transpose(0, 2, 1))
    basis = np.ascontiguousarray(vectors[:, :, :-4:-1][:, :, :m])
    lever = np.sqrt(np.maximum(square[:, 3 - m], 0.0)) / reach
    singular = lever < LEAST_LEVER
    rotors = np.array([drive.gear_ratio**2 * drive.rotor_inertia for drive in arm.drives])
    M, _, weight = mass_matrix_and_bias(chain, np.array(arm.gravity), q, np.zeros_like(q))
    M += np.diag(rotors)
    if (np.linalg.eigvalsh(M)[:, 0] <= 0.0).any():
        raise InputError(
            "a motion of the joints has no inertia at all", "give the links inertia, or the drives `rotor_inertia`"
        )
    per_force = np.linalg.solve(M, J.transpose(0, 2, 1))
    held = np.where(singular[:, None, None], np.eye(m, J.shape[2]), basis.transpose(0, 2, 1) @ J)
    if m == J.shape[2]:
        undone = np.linalg.inv(held).transpose(0, 2, 1)
    else:
        answered = held @ np.linalg.inv(M)
        undone = np.linalg.solve(answered @ held.transpose(0, 2, 1), answered)
    torque_to_force = np.where(singular[:, None, None], 0.0, basis @ undone)
    return TipDirections(
        jacobian=J,
        basis=basis,
        lever=lever,
        singular=singular,
        inertia=M,
        weight=weight,
        mobility=J @ per_force,
        torque_to_force=torque_to_force,
    )


def reached_directions(chain: Chain, q: FloatArray) -> int:
    """Count the tip directions that the joints reach in poses (k, n), or in others within the joints' ranges."""
    n = chain.count
    low = np.where(np.isfinite(chain.lower), chain.lower, -np.pi)
    high = np.where(np.isfinite(chain.upper), chain.upper, np.pi)
    # Additive recurrence with the roots of integers: even cover in any dimension, the same every time.
    share = (0.5 + np.arange(1, 65)[:, None] * np.sqrt(np.arange(2, n + 2) + (np.arange(n) >= 2))) % 1.0
    others = low + share * (high - low)
    J = tip_jacobians(chain.arrays, np.ascontiguousarray(np.concatenate([q[:: max(1, len(q) // 64)], others])))
    singular = np.linalg.svd(J * np.where(chain.prismatic, reach_of(chain.arrays), 1.0), compute_uv=False)
    return int((singular > _NO_LEVER * singular[:, :1]).sum(axis=1).max())
