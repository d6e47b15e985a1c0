"""One sticking event: a joint that rested, or jumped, while it was told to move."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from armeval.evaluate.document import JsonValue

CauseName = Literal["cogging", "friction", "torque limit", "joint limit", "unexplained"]


@dataclass(frozen=True)
class Route:
    """What one way of looking says about the cause of an event.

    Attributes
    ----------
    name
        The way of looking: ``limits``, ``torque``, ``map``, ``periodicity`` or ``counterfactual``.
    says
        The cause it points to, or ``not shown`` where it cannot tell.
    text
        Why, in one sentence with numbers; where it cannot tell, what would show it.
    """

    name: str
    says: CauseName | Literal["not shown"]
    text: str


@dataclass(frozen=True)
class StickingEvent:
    """A rest of one joint with the release that ends it, or a jump without a rest before it.

    Attributes
    ----------
    run, lap, source, joint
        Where it belongs; ``source`` is ``log`` or ``prediction``.
    kind
        ``rest``, or ``jump`` for a sudden motion that no rest preceded (a skipped cog).
    start, end
        Times [s] on the track's clock. A jump starts and ends with its motion.
    start_error, end_error
        One standard deviation of them [s]; half a sample where true speeds are known.
    start_arc, end_arc
        Arc length [m] of the target along the path at these times.
    joint_angle, motor_angle
        Where it rested (a jump: where it set off) [rad or m], [rad]; the motor's angle is within [0, 2 pi).
    angle_error
        One standard deviation of the joint angle [rad or m].
    direction
        +1 where the target moved up, -1 down.
    target_speed
        Mean speed of the joint's target meanwhile [rad/s], not negative.
    lag
        Distance by which the tip fell further behind during the rest, along the way that its target went [m].
    release_angle, release_distance
        Signed joint angle [rad or m] and tip distance [m] moved at most within 50 ms after the rest, or in the jump.
    pull_start, pull_end
        Stiffness part of the servo's torque [N m], positive along ``direction``, at start and end of the rest.
    reversal
        Whether the joint's target stood still or came from the other side since the joint last moved freely.
    probability
        How probable the rest is on the log's evidence; 1 where true speeds are known.
    cause, routes
        Why, and what each way of looking said about it.
    """

    run: str
    lap: int
    source: Literal["log", "prediction"]
    joint: str
    kind: Literal["rest", "jump"]
    start: float
    end: float
    start_error: float
    end_error: float
    start_arc: float
    end_arc: float
    joint_angle: float
    motor_angle: float
    angle_error: float
    direction: float
    target_speed: float
    lag: float
    release_angle: float
    release_distance: float
    pull_start: float
    pull_end: float
    reversal: bool
    probability: float = 1.0
    cause: CauseName = "unexplained"
    routes: tuple[Route, ...] = ()

    @property
    def dwell(self) -> float:
        """How long it rested [s]."""
        return self.end - self.start

    @property
    def agreement(self) -> tuple[int, int]:
        """How many ways of looking say the same as ``cause``, of how many that could tell."""
        told = [route for route in self.routes if route.says != "not shown"]
        return sum(route.says == self.cause for route in told), len(told)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the event's entry in the JSON document."""
        return {
            "lap": self.lap,
            "joint": self.joint,
            "kind": self.kind,
            "start_s": self.start,
            "end_s": self.end,
            "start_error_s": self.start_error,
            "end_error_s": self.end_error,
            "start_m": self.start_arc,
            "end_m": self.end_arc,
            "joint_angle_rad": self.joint_angle,
            "motor_angle_rad": self.motor_angle,
            "angle_error_rad": self.angle_error,
            "target_speed_rad_s": self.direction * self.target_speed,
            "lag_m": self.lag,
            "dwell_s": self.dwell,
            "release_rad": self.release_angle,
            "release_m": self.release_distance,
            "pull_start_Nm": self.pull_start,
            "pull_end_Nm": self.pull_end,
            "after_reversal": self.reversal,
            "probability": self.probability,
            "cause": self.cause,
            "routes": [{"name": route.name, "says": route.says, "text": route.text} for route in self.routes],
        }
