"""The error budget: which cause accounts for how much of the tip error."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from armeval.errors import InputError
from armeval.evaluate.cogging.modelled_arm import modelled, unmapped
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.replaying.cause_replays import CAUSES, CauseReplays
from armeval.evaluate.replaying.owen_value import coalitions
from armeval.evaluate.replaying.run_budget import RunBudget, run_budget
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Trial
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

MEANING = (
    "a share is what the cause adds to the mean squared error, averaged over all orders in which the causes can be put "
    "in (Shapley value); below 0 the cause takes error away"
)


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

    The replay is repeated with every set of causes acting. What a cause accounts for is its Shapley value in the
    game in which a set of causes is worth its mean squared error; cogging and friction are split over the joints by
    the Owen value (see :mod:`armeval.evaluate.replaying.owen_value`). With what is left when all causes are out,
    the parts add up to the mean squared error exactly. The parts are those of the replay: no more certain than the
    files that it is made from.

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
        budgets.append(run_budget(names, replays, worth))
    return Budget(
        trial=trial.title,
        budgets=tuple(budgets),
        substeps=substeps,
        warnings=(*map(str, trial.findings), *unmapped(arm)),
    )
