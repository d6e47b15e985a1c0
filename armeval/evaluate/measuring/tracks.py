"""From joint angles and targets to a lap track: the tip, its target, how far it strays and how far it trails."""

from __future__ import annotations

from typing import Literal

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.planning.path_progress import follow, path_progress
from armeval.evaluate.threads import chunks, spread
from armeval.kernels.chain import tip_positions
from armeval.model.arm import Arm
from armeval.model.trajectory import Trajectory


def track(
    arm: Arm,
    trajectory: Trajectory,
    *,
    run: str,
    compensated: bool,
    source: Literal["log", "prediction"],
    lap: int,
    file: str | None,
    time: FloatArray,
    angle: FloatArray,
    target: FloatArray,
    arc: FloatArray | None = None,
    speed: FloatArray | None = None,
    torque: FloatArray | None = None,
    resolution: FloatArray | None = None,
    time_offset: float = 0.0,
    targets_logged: bool = True,
) -> LapTrack:
    """Hold one lap against its plan.

    The tip comes from the joint angles by forward kinematics, so link flex and wrong link lengths do not show. The lag
    is the arc length of the target minus that of the nearest point of the path, looked for near the target.

    Parameters
    ----------
    arm, trajectory
        What moved, and along what.
    run, compensated, source, lap, file, time_offset, targets_logged
        As in :class:`armeval.evaluate.lap_track.LapTrack`.
    time
        Shape (k,) [s], rising.
    angle, target
        Shape (k, n) [rad or m].
    arc
        Shape (k,) [m]. Arc length of the target; None: found by following the tip targets along the path.
    speed, torque
        Shape (k, n) [rad/s], [N m]; None where not known.
    resolution
        Shape (n,) [rad or m]; None: the arm's encoders for a log, exact for a prediction.
    """
    angle, target = np.ascontiguousarray(angle), np.ascontiguousarray(target)
    if resolution is None:
        resolution = arm.resolution if source == "log" else np.zeros(len(arm.joints))
    # Read-only arrays are taken over by the track as they are, and kernels need no second version for them.
    tip, target_tip = _sealed(tips(arm, angle)), _sealed(tips(arm, target))
    path = trajectory.path, trajectory.path_arc
    arc = follow(target_tip, *path) if arc is None else np.ascontiguousarray(arc).view()
    deviation, lag = progress_along(tip, _sealed(arc), trajectory)
    return LapTrack(
        run=run,
        compensated=compensated,
        source=source,
        lap=lap,
        file=file,
        time=time,
        arc=arc,
        angle=angle,
        target=target,
        tip=tip,
        target_tip=target_tip,
        deviation=_sealed(deviation),
        lag=_sealed(lag),
        resolution=resolution,
        speed=speed,
        torque=torque,
        time_offset=time_offset,
        targets_logged=targets_logged,
    )


def tips(arm: Arm, angle: FloatArray) -> FloatArray:
    """Tip positions of many poses: angle of shape (k, n) gives (k, 3) [m] in the base frame."""
    chain = arm.chain.arrays
    found = np.empty((len(angle), 3))

    def place(part: slice) -> None:
        found[part] = tip_positions(chain, angle[part])

    spread(place, chunks(len(angle)))
    return found


def progress_along(tip: FloatArray, arc: FloatArray, trajectory: Trajectory) -> tuple[FloatArray, FloatArray]:
    """Path deviation and lag, shape (k,) each [m], of tips of shape (k, 3) with targets at arc lengths (k,)."""
    deviation, lag = np.empty(len(arc)), np.empty(len(arc))

    def hold(part: slice) -> None:
        deviation[part], nearest = path_progress(tip[part], arc[part], trajectory)
        np.subtract(arc[part], nearest, out=lag[part])

    spread(hold, chunks(len(arc)))
    return deviation, lag


def _sealed(values: FloatArray) -> FloatArray:
    """Make an array of our own read-only."""
    values.setflags(write=False)
    return values
