import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from armeval.evaluate.measuring.rigid import rigid_offset


@pytest.mark.parametrize("seed", range(5))
def test_a_turn_and_a_shift_are_found_again(seed):
    rng = np.random.default_rng(seed)
    target = 0.1 * rng.standard_normal((200, 3))
    turn, shift = Rotation.from_rotvec(2.0 * rng.standard_normal(3)), rng.uniform(-0.1, 0.1, 3)
    rotation, translation = rigid_offset(turn.inv().apply(target - shift), target)
    assert (rotation * turn.inv()).magnitude() == pytest.approx(0.0, abs=1e-7)
    np.testing.assert_allclose(translation, shift, atol=1e-9)


def test_a_planar_path_is_turned_and_never_mirrored():
    rng = np.random.default_rng(0)
    target = np.column_stack([0.1 * rng.standard_normal((50, 2)), np.zeros(50)])
    mirrored = target * [-1.0, 1.0, 1.0] * 0.999
    rotation, _ = rigid_offset(mirrored, target)
    assert np.linalg.det(rotation.as_matrix()) == pytest.approx(1.0)


def test_no_other_turn_leaves_less():
    rng = np.random.default_rng(1)
    tip = 0.1 * rng.standard_normal((100, 3))
    target = tip + 0.01 * rng.standard_normal((100, 3))
    rotation, translation = rigid_offset(tip, target)
    left = np.sum((rotation.apply(tip) + translation - target) ** 2)
    for seed in range(20):
        nudge = np.random.default_rng(seed).standard_normal(6) * 1e-3
        other = Rotation.from_rotvec(nudge[:3]) * rotation
        assert np.sum((other.apply(tip) + translation + nudge[3:] - target) ** 2) > left


def test_a_straight_path_is_met_without_a_complaint():
    target = np.outer(np.linspace(0.0, 0.2, 50), [1.0, 0.0, 0.0])
    beside = target + np.array([0.0, 1e-3, 0.0])
    rotation, translation = rigid_offset(beside, target)
    np.testing.assert_allclose(rotation.apply(beside) + translation, target, atol=1e-9)
