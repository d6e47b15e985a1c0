"""Small trials made of model objects, with logs from a replay of a slightly different arm: quick to report on."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from armeval.evaluate.plan import plan_trial
from armeval.evaluate.replaying.replay import replay
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.joint_log import JointLog
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.trial import Compensation, Run, Trial
from tests.planar_arms import harmonic_map

ZIGZAG = ((0.24, -0.04, 0.0), (0.24, 0.04, 0.0), (0.20, 0.04, 0.0), (0.20, 0.0, 0.0))


def small_arm(
    *, joints: Sequence[str] = ("shoulder", "elbow"), cogging: float = 0.06, friction: float = 0.004, order: int = 28
) -> Arm:
    """A planar arm 0.3 m long; by default its joints stick, order times cogging over stiffness being 1.7."""
    n = len(joints)
    placement = np.zeros((n, 3, 4))
    placement[:, :, :3] = np.eye(3)
    placement[1:, 0, 3] = 0.3 / n
    chain = Chain(
        joints=tuple(joints),
        prismatic=np.zeros(n, dtype=bool),
        placement=placement,
        mass=np.full(n, 0.05),
        center=np.tile([0.15 / n, 0.0, 0.0], (n, 1)),
        inertia=np.tile(1e-5 * np.eye(3), (n, 1, 1)),
        tip=np.array([0.3 / n, 0.0, 0.0]),
        lower=np.full(n, -3.0),
        upper=np.full(n, 3.0),
    )
    drives = tuple(
        Drive(
            joint,
            stiffness=1.0,
            damping=0.03,
            torque_limit=2.0,
            rotor_inertia=2e-5,
            coulomb_friction=friction,
            encoder_counts=65536,
            slots=4,
            poles=7,
            rest_angle=0.6 if i % 2 else -0.3,
            cog_map=harmonic_map(order, cogging) if cogging else None,
        )
        for i, joint in enumerate(joints)
    )
    return Arm("zigzag arm", chain, drives, Servo("joint_pd", 1e-3, speed_cutoff=100.0), np.zeros(3))


def small_trial(
    arm: Arm | None = None,
    *,
    title: str = "Zigzag",
    runs: Sequence[tuple[str, bool]] = (("bare", False), ("smoothed", True)),
    laps: int = 3,
    targets: bool = True,
    path: Sequence[tuple[float, float, float]] = ZIGZAG,
    feed: float = 0.08,
) -> Trial:
    """A trial of the arm along a zigzag; ``laps`` of 0 leaves the logs out."""
    arm = arm or small_arm()
    trial = Trial(
        title=title,
        arm=arm,
        path=PlannedPath(np.array(path)),
        runs=tuple(Run(name, compensated) for name, compensated in runs),
        feed=feed,
        acceleration=1.0,
        compensation=Compensation(table_bins=256, index_error=0.004),
    )
    logged = tuple(
        replace(run, laps=tuple(_lap(trial, run, lap, targets) for lap in range(1, laps + 1))) for run in trial.runs
    )
    return replace(trial, runs=logged)


def _lap(trial: Trial, run: Run, lap: int, targets: bool) -> JointLog:
    rubs = replace(
        trial.arm,
        drives=tuple(
            replace(drive, coulomb_friction=(1.2 + 0.1 * lap) * drive.coulomb_friction, static_friction=None)
            for drive in trial.arm.drives
        ),
    )
    plan = plan_trial(trial)
    moved = replay(rubs, plan, compensated=run.compensated, compensation=trial.compensation, seed=lap)
    counts = np.where(trial.arm.resolution > 0.0, trial.arm.resolution, 1.0)
    return JointLog(
        time=moved.time,
        angle=np.where(trial.arm.resolution > 0.0, np.rint(moved.angle / counts) * counts, moved.angle),
        target=plan.joint if targets else None,
        torque=moved.torque if targets else None,
        resolution=trial.arm.resolution,
        lap=lap,
        source=f"{run.name}-{lap}.csv",
    )
