"""The slow prediction as a result: what it adds to the kernels."""

import json
from dataclasses import replace

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.plan import plan
from armeval.evaluate.replaying.quasistatic import quasistatic
from armeval.kernels.chain import tip_positions
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.trial import Compensation
from tests.planar_arms import harmonic_map, planar_arm

ORDER, AMPLITUDE = 84, 0.02
SQUARE = np.array([[0.2, 0.1, 0], [0.3, 0.1, 0], [0.3, 0.2, 0], [0.2, 0.2, 0], [0.2, 0.1, 0]])


def two_joints(**settings):
    settings = {"cog_map": harmonic_map(ORDER, AMPLITUDE), "stiffness": 1.0, "coulomb_friction": 0.003, **settings}
    return planar_arm((0.2, 0.2), (0.3, 0.9), **settings)


def planned(arm):
    return plan(arm, PlannedPath(SQUARE), feed=0.05, acceleration=1.0)


def test_a_jump_is_listed_with_place_size_and_what_it_does_to_the_tip():
    arm = two_joints()
    trajectory = planned(arm)
    result = quasistatic(arm, trajectory)
    assert len(result.jumps) > 10
    assert [jump.time for jump in result.jumps] == sorted(jump.time for jump in result.jumps)
    for jump in result.jumps:
        k = int(np.argmin(np.abs(trajectory.time - jump.time)))
        joint = arm.joints.index(jump.joint)
        assert jump.arc == trajectory.arc[k]
        before, after = result.angle[k - 1], result.angle[k]
        # The joint also slides a little before and after the jump within the same period.
        assert after[joint] - before[joint] == pytest.approx(jump.size, abs=0.02)
        lever = tip_positions(arm.chain.arrays, np.stack([after, after + jump.size * np.eye(2)[joint]]))
        assert jump.release == pytest.approx(np.linalg.norm(lever[1] - lever[0]), rel=0.05)


def test_compensation_takes_the_jumps_away():
    arm = two_joints()
    trajectory = planned(arm)
    bare = quasistatic(arm, trajectory)
    smoothed = quasistatic(arm, trajectory, compensated=True, compensation=Compensation(map_noise=0.0))
    assert bare.jumps
    assert not smoothed.jumps
    assert smoothed.tracking_rms < 0.5 * bare.tracking_rms


def test_without_cogging_friction_and_load_the_tip_is_on_its_target():
    arm = two_joints(cog_map=None, coulomb_friction=0.0)
    result = quasistatic(arm, planned(arm))
    assert result.tracking.max() < 1e-9
    assert result.deviation.max() < 1e-9


def test_deviation_is_never_more_than_the_tracking_error():
    result = quasistatic(two_joints(), planned(two_joints()))
    assert np.all(result.deviation <= result.tracking + 1e-12)
    assert result.deviation_rms < result.tracking_rms


@pytest.mark.parametrize("law", ["joint_pd", "tip_impedance"])
def test_weight_that_is_not_fed_forward_pulls_the_joint_down(law):
    servo = Servo(law, 1e-3, gravity_feedforward=False, tip_stiffness=(500.0, 500.0, 500.0))
    arm = planar_arm((0.2,), (0.0,), servo=servo, stiffness=20.0)
    arm = replace(
        arm,
        chain=replace(arm.chain, mass=np.array([0.5]), center=np.array([[0.1, 0.0, 0.0]])),
        gravity=np.array([0.0, -9.81, 0.0]),
    )
    path = PlannedPath(np.array([[0.0], [0.2]]), space="joint", time=np.array([0.0, 1.0]))
    result = quasistatic(arm, plan(arm, path))
    held = 0.5 * 9.81 * 0.1 * np.cos(result.target[:, 0]) / 20.0  # 500 N/m at 0.2 m is 20 N m/rad
    assert result.deflection[:, 0] == pytest.approx(-held, rel=5e-3)


def test_a_prediction_under_a_tip_spring_lists_its_falls():
    arm = replace(two_joints(), servo=Servo("tip_impedance", 1e-3, tip_stiffness=(30.0, 30.0, 30.0)))
    trajectory = planned(arm)
    result = quasistatic(arm, trajectory)
    assert result.jumps
    for jump in result.jumps:
        k = int(np.argmin(np.abs(trajectory.time - jump.time)))
        assert jump.release == pytest.approx(np.linalg.norm(result.tip[k] - result.tip[k - 1]), rel=1e-9)


def test_a_joint_without_stiffness_is_refused():
    arm = two_joints(stiffness=0.0)
    with pytest.raises(InputError, match="no stiffness"):
        quasistatic(arm, planned(arm))


def test_frame_and_document_hold_the_jumps():
    arm = two_joints()
    result = quasistatic(arm, planned(arm))
    assert len(result.to_frame()) == len(result.jumps)
    document = json.loads(json.dumps(result.to_document()))
    assert document["tracking_rms_m"] == pytest.approx(result.tracking_rms)
    assert len(document["jumps"]) == len(result.jumps)
    calm = quasistatic(two_joints(cog_map=None), planned(arm))
    assert list(calm.to_frame().columns) == list(result.to_frame().columns)
