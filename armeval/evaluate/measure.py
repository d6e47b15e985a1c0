"""The measurement: how far the tip strayed, according to the encoder logs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

from armeval.errors import Finding, InputError
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.intervals import METHOD
from armeval.evaluate.measuring.log_track import log_track
from armeval.evaluate.measuring.rigid import RigidAlignment, without_rigid_offset
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.run_errors import (
    RunErrors,
    criteria_frame,
    laps_frame,
    run_errors,
    runs_frame,
    stretches_frame,
)
from armeval.evaluate.threads import spread
from armeval.model.joint_log import JointLog
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Run, Trial, find_run
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

BLIND_LAG = (
    "logs without targets are shifted in time to where the RMS is least, which takes a constant lag out of the "
    "tracking error; runs"
)
BLIND_SPOT = (
    "the tip comes from encoder angles through the arm's kinematics: link flex and wrong link lengths do not show"
)


@dataclass(frozen=True, eq=False)
class Measurement:
    """Tip error of every run that has logs.

    Attributes
    ----------
    trial
        The trial's title.
    runs
        Runs with logs, in the trial's order.
    trajectory
        The plan they were held against.
    findings
        Warnings met while reading and aligning.
    rigid
        The errors without one rigid offset of the base, where that was asked for.
    """

    trial: str
    runs: tuple[RunErrors, ...]
    trajectory: Trajectory
    findings: tuple[Finding, ...] = ()
    rigid: RigidAlignment | None = None

    @property
    def warnings(self) -> tuple[str, ...]:
        """What to bear in mind, the blind spot of every such measurement first."""
        shifted = [run.name for run in self.runs if not all(track.targets_logged for track in run.tracks)]
        told = [f"{BLIND_LAG}: {', '.join(shifted)}"] if shifted else []
        return (BLIND_SPOT, *told, *(str(finding) for finding in self.findings))

    def run(self, name: str) -> RunErrors:
        """Find a run by its name.

        Raises
        ------
        InputError
            If there is none of that name.
        """
        return find_run(self.runs, name, what="measured run")

    def to_frame(self) -> pd.DataFrame:
        """One row a run and kind of error, lengths in metres."""
        return runs_frame(self.runs)

    def laps_frame(self) -> pd.DataFrame:
        """One row a run, lap and kind of error, lengths in metres."""
        return laps_frame(self.runs)

    def stretches_frame(self) -> pd.DataFrame:
        """One row a run and stretch of path: errors along and across it, lag; lengths in metres."""
        return stretches_frame(self.runs)

    def criteria_frame(self) -> pd.DataFrame:
        """One row a run: components of the error, lag, and the path criteria of ISO 9283; SI units."""
        return criteria_frame(self.runs)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document."""
        content: dict[str, JsonValue] = {"interval": METHOD, "runs": [run.to_document() for run in self.runs]}
        if self.rigid is not None:
            content["rigid"] = self.rigid.to_document()
        return document("measure", self.trial, self.warnings, content)

    def to_json(self) -> str:
        """Give the JSON text."""
        return as_text(self.to_document())


def measure(
    trial: Trial,
    *,
    trajectory: Trajectory | None = None,
    align: Literal["time", "rigid"] = "time",
    progress: Progress = silent,
) -> Measurement:
    """Measure the tip error of every run that has logs.

    Parameters
    ----------
    trial
        With at least one run that has logs.
    trajectory
        The plan; None: made from the trial.
    align
        ``time``: logged targets, else one time offset a lap. ``rigid``: beside that, the errors that are left when one
        rigid offset of the base, the same for all laps of all runs, is taken out.
    progress
        Told how many laps are done.

    Raises
    ------
    InputError
        If no run has logs; with every log that is shorter than the trajectory or whose targets do not follow the path.
    """
    if align not in ("time", "rigid"):
        raise InputError(f"`{align}` is no alignment", "give `time` or `rigid`")
    if not trial.driven:
        what = "no run has logs" if not any(run.laps for run in trial.runs) else "a hand led the only run with logs"
        raise InputError(what, "add `logs` to a [[run]] that the servo drives", file=trial.source)
    if trajectory is None:
        trajectory = plan_trial(trial)
    plan = trajectory
    jobs = [(run, log) for run in trial.driven for log in run.laps]

    def held(job: tuple[Run, JointLog]) -> tuple[LapTrack, tuple[Finding, ...]] | InputError:
        try:
            return log_track(trial.arm, plan, *job)
        except InputError as fault:
            return fault

    found = spread(held, jobs, what="measuring laps", progress=progress)
    laps = [lap for lap in found if not isinstance(lap, InputError)]
    if len(laps) < len(found):
        faults = [fault for fault in found if isinstance(fault, InputError)]
        raise InputError.of(finding for fault in faults for finding in fault.findings)
    runs = [
        run_errors([lap for (of, _), (lap, _) in zip(jobs, laps, strict=True) if of is run], plan)
        for run in trial.driven
    ]
    findings = (*trial.findings, *(finding for _, doubts in laps for finding in doubts))
    rigid = without_rigid_offset(runs, plan) if align == "rigid" else None
    if rigid is not None:
        findings = (*findings, *rigid.findings)
    return Measurement(trial=trial.title, runs=tuple(runs), trajectory=plan, findings=findings, rigid=rigid)
