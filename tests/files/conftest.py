from __future__ import annotations

import numpy as np
import pytest

from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.servo import Servo


@pytest.fixture(scope="session")
def gantry() -> Arm:
    """An invented arm with a turning joint, a geared and reversed one, and a sliding one."""
    placement = np.tile(np.eye(3, 4), (3, 1, 1))
    placement[1:, 0, 3] = 0.2
    chain = Chain(
        joints=("turn", "lift", "reach"),
        prismatic=np.array([False, False, True]),
        placement=placement,
        mass=np.full(3, 0.1),
        center=np.zeros((3, 3)),
        inertia=np.tile(1e-4 * np.eye(3), (3, 1, 1)),
        tip=np.array([0.1, 0.0, 0.0]),
        lower=np.array([-np.pi, -1.5, -0.1]),
        upper=np.array([np.pi, 1.5, 0.5]),
    )
    drives = (
        Drive("turn", torque_limit=0.5, torque_constant=0.03, encoder_counts=16384),
        Drive("lift", gear_ratio=-6.0, torque_limit=0.5, torque_constant=0.03, encoder_counts=4096),
        Drive("reach", gear_ratio=100.0, torque_limit=50.0, encoder_counts=20000, encoder_on="joint", slides=True),
    )
    return Arm("gantry", chain, drives, Servo("joint_pd", 1e-3), np.array([0.0, 0.0, -9.80665]))
