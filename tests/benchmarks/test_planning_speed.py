"""How long planning, path progress and the slow predictions take; run with ``pytest --benchmark-only``."""

import numpy as np
import pytest

from armeval.evaluate.plan import plan
from armeval.evaluate.planning.path_progress import follow, path_progress
from armeval.evaluate.replaying.quasistatic import quasistatic
from armeval.evaluate.replaying.sticking_ratio import sticking_ratio
from armeval.kernels.inverse import first_pose, poses_along
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from tests.planar_arms import harmonic_map, planar_arm, planar_chain

TURN = np.linspace(0.0, 2.0 * np.pi, 361)
CIRCLE = np.column_stack([0.25 + 0.05 * np.cos(TURN), 0.1 + 0.05 * np.sin(TURN), 0.0 * TURN])


def arm_of(law="joint_pd"):
    servo = Servo(law, 1e-3, tip_stiffness=(60.0, 60.0, 60.0))
    return planar_arm(
        (0.2, 0.15, 0.1), (0.3, 0.9, 0.4), servo=servo, coulomb_friction=0.003, cog_map=harmonic_map(84, 0.02)
    )


def planned(arm):
    return plan(arm, PlannedPath(CIRCLE), feed=0.0125, acceleration=1.0)


@pytest.mark.parametrize("lengths", [(0.2, 0.2), (0.2, 0.15, 0.1), (0.1,) * 4])
def test_inverse_kinematics_of_25000_targets(benchmark, lengths):
    turn = np.linspace(0.0, 2.0 * np.pi, 25_000)
    targets = np.column_stack([0.25 + 0.05 * np.cos(turn), 0.1 + 0.05 * np.sin(turn), 0.0 * turn])
    chain, rest = planar_chain(lengths).arrays, np.array([0.3, 0.9, 0.4, 0.2])[: len(lengths)]
    start = first_pose(chain, targets[0], rest, 1e-6)
    _, left = benchmark(poses_along, chain, targets, rest, start)
    assert left.max() < 1e-9


def test_a_trajectory_of_25000_periods(benchmark):
    trajectory = benchmark(planned, arm_of())
    assert len(trajectory.time) > 25_000


@pytest.mark.parametrize("samples", [360_000, 3_600_000])
def test_following_targets(benchmark, samples):
    trajectory = planned(arm_of())
    s = np.linspace(0.0, trajectory.length, samples)
    points = np.column_stack([np.interp(s, trajectory.path_arc, column) for column in trajectory.path.T])
    found = benchmark(follow, points, trajectory.path, trajectory.path_arc)
    assert np.abs(found - s).max() < 1e-6


@pytest.mark.parametrize("samples", [360_000, 3_600_000])
def test_path_deviation(benchmark, samples):
    trajectory = planned(arm_of())
    s = np.linspace(0.0, trajectory.length, samples)
    late = np.maximum(s - 0.003 * np.sin(100.0 * s) ** 2, 0.0)
    tip = np.column_stack([np.interp(late, trajectory.path_arc, column) for column in trajectory.path.T])
    deviation, _ = benchmark(path_progress, tip, s, trajectory)
    assert deviation.max() < 1e-9


@pytest.mark.parametrize("law", ["joint_pd", "tip_impedance"])
@pytest.mark.parametrize("question", [sticking_ratio, quasistatic])
def test_slow_predictions_of_25000_periods(benchmark, question, law):
    arm = arm_of(law)
    trajectory = planned(arm)
    assert benchmark(question, arm, trajectory).joints == arm.joints
