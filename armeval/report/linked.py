"""The data behind the linked view: what a mark on the path needs to know, in a few hundred places."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.document import JsonValue, plain
from armeval.evaluate.lap_track import LapTrack
from armeval.kernels.chain import skeletons
from armeval.report.answers import Answers
from armeval.report.path_figures import along
from armeval.report.shown import ShownRun

PLACES = 600


def linked_data(answers: Answers, runs: Sequence[ShownRun]) -> dict[str, JsonValue]:
    """Give the data of the linked view.

    Returns
    -------
    Lengths in millimetres, angles in degrees, times in seconds, rounded to what can be read off: path length ``s``,
    planned ``time``, ``arm`` (base, joints and tip as x, y, z), ``joints`` (target angles), for each run the ``error``
    as its strip draws it and the ``tip`` of its first lap, and the ``regions`` of all runs, the first run's first.
    """
    plan, arm = answers.trajectory, answers.trial.arm
    s = plan.length * (np.arange(PLACES) + 0.5) / PLACES
    at = np.minimum(np.searchsorted(plan.arc, s), len(plan.arc) - 1)
    angles = plan.joint[at]
    return {
        "s": _rounded(1e3 * s, 1),
        "time": _rounded(plan.time[at], 2),
        "arm": _rounded(1e3 * skeletons(arm.chain.arrays, np.ascontiguousarray(angles)).reshape(PLACES, -1), 1),
        "joints": [
            {
                "name": joint,
                "unit": "mm" if arm.chain.prismatic[i] else "deg",
                "target": _rounded(1e3 * angles[:, i] if arm.chain.prismatic[i] else np.degrees(angles[:, i]), 1),
            }
            for i, joint in enumerate(arm.joints)
        ],
        "runs": [
            {
                "name": run.name,
                "mark": "before" if run.stroke.linestyle == "-" else "after",
                "error": _rounded(np.interp(s, *_known(run, plan.length)), 2),
                "tip": _rounded(1e3 * _tip(run.errors.tracks[0], s), 2),
            }
            for run in runs
        ],
        "regions": [
            {
                "run": k,
                "joint": region.joint,
                "start": round(1e3 * region.start_arc, 1),
                "end": round(1e3 * region.end_arc, 1),
            }
            for k, run in enumerate(runs)
            for region in run.sticking.regions
        ],
    }


def _known(run: ShownRun, length: float) -> tuple[FloatArray, FloatArray]:
    """Path length [mm turned metres] and error [mm] of the bins that have samples."""
    error = along(run, length)
    known = np.isfinite(error.rms)
    return error.arc[known], 1e3 * error.rms[known]


def _tip(track: LapTrack, s: FloatArray) -> FloatArray:
    at = np.minimum(np.searchsorted(track.arc, s), len(track.arc) - 1)
    return track.tip[at]


def _rounded(values: FloatArray, digits: int) -> JsonValue:
    return plain(np.round(values, digits) + 0.0)
