"""Two routes to the same answer: the replay with inertia and servo periods, run slowly, and the prediction without."""

import numpy as np
import pytest

from armeval.evaluate.plan import plan
from armeval.evaluate.replaying.quasistatic import quasistatic
from armeval.evaluate.replaying.replay import replay
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from tests.planar_arms import harmonic_map, planar_arm

LINE = np.array([[0.25, 0.1, 0.0], [0.27, 0.12, 0.0], [0.25, 0.1, 0.0]])


def arm_of(amplitude, servo=None, **settings):
    return planar_arm(
        (0.2, 0.2),
        (0.3, 0.9),
        servo=servo,
        stiffness=1.5,
        damping=0.03,
        rotor_inertia=1e-4,
        coulomb_friction=0.002,
        cog_map=harmonic_map(84, amplitude),
        **settings,
    )


def both(arm, substeps=4):
    trajectory = plan(arm, PlannedPath(LINE), feed=0.004, acceleration=1.0)
    moved = replay(arm, trajectory, compensated=False, substeps=substeps)
    return quasistatic(arm, trajectory), moved


@pytest.mark.parametrize(
    "servo",
    [
        None,
        Servo("tip_impedance", 1e-3, tip_stiffness=(80.0, 80.0, 80.0), tip_damping=(0.7, 0.7, 0.7)),
    ],
    ids=["joint_pd", "tip_impedance"],
)
def test_without_jumps_the_slow_replay_stands_where_the_prediction_says(servo):
    arm = arm_of(0.008, servo)
    slow, moved = both(arm)
    assert not slow.jumps
    scale = np.abs(slow.deflection).max(axis=0)
    # Damping drags by D v / K on top: at 4 mm/s well under a tenth of the deflection.
    assert np.all(np.abs(moved.angle - slow.angle)[500:].max(axis=0) < 0.15 * scale)


def test_a_strongly_damped_replay_jumps_where_the_prediction_says():
    arm = arm_of(0.04)
    slow, moved = both(arm)
    assert len(slow.jumps) >= 4
    # Between jumps both stand in the same well: a well apart would be 2 pi / 84 = 0.075 rad.
    apart = np.abs(moved.angle - slow.angle).max(axis=1)
    assert np.mean(apart < 0.01) > 0.9
