"""Which samples of a log are the lap, and what time offset stands between log and plan.

A log with targets carries its own timing: the lap runs from the first motion of the targets along the path to the last.
A log without targets is held against the plan at the one time offset that minimises the RMS of the tracking error,
looked for over all offsets at which the log holds the whole lap, so that a lesser minimum half a stretch away, or where
the path crosses itself or comes back, is never taken for the best.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.optimize import minimize_scalar
from scipy.signal import correlate

from armeval.arrays import BoolArray, FloatArray, IntArray
from armeval.errors import Finding, InputError
from armeval.evaluate.measuring.tracks import tips
from armeval.evaluate.planning.path_progress import path_progress
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.model.trajectory import Trajectory

_MISSING_PERIODS = 3.0
_CANDIDATES = 5
_REFINE_SAMPLES = 20_000
_UNLIKE = 0.1


@dataclass(frozen=True)
class Alignment:
    """The samples of a log that make up the lap.

    Attributes
    ----------
    part
        The lap's samples.
    time_offset
        Log time [s] at which the planned trajectory begins; 0 where the targets were logged.
    findings
        What is doubtful about it.
    """

    part: slice
    time_offset: float
    findings: tuple[Finding, ...] = ()


def align_to_plan(log: JointLog, trajectory: Trajectory, arm: Arm) -> Alignment:
    """Find the time offset of a log without targets.

    All offsets are tried on a coarse grid at once (the sum of squared distances is two energies less twice a cross
    correlation, computed by FFT); the best few minima are then refined on the log's own samples.

    Raises
    ------
    InputError
        If the log is shorter than the trajectory.
    """
    period = float(np.median(np.diff(log.time)))
    span = float(log.time[-1] - log.time[0])
    missing = trajectory.duration - span
    if missing > _MISSING_PERIODS * period:
        raise InputError(
            f"the log lasts {span:.4g} s and the trajectory {trajectory.duration:.4g} s: {missing:.4g} s are missing",
            "log a whole lap, or correct feed and acceleration in the trial",
            file=log.source,
            place=f"lap {log.lap}",
        )
    ends = (float(log.time[0]), float(log.time[-1] - trajectory.duration))
    earliest, latest = min(ends), max(ends)

    picked = np.unique(np.linspace(0, len(log.time) - 1, min(len(log.time), _REFINE_SAMPLES)).astype(np.int64))
    time, tip = log.time[picked], tips(arm, log.angle[picked])

    def mean_square(offset: float) -> float:
        planned = time - offset
        inside = (planned >= 0.0) & (planned <= trajectory.duration)
        return _mean_square(tip[inside], planned[inside], trajectory)

    step, scanned = _scan(log, trajectory, arm, earliest, latest, period)
    found = []
    for candidate in _lowest_minima(scanned):
        about = earliest + candidate * step
        low, high = max(earliest, about - step), min(latest, about + step)
        best = about
        if high > low:
            best = float(minimize_scalar(mean_square, bounds=(low, high), method="bounded", options={"xatol": 1e-7}).x)
            best = min((best, low, high), key=mean_square)
        found.append((mean_square(best), best))
    found.sort()
    lowest, offset = found[0]

    findings = []
    for other, elsewhere in found[1:]:
        if other < 1.5 * lowest and abs(elsewhere - offset) > 0.05 * trajectory.duration:
            findings.append(
                Finding(
                    "warning",
                    f"the log fits the plan at {offset:.4g} s (RMS {1e3 * np.sqrt(lowest):.3g} mm) and nearly as well "
                    f"at {elsewhere:.4g} s (RMS {1e3 * np.sqrt(other):.3g} mm); the first is used",
                    "give several laps in one file a `lap` column, or log the targets",
                    log.source,
                    f"lap {log.lap}",
                )
            )
            break
    extent = float(np.linalg.norm(np.ptp(trajectory.path, axis=0)))
    if np.sqrt(lowest) > _UNLIKE * extent:
        findings.append(
            Finding(
                "warning",
                f"at its best the log lies {1e3 * np.sqrt(lowest):.3g} mm (RMS) off a path of {1e3 * extent:.3g} mm",
                "check sign and index of the encoders, and that the trial's path is the one that was run",
                log.source,
                f"lap {log.lap}",
            )
        )
    first = int(np.searchsorted(log.time, offset - 1e-9))
    last = int(np.searchsorted(log.time, offset + trajectory.duration + 1e-9, side="right"))
    return Alignment(slice(first, last), offset, tuple(findings))


def align_by_targets(log: JointLog) -> Alignment:
    """Take the lap of a log with targets to be from the first motion of the targets to the last.

    Raises
    ------
    InputError
        If the targets stand still.
    """
    assert log.target is not None
    first, last = _motion(log.target, 0, len(log.time))
    if last <= first:
        raise InputError("the targets never move", "log a whole lap", file=log.source, place=f"lap {log.lap}")
    return Alignment(slice(first, last), 0.0)


def align_on_path(log: JointLog, trajectory: Trajectory, arm: Arm) -> Alignment:
    """Take the lap of a log with targets to be their longest stay on the planned path.

    What :func:`align_by_targets` finds may hold the way to the path's start and from its end; it is left out here, and
    a warning says so.
    """
    assert log.target is not None
    first, last = _motion(log.target, 0, len(log.time))
    begin, end = _motion(log.target, *_on_path(log.target, first, last, trajectory, arm))
    if end <= begin:
        return Alignment(slice(first, last), 0.0)
    left_out = float(log.time[begin] - log.time[first] + log.time[last - 1] - log.time[end - 1])
    finding = Finding(
        "warning",
        f"{left_out:.4g} s of motion to or from the planned path are left out",
        "nothing, if the arm moved to the start of the path or away from its end; give several laps in one file a "
        "`lap` column",
        log.source,
        f"lap {log.lap}",
    )
    return Alignment(slice(begin, end), 0.0, (finding,))


def path_tolerance(trajectory: Trajectory) -> float:
    """Distance [m] beyond which a target does not lie on the planned path: 0.5 % of its extent, at least 0.5 mm.

    Targets interpolated in joint space, or a curve cut into other chords, stay well within it.
    """
    extent = float(np.linalg.norm(np.ptp(trajectory.path, axis=0)))
    return max(5e-4, 5e-3 * extent)


def _motion(target: FloatArray, first: int, last: int) -> tuple[int, int]:
    """From the sample before the first change of a target to the one after the last, looked for from both ends.

    Begin and end are the same where the target stands still.
    """

    def changes(begin: int, end: int) -> IntArray:
        return np.flatnonzero((target[begin + 1 : end] != target[begin : end - 1]).any(axis=1))

    begin, end, size = first, max(first, last), 1024
    while begin < last - 1:
        found = changes(begin, min(begin + size, last))
        if len(found):
            begin += int(found[0])
            break
        begin = min(begin + size, last) - 1
        size *= 2
    else:
        return last, last
    size = 1024
    while end > begin + 1:
        found = changes(max(end - size, begin), end)
        if len(found):
            return begin, max(end - size, begin) + int(found[-1]) + 2
        end = max(end - size, begin) + 1
        size *= 2
    return begin, end


def _scan(
    log: JointLog, trajectory: Trajectory, arm: Arm, earliest: float, latest: float, period: float
) -> tuple[float, FloatArray]:
    """Mean squared distance at every offset of a grid from the earliest to the latest; the grid's step first."""
    span = float(log.time[-1] - log.time[0])
    stretch = float(np.median(np.diff(np.interp(trajectory.corners, trajectory.arc, trajectory.time))))
    # Fine against a stretch, so that no minimum falls between two offsets; no finer than the log; at most a million.
    step = max(period, min(span / 16384, trajectory.duration / 1024, stretch / 8), span / (1 << 20))
    lags = int(np.ceil((latest - earliest) / step - 1e-9))
    step = float((latest - earliest) / lags) if lags else step
    count = max(2, int(np.floor(trajectory.duration / step + 1e-9)) + 1)
    at = earliest + step * np.arange(count + lags, dtype=np.float64)
    angle = np.column_stack([np.interp(at, log.time, column) for column in log.angle.T])
    logged, planned = (
        tips(arm, angle),
        _interpolate(step * np.arange(count, dtype=np.float64), trajectory.time, trajectory.tip),
    )
    middle = planned.mean(axis=0)
    logged, planned = logged - middle, planned - middle
    energy: FloatArray = np.concatenate([[0.0], np.cumsum(np.einsum("ij,ij->i", logged, logged))])
    total = energy[count:] - energy[:-count] + np.sum(planned**2)
    for axis in range(3):
        total -= 2.0 * correlate(logged[:, axis], planned[:, axis], mode="valid", method="fft")
    return step, total / count


