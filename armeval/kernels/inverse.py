"""Inverse kinematics along a row of tip targets: each pose starts from the one before.

One idea serves every arm. Among all poses within the joint ranges, each target takes the one that makes

    1/2 |tip(q) - x|^2 + mu/2 sum_i w_i (q_i - rest_i)^2

smallest, with mu so small (1e-12 of the squared reach) that it moves the tip by picometres. Where the arm can reach x,
that is the pose nearest to the rest angles, so a redundant arm comes back to the pose it left when the path closes;
where it cannot, it is the pose whose tip is nearest to x. The minimum is found by Newton's method with bounds (steps
projected on the ranges, joints that press against a limit held). The curvature of tip(q) enters with the multiplier
lambda = (x - tip(q)) / mu of the constraint, carried from step to step (a primal-dual penalty method), which keeps the
convergence quadratic also in the directions that do not move the tip.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.chain import ChainArrays, joint_frames, tip_jacobian, tip_position
from armeval.kernels.cholesky import factor_in_place, solve_in_place
from armeval.kernels.compile import jit

_SMALL = 1e-12
"""Weight of the rest angles against the tip error, per squared reach."""
_CONVERGED = 1e-8
"""Newton step [rad] after which the next one would be lost in rounding."""
_MISSED = 1e-6
"""Share of the reach by which a tip may miss a target that counts as reached."""
_CLOSE_BY = 0.1
"""Largest change [rad or m] between two targets that still is one motion."""


class _Space(NamedTuple):
    """Room for one pose's working."""

    rotation: FloatArray
    origin: FloatArray
    tip: FloatArray
    J: FloatArray
    A: FloatArray
    step: FloatArray
    trial: FloatArray
    weight: FloatArray
    dual: FloatArray


@jit
def _space(chain: ChainArrays, reach: float) -> _Space:
    n = chain.lower.shape[0]
    weight = np.ones(n)
    for i in range(n):
        if chain.prismatic[i]:
            weight[i] = 1.0 / (reach * reach)
    return _Space(
        np.empty((n, 3, 3)),
        np.empty((n, 3)),
        np.empty(3),
        np.empty((3, n)),
        np.empty((n, n)),
        np.empty(n),
        np.empty(n),
        weight,
        np.zeros(3),
    )


@jit
def reach_of(chain: ChainArrays) -> float:
    """Length of the outstretched chain from its first joint to the tip [m], slides at zero; 1 if it has none."""
    n = chain.lower.shape[0]
    reach = np.sqrt(chain.tip[0] ** 2 + chain.tip[1] ** 2 + chain.tip[2] ** 2)
    for i in range(1, n):
        P = chain.placement[i]
        reach += np.sqrt(P[0, 3] ** 2 + P[1, 3] ** 2 + P[2, 3] ** 2)
    return reach if reach > 0.0 else 1.0


@jit
def _cost(chain: ChainArrays, target: FloatArray, rest: FloatArray, mu: float, q: FloatArray, space: _Space) -> float:
    joint_frames(chain, q, space.rotation, space.origin)
    tip_position(chain, space.rotation, space.origin, space.tip)
    cost = 0.0
    for r in range(3):
        cost += (space.tip[r] - target[r]) ** 2
    for i in range(q.shape[0]):
        cost += mu * space.weight[i] * (q[i] - rest[i]) ** 2
    return 0.5 * cost


@jit
def _matrix(chain: ChainArrays, mu: float, curved: bool, space: _Space) -> None:
    """Second derivative of the cost, with the curvature of tip(q) where ``curved``.

    d2 tip / dq_i dq_j = axis_i x J_j for i <= j where joint i turns, 0 where it slides.
    """
    J, A = space.J, space.A
    n = J.shape[1]
    for j in range(n):
        for i in range(j + 1):
            entry = J[0, i] * J[0, j] + J[1, i] * J[1, j] + J[2, i] * J[2, j]
            if curved and not chain.prismatic[i]:
                x, y, z = space.rotation[i, 0, 2], space.rotation[i, 1, 2], space.rotation[i, 2, 2]
                entry -= mu * (
                    space.dual[0] * (y * J[2, j] - z * J[1, j])
                    + space.dual[1] * (z * J[0, j] - x * J[2, j])
                    + space.dual[2] * (x * J[1, j] - y * J[0, j])
                )
            A[j, i] = entry
        A[j, j] += mu * space.weight[j]


