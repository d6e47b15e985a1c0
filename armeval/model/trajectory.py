"""The trajectory: a path with time on it, sampled at the servo's period."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray, frozen
from armeval.errors import InputError


@dataclass(frozen=True, eq=False)
class Trajectory:
    """Targets of tip and joints at every servo period, from the start of a lap to its end.

    Attributes
    ----------
    time
        Shape (k,) [s], from 0 in steps of the servo period.
    arc
        Shape (k,) [m]. Arc length s along the planned path; never falls.
    tip
        Shape (k, 3) [m]. Tip targets in the base frame.
    joint, joint_speed, joint_acceleration
        Shape (k, n) [rad], [rad/s], [rad/s^2]. Joint targets and their time derivatives.
    path
        Shape (p, 3) [m]. The planned path as a polyline.
    path_arc
        Shape (p,) [m]. Arc length at its points, from 0.
    corners
        Shape (c,) [m]. Arc lengths where one stretch ends and the next begins: 0, the stops between, the length.
    """

    time: FloatArray
    arc: FloatArray
    tip: FloatArray
    joint: FloatArray
    joint_speed: FloatArray
    joint_acceleration: FloatArray
    path: FloatArray
    path_arc: FloatArray
    corners: FloatArray

    def __post_init__(self) -> None:
        k = len(self.time)
        n = np.shape(self.joint)[-1]
        shapes: dict[str, tuple[int | None, ...]] = {
            "time": (k,),
            "arc": (k,),
            "tip": (k, 3),
            "joint": (k, n),
            "joint_speed": (k, n),
            "joint_acceleration": (k, n),
            "path": (None, 3),
            "path_arc": (len(self.path),),
            "corners": (None,),
        }
        for name, shape in shapes.items():
            object.__setattr__(self, name, frozen(getattr(self, name), shape, f"trajectory {name}"))
        if k < 2:
            raise InputError("the trajectory has fewer than two servo periods", "lengthen the path or lower the feed")

    @property
    def length(self) -> float:
        """Length of the planned path [m]."""
        return float(self.path_arc[-1])

    @property
    def duration(self) -> float:
        """Time from the first target to the last [s]."""
        return float(self.time[-1] - self.time[0])
