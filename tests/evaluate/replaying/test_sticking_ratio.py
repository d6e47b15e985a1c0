"""The sticking ratio against stiffness and slope worked out by other routes."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.linalg import eigh

from armeval.evaluate.plan import plan
from armeval.evaluate.replaying.quasistatic import quasistatic
from armeval.evaluate.replaying.sticking_ratio import sticking_ratio
from armeval.kernels.chain import tip_jacobians
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.trial import Compensation
from tests.planar_arms import harmonic_map, planar_arm

ORDER, AMPLITUDE = 84, 0.02
SPRING = np.array([60.0, 40.0, 30.0])


def circle(radius=0.05, center=(0.25, 0.1)):
    turn = np.linspace(0.0, 2.0 * np.pi, 241)
    return np.column_stack([center[0] + radius * np.cos(turn), center[1] + radius * np.sin(turn), np.zeros(len(turn))])


def planned(arm, points=None):
    return plan(arm, PlannedPath(circle() if points is None else points), feed=0.05, acceleration=1.0)


def two_joints(**settings):
    return planar_arm((0.2, 0.2), (0.3, 0.9), **{"cog_map": harmonic_map(ORDER, AMPLITUDE), **settings})


def test_each_sample_has_the_largest_slope_that_the_joint_passes():
    arm = two_joints(stiffness=1.5)
    trajectory = planned(arm)
    ratio = sticking_ratio(arm, trajectory)
    for joint in range(2):
        q = trajectory.joint[:, joint]
        for k in range(0, len(q) - 1, 371):
            way = np.linspace(q[k], q[k + 1], 50)
            truth = (-AMPLITUDE * ORDER * np.cos(ORDER * way)).max() / 1.5
            # Looked up at the table's entries around the way, 84 x 2 pi / 16384 = 0.03 of a period's radian apart.
            assert truth - 1e-9 <= ratio.ratio[k, joint] <= truth + 0.033 * AMPLITUDE * ORDER / 1.5


def test_the_envelope_is_the_largest_slope_within_half_a_pitch():
    arm = two_joints(stiffness=1.5)
    ratio = sticking_ratio(arm, planned(arm))
    assert ratio.envelope == pytest.approx(ORDER * AMPLITUDE / 1.5, rel=1e-3)


def test_a_joint_that_rests_where_the_cogging_falls_cannot_stick():
    # The shoulder turns by less than a tenth of a pitch about a detent; the envelope still warns.
    arm = planar_arm((0.2,), (0.0,), stiffness=1.0, cog_map=harmonic_map(ORDER, AMPLITUDE))
    path = PlannedPath(np.array([[-0.003], [0.003]]), space="joint", time=np.array([0.0, 1.0]))
    ratio = sticking_ratio(arm, plan(arm, path))
    assert ratio.max[0] < 0.0
    assert ratio.envelope.max() == pytest.approx(1.68, rel=1e-3)


def test_compensation_lowers_it_by_what_it_takes_off_the_slope():
    arm = two_joints(stiffness=1.5)
    compensation = Compensation(table_bins=1024, map_noise=0.0)
    ratio = sticking_ratio(arm, planned(arm), compensated=True, compensation=compensation)
    # The slope left by straight lines between bins: at most that of the map less its mean over a bin, at a bin's end.
    angle = np.pi * ORDER / 1024
    chord = np.sin(angle) / angle
    bound = AMPLITUDE * ORDER * np.sqrt((np.cos(angle) - chord) ** 2 + np.sin(angle) ** 2) / 1.5
    assert ratio.compensated
    assert 0.8 * bound < ratio.max.max() <= 1.02 * bound


def tip_arm(lengths=(0.2, 0.2), rest=(0.3, 0.9), **settings):
    servo = Servo("tip_impedance", 1e-3, tip_stiffness=tuple(SPRING))
    return planar_arm(lengths, rest, servo=servo, cog_map=harmonic_map(ORDER, AMPLITUDE), **settings)


def test_under_a_tip_spring_it_is_the_generalised_eigenvalue():
    arm = tip_arm()
    trajectory = planned(arm)
    ratio = sticking_ratio(arm, trajectory)
    J = tip_jacobians(arm.chain.arrays, np.ascontiguousarray(trajectory.joint))
    for k in range(100, len(trajectory.time) - 1, 700):
        K = J[k].T @ np.diag(SPRING) @ J[k]
        slope = ORDER * AMPLITUDE * np.eye(2)
        # The pull that balances the cogging, at most 0.02 N m at levers of 0.1 to 0.3 m, changes K by under 2 %.
        assert ratio.arm_envelope[k] == pytest.approx(eigh(slope, K, eigvals_only=True)[-1], rel=0.05)
        assert ratio.envelope[k] == pytest.approx(ORDER * AMPLITUDE / np.diag(K), rel=0.05)
    assert np.all(ratio.arm_envelope >= ratio.envelope.max(axis=1) - 1e-9)


def test_the_arm_falls_only_where_its_ratio_says_that_it_can():
    firm, soft = tip_arm(), tip_arm()
    firm = replace(firm, servo=replace(firm.servo, tip_stiffness=10.0 * SPRING))
    for arm, sticks in ((firm, False), (soft, True)):
        trajectory = planned(arm)
        assert (sticking_ratio(arm, trajectory).arm_envelope.max() > 1.0) == sticks
        assert bool(quasistatic(arm, trajectory).jumps) == sticks


def test_motions_that_leave_the_tip_where_it_is_are_left_out():
    arm = tip_arm((0.2, 0.15, 0.1), (0.3, 0.9, 0.4))
    ratio = sticking_ratio(arm, planned(arm))
    assert np.all(np.isfinite(ratio.arm))


def test_weight_that_is_not_fed_forward_counts_as_stiffness():
    # A pendulum of 0.5 kg at 0.1 m: hanging down (here: along gravity) its weight adds m g l, upright it takes it away.
    servo = Servo("joint_pd", 1e-3, gravity_feedforward=False)
    arm = planar_arm((0.2,), (0.0,), servo=servo, stiffness=2.0, cog_map=harmonic_map(ORDER, AMPLITUDE))
    chain = replace(arm.chain, mass=np.array([0.5]), center=np.array([[0.1, 0.0, 0.0]]))
    arm = replace(arm, chain=chain, gravity=np.array([9.81, 0.0, 0.0]))
    weight = 0.5 * 9.81 * 0.1

    def envelope_at(angle):
        path = PlannedPath(np.array([[angle - 0.01], [angle + 0.01]]), space="joint", time=np.array([0.0, 1.0]))
        return sticking_ratio(arm, plan(arm, path)).envelope[500, 0]

    assert envelope_at(0.0) == pytest.approx(1.68 / (2.0 + weight), rel=2e-3)
    assert envelope_at(np.pi) == pytest.approx(1.68 / (2.0 - weight), rel=2e-3)
    upright = replace(arm, drives=(replace(arm.drives[0], stiffness=0.3),))
    path = PlannedPath(np.array([[np.pi - 0.01], [np.pi + 0.01]]), space="joint", time=np.array([0.0, 1.0]))
    assert np.all(np.isinf(sticking_ratio(upright, plan(upright, path)).arm_envelope))


def test_without_stiffness_any_rising_torque_makes_the_joint_run_away():
    arm = two_joints(stiffness=0.0)
    assert np.all(np.isinf(sticking_ratio(arm, planned(arm)).max))


def test_the_document_names_joint_largest_ratio_and_place():
    arm = two_joints(stiffness=1.5)
    trajectory = planned(arm)
    ratio = sticking_ratio(arm, trajectory)
    entries = ratio.to_document()
    assert [entry["joint"] for entry in entries] == ["shoulder", "elbow"]
    for i, entry in enumerate(entries):
        assert entry["max"] == pytest.approx(1.68 / 1.5, rel=1e-3)
        assert ratio.ratio[np.argmin(np.abs(ratio.arc - entry["at_m"])), i] == entry["max"]
    assert list(ratio.to_frame()["joint"]) == ["shoulder", "elbow"]
    assert ratio.arm_document()["max"] == pytest.approx(1.68 / 1.5, rel=1e-3)
