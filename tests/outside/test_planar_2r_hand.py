"""A planar arm of two links in a hand: force, apparent mass and isotropy by the formulas of robotics textbooks.

Two links of 0.2 m at 30 and 60 degrees, worked out by hand from F = J^-T tau: a torque of 0.02 N m at the shoulder is
(0, 0.115470) N at the tip, at the elbow (-0.1, -0.173205) N, and torques whose squares add up to 0.02^2 are at most
0.225175 N. Unit links with unit masses at their ends: set-up of Lynch & Park 2017, section 8.1.3. The arm with masses
of 0.3 and 0.2 kg: textbook closed form (Spong; Craig, from memory), agreed by MuJoCo and pinocchio. Isotropy: Salisbury
& Craig 1982 (from memory).
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from armeval.evaluate.feeling.hand_force import hand_force
from armeval.evaluate.feeling.hand_motion import planned_motion
from armeval.evaluate.feeling.ripple import ripple, ripple_covariance
from armeval.evaluate.feeling.tip_abilities import tip_abilities
from armeval.evaluate.feeling.tip_directions import tip_directions
from armeval.evaluate.plan import plan
from armeval.model.planned_path import PlannedPath
from tests.planar_arms import harmonic_map, planar_arm

POSE = np.radians([[30.0, 60.0]])
ARM = planar_arm((0.2, 0.2), (0.5, 1.0), rotor_inertia=1e-4, torque_limit=0.02, encoder_counts=4096.0)


@pytest.mark.parametrize(("torque", "force"), [((0.02, 0.0), (0.0, 0.115470)), ((0.0, 0.02), (-0.1, -0.173205))])
def test_joint_torque_is_met_as_the_textbook_s_force(torque, force):
    met = tip_directions(ARM, POSE).torque_to_force[0] @ torque
    assert met == pytest.approx([*force, 0.0], abs=5e-7)


def test_no_joint_feels_what_is_across_the_plane():
    assert np.abs(tip_directions(ARM, POSE).blind) == pytest.approx([0.0, 0.0, 1.0])


def test_the_worst_direction_is_the_smallest_singular_value_s():
    tables = tuple(
        np.column_stack([0.02 * np.sqrt(2.0) * np.sin(84 * a), 0 * a]) for a in [np.arange(4096) * 2 * np.pi / 4096] * 2
    )
    covariance = ripple_covariance(ARM, tip_directions(ARM, POSE).torque_to_force, tables)[0]
    assert np.sqrt(np.linalg.eigvalsh(covariance)[-1]) == pytest.approx(0.225175, abs=5e-7)


def test_torque_limits_hold_most_along_the_lever_that_is_longest():
    # |J_1| = 0.346410, |J_2| = 0.2: the shoulder gives way first, at 0.02 / 0.346410 N.
    assert tip_abilities(ARM, POSE).continuous_force == pytest.approx(0.02 / 0.3464102)


def test_friction_holds_against_the_corners_of_its_torques():
    # J^-T (+-0.02, +-0.02): (-0.1, -0.057735) and (0.1, 0.288675); the nearest edge is the torque limits' of above.
    rubbing = planar_arm((0.2, 0.2), (0.5, 1.0), rotor_inertia=1e-4, coulomb_friction=0.02)
    found = tip_abilities(rubbing, POSE)
    assert found.friction_most == pytest.approx(np.hypot(0.1, 0.2886751))
    assert found.friction_least == pytest.approx(0.02 / 0.3464102)


def test_one_count_a_joint_moves_the_tip_by_the_larger_diagonal():
    # Columns (-0.3, 0.173205) and (-0.2, 0): their sum is the longer, (-0.5, 0.173205).
    count = 2.0 * np.pi / 4096.0
    assert tip_abilities(ARM, POSE).step == pytest.approx(count * np.hypot(0.5, 0.173205), rel=1e-6)


def with_end_masses(second):
    arm = planar_arm((1.0, 1.0), (0.5, 1.0))
    chain = replace(arm.chain, mass=np.ones(2), center=np.array([[1.0, 0.0, 0.0]] * 2))
    return replace(arm, chain=chain), np.radians([[0.0, second]])


def test_the_tip_of_point_masses_weighs_what_lynch_and_park_say():
    square, bent = (tip_abilities(*with_end_masses(angle)) for angle in (90.0, 150.0))
    assert (square.mass_least[0], square.mass_most[0]) == pytest.approx((1.0, 2.0))
    # [4 -1.732051; -1.732051 2] has the eigenvalues 1 and 5.
    assert (bent.mass_least[0], bent.mass_most[0]) == pytest.approx((1.0, 5.0))


def test_the_tip_of_a_real_arm_weighs_what_the_closed_form_says():
    arm = planar_arm((0.2, 0.18), (0.5, 1.0))
    inertia = np.zeros((2, 3, 3))
    inertia[:, 2, 2] = (1.2e-3, 7e-4)
    chain = replace(
        arm.chain,
        mass=np.array([0.3, 0.2]),
        center=np.array([[0.1, 0.0, 0.0], [0.09, 0.0, 0.0]]),
        inertia=inertia,
    )
    found = tip_abilities(replace(arm, chain=chain), np.radians([[30.0, 60.0]]))
    assert (found.mass_least[0], found.mass_most[0]) == pytest.approx((0.0706882, 0.364785), rel=2e-6)


def test_isotropy_is_where_salisbury_and_craig_have_it():
    root_two = planar_arm((0.2 * np.sqrt(2.0), 0.2), (0.5, 1.0), rotor_inertia=1e-4)
    assert tip_abilities(root_two, np.radians([[17.0, 135.0]])).isotropy == pytest.approx(1.0)
    elbow = np.radians(np.arange(100.0, 160.0, 0.01))
    found = tip_abilities(ARM, np.column_stack([0.0 * elbow, elbow])).isotropy
    assert 1.0 / found.max() == pytest.approx(1.618034, abs=1e-6)
    assert np.degrees(elbow[found.argmax()]) == pytest.approx(131.8103, abs=0.01)


def test_a_detent_comes_as_often_as_the_motor_turns_times_its_order():
    # Order 84, 0.1 m/s at 0.2 m: 84 * 0.5 rad/s / 2 pi = 6.68451 Hz, and 66.8451 a metre.
    arm = planar_arm((0.2,), (0.0,), rotor_inertia=1e-4, cog_map=harmonic_map(84, 0.02))
    path = PlannedPath(np.array([[-1.0], [1.0]]), space="joint", time=np.array([0.0, 4.0]))
    force = hand_force(arm, planned_motion(arm, plan(arm, path)))
    (line,) = ripple(arm, force).lines
    assert line.order == 84
    assert line.hertz == pytest.approx(6.68451, rel=1e-5)
    assert line.per_metre == pytest.approx(66.8451, rel=1e-5)
    assert line.rms == pytest.approx(0.02 / 0.2 / np.sqrt(2.0), rel=1e-2)
    assert line.along_rms == pytest.approx(line.rms)
