"""The error budget: which cause accounts for how much of the tip error."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.cause_replays import CAUSES, Cause, CauseReplays
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.evaluate.modelled_arm import modelled
from armeval.evaluate.owen_value import Coalition, coalitions, owen_value
from armeval.evaluate.plan import plan_trial
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Trial
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

LEFT = "left without causes"
"""The row of what is left when all causes are out."""

MEANING = (
    "a share is what the cause adds to the mean squared error, averaged over all orders in which the causes can be put "
    "in (Shapley value); below 0 the cause takes error away"
)


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


@dataclass(frozen=True)
class Budget:
    """The error budget of a trial.

    Attributes
    ----------
    trial
        The trial's title.
    budgets
        One a state of the arm, in the order of the trial's runs.
    substeps
        Time steps in a servo period.
    warnings
        What to bear in mind.
    """

    trial: str
    budgets: tuple[RunBudget, ...]
    substeps: int = 1
    warnings: tuple[str, ...] = ()

    def run(self, name: str) -> RunBudget:
        """Find the budget of a run by the run's name.

        Raises
        ------
        InputError
            If there is none of that name.
        """
        for found in self.budgets:
            if name in found.runs:
                return found
        names = ", ".join(f"`{run}`" for found in self.budgets for run in found.runs)
        raise InputError(f"there is no run `{name}`", f"runs here: {names}")

    def to_frame(self) -> pd.DataFrame:
        """One row a state of the arm, cause and joint (empty: the whole cause), mean squares in m^2."""
        import pandas as pd

        rows = []
        for state in self.budgets:
            rms = {cause.cause: (cause.alone, cause.without) for cause in state.causes}
            for cause, joint, part in state.rows():
                alone, without = rms[cause] if cause in CAUSES and not joint else (math.nan, math.nan)
                rows.append(
                    {
                        "runs": state.label,
                        "compensated": state.compensated,
                        "cause": cause,
                        "joint": joint,
                        **part.to_document(state.whole),
                        "tracking_rms_alone_m": alone,
                        "tracking_rms_without_m": without,
                    }
                )
        return pd.DataFrame(rows)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document."""
        content = {
            "substeps": self.substeps,
            "meaning": MEANING,
            "budgets": [state.to_document() for state in self.budgets],
        }
        return document("budget", self.trial, self.warnings, content)

    def to_json(self) -> str:
        """Give the JSON document as text."""
        return as_text(self.to_document())


def budget(
    trial: Trial,
    *,
    trajectory: Trajectory | None = None,
    substeps: int = 1,
    seed: int = 0,
    threads: int | None = None,
    progress: Progress = silent,
) -> Budget:
    """Tell which cause accounts for how much of the tip error, bare and compensated.

    The replay is repeated with every set of causes acting. What a cause accounts for is its Shapley value in the game
    in which a set of causes is worth its mean squared error; cogging and friction are split over the joints by the Owen
    value (see :mod:`armeval.evaluate.owen_value`). With what is left when all causes are out, the parts add up to the
    mean squared error exactly. The parts are those of the replay: no more certain than the files that it is made from.

    Parameters
    ----------
    trial
        Its logs are not looked at.
    trajectory
        The plan, where it has been made already.
    substeps
        Time steps in a servo period.
    seed
        Of the noise on the compensation table.
    threads
        How many replay at once; None: one a core.
    progress
        Told as replays are done.

    Raises
    ------
    InputError
        If the path cannot be followed, or the servo loop is not stable without some cause.

    Notes
    -----
    L. S. Shapley, "A value for n-person games", Contributions to the Theory of Games II, 1953. G. Owen, "Values of
    games with a priori unions", in Mathematical Economics and Game Theory, Springer, 1977.
    """
    plan = plan_trial(trial) if trajectory is None else trajectory
    arm = modelled(trial.arm)
    budgets = []
    for compensated in dict.fromkeys(run.compensated for run in trial.runs):
        replays = CauseReplays(arm, plan, compensated, trial.compensation, seed, substeps)
        sizes = [group.size for group in replays.acting]
        worth = replays.worths(
            coalitions(sizes),
            threads=threads,
            what="replaying sets of causes, " + ("compensated" if compensated else "bare"),
            progress=progress,
        )
        names = tuple(run.name for run in trial.runs if run.compensated == compensated)
        budgets.append(_budget_of(names, replays, sizes, worth))
    return Budget(
        trial=trial.title,
        budgets=tuple(budgets),
        substeps=substeps,
        warnings=tuple(map(str, trial.findings)),
    )


def _budget_of(
    runs: tuple[str, ...], replays: CauseReplays, sizes: list[int], worth: dict[Coalition, FloatArray]
) -> RunBudget:
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
    return float(np.sqrt(mean_squares[0]))


def _ratio(part: float, whole: float) -> float:
    return part / whole if whole > 0.0 else 0.0
