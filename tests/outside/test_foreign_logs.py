"""Joint logs of a real planar two-joint arm, made by others' firmware, read with nothing but a ``[columns]`` table.

Source: dfki-ric-underactuated-lab/double_pendulum at 1e8544e67f3da72a51ee52fbbb278e131ce2a43f, BSD 3-Clause, (c) 2022
DFKI RIC Underactuated Robotics Lab, files ``acrobot_ilqr_fricComp_0*.csv``: four runs of one motion of an arm in a
vertical plane, links of 0.2 and 0.3 m, q1 = 0 hanging down and q2 relative to the first link; about 500 samples a
second with a jittered clock, 3.815e-4 rad an encoder step. Skipped unless the environment variable ARMEVAL_OPEN_DATA
names the folder that holds ``two-joint-arm``.
"""

from __future__ import annotations

import os
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np
import pytest

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.files.joint_logs.log_file import read_joint_log, write_joint_log
from armeval.kernels.chain import tip_positions
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.joint_log import JointLog
from armeval.model.servo import Servo

FOLDER = os.environ.get("ARMEVAL_OPEN_DATA")
FILES = sorted((Path(FOLDER or ".") / "two-joint-arm").glob("acrobot_ilqr_fricComp_0*.csv"))
pytestmark = pytest.mark.skipif(not FOLDER or len(FILES) != 4, reason="ARMEVAL_OPEN_DATA holds no two-joint-arm")

COLUMNS = {
    "time": "time [s]",
    "pos_meas1": "shoulder.angle [rad]",
    "pos_meas2": "elbow.angle [rad]",
    "tau_con1": "shoulder.torque [N*m]",
    "tau_con2": "elbow.torque [N*m]",
}
UPPER, LOWER = 0.2, 0.3


@pytest.fixture(scope="module")
def arm() -> Arm:
    """The two-joint arm; at zero it hangs along -y of its base, and it turns about z."""
    placement = np.tile(np.eye(3, 4), (2, 1, 1))
    placement[0, :2, :2] = [[0.0, 1.0], [-1.0, 0.0]]
    placement[1, 0, 3] = UPPER
    chain = Chain(
        ("shoulder", "elbow"),
        np.zeros(2, dtype=bool),
        placement,
        np.array([0.523, 0.626]),
        np.zeros((2, 3)),
        np.tile(1e-3 * np.eye(3), (2, 1, 1)),
        np.array([LOWER, 0.0, 0.0]),
        np.full(2, -np.inf),
        np.full(2, np.inf),
    )
    drives = tuple(Drive(joint, gear_ratio=6.0, encoder_on="joint") for joint in chain.joints)
    return Arm("two-joint arm", chain, drives, Servo("joint_pd", 2e-3), np.array([0.0, -9.81, 0.0]))


def read(file: Path, arm: Arm) -> tuple[JointLog, list[str]]:
    heard = Findings()
    (log,) = read_joint_log(file, arm, columns=COLUMNS, findings=heard)
    return log, [str(finding) for finding in heard.found]


def raw(file: Path) -> FloatArray:
    """Time, q1, q2, tau1, tau2 as another reader gives them."""
    return np.loadtxt(file, delimiter=",", skiprows=1, usecols=(0, 1, 2, 9, 10))


def planar_tip(q1: FloatArray, q2: FloatArray) -> FloatArray:
    """Tip of a planar two-link arm that hangs at zero, written by hand."""
    return np.stack([UPPER * np.sin(q1) + LOWER * np.sin(q1 + q2), -UPPER * np.cos(q1) - LOWER * np.cos(q1 + q2)], 1)


@pytest.mark.parametrize("file", FILES, ids=[file.stem[-2:] for file in FILES])
def test_a_foreign_log_needs_a_columns_table_only(file: Path, arm: Arm) -> None:
    log, told = read(file, arm)
    numbers = raw(file)
    assert np.array_equal(log.time, numbers[:, 0])
    assert np.array_equal(log.angle, numbers[:, 1:3])
    assert log.torque is not None
    assert np.array_equal(log.torque, numbers[:, 3:])
    assert told == []


@pytest.mark.parametrize("file", FILES, ids=[file.stem[-2:] for file in FILES])
def test_a_jittered_clock_makes_no_gaps(file: Path, arm: Arm) -> None:
    log, _ = read(file, arm)
    assert log.period == pytest.approx(2.0e-3, rel=1e-3)
    assert np.diff(log.time).max() > 1.5 * log.period
    assert log.segments == (slice(0, len(log.time)),)


@pytest.mark.parametrize("file", FILES, ids=[file.stem[-2:] for file in FILES])
def test_the_tip_is_where_the_planar_arm_has_it(file: Path, arm: Arm) -> None:
    log, _ = read(file, arm)
    tips = tip_positions(arm.chain.arrays, log.angle)
    np.testing.assert_allclose(tips[:, :2], planar_tip(*raw(file)[:, 1:3].T), atol=1e-12)
    assert not tips[:, 2].any()


def test_the_four_runs_end_upright_and_near_each_other(arm: Arm) -> None:
    ends = np.array([tip_positions(arm.chain.arrays, read(file, arm)[0].angle[-1:])[0] for file in FILES])
    assert (ends[:, 1] > 0.98 * (UPPER + LOWER)).all()
    spread = np.linalg.norm(ends - ends.mean(axis=0), axis=1).max()
    by_hand = np.array([planar_tip(*raw(file)[-1:, 1:3].T)[0] for file in FILES])
    assert spread == pytest.approx(np.linalg.norm(by_hand - by_hand.mean(axis=0), axis=1).max(), rel=1e-9)
    assert 1e-3 < spread < 20e-3


def test_several_logs_read_at_once_are_the_same(arm: Arm) -> None:
    with ThreadPoolExecutor(4) as pool:
        together = list(pool.map(lambda file: read(file, arm)[0], FILES * 2))
    for file, log in zip(FILES * 2, together, strict=True):
        assert np.array_equal(log.angle, raw(file)[:, 1:3])


def test_a_foreign_log_survives_writing(tmp_path: Path, arm: Arm) -> None:
    logs = [read(file, arm)[0] for file in FILES]
    write_joint_log(logs, tmp_path / "all.parquet", arm.joints)
    for one, other in zip(logs, read_joint_log(tmp_path / "all.parquet", arm), strict=True):
        assert np.array_equal(one.time, other.time)
        assert np.array_equal(one.angle, other.angle)