def _lowest_minima(values: FloatArray) -> list[int]:
    """Places of the lowest local minima, the ends counting as such."""
    padded = np.concatenate([[np.inf], values, [np.inf]])
    minima = np.flatnonzero((values <= padded[:-2]) & (values <= padded[2:]))
    return [int(place) for place in minima[np.argsort(values[minima], kind="stable")][:_CANDIDATES]]


def _mean_square(tip: FloatArray, planned: FloatArray, trajectory: Trajectory) -> float:
    """Mean squared distance of tips from their targets at planned times."""
    if len(tip) == 0:
        return float("inf")
    return float(np.mean(np.sum((tip - _interpolate(planned, trajectory.time, trajectory.tip)) ** 2, axis=1)))


def _interpolate(at: FloatArray, time: FloatArray, values: FloatArray) -> FloatArray:
    """Columns of values at other times."""
    return np.column_stack([np.interp(at, time, column) for column in values.T])


def _on_path(target: FloatArray, first: int, last: int, trajectory: Trajectory, arm: Arm) -> tuple[int, int]:
    """Longest row of samples between first and last whose target lies on the path, judged on some thousand of them."""
    tolerance = path_tolerance(trajectory)

    def to_point(point: FloatArray, samples: slice) -> FloatArray:
        return np.asarray(np.linalg.norm(tips(arm, target[samples]) - point, axis=1))

    stride = max(1, (last - first) // 4000)
    tip = tips(arm, target[first:last:stride])
    distance, _ = path_progress(tip, np.zeros(len(tip)), trajectory, window=np.inf)
    on = np.concatenate([[False], distance <= tolerance, [False]])
    edges = np.flatnonzero(on[1:] != on[:-1])
    if len(edges) == 0:
        return first, last
    starts, ends = edges[::2], edges[1::2]
    longest = int(np.argmax(ends - starts))
    begin, end = first + int(starts[longest]) * stride, first + (int(ends[longest]) - 1) * stride + 1
    # The lap proper begins where the target, within the tolerance of the path's start, is first nearest to it.
    forward, backward = slice(begin, end, stride), slice(end - 1, begin - 1 if begin else None, -stride)
    skipped, near = _first_row(to_point(trajectory.path[0], forward) <= tolerance)
    head = slice(min(begin + skipped * stride, end - 1), min(begin + (skipped + near + 1) * stride, end))
    skipped, near = _first_row(to_point(trajectory.path[-1], backward) <= tolerance)
    tail = slice(max(end - (skipped + near + 1) * stride, begin), max(end - skipped * stride, begin + 1))
    start = head.start + int(np.argmin(to_point(trajectory.path[0], head)))
    return start, tail.stop - int(np.argmin(to_point(trajectory.path[-1], tail)[::-1]))


def _first_row(flags: BoolArray) -> tuple[int, int]:
    """Where the first row of true flags begins, and how long it is; nothing of all where none is true."""
    if not flags.any():
        return 0, 0
    begin = int(np.argmax(flags))
    rest = flags[begin:]
    return begin, len(rest) if rest.all() else int(np.argmin(rest))
