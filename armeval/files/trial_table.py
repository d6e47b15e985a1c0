"""What trial.toml may hold: its keys, their units and their ranges. A further table is added here and in Trial."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from annotated_types import Ge, Len
from pydantic import BeforeValidator, Field, StrictBool

from armeval.files.quantities import Acceleration, Angle, Speed, Unit
from armeval.files.toml_file import Table
from armeval.model.hand import Hand
from armeval.model.spreads import Spreads
from armeval.model.thresholds import Thresholds
from armeval.model.trial import Compensation, StickingRule

TRIAL_SCHEMA = "armeval/trial/1"


class CompensationTable(Table):
    """``[compensation]``: what the firmware's table can do."""

    table_bins: Annotated[int, Ge(4)] = Compensation.table_bins
    interpolation: Literal["linear", "nearest"] = Compensation.interpolation
    index_error: Annotated[float, Unit("rad", least=0.0)] = Compensation.index_error
    map_noise: Annotated[float, Unit("N*m", least=0.0)] | None = Compensation.map_noise

    def value(self) -> Compensation:
        """Give what the model makes of it."""
        return Compensation(**self.model_dump())


class StickingTable(Table):
    """``[sticking]``: when a joint counts as resting while told to move."""

    least_target_speed: Annotated[float, Unit("rad/s", above=0.0)] = StickingRule.least_target_speed
    speed_share: Annotated[float, Unit("", above=0.0)] = StickingRule.speed_share
    least_dwell: Annotated[float, Unit("s", above=0.0)] = StickingRule.least_dwell

    def value(self) -> StickingRule:
        """Give what the model makes of it."""
        return StickingRule(**self.model_dump())


class UncertaintyTable(Table):
    """``[uncertainty]``: how far the arm may be from what the files say, one sigma each."""

    rotor_index: Annotated[float, Unit("rad", least=0.0)] | None = Spreads.rotor_index
    friction: Annotated[float, Unit("", least=0.0)] = Spreads.friction
    torque_constant: Annotated[float, Unit("", least=0.0)] = Spreads.torque_constant
    start: Annotated[float, Unit("rad", least=0.0)] = Spreads.start

    def value(self) -> Spreads:
        """Give what the model makes of it."""
        return Spreads(**self.model_dump())


class HandTable(Table):
    """``[hand]``: the hand that moves the arm."""

    rendered_force: Annotated[float, Unit("N", above=0.0)] | None = Hand.rendered_force
    gravity_feedforward: StrictBool | None = Hand.gravity_feedforward
    bandwidth: Annotated[float, Unit("Hz", above=0.0)] = Hand.bandwidth
    run: str | None = Hand.run
    thresholds: str | None = None

    def value(self, thresholds: Thresholds) -> Hand:
        """Give what the model makes of it, with the thresholds that it names."""
        return Hand(**self.model_dump(exclude={"thresholds"}), thresholds=thresholds)


def _as_list(given: Any) -> Any:
    return [given] if isinstance(given, str) else given


class RunTable(Table):
    """One ``[[run]]``."""

    name: str
    compensated: StrictBool
    logs: Annotated[list[str], BeforeValidator(_as_list)] = Field(default=[])


class TrialTable(Table):
    """The whole file."""

    schema_: Any = Field(default=TRIAL_SCHEMA, alias="schema")
    title: str | None = None
    arm: str
    path: str
    feed: Speed | None = None
    acceleration: Acceleration | None = None
    corner_angle: Angle | None = None
    columns: dict[str, str] = Field(default={})
    compensation: CompensationTable = CompensationTable()
    sticking: StickingTable = StickingTable()
    uncertainty: UncertaintyTable = UncertaintyTable()
    hand: HandTable | None = None
    run: Annotated[list[RunTable], Len(1)]
