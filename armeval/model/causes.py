"""What makes the tip stray, and which of it acts in a replay."""

from __future__ import annotations

from dataclasses import dataclass

from armeval.errors import InputError


@dataclass(frozen=True)
class Causes:
    """Causes of tip error that act; all of them unless taken out.

    Attributes
    ----------
    cogging, friction
        How much of the cogging torque, and of dry friction, acts: 1 all, 0 none; one number for all joints or one a
        joint. Viscous friction is a load that the servo lags under, not dry friction.
    servo_lag
        Whether the servo lags: delay, speed filter, and loads of the motion itself (inertia, viscous friction, and
        weight where gravity is not fed forward) that its stiffness must carry. Without it there is neither delay nor
        filter, and the torque that the planned motion takes is fed forward.
    encoder
        Whether encoders count; without it they are ideal.
    torque_resolution
        Whether the torque command has steps and dead-time torque.
    saturation
        Whether torque is limited.
    """

    cogging: float | tuple[float, ...] = 1.0
    friction: float | tuple[float, ...] = 1.0
    servo_lag: bool = True
    encoder: bool = True
    torque_resolution: bool = True
    saturation: bool = True

    def __post_init__(self) -> None:
        for name in ("cogging", "friction"):
            given = getattr(self, name)
            values = given if isinstance(given, tuple) else (given,)
            if not all(0.0 <= value < float("inf") for value in values):
                raise InputError(f"the share of {name} is {given}", "give a number of 0 or more, or one a joint")
