"""Everything that a report tells, worked out: the four questions, and one run held against another."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

from armeval.errors import InputError
from armeval.evaluate.budget import Budget, budget
from armeval.evaluate.compare import Comparison, compare
from armeval.evaluate.document import JsonValue, document
from armeval.evaluate.feel import Feel, feel
from armeval.evaluate.locate import Location
from armeval.evaluate.locate_trial import has_logs, locate_trial
from armeval.evaluate.measure import Measurement, measure
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.predict import Prediction, predict
from armeval.evaluate.run_errors import RunErrors
from armeval.evaluate.sticking.regions import Region
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Trial
from armeval.progress import Progress, silent

MEMBERS = 64
"""So many arms as they may be stand behind the predicted band."""


@dataclass(frozen=True, eq=False)
class Answers:
    """What a report tells.

    Attributes
    ----------
    trial, trajectory
        What was asked about, and its plan.
    measurement
        None where no run has logs.
    prediction, location
        Of every run.
    budget
        Which cause accounts for how much of the predicted error.
    before, after
        The two runs that are compared, measured where both have logs, else predicted; None where there is no such pair.
    comparison
        Of these two.
    feel
        What the hand meets; None where the trial says nothing about a hand.
    """

    trial: Trial
    trajectory: Trajectory
    measurement: Measurement | None
    prediction: Prediction
    location: Location
    budget: Budget
    before: RunErrors | None
    after: RunErrors | None
    comparison: Comparison | None
    feel: Feel | None = None

    @property
    def warnings(self) -> tuple[str, ...]:
        """What the reader should know, each once."""
        asked = (self.measurement, self.prediction, self.location, self.budget, self.feel)
        return tuple(dict.fromkeys(said for answered in asked if answered is not None for said in answered.warnings))

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document ``armeval/report/1``."""
        content = {
            "predict": self.prediction.to_document(),
            "measure": self.measurement.to_document() if self.measurement is not None else None,
            "locate": self.location.to_document(),
            "budget": self.budget.to_document(),
            "comparison": self.comparison.to_document() if self.comparison is not None else None,
            "feel": self.feel.to_document() if self.feel is not None else None,
        }
        return document("report", self.trial.title, self.warnings, content)


def answer(
    trial: Trial, *, before: str | None = None, after: str | None = None, progress: Progress = silent
) -> Answers:
    """Ask all questions of a trial.

    Parameters
    ----------
    trial
        With or without logs.
    before, after
        Names of the runs to compare; default: the first bare and the first compensated one.
    progress
        Told how far the work has come.

    Raises
    ------
    InputError
        If the path cannot be followed, a log cannot be used, or there is no run of a given name.
    """
    plan = plan_trial(trial)
    with ThreadPoolExecutor(1) as beside:
        # Kernels work on the budget while the search for rests, which is not theirs, takes its time.
        waiting = beside.submit(budget, trial, trajectory=plan)
        measurement = measure(trial, trajectory=plan, progress=progress) if has_logs(trial) else None
        prediction = predict(trial, trajectory=plan, members=MEMBERS, progress=progress)
        progress("finding where it sticks", 0, 1)
        location = locate_trial(trial, measurement, prediction)
        progress("finding where it sticks", 1, 1)
        shares = waiting.result()
    met = feel(trial, trajectory=plan, progress=progress) if trial.hand is not None else None
    first = _chosen(trial, before, compensated=False)
    second = _chosen(trial, after, compensated=True)
    if first is not None and first == second:
        raise InputError(f"`{first}` cannot be compared with itself", "give two different runs")
    pair = _pair(first, second, measurement, prediction)
    if pair is None:
        return Answers(trial, plan, measurement, prediction, location, shares, None, None, None, met)
    source = pair[0].tracks[0].source
    comparison = compare(
        *pair,
        regions_before=_regions(location, pair[0].name, source),
        regions_after=_regions(location, pair[1].name, source),
    )
    return Answers(trial, plan, measurement, prediction, location, shares, *pair, comparison, met)


def _chosen(trial: Trial, name: str | None, *, compensated: bool) -> str | None:
    if name is not None:
        return trial.run(name).name
    return next((run.name for run in trial.runs if run.compensated == compensated), None)


def _pair(
    first: str | None, second: str | None, measurement: Measurement | None, prediction: Prediction
) -> tuple[RunErrors, RunErrors] | None:
    """Give both runs as measured, or where one has no logs, both as predicted: like is held against like."""
    if first is None or second is None:
        return None
    measured = {run.name: run for run in measurement.runs} if measurement is not None else {}
    if first in measured and second in measured:
        return measured[first], measured[second]
    return prediction.run(first).errors, prediction.run(second).errors


def _regions(location: Location, name: str, source: str) -> tuple[Region, ...]:
    return next((run.regions for run in location.runs if run.name == name and run.source == source), ())
