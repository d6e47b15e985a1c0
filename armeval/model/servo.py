"""The servo: what the firmware makes of encoder angles and targets."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from armeval.arrays import FloatArray, frozen
from armeval.errors import InputError

ServoLaw = Literal["joint_pd", "tip_impedance"]


@dataclass(frozen=True, eq=False)
class Servo:
    """Position servo of the whole arm, run once each period.

    Attributes
    ----------
    law
        ``joint_pd`` closes a loop at each joint (its gains stand in :class:`armeval.model.drive.Drive`),
        ``tip_impedance`` one at the tip.
    period
        Time between two runs [s].
    delay
        From the encoder reading to the torque that answers it [s].
    speed_cutoff
        Corner frequency [Hz] of the first-order low-pass on the differenced encoder angle; infinite: no filter.
    gravity_feedforward, inertia_feedforward
        Whether g(q_seen), and M(q_target) q''_target, are added to the torque.
    tip_stiffness, tip_damping
        Shape (3,) [N/m], [N s/m] along x, y, z of the base; only with ``tip_impedance``, else zeros.
    """

    law: ServoLaw
    period: float
    delay: float = 0.0
    speed_cutoff: float = math.inf
    gravity_feedforward: bool = True
    inertia_feedforward: bool = False
    tip_stiffness: FloatArray | tuple[float, float, float] = (0.0, 0.0, 0.0)
    tip_damping: FloatArray | tuple[float, float, float] = (0.0, 0.0, 0.0)

    def __post_init__(self) -> None:
        if not (math.isfinite(self.period) and self.period > 0.0):
            raise InputError(f"the servo period is {self.period} s", "give a rate above 0 Hz", place="[servo] rate")
        if not (math.isfinite(self.delay) and self.delay >= 0.0):
            raise InputError(f"the delay is {self.delay} s", "give a delay of 0 s or more", place="[servo] delay")
        if not self.speed_cutoff > 0.0:
            raise InputError("the speed filter's corner is not above 0 Hz", "raise it", place="[servo] speed_filter")
        object.__setattr__(self, "tip_stiffness", frozen(self.tip_stiffness, (3,), "tip_stiffness"))
        object.__setattr__(self, "tip_damping", frozen(self.tip_damping, (3,), "tip_damping"))
