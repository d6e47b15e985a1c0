"""The serial chain: what geometry and mass say about an arm, without its drives."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import BoolArray, FloatArray, frozen, frozen_limits
from armeval.errors import InputError

if TYPE_CHECKING:
    from armeval.kernels.chain import ChainArrays


@dataclass(frozen=True, eq=False)
class Chain:
    """A serial chain of revolute and prismatic joints that ends in the tip.

    Every joint's frame is turned so that its z axis is the joint's axis; at zero joint angle it stands in the frame of
    the joint before it as ``placement`` says. Links that do not move against each other are lumped into one body.

    Attributes
    ----------
    joints
        The joints' names from the base to the tip, n of them.
    prismatic
        Shape (n,). Whether the joint slides (then its "angle" is a length in metres).
    placement
        Shape (n, 3, 4). Rotation and translation [m] of each joint's frame in the frame of the one before it, at zero
        angle; the first one in the base frame.
    mass
        Shape (n,) [kg]. Mass of the body that each joint moves.
    center
        Shape (n, 3) [m]. Its centre of mass in the joint's frame.
    inertia
        Shape (n, 3, 3) [kg m^2]. Its rotational inertia about the centre of mass, in the joint's frame.
    tip
        Shape (3,) [m]. The tip in the last joint's frame.
    lower, upper
        Shape (n,) [rad or m]. Joint range; infinite where there is none.
    tip_name
        Name of the URDF frame of the tip.
    """

    joints: tuple[str, ...]
    prismatic: BoolArray
    placement: FloatArray
    mass: FloatArray
    center: FloatArray
    inertia: FloatArray
    tip: FloatArray
    lower: FloatArray
    upper: FloatArray
    tip_name: str = "tip"

    def __post_init__(self) -> None:
        n = len(self.joints)
        if n == 0:
            raise InputError("the chain has no joint that moves", "give it at least one revolute or prismatic joint")
        prismatic = np.array(self.prismatic, dtype=np.bool_)
        prismatic.setflags(write=False)
        checked = {
            "prismatic": prismatic,
            "placement": frozen(self.placement, (n, 3, 4), "placement"),
            "mass": frozen(self.mass, (n,), "mass"),
            "center": frozen(self.center, (n, 3), "center of mass"),
            "inertia": frozen(self.inertia, (n, 3, 3), "inertia"),
            "tip": frozen(self.tip, (3,), "tip"),
            "lower": frozen_limits(self.lower, (n,), "lower limit"),
            "upper": frozen_limits(self.upper, (n,), "upper limit"),
        }
        for name, value in checked.items():
            object.__setattr__(self, name, value)
        for index in np.flatnonzero(self.lower >= self.upper):
            raise InputError(
                "the joint's range is empty",
                "let its lower limit be below its upper",
                place=f"joint {self.joints[index]}",
            )

    @property
    def count(self) -> int:
        """Number of joints, n."""
        return len(self.joints)

    def index(self, joint: str) -> int:
        """Place of a joint in the chain, from 0 at the base."""
        return self.joints.index(joint)

    @property
    def arrays(self) -> ChainArrays:
        """The chain as the kernels take it."""
        from armeval.kernels.chain import ChainArrays

        return ChainArrays(
            self.prismatic, self.placement, self.mass, self.center, self.inertia, self.tip, self.lower, self.upper
        )
