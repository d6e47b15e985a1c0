"""One body on one slide, and its replay: the one-joint cases of the textbooks."""

from __future__ import annotations

from typing import Any

import numpy as np

from armeval.evaluate.replaying.replay import Replay, replay
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.servo import Servo
from armeval.model.trajectory import Trajectory


def slide(mass: float, *, period: float, load: float = 0.0, limit: float = np.inf, **drive: Any) -> Arm:
    """A body of that mass [kg] on a slide along z, on which a constant force ``load`` [N] acts along z."""
    settings = {"stiffness": 0.0, **drive}
    chain = Chain(
        joints=("slide",),
        prismatic=np.ones(1, bool),
        placement=np.eye(3, 4)[None],
        mass=np.array([mass]),
        center=np.zeros((1, 3)),
        inertia=np.zeros((1, 3, 3)),
        tip=np.zeros(3),
        lower=np.array([-limit]),
        upper=np.array([limit]),
    )
    servo = Servo("joint_pd", period, gravity_feedforward=False)
    return Arm("slide", chain, (Drive("slide", **settings),), servo, np.array([0.0, 0.0, load / mass]))


def targets(position: np.ndarray, period: float, speed: np.ndarray | None = None) -> Trajectory:
    """A trajectory through those joint targets (k,), one a period."""
    k = len(position)
    joint = np.asarray(position, dtype=float)[:, None]
    tip = np.hstack([np.zeros((k, 2)), joint])
    arc = np.linspace(0.0, 1.0, k)
    joint_speed = np.zeros((k, 1)) if speed is None else np.asarray(speed, dtype=float)[:, None]
    path = np.array([[0.0, 0.0, 0.0], [0.0, 0.0, 1.0]])
    ends = np.array([0.0, 1.0])
    return Trajectory(period * np.arange(k), arc, tip, joint, joint_speed, np.zeros((k, 1)), path, ends, ends)


def run(arm: Arm, trajectory: Trajectory, *, start: float = 0.0, **options: Any) -> Replay:
    """Replay from rest at ``start`` without settling."""
    return replay(arm, trajectory, compensated=False, settle=0.0, start=np.array([start]), **options)
