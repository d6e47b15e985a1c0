"""Planar arms with turning joints along z, small enough to work out by hand."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.servo import Servo

NAMES = ("shoulder", "elbow", "wrist", "finger")


def planar_chain(lengths: Sequence[float], *, limit: float = np.inf) -> Chain:
    """Links of the given lengths [m] in the x-y plane, stretched along x at zero angles, without mass."""
    n = len(lengths)
    placement = np.zeros((n, 3, 4))
    placement[:, :, :3] = np.eye(3)
    placement[1:, 0, 3] = lengths[:-1]
    return Chain(
        joints=NAMES[:n],
        prismatic=np.zeros(n, dtype=bool),
        placement=placement,
        mass=np.zeros(n),
        center=np.zeros((n, 3)),
        inertia=np.zeros((n, 3, 3)),
        tip=np.array([lengths[-1], 0.0, 0.0]),
        lower=np.full(n, -limit),
        upper=np.full(n, limit),
    )


def planar_arm(
    lengths: Sequence[float],
    rest: Sequence[float],
    *,
    limit: float = np.inf,
    servo: Servo | None = None,
    **drive: Any,
) -> Arm:
    """An arm of such links, all drives the same, without weight."""
    chain = planar_chain(lengths, limit=limit)
    settings = {"stiffness": 1.0, **drive}
    drives = tuple(Drive(joint, rest_angle=angle, **settings) for joint, angle in zip(chain.joints, rest, strict=True))
    return Arm("planar", chain, drives, servo or Servo("joint_pd", 1e-3), np.zeros(3))


def harmonic_map(order: int, amplitude: float, size: int = 4096) -> CogMap:
    """A cog map of one harmonic, ``-amplitude sin(order angle)``: a detent at angle 0."""
    return CogMap(-amplitude * np.sin(order * 2.0 * np.pi * np.arange(size) / size), bandwidth=2 * order)
