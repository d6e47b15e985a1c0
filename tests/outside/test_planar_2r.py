"""A planar arm of two links: position, Jacobian and inverse by the formulas of any robotics textbook.

Closed forms: Lynch & Park, Modern Robotics (2017), examples 4.1 and 5.1 and section 6.1.1 (from memory). The numbers
for links of 0.2 m at 30 and 60 degrees were worked out from them by hand: tip (0.173205, 0.3) m, Jacobian
[-0.3 -0.2; 0.173205 0] m, determinant 0.034641 m^2, singular values 0.390014 and 0.0888199 m.
"""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from armeval.evaluate.plan import plan
from armeval.kernels.chain import tip_jacobians, tip_positions
from armeval.kernels.inverse import first_pose, poses_along
from armeval.model.planned_path import PlannedPath
from tests.planar_arms import planar_arm, planar_chain

POSE = np.radians([[30.0, 60.0]])


def test_the_tip_stands_where_the_textbook_says():
    tip = tip_positions(planar_chain((0.2, 0.2)).arrays, POSE)[0]
    assert tip == pytest.approx([0.173205, 0.3, 0.0], abs=5e-7)


def test_the_jacobian_is_the_textbooks():
    J = tip_jacobians(planar_chain((0.2, 0.2)).arrays, POSE)[0]
    assert pytest.approx(np.array([[-0.3, -0.2], [0.173205, 0.0], [0.0, 0.0]]), abs=5e-7) == J
    assert np.linalg.det(J[:2]) == pytest.approx(0.0346410, abs=5e-8)
    assert np.linalg.svd(J, compute_uv=False) == pytest.approx([0.390014, 0.0888199], abs=5e-7)
    assert np.linalg.cond(J[:2]) == pytest.approx(4.391067, abs=5e-6)


@pytest.mark.parametrize(("torque", "force"), [((0.02, 0.0), (0.0, 0.115470)), ((0.0, 0.02), (-0.1, -0.173205))])
def test_a_joint_torque_pushes_the_tip_with_the_textbooks_force(torque, force):
    J = tip_jacobians(planar_chain((0.2, 0.2)).arrays, POSE)[0, :2]
    assert np.linalg.solve(J.T, torque) == pytest.approx(force, abs=5e-7)


def test_the_best_conditioned_pose_of_a_root_two_arm_is_isotropic():
    # Salisbury & Craig 1982 (from memory): l1 = sqrt(2) l2, second joint at 135 degrees.
    J = tip_jacobians(planar_chain((0.2 * np.sqrt(2.0), 0.2)).arrays, np.radians([[17.0, 135.0]]))[0]
    assert np.linalg.svd(J, compute_uv=False) == pytest.approx([0.2, 0.2])


def law_of_cosines(x, y, first, second, elbow):
    cosine = (x * x + y * y - first**2 - second**2) / (2.0 * first * second)
    bend = elbow * np.arccos(cosine)
    return np.array([np.arctan2(y, x) - np.arctan2(second * np.sin(bend), first + second * np.cos(bend)), bend])


@given(
    first=st.floats(0.1, 0.3),
    second=st.floats(0.1, 0.3),
    share=st.floats(0.05, 0.95),
    bearing=st.floats(-2.5, 2.5),
    elbow=st.sampled_from([-1.0, 1.0]),
)
def test_the_inverse_is_the_law_of_cosines(first, second, share, bearing, elbow):
    distance = abs(first - second) + share * (first + second - abs(first - second))
    x, y = distance * np.cos(bearing), distance * np.sin(bearing)
    truth = law_of_cosines(x, y, first, second, elbow)
    rest = truth + 0.1
    chain, target = planar_chain((first, second)).arrays, np.array([[x, y, 0.0]])
    q, left = poses_along(chain, target, rest, first_pose(chain, target[0], rest, 1e-6))
    assert left[0] < 1e-9
    assert q[0] == pytest.approx(truth, abs=1e-6)


def test_joint_targets_along_a_straight_line_are_the_law_of_cosines():
    arm = planar_arm((0.2, 0.15), (0.3, 0.9))
    trajectory = plan(arm, PlannedPath(np.array([[0.2, 0.1, 0.0], [0.25, -0.05, 0.0]])), feed=0.06, acceleration=1.0)
    truth = np.array([law_of_cosines(x, y, 0.2, 0.15, 1.0) for x, y, _ in trajectory.tip])
    assert trajectory.joint == pytest.approx(truth, abs=1e-9)
    middle = slice(200, -200)
    J = tip_jacobians(arm.chain.arrays, np.ascontiguousarray(trajectory.joint))[middle, :2]
    tip_speed = np.einsum("kri,ki->kr", J, trajectory.joint_speed[middle])
    assert np.linalg.norm(tip_speed, axis=1) == pytest.approx(0.06, rel=1e-6)
