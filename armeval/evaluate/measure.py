"""The measurement: how far the tip strayed, according to the encoder logs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from armeval.errors import Finding, InputError
from armeval.evaluate.align import align_by_targets, align_to_plan, path_tolerance
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.run_errors import RunErrors, run_errors, runs_frame
from armeval.evaluate.threads import spread
from armeval.evaluate.tracks import track
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Run, Trial
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

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
    """

    trial: str
    runs: tuple[RunErrors, ...]
    trajectory: Trajectory
    findings: tuple[Finding, ...] = ()

    @property
    def warnings(self) -> tuple[str, ...]:
        """What to bear in mind, the blind spot of every such measurement first."""
        return (BLIND_SPOT, *(str(finding) for finding in self.findings))

    def run(self, name: str) -> RunErrors:
        """Find a run by its name.

        Raises
        ------
        InputError
            If there is none of that name.
        """
        for run in self.runs:
            if run.name == name:
                return run
        have = ", ".join(f"`{run.name}`" for run in self.runs)
        raise InputError(f"there is no measured run `{name}`", f"runs with logs: {have}")

    def to_frame(self) -> pd.DataFrame:
        """One row a run and kind of error, lengths in metres."""
        return runs_frame(self.runs)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document."""
        return document("measure", self.trial, self.warnings, {"runs": [run.to_document() for run in self.runs]})

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
        If no run has logs, a log is shorter than the trajectory or its targets do not follow the path.
    """
    if not any(run.laps for run in trial.runs):
        raise InputError("no run has logs", "add `logs` to a [[run]]", file=trial.source)
    if trajectory is None:
        trajectory = plan_trial(trial)
    plan = trajectory
    jobs = [(run, log) for run in trial.runs for log in run.laps]

    def held(job: tuple[Run, JointLog]) -> tuple[LapTrack, tuple[Finding, ...]]:
        return lap_track(trial.arm, plan, *job)

    laps = spread(held, jobs, what="measuring laps", progress=progress)
    runs = [
        run_errors([lap for (of, _), (lap, _) in zip(jobs, laps, strict=True) if of is run], plan)
        for run in trial.runs
        if run.laps
    ]
    findings = (*trial.findings, *(finding for _, found in laps for finding in found))
    return Measurement(trial=trial.title, runs=tuple(runs), trajectory=plan, findings=findings)


def lap_track(arm: Arm, trajectory: Trajectory, run: Run, log: JointLog) -> tuple[LapTrack, tuple[Finding, ...]]:
    """Hold one log against the plan, with what is doubtful about it.

    Raises
    ------
    InputError
        If the log is shorter than the trajectory or its targets do not follow the path.
    """
    logged = log.target is not None
    alignment = align_by_targets(log, trajectory, arm) if logged else align_to_plan(log, trajectory, arm)
    part = alignment.part
    time = log.time[part]
    if log.target is not None:
        target, arc = log.target[part], None
    else:
        planned = time - alignment.time_offset
        target = np.column_stack([np.interp(planned, trajectory.time, column) for column in trajectory.joint.T])
        arc = np.interp(planned, trajectory.time, trajectory.arc)
    known = log.resolution if log.resolution is not None else np.zeros(len(arm.joints))
    found = track(
        arm,
        trajectory,
        run=run.name,
        compensated=run.compensated,
        source="log",
        lap=log.lap,
        file=log.source or None,
        time=time,
        angle=log.angle[part],
        target=target,
        arc=arc,
        torque=None if log.torque is None else log.torque[part],
        resolution=np.where(known > 0.0, known, arm.resolution),
        time_offset=alignment.time_offset,
        targets_logged=logged,
    )
    findings = list(alignment.findings)
    if logged:
        findings.extend(_targets_on_path(found, trajectory))
    return found, tuple(findings)


def _targets_on_path(lap: LapTrack, trajectory: Trajectory) -> Sequence[Finding]:
    """Check that logged targets follow the planned path from its start to its end."""
    tolerance = path_tolerance(trajectory)
    square = np.zeros(len(lap.arc))
    for axis in range(3):
        on_path = np.interp(lap.arc, trajectory.path_arc, trajectory.path[:, axis])
        square += (lap.target_tip[:, axis] - on_path) ** 2
    place = f"lap {lap.lap}"
    farthest = float(np.sqrt(square.max()))
    if np.sqrt(np.median(square)) > 10.0 * tolerance or farthest > 100.0 * tolerance:
        at = float(lap.time[int(np.argmax(square))])
        raise InputError(
            f"the logged targets do not follow the planned path: they stray up to {1e3 * farthest:.4g} mm from it, "
            f"the farthest at {at:.6g} s",
            "check the trial's path, the unit and order of the target columns; several laps in one file need a `lap` column",
            file=lap.file or "",
            place=place,
        )
    short = trajectory.length - float(lap.arc[-1])
    if lap.arc[0] > 2.0 * tolerance or short > 2.0 * tolerance:
        raise InputError(
            f"the logged targets run from {lap.arc[0]:.4g} m to {lap.arc[-1]:.4g} m of a path of "
            f"{trajectory.length:.4g} m",
            "log the whole lap",
            file=lap.file or "",
            place=place,
        )
    if farthest > tolerance:
        return [
            Finding(
                "warning",
                f"the logged targets lie up to {1e3 * farthest:.3g} mm off the planned path",
                "check that the trial's path is the one that was run",
                lap.file or "",
                place,
            )
        ]
    return []
