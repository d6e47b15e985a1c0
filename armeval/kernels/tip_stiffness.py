"""Stiffness that a spring between the tip and its target gives to the joints."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.chain import ChainArrays, joint_frames, tip_jacobian, tip_position
from armeval.kernels.compile import jit


@jit
def add_spring_stiffness(
    chain: ChainArrays, rotation: FloatArray, J: FloatArray, spring: FloatArray, force: FloatArray, K: FloatArray
) -> None:
    """Add the joint stiffness of a tip spring in one pose to K, shape (n, n).

    The spring pulls with f = K_x (x_t - x(q)); the joints feel u = J^T f. How that falls as the joints move is

        -du/dq = J^T K_x J - sum_r f_r d2 x_r / dq dq,    d2 x / dq_i dq_j = axis_i x J_j   (i <= j, joint i turns)

    The second term is geometric: the stretched spring itself turns with the arm (Salisbury 1980 gives the first term).
    """
    n = J.shape[1]
    for j in range(n):
        for i in range(j + 1):
            entry = 0.0
            for r in range(3):
                entry += J[r, i] * spring[r] * J[r, j]
            if not chain.prismatic[i]:
                x, y, z = rotation[i, 0, 2], rotation[i, 1, 2], rotation[i, 2, 2]
                entry -= (
                    force[0] * (y * J[2, j] - z * J[1, j])
                    + force[1] * (z * J[0, j] - x * J[2, j])
                    + force[2] * (x * J[1, j] - y * J[0, j])
                )
            K[i, j] += entry
            if i != j:
                K[j, i] += entry


@jit
def spring_stiffness(chain: ChainArrays, q: FloatArray, spring: FloatArray, force: FloatArray) -> FloatArray:
    """Joint stiffness of a tip spring in many poses.

    Parameters
    ----------
    chain
        The chain, n joints.
    q
        Shape (k, n) [rad or m].
    spring
        Shape (3,) [N/m] along x, y, z of the base.
    force
        Shape (k, 3) [N]. What the spring pulls the tip with.

    Returns
    -------
    Shape (k, n, n) [N m/rad].
    """
    k, n = q.shape
    K = np.zeros((k, n, n))
    rotation = np.empty((n, 3, 3))
    origin = np.empty((n, 3))
    tip = np.empty(3)
    J = np.empty((3, n))
    for s in range(k):
        joint_frames(chain, q[s], rotation, origin)
        tip_position(chain, rotation, origin, tip)
        tip_jacobian(chain, rotation, origin, tip, J)
        add_spring_stiffness(chain, rotation, J, spring, force[s], K[s])
    return K
