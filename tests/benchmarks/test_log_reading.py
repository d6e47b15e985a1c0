"""How long a joint log takes to read, beside pyarrow alone reading the same file; run with ``--benchmark-only -s``.

Three joints with targets at 1 kHz: six minutes and an hour, and ten hours where the environment variable
ARMEVAL_LONG_LOGS is set. The ratio and the memory are printed, not asserted: they depend on the machine.
"""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from pyarrow import csv

from armeval.errors import Findings
from armeval.files.joint_logs.log_file import read_joint_log, write_joint_log
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.joint_log import JointLog
from armeval.model.servo import Servo

ROWS = [360_000, 3_600_000, *([36_000_000] if os.environ.get("ARMEVAL_LONG_LOGS") else [])]
JOINTS = ("turn", "lift", "reach")

_PEAK = """
import sys
from pathlib import Path
from tests.benchmarks.test_log_reading import invented_arm, most_memory
from armeval.errors import Findings
from armeval.files.joint_logs.log_file import read_joint_log
import pyarrow.csv
before = most_memory()
(log,) = read_joint_log(Path(sys.argv[1]), invented_arm(), findings=Findings())
print(most_memory() - before)
"""


def most_memory() -> int:
    """Largest resident size of this process so far [bytes], as Linux tells it; 0 elsewhere."""
    status = Path("/proc/self/status")
    lines = status.read_text().splitlines() if status.exists() else []
    return 1024 * sum(int(line.split()[1]) for line in lines if line.startswith("VmHWM"))


def invented_arm() -> Arm:
    chain = Chain(
        JOINTS,
        np.zeros(3, dtype=bool),
        np.tile(np.eye(3, 4), (3, 1, 1)),
        np.ones(3),
        np.zeros((3, 3)),
        np.tile(np.eye(3), (3, 1, 1)),
        np.array([0.1, 0.0, 0.0]),
        np.full(3, -3.0),
        np.full(3, 3.0),
    )
    drives = tuple(Drive(joint, encoder_counts=16384) for joint in JOINTS)
    return Arm("invented", chain, drives, Servo("joint_pd", 1e-3), np.array([0.0, 0.0, -9.80665]))


def rounded(values: np.ndarray, digits: int) -> np.ndarray:
    return np.round(values, digits)


@pytest.fixture(scope="module", params=ROWS, ids=lambda rows: f"{rows / 1e6:g}M")
def log_file(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Iterator[tuple[Path, int]]:
    """A log with the digits that firmware writes, and its number of rows."""
    rows: int = request.param
    file = tmp_path_factory.mktemp("logs") / "long.csv"
    clock = np.arange(rows) / 1000.0
    target = np.stack([np.sin(clock), 0.5 * np.sin(2.0 * clock), 0.2 * np.cos(3.0 * clock)], axis=1)
    angle = target + 0.01 * np.random.default_rng(2).normal(size=target.shape)
    write_joint_log(JointLog(clock, rounded(angle, 6), rounded(target, 6)), file, JOINTS)
    yield file, rows
    file.unlink()


def test_reading_beside_pyarrow_alone(benchmark: pytest.FixtureRequest, log_file: tuple[Path, int]) -> None:
    file, rows = log_file
    arm = invented_arm()
    alone, ours = [], []
    for _ in range(3):
        start = time.perf_counter()
        csv.read_csv(file)
        alone.append(time.perf_counter() - start)
        start = time.perf_counter()
        read_joint_log(file, arm, findings=Findings())
        ours.append(time.perf_counter() - start)
    peak = int(subprocess.run([sys.executable, "-c", _PEAK, str(file)], capture_output=True, check=True).stdout)
    arrays = 7 * 8 * rows
    ratio = min(ours) / min(alone)
    print(  # noqa: T201  (the table that this file is run for)
        f"\n{rows:>11,} rows: pyarrow alone {min(alone):6.2f} s, log {min(ours):6.2f} s, ratio {ratio:.2f}, "
        f"{1e9 * min(ours) / rows:.0f} ns a row, peak {peak / arrays:.2f} times the arrays"
    )
    benchmark.extra_info.update(ratio=ratio, peak_over_arrays=peak / arrays)  # type: ignore[attr-defined]
    (log,) = benchmark.pedantic(  # type: ignore[attr-defined]
        read_joint_log, (file, arm), {"findings": Findings()}, rounds=2
    )
    assert len(log.time) == rows
