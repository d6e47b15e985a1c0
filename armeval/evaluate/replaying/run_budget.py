"""The error budget of one state of the arm: what each cause has in the mean squared tip error."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from armeval.arrays import FloatArray
from armeval.evaluate.document import JsonValue
from armeval.evaluate.replaying.cause_replays import CAUSES, Cause, CauseReplays
from armeval.evaluate.replaying.owen_value import Coalition, owen_value

LEFT = "left without causes"
"""The row of what is left when all causes are out."""


@dataclass(frozen=True)
class Part:
    """What a cause, or one joint's part in it, has in the mean squared tracking error and path deviation [m^2]."""

    tracking: float
    deviation: float

    def to_document(self, whole: Part) -> dict[str, JsonValue]:
        """Give the entry in the JSON document, with the shares of the whole."""
        return {
            "tracking_m2": self.tracking,
            "tracking_share": _ratio(self.tracking, whole.tracking),
            "deviation_m2": self.deviation,
            "deviation_share": _ratio(self.deviation, whole.deviation),
        }


@dataclass(frozen=True)
class CauseBudget:
    """What one cause has in the tip error.

    Attributes
    ----------
    cause
        Which.
    acts
        Whether it has anything to act on; if not, its part is 0.
    part
        Shapley value; over all causes, and with what is left, these add up to the mean squared error.
    joints
        By joint, for cogging and friction; they add up to ``part`` (Owen value).
    alone, without
        RMS tracking error [m] if nothing but this cause acted, and if only this cause were taken out.
    """

    cause: Cause
    acts: bool
    part: Part
    joints: tuple[tuple[str, Part], ...]
    alone: float
    without: float


@dataclass(frozen=True)
class RunBudget:
    """The budget of all runs in one state of the arm, bare or compensated.

    Attributes
    ----------
    runs
        Their names; runs in the same state are predicted alike.
    compensated
        Whether compensation acts. What cogging has is then what compensation leaves of it.
    whole
        Mean squared errors [m^2] with all causes.
    causes
        One a cause, in a fixed order.
    left
        Mean squared errors [m^2] with all causes out: torque held from period to period, time steps, joint stops.
    """

    runs: tuple[str, ...]
    compensated: bool
    whole: Part
    causes: tuple[CauseBudget, ...]
    left: Part

    @property
    def label(self) -> str:
        """The runs' names for people."""
        return ", ".join(self.runs)

    @property
    def tracking_rms(self) -> float:
        """RMS tracking error with all causes [m]."""
        return math.sqrt(self.whole.tracking)

    @property
    def deviation_rms(self) -> float:
        """RMS path deviation with all causes [m]."""
        return math.sqrt(self.whole.deviation)

    def rows(self) -> list[tuple[str, str, Part]]:
        """Cause, joint (empty: the whole cause) and part: every row of the table."""
        found: list[tuple[str, str, Part]] = []
        for cause in self.causes:
            found.append((cause.cause, "", cause.part))
            found += [(cause.cause, joint, part) for joint, part in cause.joints]
        return [*found, (LEFT, "", self.left)]

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry in the JSON document."""
        return {
            "runs": list(self.runs),
            "compensated": self.compensated,
            "tracking_rms_m": self.tracking_rms,
            "deviation_rms_m": self.deviation_rms,
            "causes": [
                {
                    "cause": cause.cause,
                    "acts": cause.acts,
                    **cause.part.to_document(self.whole),
                    "tracking_rms_alone_m": cause.alone,
                    "tracking_rms_without_m": cause.without,
                    "joints": [{"joint": joint, **part.to_document(self.whole)} for joint, part in cause.joints],
                }
                for cause in self.causes
            ],
            "left": self.left.to_document(self.whole),
        }


def run_budget(runs: tuple[str, ...], replays: CauseReplays, worth: Mapping[Coalition, FloatArray]) -> RunBudget:
    """Share the mean squared error of an arm in one state among its causes.

    Parameters
    ----------
    runs
        Names of the runs in that state.
    replays
        What was replayed.
    worth
        Mean squared errors of its coalitions, as :meth:`CauseReplays.worths` gives them.
    """
    sizes = [group.size for group in replays.acting]
    nobody: Coalition = tuple(frozenset[int]() for _ in sizes)
    everybody: Coalition = tuple(frozenset(range(size)) for size in sizes)
    places = {group.cause: g for g, group in enumerate(replays.acting)}
    values = owen_value(sizes, worth)
    causes = []
    for cause in CAUSES:
        if cause not in places:
            none = Part(0.0, 0.0)
            causes.append(CauseBudget(cause, False, none, (), _rms(worth[nobody]), _rms(worth[everybody])))
            continue
        g = places[cause]
        alone = (*nobody[:g], everybody[g], *nobody[g + 1 :])
        without = (*everybody[:g], nobody[g], *everybody[g + 1 :])
        joints = (replays.arm.joints[i] for i in replays.acting[g].joints)
        causes.append(
            CauseBudget(
                cause=cause,
                acts=True,
                part=_part(values[g].sum(axis=0)),
                joints=tuple((joint, _part(value)) for joint, value in zip(joints, values[g], strict=False)),
                alone=_rms(worth[alone]),
                without=_rms(worth[without]),
            )
        )
    return RunBudget(
        runs=runs,
        compensated=replays.compensated,
        whole=_part(worth[everybody]),
        causes=tuple(causes),
        left=_part(worth[nobody]),
    )


def _part(mean_squares: FloatArray) -> Part:
    return Part(float(mean_squares[0]), float(mean_squares[1]))


def _rms(mean_squares: FloatArray) -> float:
    return math.sqrt(mean_squares[0])


def _ratio(part: float, whole: float) -> float:
    return part / whole if whole > 0.0 else 0.0
