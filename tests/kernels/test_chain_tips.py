"""Tip positions of many poses agree with the frames built pose by pose."""

import numpy as np
import pytest

from armeval.kernels.chain import joint_frames, tip_position, tip_positions
from tests.slides import slides


def test_the_tip_of_three_crossed_slides_is_where_its_joints_are():
    q = np.random.default_rng(1).uniform(-1.0, 1.0, (50, 3))
    np.testing.assert_allclose(tip_positions(slides().chain.arrays, q), q, atol=1e-15)


@pytest.mark.parametrize("seed", range(5))
def test_carrying_the_tip_alone_agrees_with_building_every_frame(seed):
    from tests.random_arms import chain_of, random_urdf

    rng = np.random.default_rng(seed)
    chain = chain_of(random_urdf(rng, 1 + seed))
    n = chain.count
    q = rng.uniform(-3.0, 3.0, (20, n))
    rotation, origin, tip = np.empty((n, 3, 3)), np.empty((n, 3)), np.empty(3)
    expected = []
    for pose in q:
        joint_frames(chain.arrays, pose, rotation, origin)
        tip_position(chain.arrays, rotation, origin, tip)
        expected.append(tip.copy())
    np.testing.assert_allclose(tip_positions(chain.arrays, q), expected, atol=1e-14)
