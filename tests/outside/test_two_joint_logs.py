"""Open logs of a two-joint arm against planar two-link kinematics written down by hand.

Four runs of one motion, GitHub dfki-ric-underactuated-lab/double_pendulum at 1e8544e6, BSD 3-Clause, (c) 2022 DFKI RIC
Underactuated Robotics Lab; links of 0.2 m and 0.3 m, q1 = 0 hangs down, q2 relative to link 1. The clock is jittered
(2 to 6.6 ms), there are no logged targets. Found through the environment variable ARMEVAL_OPEN_DATA.
"""

import os
from pathlib import Path

import numpy as np
import pytest

from armeval.evaluate.measure import measure
from armeval.evaluate.measuring.tracks import tips
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.joint_log import JointLog
from armeval.model.servo import Servo
from armeval.model.trajectory import Trajectory
from tests.slides import trial_of

FOLDER = os.environ.get("ARMEVAL_OPEN_DATA", "")
pytestmark = pytest.mark.skipif(not FOLDER, reason="ARMEVAL_OPEN_DATA is not set")
SHARE = slice(100, 4600)


def by_hand(q):
    """Tip in the x-z plane of the base, z up."""
    x = 0.2 * np.sin(q[:, 0]) + 0.3 * np.sin(q[:, 0] + q[:, 1])
    z = -0.2 * np.cos(q[:, 0]) - 0.3 * np.cos(q[:, 0] + q[:, 1])
    return np.column_stack([x, np.zeros(len(q)), z])


def two_joints():
    """The same arm as a chain: both axes along -y of the base, links along -z at rest."""
    # Columns are the joint frame's axes in the base: x, z, and the turning axis -y.
    first = np.array([[1.0, 0.0, 0.0], [0.0, 0.0, -1.0], [0.0, 1.0, 0.0]])
    placement = np.zeros((2, 3, 4))
    placement[0, :, :3] = first
    placement[1, :, :3] = np.eye(3)
    placement[1, :, 3] = [0.0, -0.2, 0.0]
    chain = Chain(
        joints=("shoulder", "elbow"),
        prismatic=np.zeros(2, dtype=bool),
        placement=placement,
        mass=np.ones(2),
        center=np.zeros((2, 3)),
        inertia=np.tile(1e-3 * np.eye(3), (2, 1, 1)),
        tip=np.array([0.0, -0.3, 0.0]),
        lower=np.full(2, -np.inf),
        upper=np.full(2, np.inf),
    )
    drives = tuple(Drive(name) for name in chain.joints)
    return Arm("two joints", chain, drives, Servo("joint_pd", 2e-3), np.array([0.0, 0.0, -9.81]))


@pytest.fixture(scope="module")
def runs():
    found = []
    for number in range(1, 5):
        file = Path(FOLDER) / "two-joint-arm" / f"acrobot_ilqr_fricComp_0{number}.csv"
        table = np.loadtxt(file, delimiter=",", skiprows=1, usecols=(0, 1, 2))
        found.append((table[:, 0], table[:, 1:]))
    return found


def as_plan(time, q):
    """One of the runs, taken for the plan of the others."""
    at = np.arange(time[SHARE][0], time[SHARE][-1], 2e-3)
    joint = np.column_stack([np.interp(at, time, column) for column in q.T])
    tip = by_hand(joint)
    kept = [0]
    for i in range(1, len(tip)):
        if np.linalg.norm(tip[i] - tip[kept[-1]]) > 1e-5:
            kept.append(i)
    path = tip[kept]
    path_arc = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])
    arc = np.interp(np.arange(len(tip)), kept, path_arc)
    still = np.zeros_like(joint)
    return Trajectory(at - at[0], arc, tip, joint, still, still, path, path_arc, path_arc[[0, -1]]), at[0]


def test_tips_agree_with_kinematics_written_by_hand(runs):
    arm = two_joints()
    for _, q in runs:
        np.testing.assert_allclose(tips(arm, q), by_hand(q), atol=1e-15)


def test_the_spread_from_run_to_run_is_that_of_the_best_time_offset_found_by_trying_all(runs):
    plan, begin = as_plan(*runs[1])
    logs = tuple(JointLog(time, q, lap=i + 1) for i, (time, q) in enumerate(runs))
    found = measure(trial_of(two_joints(), plan, bare=logs), trajectory=plan).runs[0]
    for (time, q), lap in zip(runs, found.laps, strict=True):
        tip = by_hand(q)
        best = np.inf
        for offset in np.arange(0.0, time[-1] - plan.duration, 1e-3):
            inside = (time >= offset) & (time <= offset + plan.duration)
            planned = np.column_stack([np.interp(time[inside] - offset, plan.time, column) for column in plan.tip.T])
            rms = np.sqrt(np.mean(np.sum((tip[inside] - planned) ** 2, axis=1)))
            if rms < best:
                best, at = rms, offset
        assert lap.tracking.rms == pytest.approx(best, rel=0.01, abs=5e-5)
        assert lap.time_offset == pytest.approx(at, abs=2e-3)
    # The plan's own run differs from it by the chords of the plan's grid only.
    assert found.laps[1].tracking.rms < 1e-4
    assert found.laps[1].time_offset == pytest.approx(begin, abs=1e-4)
    assert all(1e-3 < found.laps[i].tracking.rms < 12e-3 for i in (0, 2, 3))
