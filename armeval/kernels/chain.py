"""Geometry of a serial chain, sample by sample: where its joints and its tip stand.

All quantities are in base coordinates. Every joint's frame has its axis along z (:class:`armeval.model.chain.Chain`),
so turning by q mixes the first two columns of the rotation and sliding by q moves along the third.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from armeval.arrays import BoolArray, FloatArray, read_only
from armeval.kernels.compile import jit, jit_part


class ChainArrays(NamedTuple):
    """What the kernels know of a chain; n joints, arrays as in :class:`armeval.model.chain.Chain`."""

    prismatic: BoolArray
    placement: FloatArray
    mass: FloatArray
    center: FloatArray
    inertia: FloatArray
    tip: FloatArray
    lower: FloatArray
    upper: FloatArray


@jit
def joint_frames(chain: ChainArrays, q: FloatArray, rotation: FloatArray, origin: FloatArray) -> None:
    """Fill in where the joints' frames stand.

    Parameters
    ----------
    chain
        The chain, n joints.
    q
        Shape (n,) [rad or m]. Joint angles.
    rotation, origin
        Shape (n, 3, 3) and (n, 3) [m], overwritten: rotation and origin of each joint's frame in the base frame.
    """
    n = q.shape[0]
    for i in range(n):
        P = chain.placement[i]
        if i == 0:
            for r in range(3):
                for c in range(3):
                    rotation[0, r, c] = P[r, c]
                origin[0, r] = P[r, 3]
        else:
            for r in range(3):
                a, b, d = rotation[i - 1, r, 0], rotation[i - 1, r, 1], rotation[i - 1, r, 2]
                for c in range(3):
                    rotation[i, r, c] = a * P[0, c] + b * P[1, c] + d * P[2, c]
                origin[i, r] = origin[i - 1, r] + a * P[0, 3] + b * P[1, 3] + d * P[2, 3]
        if chain.prismatic[i]:
            for r in range(3):
                origin[i, r] += rotation[i, r, 2] * q[i]
        else:
            cosine, sine = np.cos(q[i]), np.sin(q[i])
            for r in range(3):
                x, y = rotation[i, r, 0], rotation[i, r, 1]
                rotation[i, r, 0] = cosine * x + sine * y
                rotation[i, r, 1] = cosine * y - sine * x


@jit
def tip_position(chain: ChainArrays, rotation: FloatArray, origin: FloatArray, tip: FloatArray) -> None:
    """Fill in the tip, shape (3,) [m], from the frames that :func:`joint_frames` gave."""
    last = origin.shape[0] - 1
    for r in range(3):
        tip[r] = (
            origin[last, r]
            + rotation[last, r, 0] * chain.tip[0]
            + rotation[last, r, 1] * chain.tip[1]
            + rotation[last, r, 2] * chain.tip[2]
        )


@jit_part
def tip_jacobian(chain: ChainArrays, rotation: FloatArray, origin: FloatArray, tip: FloatArray, J: FloatArray) -> None:
    """Fill in the Jacobian of the tip's position, shape (3, n) [m/rad, or 1 where the joint slides].

    Column i is ``axis_i x (tip - origin_i)`` for a joint that turns and ``axis_i`` for one that slides
    (any robotics textbook, for instance Lynch & Park 2017, section 5.1).
    """
    n = origin.shape[0]
    for i in range(n):
        ax, ay, az = rotation[i, 0, 2], rotation[i, 1, 2], rotation[i, 2, 2]
        if chain.prismatic[i]:
            J[0, i], J[1, i], J[2, i] = ax, ay, az
        else:
            dx, dy, dz = tip[0] - origin[i, 0], tip[1] - origin[i, 1], tip[2] - origin[i, 2]
            J[0, i] = ay * dz - az * dy
            J[1, i] = az * dx - ax * dz
            J[2, i] = ax * dy - ay * dx


def tip_positions(chain: ChainArrays, q: FloatArray) -> FloatArray:
    """Tip positions of many poses.

    Parameters
    ----------
    chain
        The chain, n joints.
    q
        Shape (k, n) [rad or m].

    Returns
    -------
    Shape (k, 3) [m] in the base frame.
    """
    tips = np.empty((len(q), 3))
    _place_tips(chain, read_only(q), tips)
    return tips


@jit
def _place_tips(chain: ChainArrays, q: FloatArray, tips: FloatArray) -> None:
    """Fill in the tips.

    The tip alone is carried from frame to frame, from the last joint to the base: no joint frame is built, so that
    millions of logged poses cost a few dozen nanoseconds each.
    """
    k, n = q.shape
    P = chain.placement
    for j in range(k):
        x, y, z = chain.tip[0], chain.tip[1], chain.tip[2]
        for i in range(n - 1, -1, -1):
            if chain.prismatic[i]:
                z += q[j, i]
            else:
                cosine, sine = np.cos(q[j, i]), np.sin(q[j, i])
                x, y = cosine * x - sine * y, sine * x + cosine * y
            x, y, z = (
                P[i, 0, 0] * x + P[i, 0, 1] * y + P[i, 0, 2] * z + P[i, 0, 3],
                P[i, 1, 0] * x + P[i, 1, 1] * y + P[i, 1, 2] * z + P[i, 1, 3],
                P[i, 2, 0] * x + P[i, 2, 1] * y + P[i, 2, 2] * z + P[i, 2, 3],
            )
        tips[j, 0], tips[j, 1], tips[j, 2] = x, y, z


def tip_jacobians(chain: ChainArrays, q: FloatArray) -> FloatArray:
    """Jacobians of the tip's position in many poses: q of shape (k, n) gives (k, 3, n); see :func:`tip_jacobian`."""
    tips = tip_positions(chain, q)
    jacobians = np.empty((len(q), 3, q.shape[1]))
    for i in range(q.shape[1]):
        origin = _points_on(chain, i, (0.0, 0.0, 0.0), q)
        axis = _points_on(chain, i, (0.0, 0.0, 1.0), q) - origin
        jacobians[:, :, i] = axis if chain.prismatic[i] else np.cross(axis, tips - origin)
    return jacobians


def skeletons(chain: ChainArrays, q: FloatArray) -> FloatArray:
    """Points to draw the arm through: base, joint origins, tip; q of shape (k, n) gives (k, n + 2, 3) [m]."""
    k, n = q.shape
    points = np.zeros((k, n + 2, 3))
    for i in range(n):
        points[:, i + 1] = _points_on(chain, i, (0.0, 0.0, 0.0), q)
    points[:, n + 1] = tip_positions(chain, q)
    return points


def _points_on(chain: ChainArrays, i: int, place: tuple[float, float, float], q: FloatArray) -> FloatArray:
    """Where a place in joint i's frame stands, shape (k, 3) [m]: the tip of the chain that ends there."""
    upto = ChainArrays._make(values[: i + 1] for values in chain)
    return tip_positions(upto._replace(tip=read_only(np.array(place))), q[:, : i + 1])