@jit
def _hold(A: FloatArray, step: FloatArray, chain: ChainArrays, q: FloatArray, downhill: FloatArray) -> None:
    """Take joints out of the system that stand at a limit and press against it."""
    n = q.shape[0]
    for i in range(n):
        step[i] = downhill[i]
    for i in range(n):
        if (q[i] >= chain.upper[i] and downhill[i] > 0.0) or (q[i] <= chain.lower[i] and downhill[i] < 0.0):
            for k in range(i):
                A[i, k] = 0.0
            for k in range(i + 1, n):
                A[k, i] = 0.0
            A[i, i] = 1.0
            step[i] = 0.0


@jit
def _descend(
    chain: ChainArrays,
    target: FloatArray,
    rest: FloatArray,
    mu: float,
    q: FloatArray,
    space: _Space,
    downhill: FloatArray,
    most: int,
) -> float:
    """Bring q to the minimum of the cost; give the distance from tip to target that is left [m]."""
    n = q.shape[0]
    cost = _cost(chain, target, rest, mu, q, space)
    for _ in range(most):
        tip_jacobian(chain, space.rotation, space.origin, space.tip, space.J)
        ex, ey, ez = target[0] - space.tip[0], target[1] - space.tip[1], target[2] - space.tip[2]
        for i in range(n):
            downhill[i] = (
                space.J[0, i] * ex + space.J[1, i] * ey + space.J[2, i] * ez - mu * space.weight[i] * (q[i] - rest[i])
            )
        _matrix(chain, mu, True, space)
        _hold(space.A, space.step, chain, q, downhill)
        if not factor_in_place(space.A):
            _matrix(chain, mu, False, space)
            _hold(space.A, space.step, chain, q, downhill)
            factor_in_place(space.A)
        solve_in_place(space.A, space.step)
        dx, dy, dz = ex, ey, ez
        largest = 0.0
        for i in range(n):
            dx -= space.J[0, i] * space.step[i]
            dy -= space.J[1, i] * space.step[i]
            dz -= space.J[2, i] * space.step[i]
            largest = max(largest, abs(space.step[i]) * np.sqrt(space.weight[i]))
        space.dual[0], space.dual[1], space.dual[2] = dx / mu, dy / mu, dz / mu
        share = min(1.0, 1.0 / largest) if largest > 0.0 else 1.0
        lower = np.inf
        for _ in range(20):
            for i in range(n):
                space.trial[i] = min(max(q[i] + share * space.step[i], chain.lower[i]), chain.upper[i])
            lower = _cost(chain, target, rest, mu, space.trial, space)
            if lower <= cost * (1.0 + 1e-10):
                break
            share *= 0.25
        if not lower <= cost * (1.0 + 1e-10):
            _cost(chain, target, rest, mu, q, space)
            break
        for i in range(n):
            q[i] = space.trial[i]
        cost = lower
        if largest < _CONVERGED:
            break
    left: float = np.sqrt(
        (space.tip[0] - target[0]) ** 2 + (space.tip[1] - target[1]) ** 2 + (space.tip[2] - target[2]) ** 2
    )
    return left


