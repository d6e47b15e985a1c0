"""How far the tip will stray, bare and compensated, and where it will stick, before anything moves."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from armeval.evaluate.cogging.modelled_arm import modelled, unmapped
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.replaying.ensemble import Ensemble, ensemble
from armeval.evaluate.replaying.predicted_lap import PredictedLap
from armeval.evaluate.replaying.quasistatic import Quasistatic, quasistatic
from armeval.evaluate.replaying.step_error import StepError
from armeval.evaluate.replaying.sticking_ratio import StickingRatio, sticking_ratio
from armeval.evaluate.run_errors import RunErrors, run_errors, runs_frame
from armeval.evaluate.sticking.cause import Counterfactual
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Trial, find_run
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, eq=False)
class PredictedRun:
    """What is to be expected of one run.

    Attributes
    ----------
    errors
        Tip error of the replayed lap.
    slow
        Tip error and jumps if the path were run very slowly: no inertia, no speed.
    ratio
        Sticking ratio of every joint along the path.
    saturated
        Share of servo periods in which each joint's torque was cut at its limit, in the chain's order.
    step
        What the time step does to the replay.
    ensemble
        How sure all this is, from replays of arms that differ in what nobody knows exactly; None where not asked for.
    """

    errors: RunErrors
    slow: Quasistatic
    ratio: StickingRatio
    saturated: tuple[float, ...]
    step: StepError
    ensemble: Ensemble | None = None

    @property
    def name(self) -> str:
        """The run's name."""
        return self.errors.name

    @property
    def compensated(self) -> bool:
        """Whether compensation acts."""
        return self.errors.compensated

    @property
    def track(self) -> LapTrack:
        """The replayed lap."""
        return self.errors.tracks[0]

    def to_document(self) -> dict[str, JsonValue]:
        """Give the run's entry in the JSON document."""
        return {
            **self.errors.to_document(),
            "sticking_ratio": self.ratio.to_document(),
            "quasistatic": self.slow.to_document(),
            "saturated_share": list(self.saturated),
            "step_error_rms_m": self.step.rms,
            "ensemble": None if self.ensemble is None else self.ensemble.to_document(),
        }


@dataclass(frozen=True, eq=False)
class Prediction:
    """What is to be expected of every run of a trial.

    Attributes
    ----------
    trial
        The trial's title.
    runs
        In the trial's order.
    trajectory
        The plan that was replayed.
    substeps
        Time steps in a servo period.
    warnings
        What to bear in mind.
    counterfactuals
        By the run's name: its lap replayed with a cause taken out of one joint.
    """

    trial: str
    runs: tuple[PredictedRun, ...]
    trajectory: Trajectory
    substeps: int = 1
    warnings: tuple[str, ...] = ()
    counterfactuals: Mapping[str, Counterfactual] = field(default_factory=dict)

    def run(self, name: str) -> PredictedRun:
        """Find a run by its name.

        Raises
        ------
        InputError
            If there is none of that name.
        """
        return find_run(self.runs, name)

    def to_frame(self) -> pd.DataFrame:
        """One row a run and kind of error, lengths in metres."""
        return runs_frame([run.errors for run in self.runs])

    def bands_frame(self) -> pd.DataFrame:
        """One row a run and stretch of path: band of the tracking error [m], each joint's probability of sticking."""
        import pandas as pd

        bands = [(run.name, run.ensemble.to_frame()) for run in self.runs if run.ensemble is not None]
        for name, band in bands:
            band.insert(0, "run", name)
        return pd.concat([band for _, band in bands], ignore_index=True) if bands else pd.DataFrame()

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document."""
        content = {"substeps": self.substeps, "runs": [run.to_document() for run in self.runs]}
        return document("predict", self.trial, self.warnings, content)

    def to_json(self) -> str:
        """Give the JSON document as text."""
        return as_text(self.to_document())


def predict(
    trial: Trial,
    *,
    trajectory: Trajectory | None = None,
    substeps: int = 1,
    seed: int = 0,
    members: int = 0,
    threads: int | None = None,
    progress: Progress = silent,
) -> Prediction:
    """Predict the tip error of every run of a trial and where its joints will stick.

    Parameters
    ----------
    trial
        Its logs are not looked at.
    trajectory
        The plan, where it has been made already.
    substeps
        Time steps in a servo period.
    seed
        Of the noise on the compensation table, and of the members.
    members
        How many possible arms each run is replayed with, drawn from the trial's ``uncertainty``; the same arms for
        every run, whatever the number of threads. 0: none.
    threads
        How many blocks of members are replayed at once; None: one a core.
    progress
        Told after each run, and after each block of members.

    Raises
    ------
    InputError
        If the path cannot be followed, or the servo loop is not stable.
    """
    plan = plan_trial(trial) if trajectory is None else trajectory
    trial = replace(trial, arm=modelled(trial.arm))
    laps = [PredictedLap(trial.arm, plan, run, trial.compensation, seed, substeps) for run in trial.runs]
    runs = []
    for done, lap in enumerate(laps):
        progress("predicting", done, len(laps))
        predicted = _predict_run(lap)
        if members:
            possible = _ensemble(trial, lap, members, threads, progress)
            predicted = replace(predicted, ensemble=possible)
        runs.append(predicted)
    progress("predicting", len(runs), len(runs))
    return Prediction(
        trial=trial.title,
        runs=tuple(runs),
        trajectory=plan,
        substeps=substeps,
        warnings=(*map(str, trial.findings), *_doubts(trial, runs)),
        counterfactuals={lap.run.name: lap.without for lap in laps},
    )


def _predict_run(lap: PredictedLap) -> PredictedRun:
    replayed = lap.replay()
    compensated, compensation, seed = lap.run.compensated, lap.compensation, lap.seed
    return PredictedRun(
        errors=run_errors([lap.track(replayed)], lap.trajectory),
        slow=quasistatic(lap.arm, lap.trajectory, compensated=compensated, compensation=compensation, seed=seed),
        ratio=sticking_ratio(lap.arm, lap.trajectory, compensated=compensated, compensation=compensation, seed=seed),
        saturated=tuple(float(share) for share in replayed.saturated.mean(axis=0)),
        step=lap.step_error(replayed),
    )


def _ensemble(trial: Trial, lap: PredictedLap, members: int, threads: int | None, progress: Progress) -> Ensemble:
    return ensemble(
        lap.arm,
        lap.trajectory,
        compensated=lap.run.compensated,
        members=members,
        seed=lap.seed,
        compensation=lap.compensation,
        spreads=trial.uncertainty,
        rule=trial.sticking,
        substeps=lap.substeps,
        threads=threads,
        progress=lambda _, done, total: progress(f"members of run {lap.run.name}", done, total),
    )


def _doubts(trial: Trial, runs: list[PredictedRun]) -> list[str]:
    doubts = unmapped(trial.arm)
    for run in runs:
        for joint, share in zip(trial.arm.joints, run.saturated, strict=True):
            if share > 0.0:
                doubts.append(
                    f"run {run.name}: the torque of joint {joint} is at its limit for {100.0 * share:.1f} % of the time"
                )
        if run.step.warning:
            doubts.append(f"run {run.name}: {run.step.warning}")
    return doubts
