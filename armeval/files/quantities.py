"""Numbers as they stand in TOML files: with their unit where one is due, bare where none is."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Annotated, Any, TypeAlias

from pydantic import GetCoreSchemaHandler, ValidationInfo
from pydantic_core import CoreSchema, core_schema

from armeval import units
from armeval.errors import InputError


@dataclass(frozen=True)
class JointKind:
    """What is known about the joint whose table is read; it decides between torque and force, angle and length.

    Attributes
    ----------
    slides
        None where the URDF could not be read: then either unit passes.
    """

    slides: bool | None = None


@dataclass(frozen=True)
class Unit:
    """Marks a field that is read from text such as ``"60 mm/s"`` and held as a number in an SI unit.

    Attributes
    ----------
    due
        The SI unit; empty where a bare number is due.
    sliding
        The SI unit at a joint that slides, where that differs.
    least, above
        Smallest value allowed; value that must be exceeded.
    """

    due: str
    sliding: str | None = None
    least: float = -math.inf
    above: float = -math.inf

    def read(self, given: object, kind: JointKind | None = None) -> float:
        """Read one value.

        Raises
        ------
        InputError
            If its unit is missing, unknown or of another kind, or the value is out of range.
        """
        choices = [self.due]
        if self.sliding is not None and kind is not None:
            choices = {True: [self.sliding], False: [self.due], None: [self.due, self.sliding]}[kind.slides]
        faults: list[InputError] = []
        for unit in choices:
            try:
                value = units.quantity(given, unit) if unit else bare_number(given)
            except InputError as fault:
                faults.append(fault)
            else:
                return self._in_range(value, given)
        raise faults[0]

    def _in_range(self, value: float, given: object) -> float:
        told = f'"{given}"' if isinstance(given, str) else f"{given}"
        if value < self.least:
            raise InputError(f"{told} is too small", f"give {self.least:g} or more")
        if value <= self.above:
            raise InputError(f"{told} is too small", f"give more than {self.above:g}")
        return value

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        def validate(given: object, info: ValidationInfo) -> float:
            return self.read(given, info.context if isinstance(info.context, JointKind) else None)

        return core_schema.with_info_plain_validator_function(validate)


def bare_number(given: object) -> float:
    """Read a number that has no unit.

    Raises
    ------
    InputError
        If it is text, a truth value or not finite.
    """
    if isinstance(given, bool) or not isinstance(given, int | float):
        told = f'"{given}"' if isinstance(given, str) else f"{given!r}"
        raise InputError(f"{told} is not a number", "write a bare number, without quotes and without a unit")
    try:
        value = float(given)
    except OverflowError:
        value = math.inf
    if not math.isfinite(value):
        raise InputError(f"{given} is not finite", "give a finite number")
    return value


Number: TypeAlias = Annotated[float, Unit("")]
Time: TypeAlias = Annotated[float, Unit("s", least=0.0)]
Frequency: TypeAlias = Annotated[float, Unit("Hz", above=0.0)]
Angle: TypeAlias = Annotated[float, Unit("rad")]
Speed: TypeAlias = Annotated[float, Unit("m/s", above=0.0)]
Acceleration: TypeAlias = Annotated[float, Unit("m/s^2", above=0.0)]
