"""One log of a lap held against its plan."""

from __future__ import annotations

import numpy as np

from armeval.errors import Finding, InputError
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.align import Alignment, align_by_targets, align_on_path, align_to_plan, path_tolerance
from armeval.evaluate.measuring.tracks import track
from armeval.kernels.polyline import distances_at
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Run

_NOT_THE_PATH = 4.0
"""Targets farther off than so many tolerances follow another path."""


def log_track(arm: Arm, trajectory: Trajectory, run: Run, log: JointLog) -> tuple[LapTrack, tuple[Finding, ...]]:
    """Hold one log against the plan, with what is doubtful about it.

    Raises
    ------
    InputError
        If the log is shorter than the trajectory or its targets do not follow the path.
    """
    if log.target is None:
        alignment = align_to_plan(log, trajectory, arm)
        return _track(arm, trajectory, run, log, alignment), alignment.findings
    alignment = align_by_targets(log)
    found = _track(arm, trajectory, run, log, alignment)
    try:
        return found, _targets_on_path(found, trajectory)
    except InputError as fault:
        # Perhaps only the way to and from the path is in the way.
        again = align_on_path(log, trajectory, arm)
        if again.part == alignment.part:
            raise
        found = _track(arm, trajectory, run, log, again)
        try:
            return found, (*again.findings, *_targets_on_path(found, trajectory))
        except InputError:
            raise fault from None


def _track(arm: Arm, trajectory: Trajectory, run: Run, log: JointLog, alignment: Alignment) -> LapTrack:
    """Hold the aligned part of a log against the plan."""
    part = alignment.part
    time = log.time[part]
    arc = None
    if log.target is not None:
        target = log.target[part]
    else:
        planned = time - alignment.time_offset
        target = np.column_stack([np.interp(planned, trajectory.time, column) for column in trajectory.joint.T])
        arc = np.interp(planned, trajectory.time, trajectory.arc)
        target.setflags(write=False)
        arc.setflags(write=False)
    known = log.resolution if log.resolution is not None else np.zeros(len(arm.joints))
    return track(
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
        targets_logged=log.target is not None,
    )


def _targets_on_path(lap: LapTrack, trajectory: Trajectory) -> tuple[Finding, ...]:
    """Check that logged targets follow the planned path from its start to its end."""
    tolerance = path_tolerance(trajectory)
    missed = distances_at(lap.target_tip, lap.arc, trajectory.path, trajectory.path_arc)
    which = int(np.argmax(missed))
    distance = float(missed[which])
    place = f"lap {lap.lap}"
    if distance > _NOT_THE_PATH * tolerance:
        raise InputError(
            f"the logged targets do not follow the planned path: they stray up to {1e3 * distance:.4g} mm from it, "
            f"the farthest at {lap.time[which]:.6g} s",
            "check the trial's path, and unit and order of the target columns; give several laps in one file a `lap` "
            "column",
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
    if distance > tolerance:
        return (
            Finding(
                "warning",
                f"the logged targets lie up to {1e3 * distance:.3g} mm off the planned path",
                "check that the trial's path is the one that was run",
                lap.file or "",
                place,
            ),
        )
    return ()
