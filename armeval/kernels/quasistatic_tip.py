"""An arm whose tip is dragged slowly by a spring over cogging torque and dry friction in its joints.

The joints' torques u = J^T K_x (x_t - x(q)) + tau(q) + load are balanced by friction. A joint rests while its torque
stays within static friction, else it moves with Coulomb friction against it until the two are equal. The moving joints
are brought back to balance by Newton's method with the matrix K_q - diag(d tau/dq) of these; while it is positive
definite they follow the target. Once it is not, the balance is unstable: the arm falls, without inertia, down the
torques that are left, each joint as fast as its stiffness says, until it comes to a place where it is stable again.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.kernels.chain import ChainArrays, joint_frames, tip_jacobian, tip_position
from armeval.kernels.cholesky import factor_in_place, solve_in_place
from armeval.kernels.compile import jit
from armeval.kernels.periodic import periodic_slope, periodic_value
from armeval.kernels.tip_stiffness import add_spring_stiffness

_MOST_MOVES = 20_000
"""Newton or falling steps for one target after which the rest is left to the next target."""
_BALANCED = 1e-9
"""Share of a step's torque that may be left."""


class DraggedArm(NamedTuple):
    """An arm, n joints, and the spring at its tip.

    Attributes
    ----------
    chain
        The chain with the joints' ranges.
    spring
        Shape (3,) [N/m] along x, y, z of the base.
    coulomb, static
        Shape (n,) [N m]. Friction torques.
    gear, index_offset
        Shape (n,). The motors' mechanical angles are ``gear * q + index_offset``.
    tables
        Shape (n, m, 2). Cogging torques on the motor side, see :func:`armeval.kernels.periodic.hermite_table`.
    """

    chain: ChainArrays
    spring: FloatArray
    coulomb: FloatArray
    static: FloatArray
    gear: FloatArray
    index_offset: FloatArray
    tables: FloatArray


class _Space(NamedTuple):
    """Room for one pose's working."""

    rotation: FloatArray
    origin: FloatArray
    tip: FloatArray
    J: FloatArray
    K: FloatArray
    A: FloatArray
    torque: FloatArray
    left: FloatArray
    move: FloatArray


@jit
def _evaluate(arm: DraggedArm, q: FloatArray, target: FloatArray, load: FloatArray, space: _Space) -> None:
    """Fill in the joints' torques and the stiffness matrix at q."""
    joint_frames(arm.chain, q, space.rotation, space.origin)
    tip_position(arm.chain, space.rotation, space.origin, space.tip)
    tip_jacobian(arm.chain, space.rotation, space.origin, space.tip, space.J)
    force = arm.spring * (target - space.tip)
    space.K[:] = 0.0
    add_spring_stiffness(arm.chain, space.rotation, space.J, arm.spring, force, space.K)
    for i in range(q.shape[0]):
        motor = arm.gear[i] * q[i] + arm.index_offset[i]
        torque = arm.gear[i] * periodic_value(arm.tables[i], motor) + load[i]
        for r in range(3):
            torque += space.J[r, i] * force[r]
        space.torque[i] = torque
        space.K[i, i] -= arm.gear[i] ** 2 * periodic_slope(arm.tables[i], motor)


@jit
def _sort(arm: DraggedArm, q: FloatArray, direction: FloatArray, space: _Space) -> None:
    """Let joints start that friction cannot hold, and stop those at a limit; fill in the torque left to each."""
    for i in range(q.shape[0]):
        u = space.torque[i]
        if abs(u) > arm.static[i] and direction[i] * u <= 0.0:
            direction[i] = 1.0 if u > 0.0 else -1.0
        if (direction[i] > 0.0 and q[i] >= arm.chain.upper[i]) or (direction[i] < 0.0 and q[i] <= arm.chain.lower[i]):
            direction[i] = 0.0
        space.left[i] = u - arm.coulomb[i] * direction[i] if direction[i] != 0.0 else 0.0


@jit
def _newton(direction: FloatArray, space: _Space) -> bool:
    """Fill in the move that balances the moving joints; False where their balance is not stable.

    A joint that would have to move against its direction rests instead, since friction turns round before it does.
    """
    n = direction.shape[0]
    for _ in range(n + 1):
        for i in range(n):
            held = direction[i] == 0.0
            space.move[i] = 0.0 if held else space.left[i]
            for j in range(i):
                space.A[i, j] = 0.0 if held or direction[j] == 0.0 else space.K[i, j]
            space.A[i, i] = 1.0 if held else space.K[i, i]
        if not factor_in_place(space.A):
            return False
        solve_in_place(space.A, space.move)
        consistent = True
        for i in range(n):
            if direction[i] * space.move[i] < 0.0:
                direction[i] = 0.0
                consistent = False
        if consistent:
            break
    return True


@jit
def _fall(direction: FloatArray, space: _Space) -> None:
    """Fill in a move down the torques that are left, short enough not to swing over the stiffest motion's balance."""
    n = direction.shape[0]
    stiff = 0.0
    for i in range(n):
        stiff += abs(space.K[i, i])
    for i in range(n):
        space.move[i] = direction[i] * max(direction[i] * space.left[i], 0.0) / stiff


@jit
def follow_tip_target(
    arm: DraggedArm, target: FloatArray, load: FloatArray, start: FloatArray, step: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Follow the arm along the targets of its tip.

    Parameters
    ----------
    arm
        The arm, n joints.
    target
        Shape (k, 3) [m]. Tip targets.
    load
        Shape (k, n) [N m]. Torque on the joints beside servo, cogging and friction.
    start
        Shape (n,) [rad or m]. Pose in which the arm rests before the first target.
    step
        Shape (n,) [rad or m]. Largest move at once: a small part of each joint's shortest cogging period.

    Returns
    -------
    angle
        Shape (k, n) [rad or m]. Where the arm rests at each target.
    fell
        Shape (k,). Whether the balance was lost on the way there.
    """
    k, n = load.shape
    angle, fell = np.empty((k, n)), np.zeros(k, np.bool_)
    space = _Space(
        np.empty((n, 3, 3)),
        np.empty((n, 3)),
        np.empty(3),
        np.empty((3, n)),
        np.empty((n, n)),
        np.empty((n, n)),
        np.empty(n),
        np.empty(n),
        np.empty(n),
    )
    q = start.copy()
    direction = np.zeros(n)
    for s in range(k):
        direction[:] = 0.0
        for _ in range(_MOST_MOVES):
            _evaluate(arm, q, target[s], load[s], space)
            _sort(arm, q, direction, space)
            unbalanced = False
            for i in range(n):
                unbalanced |= direction[i] * space.left[i] > _BALANCED * abs(space.K[i, i]) * step[i]
            if not unbalanced:
                break
            if not _newton(direction, space):
                _fall(direction, space)
                fell[s] = True
            share = 1.0
            for i in range(n):
                if abs(space.move[i]) * share > step[i]:
                    share = step[i] / abs(space.move[i])
            for i in range(n):
                q[i] = min(max(q[i] + share * space.move[i], arm.chain.lower[i]), arm.chain.upper[i])
        angle[s] = q
    return angle, fell
