"""A chain by its definition, in plain numpy, and its agreement with pinocchio: frames, inertia and weight.

Nothing of armeval's own kernels is used here.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pinocchio

from armeval.model.chain import Chain
from tests.random_arms import pinocchio_pose, random_pose


def frames(chain: Chain, q: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Rotations (n, 3, 3) and origins (n, 3) of the joints' frames, straight from the definition of a chain."""
    rotation, origin = np.eye(3), np.zeros(3)
    rotations, origins = [], []
    for i, angle in enumerate(q):
        origin = origin + rotation @ chain.placement[i, :, 3]
        rotation = rotation @ chain.placement[i, :, :3]
        if chain.prismatic[i]:
            origin = origin + rotation[:, 2] * angle
        else:
            c, s = np.cos(angle), np.sin(angle)
            rotation = rotation @ np.array([[c, -s, 0], [s, c, 0], [0, 0, 1]])
        rotations.append(rotation)
        origins.append(origin)
    return np.array(rotations), np.array(origins)


def mass_matrix_and_gravity(chain: Chain, q: np.ndarray, free_fall: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """M = sum of m J_v^T J_v + J_w^T I J_w over the bodies, and the torque that holds the arm against its weight."""
    rotations, origins = frames(chain, q)
    n = len(q)
    M, held = np.zeros((n, n)), np.zeros(n)
    for body in range(n):
        center = origins[body] + rotations[body] @ chain.center[body]
        inertia = rotations[body] @ chain.inertia[body] @ rotations[body].T
        J_v, J_w = np.zeros((3, n)), np.zeros((3, n))
        for i in range(body + 1):
            axis = rotations[i, :, 2]
            J_v[:, i] = axis if chain.prismatic[i] else np.cross(axis, center - origins[i])
            J_w[:, i] = 0.0 if chain.prismatic[i] else axis
        M += chain.mass[body] * J_v.T @ J_v + J_w.T @ inertia @ J_w
        held -= chain.mass[body] * J_v.T @ free_fall
    return M, held


def agree(chain: Chain, model: Any, tip: str, rng: np.random.Generator, poses: int) -> None:
    """Compare tip, mass matrix and holding torque in random poses."""
    data = model.createData()
    frame = model.getFrameId(tip, pinocchio.FrameType.BODY)
    for _ in range(poses):
        q = random_pose(rng, chain)
        configuration = pinocchio_pose(model, q)
        pinocchio.framesForwardKinematics(model, data, configuration)
        rotations, origins = frames(chain, q)
        tip_point = origins[-1] + rotations[-1] @ chain.tip
        np.testing.assert_allclose(tip_point, data.oMf[frame].translation, rtol=0, atol=1e-12)
        M, held = mass_matrix_and_gravity(chain, q, np.asarray(model.gravity.linear))
        upper = np.triu(pinocchio.crba(model, data, configuration))
        np.testing.assert_allclose(M, upper + np.triu(upper, 1).T, rtol=0, atol=1e-10)
        expected = pinocchio.computeGeneralizedGravity(model, data, configuration)
        np.testing.assert_allclose(held, expected, rtol=0, atol=1e-10)
