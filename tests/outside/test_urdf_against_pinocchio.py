"""Random arms: what armeval makes of a URDF against what pinocchio itself says about the same text.

Source of the truth: pinocchio (Carpentier et al. 2019, "The Pinocchio C++ library"), its `framesForwardKinematics`,
`crba` and `computeGeneralizedGravity`, all run on the text as it stands.
"""

from __future__ import annotations

import numpy as np
import pytest

from tests.outside.plain_chain import agree
from tests.random_arms import TIP, chain_of, pinocchio_model, random_urdf


@pytest.mark.parametrize("seed", range(25))
def test_random_arms_move_and_weigh_as_pinocchio_says(seed):
    rng = np.random.default_rng(seed)
    urdf = random_urdf(rng, int(rng.integers(1, 8)))
    agree(chain_of(urdf), pinocchio_model(urdf), TIP, rng, poses=4)
