"""Inverse kinematics against what defines it: the tip is there, and nothing nearer to the rest angles puts it there."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import minimize

from armeval.kernels.chain import tip_jacobians, tip_positions
from armeval.kernels.inverse import first_pose, pose_from, poses_along, reach_of
from tests.planar_arms import planar_chain
from tests.random_arms import chain_of, random_pose, random_urdf


def circle(center, radius, k=400):
    turn = np.linspace(0.0, 2.0 * np.pi, k)
    return center + radius * np.column_stack([np.cos(turn) - 1.0, np.sin(turn), np.zeros(k)])


def follow(arrays, targets, rest):
    return poses_along(arrays, targets, rest, first_pose(arrays, targets[0], rest, 1e-6))


@settings(max_examples=20)
@given(seed=st.integers(0, 10_000), joints=st.integers(3, 7))
def test_every_target_within_reach_is_met(seed, joints):
    rng = np.random.default_rng(seed)
    chain = chain_of(random_urdf(rng, joints))
    way = random_pose(rng, chain) * 0.5
    poses = way + 0.05 * np.sin(np.linspace(0.0, 3.0, 200))[:, None] * rng.normal(size=joints)
    poses = np.clip(poses, chain.lower, chain.upper)
    targets = tip_positions(chain.arrays, poses)
    singular = np.linalg.svd(tip_jacobians(chain.arrays, poses), compute_uv=False)[:, -1].min()
    if singular < 0.02:
        return
    q, left = follow(chain.arrays, targets, poses[0])
    assert left.max() < 1e-8
    assert tip_positions(chain.arrays, q) == pytest.approx(targets, abs=1e-8)
    assert np.all(q >= chain.lower)
    assert np.all(q <= chain.upper)
    if joints == 3:
        assert q == pytest.approx(poses, abs=1e-5)


@pytest.mark.parametrize("lengths", [(0.2, 0.15, 0.1), (0.2, 0.15, 0.1, 0.05)])
def test_a_redundant_arm_takes_the_pose_nearest_to_its_rest_angles(lengths):
    arrays, rest = planar_chain(lengths).arrays, np.array([0.3, 0.9, 0.4, 0.2])[: len(lengths)]
    targets = circle(tip_positions(arrays, rest[None])[0], 0.05)
    q, left = follow(arrays, targets, rest)
    assert left.max() < 1e-9
    for k in (50, 130, 270):
        J = tip_jacobians(arrays, q[k : k + 1])[0, :2]
        still = np.linalg.svd(J)[2][2:]  # motions that leave the tip where it is
        assert still @ (q[k] - rest) == pytest.approx(0.0, abs=1e-7)
        best = minimize(
            lambda pose: np.sum((pose - rest) ** 2),
            q[k] + 0.02,
            constraints={
                "type": "eq",
                "fun": lambda pose, k=k: (tip_positions(arrays, pose[None])[0] - targets[k])[:2],
            },
            method="SLSQP",
            options={"ftol": 1e-14},
        )
        assert q[k] == pytest.approx(best.x, abs=1e-5)


@settings(max_examples=12)
@given(seed=st.integers(0, 10_000), joints=st.integers(4, 7))
def test_a_closed_path_brings_a_redundant_arm_back_to_its_first_pose(seed, joints):
    rng = np.random.default_rng(seed)
    chain = chain_of(random_urdf(rng, joints, prismatic=0.2))
    rest = random_pose(rng, chain) * 0.3
    if np.linalg.svd(tip_jacobians(chain.arrays, rest[None])[0], compute_uv=False)[-1] < 0.05:
        return
    targets = circle(tip_positions(chain.arrays, rest[None])[0], 0.01)
    q, left = follow(chain.arrays, targets, rest)
    assert left.max() < 1e-8
    assert q[-1] == pytest.approx(q[0], abs=1e-7)


def test_joint_ranges_are_kept_and_the_other_joints_make_up_for_it():
    lengths, rest = (0.2, 0.15, 0.1), np.array([0.3, 0.9, 0.4])
    free, limited = planar_chain(lengths).arrays, planar_chain(lengths, limit=1.05).arrays
    targets = circle(tip_positions(free, rest[None])[0], 0.04)
    assert np.abs(follow(free, targets, rest)[0]).max() > 1.1
    q, left = follow(limited, targets, rest)
    assert np.abs(q).max() <= 1.05
    assert left.max() < 1e-9


def test_a_target_out_of_reach_is_approached_as_far_as_the_arm_is_long():
    arrays, rest = planar_chain((0.2, 0.15)).arrays, np.array([0.3, 0.5])
    targets = np.array([[0.3, 0.1, 0.0], [0.4, 0.1, 0.0], [0.5, 0.0, 0.02], [0.02, 0.01, 0.0]])
    left = follow(arrays, targets, rest)[1]
    assert left[0] == pytest.approx(0.0, abs=1e-9)
    assert left[1] == pytest.approx(np.hypot(0.4, 0.1) - 0.35, abs=1e-9)
    assert left[2] == pytest.approx(np.hypot(0.15, 0.02), abs=1e-9)
    assert left[3] == pytest.approx(0.05 - np.hypot(0.02, 0.01), abs=1e-9)


def test_one_joint_follows_its_circle():
    arrays = planar_chain((0.2,)).arrays
    angle = np.linspace(0.0, 5.0, 300)
    targets = 0.2 * np.column_stack([np.cos(angle), np.sin(angle), 0.0 * angle])
    q, left = follow(arrays, targets, np.zeros(1))
    assert q[:, 0] == pytest.approx(angle, abs=1e-8)
    assert left.max() < 1e-9


def test_a_stretched_rest_pose_does_not_hold_the_arm_fast():
    # From straight along x, a target on x pulls along the arm: no joint feels it, and another start has to be tried.
    arrays, rest = planar_chain((0.2, 0.2)).arrays, np.zeros(2)
    target = np.array([0.25, 0.0, 0.0])
    assert pose_from(arrays, target, rest, rest)[1] == pytest.approx(0.15)
    q = first_pose(arrays, target, rest, 1e-6)
    assert tip_positions(arrays, q[None])[0] == pytest.approx(target, abs=1e-6)


def test_reach_is_the_length_of_the_stretched_chain():
    assert reach_of(planar_chain((0.2, 0.15, 0.1)).arrays) == pytest.approx(0.45)
