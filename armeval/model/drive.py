"""The drive: what moves one joint."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from armeval.errors import InputError
from armeval.model.cogmap import CogMap

_NOT_NEGATIVE = (
    "damping",
    "torque_step",
    "dead_time_torque",
    "rotor_inertia",
    "coulomb_friction",
    "viscous_friction",
    "stiffness",
)


@dataclass(frozen=True, eq=False)
class Drive:
    """Motor, gear, friction, encoder and torque command of one joint.

    Torque means force and angle means length where the joint slides. All values are at the joint unless said to be on
    the motor side. The joint torque is ``gear_ratio`` times the motor torque; the motor's mechanical angle is
    ``gear_ratio * q + index_offset``.

    Attributes
    ----------
    gear_ratio
        Motor turns per joint turn (rad/rad; rad/m where the joint slides); negative: reversed; never 0.
    stiffness, damping
        Gains of ``joint_pd`` [N m/rad], [N m s/rad].
    torque_limit, torque_step, dead_time_torque
        Largest torque, smallest change of the commanded torque (0: none), torque lost against the sign of the
        current [N m].
    torque_constant, winding_resistance, rotor_inertia
        Motor side [N m/A], [ohm], [kg m^2]; None where not known.
    coulomb_friction, static_friction, stribeck_speed, viscous_friction
        At the joint [N m], [N m], [rad/s], [N m s/rad].
    encoder_counts
        Counts per turn (per metre where a joint-side encoder sits on a sliding joint); 0: ideal encoder.
    encoder_on
        ``motor`` or ``joint``.
    slots, poles
        Of the motor, where known.
    rest_angle
        Where inverse kinematics starts from [rad]; None: the middle of the joint's range.
    cog_map
        The motor's cog map (motor side); None: no cogging known.
    index_offset
        Motor angle [rad] at which the joint reads zero.
    slides
        Whether the joint slides.
    """

    joint: str
    gear_ratio: float = 1.0
    stiffness: float = 0.0
    damping: float = 0.0
    torque_limit: float = math.inf
    torque_step: float = 0.0
    dead_time_torque: float = 0.0
    torque_constant: float | None = None
    winding_resistance: float | None = None
    rotor_inertia: float = 0.0
    coulomb_friction: float = 0.0
    static_friction: float | None = None
    stribeck_speed: float = 0.05
    viscous_friction: float = 0.0
    encoder_counts: float = 0.0
    encoder_on: Literal["motor", "joint"] = "motor"
    slots: int | None = None
    poles: int | None = None
    rest_angle: float | None = None
    cog_map: CogMap | None = None
    index_offset: float = 0.0
    slides: bool = False

    def __post_init__(self) -> None:
        def refuse(key: str, what: str, mend: str) -> None:
            raise InputError(what, mend, place=f"[joint.{self.joint}] {key}")

        for name, value in vars(self).items():
            if isinstance(value, float) and math.isnan(value):
                refuse(name, f"`{name}` is not a number", "give a number")
        for name in _NOT_NEGATIVE:
            if not 0.0 <= getattr(self, name) < math.inf:
                refuse(name, f"`{name}` is {getattr(self, name)}", "give a finite value of 0 or more")
        if self.gear_ratio == 0.0 or not math.isfinite(self.gear_ratio):
            refuse("gear_ratio", f"the gear ratio is {self.gear_ratio}", "give motor turns per joint turn, not 0")
        if not self.torque_limit > 0.0:
            refuse("torque_limit", f"the torque limit is {self.torque_limit}", "give a limit above 0")
        if self.static_friction is None:
            object.__setattr__(self, "static_friction", self.coulomb_friction)
        if self.breakaway_friction < self.coulomb_friction:
            refuse("static_friction", "static friction is below Coulomb friction", "let it be at least as large")
        if not self.stribeck_speed > 0.0:
            refuse("stribeck_speed", "the Stribeck speed is not above 0", "give a speed above 0, such as 0.05 rad/s")
        if self.encoder_counts < 0.0:
            refuse("encoder_counts", f"{self.encoder_counts} counts a turn", "give a number above 0")
        for name in ("slots", "poles"):
            teeth = getattr(self, name)
            if teeth is not None and teeth < 1:
                refuse(name, f"`{name}` is {teeth}", "give a whole number above 0")

    @property
    def breakaway_friction(self) -> float:
        """Largest friction torque at rest [N m]."""
        return self.coulomb_friction if self.static_friction is None else self.static_friction

    @property
    def resolution(self) -> float:
        """Joint angle [rad] of one encoder count; 0 for an ideal encoder.

        A count of a turn is 2 pi / counts on what the encoder sits on; motor side, that is divided by the gear ratio.
        An encoder on a joint that slides counts metres instead.
        """
        if self.encoder_counts == 0.0:
            return 0.0
        if self.encoder_on == "joint":
            return (1.0 if self.slides else 2.0 * math.pi) / self.encoder_counts
        return 2.0 * math.pi / self.encoder_counts / abs(self.gear_ratio)
