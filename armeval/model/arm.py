"""The arm: a chain, its drives and its servo."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray, frozen
from armeval.errors import InputError
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.servo import Servo


@dataclass(frozen=True, eq=False)
class Arm:
    """A serial chain of joints, what moves each of them, and the servo over all.

    Attributes
    ----------
    name
        As people call it.
    chain
        Geometry, masses and joint ranges.
    drives
        One a joint, in the chain's order.
    servo
        The position servo.
    gravity
        Shape (3,) [m/s^2] in the base frame: the acceleration of free fall.
    """

    name: str
    chain: Chain
    drives: tuple[Drive, ...]
    servo: Servo
    gravity: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "gravity", frozen(self.gravity, (3,), "gravity"))
        have = tuple(drive.joint for drive in self.drives)
        if have != self.chain.joints:
            raise InputError(
                f"the drives are {', '.join(have)}; the chain's joints are {', '.join(self.chain.joints)}",
                "give one drive a joint, in the chain's order",
            )

    @property
    def joints(self) -> tuple[str, ...]:
        """The joints' names from the base to the tip."""
        return self.chain.joints

    @property
    def rest(self) -> FloatArray:
        """Shape (n,) [rad]. Where inverse kinematics starts: the drives' rest angles, else the middle of the range."""
        lower, upper = self.chain.lower, self.chain.upper
        bounded = np.isfinite(lower) & np.isfinite(upper)
        middle = np.where(bounded, 0.5 * (np.where(bounded, lower, 0.0) + np.where(bounded, upper, 0.0)), 0.0)
        middle = np.clip(middle, lower, upper)
        given = [drive.rest_angle for drive in self.drives]
        return np.array([m if g is None else g for m, g in zip(middle, given, strict=True)])

    @property
    def resolution(self) -> FloatArray:
        """Shape (n,) [rad or m]. Joint angle of one encoder count; 0 for an ideal encoder."""
        return np.array([drive.resolution for drive in self.drives])

    @property
    def gear_ratio(self) -> FloatArray:
        """Shape (n,). Motor turns per joint turn."""
        return np.array([drive.gear_ratio for drive in self.drives])
