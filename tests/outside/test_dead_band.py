"""Dry friction leaves a position loop a dead band of friction over stiffness to either side.

Common practice, no source: a joint with Coulomb friction Fc under a stiffness K rests anywhere within Fc / K of its
target. 0.02 N m over 20 N m/rad is 1 mrad, and 0.3 mm at a lever of 0.3 m. With static friction Fs above Fc a slowly
dragged joint slips by (Fs - Fc) / K at a time, if nothing carries it on.
"""

import numpy as np
import pytest

from armeval.evaluate.plan import plan
from armeval.evaluate.replaying.quasistatic import quasistatic
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from tests.planar_arms import planar_arm


def turn(arm, *angles):
    path = PlannedPath(np.array(angles)[:, None], space="joint", time=np.arange(float(len(angles))))
    return plan(arm, path)


def test_a_dragged_joint_trails_by_friction_over_stiffness():
    arm = planar_arm((0.3,), (0.0,), stiffness=20.0, coulomb_friction=0.02)
    result = quasistatic(arm, turn(arm, 0.0, 0.1, -0.1))
    assert result.deflection[500, 0] == pytest.approx(-1e-3)
    assert result.deflection[1900, 0] == pytest.approx(1e-3)
    assert result.tracking[500] == pytest.approx(0.3e-3, rel=1e-6)


def test_after_a_reversal_it_rests_until_the_band_is_crossed():
    arm = planar_arm((0.3,), (0.0,), stiffness=20.0, coulomb_friction=0.02)
    trajectory = turn(arm, 0.0, 0.1, -0.1)
    angle = quasistatic(arm, trajectory).angle[:, 0]
    back = (trajectory.time > 1.0) & (trajectory.joint[:, 0] > 0.1 - 1.99e-3)
    assert back.sum() > 5
    assert np.ptp(angle[back]) < 1e-15
    assert angle[back][0] == pytest.approx(0.099)


def test_static_friction_above_coulomb_friction_makes_slips_of_their_difference():
    arm = planar_arm((0.3,), (0.0,), stiffness=20.0, coulomb_friction=0.02, static_friction=0.03)
    trajectory = turn(arm, 0.0, 0.1)
    result = quasistatic(arm, trajectory)
    moves = np.diff(result.angle[:, 0])
    assert moves[moves > 0.0] == pytest.approx(0.01 / 20.0, rel=1e-6)
    assert result.deflection.min() == pytest.approx(-0.03 / 20.0, abs=np.diff(trajectory.joint[:, 0]).max())
    assert result.jumps == ()


def test_a_tip_spring_has_a_dead_band_too():
    servo = Servo("tip_impedance", 1e-3, tip_stiffness=(200.0, 200.0, 200.0))
    arm = planar_arm((0.3,), (0.0,), servo=servo, coulomb_friction=0.02)
    result = quasistatic(arm, turn(arm, 0.0, 0.1))
    # 0.02 N m at a lever of 0.3 m is 0.0667 N, over 200 N/m a third of a millimetre.
    assert result.tracking[900] == pytest.approx(0.02 / 0.3 / 200.0, rel=1e-4)
