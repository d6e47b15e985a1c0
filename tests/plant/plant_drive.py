"""What the plant is told of drives and servo, in SI and radians; its own words, not the package's objects."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class PlantDrive:
    """One joint's drive: the truth of motor, friction and encoder, and what its firmware is told.

    Values are at the joint unless said to be on the motor side; the motor's true angle is
    ``gear_ratio * q + index_offset``.

    Attributes
    ----------
    harmonics
        True cogging torque on the rotor: (order, amplitude [N m], phase [rad]) of amplitude*sin(order*angle+phase).
    stiffness, damping
        Gains of ``joint_pd``; ``tip_impedance`` does not use them.
    encoder_jitter
        One sigma of a reading [counts] before it is rounded to a whole count.
    encoder_counts
        0 for an ideal encoder, whose "counts" are then the joint angle itself.
    table
        What the firmware stored of the cogging torque, motor side [N m], entry k at 2 pi k / bins; None: nothing.
    table_offset
        Where the firmware believes the index to be, motor side [rad]; None: at the true ``index_offset``.
    dead_time_torque
        Torque [N m] lost against the sign of the commanded one.
    """

    harmonics: tuple[tuple[int, float, float], ...] = ()
    gear_ratio: float = 1.0
    index_offset: float = 0.0
    rotor_inertia: float = 0.0
    coulomb_friction: float = 0.0
    static_friction: float | None = None
    stribeck_speed: float = 0.05
    viscous_friction: float = 0.0
    stiffness: float = 0.0
    damping: float = 0.0
    torque_limit: float = math.inf
    torque_step: float = 0.0
    dead_time_torque: float = 0.0
    encoder_counts: float = 0.0
    encoder_on: str = "motor"
    encoder_jitter: float = 0.0
    table: FloatArray | None = None
    table_offset: float | None = None

    @property
    def resolution(self) -> float:
        """Joint angle of one count [rad], with the gear's sign; 1 for an ideal encoder."""
        if self.encoder_counts == 0.0:
            return 1.0
        return 2.0 * math.pi / self.encoder_counts / (self.gear_ratio if self.encoder_on == "motor" else 1.0)


@dataclass(frozen=True)
class PlantServo:
    """The firmware's loop over all joints; stiffness and damping at the tip in N/m and N s/m."""

    law: str = "joint_pd"
    period: float = 1e-3
    delay: float = 0.0
    speed_cutoff: float = math.inf
    gravity_feedforward: bool = True
    inertia_feedforward: bool = False
    tip_stiffness: tuple[float, float, float] = (0.0, 0.0, 0.0)
    tip_damping: tuple[float, float, float] = (0.0, 0.0, 0.0)
