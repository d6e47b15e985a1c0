"""Compliance at the tip of an arm with springs in its joints, and the stiffness that a tip spring gives to the joints.

C = J K^-1 J^T (Salisbury 1980, from memory). For links of 0.2 m at 30 and 60 degrees and K = diag(20, 10) N m/rad it
is [8.5 -2.59808; -2.59808 1.5]e-3 m/N, and torques of (0.02, 0.01) N m move the tip by (-0.5, 0.173205) mm:
worked by hand.
"""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from armeval.evaluate.replaying.sticking_ratio import joint_stiffness
from armeval.kernels.chain import tip_jacobians, tip_positions
from armeval.kernels.tip_stiffness import spring_stiffness
from armeval.model.servo import Servo
from tests.planar_arms import planar_arm, planar_chain
from tests.random_arms import chain_of, random_pose, random_urdf

POSE = np.radians([[30.0, 60.0]])


def test_tip_compliance_is_salisburys():
    J = tip_jacobians(planar_chain((0.2, 0.2)).arrays, POSE)[0, :2]
    K = np.diag([20.0, 10.0])
    compliance = J @ np.linalg.solve(K, J.T)
    assert compliance == pytest.approx(1e-3 * np.array([[8.5, -2.59808], [-2.59808, 1.5]]), abs=1e-8)
    assert J @ np.linalg.solve(K, [0.02, 0.01]) == pytest.approx([-0.5e-3, 0.173205e-3], abs=1e-9)


def test_an_unloaded_tip_spring_gives_the_joints_j_k_j():
    servo = Servo("tip_impedance", 1e-3, tip_stiffness=(400.0, 300.0, 200.0))
    arm = planar_arm((0.2, 0.2), (0.5, 0.9), servo=servo)
    J = np.array([[-0.3, -0.2], [0.3 / np.sqrt(3.0), 0.0]])
    K = joint_stiffness(arm, POSE, np.zeros((1, 2)))[0]
    assert pytest.approx(J.T @ np.diag([400.0, 300.0]) @ J) == K


@given(seed=st.integers(0, 10_000), joints=st.integers(1, 6))
def test_the_stiffness_of_a_loaded_tip_spring_is_the_derivative_of_its_torque(seed, joints):
    rng = np.random.default_rng(seed)
    chain = chain_of(random_urdf(rng, joints))
    arrays, q = chain.arrays, random_pose(rng, chain)
    spring, pulled = rng.uniform(50.0, 500.0, 3), rng.normal(size=3) * 0.05
    target = tip_positions(arrays, q[None])[0] + pulled

    def torque(pose):
        J, tip = tip_jacobians(arrays, pose[None])[0], tip_positions(arrays, pose[None])[0]
        return J.T @ (spring * (target - tip))

    step = 1e-5
    change = np.column_stack(
        [(torque(q + step * e) - torque(q - step * e)) / (2.0 * step) for e in np.eye(chain.count)]
    )
    K = spring_stiffness(arrays, q[None], spring, (spring * pulled)[None])[0]
    assert pytest.approx(-change, abs=1e-6 * max(1.0, np.abs(change).max())) == K