@jit
def pose_from(chain: ChainArrays, target: FloatArray, rest: FloatArray, start: FloatArray) -> tuple[FloatArray, float]:
    """Pose for one target from a pose that may be far away, the rest angles' weight falling to its small value.

    Parameters
    ----------
    chain
        The chain, n joints.
    target
        Shape (3,) [m].
    rest, start
        Shape (n,) [rad or m]. The angles to stay near, and where to start.

    Returns
    -------
    Pose, shape (n,), and the distance from its tip to the target [m].
    """
    reach = reach_of(chain)
    space = _space(chain, reach)
    q = np.minimum(np.maximum(start, chain.lower), chain.upper)
    downhill = np.empty(q.shape[0])
    mu = reach * reach
    left = 0.0
    for _ in range(13):
        left = _descend(chain, target, rest, mu, q, space, downhill, 40)
        mu *= 0.1
        for r in range(3):
            space.dual[r] *= 10.0
    return q, left


@jit
def first_pose(chain: ChainArrays, target: FloatArray, rest: FloatArray, tolerance: float) -> FloatArray:
    """Pose for one target, starting from the rest angles; other starts are tried where those lead nowhere.

    Among 64 other starts, spread evenly over the joint ranges (a turn about the rest angle where there is none), the
    pose nearest to the rest angles is taken; where none reaches the target, the one whose tip comes nearest.
    """
    n = rest.shape[0]
    best, best_left = pose_from(chain, target, rest, rest)
    if best_left <= tolerance:
        return best
    best_far = np.inf
    start = np.empty(n)
    for k in range(64):
        for i in range(n):
            low = chain.lower[i] if np.isfinite(chain.lower[i]) else rest[i] - np.pi
            high = chain.upper[i] if np.isfinite(chain.upper[i]) else rest[i] + np.pi
            # Additive recurrence with the roots of integers: even cover in any dimension, the same every time.
            share = (0.5 + (k + 1) * np.sqrt(i + 2.0 + (i >= 2))) % 1.0
            start[i] = low + share * (high - low)
        q, left = pose_from(chain, target, rest, start)
        far = 0.0
        for i in range(n):
            far += (q[i] - rest[i]) ** 2
        reached, reached_before = left <= tolerance, best_left <= tolerance
        if (reached and (not reached_before or far < best_far)) or (not reached and left < best_left):
            best, best_left, best_far = q, left, far
    return best


@jit
def poses_along(
    chain: ChainArrays, targets: FloatArray, rest: FloatArray, start: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Poses for a row of tip targets, each started from the ones before.

    Parameters
    ----------
    chain
        The chain, n joints of any kind; n < 3 and redundant arms too.
    targets
        Shape (k, 3) [m] in the base frame, near enough to each other to be a path.
    rest
        Shape (n,) [rad or m]. A redundant arm takes the pose nearest to these.
    start
        Shape (n,) [rad or m]. Pose at, or near, the first target: see :func:`first_pose`.

    Returns
    -------
    poses
        Shape (k, n) [rad or m], within the joint ranges.
    left
        Shape (k,) [m]. Distance from the pose's tip to its target: 0 (picometres) where it is reached.
    """
    k, n = targets.shape[0], rest.shape[0]
    reach = reach_of(chain)
    mu = _SMALL * reach * reach
    space = _space(chain, reach)
    poses = np.empty((k, n))
    left = np.empty(k)
    q = np.minimum(np.maximum(start, chain.lower), chain.upper)
    downhill = np.empty(n)
    for j in range(k):
        if j >= 2:
            for i in range(n):
                ahead = 2.0 * poses[j - 1, i] - poses[j - 2, i]
                q[i] = min(max(ahead, chain.lower[i]), chain.upper[i])
        left[j] = _descend(chain, targets[j], rest, mu, q, space, downhill, 1000)
        if left[j] > _MISSED * reach and j > 0 and left[j - 1] <= _MISSED * reach:
            # Joints that meet a limit can hold the descent up; from afar it may still find a pose close by.
            again, again_left = pose_from(chain, targets[j], rest, poses[j - 1])
            if again_left < left[j] and np.abs(again - poses[j - 1]).max() < _CLOSE_BY:
                q[:] = again
                left[j] = again_left
        for i in range(n):
            poses[j, i] = q[i]
    return poses, left
