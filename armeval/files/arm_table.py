"""What arm.toml may hold: its keys, their units and their ranges."""

from __future__ import annotations

from typing import Annotated, Any, Literal, TypeAlias

from annotated_types import Ge, Len
from pydantic import BeforeValidator, Field, StrictBool, ValidationInfo, field_validator

from armeval.files.quantities import Angle, Frequency, JointKind, Number, Time, Unit
from armeval.files.toml_file import Table

ARM_SCHEMA = "armeval/arm/1"

_Torque: TypeAlias = Annotated[float, Unit("N*m", "N", least=0.0)]
_Stiffness: TypeAlias = Annotated[float, Unit("N*m/rad", "N/m", least=0.0)]
_Damping: TypeAlias = Annotated[float, Unit("N*m*s/rad", "N*s/m", least=0.0)]
_Teeth: TypeAlias = Annotated[int, Ge(1)]


class CogMapTable(Table):
    """Where a joint's cog map is, and the motor angle at which the joint reads zero."""

    file: str
    index_offset: Angle = 0.0


def _file_alone(given: Any) -> Any:
    return {"file": given} if isinstance(given, str) else given


class JointTable(Table):
    """One ``[joint.<name>]``; units of torque and angle become those of force and length where the joint slides."""

    rest_angle: Annotated[float, Unit("rad", "m")] | None = None
    gear_ratio: Annotated[float, Unit("", "rad/m")] = 1.0
    stiffness: _Stiffness = 0.0
    damping: _Damping = 0.0
    torque_limit: Annotated[float, Unit("N*m", "N", above=0.0)] | None = None
    torque_step: _Torque = 0.0
    dead_time_torque: _Torque = 0.0
    torque_constant: Annotated[float, Unit("N*m/A", above=0.0)] | None = None
    winding_resistance: Annotated[float, Unit("ohm", above=0.0)] | None = None
    rotor_inertia: Annotated[float, Unit("kg*m^2", least=0.0)] = 0.0
    coulomb_friction: _Torque | None = None
    static_friction: _Torque | None = None
    stribeck_speed: Annotated[float, Unit("rad/s", "m/s", above=0.0)] = 0.05
    viscous_friction: _Damping = 0.0
    encoder_on: Literal["motor", "joint"] = "motor"
    encoder_counts: float = 0.0
    slots: _Teeth | None = None
    poles: _Teeth | None = None
    cog_map: Annotated[CogMapTable | None, BeforeValidator(_file_alone)] = None

    @field_validator("encoder_counts", mode="plain")
    @classmethod
    def _counts(cls, given: object, info: ValidationInfo) -> float:
        """Read counts per turn, a bare number; per length for an encoder that sits on a joint that slides."""
        kind = info.context if isinstance(info.context, JointKind) else JointKind()
        along = kind.slides is not False and info.data.get("encoder_on") == "joint"
        if along and (kind.slides or isinstance(given, str)):
            return Unit("count/m", above=0.0).read(given)
        return Unit("", above=0.0).read(given)


class ServoTable(Table):
    """``[servo]``: what runs in the firmware."""

    law: Literal["joint_pd", "tip_impedance"]
    rate: Frequency
    delay: Time = 0.0
    speed_filter: Frequency | None = None
    gravity_feedforward: StrictBool = True
    inertia_feedforward: StrictBool = False
    tip_stiffness: Annotated[list[Annotated[float, Unit("N/m", least=0.0)]], Len(3, 3)] | None = None
    tip_damping: Annotated[list[Annotated[float, Unit("N*s/m", least=0.0)]], Len(3, 3)] | None = None


class ArmTable(Table):
    """The whole file; the joints' tables are read when the URDF has told which joints slide."""

    schema_: Any = Field(default=ARM_SCHEMA, alias="schema")
    name: str
    urdf: str
    tip: str
    gravity: Annotated[float, Unit("m/s^2", least=0.0)] = 9.80665
    up: Annotated[list[Number], Len(3, 3)] = Field(default=[0.0, 0.0, 1.0])
    servo: ServoTable
    joint: dict[str, Any]
