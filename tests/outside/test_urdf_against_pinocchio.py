"""Random arms: what armeval makes of a URDF against what pinocchio itself says about the same text.

Source of the truth: pinocchio (Carpentier et al. 2019, "The Pinocchio C++ library"), its `framesForwardKinematics`,
`crba` and `computeGeneralizedGravity`, all run on the text as it stands.
"""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pinocchio
import pytest

from armeval.model.chain import Chain
from tests.random_arms import TIP, chain_of, pinocchio_model, pinocchio_pose, random_pose, random_urdf


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


def agree(chain: Chain, model, tip: str, rng: np.random.Generator, poses: int) -> None:
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


@pytest.mark.parametrize("seed", range(25))
def test_random_arms_move_and_weigh_as_pinocchio_says(seed):
    rng = np.random.default_rng(seed)
    urdf = random_urdf(rng, int(rng.integers(1, 8)))
    agree(chain_of(urdf), pinocchio_model(urdf), TIP, rng, poses=4)


@pytest.mark.skipif("ARMEVAL_OPEN_DATA" not in os.environ, reason="ARMEVAL_OPEN_DATA is not set")
@pytest.mark.filterwarnings("ignore::armeval.errors.InputWarning")
@pytest.mark.parametrize(("name", "tip"), [("finger_edu", "finger_tip_link"), ("double_pendulum", "link2")])
def test_arms_that_others_drew_move_and_weigh_as_pinocchio_says(name, tip):
    text = (Path(os.environ["ARMEVAL_OPEN_DATA"]) / "urdf" / f"{name}.urdf").read_text(encoding="utf-8")
    agree(chain_of(text, tip), pinocchio_model(text), tip, np.random.default_rng(1), poses=20)
