"""Inverse kinematics along a row of tip targets: each pose starts from the one before.

One idea serves every arm. Among all poses within the joint ranges, each target takes the one that makes

    1/2 |tip(q) - x|^2 + mu/2 sum_i w_i (q_i - rest_i)^2

smallest, with mu so small (1e-12 of the squared reach) that it moves the tip by picometres. Where the arm can reach x,
that is the pose nearest to the rest angles, so a redundant arm comes back to the pose it left when the path closes;
where it cannot, it is the pose whose tip is nearest to x. The minimum is found by Newton's method with bounds (steps
projected on the ranges, joints that press against a limit held). The curvature of tip(q) enters with the multiplier
lambda = (x - tip(q)) / mu of the constraint, carried from step to step (a primal-dual penalty method), which keeps the
convergence quadratic also in the directions that do not move the tip.

There is one compiled entry, :func:`_follow`, and one place in it that descends: every further one would be optimised
anew, for seconds. What is done once a path, or a few dozen times, is plain Python around it.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.chain import ChainArrays, joint_frames, tip_jacobian, tip_position
from armeval.kernels.cholesky import factor_in_place, solve_in_place
from armeval.kernels.compile import jit, jit_part

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
    downhill: FloatArray
    weight: FloatArray
    dual: FloatArray


def reach_of(chain: ChainArrays) -> float:
    """Length of the outstretched chain from its first joint to the tip [m], slides at zero; 1 if it has none."""
    reach = float(np.linalg.norm(chain.tip) + np.linalg.norm(chain.placement[1:, :, 3], axis=1).sum())
    return reach if reach > 0.0 else 1.0


@jit_part
def _cost(chain: ChainArrays, target: FloatArray, rest: FloatArray, mu: float, q: FloatArray, space: _Space) -> float:
    joint_frames(chain, q, space.rotation, space.origin)
    tip_position(chain, space.rotation, space.origin, space.tip)
    cost = 0.0
    for r in range(3):
        cost += (space.tip[r] - target[r]) ** 2
    for i in range(q.shape[0]):
        cost += mu * space.weight[i] * (q[i] - rest[i]) ** 2
    return 0.5 * cost


@jit_part
def _matrix(chain: ChainArrays, mu: float, curved: int, space: _Space) -> None:
    """Second derivative of the cost, with the curvature of tip(q) where ``curved`` is 1.

    d2 tip / dq_i dq_j = axis_i x J_j for i <= j where joint i turns, 0 where it slides.
    """
    J, A = space.J, space.A
    n = J.shape[1]
    for j in range(n):
        for i in range(j + 1):
            entry = J[0, i] * J[0, j] + J[1, i] * J[1, j] + J[2, i] * J[2, j]
            if curved == 1 and not chain.prismatic[i]:
                x, y, z = space.rotation[i, 0, 2], space.rotation[i, 1, 2], space.rotation[i, 2, 2]
                entry -= mu * (
                    space.dual[0] * (y * J[2, j] - z * J[1, j])
                    + space.dual[1] * (z * J[0, j] - x * J[2, j])
                    + space.dual[2] * (x * J[1, j] - y * J[0, j])
                )
            A[j, i] = entry
        A[j, j] += mu * space.weight[j]


@jit_part
def _hold(chain: ChainArrays, q: FloatArray, space: _Space) -> None:
    """Take joints out of the system that stand at a limit and press against it."""
    A, step, downhill = space.A, space.step, space.downhill
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


@jit_part
def _descend(
    chain: ChainArrays, target: FloatArray, rest: FloatArray, mu: float, q: FloatArray, space: _Space, most: int
) -> float:
    """Bring q to the minimum of the cost; give the distance from tip to target that is left [m]."""
    n = q.shape[0]
    cost = _cost(chain, target, rest, mu, q, space)
    for _ in range(most):
        tip_jacobian(chain, space.rotation, space.origin, space.tip, space.J)
        ex, ey, ez = target[0] - space.tip[0], target[1] - space.tip[1], target[2] - space.tip[2]
        for i in range(n):
            space.downhill[i] = (
                space.J[0, i] * ex + space.J[1, i] * ey + space.J[2, i] * ez - mu * space.weight[i] * (q[i] - rest[i])
            )
        for curved in range(1, -1, -1):
            _matrix(chain, mu, curved, space)
            _hold(chain, q, space)
            if factor_in_place(space.A):
                break
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
def _follow(
    chain: ChainArrays,
    targets: FloatArray,
    rest: FloatArray,
    weight: FloatArray,
    reach: float,
    poses: FloatArray,
    left: FloatArray,
    afar: bool,
) -> None:
    """Fill in poses (k, n) for targets (k, 3), and the distances left (k,); the first row of ``poses`` is the start.

    ``afar``: every pose starts with the rest angles' full weight, which falls to its small value. Else only those do
    that lie nearby, which joints that meet a limit have kept from being reached.
    """
    k, n = poses.shape
    space = _Space(
        np.empty((n, 3, 3)),
        np.empty((n, 3)),
        np.empty(3),
        np.empty((3, n)),
        np.empty((n, n)),
        np.empty(n),
        np.empty(n),
        np.empty(n),
        weight,
        np.zeros(3),
    )
    small, missed = _SMALL * reach * reach, _MISSED * reach
    q, dual = np.empty(n), np.empty(3)
    for j in range(k):
        for i in range(n):
            ahead = 2.0 * poses[j - 1, i] - poses[j - 2, i] if j >= 2 else poses[max(j - 1, 0), i]
            q[i] = min(max(ahead, chain.lower[i]), chain.upper[i])
        for again in range(2):
            falls, most, mu = (13, 40, reach * reach) if afar or again == 1 else (1, 1000, small)
            for r in range(3):
                dual[r] = space.dual[r]
                if falls > 1:
                    space.dual[r] = 0.0
            distance = 0.0
            for fall in range(falls):
                if fall > 0:
                    mu *= 0.1
                    for r in range(3):
                        space.dual[r] *= 10.0
                distance = _descend(chain, targets[j], rest, mu, q, space, most)
            close = True
            if again == 1:
                for r in range(3):
                    space.dual[r] = dual[r]
                for i in range(n):
                    close = close and abs(q[i] - poses[j - 1, i]) < _CLOSE_BY
            if again == 0 or (distance < left[j] and close):
                left[j] = distance
                for i in range(n):
                    poses[j, i] = q[i]
            if afar or again == 1 or j == 0 or left[j] <= missed or left[j - 1] > missed:
                break
            for i in range(n):
                q[i] = poses[j - 1, i]


def _solve(
    chain: ChainArrays, targets: FloatArray, rest: FloatArray, start: FloatArray, *, afar: bool
) -> tuple[FloatArray, FloatArray]:
    reach = reach_of(chain)
    weight = np.where(chain.prismatic, 1.0 / (reach * reach), 1.0)
    poses, left = np.empty((len(targets), len(rest))), np.empty(len(targets))
    poses[0] = start
    # Copies: read-only arrays or strided ones would be compiled for anew.
    _follow(chain, np.array(targets, order="C"), np.array(rest), weight, reach, poses, left, afar)
    return poses, left


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
    poses, left = _solve(chain, target[None], rest, start, afar=True)
    return poses[0], float(left[0])


def first_pose(chain: ChainArrays, target: FloatArray, rest: FloatArray, tolerance: float) -> FloatArray:
    """Pose for one target, starting from the rest angles; other starts are tried where those lead nowhere.

    Among 64 other starts, spread evenly over the joint ranges (a turn about the rest angle where there is none), the
    pose nearest to the rest angles is taken; where none reaches the target, the one whose tip comes nearest.
    """
    best, best_left = pose_from(chain, target, rest, rest)
    if best_left <= tolerance:
        return best
    low = np.where(np.isfinite(chain.lower), chain.lower, rest - np.pi)
    high = np.where(np.isfinite(chain.upper), chain.upper, rest + np.pi)
    joint = np.arange(len(rest))
    # Additive recurrence with the roots of integers: even cover in any dimension, the same every time.
    root = np.sqrt(joint + 2.0 + (joint >= 2))
    best_far = np.inf
    for k in range(1, 65):
        q, left = pose_from(chain, target, rest, low + (0.5 + k * root) % 1.0 * (high - low))
        far = float(np.sum((q - rest) ** 2))
        reached, reached_before = left <= tolerance, best_left <= tolerance
        if (reached and (not reached_before or far < best_far)) or (not reached and left < best_left):
            best, best_left, best_far = q, left, far
    return best


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
    return _solve(chain, targets, rest, start, afar=False)
