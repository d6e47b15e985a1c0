"""Why a joint rests: found by more than one route, or not claimed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal, Protocol

from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking_event import StickingEvent
from armeval.model.arm import Arm
from armeval.model.trial import Compensation

Removable = Literal["cogging", "friction", "torque limit", "joint limit"]


class Counterfactual(Protocol):
    """Replays a predicted lap with one cause taken out of one joint."""

    def __call__(self, joint: str, without: Removable) -> LapTrack:
        """Give the lap as it would be if the joint's cogging, friction or limit were not there."""
        ...


def find_causes(
    arm: Arm,
    tracks: Sequence[LapTrack],
    events: Sequence[StickingEvent],
    *,
    compensation: Compensation,
    counterfactual: Counterfactual | None = None,
) -> list[StickingEvent]:
    """Give the events of one run with their causes."""
    return list(events)
