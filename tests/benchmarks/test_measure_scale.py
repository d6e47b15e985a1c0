"""How long measuring a long log takes, beside pyarrow reading the same samples; run with ``--benchmark-only -s``.

Three joints with targets at 1 kHz, six minutes and an hour, as one lap and as laps of a minute; ten hours where the
environment variable ARMEVAL_LONG_LOGS is set. Time and memory are printed, not asserted: they depend on the machine.
The motion is made up, the arm is a shipped one. Memory is what measuring adds, plus the log's own arrays.
"""

from __future__ import annotations

import os
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pyarrow as pa
import pytest
from pyarrow import csv

from armeval.evaluate.measure import measure
from armeval.evaluate.measuring.tracks import tips
from armeval.files.arm_file import read_arm
from armeval.files.new_trial import robot_folder
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.model.planned_path import PlannedPath
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Run, Trial

ROWS = [360_000, 3_600_000, *([36_000_000] if os.environ.get("ARMEVAL_LONG_LOGS") else [])]
MINUTE = 60_000

_PEAK = """
import gc, sys
from pathlib import Path
from tests.benchmarks.test_measure_scale import long_trial, memory
from armeval.evaluate.measure import measure
trial, trajectory = long_trial(2000, 2)
measure(trial, trajectory=trajectory)
trial, trajectory = long_trial(int(sys.argv[1]), int(sys.argv[2]))
gc.collect()
Path("/proc/self/clear_refs").write_text("5")  # forgets the largest size so far
before = memory("VmRSS")
measure(trial, trajectory=trajectory)
print(memory("VmHWM") - before)
"""


def memory(kind: str) -> int:
    """Resident size of this process now or at most [bytes], as Linux tells it."""
    lines = Path("/proc/self/status").read_text().splitlines()
    return 1024 * sum(int(line.split()[1]) for line in lines if line.startswith(kind))


def wavy_plan(arm: Arm, samples: int) -> Trajectory:
    """A smooth motion about the arm's rest angles; its path is a polyline of 4000 points in 40 stretches."""
    share = np.linspace(0.0, 1.0, samples)
    joint = arm.rest + np.column_stack(
        [size * np.sin(2.0 * np.pi * turns * share) for size, turns in ((0.4, 3), (0.15, 7), (0.2, 11))]
    )
    tip = tips(arm, joint)
    kept = np.unique(np.linspace(0, samples - 1, min(samples, 4000)).astype(int))
    path_arc = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(tip[kept], axis=0), axis=1))])
    arc = np.interp(np.arange(samples), kept, path_arc)
    still = np.zeros_like(joint)
    corners = path_arc[np.linspace(0, len(kept) - 1, 41).astype(int)]
    return Trajectory(1e-3 * np.arange(samples), arc, tip, joint, still, still, tip[kept], path_arc, corners)


def read_only(values: np.ndarray) -> np.ndarray:
    """Logs share read-only arrays, as readers make them."""
    values.setflags(write=False)
    return values


def long_trial(rows: int, laps: int) -> tuple[Trial, Trajectory]:
    arm = read_arm(robot_folder("tern") / "arm.toml")
    samples = rows // laps
    plan = wavy_plan(arm, samples)
    step = arm.resolution
    logs = []
    for lap in range(laps):
        wander = np.cumsum(np.random.default_rng(lap).standard_normal((samples, 3)), axis=0)
        wander -= np.linspace(0.0, 1.0, samples)[:, None] * wander[-1]
        angle = np.round((plan.joint + 0.01 * wander / np.abs(wander).max()) / step) * step
        logs.append(JointLog(read_only(1e-3 * np.arange(samples)), read_only(angle), plan.joint, lap=lap + 1))
    path = PlannedPath(plan.tip[:2], time=plan.time[:2])
    return Trial("made up", arm, path, (Run("bare", False, tuple(logs)),)), plan


@pytest.mark.parametrize("in_laps", [False, True], ids=["one lap", "laps of a minute"])
@pytest.mark.parametrize("rows", ROWS, ids=lambda rows: f"{rows / 1e6:g}M")
def test_measuring_beside_pyarrow_reading(
    benchmark: pytest.FixtureRequest, tmp_path: Path, rows: int, in_laps: bool
) -> None:
    laps = rows // MINUTE if in_laps else 1
    trial, plan = long_trial(rows, laps)
    columns = {"time": np.arange(rows) * 1e-3}
    for i, joint in enumerate(trial.arm.joints):
        columns[f"{joint}.angle"] = np.concatenate([log.angle[:, i] for log in trial.runs[0].laps]).round(6)
        columns[f"{joint}.target"] = np.tile(plan.joint[:, i], laps).round(6)
    csv.write_csv(pa.table(columns), tmp_path / "log.csv")
    measure(trial, trajectory=plan)
    alone, ours = [], []
    for _ in range(3):
        start = time.perf_counter()
        csv.read_csv(tmp_path / "log.csv")
        alone.append(time.perf_counter() - start)
        start = time.perf_counter()
        measure(trial, trajectory=plan)
        ours.append(time.perf_counter() - start)
    command = [sys.executable, "-c", _PEAK, str(rows), str(laps)]
    peak = int(subprocess.run(command, capture_output=True, check=True).stdout)
    arrays, ratio = 7 * 8 * rows, min(ours) / min(alone)
    peak += arrays
    print(  # noqa: T201  (the table that this file is run for)
        f"\n{rows:>11,} rows in {laps:>3} laps: pyarrow reading {min(alone):6.2f} s, measuring {min(ours):6.2f} s, "
        f"ratio {ratio:.2f}, {1e9 * min(ours) / rows:.0f} ns a row, peak {peak / arrays:.2f} times the arrays"
    )
    benchmark.extra_info.update(ratio=ratio, peak_over_arrays=peak / arrays)  # type: ignore[attr-defined]
    found = benchmark.pedantic(measure, (trial,), {"trajectory": plan}, rounds=1)  # type: ignore[attr-defined]
    assert found.runs[0].tracking.samples > 0.99 * rows - 2 * laps
